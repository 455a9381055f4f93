"""The levels of diatomic and linear molecules: rotation, vibration and rotation, and doublet Π states.

Term values in the notation of G. Herzberg, Spectra of Diatomic Molecules (1950), chapters III to V (from memory):

    G(v) = we (v+½) − wexe (v+½)²,   B_v = Be − αe (v+½),   F_v(J) = B_v J(J+1) − D J²(J+1)²

and for a doublet Π state (E. Hill, J. H. Van Vleck, Phys. Rev. 32, 250 (1928), from memory), with Y = A/B_v,

    F₁,₂(J) = B_v [(J+½)² − 1 ∓ ½ √(4(J+½)² + Y(Y−4))] − D (J⁴ or (J+1)⁴)

each level twice (Λ doubling).  J = ½ belongs to ²Π½ alone, which is F₁ for Y > 2 and F₂ otherwise.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np

from heatwright.molecule import DiatomicConstants, FloatArray
from heatwright.partition.levelsum import HIGHEST_CM1, LevelSum

Levels = tuple[FloatArray, FloatArray]
"""Energies (1/cm) and weights."""


def rotational_levels(B_cm1: float, D_cm1: float = 0.0, even: float = 1.0, odd: float = 1.0) -> Levels:
    """Levels of a linear rotor; *even* and *odd* are the nuclear-spin weights of even and odd J.

    They go up to where the centrifugal term turns them down.

    >>> energies, weights = rotational_levels(59.3219, 0.0471, 0.25, 0.75)
    >>> energies[:3].round(1).tolist(), weights[:3].tolist()  # para and ortho hydrogen
    ([0.0, 118.5, 354.2], [0.25, 2.25, 1.25])
    """
    J = np.arange(_last_J(B_cm1, D_cm1) + 1, dtype=float)
    jj = J * (J + 1.0)
    energies = _rising(B_cm1 * jj - D_cm1 * jj**2)
    J = J[: energies.size]
    return energies, (2.0 * J + 1.0) * np.where(J % 2 == 0, even, odd)


def vibration_rotation_levels(constants: DiatomicConstants, even: float = 1.0, odd: float = 1.0) -> Levels:
    """All levels of a Σ state above the lowest, those above D0 left out; nuclear-spin weights as in a rotor."""
    D = constants.centrifugal_cm1
    return _bound(constants, lambda B: rotational_levels(B, D, even, odd))


def doublet_pi_levels(constants: DiatomicConstants) -> Levels:
    """All levels of a doublet Π state, counted from G(0), those above D0 (from the lowest) left out.

    Raises ValueError without a spin-orbit constant.
    """
    A, D = _spin_orbit(constants), constants.centrifugal_cm1
    return _bound(constants, lambda B: doublet_pi_rotation(A, B, D))


def doublet_pi_rotation(A_cm1: float, B_cm1: float, D_cm1: float) -> Levels:
    """Rotational and spin levels of a doublet Π state in one vibrational state, from its spin-free origin.

    >>> energies, weights = doublet_pi_rotation(-139.21, 18.5487, 0.00194)  # OH
    >>> (energies - energies.min())[:2].round(1).tolist(), weights[:2].tolist()  # J = 3/2 and 5/2
    ([0.0, 83.9], [8.0, 12.0])
    """
    J = np.arange(_last_J(B_cm1, D_cm1) + 1, dtype=float) + 0.5
    Y = A_cm1 / B_cm1
    root = 0.5 * np.sqrt(4.0 * (J + 0.5) ** 2 + Y * (Y - 4.0))
    lower = B_cm1 * ((J + 0.5) ** 2 - 1.0 - root) - D_cm1 * J**4
    upper = B_cm1 * ((J + 0.5) ** 2 - 1.0 + root) - D_cm1 * (J + 1.0) ** 4
    starts = (0, 1) if Y > 2.0 else (1, 0)
    ladders = [_rising(ladder[start:]) for ladder, start in zip((lower, upper), starts, strict=True)]
    weights = [
        2.0 * (2.0 * J[start : start + ladder.size] + 1.0) for ladder, start in zip(ladders, starts, strict=True)
    ]
    return np.concatenate(ladders), np.concatenate(weights)


def level_sum(name: str, levels: Levels) -> LevelSum:
    """The contribution of these levels."""
    return LevelSum(name, *levels)


def with_excited(levels: Levels, excited: tuple[tuple[float, int], ...], B_cm1: float, D_cm1: float) -> Levels:
    """The levels with those of excited electronic states, each a rotor like that of the ground state.

    excited : (1/cm above the lowest level, degeneracy) pairs.
    """
    energies, weights = rotational_levels(B_cm1, D_cm1)
    lowest = float(levels[0].min())
    more = [(lowest + nu + energies, g * weights) for nu, g in excited]
    return (
        np.concatenate([levels[0], *(e for e, _ in more)]),
        np.concatenate([levels[1], *(g for _, g in more)]),
    )


def _spin_orbit(constants: DiatomicConstants) -> float:
    if constants.A_cm1 is None:
        raise ValueError("a doublet Π state needs its spin-orbit constant A")
    return constants.A_cm1


def _bound(constants: DiatomicConstants, rotation: Callable[[float], Levels]) -> Levels:
    """The rotational levels of every vibrational state, without those above the dissociation limit."""
    ladders = [(g + energies, weights) for g, (energies, weights) in _vibrations(constants, rotation)]
    energies = np.concatenate([e for e, _ in ladders])
    weights = np.concatenate([w for _, w in ladders])
    highest = HIGHEST_CM1 if constants.D0_cm1 is None else constants.D0_cm1
    kept = energies - energies.min() < highest
    return energies[kept], weights[kept]


def _vibrations(constants: DiatomicConstants, rotation: Callable[[float], Levels]) -> Iterator[tuple[float, Levels]]:
    """G(v) − G(0) and the rotational levels, as long as G rises and B is positive."""
    we, wexe = constants.we_cm1, constants.wexe_cm1
    v = 0
    while v == 0 or (2.0 * wexe * v < we and v * (we - wexe * (v + 1)) < HIGHEST_CM1):
        B = constants.Be_cm1 - constants.alphae_cm1 * (v + 0.5)
        if B <= 0.0:
            return
        yield v * (we - wexe * (v + 1)), rotation(B)
        v += 1


def _last_J(B_cm1: float, D_cm1: float) -> int:
    """The last J worth having: below the turning point of the centrifugal term and below the highest energy."""
    high = HIGHEST_CM1 / B_cm1 if D_cm1 <= 0.0 else min(HIGHEST_CM1 / B_cm1 * 2.0, B_cm1 / (2.0 * D_cm1))
    return int(np.sqrt(high)) + 2


def _rising(energies: FloatArray) -> FloatArray:
    """The energies up to the first that is not above the one before."""
    falls = np.flatnonzero(np.diff(energies) <= 0.0)
    return energies[: falls[0] + 1] if falls.size else energies
