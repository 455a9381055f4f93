"""Vibration: harmonic oscillators counted from their own ground level; the zero-point energy is kept apart."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from heatwright.constants import CM1_KJ_MOL, SECOND_RADIATION_CM_K
from heatwright.molecule import FloatArray
from heatwright.partition.contribution import LnQ


@dataclass(frozen=True, slots=True)
class HarmonicVibration:
    r"""Independent harmonic oscillators.

    .. math:: \ln q = -\sum_i \ln(1 - e^{-x_i}), \quad x_i = c_2 \tilde\nu_i / T

    wavenumbers_cm1 : (m,) already scaled, 1/cm, all positive.
    With n = 1/(eˣ − 1) one mode has U/RT = x n, Cv/R = U/RT (U/RT + x) and ln q = ln(1 + n): a form without
    cancellation from x = 10⁻⁷ to the underflow of e⁻ˣ.

    >>> co = HarmonicVibration((2143.237,)).ln_q(np.array([3000.0]))
    >>> round(float(co.s_R[0]) * 8.31446261815324, 4)
    8.4424
    """

    name: ClassVar[str] = "vibration"
    wavenumbers_cm1: tuple[float, ...]

    def __post_init__(self) -> None:
        for i, wavenumber in enumerate(self.wavenumbers_cm1, start=1):
            if not wavenumber > 0.0:
                raise ValueError(f"mode {i} has the wavenumber {wavenumber} 1/cm; a vibration needs a positive one")

    def ln_q(self, T: FloatArray) -> LnQ:
        """Sums over the modes of ln q, u and w."""
        x = SECOND_RADIATION_CM_K * np.asarray(self.wavenumbers_cm1, dtype=float) / T[..., None]
        n = np.exp(-x) / -np.expm1(-x)
        energy = x * n
        heat_capacity = energy * (energy + x)
        u = energy.sum(axis=-1)
        return LnQ(np.log1p(n).sum(axis=-1), u, heat_capacity.sum(axis=-1) - 2.0 * u)


def mode_sensitivities(wavenumbers_cm1: Sequence[float] | FloatArray, T: FloatArray) -> LnQ:
    """Derivatives of each harmonic oscillator's ln q, u and w by the logarithm of its wavenumber.

    wavenumbers_cm1 : (m,), 1/cm.   Each array has the shape of *T* with a last axis (m,) more.
    All three depend on x = c₂ν/T alone; with U = x n and C = U (U + x):  d ln q = −U,  dU = U − C,
    dC = (U − C)(U + x) + U (U − C + x), each by d ln x.

    >>> entropy = mode_sensitivities([300.0], np.array([298.15]))
    >>> bool(np.isclose(entropy.s_R, -HarmonicVibration((300.0,)).ln_q(np.array([298.15])).cp_R))  # dS = −Cv
    True
    """
    x = SECOND_RADIATION_CM_K * np.asarray(wavenumbers_cm1, dtype=float) / T[..., None]
    u = x * (np.exp(-x) / -np.expm1(-x))
    c = u * (u + x)
    du = u - c
    dc = du * (u + x) + u * (du + x)
    return LnQ(-u, du, dc - 2.0 * du)


def zero_point_energy_kJ_mol(wavenumbers_cm1: Sequence[float] | FloatArray) -> float:
    """Harmonic zero-point energy, half the sum of the wavenumbers (1/cm), in kJ/mol.

    >>> round(zero_point_energy_kJ_mol([2143.237]), 3)
    12.819
    """
    return float(0.5 * np.sum(np.asarray(wavenumbers_cm1, dtype=float)) * CM1_KJ_MOL)
