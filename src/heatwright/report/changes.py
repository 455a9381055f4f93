"""What changed against an older release or file: rows for the page, and a figure of the shifts."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, Final

from heatwright.constants import BAR_PA
from heatwright.project.change_document import comparison_document
from heatwright.project.changes import MOVED, Comparison, compare_sets
from heatwright.project.thermo_set import Thermo, ThermoSet
from heatwright.report.curves import WIDTH
from heatwright.report.drawing import Dots, Drawing, Figure, Mark, Words, segments
from heatwright.report.layout import Scale, frame, nice_ticks, padded
from heatwright.report.shares import shortened
from heatwright.report.species import Species

_MOST: Final = 24
_LEFT: Final = 128.0
_RIGHT: Final = 352.0
_ROW: Final = 17.0


def set_of(species: Sequence[Species], path: str) -> ThermoSet:
    """The species of a report as one side of a comparison, by their polynomials."""
    return ThermoSet(
        path=path,
        kind="yaml",
        species={
            s.name: Thermo(
                name=s.name,
                composition=_charged(s),
                polynomial=s.polynomial,
                record=None,
                pressure_Pa=None if s.pressure_bar is None else s.pressure_bar * BAR_PA,
                where=dict(s.facts).get("file", path),
            )
            for s in species
            if s.polynomial is not None
        },
    )


def _charged(s: Species) -> dict[str, float]:
    return {**s.composition, **({"E": -float(s.charge)} if s.charge else {})}


def changes_of(old: ThermoSet, new: ThermoSet) -> dict[str, Any]:
    """What the page shows of a comparison: where from, how many of each kind, rows of those that moved, the figure."""
    comparison = compare_sets(old, new)
    document = comparison_document(comparison)
    rows = [row for row in document["species"] if row["kind"] in (*MOVED, "added")]
    kinds: dict[str, int] = {}
    for row in document["species"]:
        kinds[row["kind"]] = kinds.get(row["kind"], 0) + 1
    return {
        "old": old.path,
        "new": new.path,
        "tally": ", ".join(f"{n} {kind}" for kind, n in kinds.items()) or "nothing to compare",
        "temperatures": [f"{T:g}" for T in document["temperatures_K"]],
        "rows": rows,
        "figure": shifts(comparison),
        "findings": [f.text for f in comparison.findings],
    }


def shifts(comparison: Comparison) -> Figure | None:
    """ΔG° of the species that moved most, at the first and the last temperature compared; None when nothing moved."""
    ends = (comparison.temperatures_K[0], comparison.temperatures_K[-1])
    moved = [
        (c.name, (c.difference.dG_kJ_mol[0], c.difference.dG_kJ_mol[-1]))
        for c in comparison.of_kind("changed")
        if c.difference is not None
    ]
    known = [(name, (a, b)) for name, (a, b) in moved if a is not None and b is not None]
    if not known:
        return None
    shown = sorted(known, key=lambda item: -max(map(abs, item[1])))[:_MOST]
    values = [v for _, pair in shown for v in pair]
    bottom = 34.0 + _ROW * len(shown)
    x = Scale(*padded(min(0.0, *values), max(0.0, *values), 0.06, 0.01), _LEFT, _RIGHT)
    y = Scale(float(len(shown)), 0.0, bottom, 34.0)
    plot = frame(x, y, nice_ticks(x.low, x.high, 4), (), x_name="ΔG°, new − old / kJ/mol")
    marks: list[Mark] = [*plot.marks, segments([((x(0.0), bottom), (x(0.0), 30.0))], "hair")]
    for i, (name, (first, last)) in enumerate(shown):
        middle = y(i + 0.5)
        marks.append(segments([((x(first), middle), (x(last), middle))], "bar"))
        marks += [Dots(((x(first), middle),), "ring"), Dots(((x(first), middle),), "hole")]
        marks.append(Dots(((x(last), middle),), "dot"))
        marks.append(Words((_LEFT - 8.0, middle + 4.0), shortened(name, 16), "label", "end"))
        marks.append(Words((_RIGHT + 8.0, middle + 4.0), f"{last:+.2f}".replace("-", "−"), "quiet"))
    marks += _key(ends)
    more = f", the {_MOST} that moved most of {len(known)}" if len(known) > _MOST else ""
    worst = shown[0]
    return Figure(
        key="shifts",
        heading="What moved",
        title="Shifts of the Gibbs energy",
        description=f"{len(known)} species moved; {worst[0]} moved most, by {worst[1][0]:+.2f} kJ/mol at {ends[0]:g} K "
        f"and {worst[1][1]:+.2f} at {ends[1]:g} K.",
        caption=f"ΔG°(new) − ΔG°(old) at {ends[0]:g} K (circle) and {ends[1]:g} K (dot){more}.",
        source=f"{comparison.old.path} and {comparison.new.path}",
        drawing=Drawing(WIDTH, bottom + 36.0, tuple(marks)),
        columns=("species", *(f"{T:g} K" for T in comparison.temperatures_K)),
        rows=tuple(_row(c.name, c.difference.dG_kJ_mol) for c in comparison.of_kind("changed") if c.difference),
    )


def _key(ends: tuple[float, float]) -> list[Mark]:
    """What circle and dot stand for."""
    left, right = (_LEFT + 6.0, 14.0), (_LEFT + 96.0, 14.0)
    return [
        Dots((left,), "ring"),
        Dots((left,), "hole"),
        Words((left[0] + 9.0, 18.0), f"{ends[0]:g} K", "quiet"),
        Dots((right,), "dot"),
        Words((right[0] + 9.0, 18.0), f"{ends[1]:g} K", "quiet"),
    ]


def _row(name: str, values: Sequence[float | None]) -> tuple[str, ...]:
    return (name, *("–" if v is None else f"{v:+.3f}".replace("-", "−") for v in values))


def values_of(row: Mapping[str, Any]) -> list[float | None]:
    """The numbers of a row: ΔΔfH°(298.15), ΔS°(298.15), the largest ΔCp°, and ΔG° at each temperature."""
    first = [row["ddHf298_kJ_mol"], row["dS298_J_mol_K"], row["largest_dCp_J_mol_K"]]
    return [*first, *(row["dG_kJ_mol"] or [])]
