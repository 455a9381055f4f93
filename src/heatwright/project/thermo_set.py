"""The thermo data of one side of a comparison: a release folder, a lock file, or a thermo file in either format."""

from __future__ import annotations

import os
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Literal

from heatwright.constants import ATMOSPHERE_PA, BAR_PA
from heatwright.findings import Finding, Refused, refuse, warn
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.project.lockfile import LOCK_NAME, Lock, LockedSpecies, read_lock
from heatwright.project.manifest import MANIFEST_NAME
from heatwright.project.release import DAT_NAME, YAML_NAME
from heatwright.project.texts import blocks_by_species, text_hash
from heatwright.reading.entries import read_entries
from heatwright.reading.entry_file import EntryFile, ThermoEntry, decoded

Kind = Literal["release", "lock", "nasa7", "yaml"]

_PRESSURE_COMMENT = re.compile(rb"^\s*[!#].*?standard pressure (1 bar|1 atm|\d+(?:\.\d+)? Pa)\b", re.MULTILINE)


@dataclass(frozen=True, slots=True, kw_only=True)
class Thermo:
    """One species as one side has it: by a polynomial, by the record in a lock file, or both.

    composition : atoms by symbol, ``E`` the electrons of an ion; empty when the file says nothing.
    pressure_Pa : the standard pressure, None when nothing says it.   where : ``FILE:LINE`` or ``FILE``.
    """

    name: str
    composition: Mapping[str, float]
    polynomial: Nasa7 | None
    record: LockedSpecies | None
    cp_temperatures_K: tuple[float, ...] = ()
    pressure_Pa: float | None
    where: str
    note: str = ""
    phase: str = "G"


@dataclass(frozen=True, slots=True, kw_only=True)
class ThermoSet:
    """One side: species by name, and what was noticed.

    pressure_Pa : the standard pressure that all its entries have, None when they differ or do not say.
    unusable : the names of entries that cannot be read; ``findings`` says why.
    """

    path: str
    kind: Kind
    species: Mapping[str, Thermo]
    unusable: frozenset[str] = frozenset()
    findings: tuple[Finding, ...] = ()
    lock: Lock | None = field(default=None, repr=False)

    @property
    def pressure_Pa(self) -> float | None:
        """The one standard pressure of all entries, or None."""
        pressures = {t.pressure_Pa for t in self.species.values()}
        return pressures.pop() if len(pressures) == 1 else None


def read_thermo_set(path: str | os.PathLike[str]) -> ThermoSet:
    """A release folder, a lock file (``.toml``), or a thermo file of fixed records or Cantera YAML.

    A release gives its polynomials from ``thermo.yaml`` (else from ``thermo.dat``) and the record of each from
    ``thermo.lock.toml``.

    Raises Refused: ``no-release``, or what the readers of the files say.
    """
    shown = os.fspath(path)
    if os.path.isdir(path):
        return _release(shown)
    if os.path.basename(shown) == MANIFEST_NAME:
        found, expected = "this is a manifest", "a release, a lock file or a thermo file"
        action = "Give the folder of its release, which `heatwright build` writes."
        raise Refused([refuse("no-release", found, where=shown, expected=expected, action=action)])
    if shown.lower().endswith(".toml"):
        return _locked(read_lock(path), shown)
    return thermo_set_of(read_entry_file(shown))


def read_entry_file(path: str) -> EntryFile:
    """The thermo file at *path*, with an entry that can be read; raises Refused with the path in every finding."""
    try:
        file = read_entries(path)
    except Refused as error:
        raise Refused(f.at(path) for f in error.findings) from error
    if not file.usable:
        faults = [f for f in file.all_findings() if f.severity == "refuse"]
        expected = "a thermo file: fixed 80-column records or Cantera YAML"
        action = "`heatwright audit` says of each what is wrong."
        words = "the file holds no entry that can be read"
        raise Refused([*faults[:_SOME], refuse("no-entries", words, where=path, expected=expected, action=action)])
    return file


_SOME = 3
"""Faults that are told of a file in which there is nothing else: it is probably no thermo file at all."""


def thermo_set_of(file: EntryFile) -> ThermoSet:
    """The usable entries of a thermo file; of two entries of one name the first one, with a warning."""
    default_Pa = default_pressure_Pa(file)
    species: dict[str, Thermo] = {}
    findings = [f for f in file.all_findings() if f.severity == "refuse"]
    for entry in file.usable:
        if entry.name in species:
            findings.append(_twice(file, entry, species[entry.name]))
        else:
            species[entry.name] = _thermo(file, entry, default_Pa)
    unusable = {e.name for e in file.entries if e.polynomial is None} - species.keys()
    return ThermoSet(
        path=file.path,
        kind=file.format,
        species=species,
        unusable=frozenset(unusable),
        findings=tuple(findings),
    )


def stated_pressure_Pa(file: EntryFile) -> float | None:
    """The standard pressure (Pa) of all entries of a file, None when nothing says it or they differ."""
    default = default_pressure_Pa(file)
    pressures = {default if e.reference_pressure_Pa is None else e.reference_pressure_Pa for e in file.entries}
    return pressures.pop() if len(pressures) == 1 else None


def default_pressure_Pa(file: EntryFile) -> float | None:
    """The standard pressure (Pa) of an entry that names none, None when nothing says it.

    It is 1 atm, as Cantera takes it, where other entries of the file name one; else what the file's comments say.
    """
    if any(e.reference_pressure_Pa is not None for e in file.entries):
        return ATMOSPHERE_PA
    words = set(_PRESSURE_COMMENT.findall(file.data))
    return _pressure_of(words.pop().decode()) if len(words) == 1 else None


def _pressure_of(words: str) -> float:
    number, unit = words.split()
    return float(number) * {"bar": BAR_PA, "atm": ATMOSPHERE_PA, "Pa": 1.0}[unit]


def _thermo(file: EntryFile, entry: ThermoEntry, default_Pa: float | None) -> Thermo:
    return Thermo(
        name=entry.name,
        composition=entry.composition,
        polynomial=entry.polynomial,
        record=None,
        pressure_Pa=default_Pa if entry.reference_pressure_Pa is None else entry.reference_pressure_Pa,
        where=f"{file.path}:{entry.lines[0]}",
        note=entry.note,
        phase=entry.phase or "G",
    )


def _twice(file: EntryFile, entry: ThermoEntry, first: Thermo) -> Finding:
    same = first.polynomial == entry.polynomial
    found = f"{entry.name} is there a second time, {'with the same' if same else 'with other'} coefficients"
    action = f"The first one ({first.where}) was compared; readers differ in the one they take."
    return warn("duplicate-entry", found, where=f"{file.path}:{entry.lines[0]}", action=action)


# --- releases and lock files ---------------------------------------------------------------------------------------


def _locked(lock: Lock, path: str) -> ThermoSet:
    species = {
        name: Thermo(
            name=name,
            composition=_charged(record),
            polynomial=None,
            record=record,
            cp_temperatures_K=lock.cp_temperatures_K,
            pressure_Pa=lock.standard_pressure_Pa,
            where=path,
        )
        for name, record in lock.species.items()
    }
    return ThermoSet(path=path, kind="lock", species=species, lock=lock)


def _charged(record: LockedSpecies) -> dict[str, float]:
    atoms: dict[str, float] = dict(record.composition)
    return {**atoms, "E": -float(record.charge)} if record.charge else atoms


def _release(path: str) -> ThermoSet:
    folder = Path(path)
    texts = [read_entry_file(str(folder / name)) for name in (YAML_NAME, DAT_NAME) if (folder / name).is_file()]
    has_lock = (folder / LOCK_NAME).is_file()
    if not texts and not has_lock:
        expected = f"{YAML_NAME}, {DAT_NAME} or {LOCK_NAME} in it"
        action = "Give the folder that `heatwright build` writes, or a thermo file."
        found = "the folder holds no release"
        raise Refused([refuse("no-release", found, where=path, expected=expected, action=action)])
    locked = _locked(read_lock(folder / LOCK_NAME), str(folder / LOCK_NAME)) if has_lock else None
    if not texts:
        return replace(locked, path=path) if locked else ThermoSet(path=path, kind="release", species={})
    sets = [thermo_set_of(file) for file in texts]
    findings = [f for one in sets for f in one.findings]
    findings += _disagreeing(sets)
    chosen = sets[0]
    if locked is None or locked.lock is None:
        return replace(chosen, path=path, kind="release", findings=tuple(findings))
    findings += [*_unrecorded(chosen, locked), *(f for file in texts for f in _edited(file, locked.lock))]
    return ThermoSet(
        path=path,
        kind="release",
        species={name: _with_record(t, locked.species.get(name)) for name, t in chosen.species.items()},
        unusable=chosen.unusable,
        findings=tuple(findings),
        lock=locked.lock,
    )


def _with_record(thermo: Thermo, locked: Thermo | None) -> Thermo:
    if locked is None:
        return thermo
    pressure = locked.pressure_Pa if thermo.pressure_Pa is None else thermo.pressure_Pa
    return replace(thermo, record=locked.record, cp_temperatures_K=locked.cp_temperatures_K, pressure_Pa=pressure)


def _disagreeing(sets: list[ThermoSet]) -> list[Finding]:
    """Warnings about entries that differ between the files of one release."""
    if len(sets) < 2:
        return []
    one, other = sets
    names = [n for n, t in one.species.items() if n in other.species and t.polynomial != other.species[n].polynomial]
    names += sorted(one.species.keys() ^ other.species.keys())
    if not names:
        return []
    found = f"{one.path} and {other.path} differ in {_shown(names)}; the first was compared"
    return [warn("entry-edited", found, expected="the same entries in both", action="Build the release again.")]


def _unrecorded(chosen: ThermoSet, locked: ThermoSet) -> list[Finding]:
    names = sorted(chosen.species.keys() ^ (locked.species.keys() - chosen.unusable))
    if not names:
        return []
    found = f"{chosen.path} and {locked.path} do not hold the same species: {_shown(names)}"
    return [warn("entry-edited", found, action="Build the release again.")]


def _edited(file: EntryFile, lock: Lock) -> list[Finding]:
    """Entries whose text is not the one that was written with the lock file."""
    name = Path(file.path).name
    blocks = blocks_by_species(name, decoded(file.data))
    recorded = {n: record.texts[name] for n, record in lock.species.items() if name in record.texts}
    changed = [n for n, known in recorded.items() if n in blocks and text_hash(blocks[n]) != known]
    if not changed:
        return []
    found = f"the text of {_shown(changed)} is not the one that {LOCK_NAME} records"
    return [warn("entry-edited", found, where=file.path, action="`heatwright build` makes it anew.")]


def _shown(names: Iterable[str]) -> str:
    listed = list(names)
    return ", ".join(listed[:8]) + (", …" if len(listed) > 8 else "")
