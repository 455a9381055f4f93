"""The hindered rotor of Pitzer and Gwinn: classical in its potential, quantum-mechanical in its small vibrations.

    q = q_cl(hindered) × q_quantum(oscillator)/q_classical(oscillator)

Source: K. S. Pitzer, W. D. Gwinn, J. Chem. Phys. 10, 428 (1942).  It serves as a check on the sum over levels and in
its place for heavy tops; at 200 K and above the two differ by at most 0.3 J/mol/K in S.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import log, pi
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.partition.contribution import LnQ
from heatwright.partition.vibration import HarmonicVibration

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray
    from heatwright.partition.potential import Potential

_POINTS: Final = 720
"""Points in one turn; for a periodic function the mean over equal steps converges faster than any power."""


@dataclass(frozen=True)
class PitzerGwinnRotor:
    r"""A hindered rotor without its levels.

    .. math:: q_{cl} = \frac{1}{\sigma}\sqrt{\frac{\pi T}{c_2 F}}
              \left\langle e^{-c_2 (V(\varphi) - V_{min})/T} \right\rangle_\varphi, \qquad
              q = q_{cl}\, \frac{x}{1 - e^{-x}}, \quad x = c_2 \tilde\nu / T

    potential, F_cm1 : V(φ) and the rotational constant, 1/cm.   symmetry_number : σ.
    With a constant potential this is the classical free rotor.

    >>> from heatwright.partition.potential import Potential
    >>> ethane = PitzerGwinnRotor(Potential(512.0, (0.0, 0.0, -512.0), (0.0, 0.0, 0.0)), 10.70, 3)
    >>> round(float(ethane.ln_q(np.array([298.15])).s_R[0]) * 8.31446261815324, 1)
    6.9
    """

    potential: Potential
    F_cm1: float
    symmetry_number: int = 1
    name: str = "torsion"

    @property
    def ground_cm1(self) -> float:
        """Zero-point energy of the small vibrations, half their wavenumber, 1/cm."""
        return self.potential.harmonic_wavenumber_cm1(self.F_cm1) / 2.0

    def with_barrier_factor(self, factor: float) -> PitzerGwinnRotor:
        """The rotor with its potential multiplied by *factor*."""
        return replace(self, potential=self.potential.scaled(factor))

    def ln_q(self, T: FloatArray) -> LnQ:
        """ln q, u and w, counted from the ground level of the small vibrations."""
        classical = self._classical(T)
        wavenumber = self.potential.harmonic_wavenumber_cm1(self.F_cm1)
        if wavenumber <= 0.0:
            return classical
        oscillator = HarmonicVibration((wavenumber,)).ln_q(T)
        x = SECOND_RADIATION_CM_K * wavenumber / T
        return classical + oscillator + LnQ(np.log(x), -np.ones(T.shape), np.ones(T.shape))

    def _classical(self, T: FloatArray) -> LnQ:
        angles = np.linspace(0.0, 2.0 * pi, _POINTS, endpoint=False)
        y = SECOND_RADIATION_CM_K * (self.potential(angles) - self.potential.minimum[1]) / T[..., None]
        weights = np.exp(-y)
        total = weights.sum(axis=-1)
        mean = (y * weights).sum(axis=-1) / total
        variance = ((y - mean[..., None]) ** 2 * weights).sum(axis=-1) / total
        free = 0.5 * np.log(pi * T / (SECOND_RADIATION_CM_K * self.F_cm1)) - log(self.symmetry_number)
        return LnQ(free + np.log(total / _POINTS), 0.5 + mean, variance - 2.0 * mean - 0.5)
