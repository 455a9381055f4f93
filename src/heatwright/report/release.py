"""A release folder as species to be shown: remade from its project where that gives the released entry, and otherwise
the entries as written, with what the lock file says of each."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

from heatwright.audit.audit import AuditedEntry, audit_entries
from heatwright.audit.release import read_release
from heatwright.constants import BAR_PA
from heatwright.findings import CODES, Finding, note
from heatwright.project.lockfile import LOCK_NAME, Lock, LockedSpecies, read_lock
from heatwright.project.manifest_types import Manifest
from heatwright.project.watch import Watch
from heatwright.reading.entry_file import EntryFile
from heatwright.report.documents import Shown
from heatwright.report.records import entry_document, failed_entries
from heatwright.report.remaking import Again, Released, made_again
from heatwright.report.taking import species_of

_OF_COMPUTED = frozenset({"one-atmosphere", "stated-enthalpy"})


def is_release(path: Path) -> bool:
    """Whether a folder holds a release with its lock file."""
    return path.is_dir() and (path / LOCK_NAME).is_file()


def shown_release(folder: str, watch_of: Callable[[Manifest], Watch] = lambda _: Watch()) -> Shown:
    """The species of a release; raises Refused as the readers of its files do.

    The manifest beside the release, its store and outputs are read and not changed.   watch_of : what hears of the
    reading of a manifest's outputs.
    """
    lock, file = read_lock(Path(folder) / LOCK_NAME), read_release(folder)
    audit = audit_entries(file)
    usable = [a for a in audit.entries if a.entry.polynomial is not None]
    polynomials = {a.entry.name: a.entry.polynomial for a in usable if a.entry.polynomial is not None}
    again = made_again(Released(folder, lock, polynomials), watch_of)
    species = tuple(species_of(_document(file, a, lock, again), f"{folder}: {a.entry.name}") for a in usable)
    return Shown(species, failed_entries(file, audit), lock.mechanism, again.remarks)


def _document(file: EntryFile, audited: AuditedEntry, lock: Lock, again: Again) -> dict[str, Any]:
    """What is shown of one entry: the species made again, else what lock file and text say."""
    name = audited.entry.name
    record, made = lock.species.get(name), again.documents.get(name)
    said = [f.as_json() for f in again.findings.get(name, ())]
    if made is not None:
        known = {f["code"] for f in made["findings"]}
        of_text = [f.as_json() for f in audited.findings if f.code not in {*_OF_COMPUTED, *known}]
        return made | {"findings": [*made["findings"], *of_text, *said]}
    document = entry_document(file, audited)
    if record is None:
        missing = note("entry-edited", f"{LOCK_NAME} does not know {name}")
        return document | {"findings": [*document["findings"], missing.as_json()]}
    return document | _recorded(record, lock) | {"findings": [*_findings(audited, record), *said]}


def _findings(audited: AuditedEntry, record: LockedSpecies) -> list[dict[str, str]]:
    """What the audit says, and the codes of what was said when the entry was made."""
    known = [f for f in audited.findings if f.code not in _OF_COMPUTED]
    pairs = [text.partition(":") for text in record.findings]
    said = [Finding(s, code, f"when it was made: {CODES[code][0].lower()}{CODES[code][1:].rstrip('.')}")  # type: ignore[arg-type]
            for s, _, code in pairs if code in CODES and s in ("warn", "note")]  # fmt: skip
    return [f.as_json() for f in (*known, *said)]


def _recorded(record: LockedSpecies, lock: Lock) -> dict[str, Any]:
    """The lock file's keys under the names of the JSON document."""
    formation, c = record.formation, record.conventions
    files = {f.role: f for f in record.files}
    first = record.files[0] if record.files else None
    return {
        "formula": record.formula,
        "composition": dict(record.composition),
        "charge": record.charge,
        "multiplicity": record.multiplicity,
        "standard_pressure_bar": lock.standard_pressure_Pa / BAR_PA,
        "formation": {
            "method": formation.route,
            "source": formation.source,
            "dHf298_kJ_mol": formation.dHf298_kJ_mol,
            "dHf0_kJ_mol": formation.dHf0_kJ_mol,
            "u95_kJ_mol": formation.u95_kJ_mol,
        },
        "H298_minus_H0_kJ_mol": record.H298_minus_H0_kJ_mol,
        "table": {"T_K": list(lock.cp_temperatures_K), "Cp_J_mol_K": list(record.Cp_J_mol_K)},
        "residuals": dict(record.residuals),
        "source": {
            "file": first.path if first else None,
            "sha256": first.sha256 if first else None,
            "program": record.program,
            "level": record.level,
            "energy_file": files["energy"].path if "energy" in files else None,
            "energy_sha256": files["energy"].sha256 if "energy" in files else None,
        },
        **{key: c[key] for key in _CONVENTIONS if key in c},
        **({"electronic_levels_cm-1": c["electronic_levels_cm1"]} if "electronic_levels_cm1" in c else {}),
    }


_CONVENTIONS = (
    "frequency_scale", "zpe_scale", "scale_source", "low_modes", "rotation", "masses", "point_group",
    "symmetry_number", "optical_isomers",
)  # fmt: skip
