"""Rotation: the classical rigid rotor, with or without its first quantum correction."""

from __future__ import annotations

from dataclasses import dataclass
from math import log, pi
from typing import TYPE_CHECKING, ClassVar

import numpy as np

from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.partition.contribution import LnQ

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray


@dataclass(frozen=True, slots=True)
class ClassicalRotor:
    r"""Classical rigid rotor.

    .. math:: q = \frac{T}{\sigma c_2 B}\ \text{(linear)}, \qquad
              q = \frac{\sqrt{\pi}}{\sigma} \sqrt{\frac{T^3}{c_2^3 A B C}}\ \text{(non-linear)}

    rotational_constants_cm1 : one constant for a linear molecule, three otherwise, 1/cm; c₂ = hc/k.
    symmetry_number : order of the rotational subgroup of the rigid molecule.
    Source: G. Herzberg, Infrared and Raman Spectra (1945), section V.1 (from memory).

    >>> water = ClassicalRotor((27.8806, 14.5216, 9.2777), 2)
    >>> round(float(np.exp(water.ln_q(np.array([298.15])).ln_q[0])), 3)
    43.135
    """

    name: ClassVar[str] = "rotation"
    rotational_constants_cm1: tuple[float, ...]
    symmetry_number: int = 1

    def __post_init__(self) -> None:
        if len(self.rotational_constants_cm1) not in (1, 3):
            raise ValueError(
                f"a rigid rotor has one rotational constant (linear) or three, not {len(self.rotational_constants_cm1)}"
            )
        if min(self.rotational_constants_cm1) <= 0.0 or self.symmetry_number < 1:
            raise ValueError("rotational constants must be positive and the symmetry number at least 1")

    def ln_q(self, T: FloatArray) -> LnQ:
        """ln q, u and w: u = 1 and w = −1 for a linear rotor, 3/2 and −3/2 otherwise."""
        n = len(self.rotational_constants_cm1)
        half_degrees = 1.0 if n == 1 else 1.5
        constant = -log(self.symmetry_number) - half_degrees / n * sum(
            log(SECOND_RADIATION_CM_K * b) for b in self.rotational_constants_cm1
        )
        if n == 3:
            constant += 0.5 * log(pi)
        u = np.full(T.shape, half_degrees)
        return LnQ(constant + half_degrees * np.log(T), u, -u)


@dataclass(frozen=True, slots=True)
class CorrectedRotor:
    r"""The classical rotor with its first quantum correction as an exponent.

    .. math:: q = q_{classical}\, e^{\vartheta/T}, \qquad \vartheta = \frac{c_2}{12}
              \left(2A + 2B + 2C - \frac{BC}{A} - \frac{AC}{B} - \frac{AB}{C}\right), \quad
              \vartheta = \frac{c_2 B}{3}\ \text{(linear)}

    S and Cp stay those of the classical rotor; H(T) − H(0) is lower by Rϑ, which is what a real rotor has.
    Source: K. F. Stripp, J. G. Kirkwood, J. Chem. Phys. 19, 1131 (1951) (from memory).

    >>> water = CorrectedRotor(ClassicalRotor((27.8806, 14.5216, 9.2777), 2))
    >>> round(water.temperature_K * 8.31446261815324, 1)  # J/mol
    37.0
    """

    name: ClassVar[str] = "rotation"
    rotor: ClassicalRotor

    @property
    def temperature_K(self) -> float:
        """ϑ, K."""
        constants = self.rotor.rotational_constants_cm1
        if len(constants) == 1:
            return SECOND_RADIATION_CM_K * constants[0] / 3.0
        a, b, c = constants
        return SECOND_RADIATION_CM_K / 12.0 * (2.0 * (a + b + c) - b * c / a - a * c / b - a * b / c)

    def ln_q(self, T: FloatArray) -> LnQ:
        """The classical ln q, u and w plus ϑ/T, −ϑ/T and 2ϑ/T."""
        y = self.temperature_K / T
        return self.rotor.ln_q(T) + LnQ(y, -y, 2.0 * y)
