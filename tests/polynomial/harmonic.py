"""Heat capacities to be fitted, written down here independently of the package.

Rigid rotation, harmonic modes and electronic levels; closed forms as in any textbook, for instance D. A. McQuarrie,
Statistical Mechanics (1976), chapter 6 (from memory).
"""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np

HC_K_CM_K = 1.438776877  # CODATA 2018
T0 = 298.15
DATA = Path(__file__).resolve().parents[1] / "data" / "polynomial"


@dataclass(frozen=True)
class Species:
    """Cp/R, H/R and S/R of rigid rotation, harmonic modes (1/cm) and electronic levels (1/cm, degeneracy)."""

    name: str
    classical: float  # Cp/R of translation and rotation
    modes: tuple[float, ...]
    levels: tuple[tuple[float, int], ...]
    h298: float = -10123.456789
    s298: float = 25.0123456789

    @property
    def has_levels(self) -> bool:
        return len(self.levels) > 1

    def cp_R(self, T):
        u = self._reduced(T)
        e = np.exp(-u)
        _, x, weight = self._electronic(T)
        mean = (weight * x).sum(axis=0)
        return self.classical + (u**2 * e / (1 - e) ** 2).sum(axis=0) + (weight * (x - mean) ** 2).sum(axis=0)

    def h_RT(self, T):
        return (self.h298 + T * self._h(T) - T0 * self._h(np.array([T0]))) / T

    def s_R(self, T):
        return self.s298 + self._s(T) - self._s(np.array([T0]))

    def _h(self, T):
        _, x, weight = self._electronic(T)
        u = self._reduced(T)
        return self.classical + (u / np.expm1(u)).sum(axis=0) + (weight * x).sum(axis=0)

    def _s(self, T):
        q, x, weight = self._electronic(T)
        u = self._reduced(T)
        vibration = (u / np.expm1(u) - np.log1p(-np.exp(-u))).sum(axis=0)
        return self.classical * np.log(T) + vibration + np.log(q) + (weight * x).sum(axis=0)

    def _reduced(self, T):
        return HC_K_CM_K * np.array(self.modes).reshape(-1, 1) / T

    def _electronic(self, T):
        energy, g = np.array(self.levels).T.reshape(2, -1, 1)
        x = HC_K_CM_K * energy / T
        terms = g * np.exp(-x)
        q = terms.sum(axis=0)
        return q, x, terms / q


def pairs(text):
    return [(float(value), int(g)) for value, g in (item.split("x") for item in text.split())]


@cache
def tabulated():
    """The 65 species of tests/data/polynomial/species.csv, whose head names the sources."""
    classical = {"atom": 2.5, "linear": 3.5, "nonlinear": 4.0}
    lines = [x for x in (DATA / "species.csv").read_text(encoding="utf-8").splitlines() if not x.startswith("#")]
    return tuple(
        Species(
            row["species"],
            classical[row["rotation"]],
            tuple(f for f, g in pairs(row["wavenumbers_cm1"]) for _ in range(g)),
            tuple(pairs(row["levels_cm1"])),
        )
        for row in csv.DictReader(lines)
    )


@cache
def synthetic():
    """Eight big molecules with 20 to 120 modes between 15 and 3600 1/cm, always the same ones."""
    rng = np.random.default_rng(20240611)
    return tuple(
        Species(f"big{i}", 4.0, tuple(np.exp(rng.uniform(np.log(15), np.log(3600), n))), ((0.0, 1),))
        for i, n in enumerate(rng.integers(20, 121, 8))
    )


def everything():
    return tabulated() + synthetic()
