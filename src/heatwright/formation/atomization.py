"""Enthalpy of formation through atomization: the molecule against its atoms at the same level of theory."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from heatwright.constants import HARTREE_KJ_MOL
from heatwright.elements import ground_multiplicity, symbol
from heatwright.findings import Finding, Refused, note, refusals, refuse
from heatwright.formation.formation import (
    Formation,
    LedgerLine,
    dHf298_from_dHf0,
    element_increment_kJ_mol,
)
from heatwright.formation.references import AtomReference, atom_reference, elements_with_reference
from heatwright.formation.same_level import level_objections
from heatwright.molecule import Molecule
from heatwright.partition.model import ThermoModel

Atoms = Mapping[str, tuple[Molecule, ...]]
"""Atom outputs by element symbol; several levels of theory may lie side by side."""


_DOUBLET = "levels of the doublet Pi state (Hill and Van Vleck 1928)"


def collect_atoms(molecules: tuple[Molecule, ...]) -> dict[str, tuple[Molecule, ...]]:
    """The neutral single atoms among the molecules, by element symbol."""
    found: dict[str, tuple[Molecule, ...]] = {}
    for molecule in molecules:
        if molecule.is_atom and molecule.charge == 0:
            key = symbol(int(molecule.atomic_numbers[0]))
            found[key] = (*found.get(key, ()), molecule)
    return found


def formation_by_atomization(model: ThermoModel, atoms: Atoms, *, trust_levels: bool = False) -> Formation:
    """ΔfH° from the atomization energy at 0 K.

    ΔfH°(0) = Σ ΔfH°(atom, 0) − [Σ E(atom) − E − ZPE − ε₀]; then ΔfH°(298.15) by the enthalpy increments.  ε₀ is the
    lowest level of a doublet Π state from its origin without spin-orbit coupling, 0 for everything else.
    Source: L. A. Curtiss, K. Raghavachari, P. C. Redfern, J. A. Pople, J. Chem. Phys. 106, 1063 (1997).

    trust_levels : combine energies although levels or programs differ; every difference is then a finding.
    Raises Refused with a finding for each element that has no usable atom or no reference value, for atoms outside
    their ground-state multiplicity and for levels of theory that differ.  The error of the level of theory itself is
    not known to this route, so no uncertainty is stated.
    """
    findings = list(_obstacles(model, atoms))
    chosen: dict[str, Molecule] = {}
    for element in (e for e in model.composition if atoms.get(e)):
        atom, said = _atom_for(element, model.molecule, atoms[element], trust_levels)
        findings.extend(said)
        if atom is not None:
            chosen[element] = atom
    if refusals(findings):
        raise Refused(findings)
    certain = model.molecule.is_atom  # an atom against itself has no bond to break
    return _formation(model, chosen, tuple(findings) if certain else (*findings, _level_error(model)))


def _level_error(model: ThermoModel) -> Finding:
    level = model.molecule.level_of_energy.label if model.molecule.level_of_energy else "the level of theory"
    return note(
        "no-uncertainty",
        f"the enthalpy of formation carries the error of {level} for breaking every bond, which this route cannot know",
        action="Compare with an evaluated value where there is one.",
    )


def _obstacles(model: ThermoModel, atoms: Atoms) -> Iterator[Finding]:
    """What stands in the way of atomization before any atom is looked at."""
    if model.molecule.energy_hartree is None:
        yield refuse(
            "no-energy",
            "the output has no total energy to set against the atoms",
            action="Give an enthalpy of formation by --dHf298.",
        )
    missing = [element for element in model.composition if not atoms.get(element) and atom_reference(element)]
    if missing:
        yield refuse(
            "atom-missing",
            f"there is no atom output for {', '.join(missing)}",
            action=f"Put an output of {'this atom' if len(missing) == 1 else 'these atoms'} at the level of the "
            "molecule into the --atoms folder.",
        )
    for element in model.composition:
        if atom_reference(element) is None:
            yield refuse(
                "no-reference",
                f"{'deuterium' if element == 'D' else f'element {element}'} has no reference enthalpy",
                expected=f"one of {', '.join(elements_with_reference())}",
                action="Give an enthalpy of formation by --dHf298.",
            )
    if model.molecule.charge:
        yield refuse(
            "no-formation",
            f"the species carries the charge {model.molecule.charge:+d}; atomization is offered for neutral species",
            action="Give an enthalpy of formation by --dHf298; --source should name its electron convention.",
        )


def _formation(model: ThermoModel, atoms: Mapping[str, Molecule], findings: tuple[Finding, ...]) -> Formation:
    counts = model.composition
    references = {element: _reference(element) for element in counts}
    atom_sum = sum(n * references[element].dHf0_kJ_mol for element, n in counts.items())
    energy_sum = sum(n * _energy(atoms[element]) for element, n in counts.items())
    electronic = (energy_sum - _energy(model.molecule)) * HARTREE_KJ_MOL
    lowest = model.lowest_level_kJ_mol
    dHf0 = atom_sum - (electronic - model.zpe_kJ_mol - lowest)
    increment = element_increment_kJ_mol(counts)
    assert increment is not None  # every element has a reference here
    level = model.molecule.level_of_energy.label if model.molecule.level_of_energy else "level of theory not printed"
    ledger = (
        *(
            LedgerLine(f"{n} x enthalpy of formation of {e} at 0 K", n * r.dHf0_kJ_mol, r.source)
            for (e, n), r in zip(counts.items(), references.values(), strict=True)
        ),
        LedgerLine("electronic atomization energy", -electronic, level),
        LedgerLine("zero-point energy", model.zpe_kJ_mol, model.zpe_text),
        *([LedgerLine("lowest real level from its spin-orbit-free origin", lowest, _DOUBLET)] if lowest else []),
        LedgerLine("H(298.15 K) - H(0) of the species", model.h298_minus_h0_kJ_mol, "partition function"),
        *(
            LedgerLine(
                f"{n} x H(298.15 K) - H(0) of {e}, {r.reference_state}",
                -n * r.element_H298_H0_kJ_mol,
                r.increment_source,
            )
            for (e, n), r in zip(counts.items(), references.values(), strict=True)
        ),
    )
    sources = "; ".join(dict.fromkeys(r.source for r in references.values()))
    return Formation(
        dHf298_kJ_mol=dHf298_from_dHf0(dHf0, model.h298_minus_h0_kJ_mol, increment),
        dHf0_kJ_mol=dHf0,
        u95_kJ_mol=None,
        method="atomization",
        source=f"atoms at {level}, their enthalpies of formation at 0 K from {sources}",
        ledger=ledger,
        findings=findings,
    )


def _reference(element: str) -> AtomReference:
    reference = atom_reference(element)
    assert reference is not None  # checked before
    return reference


def _energy(molecule: Molecule) -> float:
    energy = molecule.energy_hartree
    assert energy is not None  # checked before
    return energy


def _atom_for(
    element: str, molecule: Molecule, candidates: tuple[Molecule, ...], trust_levels: bool
) -> tuple[Molecule | None, tuple[Finding, ...]]:
    """The atom output to use for one element, with what has to be said about it."""
    judged = [(atom, _objections(element, atom, molecule, trust_levels)) for atom in candidates]
    usable = [(atom, said) for atom, said in judged if not refusals(said)]
    if not usable:
        return None, judged[0][1]
    atom, said = usable[0]
    spread = max(abs(_energy(other) - _energy(atom)) for other, _ in usable)
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


def _objections(element: str, atom: Molecule, molecule: Molecule, trust_levels: bool) -> tuple[Finding, ...]:
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
    if atom.energy_hartree is None:
        said.append(refuse("no-energy", f"the {element} atom has no total energy", where=where))
    said.extend(level_objections(f"{element} atom", atom, molecule, trust=trust_levels))
    return tuple(said)
