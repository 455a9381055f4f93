"""Point groups: whether operations close, and what the group is called (Schoenflies).

Source: any textbook of group theory for chemists, for instance F. A. Cotton, Chemical Applications of Group Theory
(from memory).  No axis has to be found: the orders of the rotations give the rotational subgroup, and the number of
its reflections tells the groups that share it apart.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

if TYPE_CHECKING:
    from heatwright.molecule import IntArray
    from heatwright.structure.operations import Operations

_CUBIC: Final = {(12, 3): "T", (24, 4): "O", (60, 5): "I"}
"""Rotational subgroups with several axes of high order, by number of rotations and highest order."""

_ROUNDING_A: Final = 1e-9
"""An operation and its inverse deviate equally but for rounding; they are taken or left together."""


def is_group(operations: Operations) -> bool:
    """Whether the product of any two of the operations is one of them (and the identity is there)."""
    p = operations.permutations.astype(np.int16)
    members = {(row.tobytes(), bool(hand)) for row, hand in zip(p, operations.proper, strict=True)}
    if (np.arange(p.shape[1], dtype=np.int16).tobytes(), True) not in members:
        return False
    for row, hand in zip(p, operations.proper, strict=True):
        hands = (operations.proper == hand).tolist()
        if any((product.tobytes(), h) not in members for product, h in zip(row[p], hands, strict=True)):
            return False
    return True


def largest_group(operations: Operations, limit_A: float) -> Operations:
    """The group made of all operations up to some deviation, with that deviation as large as *limit_A* allows.

    Operations just inside the limit whose products are outside make no group; they are left out from the worst down.
    """
    inside = operations.within(limit_A)
    while not is_group(inside):
        keep = inside.deviations_A < inside.deviations_A[-1] - _ROUNDING_A
        keep[0] = True  # the identity
        inside = inside.take(keep)
    return inside


def next_group(operations: Operations, size: int, limit_A: float) -> Operations | None:
    """The smallest group of more than *size* operations up to some deviation within *limit_A*, or None."""
    for deviation in operations.deviations_A[size:]:
        if deviation > limit_A:
            return None
        wider = operations.within(float(deviation) + _ROUNDING_A)
        if len(wider) > size and is_group(wider):
            return wider
    return None


def schoenflies(group: Operations, linear: bool = False) -> str:
    """The Schoenflies symbol of a group of operations, in ASCII: ``C2v``, ``D3d``, ``Cinfv``, ``Dinfh``, ``S4``."""
    n_rotations = int(group.proper.sum())
    if group.permutations.shape[1] == 1:
        return "Kh"
    if linear:
        return "Dinfh" if n_rotations == 2 else "Cinfv"
    reflections = _n_reflections(group)
    chiral = n_rotations == len(group)
    order = max(_order(p) for p in group.permutations[group.proper])
    if (n_rotations, order) in _CUBIC:
        return _CUBIC[n_rotations, order] + _cubic_suffix(n_rotations, reflections, chiral)
    if n_rotations == 2 * order:
        return f"D{order}" if chiral else f"D{order}{'h' if reflections == order + 1 else 'd'}"
    return f"C{order}" if chiral else _cyclic(order, reflections)


def _cubic_suffix(n_rotations: int, reflections: int, chiral: bool) -> str:
    if chiral:
        return ""
    return "d" if (n_rotations, reflections) == (12, 6) else "h"


def _cyclic(order: int, reflections: int) -> str:
    """The groups whose rotations are those of one axis, when there are improper operations too."""
    if order == 1:
        return "Cs" if reflections else "Ci"
    if reflections == 0:
        return f"S{2 * order}"
    return f"C{order}{'v' if reflections == order else 'h'}"


def _n_reflections(group: Operations) -> int:
    """Improper operations that are their own inverse, the inversion (trace −3) left out; a reflection has trace 1."""
    twice = np.take_along_axis(group.permutations, group.permutations, axis=1)
    own_inverse = (twice == np.arange(twice.shape[1])).all(axis=1)
    trace = np.trace(group.matrices, axis1=1, axis2=2)
    return int(np.count_nonzero(own_inverse & ~group.proper & (trace > -1.0)))


def _order(permutation: IntArray) -> int:
    """How often a permutation has to be done to be the identity again."""
    identity, current, n = np.arange(permutation.size), permutation, 1
    while not np.array_equal(current, identity):
        current, n = permutation[current], n + 1
    return n
