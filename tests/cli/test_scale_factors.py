"""``--scale published``: what it does to table and entry, and where it says so."""

from __future__ import annotations

import json
from pathlib import Path

import pytest


def test_table_with_published_factors(run, samples: Path) -> None:
    done = run("table", samples / "CO2.out", "--scale", "published", "--json", "--temperatures", "298.15")
    (species,) = json.loads(done.out)["species"]
    assert done.code == 0
    assert (species["frequency_scale"], species["zpe_scale"]) == (0.9614, 0.9806)  # Scott and Radom 1996
    assert species["scale_source"].startswith("Scott & Radom 1996 (J. Phys. Chem. 100, 16502)")
    assert "[published-scale]" in done.err
    assert "would change by -0.17 with the zero-point factor" in done.err


def test_published_and_stated_factors_give_the_same_record(run, samples: Path) -> None:
    def coefficients(*options: str) -> str:
        done = run("entry", samples / "H2O.out", "--atoms", samples / "atoms", *options)
        assert done.code == 0
        return "\n".join(line for line in done.out.splitlines() if line and line[-1] in "1234" and len(line) == 80)

    published = coefficients("--scale", "published")
    assert published == coefficients("--frequency-scale", "0.9614", "--zpe-scale", "0.9806")
    assert published != coefficients()


def test_the_entry_names_the_source(run, samples: Path) -> None:
    given = ("--dHf298", "-393.5 kJ/mol", "--source", "memory")
    comment = " ".join(run("entry", samples / "CO2.out", *given, "--scale", "published").out.replace("!", "").split())
    assert "scale factors 0.9614 (thermal functions) and 0.9806 (zero-point energy), Scott & Radom 1996" in comment
    assert "would change by" in comment
    unscaled = " ".join(run("entry", samples / "CO2.out", *given).out.replace("!", "").split())
    assert "(zero-point energy): unscaled" in unscaled


@pytest.mark.parametrize("option", ["--frequency-scale", "--zpe-scale"])
def test_published_and_stated_factors_contradict(run, samples: Path, option: str) -> None:
    for command in ("table", "entry"):
        done = run(command, samples / "CO2.out", "--scale", "published", option, "0.96")
        assert done.code == 2
        assert "--scale published chooses both factors" in done.err


def test_a_level_without_published_factors(run, samples: Path, tmp_path: Path) -> None:
    other = tmp_path / "CO2.out"
    text = (samples / "CO2.out").read_text(encoding="utf-8")
    other.write_text(text.replace("6-31G*", "4-31G").replace("6-31g*", "4-31G"), encoding="utf-8")
    done = run("table", other, "--scale", "published")
    assert done.code == 3
    assert "[no-published-scale]" in done.err
    assert "B3LYP/" in done.err.split("nearest levels", 1)[1]


def test_atoms_are_not_scaled(run, samples: Path) -> None:
    done = run("table", samples / "atoms" / "O.out", "--scale", "published", "--json")
    assert done.code == 0
    assert json.loads(done.out)["species"][0]["scale_source"] is None
