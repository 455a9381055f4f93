"""Levels of theory: spelling, what differs, what is not known.  Energies quoted are those of the kept outputs."""

from __future__ import annotations

from dataclasses import replace

import pytest

from heatwright.molecule import Level
from heatwright.reading.levels import level_differences, level_unknowns, normalise_basis, normalise_method
from heatwright.reading.outputs import read_output
from kept_outputs import kept


def level(name: str) -> Level:
    found = read_output(kept(name)).level
    assert found is not None
    return found


@pytest.mark.parametrize(
    ("written", "spelling"),
    [
        ("6-31G(d)", "6-31G*"), ("6-31g*", "6-31G*"), ("6-31G(d,p)", "6-31G**"), ("6-31+G(d)", "6-31+G*"),
        ("6-311++g(d,p)", "6-311++G**"), ("6-311G(2df,2p)", "6-311G(2df,2p)"), ("6-31G", "6-31G"), ("3-21g", "3-21G"),
        ("STO-3G", "STO-3G"), ("sto3g", "STO-3G"), ("CC-pVTZ", "cc-pVTZ"), ("ccpvtz", "cc-pVTZ"),
        ("Aug-CC-pVQZ", "aug-cc-pVQZ"), ("aug-cc-pv(d+d)z", "aug-cc-pV(D+d)Z"), ("cc-pwcvtz", "cc-pwCVTZ"),
        ("cc-pCVQZ", "cc-pCVQZ"), ("Def2TZVPP", "def2-TZVPP"), ("def2-svp", "def2-SVP"),
        ("ma-def2-TZVP", "ma-def2-TZVP"), ("lanl2dz", "LANL2DZ"), ("MyOwnBasis", "MyOwnBasis"),
    ],
)  # fmt: skip
def test_one_spelling_for_each_basis(written: str, spelling: str) -> None:
    assert normalise_basis(written) == spelling
    assert normalise_basis(spelling) == spelling


@pytest.mark.parametrize(
    ("written", "spelling"),
    [
        ("RB3LYP", "B3LYP"), ("UB3LYP", "B3LYP"), ("ROB3LYP", "B3LYP"), ("b3-lyp", "B3LYP"), ("RB+HF-LYP", "B3LYP"),
        ("RHF", "HF"), ("UHF", "HF"), ("ROHF", "HF"), ("PBE1PBE", "PBE0"), ("pbe0", "PBE0"), ("RPBEPBE", "PBE"),
        ("wB97XD", "wB97X-D"), ("RwB97XD", "wB97X-D"), ("M062X", "M06-2X"), ("UM062X", "M06-2X"), ("revPBE", "revPBE"),
        ("CCSD(T)-FC", "CCSD(T)"), ("RM06", "M06"), ("r2SCAN-3c", "r2SCAN-3c"), ("unheardof", "unheardof"),
    ],
)  # fmt: skip
def test_one_spelling_for_each_method(written: str, spelling: str) -> None:
    assert normalise_method(written) == spelling
    assert normalise_method(spelling) == spelling


def test_the_same_name_in_two_programs_is_not_the_same_functional() -> None:
    """B3LYP/STO-3G of C10H10 is −382.3083 hartree in Gaussian and −382.0551 in ORCA: 665 kJ/mol apart."""
    gaussian, orca = level("gaussian16_dvb_freq.out"), level("orca50_dvb_freq.out")
    assert gaussian.label == orca.label
    assert gaussian != orca
    assert "B3LYP with VWN1RPA and with VWN5 correlation" in level_differences(gaussian, orca)
    assert "program Gaussian and ORCA" in level_differences(gaussian, orca)


def test_what_the_outputs_print_of_their_levels() -> None:
    assert level("nwchem702_oh_uhf_two_states.out").spherical is False
    assert level("psi4_132_h2o_opt_freq.out").spherical is False
    assert level("gaussian16_dvb_freq.out").spherical is True
    assert level("gaussian16_water_ccsdt_energy.log").frozen_core == "frozen 1"
    assert level("nwchem702_water_ccsdt_energy.out").frozen_core == "frozen 1"
    assert level("psi4_132_water_ccsdt_energy.out").frozen_core == "frozen"
    assert level("nwchem702_water_mp2_opt_freq.out").frozen_core == "frozen 1"
    assert level("nwchem702_hbr_ecp.out").core_potential == "LANL2DZ ECP"
    assert level("nwchem702_water_d3bj_numerical.out").dispersion == "D3BJ"
    assert level("nwchem702_water_pbe_cosmo.out").solvent == "COSMO, epsilon 78.4"
    assert {level(n).functional for n in ("nwchem702_methyl_cation.out", "psi4_132_o_atom_b3lyp.out")} == {"VWN1RPA"}
    assert level("nwchem702_hbr_ecp.out").functional == ""


REFERENCE = Level("CCSD(T)", "cc-pVTZ", spherical=True, frozen_core="frozen 2", program="ORCA", atoms=(6, 8))


@pytest.mark.parametrize(
    ("change", "phrase"),
    [
        ({"method": "MP2"}, "method CCSD(T) and MP2"),
        ({"basis": "cc-pVDZ"}, "basis cc-pVTZ and cc-pVDZ"),
        ({"spherical": False}, "spherical and Cartesian basis functions"),
        ({"frozen_core": "all"}, "a frozen core and all electrons correlated"),
        ({"core_potential": "def2-ECP", "atoms": (53, 53)}, "core potential none and def2-ECP"),
        ({"dispersion": "D4"}, "dispersion none and D4"),
        ({"solvent": "SMD, water"}, "solvent none and SMD, water"),
        ({"program": "Gaussian"}, "program ORCA and Gaussian"),
    ],
)
def test_each_known_difference_has_its_phrase(change: dict[str, object], phrase: str) -> None:
    base = replace(REFERENCE, atoms=(53, 1)) if "core_potential" in change else REFERENCE
    other = replace(base, **change)  # type: ignore[arg-type]
    assert level_differences(base, other) == (phrase,)
    assert len(level_differences(other, base)) == 1


def test_what_cannot_act_is_not_missed() -> None:
    molecule = replace(REFERENCE, dispersion="D3BJ", core_potential="def2-ECP", atoms=(6, 1, 1, 1, 53))
    hydrogen = replace(REFERENCE, frozen_core="all", atoms=(1,))
    carbon = replace(REFERENCE, frozen_core="frozen 1", atoms=(6,))
    for atom in (hydrogen, carbon):
        assert level_differences(molecule, atom) == ()
        assert level_differences(atom, molecule) == ()
    iodine = replace(REFERENCE, atoms=(53,))
    assert level_differences(molecule, iodine) == ("core potential def2-ECP and none",)
    two_molecules = replace(molecule, dispersion="", atoms=(6, 6))
    assert "dispersion D3BJ and none" in level_differences(molecule, two_molecules)


def test_mixed_basis_sets_are_compared_element_by_element() -> None:
    mixed = replace(REFERENCE, basis="LANL2DZ (Br), 6-31G (H)", atoms=(35, 1))
    assert level_differences(mixed, replace(REFERENCE, basis="6-31G", atoms=(1,))) == ()
    assert level_differences(mixed, replace(REFERENCE, basis="6-31G", atoms=(35,))) != ()


def test_unknown_parts_are_named() -> None:
    bare = Level("B3LYP", "6-31G*", program="Jaguar")
    assert level_unknowns(bare, bare) == (
        "local correlation part of the functional",
        "spherical or Cartesian basis functions",
    )
    assert level_unknowns(REFERENCE, replace(REFERENCE, frozen_core="")) == ("frozen core",)
    assert level_unknowns(REFERENCE, replace(REFERENCE, frozen_core="", atoms=(1,))) == ()
    assert level_unknowns(REFERENCE, REFERENCE) == ()


def test_a_task_that_finds_its_orbitals_converged_has_the_functional_of_the_task_before() -> None:
    """NWChem does not print the functional again then."""
    for job in (1, 2):
        level = read_output(kept("nwchem702_water_b3lyp_energy_then_freq.out"), job=job).level
        assert level is not None
        assert (level.method, level.basis, level.functional) == ("B3LYP", "STO-3G", "VWN1RPA")


def test_exact_exchange_alone_is_hartree_fock() -> None:
    level = read_output(kept("nwchem702_water_field_freq.out")).level
    assert level is not None
    assert level.label == "HF/STO-3G"
