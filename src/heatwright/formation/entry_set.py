"""The enthalpies of formation of a set of entries, put beside the outputs of their species."""

from __future__ import annotations

import json
import os
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import PurePath
from typing import TYPE_CHECKING, Any

from heatwright.elements import formula
from heatwright.findings import Finding, Refused, note, refusals, refuse, warn
from heatwright.formation.atomization import collect_atoms
from heatwright.formation.formation import element_increment_kJ_mol
from heatwright.formation.reference_set import Reference, ReferenceSet, reference_options, species_name
from heatwright.formation.same_level import level_objections
from heatwright.formation.species_references import SpeciesReference
from heatwright.partition.model import ThermoModel, build_model
from heatwright.reading.files import read_text
from heatwright.reading.tables import read_table
from heatwright.structure.bond_orders import bonding
from heatwright.structure.identity import identity_of

if TYPE_CHECKING:
    from heatwright.molecule import Molecule
    from heatwright.partition.choices import ModelOptions


@dataclass(frozen=True, slots=True)
class EntryRow:
    """ΔfH°(298.15 K) of one entry with its 95 % uncertainty (None when not stated), kJ/mol.

    file : the output it was made of, empty when not known.   routes : (route, value, uncertainty) of all routes that
    were gone.
    """

    name: str
    dHf298_kJ_mol: float
    u95_kJ_mol: float | None
    source: str
    file: str = ""
    routes: tuple[tuple[str, float, float | None], ...] = ()


def read_entry_rows(path: str | os.PathLike[str]) -> tuple[EntryRow, ...]:
    """The entries of a JSON document of heatwright, or of a CSV file (name, dHf298_kJ_mol, u95_kJ_mol, source).

    Raises Refused when the file is neither, when a value is missing, or when a name comes twice.
    """
    text = read_text(path).text
    rows = _from_json(os.fspath(path), text) if text.lstrip().startswith("{") else _from_csv(path)
    names = [row.name for row in rows]
    twice = sorted({name for name in names if names.count(name) > 1})
    if twice:
        raise Refused([refuse("duplicate-name", f"{', '.join(twice)} comes more than once", where=os.fspath(path))])
    return rows


def _from_csv(path: str | os.PathLike[str]) -> tuple[EntryRow, ...]:
    found = []
    for row in read_table(path, "table-wrong", ("name", "dHf298_kJ_mol", "source"), ("u95_kJ_mol",)):
        value = row.number("dHf298_kJ_mol")
        if value is None:
            row.wrong("dHf298_kJ_mol is empty", "the enthalpy of formation at 298.15 K, kJ/mol")
        found.append(EntryRow(row.text("name"), value, row.number("u95_kJ_mol"), row.text("source")))
    return tuple(found)


def _from_json(file: str, text: str) -> tuple[EntryRow, ...]:
    try:
        document = json.loads(text)
        return tuple(_row(species) for species in document["species"])
    except (ValueError, KeyError, TypeError) as error:
        words = f"this is no JSON document of entries ({type(error).__name__}: {error})"
        action = "Make it by `heatwright entry --format json`."
        raise Refused([refuse("table-wrong", words, where=file, action=action)]) from error


def _row(species: Mapping[str, Any]) -> EntryRow:
    formation = species["formation"]
    routes = tuple(
        (f["method"], float(f["dHf298_kJ_mol"]), None if f["u95_kJ_mol"] is None else float(f["u95_kJ_mol"]))
        for f in (formation, *formation.get("other_routes", ()))
    )
    _, value, u95 = routes[0]
    return EntryRow(species["name"], value, u95, formation["source"], species["source"]["file"], routes)


def entry_references(
    rows: Sequence[EntryRow], molecules: Sequence[Molecule], options: ModelOptions
) -> tuple[ReferenceSet, tuple[Finding, ...]]:
    """The entries with the outputs of their species, the lowest of several conformers, each as a reference.

    Raises Refused when the outputs are not all at one level of theory, or when fewer than two entries have one.
    """
    said: list[Finding] = []
    found: list[Reference] = []
    wanted = reference_options(options)
    for row in rows:
        models = [build_model(m, wanted) for m in molecules if not m.is_atom and _belongs(row, m)]
        energies = [m for m in models if m.molecule.energy_hartree is not None]
        if not energies:
            said.append(note("no-output", f"{row.name} has no output with an energy in the folder and is left out"))
            continue
        try:
            found.append(min((_reference(row, m) for m in energies), key=lambda r: r.energy0_kJ_mol))
        except Refused as error:
            said.extend(warn(f.code, f"{row.name} is left out: {f.found}", where=f.where) for f in error.findings)
    unstated = [r.name for r in found if r.row.source.endswith(_EXACT)]
    if unstated:
        said.append(note("no-uncertainty", f"without a stated uncertainty, taken as exact: {', '.join(unstated)}"))
    _check_levels(found)
    return ReferenceSet(tuple(found), collect_atoms(tuple(molecules))), tuple(said)


def _belongs(row: EntryRow, molecule: Molecule) -> bool:
    made_of = PurePath(row.file).name.split(".")[0] if row.file else row.name
    return species_name(molecule) in (made_of, row.name)


_EXACT = " (no uncertainty stated)"


def _reference(row: EntryRow, model: ThermoModel) -> Reference:
    molecule = model.molecule
    identity, increment = identity_of(molecule), element_increment_kJ_mol(model.composition)
    if identity is None or increment is None or molecule.charge:
        what = "its composition has no reference increment, it is an ion, or the output has no geometry"
        raise Refused([refuse("no-reference", what, where=molecule.source.file)])
    value = row.dHf298_kJ_mol - model.h298_minus_h0_kJ_mol + increment
    stated = SpeciesReference(
        name=row.name,
        formula=formula(model.composition, molecule.charge or 0),
        smiles="",
        charge=molecule.charge or 0,
        multiplicity=molecule.multiplicity or 1,
        dHf0_kJ_mol=value,
        dHf298_kJ_mol=row.dHf298_kJ_mol,
        u95_kJ_mol=row.u95_kJ_mol or 0.0,
        source=row.source + (_EXACT if row.u95_kJ_mol is None else ""),
        own=True,
    )
    return Reference(row.name, model, bonding(molecule), stated, value)


def _check_levels(found: Sequence[Reference]) -> None:
    if len(found) < 2:
        words = f"{len(found)} of the entries have an output in the folder"
        raise Refused([refuse("no-output", words, expected="at least two, named like the entries")])
    for other in found[1:]:
        wrong = refusals(level_objections(f"output of {other.name}", other.molecule, found[0].molecule))
        if wrong:
            raise Refused(wrong)
