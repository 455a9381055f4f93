"""The entry of a species of a manifest, made straight from its choices, without store and release."""

from __future__ import annotations

import sys
from pathlib import Path

from heatwright.entry import Entry, make_entry
from heatwright.findings import Refused, refusals
from heatwright.formation.atomization import collect_atoms
from heatwright.formation.reference_set import collect_references
from heatwright.formation.routes import RouteRequest, formation_of
from heatwright.formation.species_references import merged_references, read_references
from heatwright.molecule import Molecule
from heatwright.project.conversion import (
    energy_choices,
    fit_options,
    model_options,
    species_reading,
    stated_enthalpy,
)
from heatwright.project.manifest_types import ProjectPath, SpeciesRequest
from heatwright.reading.outputs import read_output
from heatwright.species import usable_species
from heatwright.writing.context import entries_context
from heatwright.writing.formats import FORMATS
from heatwright.writing.render import render_format


def entry_of(species: SpeciesRequest) -> Entry:
    """The entry of a species; raises Refused."""
    options, f = model_options(species.model), species.formation
    files = tuple((one.output.path, one.energy.path if one.energy else None) for one in species.files)
    own = () if f.folders.reference_table is None else read_references(f.folders.reference_table.path)
    choices = energy_choices(f, own, species.reading.accept)
    model = usable_species(files, species_reading(species), options, trust_levels=f.trust_levels, for_entry=True)
    atoms = None if f.folders.atoms is None else collect_atoms(molecules(f.folders.atoms))
    references = None
    if f.folders.references is not None:
        usable = [m for m in molecules(f.folders.references) if not refusals(m.findings)]
        beside = collect_atoms(usable) if atoms is None else atoms
        references = collect_references(usable, beside, merged_references(own)[0], options)
    request = RouteRequest(
        route=f.route,
        name=species.name,
        given=stated_enthalpy(f),
        atoms=atoms,
        references=references,
        reaction=f.reaction,
        choices=choices,
    )
    return make_entry(species.name, model, formation_of(model, request), fit_options(species.fit))


def molecules(folder: ProjectPath) -> list[Molecule]:
    """The outputs in a folder."""
    found = []
    for file in sorted(p for p in Path(folder.path).iterdir() if p.is_file()):
        try:
            found.append(read_output(str(file)))
        except Refused as error:
            print(error, file=sys.stderr)
    return found


def record(species: SpeciesRequest) -> str:
    """The record of a thermo file."""
    return render_format(FORMATS["nasa7"].template, entries_context([entry_of(species)], []))
