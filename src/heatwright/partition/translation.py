"""Translation of an ideal gas at its standard pressure."""

from __future__ import annotations

from dataclasses import dataclass
from math import log, pi
from typing import TYPE_CHECKING, ClassVar

import numpy as np

from heatwright.constants import ATOMIC_MASS_KG, BAR_PA, BOLTZMANN_J_K, PLANCK_J_S
from heatwright.partition.contribution import LnQ

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray


@dataclass(frozen=True, slots=True)
class Translation:
    r"""Sackur-Tetrode translation.

    .. math:: \ln(q/N) = \tfrac32 \ln(2\pi m k T/h^2) + \ln(kT/p)

    mass_u : molecular mass, u.   pressure_Pa : standard pressure, Pa.
    Derivatives at constant pressure: u = 5/2, w = −5/2.
    Source: O. Sackur, Ann. Phys. 36, 958 (1911); H. Tetrode, Ann. Phys. 38, 434 (1912) (citations from memory).

    >>> argon = Translation(mass_u=39.95).ln_q(np.array([298.15]))
    >>> round(float(argon.s_R[0]) * 8.31446261815324, 3)
    154.846
    """

    name: ClassVar[str] = "translation"
    mass_u: float
    pressure_Pa: float = BAR_PA

    def ln_q(self, T: FloatArray) -> LnQ:
        """ln(q/N) at standard pressure and its derivatives at constant pressure."""
        m = self.mass_u * ATOMIC_MASS_KG
        constant = 1.5 * log(2.0 * pi * m * BOLTZMANN_J_K / PLANCK_J_S**2) + log(BOLTZMANN_J_K / self.pressure_Pa)
        return LnQ(constant + 2.5 * np.log(T), np.full(T.shape, 2.5), np.full(T.shape, -2.5))


def translational_states_per_volume(mass_u: float, T: float) -> float:
    """q_trans/V = (2π m k T/h²)^{3/2} in 1/m³ for a mass in u at T in K."""
    return float((2.0 * pi * mass_u * ATOMIC_MASS_KG * BOLTZMANN_J_K * T / PLANCK_J_S**2) ** 1.5)
