"""Hindered internal rotation: torsional levels from a periodic potential, and the contribution they make.

    H = −F d²/dφ² + V(φ),   V(φ) = a₀ + Σ aₘ cos mφ + bₘ sin mφ,   F = h/(8π²c I_red)

in plane waves exp(ikφ), k = −K … K, where H is banded: F k² on the diagonal, (aₘ ∓ i bₘ)/2 on the m-th side diagonal.
An n-fold potential couples only k that are equal modulo n.
Sources: E. B. Wilson, Chem. Rev. 27, 17 (1940); J. D. Lewis, T. B. Malloy, T. H. Chao, J. Laane, J. Mol. Struct. 12,
427 (1972) (both from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, reduce
from math import ceil, gcd, log, sqrt
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.errors import UsageError
from heatwright.molecule import FloatArray, IntArray
from heatwright.partition.contribution import LnQ

T_MAX_K: Final = 6000.0
"""Temperature for which the basis is made; at twice that, what is missing of ln q is still below 10⁻⁵."""
CONVERGED: Final = 1.0e-8
"""Largest change of ln q and its derivatives at T_MAX_K that a basis twice as large may make."""
MOST_WAVES: Final = 300
"""Basis size K from which on the rotor is so heavy (F below 1.5 1/cm) that its classical form is the better choice."""
_GRID: Final = np.linspace(0.0, 2.0 * np.pi, 1440, endpoint=False)


@dataclass(frozen=True)
class Potential:
    """A periodic torsional potential V(φ) = a₀ + Σ aₘ cos mφ + bₘ sin mφ in 1/cm, φ in radians.

    constant_cm1 : a₀.   cosine_cm1, sine_cm1 : aₘ and bₘ for m = 1, 2, …, of equal length.

    >>> methanol = cosine_potential(3, 373.55)
    >>> round(methanol.barrier_cm1, 6), methanol.fold
    (373.55, 3)
    """

    constant_cm1: float
    cosine_cm1: tuple[float, ...] = ()
    sine_cm1: tuple[float, ...] = ()

    def __post_init__(self) -> None:
        if len(self.cosine_cm1) != len(self.sine_cm1):
            raise ValueError("a potential has as many sine terms as cosine terms")
        if not np.isfinite([self.constant_cm1, *self.cosine_cm1, *self.sine_cm1]).all():
            raise ValueError("the terms of a potential must be finite numbers")

    def derivatives(self, angles: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """V (1/cm), dV/dφ and d²V/dφ² at angles in radians, each of their shape."""
        m = np.arange(1, len(self.cosine_cm1) + 1)
        a, b = np.array(self.cosine_cm1), np.array(self.sine_cm1)
        phase = np.multiply.outer(angles, m)
        c, s = np.cos(phase), np.sin(phase)
        return self.constant_cm1 + c @ a + s @ b, c @ (m * b) - s @ (m * a), -(c @ (m**2 * a) + s @ (m**2 * b))

    def __call__(self, angles: FloatArray) -> FloatArray:
        """V in 1/cm at angles in radians."""
        return self.derivatives(angles)[0]

    @cached_property
    def _values(self) -> FloatArray:
        return self(_GRID)

    @cached_property
    def fold(self) -> int:
        """The largest n for which V(φ + 2π/n) = V(φ); 0 for a constant potential."""
        terms = [m for m, (a, b) in enumerate(zip(self.cosine_cm1, self.sine_cm1, strict=True), start=1) if a or b]
        return reduce(gcd, terms, 0)

    @cached_property
    def minima(self) -> tuple[tuple[float, float], ...]:
        """(angle in radians, V in 1/cm) of every local minimum in [0, 2π), ascending in the angle."""
        return self._stationary(self._values)

    @cached_property
    def minimum(self) -> tuple[float, float]:
        """(angle in radians, V in 1/cm) of the lowest point."""
        return min(self.minima, key=lambda point: point[1]) if self.fold else (0.0, self.constant_cm1)

    @cached_property
    def barrier_cm1(self) -> float:
        """Highest less lowest value, 1/cm."""
        return max(point[1] for point in self._stationary(-self._values)) - self.minimum[1] if self.fold else 0.0

    def _stationary(self, values: FloatArray) -> tuple[tuple[float, float], ...]:
        """The points where *values* (V or −V on the grid) has a local minimum, refined by Newton steps."""
        low = (values < np.roll(values, 1)) & (values <= np.roll(values, -1))
        x = _GRID[low]
        for _ in range(4):
            _, slope, curvature = self.derivatives(x)
            step = np.divide(slope, curvature, out=np.zeros_like(x), where=np.abs(curvature) > 1e-12)
            x = x - np.clip(step, -0.005, 0.005)
        return tuple(zip(x.tolist(), self(x).tolist(), strict=True))

    def scaled(self, factor: float) -> Potential:
        """The potential times a factor."""
        a, b = (tuple(factor * value for value in terms) for terms in (self.cosine_cm1, self.sine_cm1))
        return Potential(factor * self.constant_cm1, a, b)

    def turned(self, angle: float) -> Potential:
        """The potential as a function of φ − *angle* (radians): same levels, other origin."""
        m = np.arange(1, len(self.cosine_cm1) + 1)
        a, b = np.array(self.cosine_cm1), np.array(self.sine_cm1)
        c, s = np.cos(m * angle), np.sin(m * angle)
        return Potential(self.constant_cm1, tuple((a * c - b * s).tolist()), tuple((b * c + a * s).tolist()))

    def harmonic_wavenumber_cm1(self, F_cm1: float) -> float:
        """Wavenumber of small vibrations about the lowest minimum, sqrt(2 F V″) in 1/cm; 0 without a minimum."""
        curvature = float(self.derivatives(np.array(self.minimum[0]))[2])
        return sqrt(max(2.0 * F_cm1 * curvature, 0.0))


def cosine_potential(fold: int, barrier_cm1: float, minimum: float = 0.0) -> Potential:
    """V/2 (1 − cos n(φ − φ₀)): *fold* n, *barrier_cm1* V in 1/cm, φ₀ = *minimum* in radians."""
    zeros, half = (0.0,) * (fold - 1), -barrier_cm1 / 2.0
    return Potential(barrier_cm1 / 2.0, (*zeros, half), (*zeros, 0.0)).turned(minimum)


def basis_size(potential: Potential, F_cm1: float, t_max_K: float = T_MAX_K) -> int:
    """K such that the highest plane waves lie 30 kT above the top of the potential: F K² = Vmax − Vmin + 30 kT/hc."""
    return ceil(sqrt((potential.barrier_cm1 + 30.0 * t_max_K / SECOND_RADIATION_CM_K) / F_cm1))


def torsional_levels(potential: Potential, F_cm1: float, K: int) -> FloatArray:
    """Levels (2K+1,) in 1/cm on the scale of the potential, ascending, from plane waves up to |k| = *K*.

    >>> levels = torsional_levels(cosine_potential(3, 373.55), 27.63, 60)  # methanol; Lees and Baker (1968)
    >>> (levels[[1, 3, 5]] - levels[0]).round(1).tolist()
    [9.1, 209.2, 295.5]
    """
    n = potential.fold
    if n == 0:
        return np.asarray(potential.constant_cm1 + F_cm1 * np.sort(np.arange(-K, K + 1) ** 2))
    real = _without_first_sine(potential, n)
    levels = []
    for r in range(n // 2 + 1):
        H = _block(real, F_cm1, np.arange(r - n * ((K + r) // n), K + 1, n))
        if 2 * r % n:
            levels += 2 * [np.linalg.eigvalsh(H)]  # the classes r and −r have equal levels
        else:
            levels += [np.linalg.eigvalsh(part) for part in _parities(H)]
    return np.sort(np.concatenate(levels))


def _without_first_sine(potential: Potential, fold: int) -> Potential:
    """The origin moved so that the lowest term is a pure cosine; with one term, H becomes real."""
    a, b = potential.cosine_cm1, potential.sine_cm1
    if not any(b):
        return potential
    turned = potential.turned(-float(np.arctan2(b[fold - 1], a[fold - 1])) / fold)
    sine = tuple(0.0 if m == fold else value for m, value in enumerate(turned.sine_cm1, start=1))
    return Potential(turned.constant_cm1, turned.cosine_cm1, sine)


def _block(potential: Potential, F_cm1: float, k: IntArray) -> NDArray[Any]:
    """H among the plane waves *k*, which are equally spaced; complex when there are sine terms."""
    cosine, sine = np.array(potential.cosine_cm1), np.array(potential.sine_cm1)
    waves: NDArray[Any] = cosine - 1j * sine if sine.any() else cosine
    spacing = int(k[1] - k[0]) if len(k) > 1 else 1
    H = np.zeros((len(k), len(k)), dtype=waves.dtype)
    np.fill_diagonal(H, F_cm1 * k**2 + potential.constant_cm1)
    for side in range(1, min(len(waves) // spacing, len(k) - 1) + 1):
        i = np.arange(len(k) - side)
        H[i + side, i] = waves[side * spacing - 1] / 2.0
        H[i, i + side] = H[i + side, i].conj()
    return H


def _parities(H: NDArray[Any]) -> tuple[NDArray[Any], ...]:
    """H among −k … k split in its cosine and sine functions; H itself when it is complex, for then parity is none."""
    half = len(H) // 2
    if np.iscomplexobj(H) or half == 0:
        return (H,)
    A, C = H[-half:, -half:], H[-half:, half - 1 :: -1]
    if len(H) % 2 == 0:
        return A + C, A - C
    edge = np.sqrt(2.0) * H[half, -half:]
    return np.block([[H[half : half + 1, half : half + 1], edge[None, :]], [edge[:, None], A + C]]), A - C


@dataclass(frozen=True, eq=False)
class HinderedRotor:
    r"""One hindered rotor as a sum over its levels, counted from its own ground level.

    .. math:: q = \frac{1}{\sigma} \sum_i e^{-x_i}, \quad x_i = c_2 (E_i - E_0)/T

    name : of the contribution.   levels_cm1 : (m,) above the ground level, 1/cm, ascending.
    symmetry_number : σ, the number of equivalent orientations in one turn.
    ground_cm1 : E₀ − Vmin, the rotor's own zero-point energy, 1/cm.   K : basis size behind the levels.
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

    >>> ethane = hindered_rotor(cosine_potential(3, 1024.0), 10.70, 3)
    >>> round(ethane.ground_cm1, 1)
    150.7
    """
    if not (np.isfinite(F_cm1) and F_cm1 > 0.0):
        raise ValueError(f"the rotational constant of a torsion must be positive, not {F_cm1}")
    if symmetry_number < 1 or potential.fold % symmetry_number:
        raise ValueError(f"a potential of fold {potential.fold} cannot have {symmetry_number} equivalent orientations")
    K = basis_size(potential, F_cm1, t_max_K)
    smaller, levels = (torsional_levels(potential, F_cm1, size) for size in (ceil(0.9 * K), K))
    while _difference(smaller, levels, t_max_K) > CONVERGED:
        K = 2 * K
        smaller, levels = levels, torsional_levels(potential, F_cm1, K)
    ground = float(levels[0])
    return HinderedRotor(
        name, levels - ground, symmetry_number, ground - potential.minimum[1], K, potential, F_cm1, t_max_K
    )


def _difference(smaller: FloatArray, levels: FloatArray, T_K: float) -> float:
    """Largest change of ln q, u and w at one temperature, and of the ground level in units of kT."""
    T = np.array([T_K])
    one, two = (level_sum(each - each[0], 1, T) for each in (smaller, levels))
    changes = [abs(float(getattr(one, part)[0] - getattr(two, part)[0])) for part in ("ln_q", "u", "w")]
    return max(*changes, SECOND_RADIATION_CM_K / T_K * abs(float(smaller[0] - levels[0])))
