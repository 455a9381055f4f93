"""Laying one geometry over another: best rotation, order of the atoms, and how far apart they stay.

Source of the rotation: W. Kabsch, Acta Cryst. A 34, 827 (1978).
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import combinations, permutations
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray

_PAIR_A = 0.1
"""Distances that may belong to the same pair of atoms differ by less than this, Å."""


@dataclass(frozen=True, eq=False, slots=True)
class Superposition:
    """How a moved geometry comes to lie on a fixed one.

    rmsd_A : root-mean-square distance of corresponding atoms, Å.
    order : (n,) atom i of the fixed geometry is atom order[i] of the moved one.
    rotation : (3, 3) proper rotation; moved positions about their centre, times it, lie on the fixed ones.
    """

    rmsd_A: float
    order: IntArray
    rotation: FloatArray

    @property
    def reordered(self) -> bool:
        """Whether the atoms had to be put into another order."""
        return bool((self.order != np.arange(self.order.size)).any())


def superposed(moved_A: FloatArray, fixed_A: FloatArray) -> Superposition:
    """The best proper rotation of one geometry on another, the atoms in the same order; both (n, 3) in Å.

    >>> x = np.array([[0.0, 0, 0], [1, 0, 0], [0, 2, 0]])
    >>> superposed(x @ [[0, 1, 0], [-1, 0, 0], [0, 0, 1]] + 3.0, x).rmsd_A < 1e-12
    True
    """
    a, b = moved_A - moved_A.mean(axis=0), fixed_A - fixed_A.mean(axis=0)
    u, _, vt = np.linalg.svd(a.T @ b)
    mirror = np.diag([1.0, 1.0, np.sign(np.linalg.det(u @ vt))])
    rotation = u @ mirror @ vt
    rmsd = float(np.sqrt(((a @ rotation - b) ** 2).sum() / len(a)))
    return Superposition(rmsd, np.arange(len(a)), rotation)


def matched(
    moved_numbers: IntArray, moved_A: FloatArray, fixed_numbers: IntArray, fixed_A: FloatArray
) -> Superposition | None:
    """The best superposition when the atoms may stand in any order, element by element; None when there is none.

    Up to three atoms that span the fixed geometry are laid on every set of the same elements and distances, each other
    atom goes to the nearest one of its element, and the best of these orders counts.
    """
    if sorted(moved_numbers.tolist()) != sorted(fixed_numbers.tolist()):
        return None
    base = _base(fixed_numbers, fixed_A)
    best: Superposition | None = None
    for candidate in _candidates(moved_numbers, moved_A, fixed_numbers, fixed_A, base):
        order = _order(moved_numbers, moved_A, fixed_numbers, fixed_A, base, candidate)
        if order is None:
            continue
        found = superposed(moved_A[order], fixed_A)
        if best is None or found.rmsd_A < best.rmsd_A:
            best = Superposition(found.rmsd_A, order, found.rotation)
    return best


def _base(numbers: IntArray, x: FloatArray) -> tuple[int, ...]:
    """Up to three atoms that span the geometry, of rare elements where there is a choice."""
    if len(x) < 3:
        return tuple(range(len(x)))
    count = {int(z): int((numbers == z).sum()) for z in numbers}

    def merit(triple: tuple[int, ...]) -> float:
        area = float(np.linalg.norm(np.cross(x[triple[1]] - x[triple[0]], x[triple[2]] - x[triple[0]])))
        return (area + 1.0e-3) / float(np.prod([count[int(numbers[i])] for i in triple]))

    rare = sorted(range(len(x)), key=lambda i: count[int(numbers[i])])[:12]
    return max(combinations(rare, 3), key=merit)


def _candidates(
    moved_numbers: IntArray, moved_A: FloatArray, fixed_numbers: IntArray, fixed_A: FloatArray, base: tuple[int, ...]
) -> list[tuple[int, ...]]:
    """Sets of moved atoms with the elements and mutual distances of the base."""
    choices = [np.flatnonzero(moved_numbers == fixed_numbers[i]).tolist() for i in base]
    pools = sorted({i for choice in choices for i in choice})
    found = []
    for candidate in permutations(pools, len(base)):
        if any(c not in choice for c, choice in zip(candidate, choices, strict=True)):
            continue
        pairs = combinations(range(len(base)), 2)
        if all(
            abs(
                np.linalg.norm(moved_A[candidate[i]] - moved_A[candidate[j]])
                - np.linalg.norm(fixed_A[base[i]] - fixed_A[base[j]])
            )
            < _PAIR_A
            for i, j in pairs
        ):
            found.append(candidate)
    return found


def _order(
    moved_numbers: IntArray,
    moved_A: FloatArray,
    fixed_numbers: IntArray,
    fixed_A: FloatArray,
    base: tuple[int, ...],
    candidate: tuple[int, ...],
) -> IntArray | None:
    """The order that a rotation laid through the base gives, or None when two atoms want the same place."""
    chosen = list(candidate)
    rotation = superposed(moved_A[chosen], fixed_A[list(base)]).rotation
    turned = (moved_A - moved_A[chosen].mean(axis=0)) @ rotation + fixed_A[list(base)].mean(axis=0)
    distance = np.linalg.norm(fixed_A[:, None] - turned[None], axis=2)
    distance[fixed_numbers[:, None] != moved_numbers[None]] = np.inf
    order = distance.argmin(axis=1)
    return order.astype(np.int64) if np.unique(order).size == order.size else None
