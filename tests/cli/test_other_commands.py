"""``survey``, ``table``, ``samples`` and the command line as a whole."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from importlib import import_module
from pathlib import Path

import click
import numpy as np
import pytest

from heatwright import __version__
from heatwright.cli import main as cli_main
from heatwright.cli.main import SECTIONS, cli

MODULES = [path.stem for path in Path(cli_main.__file__).parent.glob("*.py")]
COMMANDS = sorted(
    name for name in MODULES if isinstance(getattr(import_module(f"heatwright.cli.{name}"), name, None), click.Command)
)
"""Every command that there is a module for."""


def test_survey_gives_a_line_for_each_output(run, samples: Path) -> None:
    done = run("survey", samples)
    lines = done.out.splitlines()
    assert done.code == 0
    assert len(lines) == len(list(samples.rglob("*.out")))
    assert all(line.endswith("usable") for line in lines)
    assert any("CH4O (0, 1)  B3LYP/6-31G*  NWChem 7.0.2  12 modes" in line for line in lines)
    assert "2 other files passed over" in done.err  # README.md and heatwright.toml


def test_survey_json(run, samples: Path) -> None:
    document = json.loads(run("survey", samples / "OH.out", samples / "atoms" / "C.out", "--json").out)
    hydroxyl, carbon = document["outputs"]
    assert document["heatwright"] == 1
    assert (hydroxyl["kind"], hydroxyl["usable"], hydroxyl["n_modes"]) == ("frequency", True, 1)
    assert (carbon["kind"], carbon["usable"], carbon["multiplicity"], carbon["zpe_hartree"]) == ("atom", True, 3, None)
    assert carbon["energy_hartree"] == pytest.approx(-37.8, abs=0.1)
    assert hydroxyl["zpe_hartree"] == pytest.approx(0.00826, abs=1e-5)
    assert set(hydroxyl) == {
        "file", "sha256", "program", "version", "kind", "usable", "formula", "charge", "multiplicity", "level",
        "energy_hartree", "energy_kind", "zpe_hartree", "n_modes", "n_imaginary", "findings",
    }  # fmt: skip


def test_survey_of_what_is_not_an_output(run, tmp_path: Path) -> None:
    file = tmp_path / "list.txt"
    file.write_text("eggs\n")
    named = run("survey", file)
    assert named.code == 3
    assert "not usable: " in named.out
    inside = run("survey", tmp_path, "--json")
    assert inside.code == 0
    assert json.loads(inside.out)["outputs"] == []
    (row,) = json.loads(run("survey", file, "--json").out)["outputs"]
    assert (row["kind"], row["usable"], row["findings"][0]["code"]) == ("unknown", False, "not-an-output")


def test_table_text_and_json_agree(run, samples: Path) -> None:
    options = ("table", samples / "CO2.out", "--temperatures", "298.15,1000", "--frequency-scale", 0.9614)
    text = run(*options)
    document = json.loads(run(*options, "--json").out)
    (species,) = document["species"]
    assert text.code == 0
    assert "formation" not in species
    assert "nasa7" not in species
    row = [line.split() for line in text.out.splitlines() if line.startswith("  1000.00")]
    table = species["table"]
    assert float(row[0][1]) == pytest.approx(table["Cp_J_mol_K"][1], abs=5e-4)
    assert float(row[0][2]) == pytest.approx(table["H_minus_H298_kJ_mol"][1], abs=5e-4)
    assert float(row[0][3]) == pytest.approx(table["S_J_mol_K"][1], abs=5e-4)
    gibbs = table["S_J_mol_K"][1] - table["H_minus_H298_kJ_mol"][1] * 1000.0 / 1000.0
    assert table["minus_G_minus_H298_over_T_J_mol_K"][1] == pytest.approx(gibbs, abs=1e-8)
    shares = [float(cell) for cell in row[1][1:]]
    assert sum(shares[:4]) == pytest.approx(table["Cp_J_mol_K"][1], abs=3e-3)
    assert sum(shares[4:]) == pytest.approx(table["S_J_mol_K"][1], abs=3e-3)


def test_table_is_consistent_as_printed(run, samples: Path) -> None:
    done = run("table", samples / "CH3OCH3.out", "--temperatures", "300:3000:1", "--json")
    table = json.loads(done.out)["species"][0]["table"]
    T, cp, h, s = (np.array(table[k]) for k in ("T_K", "Cp_J_mol_K", "H_minus_H298_kJ_mol", "S_J_mol_K"))
    # Simpson's rule on a 1 K grid, over pairs of steps.
    for integrand, whole, unit in ((cp, h, 1000.0), (cp / T, s, 1.0)):
        pieces = (integrand[:-2:2] + 4.0 * integrand[1:-1:2] + integrand[2::2]) / 3.0
        np.testing.assert_allclose(np.cumsum(pieces), (whole[2::2] - whole[0]) * unit, rtol=1e-9)


def test_table_as_csv_needs_no_enthalpy_of_formation(run, samples: Path) -> None:
    done = run("table", samples / "H2O.out", samples / "atoms" / "H.out", "--format", "csv", "--temperatures", "300")
    lines = done.out.splitlines()
    assert done.code == 0
    assert len(lines) == 3
    assert lines[2].startswith("H,300.0,20.786")


def test_standard_pressure(run, samples: Path) -> None:
    bar, atm = (
        json.loads(run("table", samples / "N2.out", "--json", "--temperatures", "298.15", "--pressure", p).out)
        for p in ("1bar", "1atm")
    )
    difference = bar["species"][0]["table"]["S_J_mol_K"][0] - atm["species"][0]["table"]["S_J_mol_K"][0]
    assert difference == pytest.approx(0.109443, abs=1e-6)  # R ln 1.01325
    assert atm["species"][0]["standard_pressure_bar"] == 1.01325


def test_average_masses(run, samples: Path) -> None:
    isotopic, average = (
        json.loads(run("table", samples / "CO.out", "--json", "--temperatures", "298.15", "--masses", m).out)
        for m in ("isotopic", "average")
    )
    shift = average["species"][0]["table"]["S_J_mol_K"][0] - isotopic["species"][0]["table"]["S_J_mol_K"][0]
    # 3/2 R ln(28.010/27.9949) and, for the moment of inertia, R ln of the ratio of reduced masses.
    reduced = (12.011 * 15.999 / 28.010) / (12.0 * 15.9949146 / 27.9949146)
    assert shift == pytest.approx(8.31446 * (1.5 * np.log(28.010 / 27.9949146) + np.log(reduced)), abs=2e-4)


@pytest.mark.parametrize("text", ["300,-5", "0", "x", "300:200:10", "300:400", "nan", "100:200:0"])
def test_temperatures_that_make_no_sense(run, samples: Path, text: str) -> None:
    done = run("table", samples / "H2O.out", "--temperatures", text)
    assert done.code == 2
    assert "error: temperature" in done.err


def test_table_of_good_and_bad(run, samples: Path, tmp_path: Path) -> None:
    done = run("table", tmp_path / "none.out", samples / "H2O.out", "--temperatures", "300")
    assert done.code == 3
    assert done.out.startswith("H2O ")
    assert "[file-missing]" in done.err


def test_samples_are_written_and_never_over_other_files(run, tmp_path: Path) -> None:
    target = tmp_path / "burner"
    assert run("samples", target).code == 0
    assert (target / "README.md").is_file()
    assert (target / "atoms" / "O.out").stat().st_size > 10_000
    again = run("samples", target)
    assert again.code == 3
    assert "[target-exists]" in again.err
    assert run("samples", target, "--force").code == 0


def test_samples_are_small_enough_to_ship(samples: Path) -> None:
    assert sum(f.stat().st_size for f in samples.rglob("*") if f.is_file()) < 6_000_000


@pytest.mark.parametrize("name", [(), *((name,) for name in COMMANDS)])
def test_every_command_has_help_with_an_example(run, name: tuple[str, ...]) -> None:
    done = run(*name, "--help")
    assert done.code == 0
    assert "Example" in done.out
    assert "heatwright " in done.out


def test_every_command_stands_in_the_help_once() -> None:
    listed = [name for names in SECTIONS.values() for name in names]
    assert sorted(listed) == COMMANDS


def test_version_and_module(run) -> None:
    assert run("--version").out.strip() == f"heatwright, version {__version__}"
    done = subprocess.run([sys.executable, "-m", "heatwright", "--version"], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == f"heatwright, version {__version__}"


def test_unknown_command_and_no_argument(run) -> None:
    assert run("forge").code == 2
    assert run("entry").code == 2


def test_a_bug_is_code_70_and_an_interrupt_130(capfd, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(**_: object) -> None:
        raise RuntimeError("boom")

    monkeypatch.setitem(cli.commands, "survey", click.Command("survey", callback=broken))
    with pytest.raises(SystemExit) as stopped:
        cli_main.main(["survey"])
    assert stopped.value.code == 70
    assert "this is a bug in heatwright" in capfd.readouterr().err

    def interrupted(**_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setitem(cli.commands, "survey", click.Command("survey", callback=interrupted))
    with pytest.raises(SystemExit) as stopped:
        cli_main.main(["survey"])
    assert stopped.value.code == 130


def test_a_closed_pipe_is_silent(samples: Path) -> None:
    command = f'{sys.executable} -m heatwright table "{samples}/CH3OH.out" --temperatures 200:6000:1 -q | head -1'
    done = subprocess.run(command, shell=True, capture_output=True, text=True, check=False, env={**os.environ})
    assert done.stdout.startswith("CH3OH")
    assert done.stderr == ""
