"""Molecules from the kept outputs, against the numbers that stand in them (read by eye or with grep)."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright.constants import ATMOSPHERE_PA, CALORIE_J, HARTREE_CM1, HARTREE_KJ_MOL
from heatwright.findings import Refused, refusals
from heatwright.reading.outputs import read_output
from heatwright.reading.soundness import expected_modes
from kept_outputs import FOLDER, codes, kept

# name: program, version, kind, energy kind, hartree, charge, multiplicity, real modes, imaginary modes, level, severity
TABLE = {
    "gaussian16_dvb_freq.out": (
        "Gaussian", "ES64L-G16RevA.03", "frequency", "SCF", -382.308266602, 0, 1, 54, 0, "B3LYP/STO-3G", "ok",
    ),
    "gaussian16_water_ccsdt_energy.log": (
        "Gaussian", "ES64L-G16RevA.03", "energy", "CCSD(T)", -75.017760422, 0, 1, 0, 0, "CCSD(T)/STO-3G", "ok",
    ),
    "orca50_dvb_freq.out": (
        "ORCA", "5.0.1", "frequency", "SCF", -382.055108614160, 0, 1, 54, 0, "B3LYP/STO-3G", "ok",
    ),
    "orca60_dvb_freq.out": (
        "ORCA", "6.0.1", "frequency", "SCF", -382.055107107616, 0, 1, 54, 0, "B3LYP/STO-3G", "ok",
    ),
    "qchem51_water_freq.out": (
        "Q-Chem", "5.1", "frequency", "SCF", -75.3178467153, 0, 1, 3, 0, "B3LYP/STO-3G", "ok",
    ),
    "qchem51_c_atom.out": (
        "Q-Chem", "5.1", "atom", "SCF", -37.6045426355, 0, 1, 0, 0, "HF/aug-cc-pVQZ", "warn",
    ),
    "nwchem702_hdo_3temps.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -76.009341330691, 0, 1, 3, 0, "HF/6-31G*", "warn",
    ),
    "nwchem702_nh3_planar_ts.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -56.536640253, 0, 1, 5, 1, "B3LYP/6-31G*", "refuse",
    ),
    "nwchem702_water_mp2_opt_freq.out": (
        "NWChem", "7.0.2", "frequency", "MP2", -76.193953154792, 0, 1, 3, 0, "MP2/6-31G*", "ok",
    ),
    "nwchem702_water_d3bj_numerical.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -76.358889725710, 0, 1, 3, 0, "B3LYP-D3BJ/def2-SVP", "ok",
    ),
    "nwchem702_water_b3lyp_energy_then_freq.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -75.315239011078, 0, 1, 3, 0, "B3LYP/STO-3G", "ok",
    ),
    "nwchem702_water_freq_then_ccsdt.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -74.965901191748, 0, 1, 3, 0, "HF/STO-3G", "ok",
    ),
    "nwchem702_oh_uhf_two_states.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -75.382275027305, 0, 2, 1, 0, "HF/6-31G*", "ok",
    ),
    "nwchem702_hbr_ecp.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -13.748243550435, 0, 1, 1, 0, "PBE0/LANL2DZ (Br), 6-31G (H)", "ok",
    ),
    "nwchem702_methyl_cation.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -39.479632882006, 1, 1, 6, 0, "B3LYP/6-31G*", "ok",
    ),
    "nwchem702_water_pbe_cosmo.out": (
        "NWChem", "7.0.2", "energy", "SCF", -76.333205192009, 0, 1, 0, 0, "PBE/6-31G* (COSMO, epsilon 78.4)", "refuse",
    ),
    "nwchem702_water_ccsdt_energy.out": (
        "NWChem", "7.0.2", "energy", "CCSD(T)", -76.241041229610758, 0, 1, 0, 0, "CCSD(T)/cc-pVDZ", "ok",
    ),
    "nwchem702_water_opt_failed.out": (
        "NWChem", "7.0.2", "optimisation", "SCF", -74.965853268153, 0, 1, 0, 0, "HF/STO-3G", "refuse",
    ),
    "nwchem702_o_atom_rohf.out": (
        "NWChem", "7.0.2", "atom", "SCF", -74.778268136217, 0, 3, 0, 0, "HF/6-31G*", "ok",
    ),
    "nwchem702_h2o_freq.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -76.009341330677, 0, 1, 3, 0, "HF/6-31G*", "ok",
    ),
    "nwchem702_d2o_freq.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -76.009341330677, 0, 1, 3, 0, "HF/6-31G*", "warn",
    ),
    "nwchem702_methanol_freq.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -114.398019456264, 0, 1, 12, 0, "HF/3-21G", "ok",
    ),
    "nwchem702_methanol_od_freq.out": (
        "NWChem", "7.0.2", "frequency", "SCF", -114.398019456264, 0, 1, 12, 0, "HF/3-21G", "warn",
    ),
    "nwchem702_water_mp2_energy.out": (
        "NWChem", "7.0.2", "energy", "MP2", -76.193065146883, 0, 1, 0, 0, "MP2/6-31G*", "ok",
    ),
    "nwchem702_water_stretched_mp2_energy.out": (
        "NWChem", "7.0.2", "energy", "MP2", -76.193422623779, 0, 1, 0, 0, "MP2/6-31G*", "ok",
    ),
    "nwchem702_water_cation_energy.out": (
        "NWChem", "7.0.2", "energy", "SCF", -75.609446521759, 1, 2, 0, 0, "HF/6-31G*", "ok",
    ),
    "nwchem702_o_atom_mp2.out": (
        "NWChem", "7.0.2", "atom", "MP2", -74.878159576034, 0, 3, 0, 0, "MP2/6-31G*", "ok",
    ),
    "nwchem702_h_atom_mp2.out": (
        "NWChem", "7.0.2", "atom", "MP2", -0.498232910729, 0, 2, 0, 0, "MP2/6-31G*", "ok",
    ),
    "qchem54_water_vpt2.out": (
        "Q-Chem", "5.4", "frequency", "SCF", -75.3178467153, 0, 1, 3, 0, "B3LYP/STO-3G", "ok",
    ),
    "psi4_132_h2o_opt_freq.out": (
        "Psi4", "1.3.2", "frequency", "SCF", -76.0107206574669, 0, 1, 3, 0, "HF/6-31G*", "ok",
    ),
    "psi4_132_oh_radical_freq.out": (
        "Psi4", "1.3.2", "frequency", "SCF", -75.3822574983699383, 0, 2, 1, 0, "HF/6-31G*", "ok",
    ),
    "psi4_132_hcn_hnc_ts.out": (
        "Psi4", "1.3.2", "frequency", "SCF", -92.7917124193862, 0, 1, 2, 1, "HF/6-31G*", "refuse",
    ),
    "psi4_132_water_freq_400K_then_mp2.out": (
        "Psi4", "1.3.2", "frequency", "SCF", -75.3231480590361997, 0, 1, 3, 0, "B3LYP/STO-3G", "ok",
    ),
    "psi4_132_water_ccsdt_energy.out": (
        "Psi4", "1.3.2", "energy", "CCSD(T)", -76.241148809365939, 0, 1, 0, 0, "CCSD(T)/cc-pVDZ", "ok",
    ),
    "psi4_132_o_atom_b3lyp.out": (
        "Psi4", "1.3.2", "atom", "SCF", -75.0685107728408809, 0, 3, 0, 0, "B3LYP/cc-pVDZ", "ok",
    ),
    "jaguar83_dvb_freq.out": (
        "Jaguar", "8.3 r13", "frequency", "SCF", -382.308258746, 0, 1, 54, 0, "B3LYP/STO-3G", "ok",
    ),
    "xtb651_methanol_ohess.out": (
        "xTB", "6.5.1", "frequency", "SCF", -8.226118430823, 0, 1, 12, 0, "GFN2-xTB", "ok",
    ),
    "mopac2206_methanol_force_thermo.out": (
        "MOPAC", "22.0.6", "frequency", "", None, 0, 1, 12, 0, "PM7", "warn",
    ),
}  # fmt: skip
CONDITIONS = {  # read by test_conditions.py
    "psi4_132_hf_dimer_freq.out", "psi4_132_water_charges_freq.out", "psi4_132_water_field_freq.out",
    "psi4_132_cn_uhf_freq.out", "psi4_132_h2o2_frozen_torsion_freq.out", "nwchem702_water_cosmo_freq.out",
    "nwchem702_water_bq_freq.out", "nwchem702_h2o2_frozen_torsion_freq.out", "nwchem702_water_tddft_freq.out",
    "nwchem702_hcn_and_hnc.out", "nwchem702_cn_uhf_freq.out", "nwchem702_butyne_staggered_freq.out",
    "nwchem702_water_steep_freq.out", "nwchem702_water_field_freq.out", "nwchem702_h2_spring_freq.out",
    "xtb651_h2o2_held_torsion_ohess.out", "xtb651_h2o2_fixed_atoms_ohess.out", "xtb651_water_alpb_ohess.out",
    "xtb651_water_gfnff_alpb_ohess.out", "xtb651_water_charge_ohess.out", "mopac2206_water_field_force.out",
    "mopac2206_water_second_root_force.out", "mopac2206_h2o2_held_torsion_force.out",
}  # fmt: skip
REFUSED = {"multijob_qchem54_water_then_dvb.out", "nwchem702_water_and_n2.out", "psi4_132_h2_then_hf_failed.out"}


def test_every_kept_output_is_tested() -> None:
    assert {p.name.removesuffix(".gz") for p in FOLDER.glob("*.gz")} == TABLE.keys() | REFUSED | CONDITIONS


@pytest.mark.parametrize("name", TABLE)
def test_molecule(name: str) -> None:
    program, version, kind, energy_kind, energy, charge, multiplicity, real, imaginary, level, severity = TABLE[name]
    m = read_output(kept(name))
    assert (m.source.program, m.source.version, m.kind, m.energy_kind) == (program, version, kind, energy_kind)
    assert (m.charge, m.multiplicity) == (charge, multiplicity)
    assert m.energy_hartree == (None if energy is None else pytest.approx(energy, abs=6e-10, rel=0))
    assert (np.count_nonzero(m.wavenumbers_cm1 > 0), m.n_imaginary) == (real, imaginary)
    assert m.level is not None
    assert m.level.label == level
    worst = "refuse" if refusals(m.findings) else "warn" if codes(m, "warn") else "ok"
    assert worst == severity, m.findings


@pytest.mark.parametrize("name", [name for name, row in TABLE.items() if row[2] == "frequency"])
def test_modes_masses_and_geometry_fit_together(name: str) -> None:
    m = read_output(kept(name))
    assert m.wavenumbers_cm1.size == expected_modes(m)
    assert (np.diff(m.wavenumbers_cm1) >= 0.0).all()
    assert m.coordinates_A.shape == (m.n_atoms, 3)
    assert m.masses_u.shape == (m.n_atoms,)
    if m.normal_modes is not None:
        assert m.normal_modes.shape == (m.wavenumbers_cm1.size, m.n_atoms, 3)
        assert np.linalg.norm(m.normal_modes, axis=(1, 2)) == pytest.approx(1.0)
        # a vibration does not move the centre of mass; modes are printed with two to five decimals
        drift = np.einsum("i,kij->kj", m.masses_u, m.normal_modes) / m.mass_u
        assert np.abs(drift).max() < 0.02


def test_printed_thermochemistry() -> None:
    """Printed blocks, in the units of PrintedThermo: ZPE, H − E in hartree, S in J/mol/K, T, p, symmetry number."""
    atm, kcal = ATMOSPHERE_PA, CALORIE_J / HARTREE_KJ_MOL
    expected = {
        "gaussian16_dvb_freq.out": (0.177132, 0.186960, 91.781 * CALORIE_J, 298.15, atm, 2),
        "orca50_dvb_freq.out": (
            0.17701962, -381.86823907 + 382.05510861, 0.04288798 * HARTREE_KJ_MOL * 1000 / 298.15, 298.15, atm, 2,
        ),
        "qchem51_water_freq.out": (14.398 * kcal, 16.769 * kcal, 45.245 * CALORIE_J, 298.15, atm, 2),
        "psi4_132_oh_radical_freq.out": (0.00910588, 0.01241053, 177.8725, 298.15, 101325.0, 1),
        "psi4_132_water_freq_400K_then_mp2.out": (0.02156474, None, None, 400.0, 100000.0, 2),
        "nwchem702_nh3_planar_ts.out": (0.033050, 0.036832, 44.401 * CALORIE_J, 298.15, None, 6),
        "jaguar83_dvb_freq.out": (111.155 * kcal, 117.319 * kcal, 91.742 * CALORIE_J, 298.15, atm, 2),
        "xtb651_methanol_ohess.out": (0.049649242533, 0.053869063616, 236.7942, 298.15, None, 1),
        "mopac2206_methanol_force_thermo.out": (28.2 * kcal, 30.960 * kcal, 57.4256 * CALORIE_J, 298.0, None, 1),
    }  # fmt: skip
    for name, (zpe, h, s, t, p, sigma) in expected.items():
        item = read_output(kept(name)).printed[0]
        assert (item.temperature_K, item.symmetry_number) == (t, sigma), name
        assert item.pressure_Pa == (None if p is None else pytest.approx(p)), name
        assert item.zpe_hartree == pytest.approx(zpe, abs=2e-8), name
        if h is not None and s is not None:
            assert item.enthalpy_correction_hartree == pytest.approx(h, abs=5e-8), name
            assert item.entropy_J_mol_K == pytest.approx(s, abs=2e-3), name


def test_every_printed_temperature_is_kept() -> None:
    hdo = read_output(kept("nwchem702_hdo_3temps.out"))
    assert [item.temperature_K for item in hdo.printed] == [298.15, 500.0, 1000.0]
    assert [item.enthalpy_correction_hartree for item in hdo.printed] == [0.023609, 0.026238, 0.033539]
    assert len(read_output(kept("mopac2206_methanol_force_thermo.out")).printed) == 10


@pytest.mark.parametrize("name", [n for n, row in TABLE.items() if row[2] == "frequency" and row[0] != "ADF"])
def test_own_zero_point_energy_is_the_printed_one(name: str) -> None:
    m = read_output(kept(name))
    own = m.wavenumbers_cm1[m.wavenumbers_cm1 > 0.0].sum() / 2.0 / HARTREE_CM1
    low = 6e-4 * own if m.source.program == "NWChem" else 0.0  # its old constants
    rough = 2e-5 if m.source.program == "MOPAC" else 3e-6  # one decimal of kcal and of 1/cm
    assert own == pytest.approx(m.printed[0].zpe_hartree, abs=low + rough)


def test_masses() -> None:
    assert read_output(kept("nwchem702_hdo_3temps.out")).masses_u == pytest.approx([15.99491, 2.0141018, 1.007825])
    assert read_output(kept("qchem51_water_freq.out")).masses_u == pytest.approx([15.99491, 1.00783, 1.00783])
    orca = read_output(kept("orca50_dvb_freq.out"))
    assert (orca.mass_kind, orca.masses_printed) == ("average", True)
    assert orca.mass_u == pytest.approx(130.19, abs=0.005)  # "Total Mass ... 130.19 AMU"
    assert "average-masses" in codes(orca, "note")
    jaguar = read_output(kept("jaguar83_dvb_freq.out"))
    assert (jaguar.mass_kind, jaguar.masses_printed) == ("isotopic", False)
    assert "masses-from-table" in codes(jaguar, "note")


def test_all_energies_are_kept_by_name() -> None:
    water = read_output(kept("gaussian16_water_ccsdt_energy.log"))
    assert water.energies_hartree["SCF"] == -74.9643287914
    assert water.energies_hartree["MP2"] == -75.002282127453
    assert water.energies_hartree["CCSD"] == pytest.approx(-75.0176836, abs=6e-8)  # archive entry
    nwchem = read_output(kept("nwchem702_water_ccsdt_energy.out"))
    assert nwchem.energies_hartree["SCF"] == -76.026772056985
    assert nwchem.energies_hartree["CCSD"] == -76.238004737874846


def test_printed_hartree_come_back_without_loss() -> None:
    assert read_output(kept("nwchem702_methyl_cation.out")).energy_hartree == -39.479632882006
    assert read_output(kept("jaguar83_dvb_freq.out")).energy_hartree == pytest.approx(-382.30825874596, rel=3e-16)


def test_gradient_at_the_geometry_of_the_frequencies() -> None:
    assert read_output(kept("gaussian16_dvb_freq.out")).max_gradient_hartree_bohr == pytest.approx(4.5163e-5)
    assert read_output(kept("nwchem702_hdo_3temps.out")).max_gradient_hartree_bohr == pytest.approx(1.5e-5)
    assert read_output(kept("orca50_dvb_freq.out")).max_gradient_hartree_bohr is None


def test_geometry_is_that_of_the_frequencies() -> None:
    """HCN-HNC: the second analysis, at the optimised geometry, not the first at the starting one."""
    m = read_output(kept("psi4_132_hcn_hnc_ts.out"))
    assert m.wavenumbers_cm1[0] == -1228.1511
    nh3 = read_output(kept("nwchem702_nh3_planar_ts.out"))
    bonds = np.linalg.norm(nh3.coordinates_A[1:] - nh3.coordinates_A[0], axis=1)
    assert bonds == pytest.approx(np.hypot(1.3379815, 1.3379815) / 1.889725989, abs=1e-6)


def test_methyl_cation_modes_are_degenerate_pairs() -> None:
    w = read_output(kept("nwchem702_methyl_cation.out")).wavenumbers_cm1  # D3h: a1' + a2'' + 2 e'
    assert w[1] == pytest.approx(w[2], abs=0.01)
    assert w[4] == pytest.approx(w[5], abs=0.01)


@pytest.mark.parametrize("name", sorted(REFUSED))
def test_two_molecules_are_refused(name: str) -> None:
    with pytest.raises(Refused) as caught:
        read_output(kept(name))
    assert [f.code for f in caught.value.findings] == ["several-molecules"]
    assert "--job N" in str(caught.value)
