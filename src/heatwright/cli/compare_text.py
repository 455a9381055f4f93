"""The words of ``heatwright compare`` and ``heatwright splice`` on the terminal."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from heatwright.project.changes import Change, Comparison
    from heatwright.project.effects import MechanismEffect, ReactionChange
    from heatwright.project.flame import Flame
    from heatwright.writing.units import Units

_NONE = "–"


def comparison_lines(comparison: Comparison, units: Units, *, everything: bool = False) -> Iterator[str]:
    """Both sides, a tally, and a row for each species that is not the same; with *everything* for all of them."""
    for word, side in (("OLD", comparison.old), ("NEW", comparison.new)):
        pressure = side.pressure_Pa
        at = "standard pressure not said" if pressure is None else f"standard pressure {pressure:g} Pa"
        yield f"{word}  {side.path}: {len(side.species)} species, {at}"
    counts = Counter(c.kind for c in comparison.changes)
    yield ""
    yield (", ".join(f"{n} {kind}" for kind, n in counts.items()) or "no species in common") + "."
    shown = [c for c in comparison.changes if everything or c.kind not in ("identical", "unchanged")]
    if shown:
        yield ""
        yield from change_lines(shown, comparison.temperatures_K, units)


def change_lines(changes: Sequence[Change], temperatures_K: Sequence[float], units: Units) -> Iterator[str]:
    """A table of changes, with the reasons of each below its row."""
    yield f"NEW minus OLD: H and G in {units.enthalpy}, S and Cp in {units.entropy}"
    at = [f"({t:g})" for t in temperatures_K]
    heads = ["ΔΔfH°(298)", "ΔS°(298)", *(f"ΔCp°{t}" for t in at), *(f"ΔG°{t}" for t in at)]
    rows = [["species", "", *heads], *([c.name, c.kind, *_cells(c, len(at), units)] for c in changes)]
    widths = [max(len(row[i]) for row in rows) for i in range(len(rows[0]))]
    below: list[tuple[str, ...]] = [(), *((*c.reasons, *c.remarks) for c in changes)]
    for row, words in zip(rows, below, strict=True):
        name, kind, *numbers = (
            cell.ljust(w) if i < 2 else cell.rjust(w) for i, (cell, w) in enumerate(zip(row, widths, strict=True))
        )
        yield "  ".join([name, kind, *numbers]).rstrip()
        yield from (f"  {text}" for text in words)


def _cells(change: Change, n: int, units: Units) -> list[str]:
    d = change.difference
    if d is None:
        return [""] * (2 + 2 * n)
    numbers = [d.ddHf298_kJ_mol, d.dS298_J_mol_K, *d.dCp_J_mol_K, *d.dG_kJ_mol]
    return [signed(None if x is None else x * units.factor) for x in numbers]


def signed(value: float | None, decimals: int = 3) -> str:
    """*value* with its sign, without a minus zero.

    >>> signed(0.5), signed(-0.00001), signed(None)
    ('+0.500', '0.000', '–')
    """
    if value is None:
        return _NONE
    text = f"{value:+.{decimals}f}"
    return text if float(text) else text.lstrip("+-")


def effect_lines(effect: MechanismEffect, temperatures_K: Sequence[float], factor: float) -> Iterator[str]:
    """The reactions concerned, those that move most first."""
    mechanism, concerned = effect.mechanism, effect.reactions
    in_all = len(mechanism.reactions)
    yield f"Mechanism {mechanism.path}: {len(concerned)} of {in_all} reactions have a species that moved"
    if not concerned:
        return
    beyond = len(effect.beyond(factor))
    yield f"  as reactant or product; reverse rates of {beyond} move by more than a factor of {factor:g} (marked *)."
    equation = max(len(r.reaction.text) for r in concerned)
    heads = "  ".join(f"{f'{t:g} K':>8}" for t in temperatures_K)
    yield f"{'':>2}{'no.':>5}  {'Δln Kc at':<{equation}}  {heads}  reverse rate"
    for changed in concerned:
        yield _reaction_line(changed, temperatures_K, factor, equation)


def _reaction_line(changed: ReactionChange, temperatures_K: Sequence[float], factor: float, width: int) -> str:
    mark = "*" if changed.reverse_moves_by(factor) else " "
    numbers = "  ".join(f"{signed(x, 4):>8}" for x in changed.dlnKc)
    known = [(f, t) for f, t in zip(changed.reverse_factors, temperatures_K, strict=True) if f is not None]
    most = max(known, key=lambda pair: max(pair[0], 1.0 / pair[0]), default=None)
    words = [f"×{most[0]:.4g} at {most[1]:g} K"] if most else []
    remarks = "; ".join([*words, *changed.remarks])
    return f"{mark:>2}{changed.reaction.number:>5}  {changed.reaction.text:<{width}}  {numbers}  {remarks}".rstrip()


def flame_lines(found: Flame) -> Iterator[str]:
    """The flame temperatures and their shift."""
    shift = signed(found.new_K - found.old_K, 2)
    yield f"Adiabatic flame temperature at constant pressure, {found.mixture} (phase {found.phase}):"
    yield f"  {found.old_K:.2f} K with OLD's entries, {found.new_K:.2f} K with NEW's, {shift} K"


def listed(names: Iterable[str], most: int = 12) -> str:
    """Names with commas, the first *most* of them.

    >>> listed("ABC", 2)
    'A, B, … (3 in all)'
    """
    every = list(names)
    return ", ".join(every[:most]) + (f", … ({len(every)} in all)" if len(every) > most else "")
