"""A sum over explicit energy levels: rotation, vibration and electronic states together or apart."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.partition.condensing import condensed
from heatwright.partition.contribution import LnQ

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

HIGHEST_CM1: Final = 3.2e5
"""Levels above this are left out, 1/cm: at 10000 K their Boltzmann factor is below 10⁻²⁰."""

MANY: Final = 2000
"""From so many levels on, they are condensed, which changes no sum by more than rounding does."""

_CHUNK: Final = 1 << 17
"""Level-temperatures done at once; the block then stays inside a processor's cache."""


@dataclass(frozen=True, eq=False)
class LevelSum:
    r"""q = Σ g exp(−c₂ Ẽ/T) over levels counted from the lowest of them, which is where H(0) is.

    name : of the degrees of freedom that the levels hold.
    energies_cm1, weights : (n,) level energies (1/cm, any origin) and statistical weights (positive, need not be whole:
    nuclear-spin weights are normalised to the symmetry number).

    >>> lines = LevelSum("electronic", np.array([0.0, 158.265, 226.977]), np.array([5.0, 3.0, 1.0]))
    >>> round(float(np.exp(lines.ln_q(np.array([298.15])).ln_q[0])), 3)
    6.732
    """

    name: str
    energies_cm1: FloatArray
    weights: FloatArray

    def __post_init__(self) -> None:
        e, g = self.energies_cm1, self.weights
        if e.ndim != 1 or e.size == 0 or e.shape != g.shape:
            raise ValueError(f"expected as many weights as levels, found shapes {e.shape} and {g.shape}")
        if not (np.isfinite(e).all() and np.isfinite(g).all() and (g > 0.0).all()):
            raise ValueError("level energies must be finite and their weights positive")

    @cached_property
    def _terms(self) -> tuple[FloatArray, FloatArray]:
        """Energies from the lowest level (1/cm) and weights of what is summed."""
        if self.energies_cm1.size < MANY:
            return self.energies_cm1 - self.energies_cm1.min(), self.weights
        return condensed(self.energies_cm1, self.weights)

    def ln_q(self, T: FloatArray) -> LnQ:
        """ln q with mean and variance of x = c₂Ẽ/T as derivatives.

        The variance is ⟨x²⟩ − ⟨x⟩²: energies counted from the lowest level leave no more than a digit to cancellation.
        """
        energies, weights = self._terms
        theta = SECOND_RADIATION_CM_K * energies
        moments = np.stack([weights, weights * theta, weights * theta**2], axis=1)
        flat = T.reshape(-1)
        sums = np.empty((flat.size, 3))
        rows = max(1, _CHUNK // theta.size)
        for i in range(0, flat.size, rows):
            sums[i : i + rows] = np.exp(-theta / flat[i : i + rows, None]) @ moments
        q, first, second = sums.T.reshape(3, *T.shape)
        mean = first / q / T
        return LnQ(np.log(q), mean, second / q / T**2 - mean**2 - 2.0 * mean)
