"""The fit and the printed text on every minimum that was computed with one program at one level (B3LYP/6-31G*)."""

from __future__ import annotations

import csv
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from entries import entry_of, text_of
from heatwright import FitOptions, Molecule, read_output
from heatwright.entry import Entry
from heatwright.findings import refusals
from heatwright.resources import sample_outputs
from outside import SHARED

R = 8.31446261815324
# What a two-range polynomial needs at most for each vibrational mode, in Cp/R (measured on some sixty species).
RANGES = {(200.0, 6000.0): 0.012, (298.15, 3000.0): 0.0025, (300.0, 5000.0): 0.009}


def minima() -> list[Path]:
    """The sample outputs, and the further computed minima when their folder is there."""
    files = sorted(Path(str(sample_outputs())).glob("*.out"))
    if SHARED is not None:
        with (SHARED / "computed" / "INDEX.csv").open() as stream:
            files += [SHARED / "computed" / row["file"] for row in csv.DictReader(stream) if row["check"] != "refuse"]
    return files


@cache
def molecule_of(file: Path) -> Molecule:
    molecule = read_output(file)
    assert not refusals(molecule.findings)
    return molecule


@cache
def entry_for(file: Path, t_low: float, t_high: float) -> Entry:
    return entry_of(molecule_of(file), "X", "-123.4 kJ/mol", FitOptions(t_low, 1000.0, t_high))


@pytest.mark.parametrize("ends", RANGES)
def test_distance_from_the_best_possible(ends: tuple[float, float]) -> None:
    ratios = []
    for file in minima():
        entry = entry_for(file, *ends)
        ratios.append(entry.quality.ratio)
        modes = max(molecule_of(file).wavenumbers_cm1.size, 1)
        assert entry.quality.dcp_R.largest <= modes * RANGES[ends], file
    assert max(ratios) <= 1.10
    assert np.quantile(ratios, 0.95) <= 1.05


def text_sets(text: str) -> tuple[list[float], list[float]]:
    """Low and high coefficients of the only record in a text, by its columns."""
    lines = [line for line in text.splitlines() if line[79:80] in set("234") and line[0] != "!"]
    values = [float(line[i : i + 15]) for line in lines for i in range(0, 75, 15) if line[i : i + 15].strip()]
    return values[7:14], values[:7]


def cp(a: list[float], T: float) -> float:
    return sum(c * T**k for k, c in enumerate(a[:5]))


def slope(a: list[float], T: float) -> float:
    return sum(k * c * T ** (k - 1) for k, c in enumerate(a[:5]) if k)


def h(a: list[float], T: float) -> float:
    return sum(c * T ** (k + 1) / (k + 1) for k, c in enumerate(a[:5])) + a[5]


def s(a: list[float], T: float) -> float:
    return a[0] * np.log(T) + sum(c * T**k / k for k, c in enumerate(a[:5]) if k) + a[6]


def last_digit(value: float) -> float:
    """One unit of the ninth significant digit."""
    return 10.0 ** (np.floor(np.log10(abs(value))) - 8)


@pytest.mark.parametrize("file", minima(), ids=lambda file: file.name)
def test_the_printed_text_read_back(file: Path) -> None:
    entry = entry_for(file, 200.0, 6000.0)
    low, high = text_sets(text_of("nasa7", entry))
    s298 = float(entry.model.s_R(298.15))
    assert abs(h(low, 298.15) - -123400.0 / R) <= 0.5 * last_digit(low[5]) + 1e-9
    assert abs(s(low, 298.15) - s298) <= 1e-7
    assert abs(cp(high, 1000.0) - cp(low, 1000.0)) <= 1e-6
    assert abs(h(high, 1000.0) - h(low, 1000.0)) <= 1e-4
    assert abs(s(high, 1000.0) - s(low, 1000.0)) <= 1e-7
    assert abs(slope(high, 1000.0) - slope(low, 1000.0)) <= 1e-8


@pytest.mark.parametrize("file", minima(), ids=lambda file: file.name)
def test_the_reported_residuals_are_those_of_the_text(file: Path) -> None:
    entry = entry_for(file, 200.0, 6000.0)
    low, high = text_sets(text_of("nasa7", entry))
    grid = np.linspace(200.0, 6000.0, 1161)
    table = entry.model.tabulate(grid)
    sets = [low if T <= 1000.0 else high for T in grid]
    fitted_cp = np.array([cp(a, T) for a, T in zip(sets, grid, strict=True)])
    fitted_h = np.array([h(a, T) / T for a, T in zip(sets, grid, strict=True)])
    fitted_s = np.array([s(a, T) for a, T in zip(sets, grid, strict=True)])
    true_h = (-123.4 + table.h_minus_h298_kJ_mol) * 1000.0 / (R * grid)
    for fitted, true, reported in (
        (fitted_cp, table.cp_J_mol_K / R, entry.quality.dcp_R.largest),
        (fitted_h, true_h, entry.quality.dh_RT.largest),
        (fitted_s, table.s_J_mol_K / R, entry.quality.ds_R.largest),
    ):
        found = np.abs(fitted - true).max()
        assert found <= reported * 1.02 + 1e-7
        assert found >= reported * 0.90 - 1e-7
