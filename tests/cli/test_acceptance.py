"""What the command line refuses, what it accepts by name, and that the entry says so."""

from __future__ import annotations

import subprocess
import sys

import pytest

from kept_outputs import kept

FORMATION = ["--dHf298", "-100 kJ/mol", "--source", "made up for this test"]


def run(*words: str) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "heatwright", *words]
    return subprocess.run(command, capture_output=True, text=True, check=False)


@pytest.mark.parametrize("option", [["--accept", "gradient"], ["--accept-gradient"]])
def test_a_steep_geometry(option: list[str]) -> None:
    file = str(kept("nwchem702_water_steep_freq.out"))
    refused = run("entry", file, "--name", "H2O", *FORMATION)
    assert refused.returncode == 3
    assert "say --accept gradient. [not-stationary]" in refused.stderr
    table = run("table", file)
    assert (table.returncode, "[not-stationary]" in table.stderr) == (0, True)
    accepted = run("entry", file, "--name", "H2O", *FORMATION, *option)
    assert accepted.returncode == 0, accepted.stderr
    assert "accepted it (--accept gradient)" in " ".join(accepted.stdout.replace("!", " ").split())


def test_a_solvent_and_a_small_imaginary_mode() -> None:
    solvent = str(kept("nwchem702_water_cosmo_freq.out"))
    assert run("table", solvent).returncode == 3
    accepted = run("entry", solvent, "--name", "H2O", *FORMATION, "--accept", "solvent")
    assert accepted.returncode == 0, accepted.stderr
    assert "(--accept solvent)" in " ".join(accepted.stdout.replace("!", " ").split())
    butyne = str(kept("nwchem702_butyne_staggered_freq.out"))
    assert run("table", butyne, "--accept-imaginary", "10").returncode == 3
    small = run("entry", butyne, "--name", "C4H6", *FORMATION, "--accept-imaginary", "15")
    assert small.returncode == 0, small.stderr
    assert "were taken as real wavenumbers of the same magnitude" in " ".join(small.stdout.replace("!", " ").split())
    assert run("table", butyne, "--accept-imaginary", "51").returncode == 2
    assert run("table", butyne, "--accept", "anything").returncode == 2
