"""Figures of the functions: heat capacity with the points of the table, and what the polynomial leaves over."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Final

import numpy as np

from heatwright.constants import GAS_CONSTANT_J_MOL_K
from heatwright.polynomial.nasa7 import Nasa7, cp_of
from heatwright.report.drawing import Dots, Drawing, Figure, Mark, Path, Point, Words, area, line, segments
from heatwright.report.layout import (
    TELLING_K,
    Frame,
    Room,
    Scale,
    along,
    curve,
    fewest_rows,
    frame,
    nice_ticks,
    padded,
    round_below,
    temperature_ticks,
)
from heatwright.report.species import Residuals, Species, is_one_set, range_text

WIDTH: Final = 420.0
LEFT: Final = 46.0
RIGHT: Final = 402.0
_SAMPLES: Final = 50
_FEWER: Final = 26


def temperature_scale(low_K: float, high_K: float, right: float = RIGHT) -> Scale:
    """The axis of temperature that all figures share: logarithmic."""
    return Scale(low_K, high_K, LEFT, right, log=True)


def heat_capacity(species: Species, *, brief: bool = False) -> Figure | None:
    """Cp°/R of the polynomial with the points of the table; None when there is neither.

    brief : drawn with half as many points.
    """
    p = species.polynomial
    T_table, cp_table = _table_points(species)
    ends = (p.t_low_K, p.t_high_K) if p else (T_table[0], T_table[-1]) if len(T_table) > 1 else None
    if ends is None:
        return None
    x = temperature_scale(*ends)
    halves = _halves(p, _FEWER if brief else _SAMPLES) if p else [list(zip(T_table, cp_table, strict=True))]
    everything = [*(cp for half in halves for _, cp in half), *cp_table]
    least, most = padded(min(everything), max(everything), 0.1, 0.5)
    limit = species.classical_limit_R
    if limit is not None and limit < most + 0.35 * (most - least):
        most = max(most, limit + 0.08 * (most - least))
    y = Scale(least, most, 238.0, 26.0)
    plot = frame(x, y, temperature_ticks(*ends), nice_ticks(least, most), x_name="T / K", y_name="Cp°/R")
    curves = [curve(x, y, *zip(*half, strict=True)) for half in halves]
    dots = curve(x, y, T_table, cp_table)
    marks = [*plot.marks, *_cp_marks(species, plot, curves, dots, limit, brief=brief)]
    columns, rows = _function_rows(species)
    return Figure(
        key="cp",
        heading="Heat capacity",
        title=f"Heat capacity of {species.name}",
        description=_cp_description(species, T_table, cp_table),
        caption=_cp_caption(species),
        source=species.source,
        drawing=Drawing(WIDTH, 274.0, tuple(marks)),
        columns=columns,
        rows=rows,
        telling=fewest_rows([float(row[0]) for row in rows]),
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


def _halves(p: Nasa7, samples: int) -> list[list[tuple[float, float]]]:
    """(T, Cp/R) along each of the two ranges, both to the common temperature, so that a jump there is seen."""
    joint = np.geomspace(p.t_low_K, p.t_common_K, samples), np.geomspace(p.t_common_K, p.t_high_K, samples)
    each = zip(joint, (p.low, p.high), strict=True)
    return [list(zip(T.tolist(), cp_of(a, T).tolist(), strict=True)) for T, a in each]


def _cp_marks(
    species: Species, plot: Frame, curves: list[list[Point]], dots: list[Point], limit: float | None, *, brief: bool
) -> list[Mark]:
    p, (left, top, right, bottom) = species.polynomial, plot.box
    room = Room((left + 3.0, top - 4.0, right, bottom - 3.0))
    for half in curves:
        room.curve(half)
    room.points += dots
    marks: list[Mark] = list(_unsure(species, plot))
    if limit is not None and plot.y.low < limit < plot.y.high:
        at = plot.y(limit)
        marks.append(segments([((left, at), (right, at))], "limit"))
        room.curve([(left, at), (right, at)])
    joined = p is not None and not is_one_set(p)
    if p is not None and joined:
        join = plot.x(p.t_common_K)
        marks.append(segments([((join, bottom), (join, top))], "hair"))
        room.curve([(join, bottom), (join, top)])
    if p is not None:
        marks.append(Path(tuple(map(tuple, curves)), "polynomial"))
    if dots:
        marks += [Dots(tuple(dots), "point")] if brief else [Dots(tuple(dots), "ring"), Dots(tuple(dots), "hole")]
    named = (
        ("polynomial", "of-polynomial", along([q for half in curves for q in half], False, 0.72)) if p else None,
        ("table", "of-table", along(dots, True, 0.4)) if dots else None,
        (f"classical limit {limit:g}", "quiet", [((left + 6.0, plot.y(limit) - 5.0), "start"),
         ((left + 6.0, plot.y(limit) + 13.0), "start")]) if limit and plot.y.low < limit < plot.y.high else None,
        (f"ranges meet, {p.t_common_K:g} K", "quiet", _beside(plot.x(p.t_common_K), plot)) if p and joined else None,
    )  # fmt: skip
    for what in named:
        words = room.place(*what) if what else None
        marks += [words] if words else []
    return marks


def _unsure(species: Species, plot: Frame) -> Iterator[Mark]:
    """The band of two standard uncertainties about the table, where there are any."""
    table = species.table
    if table is None or not table.u_cp_J_mol_K:
        return
    R = GAS_CONSTANT_J_MOL_K
    inside = [i for i, T in enumerate(table.T_K) if plot.x.low <= T <= plot.x.high]
    T = [table.T_K[i] for i in inside]
    edges = [
        curve(plot.x, plot.y, T, [(table.cp_J_mol_K[i] + sign * table.u_cp_J_mol_K[i]) / R for i in inside])
        for sign in (2.0, -2.0)
    ]
    yield area([*edges[0], *reversed(edges[1])], "band")


def _beside(x: float, plot: Frame) -> list[tuple[Point, str]]:
    _, top, _, bottom = plot.box
    rows = [bottom - 7.0, top + 10.0, *np.linspace(bottom - 20.0, top + 20.0, 9).tolist()]
    return [((x + shift, y), anchor) for y in rows for shift, anchor in ((5.0, "start"), (-5.0, "end"))]


def _cp_description(species: Species, T: Sequence[float], cp: Sequence[float]) -> str:
    p, parts = species.polynomial, []
    if p is not None:
        ends = [p.cp_R(t) for t in (p.t_low_K, p.t_common_K, p.t_high_K)]
        meet = "" if is_one_set(p) else f", {ends[1]:.3f} at {p.t_common_K:g} K, where its two ranges meet,"
        parts.append(
            f"The polynomial's Cp°/R is {ends[0]:.3f} at {p.t_low_K:g} K{meet} and {ends[2]:.3f} at {p.t_high_K:g} K."
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
        unsure = ", shaded: two standard uncertainties" if species.table.u_cp_J_mol_K else ""
        what.append(f"circles: table from the partition function{unsure}")
    if p is not None:
        kind = "polynomial of one set of coefficients" if is_one_set(p) else "two-range polynomial"
        what.append(f"line: {kind}, {range_text(p)} K")
    if species.classical_limit_R is not None:
        what.append(f"classical limit {species.classical_limit_R:g}")
    return f"{'; '.join(what)}."


def _function_rows(species: Species) -> tuple[tuple[str, ...], tuple[tuple[str, ...], ...]]:
    """Columns and rows of the functions at the temperatures of the table, else those of the polynomial."""
    p, table, R = species.polynomial, species.table, GAS_CONSTANT_J_MOL_K
    named: list[tuple[str, Sequence[float]]] = []
    if table is not None:
        T = table.T_K
        named = [("Cp°, table", table.cp_J_mol_K), ("± standard uncertainty", table.u_cp_J_mol_K)]
        inside = p is not None and p.t_low_K <= T[0] and T[-1] <= p.t_high_K
        named += [("Cp°, polynomial", (R * p.cp_R(np.array(T))).tolist())] if p is not None and inside else []
        named += [("S°", table.s_J_mol_K), ("H°−H°(298.15), kJ/mol", table.h_minus_h298_kJ_mol)]
    elif p is not None:
        T = polynomial_temperatures(p)
        t = np.array(T)
        named = [("Cp°", (R * p.cp_R(t)).tolist()), ("S°", (R * p.s_R(t)).tolist())]
        named.append(("H°, kJ/mol", (R * p.h_R(t) / 1000.0).tolist()))
    named = [(name, values) for name, values in named if values]
    cells = ([f"{v:z.3f}".replace("-", "−") for v in values] for _, values in named)
    return ("T / K", *(name for name, _ in named)), tuple(zip((f"{x:g}" for x in T), *cells, strict=True))


def polynomial_temperatures(p: Nasa7) -> tuple[float, ...]:
    """Round temperatures along the range of a polynomial, 298.15 K, both ends and the joint among them."""
    ends = (p.t_low_K, p.t_common_K, p.t_high_K)
    return tuple(sorted({T for T in TELLING_K if p.t_low_K <= T <= p.t_high_K} | set(ends)))


def residual_strips(species: Species, *, brief: bool = False) -> Figure | None:
    """ΔCp/R, ΔH/RT and ΔS/R of the polynomial one below the other, with the band that no polynomial can leave.

    brief : drawn through the points of the grid alone.
    """
    r, p = species.residuals, species.polynomial
    if r is None or p is None:
        return None
    x = temperature_scale(p.t_low_K, p.t_high_K)
    ticks = temperature_ticks(p.t_low_K, p.t_high_K)
    strips = (("1000 ΔCp°/R", r.dcp_R, r.bound_dcp_R), ("1000 ΔH°/RT", r.dh_RT, None), ("1000 ΔS°/R", r.ds_R, None))
    marks: list[Mark] = []
    for i, (name, values, bound) in enumerate(strips):
        bottom = 84.0 + 92.0 * i
        marks += _strip(name, r.T_K, values, bound, x, (bottom, bottom - 62.0), ticks, last=i == 2, brief=brief)
    join = x(p.t_common_K)
    marks.append(segments([((join, 84.0 + 92.0 * i), (join, 22.0 + 92.0 * i)) for i in range(3)], "hair"))
    worst = [max(map(abs, values)) for _, values, _ in strips]
    largest = {_where(r, values) for _, values, _ in strips}
    rows = _residual_rows(r, largest)
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
        columns=("T / K", "1000 ΔCp°/R", "1000 ΔH°/RT", "1000 ΔS°/R"),
        rows=tuple(row for _, row in rows),
        telling=tuple(i for i, (T, _) in enumerate(rows) if T in largest),
    )


def _residual_rows(r: Residuals, largest: set[float]) -> list[tuple[float, tuple[str, ...]]]:
    """Every eighth temperature, and those of the largest residuals, each with its row."""
    return [
        (T, (f"{T:g}", *(f"{1000.0 * v:z.2f}".replace("-", "−") for v in row)))
        for i, (T, *row) in enumerate(zip(r.T_K, r.dcp_R, r.dh_RT, r.ds_R, strict=True))
        if i % 8 == 0 or T in largest or i == len(r.T_K) - 1
    ]


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
    brief: bool,
) -> list[Mark]:
    """One strip, in thousandths: its name and largest value above it, the band, the zero line and the curve."""
    worst = max(map(abs, values))
    reach = 1180.0 * max(worst, bound or 0.0, 1e-5)
    y = Scale(-reach, reach, *ends)
    step = round_below(0.9 * reach)
    plot = frame(x, y, ticks, (-step, 0.0, step), x_name="T / K" if last else "")
    marks = list(plot.marks)
    left, right, top = x.start, x.end, ends[1]
    header = f"largest {1000.0 * worst:.3g}"
    if bound is not None:
        edge = [y(-1000.0 * bound), y(1000.0 * bound)]
        marks.append(area([(left, edge[0]), (right, edge[0]), (right, edge[1]), (left, edge[1])], "band"))
        marks.append(segments([((left, e), (right, e)) for e in edge], "bound"))
        header += f" · best possible {1000.0 * bound:.3g} (band)"
    marks.append(segments([((left, y(0.0)), (right, y(0.0)))], "zero"))
    thousandths = [1000.0 * v for v in values]
    marks.append(line(curve(x, y, *((T, thousandths) if brief else _between(T, thousandths))), "polynomial"))
    marks.append(Words((left, top - 7.0), name, "name"))
    marks.append(Words((right, top - 7.0), header, "quiet", "end"))
    return marks


def _between(T: Sequence[float], values: Sequence[float]) -> tuple[list[float], list[float]]:
    """A smooth curve with one more point in each interval, by the cubic through the four around it (in ln T)."""
    if len(T) < 4:
        return list(T), list(values)
    x = np.log(np.array(T))
    first = np.clip(np.arange(len(T) - 1) - 1, 0, len(T) - 4)
    nodes, heights = (np.array(v)[first[:, None] + np.arange(4)] for v in (x, values))
    middle = (x[1:] + x[:-1]) / 2.0
    between = np.zeros(len(middle))
    for k in range(4):
        others = [m for m in range(4) if m != k]
        weight = np.prod([(middle - nodes[:, m]) / (nodes[:, k] - nodes[:, m]) for m in others], axis=0)
        between += weight * heights[:, k]
    every = np.empty(2 * len(T) - 1), np.empty(2 * len(T) - 1)
    every[0][::2], every[0][1::2] = T, np.exp(middle)
    every[1][::2], every[1][1::2] = values, between
    return every[0].tolist(), every[1].tolist()
