"""``--units kcal``: numbers to read change, everything written stays."""

from __future__ import annotations

import re
from pathlib import Path

import pytest


def numbers(line: str) -> list[float]:
    return [float(word) for word in line.split()]


def test_table_in_calories(run, samples: Path) -> None:
    options = ("table", samples / "CO2.out", "--temperatures", "298.15,1000")
    joules, calories = run(*options), run(*options, "--units", "kcal")
    assert "cal/mol/K" in calories.out
    assert "J/mol" not in calories.out
    rows = [[line for line in done.out.splitlines() if re.match(r" +1000\.00", line)] for done in (joules, calories)]
    assert len(rows[0]) == 2
    for joule, calorie in zip(*rows, strict=True):
        assert numbers(joule)[0] == numbers(calorie)[0] == 1000.0
        assert numbers(calorie)[1:] == pytest.approx([x / 4.184 for x in numbers(joule)[1:]], abs=6e-4)
    zpe = [float(re.search(r"zero-point energy (\S+) k", done.out)[1]) for done in (joules, calories)]
    assert zpe[1] == pytest.approx(zpe[0] / 4.184, abs=6e-4)


@pytest.mark.parametrize("form", ["csv", "json"])
def test_tables_for_machines_do_not_depend_on_units(run, samples: Path, form: str) -> None:
    options = ("table", samples / "CO2.out", "--temperatures", "298.15,1000", "--format", form)
    assert run(*options, "--units", "kcal").out == run(*options).out


@pytest.mark.parametrize("form", ["nasa7", "yaml", "json", "csv"])
def test_entries_do_not_depend_on_units(run, samples: Path, form: str) -> None:
    options = ("entry", samples / "H2O.out", "--atoms", samples / "atoms", "--format", form)
    joules, calories = run(*options), run(*options, "--units", "kcal")
    assert calories.out == joules.out
    assert calories.err != joules.err


def test_the_words_of_an_entry(run, samples: Path) -> None:
    options = ("entry", samples / "H2O.out", "--dHf298", "-57.8 kcal/mol", "--source", "memory", "-v")
    words = run(*options, "--units", "kcal").err
    assert "dHf(298.15 K) = -57.800" in words
    assert " kcal/mol, given: memory" in words
    assert " kJ/mol" not in words
    atoms = run("entry", samples / "H2O.out", "--atoms", samples / "atoms", "-v", "--units", "kcal").err
    ledger = [float(m) for m in re.findall(r"^ +(-?\d+\.\d+) kcal/mol  ", atoms, re.MULTILINE)]
    value = float(re.search(r"dHf\(298\.15 K\) = (\S+?),", atoms)[1])
    assert len(ledger) > 5
    assert sum(ledger) == pytest.approx(value, abs=0.01)
