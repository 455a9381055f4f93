"""``heatwright references``: what is listed, the user's table before ours, and what is said when nothing is found."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

HEAD = "name,formula,smiles,multiplicity,dHf0_kJ_mol,u95_kJ_mol,source"


@pytest.fixture
def mine(tmp_path: Path) -> Path:
    path = tmp_path / "mine.csv"
    path.write_text(f"{HEAD}\nCH3OH,CH4O,CO,1,-190.1,0.4,our flow calorimeter\n", encoding="utf-8")
    return path


def test_everything_with_its_source(run) -> None:
    done = run("references", "--json")
    document = json.loads(done.out)
    assert (done.code, done.err, document["heatwright"]) == (0, "", 1)
    assert {a["symbol"] for a in document["atoms"]} >= set("HCNOFS")
    assert all(row["source"] for row in document["atoms"] + document["species"])
    (oxygen,) = (a for a in document["atoms"] if a["symbol"] == "O")
    assert (oxygen["dHf0_kJ_mol"], oxygen["u95_kJ_mol"]) == (246.844, 0.002)  # ATcT 1.112
    assert round(oxygen["spin_orbit_lowering_kJ_mol"], 2) == 0.93
    assert "Argonne" in document["sources"]["ATcT 1.112"]
    text = run("references").out
    assert all(s["name"] in text for s in document["species"])


@pytest.mark.parametrize("formula", ["C2H6O", "CH3CH2OH", "OC2H6"])
def test_isomers_of_a_formula(run, formula: str) -> None:
    species = json.loads(run("references", formula, "--json").out)["species"]
    assert {s["words"]: s["dHf298_kJ_mol"] for s in species} == {"ethanol": -234.57, "dimethyl ether": -184.02}


@pytest.mark.parametrize(("word", "name"), [("ethanol", "C2H5OH"), ("CH2CCH2", "CH2CCH2"), ("64-17-5", "C2H5OH")])
def test_a_species_by_name(run, word: str, name: str) -> None:
    species = json.loads(run("references", word, "--json").out)["species"]
    assert name in {s["name"] for s in species}


def test_an_element_shows_its_atom(run) -> None:
    out = run("references", "Cl").out
    assert "119.621" in out
    assert "Cl2(g)" in out
    assert "4.591" in out


def test_nearest_formulas(run) -> None:
    done = run("references", "C3H8O")
    assert (done.code, done.out) == (3, "")
    assert "no reference enthalpy of 'C3H8O'" in done.err
    assert "C3H6O" in done.err
    assert "[no-reference]" in done.err
    assert "ethanol" in run("references", "ethanool").err


def test_the_users_table(run, mine: Path) -> None:
    done = run("references", "CH4O", "--table", mine)
    assert "-190.100" in done.out
    assert "our flow calorimeter (yours)" in done.out
    assert "-189.820" not in done.out
    assert f"note: {mine}: for CH3OH your enthalpy of formation is used" in done.err
    assert run("references", "CH4O", "--table", mine, "-q").err == ""


def test_a_faulty_table(run, mine: Path) -> None:
    mine.write_text(mine.read_text(encoding="utf-8").replace("CH4O,CO", "CH4O,CC"), encoding="utf-8")
    done = run("references", "--table", mine)
    assert (done.code, done.out) == (3, "")
    assert f"{mine}:2: the formula is CH4O, and the SMILES 'CC' holds C2H6" in done.err
