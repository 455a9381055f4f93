"""ThermoTable: the standard functions on a temperature grid, with the share of each contribution."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray
    from heatwright.partition.contribution import LnQ
    from heatwright.partition.uncertainty import TableUncertainty


@dataclass(frozen=True, eq=False, slots=True)
class Share:
    """What one contribution adds, each (n,): Cp (J/mol/K), H − H(298.15 K) (kJ/mol) and S (J/mol/K)."""

    cp_J_mol_K: FloatArray
    h_minus_h298_kJ_mol: FloatArray
    s_J_mol_K: FloatArray


@dataclass(frozen=True, eq=False)
class ThermoTable:
    """Standard thermodynamic functions on a temperature grid, with the share of each contribution.

    T_K, cp_J_mol_K, h_minus_h298_kJ_mol, s_J_mol_K : (n,).   h298_minus_h0_kJ_mol : enthalpy increment from 0 K.
    parts : of each contribution, by its name, ln q and its derivatives at 298.15 K (one element) and on the grid.
    populations : of the model's conformers, one array (n,) each, mirror images together; empty without conformers.
    uncertainty : standard uncertainties of the columns, when inputs with uncertainties were stated.
    """

    T_K: FloatArray
    cp_J_mol_K: FloatArray
    h_minus_h298_kJ_mol: FloatArray
    s_J_mol_K: FloatArray
    h298_minus_h0_kJ_mol: float
    parts: Mapping[str, tuple[LnQ, LnQ]]
    populations: tuple[FloatArray, ...] = ()
    uncertainty: TableUncertainty | None = None

    @cached_property
    def shares(self) -> Mapping[str, Share]:
        """The share of each contribution by its name; they add up to the totals."""
        return {name: share_of(values, at_298, self.T_K) for name, (at_298, values) in self.parts.items()}

    @property
    def minus_g_minus_h298_over_T_J_mol_K(self) -> FloatArray:
        """−[G°(T) − H°(298.15 K)]/T = S° − [H° − H°(298.15 K)]/T, J/mol/K."""
        return self.s_J_mol_K - 1000.0 * self.h_minus_h298_kJ_mol / self.T_K


def checked_temperatures(T: ArrayLike) -> FloatArray:
    """The temperatures as an array of floats; raises UsageError unless all are finite and positive."""
    grid = np.asarray(T, dtype=float)
    if grid.size == 0 or not np.all(np.isfinite(grid) & (grid > 0.0)):
        raise UsageError(f"temperatures must be positive numbers in K, not {np.array2string(grid)}")
    return grid


def share_of(values: LnQ, at_298: LnQ, T: FloatArray) -> Share:
    """What one contribution adds at the temperatures *T*, K, from its values there and at 298.15 K (one element)."""
    h_R = values.h_RT * T - at_298.h_RT[0] * STANDARD_TEMPERATURE_K
    R = GAS_CONSTANT_J_MOL_K
    return Share(values.cp_R * R, h_R * R / 1000.0, values.s_R * R)
