"""Rotation: the classical rigid rotor."""

from __future__ import annotations

from dataclasses import dataclass
from math import log, pi
from typing import ClassVar

import numpy as np

from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.molecule import FloatArray
from heatwright.partition.contribution import LnQ


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
