"""What the checks of one entry share: its values at 298.15 K, its molar mass, and whether it is a gas."""

from __future__ import annotations

import re
from dataclasses import dataclass
from math import log
from typing import Final

import numpy as np

from heatwright.constants import (
    ATOMIC_MASS_KG,
    BAR_PA,
    BOLTZMANN_J_K,
    GAS_CONSTANT_J_MOL_K,
    PLANCK_J_S,
    STANDARD_TEMPERATURE_K,
)
from heatwright.findings import Finding, Severity, note, refuse, warn
from heatwright.molecule import FloatArray
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.polynomial.plausibility import classical_limit_R, cp_on_grid_R
from heatwright.reading.compositions import molar_mass_u
from heatwright.reading.entry_file import ThermoEntry

KJ_PER_K: Final = GAS_CONSTANT_J_MOL_K / 1000.0
_CONDENSED = re.compile(r"\((?:\d|[a-rt-z]|[a-z][\w,]+|L\w*|[IV]+)\)(?:,.*)?$")
_STATE_OR_SOLID = re.compile(r"\([sS]\)$")
_LARGEST_STATE: Final = 6
"""A name with (S) may be the singlet state of a gas with this many atoms at most."""
_DECLARED = re.compile(r"dHf\(298\.15 K\) = (-?\d+\.?\d*)")
_ORGANIC: Final = frozenset({"C", "H", "D", "N", "O", "E"})
_MAKE = {"refuse": refuse, "warn": warn, "note": note}


@dataclass(frozen=True, slots=True)
class Facts:
    """An entry with a polynomial and what follows from both.

    h298_kJ_mol, s298_R, cp298_R : of the polynomial, also where it starts a little above 298.15 K.
    T_K, cp_R : a grid over the range; at the common temperature both sides.
    gas : whether the checks of a gas apply.
    declared_kJ_mol : H°(298.15) that the comment above the entry states, as heatwright writes it; else None.
    """

    entry: ThermoEntry
    polynomial: Nasa7
    atoms: float
    molar_mass_u: float
    h298_kJ_mol: float
    s298_R: float
    cp298_R: float
    T_K: FloatArray
    cp_R: FloatArray
    gas: bool
    declared_kJ_mol: float | None = None

    @property
    def limit_R(self) -> float:
        """The classical limit of Cp/R for the number of atoms."""
        return classical_limit_R(self.atoms)

    @property
    def entropy_bounds_R(self) -> tuple[float, float]:
        """Least and greatest S/R at 298.15 K and 1 bar that its atoms allow."""
        return entropy_bounds_R(self.entry, self.molar_mass_u)

    def say(self, severity: Severity, code: str, found: str, *, expected: str = "", action: str = "") -> Finding:
        """A finding about this entry, at its first line; *found* goes on after the species' name."""
        where = f"line {self.entry.lines[0]}"
        return _MAKE[severity](code, f"{self.entry.name}: {found}", where=where, expected=expected, action=action)


def facts_of(entry: ThermoEntry, comment: str = "") -> Facts | None:
    """The facts of an entry, or None when it has no polynomial or no thermo data in it.

    comment : the comment lines above the entry.
    """
    p = entry.polynomial
    if p is None or not (any(p.low) or any(p.high)):
        return None
    T0 = STANDARD_TEMPERATURE_K
    s298 = float(p.s_R(T0, extrapolate=True))
    mass = molar_mass_u(entry.composition)
    T, cp = cp_on_grid_R(p, 120)
    return Facts(
        entry=entry,
        polynomial=p,
        atoms=entry.atoms,
        molar_mass_u=mass,
        h298_kJ_mol=float(p.h_R(T0, extrapolate=True)) * KJ_PER_K,
        s298_R=s298,
        cp298_R=float(p.cp_R(T0, extrapolate=True)),
        T_K=T,
        cp_R=cp,
        gas=_is_gas(entry, s298, mass),
        declared_kJ_mol=None if (declared := _DECLARED.search(comment)) is None else float(declared[1]),
    )


def sackur_tetrode_R(molar_mass_u: float, T_K: float = STANDARD_TEMPERATURE_K, pressure_Pa: float = BAR_PA) -> float:
    """S/R of the translation of an ideal gas; zero for no mass.

    >>> round(sackur_tetrode_R(39.948) * 8.314462618, 3)
    154.846
    """
    if molar_mass_u <= 0.0:
        return 0.0
    m, kT = molar_mass_u * ATOMIC_MASS_KG, BOLTZMANN_J_K * T_K
    return 2.5 + 1.5 * log(2.0 * np.pi * m * kT / PLANCK_J_S**2) + log(kT / pressure_Pa)


def entropy_bounds_R(entry: ThermoEntry, molar_mass_u: float) -> tuple[float, float]:
    """Least and greatest S/R of a gas at 298.15 K and 1 bar for its mass and the number and kind of its atoms.

    Above translation; the margins are those of the gases in NASA TM-4513 (99 % of them are inside).
    """
    n, own = entry.atoms, sackur_tetrode_R(molar_mass_u)
    if n < 2:
        return own - 0.05, own + 4.0
    least = 1.4 if n < 3 else max(4.5, 0.6 * n)
    organic = set(entry.composition) <= _ORGANIC
    return own + least, own + (7.5 + 2.3 * n if organic else 7.5 * n)


def _is_gas(entry: ThermoEntry, s298_R: float, mass: float) -> bool:
    if entry.atoms < 1 or entry.phase in ("L", "S", "C"):
        return False
    if entry.phase == "G":
        return True
    if _STATE_OR_SOLID.search(entry.name):
        # singlet methylene is called CH2(S), and so is what sits on a surface; only the gas has a gas's entropy
        return entry.atoms <= _LARGEST_STATE and s298_R > entropy_bounds_R(entry, mass)[0]
    return _CONDENSED.search(entry.name) is None
