"""Enthalpy of formation through atomization: the molecule against its atoms at the same level of theory."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Mapping
from math import fsum
from typing import TYPE_CHECKING

from heatwright.constants import HARTREE_KJ_MOL
from heatwright.findings import Finding, Refused, note, refusals, refuse
from heatwright.formation.atom_choice import Atoms, ChosenAtoms, choose_atoms, collect_atoms
from heatwright.formation.formation import Electron, Formation, LedgerLine, electron_lines, with_electron
from heatwright.formation.plausibility import energy_findings
from heatwright.formation.references import (
    SPIN_ORBIT_SOURCE,
    AtomReference,
    atom_references,
    spin_orbit_lowering_kJ_mol,
)

if TYPE_CHECKING:
    from heatwright.formation.corrections import Correction
    from heatwright.formation.zero_kelvin import ZeroKelvinEnergies
    from heatwright.partition.model import ThermoModel

__all__ = ["Atoms", "collect_atoms", "formation_by_atomization"]

_DOUBLET = "levels of the doublet Pi state (Hill and Van Vleck 1928)"


def formation_by_atomization(
    model: ThermoModel,
    atoms: Atoms,
    *,
    trust_levels: bool = False,
    spin_orbit: bool = False,
    corrections: Iterable[Correction] = (),
    zero_kelvin: ZeroKelvinEnergies | None = None,
    electron: Electron = "thermal",
    references: Mapping[str, AtomReference] | None = None,
    accept: Collection[str] = (),
) -> Formation:
    """ΔfH° from the atomization energy at 0 K.

    ΔfH°(0) = Σ ΔfH°(atom, 0) − [Σ E(atom) − E − ZPE − ε₀]; then ΔfH°(298.15) by the enthalpy increments.  ε₀ is the
    lowest level of a doublet Π state from its origin without spin-orbit coupling, 0 for everything else.
    Source: L. A. Curtiss, K. Raghavachari, P. C. Redfern, J. A. Pople, J. Chem. Phys. 106, 1063 (1997).

    trust_levels : combine energies although levels or programs differ; every difference is then a finding.
    spin_orbit : take the computed atoms, which know no spin-orbit coupling, down to their lowest levels.
    corrections : the user's, for each atom or bond of a kind; they count at 0 K and at 298.15 K alike.
    zero_kelvin : energies of a composite scheme that replace E + ZPE for the molecule and for its atoms.
    electron : the convention for the electrons of an ion at 298.15 K; at 0 K there is no difference.
    references : values of the atoms by symbol, the built-in ones unless given.
    accept : with ``"energy"`` an energy that is off by more than a bond is a warning.

    Raises Refused with a finding for each element that has no usable atom or no reference value, for atoms outside
    their ground-state multiplicity, for levels of theory that differ, and for an implausible energy.  The error of the
    level of theory itself is not known to this route, so no uncertainty is stated.
    """
    known = atom_references() if references is None else references
    chosen = choose_atoms(
        model.molecule, model.composition, atoms, known, trust_levels=trust_levels, zero_kelvin=zero_kelvin
    )
    said = (*chosen.findings, *energy_findings(model.molecule, _bond_energy(model, chosen), accept))
    if refusals(said):
        raise Refused(said)
    counted = {element: (n, known[element]) for element, n in model.composition.items()}
    added = (
        *(_spin_orbit_lines(model) if spin_orbit else ()),
        *_correction_lines(corrections, model),
    )
    at_0 = (*_atom_lines(counted), *_energy_lines(model, chosen), *added)
    charge = model.molecule.charge or 0
    ledger = (*at_0, *_thermal_lines(model, counted), *electron_lines(charge, electron))
    sources = "; ".join(dict.fromkeys(reference.source for _, reference in counted.values()))
    source = f"atoms at {_level(model, chosen)}, their enthalpies of formation at 0 K from {sources}{_added(added)}"
    certain = model.molecule.is_atom and not charge  # an atom against itself has no bond to break
    return Formation(
        dHf298_kJ_mol=fsum(line.value_kJ_mol for line in ledger),
        dHf0_kJ_mol=fsum(line.value_kJ_mol for line in at_0),
        u95_kJ_mol=None,
        method="atomization",
        source=with_electron(source, charge, electron),
        ledger=ledger,
        findings=said if certain else (*said, _level_error(model, chosen)),
    )


def _correction_lines(corrections: Iterable[Correction], model: ThermoModel) -> tuple[LedgerLine, ...]:
    if not corrections:
        return ()
    from heatwright.formation.corrections import correction_lines

    return correction_lines(corrections, model.composition, model.molecule)


def _added(lines: Collection[LedgerLine]) -> str:
    """What was added beside energies and reference values, for the source."""
    spin_orbit = any(line.source == SPIN_ORBIT_SOURCE for line in lines)
    corrections = dict.fromkeys(line.source for line in lines if line.source != SPIN_ORBIT_SOURCE)
    parts = ["; spin-orbit lowering of the atoms"] if spin_orbit else []
    return "".join([*parts, *(f"; corrections from {source}" for source in corrections)])


def _level_error(model: ThermoModel, chosen: ChosenAtoms) -> Finding:
    known = model.molecule.level_of_energy or chosen.stated
    return note(
        "no-uncertainty",
        f"the enthalpy of formation carries the error of {_level(model, chosen) if known else 'the level of theory'} "
        "for breaking every bond, which this route cannot know",
        action="Compare with an evaluated value where there is one.",
    )


def _level(model: ThermoModel, chosen: ChosenAtoms) -> str:
    if chosen.stated is not None:
        return chosen.stated.levels_text([model.molecule])
    level = model.molecule.level_of_energy
    return level.label if level else "level of theory not printed"


def _bond_energy(model: ThermoModel, chosen: ChosenAtoms) -> float:
    """The calculated atomization energy at 0 K, kJ/mol."""
    zpe = 0.0 if chosen.stated is not None else model.zpe_kJ_mol
    return _apart(model, chosen) - zpe


def _apart(model: ThermoModel, chosen: ChosenAtoms) -> float:
    """Σ E(atom) − E, kJ/mol."""
    energies = fsum(n * chosen.energy_hartree(chosen.atoms[element]) for element, n in model.composition.items())
    return (energies - chosen.energy_hartree(model.molecule)) * HARTREE_KJ_MOL


def _atom_lines(counted: Mapping[str, tuple[int, AtomReference]]) -> Iterator[LedgerLine]:
    for element, (n, reference) in counted.items():
        what = f"{n} x enthalpy of formation of {element} at 0 K"
        yield LedgerLine(what, n * reference.dHf0_kJ_mol, reference.source)


def _energy_lines(model: ThermoModel, chosen: ChosenAtoms) -> Iterator[LedgerLine]:
    """The energies of molecule and atoms, with the zero-point energy or with it included, and the step to ε₀."""
    level, apart = _level(model, chosen), _apart(model, chosen)
    if chosen.stated is not None:
        stated = [chosen.stated.of(m) for m in (model.molecule, *chosen.atoms.values())]
        sources = "; ".join(dict.fromkeys(energy.source for energy in stated if energy is not None))
        yield LedgerLine("atomization energy at 0 K, as stated", -apart, f"{level}, {sources}")
    else:
        kind = f", {model.molecule.energy_kind}" if model.molecule.energy_kind else ""
        yield LedgerLine(f"electronic atomization energy{kind}", -apart, level)
        yield LedgerLine("zero-point energy", model.zpe_kJ_mol, model.zpe_text)
    if model.lowest_level_kJ_mol:
        yield LedgerLine("lowest real level from its spin-orbit-free origin", model.lowest_level_kJ_mol, _DOUBLET)


def _spin_orbit_lines(model: ThermoModel) -> Iterator[LedgerLine]:
    """What the lowest levels of the atoms lie below the computed energies; an atom against itself needs none."""
    if model.molecule.is_atom and not model.molecule.charge:
        return
    for element, n in model.composition.items():
        lowering = spin_orbit_lowering_kJ_mol(element)
        if lowering is None:
            raise Refused([_no_levels(element)])
        if lowering:
            yield LedgerLine(f"{n} x spin-orbit lowering of {element}", n * lowering, SPIN_ORBIT_SOURCE)


def _no_levels(element: str) -> Finding:
    return refuse(
        "no-reference",
        f"the levels of the ground term of {element} are not in the table, so its spin-orbit lowering is not known",
        action="Leave the spin-orbit correction out, or give it as a correction for each atom with its source.",
    )


def _thermal_lines(model: ThermoModel, counted: Mapping[str, tuple[int, AtomReference]]) -> Iterator[LedgerLine]:
    """From 0 K to 298.15 K."""
    yield LedgerLine("H(298.15 K) - H(0) of the species", model.h298_minus_h0_kJ_mol, "partition function")
    for element, (n, r) in counted.items():
        what = f"{n} x H(298.15 K) - H(0) of {element}, {r.reference_state}"
        yield LedgerLine(what, -n * r.element_H298_H0_kJ_mol, r.increment_source)
