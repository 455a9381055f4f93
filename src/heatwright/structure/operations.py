"""Symmetry operations of a geometry: which rotations and rotation-reflections bring it back onto itself, how nearly.

Every operation of a molecule that is not linear is fixed by what it does to two atoms that are not collinear with the
centre.  So two atoms with few possible images are chosen, each pair of images gives one proper and one improper
candidate: atoms are matched with the nearest atom of their kind, and the orthogonal matrix of the same handedness that
fits this matching best replaces the candidate (orthogonal Procrustes problem, P. H. Schönemann, Psychometrika 31, 1
(1966), from memory).  One round of matching and fitting is enough: a second one was tried and found no operation within
the tolerance that the first had missed.

The operations are those about the centre of mass, as rotation itself is.  A centre fitted freely would be more lenient:
it hides part of what is amiss in light atoms by moving the heavy ones.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray

BoolArray = NDArray[np.bool_]

_CHUNK: Final = 2_000_000
"""Elements of the largest working array (candidates × atoms × atoms)."""


@dataclass(frozen=True, eq=False)
class Operations:
    """Symmetry operations about the centre, by growing deviation.

    matrices : (k, 3, 3) orthogonal.
    permutations : (k, n), atom i goes to the place of atom ``permutations[:, i]``.
    proper : (k,) True for rotations, False for reflections, inversion and rotation-reflections.
    deviations_A : (k,) largest distance (Å) of an atom's image from the atom it is matched with.
    """

    matrices: FloatArray
    permutations: IntArray
    proper: BoolArray
    deviations_A: FloatArray

    def __len__(self) -> int:
        return int(self.deviations_A.size)

    def take(self, which: BoolArray | IntArray) -> Operations:
        """Some of the operations, by mask or index."""
        return Operations(self.matrices[which], self.permutations[which], self.proper[which], self.deviations_A[which])

    def within(self, deviation_A: float) -> Operations:
        """Those that deviate by no more than this (Å)."""
        return self.take(self.deviations_A <= deviation_A)


def find_operations(kinds: IntArray, x: FloatArray, reach_A: float) -> Operations:
    """All operations of a molecule that is not linear which deviate by no more than *reach_A*, and some that do more.

    kinds : (n,) atoms of one number are interchangeable.  x : (n, 3) in Å from the centre.
    """
    same = kinds[:, None] == kinds[None, :]
    size = max(1, _CHUNK // x.shape[0] ** 2)
    candidates = _candidates(x, same, reach_A)
    parts = [_matched(x, same, chunk) for chunk in _chunks(candidates, size)]
    permutations, proper = (np.concatenate(column) for column in zip(*parts, strict=True))
    return _fitted(x, permutations, proper)


def linear_operations(kinds: IntArray, x: FloatArray) -> Operations:
    """One operation for each permutation and handedness of a linear molecule: E and σv, and with a centre C2 and i.

    kinds and x as in :func:`find_operations`.  The deviation counts the atoms' distances from the axis as well.
    """
    _, _, (axis, across, _) = np.linalg.svd(x)
    z = x @ axis
    off_axis = float(np.linalg.norm(x - np.outer(z, axis), axis=1).max())
    flip = np.outer(across, across)
    keep, order = np.arange(z.size), np.argsort(z, kind="stable")
    matrices, permutations, deviations = [np.eye(3), np.eye(3) - 2 * flip], [keep, keep], [0.0, off_axis]
    reverse = np.empty_like(order)
    reverse[order] = order[::-1]
    if bool((kinds == kinds[reverse]).all()):
        miss = max(float(np.abs(z + z[reverse]).max()), off_axis)
        matrices += [2 * flip - np.eye(3), -np.eye(3)]
        permutations += [reverse, reverse]
        deviations += [miss, miss]
    proper = np.arange(len(matrices)) % 2 == 0
    return Operations(np.array(matrices), np.array(permutations), proper, np.array(deviations))


def _chunks(matrices: FloatArray, size: int) -> Iterator[FloatArray]:
    for start in range(0, len(matrices), size):
        yield matrices[start : start + size]


def _candidates(x: FloatArray, same: BoolArray, reach: float) -> FloatArray:
    """(k, 3, 3) orthogonal matrices, proper and improper, that take the two anchor atoms to possible images."""
    a, b, images = _anchors(x, same, reach)
    frame, _ = _frames(x[[a]], x[[b]])
    image_frames, usable = _frames(x[images[:, 0]], x[images[:, 1]])
    image_frames = image_frames[usable]
    mirrored = image_frames * np.array([1.0, 1.0, -1.0])[:, None]
    return np.asarray(np.concatenate([image_frames, mirrored]).transpose(0, 2, 1) @ frame[0])


def _anchors(x: FloatArray, same: BoolArray, reach: float) -> tuple[int, int, IntArray]:
    """Two atoms with few pairs of images (k, 2), far enough from the centre and from one line to fix a frame."""
    radius = np.linalg.norm(x, axis=1)
    alike = same & (np.abs(radius[:, None] - radius[None]) <= reach)
    far = radius >= 0.3 * radius.max()
    a = int(np.lexsort((-radius, np.where(far, alike.sum(axis=1), x.shape[0] + 1)))[0])
    distance = np.linalg.norm(x[:, None] - x[None], axis=2)
    lever = np.linalg.norm(np.cross(x[a], x), axis=1)
    images = np.flatnonzero(alike[a])

    def pairs(b: int) -> BoolArray:
        return np.asarray(alike[b] & (np.abs(distance[images] - distance[a, b]) <= 2 * reach))

    able = np.flatnonzero(lever >= 0.5 * lever.max()).tolist()
    b = int(min(able, key=lambda atom: (int(pairs(atom).sum()), -lever[atom])))
    first, second = np.nonzero(pairs(b))
    return a, b, np.column_stack([images[first], second])


def _frames(p: FloatArray, q: FloatArray) -> tuple[FloatArray, BoolArray]:
    """Right-handed orthonormal frames (k, 3, 3; rows) from two vectors each, and which of them are well defined."""
    normal = np.cross(p, q)
    length_p, length = np.linalg.norm(p, axis=1), np.linalg.norm(normal, axis=1)
    usable = length > 1e-6 * np.maximum(length_p, 1e-6)
    e1 = p / np.where(usable, length_p, 1.0)[:, None]
    e3 = normal / np.where(usable, length, 1.0)[:, None]
    return np.stack([e1, np.cross(e3, e1), e3], axis=1), usable


def _matched(x: FloatArray, same: BoolArray, matrices: FloatArray) -> tuple[IntArray, BoolArray]:
    """Permutations (k, n) and handedness (k,) of the candidates that match the atoms one to one.

    Each atom's image is matched with the atom of its kind that is nearest to it.
    """
    images = x @ matrices.transpose(0, 2, 1)
    # |image − x_j|² without |image|², which is the same for every j; atoms of another kind are out of the question
    cost = (x**2).sum(axis=1) - 2.0 * images @ x.T
    permutations = np.where(same, cost, np.inf).argmin(axis=2)
    one_to_one = (np.sort(permutations, axis=1) == np.arange(x.shape[0])).all(axis=1)
    return permutations[one_to_one], np.linalg.det(matrices[one_to_one]) > 0.0


def _procrustes(x: FloatArray, permutations: IntArray, proper: BoolArray) -> FloatArray:
    """(k, 3, 3) orthogonal matrices of given handedness that fit the matching best in the least-squares sense."""
    u, _, vt = np.linalg.svd(x[permutations].transpose(0, 2, 1) @ x)
    wrong_hand = (np.linalg.det(u @ vt) > 0.0) != proper
    u[wrong_hand, :, 2] *= -1.0  # the singular value given up is the smallest; in a plane it is zero
    return np.asarray(u @ vt)


def _fitted(x: FloatArray, permutations: IntArray, proper: BoolArray) -> Operations:
    """The best operation for each (permutation, handedness), once, by growing deviation."""
    _, first = np.unique(np.column_stack([permutations, proper]), axis=0, return_index=True)
    permutations, proper = permutations[first], proper[first]
    matrices = _procrustes(x, permutations, proper)
    deviations = np.linalg.norm(x @ matrices.transpose(0, 2, 1) - x[permutations], axis=2).max(axis=1)
    identity = proper & (permutations == np.arange(x.shape[0])).all(axis=1)
    deviations[identity] = 0.0  # not the rounding of a singular-value decomposition
    return Operations(matrices, permutations, proper, deviations).take(np.argsort(deviations, kind="stable"))
