"""The slope of the heat capacity of an entry that was read from a file: what its two ranges do where they meet."""

from __future__ import annotations

from typing import Final

import numpy as np

from heatwright.polynomial.nasa7 import Nasa7, slope_of
from heatwright.polynomial.quality import jumps_at_common
from heatwright.report.curves import WIDTH, polynomial_temperatures, temperature_scale
from heatwright.report.drawing import Drawing, Figure, Mark, Path, segments
from heatwright.report.layout import Scale, curve, fewest_rows, frame, nice_ticks, padded, temperature_ticks
from heatwright.report.species import Species, is_one_set

_SAMPLES: Final = 60
_STEP: Final = "; a step at the common temperature (dotted) is a kink of Cp°"


def slope(species: Species) -> Figure | None:
    """T·d(Cp°/R)/dT of both ranges, so that a kink is seen as a step; None where a table says more."""
    p = species.polynomial
    if p is None or species.table is not None:
        return None
    halves = _halves(p)
    values = [v for _, half in halves for v in half]
    low, high = padded(min(0.0, *values), max(0.0, *values), 0.1, 0.05)
    x, y = temperature_scale(p.t_low_K, p.t_high_K), Scale(low, high, 238.0, 26.0)
    ticks = temperature_ticks(p.t_low_K, p.t_high_K)
    plot = frame(x, y, ticks, nice_ticks(low, high), x_name="T / K", y_name="T d(Cp°/R)/dT")
    join = x(p.t_common_K)
    marks: list[Mark] = [
        *plot.marks,
        segments([((x.start, y(0.0)), (x.end, y(0.0)))], "zero"),
        *([] if is_one_set(p) else [segments([((join, y.start), (join, y.end))], "hair")]),
        Path(tuple(tuple(curve(x, y, T, half)) for T, half in halves), "polynomial"),
    ]
    temperatures = polynomial_temperatures(p)
    jumps, T = jumps_at_common(p), p.t_common_K
    return Figure(
        key="slope",
        heading="Slope of the heat capacity",
        title=f"Slope of the heat capacity of {species.name}",
        description="One set of coefficients serves the whole range, so nothing jumps."
        if is_one_set(p)
        else f"At {T:g} K, from the low to the high range, Cp°/R changes by {jumps.cp_R:.2g}, H°/RT by "
        f"{jumps.h_R_K / T:.2g}, S°/R by {jumps.s_R:.2g} and T d(Cp°/R)/dT by {T * jumps.dcp_R_K:.2g}.",
        caption=f"T d(Cp°/R)/dT of {species.name}{'' if is_one_set(p) else _STEP}.",
        source=species.source,
        drawing=Drawing(WIDTH, 274.0, tuple(marks)),
        columns=("T / K", "T d(Cp°/R)/dT"),
        rows=tuple((f"{t:g}", f"{t * p.dcp_R(t):z.4f}".replace("-", "−")) for t in temperatures),
        telling=fewest_rows(temperatures),
    )


def _halves(p: Nasa7) -> list[tuple[list[float], list[float]]]:
    """Temperatures and T·d(Cp/R)/dT of each range, both to the common temperature."""
    grids = np.geomspace(p.t_low_K, p.t_common_K, _SAMPLES), np.geomspace(p.t_common_K, p.t_high_K, _SAMPLES)
    return [(T.tolist(), (T * slope_of(a, T)).tolist()) for T, a in zip(grids, (p.low, p.high), strict=True)]
