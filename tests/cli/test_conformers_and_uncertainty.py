"""``--conformer`` and ``--uncertainty`` through table and entry: words, JSON, CSV, comment, what is refused."""

from __future__ import annotations

import csv
import io
import json
import re
from pathlib import Path

import pytest

from kept_outputs import kept

DATA = Path(__file__).resolve().parents[1] / "data" / "conformers"
TRANS, GAUCHE = DATA / "butane_trans.toml", DATA / "butane_gauche.toml"
SCALED = ("--frequency-scale", "0.9614", "--zpe-scale", "0.9806")
GIVEN = ("--dHf298", "-125.85 kJ/mol", "--source", "ATcT 1.112")


def test_populations_in_the_table(run) -> None:
    done = run("table", TRANS, "--conformer", GAUCHE, *SCALED, "--temperatures", "298.15,1000")
    assert done.code == 0
    assert "conformer 1: " in done.out
    assert re.search(r"conformer 2: \S+butane_gauche.toml, 3.826 kJ/mol, 2 mirror images", done.out)
    rows = [line.split() for line in done.out.split("populations", 1)[1].splitlines()[2:]]
    assert [row[0] for row in rows] == ["298.15", "1000.00"]
    assert [sum(map(float, row[1:])) for row in rows] == pytest.approx([1.0, 1.0], abs=2e-5)
    assert float(rows[0][1]) == pytest.approx(0.698, abs=0.001)


def test_json_of_a_mixture(run) -> None:
    options = (*SCALED, "--temperatures", "298.15,1000", "--json")
    done = run("table", GAUCHE, "--conformer", TRANS, *options)
    (species,) = json.loads(done.out)["species"]
    assert species["name"] == "butane_gauche"
    assert species["source"]["file"] == str(TRANS)  # the lowest
    assert [c["file"] for c in species["conformers"]] == [str(TRANS), str(GAUCHE)]
    assert [c["degeneracy"] for c in species["conformers"]] == [1, 2]
    assert [sum(p) for p in zip(*(c["populations"] for c in species["conformers"]), strict=True)] == pytest.approx(
        [1, 1]
    )
    parts = species["table"]["contributions"]
    total = [sum(column) for column in zip(*(part["S_J_mol_K"] for part in parts.values()), strict=True)]
    assert total == pytest.approx(species["table"]["S_J_mol_K"], rel=1e-9)
    assert "conformer-not-lowest" in {f["code"] for f in species["findings"]}
    (single,) = json.loads(run("table", TRANS, *options).out)["species"]
    assert "conformers" not in single
    assert "uncertainty" not in single


def test_the_entry_of_a_mixture(run) -> None:
    done = run("entry", GAUCHE, "--name", "C4H10", "--conformer", TRANS, *SCALED, *GIVEN)
    comment = " ".join(done.out.replace("!", "").split())
    assert done.code == 0
    assert "mixture of conformers at equilibrium, populations at 298.15 K: " in comment
    assert "butane_trans.toml at 0.000 kJ/mol, population 0.698;" in comment
    assert "2 mirror images, population 0.302" in comment
    assert "note: the first output is not the lowest conformer" in comment
    assert "S(298.15 K) = 309.00" in comment
    assert sum(line[79:] == "1" for line in done.out.splitlines()) == 1


def test_given_enthalpies_are_the_mixtures_and_atomization_starts_from_the_lowest(run, samples: Path) -> None:
    def formation(*options: object) -> dict:
        done = run("entry", *options, *SCALED, "--json")
        assert done.code == 0
        return json.loads(done.out)["species"][0]

    pair = (GAUCHE, "--conformer", TRANS)
    atoms = ("--atoms", samples / "atoms")
    mixed, lowest = formation(*pair, *atoms), formation(TRANS, *atoms)
    assert mixed["formation"]["dHf0_kJ_mol"] == lowest["formation"]["dHf0_kJ_mol"]
    rise = mixed["H298_minus_H0_kJ_mol"] - lowest["H298_minus_H0_kJ_mol"]
    assert rise > 1.0
    change = mixed["formation"]["dHf298_kJ_mol"] - lowest["formation"]["dHf298_kJ_mol"]
    assert change == pytest.approx(rise, abs=1e-6)
    given_mixed, given_lowest = formation(*pair, *GIVEN), formation(TRANS, *GIVEN)
    assert given_mixed["formation"]["dHf298_kJ_mol"] == -125.85
    fall = given_mixed["formation"]["dHf0_kJ_mol"] - given_lowest["formation"]["dHf0_kJ_mol"]
    assert fall == pytest.approx(-rise, abs=1e-6)


@pytest.mark.parametrize("command", ["table", "entry"])
def test_usage(run, command: str) -> None:
    several = run(command, TRANS, GAUCHE, "--conformer", GAUCHE)
    assert several.code == 2
    assert "--conformer belongs to one OUTPUT" in several.err
    number = run(command, TRANS, "--conformer", GAUCHE, "--symmetry-number", 2)
    assert number.code == 2
    energies = run(command, TRANS, "--conformer", GAUCHE, "--energy", TRANS, *(GIVEN if command == "entry" else ()))
    assert energies.code == 2
    assert "--energy was given 1 times for 2 outputs" in energies.err


def test_energies_for_every_conformer(run) -> None:
    plain = run("table", TRANS, "--conformer", GAUCHE, "--json")
    energies = ("--energy", TRANS, "--energy", GAUCHE)
    done = run("table", TRANS, "--conformer", GAUCHE, *energies, "--json")
    assert done.code == 0
    one, other = (json.loads(r.out)["species"][0] for r in (plain, done))
    assert one["conformers"] == other["conformers"]
    assert other["source"]["energy_file"] == str(TRANS)
    crossed = run("table", TRANS, "--conformer", GAUCHE, "--energy", GAUCHE, "--energy", TRANS)
    assert crossed.code == 3
    assert "[energy-of-another]" in crossed.err


def test_refused_conformers_leave_nothing(run, tmp_path: Path) -> None:
    target = tmp_path / "out.dat"
    done = run("entry", TRANS, "--conformer", DATA / "ethanol_trans.toml", *GIVEN, "-o", target)
    assert (done.code, done.out, target.exists()) == (3, "", False)
    assert "[conformer-differs]" in done.err
    text = GAUCHE.read_text(encoding="utf-8")
    saddle = tmp_path / "saddle.toml"
    saddle.write_text(text.replace("  116.099,", "  -116.099,"), encoding="utf-8")
    done = run("table", TRANS, "--conformer", saddle)
    assert (done.code, done.out) == (3, "")
    assert "saddle.toml" in done.err
    missing = run("table", TRANS, "--conformer", tmp_path / "none.out")
    assert missing.code == 3
    assert "none.out" in missing.err


def test_a_conformer_on_a_slope_makes_no_entry(run, samples: Path) -> None:
    steep = kept("nwchem702_water_steep_freq.out")
    done = run("entry", samples / "H2O.out", "--conformer", steep, *GIVEN)
    assert (done.code, done.out) == (3, "")
    assert f"{steep}: the largest gradient component" in done.err
    assert "[not-stationary]" in done.err


def test_levels_are_trusted_on_request_only(run, tmp_path: Path) -> None:
    other = tmp_path / "gauche.toml"
    other.write_text(GAUCHE.read_text(encoding="utf-8").replace('"6-31G*"', '"6-31G**"'), encoding="utf-8")
    refused = run("entry", TRANS, "--conformer", other, *GIVEN)
    assert refused.code == 3
    assert "basis 6-31G* and 6-31G**" in refused.err
    trusted = run("entry", TRANS, "--conformer", other, *GIVEN, "--trust-levels")
    assert trusted.code == 0
    assert "not at the level of theory of" in " ".join(trusted.out.replace("!", "").split())


def test_mirror_images_are_told(run) -> None:
    names = [DATA / f"ethanol_{n}.toml" for n in ("trans", "gauche", "gauche_mirror")]
    done = run("table", names[0], "--conformer", names[1], "--conformer", names[2], "--json")
    (species,) = json.loads(done.out)["species"]
    assert [c["degeneracy"] for c in species["conformers"]] == [2, 1]
    assert "[conformer-mirror]" in done.err


# --- uncertainties -------------------------------------------------------------------------------------------------


def test_columns_and_sources_in_the_table(run, samples: Path) -> None:
    done = run("table", samples / "CH3OH.out", "--uncertainty", "default", "--temperatures", "298.15,1000")
    assert done.code == 0
    head = next(line for line in done.out.splitlines() if "H°−H°(298)" in line and "±" in line)
    assert head.split().count("±") == 3
    assert "scale of all wavenumbers +/- 2.6 % (Irikura, Johnson & Kacker 2005" in done.out
    assert "none is tabulated for this level" in done.out
    assert "each mode below 400 1/cm +/- 20 % (assumed" in done.out
    assert "relative energy" not in done.out


def test_json_and_csv_carry_uncertainties(run, samples: Path) -> None:
    options = (samples / "CH3OH.out", "--uncertainty", "scale=0.02,low=0.1", "--temperatures", "298.15,1000")
    (species,) = json.loads(run("table", *options, "--json").out)["species"]
    u = species["uncertainty"]
    assert [len(u[key]) for key in ("Cp_J_mol_K", "H_minus_H298_kJ_mol", "S_J_mol_K")] == [2, 2, 2]
    assert u["H_minus_H298_kJ_mol"][0] == 0.0
    assert [(i["value"], i["unit"], i["source"]) for i in u["inputs"]] == [
        (0.02, "relative", "given"),
        (0.1, "relative", "given"),
    ]
    rows = list(csv.DictReader(io.StringIO(run("table", *options, "--format", "csv").out)))
    assert [float(row["u_S_J_mol_K"]) for row in rows] == u["S_J_mol_K"]
    assert "u_S_J_mol_K" not in run("table", options[0], "--format", "csv").out


def test_calories_scale_the_uncertainties_too(run, samples: Path) -> None:
    options = ("table", samples / "CH3OH.out", "--uncertainty", "scale=0.02", "--temperatures", "1000")
    joules, calories = (
        [float(x) for x in re.search(r"^ +1000\.00 .*$", run(*options, *more).out, re.MULTILINE)[0].split()[1:]]
        for more in ((), ("--units", "kcal"))
    )
    assert calories == pytest.approx([x / 4.184 for x in joules], abs=6e-4)


def test_the_entry_states_them(run) -> None:
    done = run("entry", TRANS, "--conformer", GAUCHE, *GIVEN, "--uncertainty", "scale=0.01,low=0.05,conformers=0.3")
    comment = " ".join(done.out.replace("!", "").split())
    assert re.search(r"standard uncertainties at 298.15 K: S \d\.\d\d, Cp \d\.\d\d J/mol/K", comment)
    assert "relative energy of each conformer +/- 0.3 kJ/mol (given)" in comment
    assert "[uncertainty-nonlinear]" not in done.err


def test_too_large_inputs_are_said(run) -> None:
    done = run("table", TRANS, "--conformer", GAUCHE, "--uncertainty", "conformers=3", "--temperatures", "200")
    assert done.code == 0
    assert "[uncertainty-nonlinear]" in done.err


def test_wrong_uncertainties_are_usage_errors(run, samples: Path) -> None:
    done = run("table", samples / "CH3OH.out", "--uncertainty", "speed=1")
    assert done.code == 2
    assert "'speed=1' is not KEY=VALUE with one of scale, low, cutoff, barrier, conformers" in done.err
