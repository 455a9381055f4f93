"""Torsional levels well above the barrier, from the asymptotic series of a rotor that hardly feels its potential.

The solutions of −y″ + v y = κ² y, v = (V − a₀)/F, E = a₀ + F κ², advance by a phase 2πk in one turn, where

    k = κ − Σ_{m ≥ 1} (−1)ᵐ ⟨χ_{2m+1}⟩/(2κ)^{2m+1},   χ₁ = v,   χ_{n+1} = −χ_n′ − Σ_{j=1}^{n−1} χ_j χ_{n−j}

with averages ⟨…⟩ over the turn; the first two terms are κ − ⟨v²⟩/(8κ³).  The levels are those of whole k, in pairs
±k: their splitting is smaller than any power of 1/k.
Sources: W. Magnus, S. Winkler, Hill's Equation (1966); R. M. Miura, C. S. Gardner, M. D. Kruskal, J. Math. Phys. 9,
1204 (1968), whose conserved quantities the averages are (both from memory).
"""

from __future__ import annotations

from math import cbrt, ceil, sqrt
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.partition.plane_waves import torsional_levels

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray
    from heatwright.partition.potential import Potential

_ORDERS: Final = 16
_ABOVE: Final = 2.6
"""The series is first tried where F k² is this many times the top of the potential above its mean."""
_HARMONICS: Final = 1.5
"""… and where k is this many times the highest harmonic, which couples +k with −k up to k of half of it."""
_AGREEMENT: Final = 2.0e-9
_AGREEMENT_CM1: Final = 1.0e-5
"""Both ways to the levels must agree this closely in the overlap: 1e-5 1/cm is 2.4e-9 kT at 6000 K."""


def joined_levels(potential: Potential, F_cm1: float, K: int) -> FloatArray | None:
    """Levels (2K+1,) like :func:`torsional_levels`, from a small basis and the series where the two agree.

    They are compared for k in as many pairs of levels as the potential has residue classes, and two more.  None when
    that would take a basis as large as *K*.

    >>> from heatwright.partition.potential import cosine_potential
    >>> heavy = joined_levels(cosine_potential(3, 1000.0), 1.6, 280)
    >>> bool(np.allclose(heavy[:401], torsional_levels(cosine_potential(3, 1000.0), 1.6, 280)[:401], atol=1e-5))
    True
    """
    if potential.fold == 0:
        return torsional_levels(potential, F_cm1, K)
    lowest, mean = potential.minimum[1], potential.constant_cm1
    top, overlap = lowest + potential.barrier_cm1 - mean, potential.fold + 2
    start = ceil(max(sqrt(_ABOVE * top / F_cm1), _HARMONICS * len(potential.cosine_cm1))) + 3
    averages = None
    while (waves := _waves_for(start + overlap, mean - lowest, potential, F_cm1)) < K:
        last = start + overlap
        low = torsional_levels(potential, F_cm1, waves)[: 2 * last + 1]
        averages = _averages(potential, F_cm1) if averages is None else averages
        high = _high_levels(averages, np.arange(start + 1, K + 1)) * F_cm1 + mean
        apart = np.abs(low[2 * start + 1 :] - np.repeat(high[:overlap], 2)).max()
        if apart <= min(_AGREEMENT * (low[-1] - low[0]), _AGREEMENT_CM1):
            return np.concatenate([low, np.repeat(high[overlap:], 2)])
        start = ceil(1.3 * start) + 1
    return None


def _waves_for(k: int, depth_cm1: float, potential: Potential, F_cm1: float) -> int:
    """Plane waves for levels up to ±k: the largest momentum there is in a well this deep, and the tail beyond it."""
    largest = sqrt(k**2 + depth_cm1 / F_cm1)
    return ceil(largest + 3.0 * cbrt(largest) + 1.5 * len(potential.cosine_cm1))


def _averages(potential: Potential, F_cm1: float) -> FloatArray:
    """⟨χ₃⟩, ⟨χ₅⟩, … of v; products at equally spaced angles, derivatives term by term in the Fourier series.

    χ_n has no harmonics above (n + 1)/2 times those of v, so that nothing is lost or folded back.
    """
    n = potential.fold
    a, b = (np.array(terms[n - 1 :: n]) for terms in (potential.cosine_cm1, potential.sine_cm1))
    half = -(-len(a) * (_ORDERS + 1) // 16) * 16
    derivative = 1j * n * np.arange(half + 1)
    series = np.zeros(half + 1, dtype=complex)
    series[1 : len(a) + 1] = (a - 1j * b) / (2.0 * F_cm1)
    chi = np.zeros((2 * _ORDERS + 1, 2 * half))
    averages = np.zeros(_ORDERS)
    for m in range(1, 2 * _ORDERS + 1):
        chi[m] = np.fft.irfft(series, norm="forward")
        products = np.einsum("jx,jx->x", chi[1:m], chi[m - 1 : 0 : -1])
        series = -derivative * series - np.fft.rfft(products, norm="forward")
        series[len(a) * (m // 2 + 1) + 1 :] = 0.0
        if m % 2 == 0:
            averages[m // 2 - 1] = series[0].real
    return averages


def _high_levels(averages: FloatArray, k: IntArray) -> FloatArray:
    """κ² for whole k, by Newton's method for k(κ) = κ + Σ cₘ κ^(−2m−1)."""
    m = np.arange(1, averages.size + 1)
    c = -((-1.0) ** m) * averages / 2.0 ** (2 * m + 1)
    both = np.stack([c, -(2 * m + 1) * c], axis=1)
    kappa = k - c[0] / k.astype(float) ** 3
    for _ in range(6):
        y = kappa**-2
        sums = np.multiply.accumulate(np.broadcast_to(y, (m.size, k.size))).T @ both
        step = (kappa - k + sums[:, 0] / kappa) / (1.0 + sums[:, 1] * y)
        kappa = kappa - step
        if np.abs(step).max() <= 1.0e-15 * k[-1]:
            break
    return np.asarray(kappa**2)
