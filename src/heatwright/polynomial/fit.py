"""From a heat capacity, an enthalpy and an entropy at 298.15 K to the printed digits of a two-range polynomial.

Only the ten heat-capacity coefficients are fitted.  Enthalpy and entropy follow from them by integration: a₆ and a₇ of
the low range from H and S at 298.15 K, those of the high range from continuity at the common temperature.  So the
values at 298.15 K are exact, both functions are continuous, and no weights between Cp, H and S have to be invented.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Literal

import numpy as np

from heatwright.constants import STANDARD_TEMPERATURE_K
from heatwright.findings import Finding, Refused, refuse
from heatwright.molecule import FloatArray
from heatwright.polynomial.common_temperature import (
    LEAST_WIDTH_K,
    USUAL_COMMON_K,
    best_common_temperature,
    common_limits,
)
from heatwright.polynomial.minimax import Minimax, design, minimax, minimax_of_many
from heatwright.polynomial.nasa7 import Coefficients, Nasa7, cp_of, h_of, round_coefficient, s_of

HeatCapacity = Callable[[FloatArray], FloatArray]
Rounding = Callable[[float], float]

LATEST_START_K = 300.0
"""A low range may start here at most, K: it has to carry the enthalpy of formation at 298.15 K."""


@dataclass(frozen=True, slots=True)
class Fit:
    """A fitted polynomial and how close it is to the best possible one.

    polynomial : with the coefficients that the text fields hold (nine significant digits).
    minimax_dCp_R : proven lower bound of max |ΔCp|/R over the range, for any two quartics joined with continuous value
        and slope at this common temperature.
    max_dCp_R : largest |ΔCp|/R of ``unrounded`` at the fitted temperatures.
    iterations : weighted least-squares solutions made.
    """

    polynomial: Nasa7
    minimax_dCp_R: float
    max_dCp_R: float
    iterations: int
    _exact: tuple[tuple[float, ...], float, float] = field(repr=False)

    @property
    def unrounded(self) -> Nasa7:
        """The polynomial before rounding."""
        p = self.polynomial
        return anchored(np.array(self._exact[0]), (p.t_low_K, p.t_common_K, p.t_high_K), *self._exact[1:])


def fit_nasa7(
    cp_R: HeatCapacity,
    h298_R_K: float,
    s298_R: float,
    *,
    t_low_K: float = 200.0,
    t_common_K: float | Literal["auto"] = USUAL_COMMON_K,
    t_high_K: float = 6000.0,
) -> Fit:
    """Fit the two-range polynomial whose largest error in Cp is as small as possible.

    Parameters
    ----------
    cp_R : Cp/R at an array of temperatures (K); called with temperatures inside [t_low_K, t_high_K] only.
    h298_R_K : H/R at 298.15 K, in K: the enthalpy of formation divided by R.
    s298_R : S/R at 298.15 K.
    t_low_K, t_common_K, t_high_K : the temperatures, K; ``"auto"`` looks for the best common temperature.

    Raises
    ------
    Refused
        ``temperature-range``, ``not-a-number`` (a value that is needed is not finite) or ``value-unfit``.

    >>> fit = fit_nasa7(lambda T: 2.5 + 0.0 * T, 25473.66, 13.79)
    >>> fit.polynomial.high[:5], fit.max_dCp_R
    ((2.5, 0.0, 0.0, 0.0, 0.0), 0.0)
    """
    check_temperatures(t_low_K, t_common_K, t_high_K)
    _check_anchors(h298_R_K, s298_R)
    function = _checked(cp_R)
    if t_common_K == "auto":
        t_common, best = _best_over_common(function, t_low_K, t_high_K)
    else:
        t_common, best = t_common_K, _fit_at(function, t_low_K, t_common_K, t_high_K)
    return _fit(best, (float(t_low_K), float(t_common), float(t_high_K)), h298_R_K, s298_R)


def fit_many(
    cp_R: FloatArray, h298_R_K: Sequence[float], s298_R: Sequence[float], temperatures_K: tuple[float, float, float]
) -> list[Fit | Refused]:
    """Many heat capacities fitted at once at one set of temperatures (low, common, high), as one by one.

    cp_R : (p, 2n), each row at the nodes of :func:`heatwright.polynomial.minimax.design` for these temperatures.
    What :func:`fit_nasa7` would raise for one of them takes its place.
    """
    check_temperatures(*temperatures_K)
    d = design(*temperatures_K)
    sound = np.flatnonzero(np.isfinite(cp_R).all(axis=1))
    found = dict(zip(sound.tolist(), minimax_of_many(d, cp_R[sound]) if sound.size else (), strict=True))
    fits: list[Fit | Refused] = []
    for i, (h298, s298) in enumerate(zip(h298_R_K, s298_R, strict=True)):
        try:
            _check_anchors(h298, s298)
            fits.append(_fit(found[i], temperatures_K, h298, s298) if i in found else _not_finite(d.nodes_K, cp_R[i]))
        except Refused as error:
            fits.append(error)
    return fits


def common_temperature(cp_R: HeatCapacity, t_low_K: float, t_high_K: float) -> float:
    """The common temperature that ``"auto"`` stands for, K.  Raises as :func:`fit_nasa7` does."""
    check_temperatures(t_low_K, "auto", t_high_K)
    return _best_over_common(_checked(cp_R), t_low_K, t_high_K)[0]


def _fit(best: Minimax, temperatures_K: tuple[float, float, float], h298_R_K: float, s298_R: float) -> Fit:
    rounded = anchored(best.coefficients, temperatures_K, h298_R_K, s298_R, rounding=round_coefficient)
    exact = (tuple(best.coefficients.tolist()), h298_R_K, s298_R)
    return Fit(rounded, best.lower_bound, best.error, best.iterations, exact)


def anchored(
    cp_coefficients: FloatArray,
    temperatures_K: tuple[float, float, float],
    h298_R_K: float,
    s298_R: float,
    *,
    rounding: Rounding = float,
) -> Nasa7:
    """The polynomial with the Cp/R coefficients b₁…b₅ | c₁…c₅ (10,) that has H/R (K) and S/R at 298.15 K as given.

    Each later coefficient is computed from the already rounded earlier ones, so that the rounding error of a field
    does not reach the anchors or the joint: a₆ and a₇ of the low range, then c₁ from the continuity of Cp, then a₆ and
    a₇ of the high range.
    """
    T0, Tm = STANDARD_TEMPERATURE_K, temperatures_K[1]
    b = [rounding(float(x)) for x in cp_coefficients[:5]]
    c = [rounding(float(x)) for x in cp_coefficients[5:]]
    start = _set(b)
    low = _set(b, rounding(h298_R_K - float(h_of(start, T0))), rounding(s298_R - float(s_of(start, T0))))
    c[0] = rounding(c[0] + float(cp_of(low, Tm) - cp_of(_set(c), Tm)))
    start = _set(c)
    a6, a7 = float(h_of(low, Tm) - h_of(start, Tm)), float(s_of(low, Tm) - s_of(start, Tm))
    return Nasa7(*temperatures_K, low, _set(c, rounding(a6), rounding(a7)))


def check_temperatures(t_low_K: float, t_common_K: float | Literal["auto"], t_high_K: float) -> None:
    """Refuse (``temperature-range``) temperatures that cannot carry a polynomial anchored at 298.15 K."""
    found = _range_fault(float(t_low_K), None if t_common_K == "auto" else float(t_common_K), float(t_high_K))
    if found is not None:
        raise Refused([found])


def _range_fault(t_low: float, t_common: float | None, t_high: float) -> Finding | None:
    lowest, highest = common_limits(t_low, t_high)
    # NaN fails every comparison and is refused with the rest.
    if not 0.0 < t_low <= LATEST_START_K:
        expected = f"a start above 0 and at most {LATEST_START_K:g} K"
        action = "The low range has to carry the enthalpy of formation, which belongs to 298.15 K"
    elif not (np.isfinite(t_high) and np.ceil(lowest) <= highest):
        expected = f"an end that leaves room for two ranges of {LEAST_WIDTH_K:g} K, joined above 298.15 K"
        action = "A quartic on a shorter range needs more digits than its fields have"
    elif t_common is not None and not lowest <= t_common <= highest:
        expected = f"a common temperature of {lowest:g} to {highest:g} K, above 298.15 K and apart from both ends"
        action = "Choose another common temperature, or let it be searched for"
    else:
        return None
    asked = " to ".join(f"{t:g}" for t in (t_low, t_common, t_high) if t is not None)
    return refuse("temperature-range", f"a range of {asked} K was asked for", expected=expected, action=action)


def _check_anchors(h298_R_K: float, s298_R: float) -> None:
    for name, value in (("H/R", h298_R_K), ("S/R", s298_R)):
        if not np.isfinite(value):
            raise Refused([refuse("not-a-number", f"{name} at 298.15 K is {value}", expected="a finite number")])


def _checked(cp_R: HeatCapacity) -> HeatCapacity:
    """*cp_R* with its values looked at: one finite number for each temperature."""

    def checked(T: FloatArray) -> FloatArray:
        cp = np.asarray(cp_R(T), dtype=np.float64)
        if cp.shape != T.shape:
            raise ValueError(f"Cp/R was asked for at {T.shape} temperatures and came back with shape {cp.shape}")
        if not np.isfinite(cp).all():
            raise _not_finite(T, cp)
        return cp

    return checked


def _not_finite(T: FloatArray, cp: FloatArray) -> Refused:
    where = float(T[~np.isfinite(cp)][0])
    return Refused([refuse("not-a-number", f"Cp/R at {where:g} K is not finite", expected="a finite number")])


def _fit_at(cp_R: HeatCapacity, t_low_K: float, t_common_K: float, t_high_K: float) -> Minimax:
    d = design(float(t_low_K), float(t_common_K), float(t_high_K))
    return minimax(d, cp_R(d.nodes_K))


def _best_over_common(cp_R: HeatCapacity, t_low_K: float, t_high_K: float) -> tuple[float, Minimax]:
    """The searched common temperature, or 1000 K when the full fit there is no worse."""
    found = best_common_temperature(cp_R, float(t_low_K), float(t_high_K))
    fits = {found: _fit_at(cp_R, t_low_K, found, t_high_K)}
    lowest, highest = common_limits(t_low_K, t_high_K)
    if lowest <= USUAL_COMMON_K <= highest:
        fits.setdefault(USUAL_COMMON_K, _fit_at(cp_R, t_low_K, USUAL_COMMON_K, t_high_K))
    best = min(fits, key=lambda t: (fits[t].error, t))
    return best, fits[best]


def _set(cp: list[float], a6: float = 0.0, a7: float = 0.0) -> Coefficients:
    a1, a2, a3, a4, a5 = cp
    return a1, a2, a3, a4, a5, a6, a7
