"""Anharmonic fundamentals: read where they are printed, used where they are asked for."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest

from heatwright import ModelOptions, build_model
from heatwright.errors import UsageError
from heatwright.findings import Finding, Refused
from heatwright.molecule import Molecule
from heatwright.reading.outputs import read_output
from heatwright.structure.isotopes import parse_isotope, with_isotopes
from kept_outputs import codes, kept, read_text, text_of
from molecules import atom, water

R = 8.31446261815324  # CODATA 2018, exact
C2 = 1.438776877  # cm K, CODATA 2018
HARTREE_CM1 = 219474.63136320  # CODATA 2018
KCAL = 4.184 / 2625.4996394799  # hartree

VPT2 = np.array([1789.71, 3839.74, 4125.21])  # as printed by Q-Chem 5.4


def qchem() -> Molecule:
    return read_output(kept("qchem54_water_vpt2.out"))


def said(findings: tuple[Finding, ...]) -> set[str]:
    return {f.code for f in findings}


def test_q_chem_prints_fundamentals_and_their_zero_point_energy() -> None:
    m = qchem()
    assert m.fundamentals_cm1 == pytest.approx(VPT2)
    assert m.anharmonic_zpe_hartree == pytest.approx(13.945 * KCAL)
    assert m.wavenumbers_cm1 == pytest.approx([1860.10, 3939.13, 4272.66])


def test_they_are_used_when_asked_for() -> None:
    model, harmonic = build_model(qchem(), ModelOptions(anharmonic=True)), build_model(qchem())
    x = C2 * VPT2 / 1000.0
    vibration = model.tabulate([1000.0]).shares["vibration"]
    assert vibration.cp_J_mol_K[0] == pytest.approx(R * float((x**2 * np.exp(x) / np.expm1(x) ** 2).sum()), rel=1e-9)
    assert model.zpe_kJ_mol == pytest.approx(13.945 * 4.184)
    assert harmonic.zpe_kJ_mol == pytest.approx(14.398 * 4.184, abs=0.003)
    assert (
        model.tabulate([1000.0]).shares["rotation"].s_J_mol_K
        == harmonic.tabulate([1000.0]).shares["rotation"].s_J_mol_K
    )
    assert "anharmonic" in said(model.findings)
    assert "unscaled" not in said(model.findings)
    assert "anharmonic-unused" in said(harmonic.findings)


def test_half_the_sum_of_the_fundamentals_is_no_zero_point_energy() -> None:
    """nu = omega + 2 x_ii + sum x_ij / 2 and E0 = sum omega / 2 + sum x_ij / 4: it lies between the two half sums."""
    (warning,) = [f for f in build_model(qchem(), ModelOptions(anharmonic=True)).findings if f.severity == "warn"]
    due = (qchem().wavenumbers_cm1.sum() - VPT2.sum()) / 4.0 * 0.0119626565795
    assert f"{due:.2f} kJ/mol higher" in warning.text
    better = qchem().but(anharmonic_zpe_hartree=(qchem().wavenumbers_cm1.sum() + VPT2.sum()) / 4.0 / HARTREE_CM1)
    assert not [f for f in build_model(better, ModelOptions(anharmonic=True)).findings if f.severity == "warn"]


def test_scale_factors_are_for_harmonic_values() -> None:
    for factor in ({"frequency_scale": 0.96}, {"zpe_scale": 1.0}, {"scale": "published"}):
        with pytest.raises(UsageError, match="anharmonic"):
            ModelOptions(anharmonic=True, **factor)


def test_absent_or_unusable_values_are_refused() -> None:
    m = water(charge=0)
    for molecule, words in (
        (m, "the output has none"),
        (m.but(fundamentals_cm1=m.wavenumbers_cm1), "no anharmonic zero-point energy"),
        (m.but(fundamentals_cm1=m.wavenumbers_cm1 - 1600.0, anharmonic_zpe_hartree=0.02), "fundamental is -5.00"),
    ):
        with pytest.raises(Refused, match=words) as stopped:
            build_model(molecule, ModelOptions(anharmonic=True))
        assert said(stopped.value.findings) == {"no-anharmonic"}


def test_an_atom_has_nothing_anharmonic() -> None:
    made, plain = (build_model(atom("H", 2, -0.5), ModelOptions(anharmonic=x)) for x in (True, False))
    assert float(made.s_R(298.15)) == float(plain.s_R(298.15))


def test_another_isotopologue_has_other_fundamentals() -> None:
    assert with_isotopes(qchem(), [parse_isotope("2=D")]).fundamentals_cm1 is None


def test_an_incomplete_list_is_not_taken(tmp_path: Path) -> None:
    text = text_of("qchem54_water_vpt2.out")
    assert read_text(tmp_path, text.replace("VPT2[ 2]  3839.74", "")).fundamentals_cm1 is None
    m = read_text(tmp_path, text.replace("VPT2[ 2]  3839.74", "VPT2[ 2]  *******"))
    with pytest.raises(Refused, match="anharmonic"):
        build_model(m, ModelOptions(anharmonic=True))


def with_gaussian_table(harmonic: np.ndarray, zpe_line: str, status: str) -> str:
    """A Gaussian output with a table as Gaussian 09 and 16 print it (from memory; no such output was at hand)."""
    rows = "".join(
        f"  {i:3d}(1)  {status}{w:12.3f}{0.96 * w:12.3f}{1.0:10.4f}{1.0:10.4f}{1.0:10.4f}\n"
        for i, w in enumerate(harmonic[::-1], start=1)
    )
    text = text_of("gaussian16_dvb_freq.out")
    spot = text.rindex(" - Thermochemistry -")
    spot = text.rindex("\n", 0, text.rindex("\n", 0, spot)) + 1
    heads = [f" {bands} (DE w.r.t. Ground State)\n" for bands in ("Fundamental Bands", "Overtones")]
    return f"{text[:spot]}{zpe_line}\n\n{heads[0]}{rows}\n{heads[1]}   1(2)  1.0 1.0\n{text[spot:]}"


@pytest.mark.parametrize("status", ["", "active  "])
@pytest.mark.parametrize(
    ("line", "cm1"),
    [
        (" Total Anharm    : cm-1 = 38500.125 ; Kcal/mol =  110.078 ; KJ/mol =  460.565", 38500.125),
        (" ZPE(harm) =   0.465D+03 KJ/mol\n ZPE(anh)=   0.46056558D+03   KJ/mol", 38500.275),
    ],
)
def test_gaussian_s_table_of_fundamental_bands(tmp_path: Path, line: str, cm1: float, status: str) -> None:
    plain = read_output(kept("gaussian16_dvb_freq.out"))
    m = read_text(tmp_path, with_gaussian_table(plain.wavenumbers_cm1, line, status))
    assert m.fundamentals_cm1 == pytest.approx(0.96 * plain.wavenumbers_cm1, abs=0.001)
    assert m.anharmonic_zpe_hartree == pytest.approx(cm1 / HARTREE_CM1, rel=1e-6)
    assert codes(m) == codes(plain)
    assert m.wavenumbers_cm1 == pytest.approx(plain.wavenumbers_cm1)


def test_a_table_of_other_harmonic_wavenumbers_is_not_believed(tmp_path: Path) -> None:
    plain = read_output(kept("gaussian16_dvb_freq.out"))
    text = with_gaussian_table(plain.wavenumbers_cm1 + 5.0, " Total Anharm    : cm-1 = 38500.125 ;", "")
    m = read_text(tmp_path, text)
    assert re.search(r"Fundamental Bands", text)
    assert m.fundamentals_cm1 is None
    assert m.anharmonic_zpe_hartree is None
