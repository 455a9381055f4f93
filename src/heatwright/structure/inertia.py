"""Moments of inertia, principal axes and rotational constants; what kind of rotor a molecule is.

Source: G. Herzberg, Infrared and Raman Spectra of Polyatomic Molecules (1945), chapter I (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Final, Literal

import numpy as np
from numpy.typing import ArrayLike

from heatwright.constants import INERTIA_CM1_U_A2

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

RotorKind = Literal[
    "atom", "linear", "spherical top", "prolate symmetric top", "oblate symmetric top", "asymmetric top"
]

LINEAR_TOLERANCE_A: Final = 0.015
"""How far from the best straight line (Å) an atom of a linear molecule may lie.

It lies between what an optimiser or a printed geometry leaves (below 0.003 Å) and a truly bent molecule: a bond angle
of 175° between bonds of 1.1 Å takes the middle atom 0.032 Å off the line, one of 177.5° 0.016 Å."""

TOP_TOLERANCE: Final = 1.0e-3
"""Relative difference below which two principal moments count as equal when a rotor is named."""

CLOSEST_ATOMS_A: Final = 0.1
"""Two atoms nearer than this (Å) cannot be meant; the shortest bond, H2, is seven times as long."""


@dataclass(frozen=True, eq=False)
class Inertia:
    """The rigid rotor that a geometry makes.

    centre_of_mass_A : (3,) in Å, in the frame of the input.
    principal_moments_u_A2 : (3,) in u Å², ascending; an atom has zeros, a linear molecule 0, I, I.
    axes : (3, 3) rows are unit vectors in the order of the moments, right-handed.
    rotational_constants_cm1 : in 1/cm, A >= B >= C; one value for a linear molecule, none for an atom.
    kind : what the rotor is called.
    """

    centre_of_mass_A: FloatArray
    principal_moments_u_A2: FloatArray
    axes: FloatArray
    rotational_constants_cm1: FloatArray
    kind: RotorKind

    @property
    def is_linear(self) -> bool:
        """Whether the rotor is linear, with two rotational degrees of freedom."""
        return self.kind == "linear"

    @property
    def n_rotations(self) -> int:
        """Rotational degrees of freedom: 0 for an atom, 2 for a linear molecule, else 3."""
        return {"atom": 0, "linear": 2}.get(self.kind, 3)


def inertia(
    masses_u: ArrayLike,
    coordinates_A: ArrayLike,
    tolerance_A: float = LINEAR_TOLERANCE_A,
    top_tolerance: float = TOP_TOLERANCE,
) -> Inertia:
    """Principal moments, axes and rotational constants of a rigid molecule.

    masses_u : (n,) in u.  coordinates_A : (n, 3) in Å.
    tolerance_A : the molecule is linear when no atom is farther than this (Å) from the best straight line.
    top_tolerance : relative difference below which two moments are equal; it only names the rotor, every number stays.

    Raises ValueError for wrong shapes, values that are not finite, masses that are not positive, coincident atoms.

    >>> hcl = inertia([1.007825, 34.968853], [[0, 0, 0], [0, 0, 1.27455]])
    >>> hcl.kind, hcl.rotational_constants_cm1.round(3).tolist()  # Huber and Herzberg (1979): 10.593
    ('linear', [10.593])
    """
    m, x = checked_geometry(masses_u, coordinates_A)
    centre = m @ x / m.sum()
    if m.size == 1:
        return Inertia(centre, np.zeros(3), np.eye(3), np.empty(0), "atom")
    r = x - centre
    moments, vectors = np.linalg.eigh(np.einsum("i,ij->", m, r**2) * np.eye(3) - np.einsum("i,ij,ik->jk", m, r, r))
    axes = _right_handed(vectors.T)
    if line_distances(x).max() <= tolerance_A:
        perpendicular = float(moments[1:].mean())
        moments = np.array([0.0, perpendicular, perpendicular])
        return Inertia(centre, moments, axes, INERTIA_CM1_U_A2 / moments[1:2], "linear")
    return Inertia(centre, moments, axes, INERTIA_CM1_U_A2 / moments, _top(moments, top_tolerance))


def stated_rotor(rotational_constants_cm1: tuple[float, ...], top_tolerance: float = TOP_TOLERANCE) -> Inertia:
    """The rotor that has these rotational constants (1/cm): one for a linear molecule, three otherwise, none: an atom.

    There is no frame: the centre of mass is the origin and the axes are those of the frame.
    Raises ValueError for another number of constants or one that is not finite and positive.

    >>> water = stated_rotor((14.5216, 27.8806, 9.2777))
    >>> water.kind, water.rotational_constants_cm1.tolist()
    ('asymmetric top', [27.8806, 14.5216, 9.2777])
    """
    constants = np.sort(np.array(rotational_constants_cm1, dtype=float))[::-1]
    if constants.size not in (0, 1, 3) or not np.all(np.isfinite(constants) & (constants > 0.0)):
        raise ValueError(f"expected one or three positive rotational constants, not {rotational_constants_cm1}")
    if constants.size == 0:
        return Inertia(np.zeros(3), np.zeros(3), np.eye(3), constants, "atom")
    moments = INERTIA_CM1_U_A2 / constants
    if constants.size == 1:
        return Inertia(np.zeros(3), np.array([0.0, *moments, *moments]), np.eye(3), constants, "linear")
    return Inertia(np.zeros(3), moments, np.eye(3), constants, _top(moments, top_tolerance))


def _top(moments: FloatArray, tolerance: float) -> RotorKind:
    first, last = moments[:2], moments[1:]
    first_equal = bool(np.ptp(first) <= tolerance * first[1])
    last_equal = bool(np.ptp(last) <= tolerance * last[1])
    if first_equal and last_equal:
        return "spherical top"
    if last_equal:
        return "prolate symmetric top"
    return "oblate symmetric top" if first_equal else "asymmetric top"


def _right_handed(axes: FloatArray) -> FloatArray:
    """The axes (rows) with a sign that does not depend on the linear-algebra library, the third by the right hand."""
    largest = np.abs(axes).argmax(axis=1)
    signed = axes * np.sign(axes[np.arange(3), largest])[:, None]
    return np.vstack([signed[:2], np.cross(signed[0], signed[1])])


def line_distances(coordinates_A: FloatArray) -> FloatArray:
    """Distance of each atom (Å) from the straight line that fits all of them best (least squares, not mass-weighted).

    Masses are left out on purpose: whether atoms are on a line is a matter of places, and a heavy atom would draw the
    line to itself and hide that it is off it.
    """
    r = coordinates_A - coordinates_A.mean(axis=0)
    axis = np.linalg.svd(r, full_matrices=False)[2][0]
    return np.asarray(np.linalg.norm(r - np.outer(r @ axis, axis), axis=1))


def checked_geometry(masses_u: ArrayLike, coordinates_A: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Masses (n,) and coordinates (n, 3) as arrays; raises ValueError, in a sentence, when they are no molecule."""
    m, x = np.asarray(masses_u, dtype=float), np.asarray(coordinates_A, dtype=float)
    if m.ndim != 1 or m.size == 0 or x.shape != (m.size, 3):
        raise ValueError(f"expected n masses and n × 3 coordinates with n > 0, found shapes {m.shape} and {x.shape}")
    for number, (mass, place) in enumerate(zip(m, x, strict=True), start=1):
        if not np.isfinite(place).all():
            raise ValueError(f"atom {number} has the coordinates {place.tolist()} Å, which are not all finite")
        if not (np.isfinite(mass) and mass > 0.0):
            raise ValueError(f"atom {number} has the mass {mass} u; a mass is finite and positive")
    _refuse_coincident(x)
    return m, x


def _refuse_coincident(x: FloatArray) -> None:
    distance = np.linalg.norm(x[:, None] - x[None], axis=2)
    np.fill_diagonal(distance, np.inf)
    i, j = np.unravel_index(distance.argmin(), distance.shape)
    if distance[i, j] < CLOSEST_ATOMS_A:
        raise ValueError(
            f"atoms {min(i, j) + 1} and {max(i, j) + 1} are {distance[i, j]:.3g} Å apart; "
            f"atoms of one molecule are at least {CLOSEST_ATOMS_A} Å from each other"
        )
