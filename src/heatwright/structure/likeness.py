"""Whether two geometries are one and the same conformer, or mirror images of each other."""

from __future__ import annotations

from dataclasses import dataclass
from math import inf
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.structure.superposition import matched, superposed

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray

SAME_CONFORMER_A: Final = 0.1
"""Root-mean-square distance after superposition up to which two optimised geometries are one conformer, Å.

Two optimisations of one minimum end within some hundredths of an Å; another minimum of a torsion moves an atom by 1 Å
or more, which is 0.1 Å in the mean of 100 atoms (common practice, no source)."""


@dataclass(frozen=True, slots=True)
class Likeness:
    """Root-mean-square distances (Å) of one geometry from another and from that one's mirror image; inf for no match.

    >>> Likeness(0.9, 0.02).mirror, Likeness(0.01, 0.02).mirror
    (True, False)
    """

    rmsd_A: float
    mirror_rmsd_A: float

    @property
    def same(self) -> bool:
        """Whether the two are one conformer."""
        return self.rmsd_A <= SAME_CONFORMER_A

    @property
    def mirror(self) -> bool:
        """Whether the two are mirror images and not one conformer."""
        return not self.same and self.mirror_rmsd_A <= SAME_CONFORMER_A


def likeness(kinds: IntArray, x_A: FloatArray, other_kinds: IntArray, other_A: FloatArray) -> Likeness:
    """How much two geometries are alike, atoms in any order; kinds (n,) are equal for like atoms, geometries (n, 3) Å.

    >>> h2o2 = np.array([[0.0, 0.73, 0], [0, -0.73, 0], [0.82, 0.88, 0.45], [-0.82, -0.88, 0.45]])
    >>> z = np.array([8, 8, 1, 1])
    >>> found = likeness(z, h2o2, z, h2o2 * [1, 1, -1])
    >>> found.same, found.mirror
    (False, True)
    """
    return Likeness(
        _rmsd_A(other_kinds, other_A, kinds, x_A),
        _rmsd_A(other_kinds, -other_A, kinds, x_A),
    )


def _rmsd_A(moved_kinds: IntArray, moved_A: FloatArray, kinds: IntArray, x_A: FloatArray) -> float:
    """The smaller of the distances in the given order of the atoms and in the best one."""
    found = [inf]
    if np.array_equal(moved_kinds, kinds):
        found.append(superposed(moved_A, x_A).rmsd_A)
        if found[-1] <= SAME_CONFORMER_A:
            return found[-1]
    best = matched(moved_kinds, moved_A, kinds, x_A)
    return min(found if best is None else [*found, best.rmsd_A])
