"""Vibration: harmonic oscillators counted from their own ground level; the zero-point energy is kept apart."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Final

import numpy as np

from heatwright.constants import CM1_KJ_MOL, SECOND_RADIATION_CM_K
from heatwright.partition.contribution import LnQ

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

_CHUNK: Final = 1 << 15
"""Mode-temperatures done at once: the three arrays of a block, 800 kB, then stay inside a processor's cache."""

_FACTORS: Final = 32
"""Modes whose q are multiplied before the logarithm is taken: no overflow as long as x is above 10⁻⁹."""


@dataclass(frozen=True, slots=True)
class HarmonicVibration:
    r"""Independent harmonic oscillators.

    .. math:: \ln q = -\sum_i \ln(1 - e^{-x_i}), \quad x_i = c_2 \tilde\nu_i / T

    wavenumbers_cm1 : (m,) already scaled, 1/cm, all positive.
    With n = 1/(eˣ − 1) one mode has U/RT = x n, Cv/R = U/RT (U/RT + x) and ln q = ln(1 + n): a form without
    cancellation from x = 10⁻⁷ to the overflow of eˣ, where n is 0 (ln q of a frozen mode is good to 10⁻¹⁶, absolutely).

    >>> co = HarmonicVibration((2143.237,)).ln_q(np.array([3000.0]))
    >>> round(float(co.s_R[0]) * 8.31446261815324, 4)
    8.4424
    """

    name: ClassVar[str] = "vibration"
    wavenumbers_cm1: tuple[float, ...]

    def __post_init__(self) -> None:
        check_wavenumbers(self.wavenumbers_cm1)

    def ln_q(self, T: FloatArray) -> LnQ:
        """Sums over the modes of ln q, u and w."""
        return harmonic_sums(np.asarray(self.wavenumbers_cm1, dtype=float), T)


def check_wavenumbers(wavenumbers_cm1: Sequence[float]) -> None:
    """Raises ValueError, naming the mode, unless every wavenumber is positive."""
    for i, wavenumber in enumerate(wavenumbers_cm1, start=1):
        if not wavenumber > 0.0:
            raise ValueError(f"mode {i} has the wavenumber {wavenumber} 1/cm; a vibration needs a positive one")


def harmonic_sums(wavenumbers_cm1: FloatArray, T: FloatArray, weights: FloatArray | None = None) -> LnQ:
    """Sums of ln q, u and w over harmonic oscillators, each times its weight (1 unless given).

    wavenumbers_cm1, weights : (m,).   T : any shape, K.
    """
    theta = SECOND_RADIATION_CM_K * wavenumbers_cm1[:, None]
    inverse_T = (1.0 / T).reshape(1, -1)
    columns = max(1, _CHUNK // max(1, theta.size))
    with np.errstate(over="ignore"):  # a frozen mode: 1/inf is the 0 that is meant
        if T.size <= columns:
            sums = _sums(np.dot(theta, inverse_T), None, None, weights)
            return LnQ(*sums) if T.ndim == 1 else LnQ(*(values.reshape(T.shape) for values in sums))
        return LnQ(*_in_chunks(theta, inverse_T, columns, weights).reshape(3, *T.shape))


def _in_chunks(theta: FloatArray, inverse_T: FloatArray, columns: int, weights: FloatArray | None) -> FloatArray:
    sums, room = np.empty((3, inverse_T.size)), np.empty((3, theta.size * columns))
    for i in range(0, inverse_T.size, columns):
        part = inverse_T[:, i : i + columns]
        x, n, energy = room[:, : theta.size * part.size].reshape(3, theta.size, part.size)
        sums[:, i : i + columns] = _sums(np.dot(theta, part, out=x), n, energy, weights)
    return sums


def harmonic_sums_of_many(species: Sequence[FloatArray], T: FloatArray) -> tuple[LnQ, ...]:
    """The sums of :func:`harmonic_sums` for many species on one temperature grid, as many at once as a cache holds.

    species : the wavenumbers (m,) of each, 1/cm, all positive; none for an atom.   T : (n,), K.

    >>> T = np.array([298.15, 1000.0])
    >>> water, atom = harmonic_sums_of_many([np.array([1595.0, 3657.0, 3756.0]), np.array([])], T)
    >>> bool(np.allclose(water.s_R, HarmonicVibration((1595.0, 3657.0, 3756.0)).ln_q(T).s_R)), float(atom.s_R[1])
    (True, 0.0)
    """
    sizes = [len(wavenumbers) for wavenumbers in species]
    order = sorted(range(len(species)), key=sizes.__getitem__)
    sums = np.empty((3, len(species), T.size))
    done = sizes.count(0)
    sums[:, :done] = 0.0
    while done < len(species):
        alike = sizes.count(sizes[order[done]])
        theta = SECOND_RADIATION_CM_K * np.concatenate([species[index] for index in order[done : done + alike]])
        _sums_of_alike(theta.reshape(alike, -1), T, sums[:, done : done + alike])
        done += alike
    rows = dict(zip(order, map(LnQ, *sums), strict=True))
    return tuple(rows[index] for index in range(len(species)))


def _sums_of_alike(theta: FloatArray, T: FloatArray, sums: FloatArray) -> None:
    """Sums for species of equally many modes, theta (species, m) in K, into *sums* (3, species, n)."""
    n_species, m = theta.shape
    inverse_T, rows = 1.0 / T[None, :], min(_CHUNK // max(1, T.size * m), n_species)
    with np.errstate(over="ignore"):
        if rows == 0:  # one species alone is more than a cache holds
            for i, one in enumerate(theta):
                sums[:, i] = _in_chunks(one[:, None], inverse_T, max(1, _CHUNK // m), None)
            return
        room = np.empty((3, m * rows * T.size))
        for i in range(0, n_species, rows):
            part = theta[i : i + rows]
            x, n, energy = room[:, : part.size * T.size].reshape(3, m, len(part) * T.size)
            np.dot(part.T.reshape(-1, 1), inverse_T, out=x.reshape(part.size, T.size))
            _sums(x, n, energy, None, tuple(sums[:, i : i + rows].reshape(3, x.shape[1])))


def _sums(
    x: FloatArray,
    n: FloatArray | None,
    energy: FloatArray | None,
    weights: FloatArray | None,
    into: tuple[FloatArray | None, ...] = (None, None, None),
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Sums over the modes of ln q, u and w, in as few passes as will do.

    x : c₂ν/T, (m, n), a matrix product of one term each, which rounds like a product and is faster than broadcasting;
    it is overwritten.   n, energy : like x, to work in, and into : for the results; new arrays where None.
    """
    n = np.expm1(x, out=n)
    np.reciprocal(n, out=n)
    energy = np.multiply(x, n, out=energy)
    x += energy
    x *= energy
    n += 1.0
    if weights is not None:
        u = weights @ energy
        return weights @ np.log(n), u, weights @ x - 2.0 * u
    ln_q = np.log(np.multiply.reduce(n[:_FACTORS]), out=into[0])
    for i in range(_FACTORS, len(n), _FACTORS):
        ln_q += np.log(np.multiply.reduce(n[i : i + _FACTORS]))
    u, w = np.add.reduce(energy, out=into[1]), np.add.reduce(x, out=into[2])
    w -= 2.0 * u
    return ln_q, u, w


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
    return float(0.5 * np.asarray(wavenumbers_cm1, dtype=float).sum() * CM1_KJ_MOL)
