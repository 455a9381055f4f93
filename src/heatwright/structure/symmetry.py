"""Point group, rotational symmetry number and chirality of a molecule from its geometry, with an explicit tolerance.

The symmetry number counts the rotations that exchange like atoms, with the molecule rigid as it stands; see
A. Fernández-Ramos et al., Theor. Chem. Acc. 118, 813 (2007) (from memory).
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np
from numpy.typing import ArrayLike

from heatwright.findings import Finding, warn
from heatwright.structure.inertia import LINEAR_TOLERANCE_A, checked_geometry, line_distances
from heatwright.structure.operations import Operations, find_operations, linear_operations
from heatwright.structure.pointgroup import largest_group, next_group, schoenflies

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray

TOLERANCE_A: Final = 0.05
"""How far (Å) an operation may leave an atom from the place of another and still count, unless the caller says."""

LARGEST_TOLERANCE_A: Final = 0.35
"""Half the shortest distance of like atoms (H2, 0.74 Å): with more, the nearest atom need not be the one meant."""

ISOTOPE_GAP_U: Final = 0.1
"""Atoms of one element whose masses differ by more than this (u) are not alike; rounding of masses is far below it."""

_DOUBT: Final = 3.0
"""A factor by which a deviation has to keep clear of the tolerance, on either side, to leave no doubt."""


@dataclass(frozen=True, eq=False)
class Symmetry:
    """What brings a molecule back onto itself.

    point_group : Schoenflies symbol in ASCII (``C2v``, ``Dinfh``, ``Kh`` for an atom).
    symmetry_number : number of rotations that exchange like atoms, the identity counted.
    chiral : whether there is no improper operation, so that the mirror image is another molecule or conformer.
    tolerance_A : largest deviation (Å) at which an operation may be accepted.
    largest_accepted_deviation_A : of the operations accepted, the worst (Å).
    smallest_rejected_deviation_A : of those tried and not accepted, the best (Å), None when there was none; all that
        deviate by less than three tolerances have been tried, unless that is more than half a distance of like atoms.
    operations : those accepted; for linear molecules and atoms one for each permutation and handedness.
    ambiguous : whether an accepted operation uses more than a third of the tolerance, or a rejected one deviates by
        less than three tolerances.
    if_tighter, if_looser : point group and symmetry number at a third of the tolerance and at the first wider group
        within three tolerances, where they differ from those accepted; else None.
    """

    point_group: str
    symmetry_number: int
    chiral: bool
    tolerance_A: float
    largest_accepted_deviation_A: float
    smallest_rejected_deviation_A: float | None
    operations: Operations
    if_tighter: tuple[str, int] | None = None
    if_looser: tuple[str, int] | None = None

    @property
    def optical_isomers(self) -> int:
        """2 for a chiral geometry, which stands for its mirror image as well, else 1."""
        return 2 if self.chiral else 1

    @property
    def ambiguous(self) -> bool:
        """Whether another sensible tolerance could give another answer."""
        return self._only_just_fits or self._nearly_more

    @property
    def _only_just_fits(self) -> bool:
        return self.largest_accepted_deviation_A > self.tolerance_A / _DOUBT

    @property
    def _nearly_more(self) -> bool:
        rejected = self.smallest_rejected_deviation_A
        return rejected is not None and rejected < _DOUBT * self.tolerance_A


def symmetry(
    atomic_numbers: ArrayLike,
    masses_u: ArrayLike,
    coordinates_A: ArrayLike,
    tolerance_A: float = TOLERANCE_A,
    distinguish_isotopes: bool = True,
) -> Symmetry:
    """Point group, symmetry number and chirality of a geometry.

    atomic_numbers : (n,).  masses_u : (n,) in u.  coordinates_A : (n, 3) in Å.
    tolerance_A : an operation is accepted when every atom comes to within this of an atom of its kind (Å).
    distinguish_isotopes : whether isotopes are atoms of different kinds.

    A molecule is linear by the same rule as in :func:`heatwright.structure.inertia.inertia`, whatever the tolerance.
    Raises ValueError when the arrays are no molecule or the tolerance is not above 0 and at most 0.35 Å.

    >>> water = [[0.0, 0.0, 0.1173], [0.0, 0.7572, -0.4692], [0.0, -0.7572, -0.4692]]
    >>> h2o = symmetry([8, 1, 1], [15.9949, 1.0078, 1.0078], water)
    >>> h2o.point_group, h2o.symmetry_number
    ('C2v', 2)
    >>> hdo = symmetry([8, 1, 1], [15.9949, 1.0078, 2.0141], water)
    >>> hdo.point_group, hdo.symmetry_number
    ('Cs', 1)
    """
    m, x = checked_geometry(masses_u, coordinates_A)
    z = np.asarray(atomic_numbers, dtype=np.int64)
    if z.shape != m.shape:
        raise ValueError(f"expected as many atomic numbers as masses, found shapes {z.shape} and {m.shape}")
    if not 0.0 < tolerance_A <= LARGEST_TOLERANCE_A:
        raise ValueError(
            f"the symmetry tolerance is {tolerance_A} Å; expected more than 0, {LARGEST_TOLERANCE_A} at most"
        )
    kinds = atom_kinds(z, m, distinguish_isotopes)
    if m.size == 1:
        return _summary(_atom_operations(), tolerance_A, linear=False)
    x = x - _centre(kinds, m, x)
    if line_distances(x).max() <= LINEAR_TOLERANCE_A:
        return _summary(linear_operations(kinds, x), tolerance_A, linear=True)
    return _summary(find_operations(kinds, x, _DOUBT * tolerance_A), tolerance_A, linear=False)


def stated_symmetry(point_group: str, symmetry_number: int, optical_isomers: int = 1) -> Symmetry:
    """A symmetry that was stated, not found: no operations are known and nothing deviates.

    >>> stated_symmetry("C3v", 3).ambiguous
    False
    """
    none = Operations(np.empty((0, 3, 3)), np.empty((0, 0), dtype=np.int64), np.empty(0, dtype=bool), np.empty(0))
    return Symmetry(
        point_group=point_group,
        symmetry_number=symmetry_number,
        chiral=optical_isomers > 1,
        tolerance_A=TOLERANCE_A,
        largest_accepted_deviation_A=0.0,
        smallest_rejected_deviation_A=None,
        operations=none,
    )


def atom_kinds(atomic_numbers: IntArray, masses_u: FloatArray, distinguish_isotopes: bool = True) -> IntArray:
    """(n,) numbers that are equal for atoms of one element and, if asked for, of one isotope.

    >>> atom_kinds(np.array([1, 8, 1, 1]), np.array([1.0078, 15.9949, 2.0141, 1.008])).tolist()
    [0, 2, 1, 0]
    """
    order = np.lexsort((masses_u, atomic_numbers))
    new = np.diff(atomic_numbers[order]) != 0
    if distinguish_isotopes:
        new |= np.diff(masses_u[order]) > ISOTOPE_GAP_U
    kinds = np.empty(order.size, dtype=np.int64)
    kinds[order] = np.concatenate([[0], np.cumsum(new)])
    return kinds


def _centre(kinds: IntArray, m: FloatArray, x: FloatArray) -> FloatArray:
    """Centre of mass with the same mass for atoms of one kind, so that rounding or ignored isotopes do not move it."""
    mean = np.bincount(kinds, weights=m) / np.bincount(kinds)
    return np.asarray(mean[kinds] @ x / mean[kinds].sum())


def _atom_operations() -> Operations:
    matrices = np.array([np.eye(3), -np.eye(3)])
    return Operations(matrices, np.zeros((2, 1), dtype=np.int64), np.array([True, False]), np.zeros(2))


def _summary(found: Operations, tolerance: float, linear: bool) -> Symmetry:
    group = _accepted(found, tolerance, linear)
    rejected = found.deviations_A[len(group) :]
    wider = None if linear else next_group(found, len(group), _DOUBT * tolerance)
    if linear and len(group) < len(found) and rejected[0] < _DOUBT * tolerance:
        wider = found
    tighter = _accepted(group, tolerance / _DOUBT, linear) if group.deviations_A[-1] > tolerance / _DOUBT else group
    return Symmetry(
        *_name(group, linear),
        chiral=bool(group.proper.all()),
        tolerance_A=tolerance,
        largest_accepted_deviation_A=float(group.deviations_A.max()),
        smallest_rejected_deviation_A=float(rejected[0]) if rejected.size else None,
        operations=group,
        if_tighter=_name(tighter, linear) if len(tighter) < len(group) else None,
        if_looser=_name(wider, linear) if wider is not None else None,
    )


def _accepted(found: Operations, tolerance: float, linear: bool) -> Operations:
    """The group within the tolerance; a linear molecule keeps its axis, which has been decided by another rule."""
    if linear:
        return found.take((np.arange(len(found)) < 2) | (found.deviations_A <= tolerance))
    return largest_group(found, tolerance)


def _name(group: Operations, linear: bool) -> tuple[str, int]:
    return schoenflies(group, linear), int(group.proper.sum())


def symmetry_findings(sym: Symmetry) -> tuple[Finding, ...]:
    """A warning when another sensible tolerance could give another symmetry; says the deviations and the other answer.

    Nothing when the symmetry is beyond doubt.
    """
    clauses = []
    if sym._nearly_more:
        clauses.append(
            f"a further operation misses by {sym.smallest_rejected_deviation_A:.3f} Å"
            + (f" and would make it {_words(sym.if_looser)}" if sym.if_looser else "")
        )
    if sym._only_just_fits:
        clauses.append(
            f"an accepted operation is off by {sym.largest_accepted_deviation_A:.3f} Å"
            + (f", without which it would be {_words(sym.if_tighter)}" if sym.if_tighter else "")
        )
    if not clauses:
        return ()
    taken = _words((sym.point_group, sym.symmetry_number))
    return (
        warn(
            "symmetry-ambiguous",
            f"the geometry was taken as {taken} with a tolerance of {sym.tolerance_A:g} Å, but {'; '.join(clauses)}",
            expected=f"operations within {sym.tolerance_A / _DOUBT:.3f} Å or beyond {_DOUBT * sym.tolerance_A:.3f} Å",
            action="Look at the geometry, and give --symmetry-number and --optical-isomers if others are meant.",
        ),
    )


def _words(group: tuple[str, int]) -> str:
    chiral = ", chiral" if re.fullmatch(r"[CD]\d+|T|O|I", group[0]) else ""
    return f"{group[0]} (symmetry number {group[1]}{chiral})"
