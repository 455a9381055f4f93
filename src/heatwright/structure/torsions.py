"""Rotatable bonds of a geometry: tops, their symmetry, and the reduced moments of internal rotation.

Reduced moments: K. S. Pitzer, W. D. Gwinn, J. Chem. Phys. 10, 428 (1942); J. E. Kilpatrick, K. S. Pitzer, J. Chem.
Phys. 17, 1064 (1949).  Here they come from the torsion vector without overall translation and rotation, which is the
same for rigid tops of any shape and does not depend on the side that is turned.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import lcm
from typing import TYPE_CHECKING, Final

import numpy as np
from numpy.typing import NDArray

from heatwright.constants import INERTIA_CM1_U_A2
from heatwright.structure.bonds import atom_labels, bonds, covalent_radius_A
from heatwright.structure.modes import overall_motion
from heatwright.structure.superposition import matched, superposed

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray

Atoms4 = tuple[int, int, int, int]

MULTIPLE_BOND: Final = 0.91
"""A bond shorter than this times the sum of its covalent radii counts as a multiple one (common practice, no source):
C=C 0.88, C=O 0.85, C=N 0.86, N=N 0.88; the single bonds of esters, acids and amides 0.92 to 0.95."""
OFF_AXIS_A: Final = 0.15
"""An atom nearer to the axis than this (Å) does not turn with it: 8° in a bond of 1.1 Å."""
TOP_RMSD_A: Final = 0.15
"""How well (RMSD, Å) a turned top has to fit on itself; a tilted methyl group leaves 0.05, a pyramidal NH2 0.3."""

MIRROR_RMSD_A: Final = 0.15
"""How well (RMSD, Å) a molecule with its tops turned has to lie on its mirror image."""


@dataclass(frozen=True, slots=True)
class RotatableBond:
    """A bond j–k and what turns about it; all atoms are indices from 0.

    atoms : i, j, k, l, a dihedral angle across the bond.   top, frame : atoms on the side of k and of j, the two of
    the bond left out.   top_symmetry, frame_symmetry : order of each side's rotational symmetry about the bond.
    """

    atoms: Atoms4
    top: tuple[int, ...]
    frame: tuple[int, ...]
    top_symmetry: int
    frame_symmetry: int

    @property
    def bond(self) -> tuple[int, int]:
        """The two atoms of the axis, ascending."""
        j, k = self.atoms[1:3]
        return (min(j, k), max(j, k))

    @property
    def symmetry(self) -> int:
        """Number of equivalent orientations in one turn, the least common multiple of the two sides' symmetries.

        Rotations about the bond that both sides share are in the symmetry number of the rigid molecule already.
        """
        return lcm(self.top_symmetry, self.frame_symmetry)

    @property
    def label(self) -> str:
        """The dihedral angle with atoms counted from 1, ``3-1-2-4``."""
        return "-".join(str(a + 1) for a in self.atoms)


def dihedral_deg(coordinates_A: FloatArray, atoms: Atoms4) -> float:
    """The dihedral angle i-j-k-l in degrees, −180 to 180, positive clockwise looking from j to k (IUPAC).

    >>> x = np.array([[1.0, 0, 0], [0, 0, 0], [0, 0, 1], [0, 1, 1]])
    >>> round(dihedral_deg(x, (0, 1, 2, 3)), 6)
    90.0
    """
    i, j, k, l = coordinates_A[list(atoms)]  # noqa: E741
    axis = (k - j) / np.linalg.norm(k - j)
    first, last = (v - (v @ axis) * axis for v in (i - j, l - k))
    return float(np.degrees(np.arctan2(np.cross(axis, first) @ last, first @ last)))


def side(bonded: NDArray[np.bool_], start: int, away_from: int) -> tuple[int, ...] | None:
    """Atoms reached from *start* without the bond to *away_from*, without *start*; None when the bond is in a ring."""
    reached, edge = {start}, [start]
    while edge:
        here = edge.pop()
        new = {int(a) for a in np.flatnonzero(bonded[here])} - reached
        if here == start:
            new.discard(away_from)
        reached |= new
        edge += new
    return None if away_from in reached else tuple(sorted(reached - {start}))


def neighbours_off_axis(bonded: NDArray[np.bool_], x: FloatArray, centre: int, other: int) -> tuple[int, ...]:
    """Neighbours of *centre* that do not lie on the line through it and *other*."""
    axis = (x[other] - x[centre]) / np.linalg.norm(x[other] - x[centre])
    near = [int(a) for a in np.flatnonzero(bonded[centre]) if a != other]
    return tuple(a for a in near if np.linalg.norm(np.cross(x[a] - x[centre], axis)) > OFF_AXIS_A)


def rotatable_bonds(atomic_numbers: IntArray, masses_u: FloatArray, coordinates_A: FloatArray) -> list[RotatableBond]:
    """Single bonds outside rings with something off the axis on both sides, in the order of their atoms.

    >>> peroxide = np.array([[0.84, 0.9, 0.24], [0.0, 0.73, 0], [0, -0.73, 0], [-0.84, -0.9, 0.24]])
    >>> [b.label for b in rotatable_bonds(np.array([1, 8, 8, 1]), np.array([1.0, 16, 16, 1]), peroxide)]
    ['1-2-3-4']
    """
    bonded = bonds(atomic_numbers, coordinates_A)
    found = []
    for j, k in np.argwhere(np.triu(bonded)).tolist():
        radii = sum(covalent_radius_A(int(atomic_numbers[a])) for a in (j, k))
        ends = neighbours_off_axis(bonded, coordinates_A, j, k), neighbours_off_axis(bonded, coordinates_A, k, j)
        short = np.linalg.norm(coordinates_A[j] - coordinates_A[k]) < MULTIPLE_BOND * radii
        if not short and all(ends) and side(bonded, k, j) is not None:
            atoms = (ends[0][0], j, k, ends[1][0])
            found.append(rotatable_bond(atomic_numbers, masses_u, coordinates_A, atoms))
    return found


def alike_bonds(
    atomic_numbers: IntArray, masses_u: FloatArray, coordinates_A: FloatArray, some: list[RotatableBond]
) -> list[RotatableBond]:
    """Rotatable bonds besides *some* that cannot be told from one of them by bonds and isotopes, as equivalent tops.

    >>> ether = np.array([[0, 1.17, -0.2], [0, 0, 0.59], [0, -1.17, -0.2], [0, 2.02, 0.49], [0.89, 1.22, -0.84],
    ...     [-0.89, 1.22, -0.84], [0, -2.02, 0.49], [0.89, -1.22, -0.84], [-0.89, -1.22, -0.84]])
    >>> z, m = np.array([6, 8, 6, 1, 1, 1, 1, 1, 1]), np.array([12.0, 16, 12, 1, 1, 1, 1, 1, 1])
    >>> [b.bond for b in alike_bonds(z, m, ether, [rotatable_bond(z, m, ether, (3, 0, 1, 2))])]
    [(1, 2)]
    """
    labels = atom_labels(atomic_numbers, bonds(atomic_numbers, coordinates_A), [round(float(m)) for m in masses_u])
    taken = {bond.bond for bond in some}
    wanted = {frozenset(labels[a] for a in axis) for axis in taken}
    return [
        bond
        for bond in rotatable_bonds(atomic_numbers, masses_u, coordinates_A)
        if bond.bond not in taken and frozenset(labels[a] for a in bond.bond) in wanted
    ]


def rotatable_bond(
    atomic_numbers: IntArray, masses_u: FloatArray, coordinates_A: FloatArray, atoms: Atoms4
) -> RotatableBond:
    """The bond j–k of a dihedral angle i-j-k-l with its tops.

    Raises ValueError, as the end of a sentence, when the atoms are not bonded in this order, when the bond is in a
    ring, or when i or l lies on the axis.
    """
    bonded = bonds(atomic_numbers, coordinates_A)
    i, j, k, l = atoms  # noqa: E741
    if len(set(atoms)) < 4 or not (bonded[i, j] and bonded[j, k] and bonded[k, l]):
        raise ValueError("the four atoms are not bonded one to the next")
    top, frame = side(bonded, k, j), side(bonded, j, k)
    if top is None or frame is None:
        raise ValueError("the bond is part of a ring, so nothing can turn about it")
    for end, centre, other in ((i, j, k), (l, k, j)):
        if end not in neighbours_off_axis(bonded, coordinates_A, centre, other):
            raise ValueError(f"atom {end + 1} lies on the axis of the bond, so it has no dihedral angle")
    kinds = [(int(z), round(float(m), 1)) for z, m in zip(atomic_numbers, masses_u, strict=True)]
    orders = [_symmetry(kinds, coordinates_A, part, c, o) for part, c, o in ((top, k, j), (frame, j, k))]
    return RotatableBond(atoms, top, frame, *orders)


def _symmetry(kinds: list[tuple[int, float]], x: FloatArray, part: tuple[int, ...], centre: int, other: int) -> int:
    """The largest n for which a turn by 360°/n about the bond maps a side on itself."""
    axis = (x[centre] - x[other]) / np.linalg.norm(x[centre] - x[other])
    for n in range(6, 1, -1):
        images = x[centre] + (x[list(part)] - x[centre]) @ turn(axis, 2.0 * np.pi / n).T
        distances = np.linalg.norm(images[:, None] - x[list(part)][None], axis=2)
        alike = np.array([[kinds[a] == kinds[b] for b in part] for a in part])
        partner = np.where(alike, distances, np.inf).argmin(axis=1)
        if len(set(partner.tolist())) < len(part) or not alike[np.arange(len(part)), partner].all():
            continue
        order = [part[p] for p in partner]
        if not _is_turn(partner.tolist(), n):
            continue
        if superposed(x[[other, centre, *part]], x[[other, centre, *order]]).rmsd_A <= TOP_RMSD_A:
            return n
    return 1


def _is_turn(partner: list[int], n: int) -> bool:
    """Whether a permutation consists of cycles of n (and of atoms on the axis, which stay)."""
    lengths = set()
    for start in range(len(partner)):
        length, here = 1, partner[start]
        while here != start:
            length, here = length + 1, partner[here]
        lengths.add(length)
    return n in lengths and lengths <= {1, n}


def turn(axis: FloatArray, angle: float) -> FloatArray:
    """(3, 3) rotation about a unit vector by an angle in radians (Rodrigues); positions are columns."""
    cross = np.cross(np.eye(3), axis)
    return np.asarray(np.eye(3) + np.sin(angle) * cross + (1.0 - np.cos(angle)) * cross @ cross)


def turned(coordinates_A: FloatArray, bond: RotatableBond, angle_deg: float) -> FloatArray:
    """The geometry with the top turned rigidly, so that the dihedral angle grows by *angle_deg*."""
    j, k = bond.atoms[1:3]
    axis = (coordinates_A[k] - coordinates_A[j]) / np.linalg.norm(coordinates_A[k] - coordinates_A[j])
    moved, top = coordinates_A.copy(), list(bond.top)
    moved[top] = coordinates_A[k] + (coordinates_A[top] - coordinates_A[k]) @ turn(axis, np.radians(angle_deg)).T
    return moved


def is_mirrored(atomic_numbers: IntArray, coordinates_A: FloatArray, tops: list[RotatableBond]) -> bool:
    """Whether turning each top from its dihedral angle φ to −φ turns the molecule into its mirror image.

    The energy is then the same at φ and −φ: nothing else in the molecule tells left from right.
    """
    x = coordinates_A
    for bond in tops:
        x = turned(x, bond, -2.0 * dihedral_deg(coordinates_A, bond.atoms))
    fit = matched(atomic_numbers, x, atomic_numbers, coordinates_A * [1.0, 1.0, -1.0])
    return fit is not None and fit.rmsd_A <= MIRROR_RMSD_A


def torsion_vectors(masses_u: FloatArray, coordinates_A: FloatArray, tops: list[RotatableBond]) -> FloatArray:
    """(3n, number of tops) mass-weighted displacements per radian, u^½ Å, without overall motion."""
    motion = overall_motion(masses_u, coordinates_A)
    columns = []
    for bond in tops:
        j, k = bond.atoms[1:3]
        axis = (coordinates_A[k] - coordinates_A[j]) / np.linalg.norm(coordinates_A[k] - coordinates_A[j])
        u = np.zeros_like(coordinates_A)
        u[list(bond.top)] = np.cross(axis, coordinates_A[list(bond.top)] - coordinates_A[k])
        column = (np.sqrt(masses_u)[:, None] * u).ravel()
        columns.append(column - motion @ (motion.T @ column))
    return np.array(columns).reshape(-1, coordinates_A.size).T


def reduced_moments(masses_u: FloatArray, coordinates_A: FloatArray, tops: list[RotatableBond]) -> FloatArray:
    """D (number of tops squared), u Å²: reduced moments on the diagonal, couplings off it."""
    vectors = torsion_vectors(masses_u, coordinates_A, tops)
    return np.asarray(vectors.T @ vectors)


def rotational_constant_cm1(moment_u_A2: float) -> float:
    """F = h/(8π²cI) in 1/cm of a reduced moment in u Å².

    >>> round(rotational_constant_cm1(1.576), 2)
    10.7
    """
    return INERTIA_CM1_U_A2 / moment_u_A2
