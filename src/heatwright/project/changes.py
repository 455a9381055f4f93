"""Change: one species between two releases or thermo files; which of them moved, by how much and why."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, fields, replace
from typing import Final, Literal

import numpy as np

from heatwright.errors import UsageError
from heatwright.findings import Finding, note, warn
from heatwright.project.differences import COMPARED_K, Difference, difference, pressure_shift
from heatwright.project.reasons import numeric_reasons, recorded_reasons, tool_reasons
from heatwright.project.thermo_set import Thermo, ThermoSet

Kind = Literal["removed", "other species", "renamed", "changed", "unchanged", "identical", "added"]
MOVED: Final[tuple[Kind, ...]] = ("removed", "other species", "renamed", "changed")
"""The kinds that a check does not let pass; a species that was added moves nothing that was there."""
_ORDER: Final = {kind: i for i, kind in enumerate(("removed", "other species", "renamed", "changed", "added"))}


@dataclass(frozen=True, slots=True)
class Tolerance:
    """Up to where a species counts as unchanged: ΔfH°(298.15) and G° in kJ/mol, S° and Cp° in J/mol/K.

    The defaults are far below what a table prints or a flame feels, and above what rounding of nine-digit coefficients
    and another value of R make.  flame_K : up to where a flame temperature counts as unchanged.
    """

    H: float = 0.01
    S: float = 0.01
    Cp: float = 0.01
    G: float = 0.01
    flame_K: float = 1.0

    def holds(self, found: Difference) -> bool:
        """Whether everything that can be compared is within the tolerance, and something can."""
        values = (
            (found.ddHf298_kJ_mol, self.H),
            (found.dS298_J_mol_K, self.S),
            (found.largest_dCp_J_mol_K, self.Cp),
            *((g, self.G) for g in found.dG_kJ_mol),
        )
        known = [(abs(x), limit) for x, limit in values if x is not None]
        return bool(known) and all(x <= limit for x, limit in known)


def parse_tolerance(text: str) -> Tolerance:
    """``H=0.5,S=0.1,Cp=0.1,G=0.5,flame=2`` (kJ/mol, J/mol/K, K); what is not named keeps its default.

    Raises UsageError.

    >>> parse_tolerance("H=0.5").H, parse_tolerance("H=0.5").S
    (0.5, 0.01)
    """
    names = {("flame" if f.name == "flame_K" else f.name): f.name for f in fields(Tolerance)}
    values: dict[str, float] = {}
    for part in text.split(","):
        key, _, value = (word.strip() for word in part.partition("="))
        number = _positive(value)
        if key not in names or number is None or names[key] in values:
            expected = ", ".join(f"{name}=NUMBER" for name in names)
            raise UsageError(f"--tolerance {part.strip()!r}: expected {expected}, each at most once")
        values[names[key]] = number
    return replace(Tolerance(), **values)


def _positive(text: str) -> float | None:
    try:
        value = float(text)
    except ValueError:
        return None
    return value if 0.0 <= value < float("inf") else None


@dataclass(frozen=True, slots=True, kw_only=True)
class Change:
    """One species between two sides.

    kind : ``removed`` and ``added`` (on one side only), ``renamed`` (the same polynomial under another name),
        ``other species`` (the same name with other elements), ``changed``, ``unchanged`` (within the tolerance),
        ``identical`` (the same numbers).
    reasons : why, most telling first.   remarks : what limits the comparison.
    """

    name: str
    kind: Kind
    old: Thermo | None
    new: Thermo | None
    difference: Difference | None = None
    reasons: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()

    @property
    def moved(self) -> bool:
        """Whether a check is to say no."""
        return self.kind in MOVED

    @property
    def weight(self) -> float:
        """What it is sorted by within its kind: the largest |ΔG°|/RT, thus the largest change of an ln K."""
        return 0.0 if self.difference is None else self.difference.weight


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """Two sides, their changes in the order of what matters, the temperatures they were compared at, and findings."""

    old: ThermoSet
    new: ThermoSet
    changes: tuple[Change, ...]
    tolerance: Tolerance
    temperatures_K: tuple[float, ...]
    findings: tuple[Finding, ...]

    def of_kind(self, *kinds: Kind) -> tuple[Change, ...]:
        """The changes of these kinds."""
        return tuple(c for c in self.changes if c.kind in kinds)


def compare_sets(
    old: ThermoSet,
    new: ThermoSet,
    *,
    tolerance: Tolerance | None = None,
    temperatures_K: Sequence[float] = COMPARED_K,
    only_common: bool = False,
) -> Comparison:
    """Every species of two sides: removed, renamed, changed, unchanged, added.

    only_common : leave out what only one side has.
    """
    tolerance = tolerance or Tolerance()
    t = tuple(temperatures_K)
    common = [n for n in old.species if n in new.species]
    changes = [_common(old.species[n], new.species[n], t, tolerance, old, new) for n in common]
    if not only_common:
        gone = [s for n, s in old.species.items() if n not in new.species and n not in new.unusable]
        come = [s for n, s in new.species.items() if n not in old.species and n not in old.unusable]
        changes += _one_sided(gone, come, t)
    return Comparison(
        old=old,
        new=new,
        changes=tuple(sorted(changes, key=_rank)),
        tolerance=tolerance,
        temperatures_K=t,
        findings=(*old.findings, *new.findings, *_pressures(old, new, common), *_zeros_of_elements(changes, tolerance)),
    )


def _rank(change: Change) -> tuple[int, float, str]:
    return _ORDER.get(change.kind, len(_ORDER)), -change.weight, change.name


def _common(
    old: Thermo, new: Thermo, t: tuple[float, ...], tolerance: Tolerance, old_set: ThermoSet, new_set: ThermoSet
) -> Change:
    found = difference(old, new, t)
    kind = _kind(old, new, found, tolerance)
    reasons: tuple[str, ...] = ()
    if old.record is not None and new.record is not None:
        locks = [side.lock.references if side.lock else () for side in (old_set, new_set)]
        reasons = recorded_reasons(old.record, new.record, (locks[0], locks[1]))
        if kind in MOVED:
            reasons += tool_reasons(old_set.lock, new_set.lock)
    if kind == "other species":
        reasons = (f"composition changed: {_formula(old)} → {_formula(new)}", *reasons)
    elif kind == "changed" and not reasons:
        recorded = old.record is not None and new.record is not None
        unrecorded = ("no recorded reason: the record of both is the same, the entry is not",) if recorded else ()
        reasons = (*unrecorded, *numeric_reasons(old, new, found))
    remarks = tuple(_remarks(old, new, found))
    return Change(name=new.name, kind=kind, old=old, new=new, difference=found, reasons=reasons, remarks=remarks)


def _kind(old: Thermo, new: Thermo, found: Difference, tolerance: Tolerance) -> Kind:
    if old.composition and new.composition and old.composition != new.composition:
        return "other species"
    if old.polynomial is not None and old.polynomial == new.polynomial and not pressure_shift(old, new):
        return "identical"
    zero = (found.ddHf298_kJ_mol, found.dS298_J_mol_K, found.largest_dCp_J_mol_K) == (0.0, 0.0, 0.0)
    if zero and old.polynomial is None and new.polynomial is None:
        return "identical"
    return "unchanged" if tolerance.holds(found) else "changed"


def _remarks(old: Thermo, new: Thermo, found: Difference) -> Iterable[str]:
    a, b = old.polynomial, new.polynomial
    tables = a is None or b is None
    if found.inside_K is None:
        yield "the two have no temperature in common, so nothing but their names could be compared"
    elif a is not None and b is not None and (a.t_low_K, a.t_high_K) != (b.t_low_K, b.t_high_K):
        low, high = found.inside_K
        ranges = f"{a.t_low_K:g} to {a.t_high_K:g} K and {b.t_low_K:g} to {b.t_high_K:g} K"
        yield f"the ranges are {ranges}; compared inside both, {low:g} to {high:g} K"
    if found.ddHf298_kJ_mol is None and found.inside_K is not None:
        yield "one of the two has no values at 298.15 K"
    if tables and (a is not None or b is not None) and (old.record is None or new.record is None):
        yield "one side is a polynomial, the other a lock file's table; the fit's own error is in the difference"


def _formula(thermo: Thermo) -> str:
    return " ".join(f"{symbol}{n:g}" for symbol, n in sorted(thermo.composition.items()))


# --- on one side only ----------------------------------------------------------------------------------------------


def _one_sided(gone: list[Thermo], come: list[Thermo], t: tuple[float, ...]) -> list[Change]:
    pairs = _renamed(gone, come)
    changes = [_renaming(old, new, t) for old, new in pairs]
    paired = {id(one) for pair in pairs for one in pair}
    by_case = {s.name.upper(): s.name for s in come if id(s) not in paired}
    for one in gone:
        if id(one) not in paired:
            near = by_case.get(one.name.upper())
            remarks = (f"NEW has {near}: names are case-sensitive",) if near else ()
            changes.append(Change(name=one.name, kind="removed", old=one, new=None, remarks=remarks))
    changes += [Change(name=s.name, kind="added", old=None, new=s) for s in come if id(s) not in paired]
    return changes


def _renamed(gone: list[Thermo], come: list[Thermo]) -> list[tuple[Thermo, Thermo]]:
    """Pairs that have the same numbers, where only one on each side has them."""
    pairs = []
    for one in gone:
        same = [other for other in come if _same(one, other)]
        if len(same) == 1 and sum(_same(other, same[0]) for other in gone) == 1:
            pairs.append((one, same[0]))
    return pairs


def _same(a: Thermo, b: Thermo) -> bool:
    if a.composition != b.composition or pressure_shift(a, b):
        return False
    if a.polynomial is not None and b.polynomial is not None:
        return a.polynomial == b.polynomial
    if a.record is None or b.record is None:
        return False
    values = [(r.formation.dHf298_kJ_mol, r.S298_J_mol_K, r.Cp_J_mol_K) for r in (a.record, b.record)]
    return values[0] == values[1] and a.cp_temperatures_K == b.cp_temperatures_K


def _renaming(old: Thermo, new: Thermo, t: tuple[float, ...]) -> Change:
    reason = f"renamed: {old.name} → {new.name}, the same numbers"
    return Change(
        name=new.name, kind="renamed", old=old, new=new, difference=difference(old, new, t), reasons=(reason,)
    )


# --- the sides as a whole ------------------------------------------------------------------------------------------


def _pressures(old: ThermoSet, new: ThermoSet, common: list[str]) -> list[Finding]:
    """Different standard pressures, and sides that do not name theirs while the other does."""
    shifted = [n for n in common if pressure_shift(old.species[n], new.species[n])]
    if shifted:
        a, b = old.species[shifted[0]].pressure_Pa, new.species[shifted[0]].pressure_Pa
        found = f"OLD is for a standard pressure of {a:g} Pa, NEW for {b:g} Pa, in {len(shifted)} species"
        action = "NEW's entropies were brought to OLD's pressure, so that only what else changed is shown."
        return [warn("pressure-differs", found, action=action)]
    silent = [s for s in (old, new) if any(s.species[n].pressure_Pa is None for n in common)]
    if len(silent) != 1:
        return []
    found = "the file does not say for which standard pressure it is, and the other side does"
    action = "Entropies were compared as they stand; 1 bar and 1 atm differ by 0.109 J/mol/K."
    return [note("pressure-not-stated", found, where=silent[0].path, action=action)]


def _zeros_of_elements(changes: list[Change], tolerance: Tolerance) -> list[Finding]:
    """A note when all enthalpies differ by so much for each atom of an element, which no reaction notices."""
    rows = [
        (c.new.composition, c.difference.ddHf298_kJ_mol)
        for c in changes
        if c.kind in ("changed", "unchanged", "identical")
        and c.new is not None
        and c.difference is not None
        and c.difference.ddHf298_kJ_mol is not None
    ]
    symbols = sorted({s for composition, _ in rows for s in composition})
    if len(rows) < len(symbols) + 2 or sum(abs(h) > tolerance.H for _, h in rows) < 2:
        return []
    atoms = np.array([[composition.get(s, 0.0) for s in symbols] for composition, _ in rows])
    offsets_h = np.array([h for _, h in rows])
    zeros, _, rank, _ = np.linalg.lstsq(atoms, offsets_h, rcond=None)
    if rank < len(symbols) or np.abs(atoms @ zeros - offsets_h).max() > tolerance.H:
        return []
    shown = ", ".join(f"{s} {z:+.3f}" for s, z in zip(symbols, zeros, strict=True) if abs(z) > tolerance.H)
    found = f"every enthalpy differs by the same amount for each atom (kJ/mol): {shown}"
    action = "The two count enthalpies from other zeros for the elements; no equilibrium constant notices."
    return [note("enthalpy-scale", found, action=action)]
