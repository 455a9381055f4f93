"""A torsional potential from the points of a scan: a Fourier series with the symmetry of the top, checked.

With n equivalent orientations only the terms m = n, 2n, … are kept, and only their cosines where the mirror image of
the molecule turned to φ is the molecule turned to −φ.  What the points cannot determine is not fitted, and what the
series cannot represent is refused, because a potential that is silently wrong costs 5–15 J/mol/K in S.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.findings import Finding, Refused, refuse
from heatwright.partition.potential import Potential

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

MOST_HARMONICS: Final = 5
"""Harmonics of the top's period that are fitted at most: with five of them 12 points leave less than 1 cm⁻¹."""
WELL_POSED: Final = 30.0
"""Largest condition number of a design whose terms count as determined; equal steps over a whole turn give 1.4."""
OVERSHOOT: Final = 0.15
"""Part of the scan's range by which the curve may leave it between points; 30° steps may miss a minimum by 0.1."""
SAME_ANGLE_DEG: Final = 1.0
_FEWEST: Final = {1: 7, 2: 5}
"""Distinct points needed in one period; 3 for tops of symmetry 3 and higher.  Half a period and one point more do for
an even potential."""


@dataclass(frozen=True)
class FittedPotential:
    """The potential of a scan, its number of harmonics, its points, and the root-mean-square residual in 1/cm.

    angles_deg, energies_cm1 : of the points as they were fitted, the lowest at 0.
    """

    potential: Potential
    harmonics: int
    n_points: int
    rms_cm1: float
    angles_deg: tuple[float, ...] = ()
    energies_cm1: tuple[float, ...] = ()


def tolerated_cm1(barrier_cm1: float) -> float:
    """What a scan may be off from periodic or from the top's symmetry: 5 % of the barrier or 20 1/cm."""
    return max(0.05 * barrier_cm1, 20.0)


@dataclass(frozen=True)
class _Kind:
    """Which terms a potential has: those of its symmetry, the sines only when it is not even."""

    symmetry: int
    even: bool

    @property
    def period_deg(self) -> float:
        return 360.0 / self.symmetry

    @property
    def fewest(self) -> int:
        """Distinct points needed."""
        fewest = _FEWEST.get(self.symmetry, 3)
        return max((fewest + 1) // 2 + 1, 3) if self.even and fewest > 3 else fewest

    def terms(self, harmonics: int) -> int:
        return 1 + harmonics * (1 if self.even else 2)


def fitted_potential(
    angles_deg: FloatArray, energies_cm1: FloatArray, symmetry: int, where: str = "", *, even: bool = False
) -> FittedPotential:
    """The Fourier series through the points of a scan, (n,) degrees and 1/cm, of a top with this *symmetry*.

    even : V(−φ) = V(φ), by the structure of the molecule.

    Raises Refused (``scan-unfit``) when points are too few, not periodic, break the symmetry, or leave terms open.

    >>> angles = np.arange(0.0, 360.0, 30.0)
    >>> fitted = fitted_potential(angles, 500.0 * (1.0 + np.cos(np.radians(3 * angles))), 3)
    >>> round(fitted.potential.barrier_cm1, 6), fitted.harmonics
    (1000.0, 1)
    """
    E, kind = energies_cm1 - energies_cm1.min(), _Kind(symmetry, even)
    tolerated = tolerated_cm1(float(E.max()))
    faults = _periodicity(angles_deg, E, tolerated)
    harmonics = 0 if faults else _harmonics(angles_deg, kind)
    if not faults and harmonics == 0:
        faults = [_undetermined(angles_deg, kind)]
    if faults:
        raise Refused([_at(fault, where) for fault in faults])
    potential, rms = _fit(angles_deg, E, kind, harmonics)
    if rms > tolerated:
        raise Refused([_at(_broken(angles_deg, E, kind, rms, tolerated), where)])
    lowest, highest = potential.minimum[1], potential.minimum[1] + potential.barrier_cm1
    room = OVERSHOOT * float(E.max()) + 20.0
    if lowest < -room or highest > E.max() + room:
        words = f"between the points the fitted curve runs from {lowest:.0f} to {highest:.0f} cm⁻¹"
        fault = _unfit(words, f"0 to {E.max():.0f} cm⁻¹ as at the points", "Add points where the scan has gaps.")
        raise Refused([_at(fault, where)])
    return FittedPotential(potential, harmonics, len(E), rms, tuple(angles_deg.tolist()), tuple(E.tolist()))


def _at(fault: Finding, where: str) -> Finding:
    return fault.at(where) if where else fault


def _unfit(found: str, expected: str, action: str) -> Finding:
    return refuse("scan-unfit", found, expected=expected, action=action)


def _periodicity(angles_deg: FloatArray, E: FloatArray, tolerated: float) -> list[Finding]:
    """Points at the same angle, such as 0° and 360°, must have the same energy."""
    apart = np.abs((angles_deg[:, None] - angles_deg[None, :] + 180.0) % 360.0 - 180.0)
    worst = np.where(apart < SAME_ANGLE_DEG, np.abs(E[:, None] - E[None, :]), 0.0)
    i, j = np.unravel_index(int(worst.argmax()), worst.shape)
    if worst[i, j] <= tolerated:
        return []
    words = f"the points at {angles_deg[i]:.1f}° and {angles_deg[j]:.1f}° differ by {worst[i, j]:.0f} cm⁻¹"
    action = "The potential is not periodic: the molecule went over to another conformer. Scan both ways and compare."
    return [_unfit(words, f"at most {tolerated:.0f} cm⁻¹", action)]


def _distinct(angles_deg: FloatArray, kind: _Kind) -> int:
    """Number of points that differ within one period, or within half of it when the potential is even."""
    reduced = angles_deg % kind.period_deg
    if kind.even:
        ordered = np.sort(np.minimum(reduced, kind.period_deg - reduced))
        return 1 + int((np.diff(ordered) >= SAME_ANGLE_DEG).sum())
    ordered = np.sort(reduced)
    steps = np.diff(ordered, append=ordered[0] + kind.period_deg)
    return max(int((steps >= SAME_ANGLE_DEG).sum()), 1)


def _harmonics(angles_deg: FloatArray, kind: _Kind) -> int:
    """The largest number of harmonics that the points determine; 0 when they are too few."""
    distinct = _distinct(angles_deg, kind)
    if distinct < kind.fewest:
        return 0
    most = distinct - 1 if kind.even else (distinct - 1) // 2
    for harmonics in range(min(MOST_HARMONICS, most), 0, -1):
        if np.linalg.cond(_design(angles_deg, kind, harmonics)) <= WELL_POSED:
            return harmonics if kind.terms(harmonics) >= kind.fewest or kind.symmetry > 2 else 0
    return 0


def _undetermined(angles_deg: FloatArray, kind: _Kind) -> Finding:
    distinct, fewest = _distinct(angles_deg, kind), kind.fewest
    period = f"{'half ' if kind.even else ''}a period of {kind.period_deg:g}°"
    if distinct < fewest:
        words = f"the scan has {distinct} different point{'s' if distinct > 1 else ''} in {period}"
        return _unfit(words, f"at least {fewest}", "Compute more points.")
    words = f"the {len(angles_deg)} points do not determine the terms of a potential, for they do not cover {period}"
    return _unfit(words, "points spread over the whole of it", "Scan the rest of it.")


def _design(angles_deg: FloatArray, kind: _Kind, harmonics: int) -> FloatArray:
    phase = np.outer(np.radians(angles_deg), kind.symmetry * np.arange(1, harmonics + 1))
    return np.hstack([np.ones((len(angles_deg), 1)), np.cos(phase), *([] if kind.even else [np.sin(phase)])])


def _fit(angles_deg: FloatArray, E: FloatArray, kind: _Kind, harmonics: int) -> tuple[Potential, float]:
    design, n = _design(angles_deg, kind, harmonics), kind.symmetry
    x = np.linalg.lstsq(design, E, rcond=None)[0]
    cosine, sine = np.zeros(n * harmonics), np.zeros(n * harmonics)
    cosine[n - 1 :: n] = x[1 : harmonics + 1]
    if not kind.even:
        sine[n - 1 :: n] = x[harmonics + 1 :]
    rms = float(np.sqrt(np.mean((design @ x - E) ** 2)))
    return Potential(float(x[0]), tuple(cosine.tolist()), tuple(sine.tolist())), rms


def _broken(angles_deg: FloatArray, E: FloatArray, kind: _Kind, rms: float, tolerated: float) -> Finding:
    """Whether the top's symmetry is broken, or the points lie on no smooth curve at all."""
    anything = _Kind(1, even=False)
    free = _harmonics(angles_deg, anything)
    if free and _fit(angles_deg, E, anything, free)[1] < rms / 2.0:
        fold = f"{kind.symmetry}-fold" if kind.symmetry > 1 else "the same for φ and −φ"
        words = f"the scan is not {fold} as its top is: the terms that break the symmetry are {rms:.0f} cm⁻¹"
        action = "A rigid scan does this (tilted methyl groups); scan with everything else relaxed."
    else:
        words = f"the points lie off every smooth periodic curve by {rms:.0f} cm⁻¹"
        action = "Look for points that did not converge or went over to another conformer."
    return _unfit(f"{words} (root mean square)", f"at most {tolerated:.0f} cm⁻¹", action)
