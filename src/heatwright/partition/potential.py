"""A periodic torsional potential: its values, derivatives, minima and barrier."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, reduce
from math import gcd, sqrt
from typing import TYPE_CHECKING, Final

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

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

    @cached_property
    def _waves(self) -> NDArray[np.complex128]:
        """Of aₘ − i bₘ, m(bₘ + i aₘ) and −m²(aₘ − i bₘ), whose sums times exp(imφ) have V, V′ and V″ as real parts."""
        m = np.arange(1, len(self.cosine_cm1) + 1)
        waves = np.array(self.cosine_cm1, dtype=float) - 1j * np.array(self.sine_cm1, dtype=float)
        return np.stack([waves, 1j * m * waves, -(m**2) * waves], axis=1)

    def derivatives(self, angles: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """V (1/cm), dV/dφ and d²V/dφ² at angles in radians, each of their shape."""
        m = np.arange(1, len(self.cosine_cm1) + 1)
        value, slope, curvature = np.moveaxis((np.exp(1j * np.multiply.outer(angles, m)) @ self._waves).real, -1, 0)
        return self.constant_cm1 + value, slope, curvature

    def __call__(self, angles: FloatArray) -> FloatArray:
        """V in 1/cm at angles in radians."""
        return self.derivatives(angles)[0]

    @cached_property
    def _values(self) -> FloatArray:
        """V at the angles of the grid, by the fast Fourier transform where it holds all terms."""
        if 2 * len(self.cosine_cm1) >= _GRID.size:
            return self(_GRID)
        terms = np.concatenate([[self.constant_cm1], self._waves[:, 0] / 2.0])
        return np.fft.irfft(terms, _GRID.size, norm="forward")

    @cached_property
    def fold(self) -> int:
        """The largest n for which V(φ + 2π/n) = V(φ); 0 for a constant potential."""
        terms = [m for m, (a, b) in enumerate(zip(self.cosine_cm1, self.sine_cm1, strict=True), start=1) if a or b]
        return reduce(gcd, terms, 0)

    @cached_property
    def minima(self) -> tuple[tuple[float, float], ...]:
        """(angle in radians, V in 1/cm) of every local minimum in [0, 2π), ascending in the angle."""
        return tuple((x, value) for x, value, is_minimum in self._stationary if is_minimum)

    @cached_property
    def minimum(self) -> tuple[float, float]:
        """(angle in radians, V in 1/cm) of the lowest point."""
        return min(self.minima, key=lambda point: point[1]) if self.fold else (0.0, self.constant_cm1)

    @cached_property
    def barrier_cm1(self) -> float:
        """Highest less lowest value, 1/cm."""
        return max(value for _, value, _ in self._stationary) - self.minimum[1] if self.fold else 0.0

    @cached_property
    def _stationary(self) -> tuple[tuple[float, float, bool], ...]:
        """(angle, V, whether it is a minimum) of minima and maxima, from a grid and by Newton steps."""
        rises = np.diff(self._values, append=self._values[:1]) > 0.0
        turns = np.flatnonzero(rises != np.roll(rises, 1))
        x = _GRID[turns]
        for _ in range(4):
            _, slope, curvature = self.derivatives(x)
            step = np.divide(slope, curvature, out=np.zeros_like(x), where=np.abs(curvature) > 1e-12)
            x = x - np.clip(step, -0.005, 0.005)
        return tuple(zip(x.tolist(), self(x).tolist(), rises[turns].tolist(), strict=True))

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
