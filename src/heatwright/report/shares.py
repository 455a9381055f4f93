"""What each contribution adds to Cp° and S°, stacked, and the populations of conformers."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from heatwright.report.curves import LEFT, WIDTH, temperature_scale
from heatwright.report.drawing import Drawing, Figure, Mark, Point, Words, area, line
from heatwright.report.layout import (
    Scale,
    curve,
    fewest_rows,
    frame,
    nice_ticks,
    padded,
    spread,
    telling_rows,
    temperature_ticks,
)
from heatwright.report.palette import series
from heatwright.report.species import Species

STACK_RIGHT: Final = 288.0
"""Where the frame ends to leave room for names at the right."""
_GAP: Final = 14.0


def stacked_shares(species: Species, quantity: str) -> Figure | None:
    """The shares in ``"Cp"`` or ``"S"`` above one another; None without a table of shares."""
    table = species.table
    if table is None or len(table.T_K) < 2 or not table.shares:
        return None
    shares = [(name, cp if quantity == "Cp" else s) for name, cp, s in table.shares]
    shown = [(name, values) for name, values in shares if max(map(abs, values)) > 1e-9]
    if not shown:
        return None
    layers = _layers([values for _, values in shown])
    low = min(0.0, *(v for lower, _ in layers for v in lower))
    high = max(v for _, upper in layers for v in upper)
    ends = (table.T_K[0], table.T_K[-1])
    x, y = temperature_scale(*ends, STACK_RIGHT), Scale(*padded(low, high, 0.05), 238.0, 26.0)
    if low == 0.0:
        y = Scale(0.0, y.high, 238.0, 26.0)
    name = f"{quantity}°"
    plot = frame(x, y, temperature_ticks(*ends), nice_ticks(y.low, y.high), x_name="T / K", y_name=f"{name} / J/mol/K")
    marks: list[Mark] = list(plot.marks)
    wanted = []
    for i, (lower, upper) in enumerate(layers):
        top, foot = curve(x, y, table.T_K, upper), curve(x, y, table.T_K, lower)
        marks += [area([*top, *reversed(foot)], f"area{series(i)}"), line(top, f"edge{series(i)}")]
        wanted.append((top[-1][1] + foot[-1][1]) / 2.0)
    marks += named_at_right([n for n, _ in shown], wanted, plot.box[1:4:2])
    shown_rows = telling_rows(table.T_K)
    total = [sum(column) for column in zip(*(values for _, values in shares), strict=True)]
    words = ", ".join(f"{n} {values[-1]:.1f}" for n, values in shown)
    return Figure(
        key="cp-shares" if quantity == "Cp" else "s-shares",
        heading=f"Contributions to {name}",
        title=f"Contributions to {name} of {species.name}",
        description=f"{name} is {total[0]:.1f} J/mol/K at {ends[0]:g} K and {total[-1]:.1f} at {ends[1]:g} K, and "
        f"there the contributions are {words}.",
        caption=f"Contributions to {name} of {species.name}, stacked in the order of the names at the right.",
        source=species.source,
        drawing=Drawing(WIDTH, 274.0, tuple(marks)),
        columns=("T / K", *(n for n, _ in shares), "sum"),
        rows=tuple(
            (f"{table.T_K[i]:g}", *(_decimals(values[i]) for _, values in shares), _decimals(total[i]))
            for i in shown_rows
        ),
        telling=fewest_rows([table.T_K[i] for i in shown_rows]),
    )


def _decimals(value: float) -> str:
    return f"{value:z.2f}".replace("-", "−")


def _layers(columns: Sequence[Sequence[float]]) -> list[tuple[list[float], list[float]]]:
    """Lower and upper edge of each layer; negative shares hang below zero."""
    n = len(columns[0])
    plus, minus = [0.0] * n, [0.0] * n
    layers = []
    for values in columns:
        lower, upper = [], []
        for k, v in enumerate(values):
            base = plus if v >= 0.0 else minus
            lower.append(min(base[k], base[k] + v))
            upper.append(max(base[k], base[k] + v))
            base[k] += v
        layers.append((lower, upper))
    return layers


def named_at_right(names: Sequence[str], wanted: Sequence[float], ends: Sequence[float]) -> list[Mark]:
    """Names beside the ends of lines at the right of the frame, moved apart, each with a short leader to its line."""
    gap = min(_GAP, (ends[1] - ends[0]) / max(len(names), 1))
    at = spread(wanted, gap, ends[0] + 4.0, ends[1] - 2.0)
    marks: list[Mark] = []
    for i, (name, want, y) in enumerate(zip(names, wanted, at, strict=True)):
        leader: list[Point] = [(STACK_RIGHT + 2.0, want), (STACK_RIGHT + 8.0, y), (STACK_RIGHT + 12.0, y)]
        marks += [line(leader, "leader"), Words((STACK_RIGHT + 15.0, y + 3.8), shortened(name), f"of{series(i)}")]
    return marks


def shortened(name: str, most: int = 16) -> str:
    """A name that fits beside a frame.

    >>> shortened("vibration and rotation")
    'vibration and r…'
    """
    return name if len(name) <= most else f"{name[: most - 1]}…"


def populations(species: Species) -> Figure | None:
    """The fraction of each conformer against temperature."""
    table, conformers = species.table, species.conformers
    if table is None or len(conformers) < 2 or len(table.T_K) < 2:
        return None
    ends = (table.T_K[0], table.T_K[-1])
    x, y = temperature_scale(*ends, STACK_RIGHT), Scale(0.0, 1.0, 238.0, 26.0)
    ticks = (0.0, 0.25, 0.5, 0.75, 1.0)
    plot = frame(x, y, temperature_ticks(*ends), ticks, x_name="T / K", y_name="fraction")
    marks: list[Mark] = list(plot.marks)
    names = [f"{i}, {c.relative_energy_kJ_mol:.2f} kJ/mol" for i, c in enumerate(conformers, start=1)]
    for i, c in enumerate(conformers):
        marks.append(line(curve(x, y, table.T_K, c.populations), f"line{series(i)}"))
    marks += named_at_right(names, [y(c.populations[-1]) for c in conformers], plot.box[1:4:2])
    each = "; ".join(
        f"{i}: {c.file}, {c.relative_energy_kJ_mol:.2f} kJ/mol above the lowest"
        f"{f', {c.degeneracy} mirror images' if c.degeneracy > 1 else ''}"
        for i, c in enumerate(conformers, start=1)
    )
    shown_rows = telling_rows(table.T_K)
    at_298 = [table.at_298(c.populations) for c in conformers]
    said = ", ".join(f"{p:.3f}" for p in at_298 if p is not None)
    return Figure(
        key="conformers",
        heading="Conformers",
        title=f"Conformers of {species.name}",
        description=f"Populations at 298.15 K: {said}." if said else "Populations against temperature.",
        caption=f"Equilibrium populations of the conformers of {species.name}, mirror images together. {each}.",
        source=species.source,
        drawing=Drawing(WIDTH, 274.0, tuple(marks)),
        columns=("T / K", *(str(i) for i in range(1, len(conformers) + 1))),
        rows=tuple((f"{table.T_K[i]:g}", *(f"{c.populations[i]:.4f}" for c in conformers)) for i in shown_rows),
        telling=fewest_rows([table.T_K[i] for i in shown_rows]),
    )


assert STACK_RIGHT > LEFT
