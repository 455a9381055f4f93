"""Molecule files and QCSchema results where outputs are accepted: survey, table and entry."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import pytest

QCSCHEMA = Path(__file__).resolve().parents[1] / "data" / "qcschema"

CARBON_MONOXIDE = """
[molecule]
name = "carbon-monoxide"
formula = "CO"
multiplicity = 1
masses = "average"

[rotation]
constants_cm1 = [1.92253]
linear = true
source = "Huber and Herzberg 1979"

[symmetry]
number = 1
point_group = "Cinfv"

[vibrations]
wavenumbers_cm1 = [2143.24]
source = "Huber and Herzberg 1979"

[level]
method = "B3LYP"
basis = "6-31G(d)"
"""


@pytest.fixture
def monoxide(tmp_path: Path) -> Path:
    file = tmp_path / "CO.toml"
    file.write_text(CARBON_MONOXIDE, encoding="utf-8")
    return file


def test_survey(run, monoxide: Path) -> None:
    shutil.copy(QCSCHEMA / "water_hf_hessian.json", monoxide.parent)
    (monoxide.parent / "pyproject.toml").write_text("[project]\nname = 'x'\n", encoding="utf-8")
    (monoxide.parent / "other.json").write_text('{"a": 1}', encoding="utf-8")
    done = run("survey", monoxide.parent)
    assert done.code == 0
    assert [line.split("  ")[1:6] for line in done.out.splitlines()] == [
        ["frequency", "CO (0, 1)", "B3LYP/6-31G*", "by hand", "1 mode"],
        ["frequency", "H2O (0, 1)", "HF/6-31G*", "Psi4 1.3.2", "3 modes"],
    ]
    assert "2 other files passed over" in done.err


def test_table_and_published_factors(run, monoxide: Path) -> None:
    done = run("table", monoxide, "--json", "--temperatures", "298.15", "--scale", "published")
    (species,) = json.loads(done.out)["species"]
    assert done.code == 0
    assert species["name"] == "carbon-monoxide"
    assert species["rotational_constants_cm-1"] == [1.92253]
    assert (species["point_group"], species["symmetry_number"], species["masses"]) == ("Cinfv", 1, "average")
    assert species["table"]["S_J_mol_K"][0] == pytest.approx(197.65, abs=0.01)  # NIST-JANAF 197.653
    assert species["frequency_scale"] == 0.9614


def test_entry(run, monoxide: Path) -> None:
    done = run("entry", monoxide, "--dHf298", "-110.53 kJ/mol", "--source", "CODATA 1989")
    assert done.code == 0
    assert "! note: given by hand: wavenumbers, from Huber and Herzberg 1979." in done.out
    record = next(line for line in done.out.splitlines() if line.endswith("1") and len(line) == 80)
    assert record.startswith("carbon-monoxide ")
    assert "by hand, B3LYP/6-31G*" in done.out


def test_entry_of_a_qcschema_result(run) -> None:
    given = ("--dHf298", "-241.8 kJ/mol", "--source", "memory", "--scale", "published", "--name", "H2O")
    done = run("entry", QCSCHEMA / "water_hf_hessian.json", *given)
    assert done.code == 0
    words = " ".join(done.out.replace("!", "").split())
    assert "scale factors 0.8953 (thermal functions) and 0.9135" in words  # Scott and Radom 1996, HF/6-31G(d)
    assert "C2v, symmetry number 2" in words


def test_an_energy_alone_has_no_thermochemistry(run) -> None:
    done = run("table", QCSCHEMA / "water_mp2_energy.json")
    assert done.code == 3
    assert "[no-frequencies]" in done.err


def test_errors_have_file_and_line(run, monoxide: Path) -> None:
    monoxide.write_text(CARBON_MONOXIDE.replace("wavenumbers_cm1", "wavenumber_cm1"), encoding="utf-8")
    done = run("table", monoxide)
    assert done.code == 3
    assert f"error: {monoxide}:18: there is no key 'wavenumber_cm1' in [vibrations]" in done.err
    assert "Did you mean wavenumbers_cm1?" in done.err


@pytest.mark.parametrize("option", [("--masses", "isotopic"), ("--symmetry-number", "2"), ("--electronic", "0:2")])
def test_model_options_act_on_a_molecule_file(run, monoxide: Path, option: tuple[str, str]) -> None:
    base, changed = (
        json.loads(run("table", monoxide, "--json", "--temperatures", "298.15", *extra).out)["species"][0]
        for extra in ((), option)
    )
    shift = changed["table"]["S_J_mol_K"][0] - base["table"]["S_J_mol_K"][0]
    expected = {"--masses": -0.0067, "--symmetry-number": -5.7631, "--electronic": 5.7631}[option[0]]
    # 3/2 R ln(27.9949/28.010) for the masses: the constant that is stated stays; else R ln 2.
    assert shift == pytest.approx(expected, abs=1e-3)


def test_hostile_values_are_refused_and_never_crash(run, tmp_path: Path) -> None:
    """Every value of a good file replaced by values of other kinds."""
    document = json.loads((QCSCHEMA / "water_hf_hessian.json").read_text(encoding="utf-8"))
    file = tmp_path / "x.json"
    for where in ((), ("molecule",), ("properties",), ("model",), ("provenance",)):
        holder = document
        for key in where:
            holder = holder[key]
        for key in list(holder):
            kept = holder[key]
            for value in (None, [], {}, "x", -1, 1e400, [[]], [None], True):
                holder[key] = value
                file.write_text(json.dumps(document), encoding="utf-8")
                assert run("survey", file).code in (0, 3)
            holder[key] = kept
    lines = CARBON_MONOXIDE.splitlines()
    toml = tmp_path / "x.toml"
    for index, line in enumerate(lines):
        if "=" not in line:
            continue
        key = line.split("=")[0]
        for value in (
            "[]",
            "{}",
            "''",
            "-1",
            "inf",
            "nan",
            "[[]]",
            "[['x', 1]]",
            "true",
            "1979-05-27",
            "1e999",
            "9" * 400,
        ):
            toml.write_text("\n".join([*lines[:index], f"{key}= {value}", *lines[index + 1 :]]), encoding="utf-8")
            assert run("table", toml, "--temperatures", "300").code in (0, 3)
