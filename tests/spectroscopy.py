"""Molecules known from spectroscopy as contributions of the engine, for checks against printed tables."""

from __future__ import annotations

import csv
from pathlib import Path

from heatwright.partition.contribution import Contribution
from heatwright.partition.electronic import ElectronicLevels
from heatwright.partition.rotation import ClassicalRotor
from heatwright.partition.translation import Translation
from heatwright.partition.vibration import HarmonicVibration

REFERENCE = Path(__file__).parent / "data" / "reference"


def rows(name: str) -> dict[str, dict[str, str]]:
    """The rows of a reference table by species."""
    with (REFERENCE / f"{name}.csv").open(encoding="utf-8") as stream:
        return {row["species"]: row for row in csv.DictReader(stream)}


def pairs(text: str) -> list[tuple[float, int]]:
    """``1340x2 920`` as (value, multiplicity) pairs."""
    split = [part.split("x") for part in text.split()]
    return [(float(value), int(count[0]) if count else 1) for value, *count in split]


def contributions(row: dict[str, str]) -> tuple[Contribution, ...]:
    """Translation with the average mass, rigid rotation, fundamentals as oscillators, levels as listed."""
    constants = [float(row[c]) for c in ("A0_cm1", "B0_cm1", "C0_cm1") if row[c]]
    modes = [value for value, count in pairs(row["fundamentals_cm1_x_degeneracy"]) for _ in range(count)]
    return (
        Translation(float(row["molar_mass_g_mol"])),
        ClassicalRotor(tuple(constants), int(row["symmetry_number"])),
        HarmonicVibration(tuple(modes)),
        ElectronicLevels(tuple(pairs(row["electronic_levels_cm1_x_degeneracy"]))),
    )
