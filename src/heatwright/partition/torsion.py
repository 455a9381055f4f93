"""Hindered internal rotation: the contribution of a torsion as a sum over its levels."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, log
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.errors import UsageError
from heatwright.partition.contribution import LnQ
from heatwright.partition.high_levels import joined_levels
from heatwright.partition.plane_waves import T_MAX_K, basis_size, torsional_levels

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray
    from heatwright.partition.potential import Potential

CONVERGED: Final = 1.0e-8
"""Largest change of ln q and its derivatives at T_MAX_K that a basis twice as large may make."""
MOST_WAVES: Final = 300
"""K from which on the rotor is so heavy (F below 1.5 1/cm) that its classical form is the better choice."""


@dataclass(frozen=True, eq=False)
class HinderedRotor:
    r"""One hindered rotor as a sum over its levels, counted from its own ground level.

    .. math:: q = \frac{1}{\sigma} \sum_i e^{-x_i}, \quad x_i = c_2 (E_i - E_0)/T

    name : of the contribution.   levels_cm1 : (m,) above the ground level, 1/cm, ascending.
    symmetry_number : σ, the number of equivalent orientations in one turn.
    ground_cm1 : E₀ − Vmin, the rotor's own zero-point energy, 1/cm.   K : of the highest plane waves ±K.
    potential, F_cm1 : what the levels are from.
    """

    name: str
    levels_cm1: FloatArray
    symmetry_number: int
    ground_cm1: float
    K: int
    potential: Potential
    F_cm1: float
    t_max_K: float = T_MAX_K

    def with_barrier_factor(self, factor: float) -> HinderedRotor:
        """The rotor with its potential multiplied by *factor*."""
        return hindered_rotor(self.potential.scaled(factor), self.F_cm1, self.symmetry_number, self.name, self.t_max_K)

    def ln_q(self, T: FloatArray) -> LnQ:
        """ln q, u = ⟨x⟩ and w = ⟨(x − ⟨x⟩)²⟩ − 2⟨x⟩; raises UsageError above twice the basis' temperature."""
        if T.size and float(T.max()) > 2.0 * self.t_max_K:
            raise UsageError(f"torsional levels are computed for temperatures up to {2.0 * self.t_max_K:g} K")
        return level_sum(self.levels_cm1, self.symmetry_number, T)


def level_sum(levels_cm1: FloatArray, symmetry_number: int, T: FloatArray) -> LnQ:
    """ln of Σ exp(−c₂E/T)/σ over single levels (1/cm, the lowest at 0) with its derivatives, at *T* in K."""
    x = SECOND_RADIATION_CM_K * levels_cm1 / T[..., None]
    weights = np.exp(-x)
    q = weights.sum(axis=-1)
    mean = (x * weights).sum(axis=-1) / q
    variance = ((x - mean[..., None]) ** 2 * weights).sum(axis=-1) / q
    return LnQ(np.log(q) - log(symmetry_number), mean, variance - 2.0 * mean)


def hindered_rotor(
    potential: Potential, F_cm1: float, symmetry_number: int = 1, name: str = "torsion", t_max_K: float = T_MAX_K
) -> HinderedRotor:
    """The rotor of a potential with the constant F (1/cm); the basis is enlarged until a larger one changes nothing.

    Raises ValueError unless F is positive and the symmetry number divides the fold of the potential.

    >>> from heatwright.partition.potential import cosine_potential
    >>> ethane = hindered_rotor(cosine_potential(3, 1024.0), 10.70, 3)
    >>> round(ethane.ground_cm1, 1)
    150.7
    """
    if not (np.isfinite(F_cm1) and F_cm1 > 0.0):
        raise ValueError(f"the rotational constant of a torsion must be positive, not {F_cm1}")
    if symmetry_number < 1 or potential.fold % symmetry_number:
        raise ValueError(f"a potential of fold {potential.fold} cannot have {symmetry_number} equivalent orientations")
    K = basis_size(potential, F_cm1, t_max_K)
    levels = joined_levels(potential, F_cm1, K)
    if levels is None:
        K, levels = _converged(potential, F_cm1, K, t_max_K)
    ground = float(levels[0])
    return HinderedRotor(
        name, levels - ground, symmetry_number, ground - potential.minimum[1], K, potential, F_cm1, t_max_K
    )


def _converged(potential: Potential, F_cm1: float, K: int, T_K: float) -> tuple[int, FloatArray]:
    """Levels from plane waves alone, the basis enlarged from *K* until a larger one changes nothing."""
    smaller, levels = (torsional_levels(potential, F_cm1, size) for size in (ceil(0.9 * K), K))
    while _difference(smaller, levels, T_K) > CONVERGED:
        K = 2 * K
        smaller, levels = levels, torsional_levels(potential, F_cm1, K)
    return K, levels


def _difference(smaller: FloatArray, levels: FloatArray, T_K: float) -> float:
    """Largest change of ln q, u and w at one temperature, and of the ground level in units of kT."""
    T = np.array([T_K])
    one, two = (level_sum(each - each[0], 1, T) for each in (smaller, levels))
    changes = [abs(float(getattr(one, part)[0] - getattr(two, part)[0])) for part in ("ln_q", "u", "w")]
    return max(*changes, SECOND_RADIATION_CM_K / T_K * abs(float(smaller[0] - levels[0])))
