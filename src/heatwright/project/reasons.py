"""Why an entry differs from an earlier one: by the records of two lock files, or by what the numbers show."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from math import log
from typing import Any, Final

from heatwright.constants import GAS_CONSTANT_J_MOL_K
from heatwright.project.differences import Difference
from heatwright.project.lockfile import Lock, LockedFormation, LockedReference, LockedSpecies
from heatwright.project.thermo_set import Thermo

_SHOWN: Final = 8
_SCALES: Final = frozenset({"scale", "frequency_scale", "zpe_scale"})
_NUMERIC_J_MOL_K: Final = 0.005
"""Entropies and heat capacities that differ by less come from rounding in the text."""


def recorded_reasons(
    old: LockedSpecies,
    new: LockedSpecies,
    references: tuple[tuple[LockedReference, ...], tuple[LockedReference, ...]] = ((), ()),
) -> tuple[str, ...]:
    """What differs between two records of one species, in words that start with the kind of the reason.

    The kinds: ``output changed`` (and the other roles of files, also ``added``, ``removed`` and ``moved``), ``level``,
    ``program``, ``options``, ``formation``, ``reference`` and ``range changed``, a convention by its name, ``kept``.

    references : those of both lock files, by which a changed reference is named.
    """
    return (
        *_files(old, new),
        *_level(old, new),
        *_options(old.choices, new.choices),
        *_conventions(old, new),
        *_formation(old.formation, new.formation),
        *_references(old, new, *references),
        *_range(old, new),
        *_kept(new),
    )


def tool_reasons(old: Lock | None, new: Lock | None) -> tuple[str, ...]:
    """Whether another version of heatwright made the other release."""
    if old is None or new is None or (old.tool == new.tool and old.fingerprint == new.fingerprint):
        return ()
    if old.tool != new.tool:
        return (f"tool changed: heatwright {old.tool} → {new.tool}",)
    return (f"tool changed: heatwright {new.tool} with other data or program text",)


def _files(old: LockedSpecies, new: LockedSpecies) -> Iterator[str]:
    before = {(f.role, f.path): f.sha256 for f in old.files}
    after = {(f.role, f.path): f.sha256 for f in new.files}
    changed = [key for key in after if key in before and after[key] != before[key]]
    gone = [key for key in before if key not in after]
    come = [key for key in after if key not in before]
    same_bytes = {before[key]: key for key in gone}
    for role, path in changed:
        yield f"{role} changed: {path}"
    for role, path in come:
        was = same_bytes.get(after[role, path])
        if was is not None:
            gone.remove(was)
            yield f"{role} moved: {was[1]} → {path}, the same file"
        elif len(partners := [key for key in gone if key[0] == role]) == 1:
            gone.remove(partners[0])
            yield f"{role} changed: {partners[0][1]} → {path}"
        else:
            yield f"{role} added: {path}"
    for role, path in gone:
        yield f"{role} removed: {path}"


def _level(old: LockedSpecies, new: LockedSpecies) -> Iterator[str]:
    if old.level != new.level:
        yield f"level changed: {old.level or 'not printed'} → {new.level or 'not printed'}"
    if old.program != new.program:
        yield f"program changed: {old.program} → {new.program}"


def _options(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[str]:
    for key in sorted(old.keys() | new.keys()):
        if old.get(key) != new.get(key):
            yield f"options changed: {key} {_value(old.get(key))} → {_value(new.get(key))}"


def _conventions(old: LockedSpecies, new: LockedSpecies) -> Iterator[str]:
    """What came of the options and the output, where no option of the same name says it already."""
    both = old.choices.keys() | new.choices.keys()
    said = {key.replace("-", "_") for key in both if old.choices.get(key) != new.choices.get(key)}
    if said & _SCALES:
        said.add("scale_source")
    for key in sorted(old.conventions.keys() | new.conventions.keys()):
        a, b = old.conventions.get(key), new.conventions.get(key)
        if a != b and key not in said:
            yield f"{key} changed: {_value(a)} → {_value(b)}"


def _value(value: object) -> str:
    if value is None:
        return "default"
    return f"{value:g}" if isinstance(value, float) else str(value) or "none"


def _formation(old: LockedFormation, new: LockedFormation) -> Iterator[str]:
    if old.route != new.route:
        yield f"formation changed: by {old.route} → by {new.route}"
    if old.source != new.source:
        yield f"formation changed: {old.source or 'no source'} → {new.source or 'no source'}"
    elif old.route == new.route == "given" and old.dHf298_kJ_mol != new.dHf298_kJ_mol:
        yield f"formation changed: given as {old.dHf298_kJ_mol:.3f} → {new.dHf298_kJ_mol:.3f} kJ/mol"


def _references(
    old: LockedSpecies, new: LockedSpecies, before: tuple[LockedReference, ...], after: tuple[LockedReference, ...]
) -> Iterator[str]:
    if old.references == new.references:
        return
    hashes = [{(r.path, r.species): r.sha256 for r in side} for side in (before, after)]
    keys = sorted(hashes[0].keys() | hashes[1].keys())
    moved = [
        path
        for path, species in keys
        if hashes[0].get((path, species)) != hashes[1].get((path, species)) and _concerns(species, new)
    ]
    shown = ", ".join(moved[:_SHOWN]) + (", …" if len(moved) > _SHOWN else "")
    yield f"reference changed: {shown or 'the outputs that its enthalpy of formation rests on'}"


def _concerns(reference: str, of: LockedSpecies) -> bool:
    """Whether a reference can have a part in a species; an atom only where the species is made of it."""
    symbol, sign, _ = reference.rpartition(" atom")
    return not sign or symbol in of.composition


def _range(old: LockedSpecies, new: LockedSpecies) -> Iterator[str]:
    if old.temperatures_K != new.temperatures_K:
        yield f"range changed: {_ends(old.temperatures_K)} → {_ends(new.temperatures_K)} K"


def _kept(new: LockedSpecies) -> Iterator[str]:
    if new.kept:
        yield f"kept from an earlier release: {new.kept}"


def _ends(temperatures_K: tuple[float, ...]) -> str:
    return "-".join(f"{t:g}" for t in temperatures_K)


# --- from the numbers ----------------------------------------------------------------------------------------------


def numeric_reasons(old: Thermo, new: Thermo, found: Difference) -> tuple[str, ...]:
    """What the numbers show where no record says why: only the enthalpy, only the entropy, heat capacity, range."""
    reasons = [*_shape(found)]
    a, b = old.polynomial, new.polynomial
    if a is not None and b is not None and a.t_common_K != b.t_common_K:
        reasons.append(f"common temperature: {a.t_common_K:g} → {b.t_common_K:g} K")
    if old.note and new.note and old.note != new.note:
        reasons.append(f"note: {old.note} → {new.note}")
    return tuple(reasons)


def _shape(found: Difference) -> Iterator[str]:
    cp, s, h = found.largest_dCp_J_mol_K, found.dS298_J_mol_K, found.ddHf298_kJ_mol
    if cp is None or s is None or h is None:
        return
    if cp > _NUMERIC_J_MOL_K:
        yield f"heat capacity: by up to {cp:.2f} J/mol/K at {found.largest_at_K:.0f} K"
        return
    if abs(s) > _NUMERIC_J_MOL_K:
        yield f"entropy: by the same {s:+.3f} J/mol/K at every temperature{_as_factor(s)}"
    if abs(h) > 0.0:
        yield f"enthalpy: by the same {h:+.3f} kJ/mol at every temperature"


def _as_factor(s_J_mol_K: float) -> str:
    """R ln n, as a symmetry number or a count of isomers or states would make it; and R ln(1.01325)."""
    for n in (2, 3, 4, 6, 12):
        if abs(abs(s_J_mol_K) - GAS_CONSTANT_J_MOL_K * log(n)) < 2.0 * _NUMERIC_J_MOL_K:
            way = "more" if s_J_mol_K > 0.0 else "less"
            return f", R ln {n} {way}: a symmetry number, a count of isomers or of electronic states"
    if abs(abs(s_J_mol_K) - GAS_CONSTANT_J_MOL_K * log(1.01325)) < _NUMERIC_J_MOL_K:
        return ", R ln 1.01325: 1 bar on one side, 1 atm on the other"
    return ""
