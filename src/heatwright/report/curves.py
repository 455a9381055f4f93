"""Figures of the functions: heat capacity with the points of the table, and what the polynomial leaves over."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np

from heatwright.constants import GAS_CONSTANT_J_MOL_K
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.report.drawing import Dots, Drawing, Figure, Mark, Point, Words, area, line, segments
from heatwright.report.layout import (
    Frame,
    Room,
    Scale,
    along,
    frame,
    nice_ticks,
    padded,
    round_below,
    temperature_ticks,
)
from heatwright.report.species import Residuals, Species

WIDTH: Final = 420.0
LEFT: Final = 46.0
RIGHT: Final = 408.0
_SAMPLES: Final = 90


def temperature_scale(low_K: float, high_K: float, right: float = RIGHT) -> Scale:
    """The axis of temperature that all figures share: logarithmic."""
    return Scale(low_K, high_K, LEFT, right, log=True)


def heat_capacity(species: Species) -> Figure | None:
    """Cp°/R of the polynomial with the points of the table; None when there is neither."""
    p, table = species.polynomial, species.table
    T_table, cp_table = _table_points(species)
    ends = (p.t_low_K, p.t_high_K) if p else (T_table[0], T_table[-1]) if len(T_table) > 1 else None
    if ends is None:
        return None
    x = temperature_scale(*ends)
    T = _grid(p) if p else np.array(T_table)
    cp = p.cp_R(T) if p else np.array(cp_table)
    everything = [*cp.tolist(), *cp_table]
    least, most = padded(min(everything), max(everything), 0.1, 0.5)
    limit = species.classical_limit_R
    if limit is not None and limit < most + 0.35 * (most - least):
        most = max(most, limit + 0.08 * (most - least))
    y = Scale(least, most, 238.0, 26.0)
    plot = frame(x, y, temperature_ticks(*ends), nice_ticks(least, most), x_name="T / K", y_name="Cp°/R")
    curve = [(x(t), y(c)) for t, c in zip(T.tolist(), cp.tolist(), strict=True)]
    dots = [(x(t), y(c)) for t, c in zip(T_table, cp_table, strict=True)]
    marks = [*plot.marks, *_cp_marks(species, plot, curve, dots, limit)]
    rows = _cp_rows(p, T_table, cp_table)
    return Figure(
        key="cp",
        heading="Heat capacity",
        title=f"Heat capacity of {species.name}",
        description=_cp_description(species, T_table, cp_table),
        caption=_cp_caption(species),
        source=species.source,
        drawing=Drawing(WIDTH, 274.0, tuple(marks)),
        columns=("T / K", *(("table, Cp°/R",) if table else ()), *(("polynomial, Cp°/R",) if p else ()),
                 *(("difference",) if table and p else ())),
        rows=rows,
    )  # fmt: skip


def _table_points(species: Species) -> tuple[list[float], list[float]]:
    """Temperatures and Cp°/R of the table inside the range of the polynomial."""
    p, table = species.polynomial, species.table
    if table is None:
        return [], []
    inside = [
        (T, cp / GAS_CONSTANT_J_MOL_K)
        for T, cp in zip(table.T_K, table.cp_J_mol_K, strict=True)
        if p is None or p.t_low_K <= T <= p.t_high_K
    ]
    return [T for T, _ in inside], [cp for _, cp in inside]


def _grid(p: Nasa7) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    """Temperatures along the curve, both ends and the joint among them."""
    return np.unique(np.append(np.geomspace(p.t_low_K, p.t_high_K, _SAMPLES), (p.t_low_K, p.t_common_K, p.t_high_K)))


def _cp_marks(species: Species, plot: Frame, curve: list[Point], dots: list[Point], limit: float | None) -> list[Mark]:
    p, (left, top, right, bottom) = species.polynomial, plot.box
    room = Room((left + 3.0, top - 4.0, right, bottom - 3.0))
    room.curve(curve)
    room.points += dots
    marks: list[Mark] = []
    if limit is not None and plot.y.low < limit < plot.y.high:
        at = plot.y(limit)
        marks.append(segments([((left, at), (right, at))], "limit"))
        room.curve([(left, at), (right, at)])
    if p is not None:
        join = plot.x(p.t_common_K)
        marks.append(segments([((join, bottom), (join, top))], "hair"))
        room.curve([(join, bottom), (join, top)])
        marks.append(line(curve, "polynomial"))
    marks += [Dots(tuple(dots), "ring"), Dots(tuple(dots), "hole")] if dots else []
    named = (
        ("polynomial", "of-polynomial", along(curve, False, 0.72)) if p else None,
        ("table", "of-table", along(dots, True, 0.4)) if dots else None,
        (f"classical limit {limit:g}", "quiet", [((left + 6.0, plot.y(limit) - 5.0), "start"),
         ((left + 6.0, plot.y(limit) + 13.0), "start")]) if limit and plot.y.low < limit < plot.y.high else None,
        (f"ranges meet, {p.t_common_K:g} K", "quiet", _beside(plot.x(p.t_common_K), plot)) if p else None,
    )  # fmt: skip
    for what in named:
        words = room.place(*what) if what else None
        marks += [words] if words else []
    return marks


def _beside(x: float, plot: Frame) -> list[tuple[Point, str]]:
    _, top, _, bottom = plot.box
    rows = [bottom - 7.0, top + 10.0, *np.linspace(bottom - 20.0, top + 20.0, 9).tolist()]
    return [((x + shift, y), anchor) for y in rows for shift, anchor in ((5.0, "start"), (-5.0, "end"))]


def _cp_description(species: Species, T: Sequence[float], cp: Sequence[float]) -> str:
    p, parts = species.polynomial, []
    if p is not None:
        ends = [p.cp_R(t) for t in (p.t_low_K, p.t_common_K, p.t_high_K)]
        parts.append(
            f"The polynomial's Cp°/R is {ends[0]:.3f} at {p.t_low_K:g} K, {ends[1]:.3f} at {p.t_common_K:g} K, where "
            f"its two ranges meet, and {ends[2]:.3f} at {p.t_high_K:g} K."
        )
    if T:
        parts.append(f"The table has {len(T)} points from {cp[0]:.3f} at {T[0]:g} K to {cp[-1]:.3f} at {T[-1]:g} K.")
    if species.largest_dcp_R is not None:
        parts.append(f"The two differ by at most {species.largest_dcp_R:.2g} R.")
    return " ".join(parts)


def _cp_caption(species: Species) -> str:
    p = species.polynomial
    what = [f"Heat capacity Cp°/R of {species.name}"]
    if species.table:
        what.append("circles: table from the partition function")
    if p is not None:
        what.append(f"line: two-range polynomial, {p.t_low_K:g}–{p.t_common_K:g}–{p.t_high_K:g} K")
    if species.classical_limit_R is not None:
        what.append(f"classical limit {species.classical_limit_R:g}")
    return f"{'; '.join(what)}."


def _cp_rows(p: Nasa7 | None, T: Sequence[float], cp: Sequence[float]) -> tuple[tuple[str, ...], ...]:
    if p is None:
        return tuple((f"{t:g}", f"{c:.4f}") for t, c in zip(T, cp, strict=True))
    if not T:
        grid = [p.t_low_K, *nice_ticks(p.t_low_K, p.t_high_K, 24), p.t_common_K, p.t_high_K]
        return tuple((f"{t:g}", f"{p.cp_R(t):.4f}") for t in sorted(set(grid)))
    fitted = [p.cp_R(t) for t in T]
    return tuple(
        (f"{t:g}", f"{c:.4f}", f"{f:.4f}", f"{f - c:+.4f}".replace("-", "−"))
        for t, c, f in zip(T, cp, fitted, strict=True)
    )


def residual_strips(species: Species) -> Figure | None:
    """ΔCp/R, ΔH/RT and ΔS/R of the polynomial one below the other, with the band that no polynomial can leave."""
    r, p = species.residuals, species.polynomial
    if r is None or p is None:
        return None
    x = temperature_scale(p.t_low_K, p.t_high_K)
    ticks = temperature_ticks(p.t_low_K, p.t_high_K)
    strips = (("ΔCp°/R", r.dcp_R, r.bound_dcp_R), ("ΔH°/RT", r.dh_RT, None), ("ΔS°/R", r.ds_R, None))
    marks: list[Mark] = []
    for i, (name, values, bound) in enumerate(strips):
        bottom = 84.0 + 92.0 * i
        marks += _strip(name, r.T_K, values, bound, x, (bottom, bottom - 62.0), ticks, last=i == 2)
    join = x(p.t_common_K)
    marks.append(segments([((join, 84.0 + 92.0 * i), (join, 22.0 + 92.0 * i)) for i in range(3)], "hair"))
    worst = [max(map(abs, values)) for _, values, _ in strips]
    no_less = "" if r.bound_dcp_R is None else f" No polynomial of this kind stays below {r.bound_dcp_R:.2g} in Cp°/R."
    return Figure(
        key="residuals",
        heading="Polynomial less table",
        title=f"Polynomial less table, {species.name}",
        description=f"The largest residuals are {worst[0]:.2g} in Cp°/R at {_where(r, r.dcp_R):g} K, {worst[1]:.2g} in "
        f"H°/RT and {worst[2]:.2g} in S°/R.{no_less}",
        caption=f"Residuals of the polynomial of {species.name} against the functions it was fitted to; band: proven "
        "lower bound of the largest error in Cp°/R of any two quartics joined with continuous value and slope; dotted: "
        "common temperature.",
        source=species.source,
        drawing=Drawing(WIDTH, 304.0, tuple(marks)),
        columns=("T / K", "ΔCp°/R", "ΔH°/RT", "ΔS°/R"),
        rows=tuple(
            (f"{T:g}", *(f"{v:+.2e}".replace("-", "−") for v in row))
            for T, *row in zip(r.T_K, r.dcp_R, r.dh_RT, r.ds_R, strict=True)
        ),
    )


def _where(r: Residuals, values: Sequence[float]) -> float:
    return r.T_K[max(range(len(values)), key=lambda i: abs(values[i]))]


def _strip(
    name: str,
    T: Sequence[float],
    values: Sequence[float],
    bound: float | None,
    x: Scale,
    ends: tuple[float, float],
    ticks: Sequence[float],
    *,
    last: bool,
) -> list[Mark]:
    """One strip: its name and largest value above it, the band, the zero line and the curve."""
    worst = max(map(abs, values))
    reach = 1.18 * max(worst, bound or 0.0, 1e-9)
    y = Scale(-reach, reach, *ends)
    step = round_below(0.9 * reach)
    plot = frame(x, y, ticks, (-step, 0.0, step), x_name="T / K" if last else "")
    marks = list(plot.marks)
    left, right, top = x.start, x.end, ends[1]
    header = f"largest {worst:.3g}"
    if bound is not None:
        edge = [y(-bound), y(bound)]
        marks.append(area([(left, edge[0]), (right, edge[0]), (right, edge[1]), (left, edge[1])], "band"))
        marks.append(segments([((left, e), (right, e)) for e in edge], "bound"))
        header += f" · best possible {bound:.3g} (band)"
    marks.append(segments([((left, y(0.0)), (right, y(0.0)))], "zero"))
    marks.append(line([(x(t), y(v)) for t, v in zip(T, values, strict=True)], "polynomial"))
    marks.append(Words((left, top - 7.0), name, "name"))
    marks.append(Words((right, top - 7.0), header, "quiet", "end"))
    return marks
