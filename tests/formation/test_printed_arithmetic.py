"""The arithmetic of formation against printed numbers: ATcT 1.112 to the last digit, and the G2/97 tables of ase."""

from __future__ import annotations

from decimal import Decimal

import pytest
from ase.data import g2_1
from ase.symbols import string2symbols

from heatwright import build_model
from heatwright.constants import HARTREE_KJ_MOL
from heatwright.formation.atomization import collect_atoms, formation_by_atomization
from heatwright.formation.formation import dHf298_from_dHf0, element_increment_kJ_mol
from heatwright.formation.references import AtomReference, atom_reference
from heatwright.formation.species_references import reference_species
from molecules import atom, molecule

SPECIES = {reference.name: reference for reference in reference_species()}


# Energies of dissociation into atoms at 0 K out of values of ATcT 1.112 (B. Ruscic et al.), kJ/mol, as printed.
@pytest.mark.parametrize(("name", "d0"), [("H2O", "917.831"), ("CH4", "1642.088"), ("CO2", "1598.184")])
def test_dissociation_energies(name: str, d0: str) -> None:
    atoms = sum(n * atom_reference(symbol).dHf0_kJ_mol for symbol, n in SPECIES[name].composition.items())
    assert f"{atoms - SPECIES[name].dHf0_kJ_mol:.3f}" == d0


# H(298.15) − H(0), kJ/mol, and the enthalpy of formation that follows, as printed.
@pytest.mark.parametrize(("name", "content", "dHf298"), [("H2O", 9.903, "-241.822"), ("CH4", 10.015, "-74.532")])
def test_enthalpies_at_298(name: str, content: float, dHf298: str) -> None:
    increment = element_increment_kJ_mol(SPECIES[name].composition)
    value = dHf298_from_dHf0(SPECIES[name].dHf0_kJ_mol, content, increment)
    assert f"{value:.3f}" == dHf298
    tabulated = SPECIES[name].dHf298_kJ_mol  # -74.534 of CH4: its content is rounded to 0.002
    assert abs(Decimal(dHf298) - Decimal(str(tabulated))) <= Decimal("0.002")


# Increments of the elements, kJ/mol: NIST-JANAF (1998) less ATcT 1.112; CODATA Key Values (1989) for S, P, Si, B.
@pytest.mark.parametrize(
    ("symbol", "increment"),
    [("H", "4.233"), ("C", "1.051"), ("N", "4.335"), ("O", "4.340"), ("F", "4.412"), ("Cl", "4.591"), ("Br", "12.259"),
     ("S", "4.412"), ("P", "5.360"), ("B", "1.222")],
)  # fmt: skip
def test_increments_as_printed(symbol: str, increment: str) -> None:
    assert f"{atom_reference(symbol).element_H298_H0_kJ_mol:.3f}" == increment
    assert atom_reference("Si").element_H298_H0_kJ_mol == pytest.approx(3.218, abs=0.0011)


KCAL = 4.184
TEN = ["CH4", "H2O", "NH3", "CO2", "CO", "C2H2", "C2H4", "C2H6", "HCN", "CH3OH", "H2CO", "N2H4", "H2O2", "SO2", "CH3Cl",
       "SiH4", "PH3", "HOCl", "O2", "NO"]  # fmt: skip


def g2_atoms() -> dict[str, AtomReference]:
    """Experimental values of the atoms in G2/97 (Curtiss et al., J. Chem. Phys. 106, 1063 (1997)), as in ase."""
    return {
        symbol: AtomReference(
            symbol, "", KCAL * row["enthalpy"], 0.0, "G2/97", KCAL * row["thermal correction"], "G2/97"
        )
        for symbol, row in ((s, g2_1.data[s]) for s in g2_1.atom_names)
    }


@pytest.mark.parametrize("name", TEN)
def test_atomization_energies_of_ase(name: str) -> None:
    """From the table's enthalpy at 298 K, thermal correction and zero-point energy to its atomization energy, and back.

    A molecule whose electronic atomization energy is what ase gives has the enthalpy that ase started from.
    """
    row = g2_1.data[name]
    symbols = string2symbols(row["symbols"])
    references = g2_atoms()
    composition = {s: symbols.count(s) for s in symbols}
    increment = element_increment_kJ_mol(composition, references)
    dHf0 = KCAL * (row["enthalpy"] - row["thermal correction"]) + increment
    apart = sum(references[s].dHf0_kJ_mol for s in symbols) - dHf0 + KCAL * row["ZPE"]
    assert apart / KCAL == pytest.approx(g2_1.get_atomization_energy(name), abs=0.01)

    unpaired = round(abs(sum(row["magmoms"]))) if row["magmoms"] else 0
    made = molecule(" ".join(symbols), row["positions"], [1000.0] * modes(symbols, name), multiplicity=unpaired + 1)
    ground = {"H": 2, "C": 3, "N": 4, "O": 3, "Si": 3, "P": 4, "S": 3, "Cl": 2}
    atoms = collect_atoms([atom(s, ground[s], -10.0) for s in composition])
    energy = -10.0 * len(symbols) - g2_1.get_atomization_energy(name) * KCAL / HARTREE_KJ_MOL
    model = build_model(made.but(energies_hartree={"SCF": energy}))
    formation = formation_by_atomization(model, atoms, references=references)
    # the modes here are stand-ins: what they give is exchanged for what the table gives
    at_0 = formation.dHf0_kJ_mol - model.zpe_kJ_mol + KCAL * row["ZPE"]
    at_298 = formation.dHf298_kJ_mol - model.zpe_kJ_mol - model.h298_minus_h0_kJ_mol
    at_298 += KCAL * (row["ZPE"] + row["thermal correction"])
    assert at_298 / KCAL == pytest.approx(row["enthalpy"], abs=0.01)
    assert dHf298_from_dHf0(at_0, KCAL * row["thermal correction"], increment) == pytest.approx(at_298)


def modes(symbols: list[str], name: str) -> int:
    linear = len(symbols) == 2 or name in ("CO2", "C2H2", "HCN")
    return 3 * len(symbols) - (5 if linear else 6)
