"""The atom outputs that a molecule is set against: ground state, the same level of theory, one for each element."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from heatwright.elements import ground_multiplicity, symbol
from heatwright.findings import Finding, Refused, refusals, refuse
from heatwright.formation.references import AtomReference, elements_with_reference
from heatwright.formation.same_level import level_objections
from heatwright.molecule import Molecule

if TYPE_CHECKING:
    from heatwright.formation.zero_kelvin import ZeroKelvinEnergies

Atoms = Mapping[str, tuple[Molecule, ...]]
"""Atom outputs by element symbol; several levels of theory may lie side by side."""


def collect_atoms(molecules: Iterable[Molecule]) -> dict[str, tuple[Molecule, ...]]:
    """The neutral single atoms among the molecules, by element symbol."""
    found: dict[str, tuple[Molecule, ...]] = {}
    for molecule in molecules:
        if molecule.is_atom and molecule.charge == 0:
            key = symbol(int(molecule.atomic_numbers[0]))
            found[key] = (*found.get(key, ()), molecule)
    return found


@dataclass(frozen=True, eq=False, slots=True)
class ChosenAtoms:
    """One atom output for each element of a molecule, and the 0 K energies in use (None: electronic energies)."""

    atoms: Mapping[str, Molecule]
    stated: ZeroKelvinEnergies | None
    findings: tuple[Finding, ...]

    def energy_hartree(self, molecule: Molecule) -> float:
        """The energy of the molecule or of one of the atoms: electronic, or the one stated for 0 K."""
        if self.stated is not None:
            stated = self.stated.of(molecule)
            assert stated is not None  # the atoms were chosen by it
            return stated.energy0_hartree
        assert molecule.energy_hartree is not None  # checked when the atoms were chosen
        return molecule.energy_hartree


def _with_stated_energy(
    molecule: Molecule, candidates: Atoms, table: ZeroKelvinEnergies | None
) -> tuple[Atoms | None, tuple[Finding, ...]]:
    """As :func:`heatwright.formation.zero_kelvin.with_stated_energy`, which is imported when there is a table."""
    if table is None:
        return None, ()
    from heatwright.formation.zero_kelvin import with_stated_energy

    return with_stated_energy(molecule, candidates, table)


def choose_atoms(
    molecule: Molecule,
    composition: Mapping[str, int],
    atoms: Atoms,
    references: Mapping[str, AtomReference],
    *,
    trust_levels: bool = False,
    zero_kelvin: ZeroKelvinEnergies | None = None,
) -> ChosenAtoms:
    """The atoms for a molecule of this composition; raises Refused with a finding for each thing in the way."""
    needed = {element: atoms.get(element, ()) for element in composition}
    stated, said = _with_stated_energy(molecule, needed, zero_kelvin)
    findings = [*_obstacles(molecule, needed, references, energy_needed=stated is None), *said]
    chosen: dict[str, Molecule] = {}
    for element, candidates in (needed if stated is None else stated).items():
        if not candidates:
            continue
        atom, remarks = _atom_for(element, molecule, candidates, trust_levels, None if stated is None else zero_kelvin)
        findings.extend(remarks)
        if atom is not None:
            chosen[element] = atom
    if refusals(findings):
        raise Refused(findings)
    return ChosenAtoms(chosen, None if stated is None else zero_kelvin, tuple(findings))


def _obstacles(
    molecule: Molecule, needed: Atoms, references: Mapping[str, AtomReference], *, energy_needed: bool
) -> Iterator[Finding]:
    """What stands in the way of atomization before any atom is looked at."""
    if energy_needed and molecule.energy_hartree is None:
        yield refuse(
            "no-energy",
            "the output has no total energy to set against the atoms",
            action="Give an enthalpy of formation by --dHf298.",
        )
    missing = [element for element, found in needed.items() if not found and element in references]
    if missing:
        yield refuse(
            "atom-missing",
            f"there is no atom output for {', '.join(missing)}",
            action=f"Put an output of {'this atom' if len(missing) == 1 else 'these atoms'} at the level of the "
            "molecule into the --atoms folder.",
        )
    for element in needed:
        if element not in references:
            yield refuse(
                "no-reference",
                f"{'deuterium' if element == 'D' else f'element {element}'} has no reference enthalpy",
                expected=f"one of {', '.join(elements_with_reference())}",
                action="Give an enthalpy of formation by --dHf298, or the atom's in a table of references with its "
                "column element_H298_H0_kJ_mol.",
            )


def _atom_for(
    element: str,
    molecule: Molecule,
    candidates: tuple[Molecule, ...],
    trust_levels: bool,
    stated: ZeroKelvinEnergies | None,
) -> tuple[Molecule | None, tuple[Finding, ...]]:
    """The atom output to use for one element, with what has to be said about it."""
    judged = [(atom, _objections(element, atom, molecule, trust_levels, stated)) for atom in candidates]
    usable = [(atom, said) for atom, said in judged if not refusals(said)]
    if not usable:
        return None, judged[0][1]
    atom, said = usable[0]
    spread = max(abs(_energy(other, stated) - _energy(atom, stated)) for other, _ in usable)
    if spread > 1.0e-5:
        files = ", ".join(other.source.file for other, _ in usable)
        return None, (
            refuse(
                "atom-twice",
                f"several outputs of the {element} atom fit ({files}) and differ by {spread:.6f} hartree",
                expected="one energy for each element",
                action="Leave one of them in the --atoms folder.",
            ),
        )
    return atom, said


def _energy(atom: Molecule, stated: ZeroKelvinEnergies | None) -> float:
    energy = stated.of(atom) if stated is not None else None
    value = energy.energy0_hartree if energy is not None else atom.energy_hartree
    assert value is not None  # an objection else
    return value


def _objections(
    element: str, atom: Molecule, molecule: Molecule, trust_levels: bool, stated: ZeroKelvinEnergies | None
) -> tuple[Finding, ...]:
    where = atom.source.file
    ground = ground_multiplicity(int(atom.atomic_numbers[0]))
    said: list[Finding] = []
    if ground is None or atom.multiplicity != ground:
        said.append(
            refuse(
                "atom-not-ground-state",
                f"the {element} atom has the multiplicity {atom.multiplicity}",
                where=where,
                expected=f"{ground}, that of its ground state" if ground else "a tabulated ground state",
                action="Compute the atom in its ground state.",
            )
        )
    said.extend(f.at(where) for f in refusals(atom.findings))
    if stated is not None:
        return tuple(said)  # the table states one level for all of them
    if atom.energy_hartree is None:
        said.append(refuse("no-energy", f"the {element} atom has no total energy", where=where))
    said.extend(level_objections(f"{element} atom", atom, molecule, trust=trust_levels))
    return tuple(said)
