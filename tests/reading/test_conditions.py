"""What a job was computed in and under: no free molecule in its ground state, and what accepts it."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from heatwright.errors import UsageError
from heatwright.findings import Finding
from heatwright.molecule import Molecule
from heatwright.reading.acceptance import unfit_for_entry
from heatwright.reading.outputs import read_output
from kept_outputs import codes, kept, read_text, text_of

REAL = {  # outputs run for this project: refusals and warnings of each
    "psi4_132_hf_dimer_freq.out": (set(), {"fragments"}),
    "psi4_132_water_charges_freq.out": ({"external-field", "imaginary-modes", "mode-count"}, {"not-stationary"}),
    "psi4_132_water_field_freq.out": (
        {"external-field", "imaginary-modes", "mode-count"}, {"not-stationary", "zero-wavenumber"},
    ),
    "psi4_132_cn_uhf_freq.out": ({"imaginary-modes", "mode-count"}, {"spin-contamination", "not-stationary"}),
    "psi4_132_h2o2_frozen_torsion_freq.out": ({"constraints"}, {"not-stationary"}),
    "psi4_132_water_freq_400K_then_mp2.out": (set(), set()),
    "nwchem702_water_cosmo_freq.out": ({"solvent"}, set()),
    "nwchem702_water_pbe_cosmo.out": ({"solvent"}, set()),
    "nwchem702_water_bq_freq.out": ({"external-field"}, set()),
    "nwchem702_h2o2_frozen_torsion_freq.out": ({"constraints"}, {"not-stationary"}),
    "nwchem702_water_tddft_freq.out": ({"excited-state", "imaginary-modes"}, set()),
    "nwchem702_hcn_and_hnc.out": ({"isomers"}, {"several-jobs"}),
    "nwchem702_cn_uhf_freq.out": (set(), {"spin-contamination"}),
    "nwchem702_butyne_staggered_freq.out": ({"imaginary-modes"}, set()),
    "nwchem702_water_steep_freq.out": (set(), {"not-stationary"}),
    "nwchem702_water_field_freq.out": ({"external-field"}, set()),
    "nwchem702_h2_spring_freq.out": ({"constraints"}, {"not-stationary"}),
    "xtb651_h2o2_held_torsion_ohess.out": ({"constraints"}, set()),
    "xtb651_h2o2_fixed_atoms_ohess.out": ({"constraints", "imaginary-modes"}, set()),
    "xtb651_water_alpb_ohess.out": ({"solvent"}, set()),
    "xtb651_water_gfnff_alpb_ohess.out": ({"solvent", "no-multiplicity"}, {"energy-not-total", "program-scale"}),
    "xtb651_water_charge_ohess.out": ({"external-field"}, set()),
    "mopac2206_water_field_force.out": ({"external-field"}, {"energy-not-total", "no-energy", "not-stationary"}),
    "mopac2206_water_second_root_force.out": (
        {"excited-state", "imaginary-modes"}, {"energy-not-total", "no-energy", "not-stationary"},
    ),
    "mopac2206_h2o2_held_torsion_force.out": (set(), {"energy-not-total", "no-energy", "not-stationary"}),
}  # fmt: skip


@pytest.mark.parametrize("name", REAL)
def test_outputs_run_for_this(name: str) -> None:
    m = read_output(kept(name))
    assert (codes(m, "refuse"), codes(m, "warn")) == REAL[name]


def finding(m: Molecule, code: str) -> Finding:
    (found,) = (f for f in m.findings if f.code == code)
    return found


def test_the_sentences_say_where_and_what() -> None:
    m = read_output(kept("nwchem702_h2o2_frozen_torsion_freq.out"))
    constrained = finding(m, "constraints")
    assert (constrained.where, "Number of frozen variables = 1" in constrained.text) == ("line 227", True)
    assert "atoms 1, 2; atoms 3, 4" in finding(read_output(kept("psi4_132_hf_dimer_freq.out")), "fragments").text
    spin = finding(read_output(kept("nwchem702_cn_uhf_freq.out")), "spin-contamination")
    assert "⟨S²⟩ is 1.560" in spin.text
    assert "0.750 for S = 0.5" in spin.text
    assert "COSMO, epsilon 78.4" in finding(read_output(kept("nwchem702_water_cosmo_freq.out")), "solvent").text
    assert "ALPB, water" in finding(read_output(kept("xtb651_water_alpb_ohess.out")), "solvent").text
    fixed = finding(read_output(kept("xtb651_h2o2_fixed_atoms_ohess.out")), "constraints").text
    assert "3 degrees of freedom" in fixed
    assert "expected 6 for 4 free atoms" in fixed
    assert "Applied E-field" in finding(read_output(kept("nwchem702_water_field_freq.out")), "external-field").text
    hot = finding(read_output(kept("psi4_132_water_freq_400K_then_mp2.out")), "job-conditions")
    assert (hot.severity, "400 K" in hot.text) == ("note", True)


@pytest.mark.parametrize(
    ("name", "word", "code"),
    [
        ("nwchem702_water_cosmo_freq.out", "solvent", "solvent"),
        ("nwchem702_water_bq_freq.out", "field", "external-field"),
        ("nwchem702_h2o2_frozen_torsion_freq.out", "constraints", "constraints"),
        ("nwchem702_water_tddft_freq.out", "excited-state", "excited-state"),
        ("nwchem702_water_steep_freq.out", "gradient", "not-stationary"),
    ],
)
def test_accepted_by_name_and_recorded(name: str, word: str, code: str) -> None:
    m = read_output(kept(name), accept=[word])
    assert finding(m, code).severity == "warn"
    assert f"The user accepted it (--accept {word})" in finding(m, code).text
    others = [w for w in ("solvent", "field", "constraints", "excited-state", "gradient") if w != word]
    assert finding(read_output(kept(name), accept=others), code) == finding(read_output(kept(name)), code)


def test_mopac_derivatives_are_kcal_per_angstrom() -> None:
    """The largest of the table under CARTESIAN COORDINATE DERIVATIVES, 3.415555 kcal/mol/Å, of the held torsion."""
    m = read_output(kept("mopac2206_h2o2_held_torsion_force.out"))
    assert m.max_gradient_hartree_bohr == pytest.approx(3.415555 / 627.5094740631 * 0.529177210903, rel=1e-9)


def test_a_steep_geometry_is_unfit_for_an_entry_only() -> None:
    m = read_output(kept("nwchem702_water_steep_freq.out"))
    (unfit,) = unfit_for_entry(m, ())
    assert (unfit.severity, unfit.code, "3.31e-02" in unfit.text) == ("refuse", "not-stationary", True)
    assert unfit_for_entry(m, ["gradient"]) == ()
    assert unfit_for_entry(m.but(max_gradient_hartree_bohr=9.9e-3), ()) == ()


def test_small_imaginary_modes_are_never_taken_silently() -> None:
    name = kept("nwchem702_butyne_staggered_freq.out")
    full = read_output(name)
    assert full.n_imaginary == 1
    for limit in (0.0, 10.0):
        assert "imaginary-modes" in codes(read_output(name, accept_imaginary_cm1=limit), "refuse")
    m = read_output(name, accept_imaginary_cm1=15.0)
    assert codes(m) == {"user-value"}
    assert "up to 15 cm⁻¹ (10.70i)" in finding(m, "user-value").text
    assert m.wavenumbers_cm1.tolist() == np.sort(np.abs(full.wavenumbers_cm1)).tolist()
    # one large imaginary mode beside: nothing is touched
    planar = read_output(kept("nwchem702_nh3_planar_ts.out"), accept_imaginary_cm1=50.0)
    assert planar.n_imaginary == 1
    assert codes(planar, "refuse") == {"imaginary-modes"}


@pytest.mark.parametrize("limit", [50.1, -1.0, float("nan")])
def test_no_more_than_fifty(limit: float) -> None:
    with pytest.raises(UsageError, match="at most 50"):
        read_output(kept("nwchem702_butyne_staggered_freq.out"), accept_imaginary_cm1=limit)


def test_an_unknown_word_cannot_be_accepted() -> None:
    with pytest.raises(UsageError, match="'anything' cannot be accepted"):
        read_output(kept("qchem51_water_freq.out"), accept=["anything"])


# Outputs of programs that are not at hand: a real output with lines of the program inserted, as it prints them (from
# memory of those programs' outputs and manuals).
GAUSSIAN, ORCA, QCHEM = "gaussian16_dvb_freq.out", "orca50_dvb_freq.out", "qchem51_water_freq.out"
G_ROUTE, O_INPUT, Q_INPUT = " # b3lyp", "|  2>", "$rem"
INSERTED = [
    (GAUSSIAN, "Frequencies --", " The following finite field(s) will be applied:\n", "external-field"),
    (GAUSSIAN, "Frequencies --", " Background charge distribution read from input stream:\n", "external-field"),
    (GAUSSIAN, "Frequencies --", " ! R2    R(1,6)                  1.4047         Frozen                 !\n",
     "constraints"),
    (GAUSSIAN, "Frequencies --", " This state for optimization and/or second-order correction.\n", "excited-state"),
    (GAUSSIAN, "Frequencies --", " Polarizable Continuum Model (PCM)\n Solvent              : Water, Eps=  78.4\n",
     "solvent"),
    (ORCA, "TOTAL RUN TIME", "                         ORCA TD-DFT/TDA CALCULATION\n", "excited-state"),
    (ORCA, "TOTAL RUN TIME", "CPCM SOLVATION MODEL\n", "solvent"),
]  # fmt: skip


@pytest.mark.parametrize(("name", "before", "lines", "code"), INSERTED)
def test_inserted_lines(tmp_path: Path, name: str, before: str, lines: str, code: str) -> None:
    text = text_of(name)
    spot = text.rfind("\n", 0, text.index(before)) + 1
    m = read_text(tmp_path, text[:spot] + lines + text[spot:])
    assert codes(m, "refuse") == {code}


ECHOED = [
    (ORCA, "****END OF INPUT****", "| 90> %geom Constraints\n| 91> { B 0 1 1.40 C }\n", "constraints"),
    (ORCA, "****END OF INPUT****", "| 90> %pointcharges \"q.pc\"\n", "external-field"),
    (ORCA, "****END OF INPUT****", "| 90> %freq Partial_Hess {1 2} end\n", "constraints"),
    (QCHEM, "$rem", "$external_charges\n 0.0 0.0 4.0 0.4\n$end\n", "external-field"),
    (QCHEM, "$rem", "$opt\nFIXED\n1 XYZ\nENDFIXED\n$end\n", "constraints"),
    (QCHEM, "$rem", "$rem\nCIS_STATE_DERIV 1\n$end\n", "excited-state"),
]  # fmt: skip


@pytest.mark.parametrize(("name", "before", "lines", "code"), ECHOED)
def test_lines_of_the_echoed_input(tmp_path: Path, name: str, before: str, lines: str, code: str) -> None:
    text = text_of(name)
    spot = text.rfind("\n", 0, text.index(before)) + 1
    m = read_text(tmp_path, text[:spot] + lines + text[spot:])
    assert codes(m, "refuse") == {code}
    comment = "\n".join(
        line.replace("> ", "> # ") if name == ORCA else f"! {line}" for line in lines.rstrip("\n").split("\n")
    )
    assert codes(read_text(tmp_path, f"{text[:spot]}{comment}\n{text[spot:]}"), "refuse") == set()


CONTAMINATED = [
    (GAUSSIAN, "Frequencies --", " S**2 before annihilation     0.3778,   after     0.0104\n"),
    (ORCA, "TOTAL RUN TIME", "Expectation value of <S**2>     :     0.350301\n"),
    (QCHEM, "VIBRATIONAL ANALYSIS", " <S^2> =          0.3533\n"),
]


@pytest.mark.parametrize(("name", "before", "lines"), CONTAMINATED)
def test_spin_squared(tmp_path: Path, name: str, before: str, lines: str) -> None:
    text = text_of(name)
    spot = text.rfind("\n", 0, text.index(before)) + 1
    assert codes(read_text(tmp_path, text[:spot] + lines + text[spot:])) >= {"spin-contamination"}
    slight = lines.replace("0.3", "0.0")
    assert "spin-contamination" not in codes(read_text(tmp_path, text[:spot] + slight + text[spot:]))


def test_energy_of_another_geometry(tmp_path: Path) -> None:
    """One digit changed in the energy that the thermochemistry names, or in the one it came from."""
    text = text_of(ORCA)
    assert "Electronic energy                ...   -382.05510861" in text
    m = read_text(tmp_path, text.replace("Electronic energy                ...   -382.05510861",
                                         "Electronic energy                ...   -382.05610861"))  # fmt: skip
    assert "geometry-differs" in codes(m, "refuse")


def test_geometry_of_the_modes_is_another(tmp_path: Path) -> None:
    """One coordinate changed in the table that NWChem prints with its Hessian."""
    text = text_of("nwchem702_hdo_3temps.out")
    spot = text.index("---- Atom information ----")
    changed = text[:spot] + text[spot:].replace("-8.8864714D-01", "-9.8864714D-01", 1)
    assert "geometry-differs" in codes(read_text(tmp_path, changed), "refuse")


# --- a scale factor of the program's own ------------------------------------------------------------------------------


def scaled(text: str, old: str, new: str) -> str:
    assert old in text
    return text.replace(old, new)


def test_factor_in_the_thermochemistry_only(tmp_path: Path) -> None:
    """NWChem's factor acts on its zero-point energy; here the printed value was multiplied with it by hand."""
    text, full = text_of("nwchem702_methyl_cation.out"), read_output(kept("nwchem702_methyl_cation.out"))
    zpe = full.printed[0].zpe_hartree
    assert zpe is not None
    text = scaled(text, "frequency scaling parameter      =   1.0000", "frequency scaling parameter      =   0.9000")
    m = read_text(tmp_path, scaled(text, f"{zpe:.6f} au", f"{0.9 * zpe:.6f} au"))
    assert m.wavenumbers_cm1.tolist() == full.wavenumbers_cm1.tolist()
    assert codes(m) == {"program-scale"}
    assert m.printed == ()


def test_factor_that_neither_list_shows_is_refused(tmp_path: Path) -> None:
    text = text_of("nwchem702_methyl_cation.out")
    changed = scaled(text, "frequency scaling parameter      =   1.0000", "frequency scaling parameter      =   0.8000")
    assert codes(read_text(tmp_path, changed), "refuse") == {"program-scale"}
    absurd = scaled(text, "frequency scaling parameter      =   1.0000", "frequency scaling parameter      =   8.0000")
    assert codes(read_text(tmp_path, absurd), "refuse") == {"program-scale"}


def test_factor_in_the_list_is_undone(tmp_path: Path) -> None:
    """ORCA says of its list that the factor is in it."""
    text, full = text_of(ORCA), read_output(kept(ORCA))
    old = "Scaling factor for frequencies =  1.000000000  (already applied!)"
    m = read_text(tmp_path, scaled(text, old, old.replace("1.000000000", "0.961400000")))
    assert np.allclose(m.wavenumbers_cm1, full.wavenumbers_cm1 / 0.9614, rtol=1e-12)
    assert codes(m, "warn") == {"program-scale"}


def test_gaussian_scaled_thermochemistry(tmp_path: Path) -> None:
    text = text_of(GAUSSIAN)
    zpe, total = 0.177132, -382.131135
    assert f"Zero-point correction=                           {zpe:.6f}" in text
    stated = "Pressure   1.00000 Atm."
    text = scaled(text, stated, f"{stated}\n Thermochemistry will use frequencies scaled by 0.9614.")
    text = scaled(text, f"Zero-point correction=                           {zpe:.6f}",
                  f"Zero-point correction=                           {0.9614 * zpe:.6f}")  # fmt: skip
    text = scaled(text, f"Sum of electronic and zero-point Energies=           {total:.6f}",
                  f"Sum of electronic and zero-point Energies=           {total - 0.0386 * zpe:.6f}")  # fmt: skip
    m = read_text(tmp_path, text)
    assert codes(m) == {"program-scale"}
    assert m.wavenumbers_cm1.tolist() == read_output(kept(GAUSSIAN)).wavenumbers_cm1.tolist()
