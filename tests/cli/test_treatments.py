"""Low modes, rotation and level sums from the command line: what the output says of them, and wrong usage."""

from __future__ import annotations

import json
from pathlib import Path

import pytest


def one(run, *arguments: object) -> dict:
    done = run("table", *arguments, "--json", "--temperatures", "298.15")
    assert done.code == 0, done.err
    (species,) = json.loads(done.out)["species"]
    return species


def test_the_defaults_are_said(run, samples: Path) -> None:
    species = one(run, samples / "CH3OH.out")
    assert (species["low_modes"], species["rotation"]) == ("harmonic", "classical")
    assert "low_modes_shifts" not in species


def test_low_modes(run, samples: Path) -> None:
    plain = one(run, samples / "CH3OH.out")
    raised = one(run, samples / "CH3OH.out", "--low-modes", "floor", "--cutoff", "400")
    assert raised["low_modes"] == "floor"
    assert raised["low_modes_cutoff_cm-1"] == 400.0
    shifts = raised["low_modes_shifts"]
    assert len(shifts) == len(raised["wavenumbers_cm-1"])
    ds = raised["table"]["S_J_mol_K"][0] - plain["table"]["S_J_mol_K"][0]
    assert sum(s["dS298_J_mol_K"] for s in shifts) == pytest.approx(ds, abs=1e-6)
    assert raised["zpe_kJ_mol"] == plain["zpe_kJ_mol"]
    between = one(run, samples / "CH3OH.out", "--low-modes", "interpolate", "--averaging-moment", "2e-44")
    assert between["averaging_moment_kg_m2"] == 2e-44
    assert between["low_modes_cutoff_cm-1"] == 100.0


def test_details_mode_by_mode(run, samples: Path) -> None:
    arguments = ("table", samples / "CH3OH.out", "--temperatures", "298.15", "--low-modes", "floor", "--cutoff", "400")
    assert "  mode 12 (" in run(*arguments, "-v").err
    said = run(*arguments)
    assert "  mode 12 (" not in said.err
    assert "[low-modes]" in said.err
    assert "raised to it (Ribeiro et al. 2011)" in said.out


def test_the_entry_says_it(run, samples: Path) -> None:
    done = run(
        "entry", samples / "CH3OH.out", "--dHf298", "-200.7 kJ/mol", "--source", "x", "--rotation", "corrected",
        "--low-modes", "interpolate", "-v",
    )  # fmt: skip
    assert done.code == 0
    comment = " ".join(line.removeprefix("!").strip() for line in done.out.splitlines() if line.startswith("!"))
    assert "rigid rotor with its first quantum correction, harmonic oscillators, ln q interpolated" in comment
    assert "against harmonic oscillators H(298.15 K) - H(0) moves by" in comment
    assert "(Stripp and Kirkwood 1951) lowers" in comment
    assert done.out.isascii()
    assert "mode 1 (" in done.err


def test_rotation(run, samples: Path) -> None:
    assert one(run, samples / "H2.out", "--rotation", "sum")["rotation"] == "sum"
    mixed = one(run, samples / "H2.out", "--rotation", "sum", "--isotope", "1=2H")
    assert mixed["symmetry_number"] == 1
    done = run("table", samples / "H2O.out", "--rotation", "sum")
    assert (done.code, done.out) == (3, "")
    assert "asymmetric top" in done.err


def test_a_level_sum(run, samples: Path) -> None:
    species = one(run, samples / "OH.out", "--electronic", "levels")
    assert species["rotation"] == "level sum"
    assert species["H298_minus_H0_kJ_mol"] == pytest.approx(8.812, abs=0.01)  # ATcT 1.112
    assert set(species["table"]["contributions"]) == {"translation", "rotation and electronic", "vibration"}
    assert one(run, samples / "H2O.out", "--electronic", "levels")["rotation"] == "classical"
    done = run("entry", samples / "OH.out", "--electronic", "levels", "--dHf298", "37.5 kJ/mol", "--source", "x")
    assert "Hill and Van Vleck 1928" in done.out.replace("\n!   ", " ")


@pytest.mark.parametrize(
    ("options", "words"),
    [
        (["--cutoff", "50"], "--low-modes"),
        (["--low-modes", "floor", "--averaging-moment", "1e-44"], "interpolate"),
        (["--low-modes", "floor", "--cutoff", "0"], "positive"),
        (["--low-modes", "interpolate", "--cutoff", "-100"], "positive"),
        (["--low-modes", "interpolate", "--averaging-moment", "nan"], "positive"),
        (["--low-modes", "none"], "harmonic"),
        (["--rotation", "quantum"], "classical"),
    ],
)
def test_wrong_usage(run, samples: Path, options: list[str], words: str) -> None:
    done = run("table", samples / "CH3OH.out", *options)
    assert done.code == 2
    assert words in done.err
    assert done.out == ""


def test_a_symmetry_tolerance_that_is_too_large_is_wrong_usage(run, samples) -> None:
    done = run("table", samples / "H2O.out", "--symmetry-tolerance", 3)
    assert done.code == 2
    assert "the symmetry tolerance is at most 0.35 Å, not 3" in done.err


def test_the_largest_symmetry_tolerance_is_that_of_the_search() -> None:
    from heatwright.partition.choices import LARGEST_SYMMETRY_TOLERANCE_A
    from heatwright.project.keys import keys_of
    from heatwright.structure.symmetry import LARGEST_TOLERANCE_A

    assert LARGEST_SYMMETRY_TOLERANCE_A == LARGEST_TOLERANCE_A
    assert keys_of("mechanism")["symmetry-tolerance"].kind.schema["maximum"] == LARGEST_TOLERANCE_A
