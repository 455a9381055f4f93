"""Enthalpies of formation: the arithmetic against ATcT, and every way in which energies must not be combined."""

from __future__ import annotations

import pytest

from heatwright import ModelOptions, build_model
from heatwright.constants import CM1_KJ_MOL, HARTREE_KJ_MOL
from heatwright.errors import UsageError
from heatwright.findings import Refused
from heatwright.formation.atomization import collect_atoms, formation_by_atomization
from heatwright.formation.formation import (
    dHf298_from_dHf0,
    element_increment_kJ_mol,
    formation_given,
    parse_enthalpy,
)
from heatwright.formation.references import atom_reference, elements_with_reference
from heatwright.molecule import Molecule
from molecules import LEVEL, atom, molecule, water


def from_dataclass(instance, **changes):
    import dataclasses

    return dataclasses.replace(instance, **changes)


# ΔfH°(0 K), H°(298.15) − H°(0) and ΔfH°(298.15 K), kJ/mol: ATcT 1.112 (B. Ruscic et al., Argonne National Laboratory).
@pytest.mark.parametrize(
    ("atoms", "dHf0", "increment", "dHf298"),
    [({"H": 2, "O": 1}, -238.919, 9.903, -241.822), ({"C": 1, "H": 4}, -66.564, 10.015, -74.532)],
)
def test_from_0_to_298(atoms: dict[str, int], dHf0: float, increment: float, dHf298: float) -> None:
    elements = element_increment_kJ_mol(atoms)
    assert elements is not None
    assert dHf298_from_dHf0(dHf0, increment, elements) == pytest.approx(dHf298, abs=0.0005)


# Energies of dissociation into atoms at 0 K that follow from ATcT 1.112, kJ/mol.
def test_atomization_energies_that_follow_from_the_atoms() -> None:
    h, c, o = (atom_reference(s).dHf0_kJ_mol for s in "HCO")
    assert 2 * h + o + 238.919 == pytest.approx(917.831, abs=5e-4)
    assert c + 4 * h + 66.564 == pytest.approx(1642.088, abs=5e-4)
    assert c + 2 * o + 393.108 == pytest.approx(1598.184, abs=5e-4)


ATOMS = {"H": atom("H", 2, -0.5), "O": atom("O", 3, -75.0)}


def water_bound_by(d0_kJ_mol: float, **changes) -> Molecule:
    """Water whose energy makes its dissociation energy at 0 K (harmonic, unscaled) what is asked for."""
    zpe = build_model(water()).zpe_kJ_mol
    energy = -76.0 - (d0_kJ_mol + zpe) / HARTREE_KJ_MOL
    return water(**({"energies_hartree": {"SCF": energy}} | changes))


def atoms_of(*molecules: Molecule):
    return collect_atoms(molecules)


def test_atomization_of_water() -> None:
    formation = formation_by_atomization(build_model(water_bound_by(917.831)), atoms_of(*ATOMS.values()))
    assert formation.dHf0_kJ_mol == pytest.approx(-238.919, abs=1e-3)
    assert formation.dHf298_kJ_mol == pytest.approx(-241.82, abs=0.03)  # harmonic H°(298.15) − H°(0)
    assert sum(line.value_kJ_mol for line in formation.ledger) == pytest.approx(formation.dHf298_kJ_mol, abs=1e-9)
    assert all(line.source for line in formation.ledger)
    assert formation.u95_kJ_mol is None
    assert formation.method == "atomization"


def test_the_scaled_zero_point_energy_is_the_one_used() -> None:
    molecule = water_bound_by(900.0)
    unscaled, scaled = (build_model(molecule, ModelOptions(zpe_scale=x)) for x in (None, 0.9806))
    a, b = (formation_by_atomization(model, atoms_of(*ATOMS.values())) for model in (unscaled, scaled))
    assert a.dHf0_kJ_mol - b.dHf0_kJ_mol == pytest.approx(unscaled.zpe_kJ_mol * (1 - 0.9806), rel=1e-9)


def test_the_lowest_level_of_a_doublet_pi_radical_is_a_line_of_the_ledger() -> None:
    # OH: −38.2 cm⁻¹ from the spin-free origin, B. Ruscic et al., J. Phys. Chem. A 106, 2727 (2002), from memory.
    geometry = [[0.0, 0.0, 0.0], [0.0, 0.0, 0.97]]
    oh = molecule("O H", geometry, [3568.0], multiplicity=2, energies_hartree={"SCF": -75.7})
    plain, summed = (
        formation_by_atomization(build_model(oh, ModelOptions(electronic=kind)), atoms_of(*ATOMS.values()))
        for kind in ("table", "levels")
    )
    (line,) = [entry for entry in summed.ledger if "lowest real level" in entry.what]
    assert line.value_kJ_mol == pytest.approx(-38.2 * CM1_KJ_MOL, abs=0.001)
    assert not [entry for entry in plain.ledger if "lowest real level" in entry.what]
    assert summed.dHf0_kJ_mol - plain.dHf0_kJ_mol == pytest.approx(line.value_kJ_mol, abs=1e-9)
    assert sum(entry.value_kJ_mol for entry in summed.ledger) == pytest.approx(summed.dHf298_kJ_mol, abs=1e-9)


def refusal(molecule: Molecule, *atoms: Molecule, **options) -> list[str]:
    with pytest.raises(Refused) as caught:
        formation_by_atomization(build_model(molecule), atoms_of(*atoms), **options)
    return [f.code for f in caught.value.findings if f.severity == "refuse"]


def test_a_missing_atom_is_named() -> None:
    assert refusal(water_bound_by(900.0), ATOMS["H"]) == ["atom-missing"]


def test_an_excited_atom_is_refused() -> None:
    assert refusal(water_bound_by(900.0), ATOMS["H"], atom("O", 1, -75.0)) == ["atom-not-ground-state"]


def test_an_ion_does_not_stand_for_the_atom() -> None:
    assert refusal(water_bound_by(900.0), ATOMS["H"], atom("O", 4, -74.5, charge=1)) == ["atom-missing"]


@pytest.mark.parametrize(
    ("change", "word"),
    [
        ({"basis": "cc-pVTZ"}, "cc-pVTZ"),
        ({"method": "PBE0", "functional": ""}, "PBE0"),
        ({"functional": "VWN5"}, "VWN5"),
        ({"spherical": False}, "Cartesian"),
        ({"dispersion": "D3BJ"}, "D3BJ"),
        ({"solvent": "COSMO (water)"}, "COSMO"),
        ({"program": "Gaussian"}, "Gaussian"),
    ],
)
def test_another_level_is_refused_unless_trusted(change: dict, word: str) -> None:
    oxygen = atom("O", 3, -75.0, level=from_dataclass(LEVEL, **change))
    target = water_bound_by(900.0)
    with pytest.raises(Refused) as caught:
        formation_by_atomization(build_model(target), atoms_of(ATOMS["H"], oxygen))
    (finding,) = caught.value.findings
    assert finding.code == "level-differs"
    assert word in finding.found
    assert finding.where == "O.out"
    trusted = formation_by_atomization(build_model(target), atoms_of(ATOMS["H"], oxygen), trust_levels=True)
    assert [f.code for f in trusted.findings] == ["level-trusted", "no-uncertainty"]


def test_a_correlated_molecule_does_not_go_with_scf_atoms() -> None:
    target = water_bound_by(900.0, energies_hartree={"SCF": -76.0, "MP2": -76.3}, energy_kind="MP2")
    assert refusal(target, *ATOMS.values()) == ["level-differs"]


def test_the_right_one_of_two_levels_is_taken() -> None:
    other = atom("O", 3, -74.0, level=from_dataclass(LEVEL, basis="STO-3G"), file="O_small.out")
    one = formation_by_atomization(build_model(water_bound_by(900.0)), atoms_of(ATOMS["H"], other, ATOMS["O"]))
    two = formation_by_atomization(build_model(water_bound_by(900.0)), atoms_of(*ATOMS.values()))
    assert one.dHf298_kJ_mol == two.dHf298_kJ_mol


def test_two_atoms_that_disagree_are_refused() -> None:
    twin = atom("O", 3, -75.01, file="O_again.out")
    assert refusal(water_bound_by(900.0), *ATOMS.values(), twin) == ["atom-twice"]


def test_an_element_without_reference_is_refused() -> None:
    iodine = molecule("H I", [[0.0, 0.0, 0.0], [0.0, 0.0, 1.61]], [2309.0], energies_hartree={"SCF": -7000.0})
    with pytest.raises(Refused) as caught:
        formation_by_atomization(build_model(iodine), atoms_of(ATOMS["H"], atom("I", 2, -6999.0)))
    assert {"no-reference"} <= {f.code for f in caught.value.findings}


def test_a_molecule_without_energy_is_refused() -> None:
    assert refusal(water(), *ATOMS.values()) == ["no-energy"]


def test_every_reference_has_a_source() -> None:
    for symbol in elements_with_reference():
        reference = atom_reference(symbol)
        assert reference.source
        assert reference.increment_source


@pytest.mark.parametrize(
    ("text", "value", "u95"),
    [
        ("-200.7 kJ/mol", -200.7, None),
        ("-200.7+/-0.2 kJ/mol", -200.7, 0.2),
        ("−200.7 ± 0.2 kJ/mol", -200.7, 0.2),
        ("-47.97 kcal/mol", -47.97 * 4.184, None),
        ("37500 J/mol", 37.5, None),
        ("1 eV", 96.48533212, None),
        ("0 KJ/MOL", 0.0, None),
        (".5 kJ/mol", 0.5, None),
    ],
)
def test_enthalpies_as_people_write_them(text: str, value: float, u95: float | None) -> None:
    enthalpy = parse_enthalpy(text)
    assert enthalpy.value_kJ_mol == pytest.approx(value, rel=1e-9)
    assert enthalpy.u95_kJ_mol == u95


@pytest.mark.parametrize("text", ["-200.7", "kJ/mol", "-200.7 furlongs", "nan kJ/mol", "", "-2 00 kJ/mol", "1e999 eV"])
def test_an_enthalpy_without_number_or_unit_is_refused(text: str) -> None:
    with pytest.raises(UsageError, match="enthalpy of formation"):
        parse_enthalpy(text)


def test_a_given_enthalpy_goes_to_0_k_and_asks_for_its_source() -> None:
    increment = build_model(water()).h298_minus_h0_kJ_mol
    given = formation_given(parse_enthalpy("-241.822 kJ/mol"), None, {"H": 2, "O": 1}, increment)
    assert given.dHf0_kJ_mol == pytest.approx(-238.919, abs=0.03)
    assert [f.code for f in given.findings] == ["source-not-stated"]
    unknown = formation_given(parse_enthalpy("26.5 kJ/mol"), "JANAF", {"H": 1, "I": 1}, 8.657)
    assert unknown.dHf0_kJ_mol is None
    assert unknown.findings == ()
