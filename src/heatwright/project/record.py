"""From a finished entry to what the release and the store keep of it: its blocks of text and its lines of the lock."""

from __future__ import annotations

import json
from collections.abc import Iterable, Sequence
from dataclasses import astuple, dataclass
from typing import TYPE_CHECKING, Any

from heatwright.findings import Finding, Refused
from heatwright.project.lockfile import (
    CP_TEMPERATURES_K,
    LockedReference,
    LockedSpecies,
    parse_lock_species,
    species_values,
)
from heatwright.project.texts import FILES, Texts, entry_texts, text_hash

if TYPE_CHECKING:
    from heatwright.entry import Entry
    from heatwright.project.plan import Decision


@dataclass(frozen=True, slots=True)
class Record:
    """One finished entry: its lines of the lock file, its block in each text file, and what was said about it."""

    locked: LockedSpecies
    texts: Texts
    rests_on: tuple[LockedReference, ...] = ()
    findings: tuple[Finding, ...] = ()


def records(
    made: Sequence[tuple[Decision, Entry, str, tuple[LockedReference, ...]]],
) -> list[Record | Refused]:
    """The records of entries, each with its decision, key and references; those that cannot be written are refused."""
    fit: dict[int, dict[str, str]] = {}
    refused: dict[int, Refused] = {}
    try:
        fit = dict(enumerate(entry_texts([entry for _, entry, _, _ in made])))
    except Refused:  # one of them; each alone shows which
        for i, (_, entry, _, _) in enumerate(made):
            try:
                fit[i] = entry_texts([entry])[0]
            except Refused as error:
                refused[i] = error
    return [
        refused[i] if i in refused else Record(_locked(*one, fit[i]), fit[i], one[3], one[1].findings)
        for i, one in enumerate(made)
    ]


def _locked(
    decision: Decision, entry: Entry, key: str, rests_on: tuple[LockedReference, ...], texts: Texts
) -> LockedSpecies:
    from heatwright.elements import formula
    from heatwright.project.lockfile import LockedFormation
    from heatwright.project.shelf import references_hash
    from heatwright.writing.comment import index_298
    from heatwright.writing.document import residuals_document

    model, table, polynomial = entry.model, entry.table, entry.polynomial
    molecule, formation = model.molecule, entry.formation
    return LockedSpecies(
        name=entry.name,
        formula=formula(model.composition, molecule.charge or 0),
        composition=model.composition,
        charge=molecule.charge or 0,
        multiplicity=molecule.multiplicity or 1,
        files=decision.files,
        references=references_hash(rests_on),
        level=molecule.level_text,
        program=molecule.source.program_version,
        choices=decision.choices,
        conventions=_conventions(entry),
        formation=LockedFormation(
            route=formation.method,
            source=formation.source,
            dHf298_kJ_mol=formation.dHf298_kJ_mol,
            dHf0_kJ_mol=formation.dHf0_kJ_mol,
            u95_kJ_mol=formation.u95_kJ_mol,
        ),
        S298_J_mol_K=float(table.s_J_mol_K[index_298(table)]),
        H298_minus_H0_kJ_mol=table.h298_minus_h0_kJ_mol,
        Cp_J_mol_K=_heat_capacities(entry),
        temperatures_K=(polynomial.t_low_K, polynomial.t_common_K, polynomial.t_high_K),
        residuals=residuals_document(entry.quality),
        findings=tuple(dict.fromkeys(f"{f.severity}:{f.code}" for f in entry.findings)),
        key=key,
        texts={file: text_hash(texts[file]) for file in FILES},
    )


def _heat_capacities(entry: Entry) -> tuple[float, ...]:
    """Cp° at the temperatures of the lock file, from the table where it has them all."""
    at = dict(zip(entry.table.T_K.tolist(), entry.table.cp_J_mol_K.tolist(), strict=True))
    if all(T in at for T in CP_TEMPERATURES_K):
        return tuple(at[T] for T in CP_TEMPERATURES_K)
    from heatwright.constants import GAS_CONSTANT_J_MOL_K

    return tuple((entry.model.cp_R(CP_TEMPERATURES_K) * GAS_CONSTANT_J_MOL_K).tolist())


def _conventions(entry: Entry) -> dict[str, Any]:
    """What came of the options, as far as it tells two entries of one species apart."""
    model = entry.model
    return {
        "frequency_scale": model.frequency_scale,
        "zpe_scale": model.zpe_scale,
        "scale_source": model.scale_source,
        "low_modes": model.motion.low_modes,
        "rotation": model.motion.rotation,
        "masses": model.mass_kind,
        "point_group": model.symmetry.point_group,
        "symmetry_number": model.symmetry_number,
        "optical_isomers": model.optical_isomers,
        "electronic_levels_cm1": [[float(nu), g] for nu, g in model.levels],
        "torsions": len(model.torsions),
        "conformers": max(1, len(model.conformers)),
    }


def packed(record: Record) -> bytes:
    """A record as the store keeps it."""
    findings = [list(astuple(finding)) for finding in record.findings]
    rests_on = [[r.path, r.sha256, r.species] for r in record.rests_on]
    values = [record.locked.name, species_values(record.locked), dict(record.texts), rests_on, findings]
    return json.dumps(values, ensure_ascii=False, separators=(",", ":")).encode()


def unpacked(data: bytes) -> Record | None:
    """The record that :func:`packed` was given; None when the bytes hold none, or not a whole one."""
    try:
        name, values, texts, rests_on, findings = json.loads(data)
        locked = parse_lock_species(name, values)
        record = Record(
            locked,
            texts,
            tuple(LockedReference(*r) for r in rests_on),
            tuple(Finding(*f) for f in findings),
        )
    except (ValueError, TypeError, Refused):
        return None
    return record if _is_whole(record) else None


def _is_whole(record: Record) -> bool:
    return all(text_hash(record.texts.get(file, "")) == record.locked.texts.get(file) for file in FILES)


def all_references(records: Iterable[tuple[LockedReference, ...]]) -> tuple[LockedReference, ...]:
    """What all records rest on together, each file once, sorted by path."""
    return tuple(sorted({r for rests_on in records for r in rests_on}))
