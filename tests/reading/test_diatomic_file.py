"""The table [diatomic] of a molecule file: what it gives, and errors with their line."""

from __future__ import annotations

import re
from pathlib import Path

import janaf
import numpy as np
import pytest

from heatwright import build_model
from heatwright.constants import GAS_CONSTANT_J_MOL_K as R
from heatwright.findings import Refused, refusals
from heatwright.reading.outputs import read_output

HYDROGEN = """[molecule]
formula = "H2"
multiplicity = 1
masses = "average"

[diatomic]
we_cm1 = 4401.213
wexe_cm1 = 121.336
Be_cm1 = 60.853
alphae_cm1 = 3.0622
D0_cm1 = 36118.0
source = "K. P. Huber, G. Herzberg, Constants of Diatomic Molecules (1979)"
"""


def read(tmp_path: Path, text: str):
    file = tmp_path / "x.toml"
    file.write_text(text, encoding="utf-8")
    return read_output(file)


def test_hydrogen(tmp_path: Path) -> None:
    molecule = read(tmp_path, HYDROGEN)
    assert not refusals(molecule.findings)
    model = build_model(molecule)
    # NIST-JANAF H-050: 130.680 and 28.836 J/mol/K, 8.467 kJ/mol.
    assert float(model.s_R(298.15)) * R == pytest.approx(130.680, abs=0.01)
    assert float(model.cp_R(298.15)) * R == pytest.approx(28.836, abs=0.01)
    assert model.h298_minus_h0_kJ_mol == pytest.approx(8.467, abs=0.01)
    assert model.symmetry_number == 2
    assert model.point_group_text == "Dinfh"
    assert any("Huber" in f.found for f in molecule.findings if f.code == "given-by-hand")


def test_two_different_atoms_have_no_symmetry(tmp_path: Path) -> None:
    text = (
        HYDROGEN.replace('"H2"', '"HF"').replace("4401.213", "4138.32").replace("D0_cm1 = 36118.0", "D_cm1 = 0.00215")
    )
    model = build_model(read(tmp_path, text))
    assert (model.symmetry_number, model.point_group_text) == (1, "Cinfv")
    assert read(tmp_path, text).stated.diatomic.centrifugal_cm1 == 0.00215


def test_the_table_in_the_readme(tmp_path: Path) -> None:
    readme = (Path(__file__).resolve().parents[2] / "README.md").read_text(encoding="utf-8")
    _, block, *_ = re.findall(r"^```toml\n(.*?)^```", readme, re.MULTILINE | re.DOTALL)
    head = '[molecule]\nformula = "CO"\nmultiplicity = 1\nmasses = "average"\n'
    model = build_model(read(tmp_path, head + block))
    assert float(model.cp_R(3000.0)) * R == pytest.approx(37.217, abs=0.01)  # NIST-JANAF C-093


def test_a_doublet(tmp_path: Path) -> None:
    text = HYDROGEN.replace('"H2"', '"OH"').replace("multiplicity = 1", "multiplicity = 2") + "A_cm1 = -139.21\n"
    names = [c.name for c in build_model(read(tmp_path, text)).contributions]
    assert names == ["translation", "vibration, rotation and electronic"]


@pytest.mark.parametrize(
    ("old", "new", "line", "words"),
    [
        ("we_cm1 = 4401.213", "we_cm1 = -4401.213", 7, "we_cm1 is -4401.21; expected a positive number"),
        ("we_cm1 = 4401.213\n", "", 6, "[diatomic] has no we_cm1"),
        ("wexe_cm1 = 121.336", "wexe_cm1 = 0", 8, "wexe_cm1 is 0; expected a positive number"),
        ("wexe_cm1 = 121.336", "wexe_cm1 = 2300.0", 8, "leaves no fundamental"),
        ("Be_cm1 = 60.853", "Be_cm1 = nan", 9, "Be_cm1 is nan"),
        ("Be_cm1 = 60.853\n", "", 6, "[diatomic] has no Be_cm1"),
        ("alphae_cm1 = 3.0622", "alphae_cm1 = -1.0", 10, "alphae_cm1 is -1"),
        ("alphae_cm1 = 3.0622", "alphae_cm1 = 130.0", 10, "leaves B positive"),
        ("D0_cm1 = 36118.0", "D0_cm1 = 0.0", 11, "D0_cm1 is 0"),
        ("D0_cm1 = 36118.0", "D_cm1 = -0.04", 11, "D_cm1 is -0.04"),
        ("D0_cm1 = 36118.0", "A_cm1 = 10.0", 11, "A_cm1 is given with multiplicity 1"),
        ("D0_cm1 = 36118.0", "De_cm1 = 38000.0", 11, "there is no key 'De_cm1'"),
        ('source = "K.', 'sauce = "K.', 12, "Did you mean source?"),
        ('formula = "H2"', 'formula = "H2O"', 12, "a molecule of 3 atoms"),
        ("[diatomic]", "[vibrations]\nwavenumbers_cm1 = [4158.0]\nsource = 'x'\n[diatomic]", 8, "beside [diatomic]"),
    ],
)
def test_errors_name_the_line(tmp_path: Path, old: str, new: str, line: int, words: str) -> None:
    assert HYDROGEN.count(old) == 1
    with pytest.raises(Refused) as refused:
        read(tmp_path, HYDROGEN.replace(old, new))
    (finding,) = refused.value.findings
    assert finding.code == "molecule-file-wrong"
    assert words in finding.text
    assert finding.at("x.toml").where == f"x.toml:{line}"


@pytest.mark.parametrize(
    ("A", "more", "words"),
    [("0.0", "", "A_cm1 is 0"), ("5.0", "[electronic]\nlevels_cm1 = [[0.0, 2]]\nsource = 'x'\n", "together with")],
)
def test_a_spin_orbit_constant_that_cannot_be(tmp_path: Path, A: str, more: str, words: str) -> None:
    text = HYDROGEN.replace('"H2"', '"OH"').replace("multiplicity = 1", "multiplicity = 2")
    with pytest.raises(Refused, match=words):
        read(tmp_path, f"{text}A_cm1 = {A}\n{more}")


# NIST-JANAF D-005 and D-012 through the package janaf; constants of K. P. Huber, G. Herzberg (1979), from memory.
# Above 400 K the one centrifugal term of so light a molecule is too strong.
@pytest.mark.parametrize(
    ("formula", "table", "constants", "sigma"),
    [
        ("HD", "D-005", (3813.15, 91.65, 45.655, 1.986), 1),
        ("D2", "D-012", (3115.50, 61.82, 30.4436, 1.0786), 2),
    ],
)
def test_deuterium(tmp_path: Path, formula: str, table: str, constants: tuple[float, ...], sigma: int) -> None:
    text = HYDROGEN.replace('"H2"', f'"{formula}"').replace("D0_cm1 = 36118.0\n", "")
    for old, new in zip((4401.213, 121.336, 60.853, 3.0622), constants, strict=True):
        text = text.replace(str(old), str(new))
    molecule = read(tmp_path, text)
    model = build_model(molecule)
    assert model.symmetry_number == sigma
    assert not [f for f in molecule.findings if f.code == "non-default-isotope"]
    frame = janaf.Table(table).df
    frame = frame.filter((frame["T(K)"] >= 100.0) & (frame["T(K)"] <= 400.0))
    T = frame["T(K)"].to_numpy().astype(float)
    assert np.abs(model.s_R(T) * R - frame["S"].to_numpy().astype(float)).max() < 0.01
    assert np.abs(model.cp_R(T) * R - frame["Cp"].to_numpy().astype(float)).max() < 0.01
