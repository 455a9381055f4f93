"""Reference species: outputs of molecules whose enthalpy of formation is evaluated, recognised and ready for use."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from pathlib import PurePath
from typing import TYPE_CHECKING, TypeVar

from heatwright.constants import HARTREE_KJ_MOL
from heatwright.elements import formula
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.formation.formation import element_increment_kJ_mol
from heatwright.formation.species_references import SpeciesReference, reference_for
from heatwright.partition.choices import ModelOptions
from heatwright.partition.model import ThermoModel, build_model
from heatwright.structure.bond_orders import Bonding, bonding

if TYPE_CHECKING:
    from heatwright.formation.atomization import Atoms
    from heatwright.molecule import Molecule
    from heatwright.structure.identity import Identity

T = TypeVar("T")


@dataclass(frozen=True, eq=False)
class Reference:
    """One output of a reference species.

    name : the file's, without its suffixes.   row : its evaluated enthalpy of formation.
    dHf0_kJ_mol : that enthalpy at 0 K.
    """

    name: str
    model: ThermoModel
    bonding: Bonding
    row: SpeciesReference
    dHf0_kJ_mol: float

    @property
    def molecule(self) -> Molecule:
        """The molecule of the output."""
        return self.model.molecule

    @property
    def file(self) -> str:
        """The output, as it was named."""
        return self.molecule.source.file

    @property
    def species(self) -> tuple[Identity, int]:
        """What tells the species from others, whatever its conformer: identity and multiplicity."""
        return self.row.identity, self.row.multiplicity

    @property
    def electronic_kJ_mol(self) -> float:
        """Electronic energy, kJ/mol."""
        energy = self.molecule.energy_hartree
        assert energy is not None  # outputs without one are not collected
        return energy * HARTREE_KJ_MOL

    @property
    def energy0_kJ_mol(self) -> float:
        """Energy of the lowest level: electronic and zero-point energy, and the offset of a doublet Π state, kJ/mol."""
        return self.electronic_kJ_mol + self.model.zpe_kJ_mol + self.model.lowest_level_kJ_mol

    @property
    def aliases(self) -> frozenset[str]:
        """The names by which a reaction may call the species."""
        charge = self.molecule.charge or 0
        return frozenset({self.name, self.row.name, self.row.formula, formula(self.model.composition, charge)})


@dataclass(frozen=True, eq=False)
class ReferenceSet:
    """All reference species at hand, at any level, with the atoms; findings say what was passed over and why."""

    references: tuple[Reference, ...]
    atoms: Atoms = field(default_factory=dict)
    findings: tuple[Finding, ...] = ()
    _known: dict[object, object] = field(default_factory=dict, repr=False)

    def once(self, key: object, make: Callable[[], T]) -> T:
        """What *make* gives, computed when first asked for under this key: many targets share their level."""
        if key not in self._known:
            self._known[key] = make()
        return self._known[key]  # type: ignore[return-value]


def species_name(molecule: Molecule) -> str:
    """What an output is called: the name stated in it, or the file's without its suffixes.

    >>> PurePath("refs/CH3OH.out.gz").name.split(".")[0]
    'CH3OH'
    """
    return molecule.stated.name or PurePath(molecule.source.file).name.split(".")[0]


def reference_options(options: ModelOptions) -> ModelOptions:
    """The choices for a target that hold for its references too: those that make the lowest level."""
    return ModelOptions(
        scale=options.scale,
        frequency_scale=options.frequency_scale,
        zpe_scale=options.zpe_scale,
        anharmonic=options.anharmonic,
        electronic="levels" if options.electronic == "levels" else "table",
        pressure_Pa=options.pressure_Pa,
    )


def collect_references(
    molecules: Sequence[Molecule], atoms: Atoms, table: Sequence[SpeciesReference], options: ModelOptions
) -> ReferenceSet:
    """The reference species among molecules that have passed the soundness checks.

    atoms : those that go with them.   table : evaluated enthalpies.
    options : those of the target, see reference_options.
    Raises Refused when a species is in the table with another multiplicity than the output's only: then the output is
    not in its ground state.  Outputs that are not in the table are passed over with a note.
    """
    found: list[Reference] = []
    said: list[Finding] = []
    wanted = reference_options(options)
    for molecule in molecules:
        if molecule.is_atom:
            continue
        row = reference_for(molecule, table)
        if row is None:
            said.append(_unknown(molecule, table))
        elif molecule.energy_hartree is None:
            said.append(warn("no-energy", "a reference output has no total energy", where=molecule.source.file))
        else:
            found.append(_reference(build_model(molecule, wanted), row))
    wrong = [f for f in said if f.severity == "refuse"]
    if wrong:
        raise Refused(wrong)
    ordered = tuple(sorted(found, key=lambda r: (r.name, r.file)))
    return ReferenceSet(ordered, atoms, (*said, *_conformers(ordered)))


def _conformers(references: Sequence[Reference]) -> Iterator[Finding]:
    """That a species is there more than once at one level; the lowest is the one its evaluated enthalpy belongs to."""
    groups: dict[object, list[Reference]] = {}
    for r in references:
        groups.setdefault((r.species, r.molecule.level_text, r.molecule.energy_kind), []).append(r)
    for group in groups.values():
        lowest = min(group, key=lambda r: (r.energy0_kJ_mol, r.file))
        for other in group:
            if other is not lowest:
                above = other.energy0_kJ_mol - lowest.energy0_kJ_mol
                yield note(
                    "conformer-passed-over",
                    f"{above:.2f} kJ/mol above {lowest.file}, which is the same species ({lowest.row.name}); the lower "
                    "one is the reference",
                    where=other.file,
                )


def _reference(model: ThermoModel, row: SpeciesReference) -> Reference:
    value = row.dHf0_kJ_mol
    if value is None:
        increment = element_increment_kJ_mol(model.composition)
        assert increment is not None
        assert row.dHf298_kJ_mol is not None  # the table has one of the two values
        value = row.dHf298_kJ_mol - model.h298_minus_h0_kJ_mol + increment
    return Reference(species_name(model.molecule), model, bonding(model.molecule), row, value)


def _unknown(molecule: Molecule, table: Sequence[SpeciesReference]) -> Finding:
    """That an output is no reference species; a refusal when only its multiplicity stands in the way."""
    for row in table:
        if row.multiplicity != molecule.multiplicity and reference_for(_with_multiplicity(molecule, row), (row,)):
            return refuse(
                "reference-not-ground-state",
                f"{row.name} has the multiplicity {molecule.multiplicity} in this output",
                where=molecule.source.file,
                expected=f"{row.multiplicity}, to which its reference enthalpy belongs",
                action="Compute the reference species in that state, or take the file out of the folder.",
            )
    return note(
        "reference-unknown",
        f"{species_name(molecule)} has no evaluated enthalpy of formation in the table; it is no reference",
        where=molecule.source.file,
    )


def _with_multiplicity(molecule: Molecule, row: SpeciesReference) -> Molecule:
    return replace(molecule, multiplicity=row.multiplicity)
