"""What a first manifest says of a folder's species: energies, levels, factors, routes; each species is tried out."""

from __future__ import annotations

import os
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Final, Literal

from heatwright.elements import symbol
from heatwright.findings import Refused, refusals
from heatwright.formation.atomization import Atoms, collect_atoms
from heatwright.formation.reference_set import ReferenceSet, collect_references
from heatwright.formation.routes import RouteRequest, formation_of
from heatwright.formation.same_level import level_objections
from heatwright.formation.species_references import reference_for, reference_species
from heatwright.molecule import Molecule
from heatwright.partition.choices import ModelOptions
from heatwright.partition.mixing import mixture_model
from heatwright.partition.model import ThermoModel, build_model
from heatwright.project.grouping import Group, Grouping, grouped, level_label
from heatwright.project.inventory import Found, Inventory, by_folder
from heatwright.reading.outputs import read_output
from heatwright.reading.single_point import with_energy
from heatwright.reading.torsion_scans import Torsion, read_torsion
from heatwright.scales import choose_published

_NETWORK: Final = 8
"""With fewer reference species among the outputs it is not worth saying that they could serve."""


@dataclass(eq=False)
class PlannedSpecies:
    """One species of the manifest.

    energies : single point in use for an output's path.   scans : those that can be used.
    level : name of the [levels] table, empty for the mechanism's own.   published : whether there are scale factors.
    broken : why no entry can be made of it as it stands; it is then written as comments.
    """

    group: Group
    energies: dict[str, Found] = field(default_factory=dict)
    scans: list[str] = field(default_factory=list)
    level: str = ""
    published: bool = True
    broken: str = ""

    @property
    def files(self) -> list[tuple[Found, Found | None]]:
        """Each output with the single point that gives its energy."""
        return [(one, self.energies.get(one.path)) for one in self.group.outputs]


@dataclass(eq=False)
class Plan:
    """A whole first manifest.

    atoms : folder in [mechanism] with what it holds in words, empty for none.   levels : name -> folder of its atoms.
    atom_files : symbol and path of every atom.   about_atoms : what a folder of atoms holds, in words.
    references : folder.   scaled : whether published factors are taken by default.   remarks : on [mechanism].
    """

    species: list[PlannedSpecies]
    unused: list[tuple[str, str]]
    atoms: str = ""
    levels: dict[str, str] = field(default_factory=dict)
    references: str = ""
    scaled: bool = False
    unpublished: tuple[str, ...] = ()
    n_known: int = 0
    about_atoms: dict[str, str] = field(default_factory=dict)
    atom_files: tuple[tuple[str, str], ...] = ()


def planned(folder: str, inventory: Inventory) -> Plan:
    """The plan for an inventory of a folder."""
    grouping: Grouping = grouped(inventory)
    atoms: dict[str, Atoms] = {
        place: collect_atoms(f.molecule for f in found) for place, found in by_folder(inventory.atoms)
    }
    plan = Plan([PlannedSpecies(group) for group in grouping.groups], grouping.unused)
    _references(plan, inventory)
    of_references = collect_atoms(f.molecule for f in inventory.references if f.folder == plan.references)
    supports = [*atoms.values(), *([of_references] if of_references else [])]
    for species in plan.species:
        _choose_energy(species, supports)
    _choose_levels(plan, atoms)
    _choose_scaling(plan)
    tried = _Attempts(folder, plan, atoms, _reference_set(plan, inventory, of_references or atoms.get(plan.atoms, {})))
    for species in plan.species:
        tried.settle(species)
    plan.n_known = _known(plan)
    _describe_atoms(plan, inventory)
    return plan


def _references(plan: Plan, inventory: Inventory) -> None:
    """The folder of references with the most species of known enthalpy; outputs of others are not used."""
    known = {
        place: sum(reference_for(f.molecule, reference_species()) is not None for f in found)
        for place, found in by_folder(inventory.references)
    }
    plan.references = max(known, key=lambda place: known[place], default="")
    if plan.references and not known[plan.references]:
        plan.unused.append((plan.references, "no species in it has an evaluated enthalpy of formation"))
        plan.references = ""
    others = [f for f in inventory.references if f.folder != plan.references]
    plan.unused += [(f.path, "lies in another folder of references") for f in others if plan.references]


def _reference_set(plan: Plan, inventory: Inventory, atoms: Atoms) -> ReferenceSet | None:
    if not plan.references:
        return None
    molecules = [f.molecule for f in inventory.references if f.folder == plan.references]
    scale: Literal["published"] | None = "published" if plan.scaled else None
    try:
        return collect_references(molecules, atoms, reference_species(), ModelOptions(scale=scale))
    except Refused as error:
        plan.unused.append((plan.references, _in_words(error)))
        plan.references = ""
        return None


def _choose_energy(species: PlannedSpecies, supports: Sequence[Atoms]) -> None:
    """The single points of one level that all outputs have and the atoms too, else the outputs' own energies."""
    group = species.group
    by_level = [{level_label(e.molecule): e for e in group.energies.get(one.path, [])} for one in group.outputs]
    shared = sorted(set.intersection(*(set(levels) for levels in by_level)))
    sets = [{one.path: levels[label] for one, levels in zip(group.outputs, by_level, strict=True)} for label in shared]
    options: list[dict[str, Found]] = [*sets, {}]
    supported = [chosen for chosen in options if _has_atoms(group, chosen, supports)]
    species.energies = next(iter(supported or options))
    for one in group.outputs:
        used = species.energies.get(one.path)
        if used is not None:
            level = level_label(used.molecule)
            also = ", where the atoms are too" if supported else ""
            group.remarks.append(f"{used.path} is a single point at the geometry of {one.path}, at {level}{also}")
        for other in group.energies.get(one.path, []):
            if other is not used:
                why = "the atoms are not there at its level" if supports else "another level than that in use"
                group.left_out.append((f'energy "{other.path}"', f"{level_label(other.molecule)}: {why}"))


def _has_atoms(group: Group, energies: dict[str, Found], supports: Sequence[Atoms]) -> bool:
    molecule = _molecule(group.main, energies.get(group.main.path))
    return any(_covers(atoms, molecule) for atoms in supports)


def _covers(atoms: Atoms, molecule: Molecule | None) -> bool:
    """Whether a folder's atoms hold every element of a molecule at the level of its energy."""
    if molecule is None:
        return False
    needed = {int(z) for z in molecule.atomic_numbers}
    fitting = {
        int(atom.atomic_numbers[0])
        for found in atoms.values()
        for atom in found
        if not refusals(level_objections("atom", atom, molecule))
    }
    return needed <= fitting


def _molecule(one: Found, energy: Found | None) -> Molecule | None:
    try:
        return one.molecule if energy is None else with_energy(one.molecule, energy.molecule)
    except Refused:
        return None


def _choose_levels(plan: Plan, atoms: dict[str, Atoms]) -> None:
    """The folder of atoms that serves most species for [mechanism], others as [levels]."""
    serving: dict[int, list[str]] = {}
    for index, species in enumerate(plan.species):
        main = species.group.main
        molecule = _molecule(main, species.energies.get(main.path))
        serving[index] = [place for place in atoms if _covers(atoms[place], molecule)]
    count = Counter(place for places in serving.values() for place in places)
    plan.atoms = max(count, key=lambda place: (count[place], [-ord(c) for c in place]), default="")
    for index, species in enumerate(plan.species):
        places = serving[index]
        if places and plan.atoms not in places:
            main = species.group.main
            energy = species.energies.get(main.path, main)
            species.level = level_label(energy.molecule)
            plan.levels[species.level] = places[0]
            species.group.remarks.append(f"the atoms at its level are in {places[0]}")


def _choose_scaling(plan: Plan) -> None:
    """Published factors by default where any level has them; 1, said so, for the species whose level has none."""
    lacking: set[str] = set()
    for species in plan.species:
        molecule = species.group.main.molecule
        if molecule.wavenumbers_cm1.size and not _is_published(molecule):
            species.published = False
            lacking.add(level_label(molecule))
    plan.scaled = any(species.published for species in plan.species)
    plan.unpublished = tuple(sorted(lacking))


def _is_published(molecule: Molecule) -> bool:
    if molecule.level is None:
        return False
    try:
        choose_published(molecule.level)
    except Refused:
        return False
    return True


class _Attempts:
    """Making the species as the manifest will say, to leave out or to comment out what cannot be made."""

    def __init__(self, folder: str, plan: Plan, atoms: dict[str, Atoms], references: ReferenceSet | None) -> None:
        self.folder, self.plan, self.atoms, self.references = folder, plan, atoms, references

    def settle(self, species: PlannedSpecies) -> None:
        """Keeps the scans and conformers with which the species can be made, and notes why it cannot be made at all."""
        group = species.group
        torsions: list[Torsion] = []
        for scan in list(group.scans):
            try:
                torsion = read_torsion(os.path.join(self.folder, scan.path))
                self._model(species, [*torsions, torsion])
            except Refused as error:
                group.left_out.append((f'torsion "{scan.path}"', _in_words(error)))
                group.remarks = [r for r in group.remarks if not r.startswith(f"{scan.path} (")]
            else:
                torsions.append(torsion)
                species.scans.append(scan.path)
        try:
            model = self._mixture(species, torsions)
            self._formation(species, model)
        except Refused as error:
            species.broken = _in_words(error)

    def _mixture(self, species: PlannedSpecies, torsions: list[Torsion]) -> ThermoModel:
        models = self._models(species, torsions)
        if len(models) == 1:
            return models[0]
        try:
            return mixture_model(models)
        except Refused as error:
            group = species.group
            group.left_out += [(f'conformer "{one.path}"', _in_words(error)) for one in group.conformers]
            group.conformers = []
            return models[0]

    def _models(self, species: PlannedSpecies, torsions: list[Torsion]) -> list[ThermoModel]:
        return [self._of(one, energy, species, torsions) for one, energy in species.files]

    def _model(self, species: PlannedSpecies, torsions: list[Torsion]) -> ThermoModel:
        one, energy = species.files[0]
        return self._of(one, energy, species, torsions)

    def _of(self, one: Found, energy: Found | None, species: PlannedSpecies, torsions: list[Torsion]) -> ThermoModel:
        molecule = one.molecule
        if torsions:
            molecule = read_output(os.path.join(self.folder, one.path), with_hessian=True)
        if energy is not None:
            molecule = with_energy(molecule, energy.molecule)
        published, wishes = self.plan.scaled and species.published, tuple(torsions)
        if self.plan.scaled and not species.published:
            return build_model(molecule, ModelOptions(frequency_scale=1.0, zpe_scale=1.0, torsions=wishes))
        return build_model(molecule, ModelOptions(scale="published" if published else None, torsions=wishes))

    def _formation(self, species: PlannedSpecies, model: ThermoModel) -> None:
        """Goes the way to the enthalpy of formation, where there are atoms or references at all."""
        place = self.plan.levels.get(species.level, self.plan.atoms)
        atoms = self.atoms.get(place)
        references = self.references if not species.level else None
        if atoms is None and references is None:
            return
        formation_of(model, RouteRequest(name=species.group.name, atoms=atoms, references=references))


def _in_words(error: Refused) -> str:
    """The refusals of an attempt, without places, in one line."""
    words = [" ".join(f.found.split()) for f in refusals(error.findings)]
    return "; ".join(dict.fromkeys(words))


def _known(plan: Plan) -> int:
    """How many of the species have an evaluated enthalpy of formation and could serve as references."""
    if plan.references:
        return 0
    mains = [s.group.main for s in plan.species if s.group.main.folder == "."]
    known = sum(reference_for(main.molecule, reference_species()) is not None for main in mains)
    return known if known >= _NETWORK else 0


def _describe_atoms(plan: Plan, inventory: Inventory) -> None:
    for place, found in by_folder(inventory.atoms):
        elements = sorted({level_label(f.molecule) for f in found})
        names = sorted({f.path.rpartition("/")[2] for f in found})
        plan.about_atoms[place] = f"{', '.join(names)} at {', '.join(elements)}"
    plan.atom_files = tuple((symbol(int(f.molecule.atomic_numbers[0])), f.path) for f in inventory.atoms)
    used = {plan.atoms, *plan.levels.values()}
    unused = [f for f in inventory.atoms if f.folder not in used]
    plan.unused += [(f.path, "an atom at a level that no species has") for f in unused]
