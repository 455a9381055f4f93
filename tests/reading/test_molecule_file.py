"""Molecules written down by hand: published tables from spectroscopic constants, and errors with their line."""

from __future__ import annotations

import gzip
import re
from pathlib import Path

import janaf
import numpy as np
import pytest

from heatwright import ModelOptions, build_model
from heatwright.constants import GAS_CONSTANT_J_MOL_K as R
from heatwright.findings import Refused, refusals
from heatwright.reading.moleculefile import KEYS
from heatwright.reading.outputs import read_output
from heatwright.reading.strict import line_of
from spectroscopy import pairs, rows

SPECTRA = rows("spectroscopic_constants")
TABLES = rows("gas_standard_thermo")


def molecule_file(row: dict[str, str], multiplicity: int = 1) -> str:
    """A row of the table of spectroscopic constants as a molecule file."""
    constants = [row[c] for c in ("A0_cm1", "B0_cm1", "C0_cm1") if row[c]]
    modes = [f"[{value}, {count}]" for value, count in pairs(row["fundamentals_cm1_x_degeneracy"])]
    levels = [f"[{value}, {count}]" for value, count in pairs(row["electronic_levels_cm1_x_degeneracy"])]
    return f"""
[molecule]
name = "{row["species"]}"
formula = "{row["formula"]}"
multiplicity = {multiplicity}
masses = "average"

[rotation]
constants_cm1 = [{", ".join(constants)}]
linear = {"true" if len(constants) == 1 else "false"}
source = "as in spectroscopic_constants.csv"

[symmetry]
number = {row["symmetry_number"]}
point_group = "{row["point_group"]}"

[vibrations]
wavenumbers_cm1 = [{", ".join(modes)}]
source = "as in spectroscopic_constants.csv"

[electronic]
levels_cm1 = [{", ".join(levels)}]
source = "as in spectroscopic_constants.csv"
"""


def read(tmp_path: Path, text: str, **options: int):
    file = tmp_path / "x.toml"
    file.write_text(text, encoding="utf-8")
    return read_output(file, **options)


# NIST-JANAF (M. W. Chase, Monograph 9, 1998) through the package janaf; constants from the sources in the table of
# spectroscopic constants.  JANAF's CO, CO2, H2O and NH3 go beyond the harmonic rigid rotor, the last two (stretching by
# rotation, inversion) already at 300 K, so they are compared where the model is one; CH4 is at every temperature.
@pytest.mark.parametrize(
    ("species", "highest_K", "allowed_s", "allowed_cp"),
    [("CO", 500.0, 0.05, 0.03), ("CH4", 6000.0, 0.08, 0.06), ("H2O", 300.0, 0.13, 0.12), ("CO2", 500.0, 0.05, 0.06),
     ("NH3", 300.0, 0.10, 0.19)],
)  # fmt: skip
def test_published_tables(tmp_path: Path, species: str, highest_K: float, allowed_s: float, allowed_cp: float) -> None:
    molecule = read(tmp_path, molecule_file(SPECTRA[species]))
    assert refusals(molecule.findings) == ()
    assert molecule.kind == "frequency"
    model = build_model(molecule)
    frame = janaf.Table(TABLES[species]["janaf_table"]).df
    frame = frame.filter((frame["T(K)"] >= 200.0) & (frame["T(K)"] <= highest_K))
    T = frame["T(K)"].to_numpy().astype(float)
    assert T.size >= 3
    assert np.abs(model.s_R(T) * R - frame["S"].to_numpy().astype(float)).max() <= allowed_s
    assert np.abs(model.cp_R(T) * R - frame["Cp"].to_numpy().astype(float)).max() <= allowed_cp
    assert model.symmetry_number == int(SPECTRA[species]["symmetry_number"])
    assert model.symmetry.point_group == SPECTRA[species]["point_group"]


@pytest.mark.parametrize("species", ["NO", "O2", "NO2", "C2H6", "HOCl"])
def test_the_model_is_the_one_of_the_same_contributions(tmp_path: Path, species: str) -> None:
    multiplicity = {"NO": 2, "NO2": 2, "O2": 3}.get(species, 1)
    row = SPECTRA[species]
    model = build_model(read(tmp_path, molecule_file(row, multiplicity)))
    s = float(model.s_R(298.15)) * R
    assert s == pytest.approx(float(row["rrho_S298_J_mol_K"]), abs=0.02)  # computed independently, older constants
    assert model.levels == tuple(pairs(row["electronic_levels_cm1_x_degeneracy"]))
    linear = not row["A0_cm1"]
    assert model.inertia.kind == "linear" or not linear


GEOMETRY = """
[molecule]
name = "water"
multiplicity = 1

[geometry]
source = "structure of G. Herzberg (1966), from memory"
atoms = [
    ["O", 0.0,  0.0,    0.1173],
    ["H", 0.0,  0.7572, -0.4692],
    ["H", 0.0, -0.7572, -0.4692],
]

[vibrations]
wavenumbers_cm1 = [3657.0, 1595.0, 3756.0]
source = "T. Shimanouchi, NSRDS-NBS 39 (1972)"

[energies]
hartree = { SCF = -76.0107, "CCSD(T)" = -76.3322 }
in_use = "CCSD(T)"
source = "made up"

[level]
method = "ccsd(t)"
basis = "cc-pvtz"
frozen_core = "frozen"
"""


def test_a_geometry(tmp_path: Path) -> None:
    molecule = read(tmp_path, GEOMETRY)
    model = build_model(molecule)
    assert (model.symmetry.point_group, model.symmetry_number, model.inertia.kind) == ("C2v", 2, "asymmetric top")
    assert (molecule.energy_kind, molecule.energy_hartree) == ("CCSD(T)", -76.3322)
    assert molecule.level is not None
    assert (molecule.level.label, molecule.level.frozen_core) == ("CCSD(T)/cc-pVTZ", "frozen")
    assert float(model.s_R(298.15)) * R == pytest.approx(188.8, abs=0.2)  # NIST-JANAF 188.834
    sources = [f.found for f in molecule.findings if f.code == "given-by-hand"]
    assert "given by hand: wavenumbers, from T. Shimanouchi, NSRDS-NBS 39 (1972)" in sources
    assert len(sources) == 3


def test_an_atom(tmp_path: Path) -> None:
    text = '[molecule]\nformula = "O"\nmultiplicity = 3\n[energies]\nhartree = { SCF = -74.8 }\nsource = "x"\n'
    molecule = read(tmp_path, text)
    assert (molecule.kind, molecule.energy_hartree, molecule.energy_kind) == ("atom", -74.8, "SCF")
    assert float(build_model(molecule).s_R(298.15)) * R == pytest.approx(161.0, abs=0.1)  # NIST-JANAF 161.059
    assert build_model(molecule).inertia.kind == "atom"


def test_packed_files_and_values_of_the_user(tmp_path: Path) -> None:
    file = tmp_path / "water.toml.gz"
    file.write_bytes(gzip.compress(GEOMETRY.encode()))
    assert read_output(file).n_atoms == 3
    charged = read(tmp_path, GEOMETRY, charge=1, multiplicity=2)
    assert (charged.charge, charged.multiplicity) == (1, 2)


def test_stated_values_and_options(tmp_path: Path) -> None:
    text = molecule_file(SPECTRA["CH4"])
    base = float(build_model(read(tmp_path, text)).s_R(298.15))
    one = build_model(read(tmp_path, text), ModelOptions(symmetry_number=1))
    assert float(one.s_R(298.15)) - base == pytest.approx(np.log(12.0))
    assert any("the file states 12 (Td)" in f.found for f in one.findings)
    chiral = read(tmp_path, text.replace('point_group = "Td"', "optical_isomers = 2"))
    model = build_model(chiral)
    assert float(model.s_R(298.15)) - base == pytest.approx(np.log(2.0))
    assert model.point_group_text == "point group not stated"
    own = build_model(read(tmp_path, GEOMETRY + "[symmetry]\nnumber = 1\n"))
    assert own.symmetry_number == 1
    assert any("symmetry number 1 was given; the geometry says 2 (C2v)" in f.found for f in own.findings)


def test_stated_levels_give_way_to_the_option(tmp_path: Path) -> None:
    molecule = read(tmp_path, molecule_file(SPECTRA["NO"], 2))
    assert build_model(molecule).levels_source == "as in spectroscopic_constants.csv"
    assert build_model(molecule, ModelOptions(electronic="spin")).levels == ((0.0, 2),)


@pytest.mark.parametrize(
    ("old", "new", "code"),
    [
        ("[667.0, 2], ", "", "mode-count"),
        ("[1333.0, 1]", "[-1333.0, 1]", "imaginary-modes"),
        ("multiplicity = 1", "multiplicity = 2", "multiplicity-impossible"),
        ("linear = true", "linear = false", None),
    ],
)
def test_the_same_checks_of_soundness(tmp_path: Path, old: str, new: str, code: str | None) -> None:
    text = molecule_file(SPECTRA["CO2"])
    assert old in text
    if code is None:
        with pytest.raises(Refused, match="3 positive for a non-linear molecule"):
            read(tmp_path, text.replace(old, new))
    else:
        assert code in {f.code for f in refusals(read(tmp_path, text.replace(old, new)).findings)}


@pytest.mark.parametrize(
    ("old", "new", "line", "words"),
    [
        ("multiplicity = 1", "multiplicty = 1", 4, "Did you mean multiplicity?"),
        ("multiplicity = 1", "", 2, "[molecule] has no multiplicity"),
        ("multiplicity = 1", "multiplicity = true", 4, "multiplicity is true"),
        ("multiplicity = 1", "multiplicity = 0", 4, "at least 1"),
        ('name = "water"', "name = 7", 3, "name is 7"),
        ('name = "water"', 'formula = "H2S"', 3, "the geometry holds H2O"),
        ('name = "water"', 'formula = "H2O+"', 3, "A charge has a key of its own"),
        ('name = "water"', 'masses = "mean"', 3, "average"),
        ("[vibrations]", "[vibration]", 14, "Did you mean vibrations?"),
        ('["O", 0.0,  0.0,    0.1173]', '["O", 0.0, 0.1173]', 8, "atom 1 is"),
        ('["O", 0.0,  0.0,    0.1173]', '["Ox", 0.0, 0.0, 0.1173]', 8, "'Ox' is no element's symbol"),
        ('["O", 0.0,  0.0,    0.1173]', '["O", 0.0, nan, 0.1173]', 8, "a coordinate of atom 1 is nan"),
        ("[3657.0, 1595.0, 3756.0]", "[3657.0, 1595.0, 0.0]", 15, "a wavenumber is 0"),
        ("[3657.0, 1595.0, 3756.0]", "[[3657.0, 0], 1595.0]", 15, "item 1 is [3657.0, 0]"),
        ("[3657.0, 1595.0, 3756.0]", '"many"', 15, "a list in square brackets"),
        ("[3657.0, 1595.0, 3756.0]", "[]", 15, "a list in square brackets"),
        ('source = "T. Shimanouchi, NSRDS-NBS 39 (1972)"', "", 14, "[vibrations] has no source"),
        ('in_use = "CCSD(T)"', "", 18, "it is not said which energy is in use"),
        ('in_use = "CCSD(T)"', 'in_use = "MP2"', 20, "one of SCF, CCSD(T)"),
        ("SCF = -76.0107", 'SCF = "low"', 19, "the SCF energy is 'low'"),
        ('method = "ccsd(t)"', "", 23, "[level] has no method"),
        ("[level]", "[level", 23, "this is no TOML"),
        (
            "[level]",
            "[rotation]\nconstants_cm1 = [1.0]\nlinear = true\nsource = 'x'\n[level]",
            24,
            "moments of inertia",
        ),
        ("[level]", "[symmetry]\npoint_group = 'C2v'\n[level]", 24, "only one of them"),
        ("[level]", "[electronic]\nlevels_cm1 = [[100.0, 2]]\nsource = 'x'\n[level]", 24, "the ground level at 0"),
    ],
)
def test_errors_name_the_line(tmp_path: Path, old: str, new: str, line: int, words: str) -> None:
    assert GEOMETRY.count(old) == 1
    with pytest.raises(Refused) as refused:
        read(tmp_path, GEOMETRY.replace(old, new))
    (finding,) = refused.value.findings
    assert finding.code == "molecule-file-wrong"
    assert words in finding.text
    assert finding.at("x.toml").where == f"x.toml:{line}"


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("[molecule]\nmultiplicity = 1\n", "neither a formula nor a geometry"),
        ('[molecule]\nformula = "CO"\nmultiplicity = 1\n', "neither a [geometry] nor a [rotation] table"),
        ('[molecule]\nformula = "CO0"\nmultiplicity = 1\n', "between 1 and 999"),
        ('[molecule]\nformula = "CXx"\nmultiplicity = 1\n', "no element's symbol"),
        ("molecule = 3", "a table, [molecule]"),
    ],
)
def test_what_is_missing(tmp_path: Path, text: str, words: str) -> None:
    with pytest.raises(Refused) as refused:
        read(tmp_path, text)
    assert words in refused.value.findings[0].text


def test_rotational_constants_need_a_symmetry_number(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="without a symmetry number"):
        read(tmp_path, molecule_file(SPECTRA["CO"]).replace("number = 1", ""))


def test_another_toml_file_is_no_molecule_file(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="not-an-output"):
        read(tmp_path, "[project]\nname = 'x'\n")
    with pytest.raises(Refused, match="molecule-file-wrong"):
        read(tmp_path, "a = " + "[" * 5000 + "]" * 5000)


def test_lines_of_tables_written_in_other_ways() -> None:
    text = "[energies]\nsource = 'x'\n[energies.hartree]\nSCF = 1\n"
    assert line_of(text, "energies.hartree", "SCF") == 4
    assert line_of("a.b = 1", "", "a") == 1
    assert line_of("[x]\nhartree = { SCF = 'a' }", "x.hartree", "SCF") == 2


def test_every_table_takes_a_source() -> None:
    assert [name for name, keys in KEYS.items() if "source" not in keys] == []


def test_the_file_in_the_readme(tmp_path: Path) -> None:
    readme = (Path(__file__).resolve().parents[2] / "README.md").read_text(encoding="utf-8")
    block, *_ = re.findall(r"^```toml\n(.*?)^```", readme, re.MULTILINE | re.DOTALL)
    molecule = read(tmp_path, block)
    assert refusals(molecule.findings) == ()
    assert float(build_model(molecule).s_R(298.15)) * R == pytest.approx(213.79, abs=0.02)  # NIST-JANAF 213.795
