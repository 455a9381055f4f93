"""Where to join the two ranges: the search for the common temperature with the smallest fit error.

The error as a function of the common temperature has several local minima (up to nine were seen), so the whole
interval is scanned before anything is refined.  All candidates are fitted together.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import STANDARD_TEMPERATURE_K
from heatwright.polynomial.minimax import NOISE, design, minimax_errors

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

USUAL_COMMON_K: Final = 1000.0
"""The common temperature most files have, and the one preferred among equals."""
LEAST_WIDTH_K: Final = 100.0
LEAST_END_RATIO: Final = 1.2
"""Each range has to be 100 K wide, and the high one has to end at 1.2 times the common temperature: the coefficients
of a quartic on less are so large that nine digits no longer carry it."""

_NODES: Final = 24
_ITERATIONS: Final = 12
_STEP_K: Final = 100.0
_BASINS: Final = 3


def best_common_temperature(cp_R: Callable[[FloatArray], FloatArray], t_low_K: float, t_high_K: float) -> float:
    """The common temperature, a whole number of kelvin, at which *cp_R* on [t_low, t_high] is fitted best.

    A scan in steps of 100 K (fewer in a short range), then quarter steps around the three best of it.  1000 K is among
    the candidates wherever it is possible, and is taken when the heat capacity does not care.

    cp_R : Cp/R at an array of temperatures in K.
    """
    first, last = search_interval(t_low_K, t_high_K)
    step = min(_STEP_K, max(4.0, (last - first) / 8.0))
    coarse = _whole(np.append(np.arange(first, last + 1.0, step), _nearest(USUAL_COMMON_K, first, last)))
    errors = _errors(cp_R, t_low_K, coarse, t_high_K)
    best = sorted(coarse, key=lambda t: _rank(t, errors))[:_BASINS]
    around = (b + quarter * step / 4.0 for b in best for quarter in (-3, -2, -1, 1, 2, 3))
    fine = [t for t in _whole(around) if first <= t <= last and t not in errors]
    errors |= _errors(cp_R, t_low_K, fine, t_high_K)
    return min(errors, key=lambda t: _rank(t, errors))


def common_limits(t_low_K: float, t_high_K: float) -> tuple[float, float]:
    """Lowest and highest common temperature (K) that the ends of the range allow; lowest > highest if there is none."""
    above_standard = float(np.nextafter(STANDARD_TEMPERATURE_K, np.inf))
    lowest = max(t_low_K + LEAST_WIDTH_K, above_standard)
    return lowest, min(t_high_K - LEAST_WIDTH_K, t_high_K / LEAST_END_RATIO)


def search_interval(t_low_K: float, t_high_K: float) -> tuple[float, float]:
    """First and last common temperature that the search looks at, K: 600 to 2000 K where the range allows."""
    lowest, highest = common_limits(t_low_K, t_high_K)
    lowest, highest = float(np.ceil(lowest)), float(np.floor(highest))
    upper = max(min(2000.0, 0.6 * t_high_K), 0.2 * t_high_K)
    first = _nearest(600.0, lowest, highest)
    return first, max(first, float(np.floor(min(upper, highest))))


def _nearest(t: float, first: float, last: float) -> float:
    return float(min(max(t, first), last))


def _whole(temperatures: Iterable[float]) -> list[float]:
    return sorted({float(round(t)) for t in temperatures})


def _rank(t: float, errors: dict[float, float]) -> tuple[float, float, float]:
    """Smaller is better: the error to the digits that mean something, then closeness to 1000 K."""
    return float(f"{errors[t]:.6e}"), abs(t - USUAL_COMMON_K), t


def _errors(
    cp_R: Callable[[FloatArray], FloatArray], t_low_K: float, candidates: list[float], t_high_K: float
) -> dict[float, float]:
    """Approximate minimax error by common temperature; zero where it is rounding only."""
    if not candidates:
        return {}
    designs = [design(t_low_K, t, t_high_K, _NODES) for t in candidates]
    nodes = np.concatenate([d.nodes_K for d in designs])
    cp = np.asarray(cp_R(nodes), dtype=np.float64).reshape(len(designs), -1)
    f = cp - cp[:, _NODES, None]
    errors = minimax_errors(np.stack([d.Q for d in designs]), f, _ITERATIONS)
    errors[errors <= NOISE * np.abs(cp).max()] = 0.0
    return dict(zip(candidates, errors.tolist(), strict=True))
