"""Torsional levels from plane waves.

    H = −F d²/dφ² + V(φ),   V(φ) = a₀ + Σ aₘ cos mφ + bₘ sin mφ,   F = h/(8π²c I_red)

among exp(ikφ), k = −K … K, where H is banded: F k² on the diagonal, (aₘ ∓ i bₘ)/2 on the m-th side diagonal.  An n-fold
potential couples only k that are equal modulo n; a symmetric one does not couple cosines and sines.
Sources: E. B. Wilson, Chem. Rev. 27, 17 (1940); J. D. Lewis, T. B. Malloy, T. H. Chao, J. Laane, J. Mol. Struct. 12,
427 (1972) (both from memory).
"""

from __future__ import annotations

from math import ceil, sqrt
from typing import TYPE_CHECKING, Any, Final

import numpy as np
from numpy.typing import NDArray

from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.partition.potential import Potential

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray

T_MAX_K: Final = 6000.0
"""Temperature for which the levels are made; at twice that, what is missing of ln q is still below 10⁻⁵."""


def basis_size(potential: Potential, F_cm1: float, t_max_K: float = T_MAX_K) -> int:
    """K such that the highest plane waves lie 30 kT above the top of the potential: F K² = Vmax − Vmin + 30 kT/hc."""
    return ceil(sqrt((potential.barrier_cm1 + 30.0 * t_max_K / SECOND_RADIATION_CM_K) / F_cm1))


def torsional_levels(potential: Potential, F_cm1: float, K: int) -> FloatArray:
    """Levels (2K+1,) in 1/cm on the scale of the potential, ascending, from plane waves up to |k| = *K*.

    >>> from heatwright.partition.potential import cosine_potential
    >>> levels = torsional_levels(cosine_potential(3, 373.55), 27.63, 60)  # methanol; Lees and Baker (1968)
    >>> (levels[[1, 3, 5]] - levels[0]).round(1).tolist()
    [9.1, 209.2, 295.5]
    """
    n = potential.fold
    if n == 0:
        return np.asarray(potential.constant_cm1 + F_cm1 * np.sort(np.arange(-K, K + 1) ** 2))
    turned = _without_first_sine(potential)
    levels = []
    for r in range(n // 2 + 1):
        H = _block(turned, F_cm1, np.arange(r - n * ((K + r) // n), K + 1, n))
        if 2 * r % n:
            levels += 2 * [np.linalg.eigvalsh(H)]  # the classes r and −r have equal levels
        else:
            levels += [np.linalg.eigvalsh(part) for part in _real_parts(H)]
    return np.sort(np.concatenate(levels))


def _without_first_sine(potential: Potential) -> Potential:
    """The origin moved so that the lowest term is a pure cosine; in a symmetric potential all terms then are."""
    cosine, sine = (np.array(terms, dtype=float) for terms in (potential.cosine_cm1, potential.sine_cm1))
    if not sine.any():
        return potential
    first = int(np.flatnonzero((cosine != 0.0) | (sine != 0.0))[0])
    turned = potential.turned(-float(np.arctan2(sine[first], cosine[first])) / (first + 1))
    rounding = 1.0e-14 * float(np.abs([cosine, sine]).max()) * len(sine)
    kept = tuple(0.0 if abs(value) <= rounding else value for value in turned.sine_cm1)
    return Potential(turned.constant_cm1, turned.cosine_cm1, kept)


def _block(potential: Potential, F_cm1: float, k: IntArray) -> NDArray[Any]:
    """H among the plane waves *k*, which are equally spaced; complex when there are sine terms."""
    cosine, sine = (np.array(terms, dtype=float) for terms in (potential.cosine_cm1, potential.sine_cm1))
    waves: NDArray[Any] = cosine - 1j * sine if sine.any() else cosine
    spacing = int(k[1] - k[0]) if len(k) > 1 else 1
    H = np.zeros((len(k), len(k)), dtype=waves.dtype)
    np.fill_diagonal(H, F_cm1 * k**2 + potential.constant_cm1)
    for side in range(1, min(len(waves) // spacing, len(k) - 1) + 1):
        i = np.arange(len(k) - side)
        H[i + side, i] = waves[side * spacing - 1] / 2.0
        H[i, i + side] = H[i + side, i].conj()
    return H


def _real_parts(H: NDArray[Any]) -> tuple[FloatArray, ...]:
    """H among −k … k in cosine and sine functions: two real matrices, or one where sine terms couple them.

    Their lower triangles, which are all that ``eigvalsh`` looks at.
    """
    half = len(H) // 2
    if half == 0:
        return (H.real,)
    size = len(H) - half  # of the cosines, with the constant function in front where k = 0 is among the waves
    A, C = H[-half:, -half:], H[-half:, half - 1 :: -1]
    real = np.empty((len(H), len(H)))
    real[size - half : size, size - half : size] = (A + C).real
    real[size:, size:] = (A - C).real
    if size > half:
        real[:size, 0] = np.sqrt(2.0) * H[half:, half].real
        real[0, 0] = H[half, half].real
    if not np.iscomplexobj(H):
        return real[:size, :size], real[size:, size:]
    real[size:, size - half : size] = -(A + C).imag
    if size > half:
        real[size:, 0] = -np.sqrt(2.0) * H[-half:, half].imag
    return (real,)
