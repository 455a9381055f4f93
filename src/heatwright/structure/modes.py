"""Normal modes from force constants, and force constants from normal modes; translations and rotations projected out.

Source: E. B. Wilson, J. C. Decius, P. C. Cross, Molecular Vibrations (1955), chapter 2 (from memory).  Overall motion
is removed at first order: displacements along and rotations about the axes, which is exact at a stationary point.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import ATOMIC_MASS_KG, BOHR_M, HARTREE_J, LIGHT_SPEED_M_S
from heatwright.structure.inertia import LINEAR_TOLERANCE_A, line_distances

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

SQUARE_CM2: Final = HARTREE_J / (BOHR_M**2 * ATOMIC_MASS_KG) / (2.0 * np.pi * LIGHT_SPEED_M_S * 100.0) ** 2
"""The square of the wavenumber (1/cm²) that a mass-weighted force constant of 1 hartree/bohr²/u stands for."""


def overall_motion(masses_u: FloatArray, coordinates_A: FloatArray) -> FloatArray:
    """Orthonormal mass-weighted vectors of overall motion: 3 for an atom, 5 for a linear molecule, else 6.

    masses_u : (n,).  coordinates_A : (n, 3).  Returns (3n, 3, 5 or 6).
    """
    n = masses_u.size
    root = np.sqrt(masses_u)
    r = coordinates_A - masses_u @ coordinates_A / masses_u.sum()
    shifts = [np.outer(root, axis).ravel() for axis in np.eye(3)]
    turns = [(root[:, None] * np.cross(axis, r)).ravel() for axis in np.eye(3)]
    rank = 3 if n == 1 else 5 if line_distances(coordinates_A).max() <= LINEAR_TOLERANCE_A else 6
    left = np.linalg.svd(np.array(shifts + turns).T, full_matrices=False)[0]
    return np.asarray(left[:, :rank])


def projected_modes(
    hessian_hartree_bohr2: FloatArray, masses_u: FloatArray, coordinates_A: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Wavenumbers and Cartesian displacements of the vibrations that a Hessian gives with these masses.

    hessian_hartree_bohr2 : (3n, 3n).  masses_u : (n,).  coordinates_A : (n, 3), in the frame of the Hessian.
    Returns wavenumbers (m,) in 1/cm, ascending, imaginary ones negative, and displacements (m, n, 3), each of norm 1
    and not mass-weighted; m is 3n − 6, 3n − 5 for a linear molecule, 0 for an atom.

    >>> stretch = np.zeros((6, 6))
    >>> stretch[np.ix_([2, 5], [2, 5])] = 0.3314 * np.array([[1, -1], [-1, 1]])  # HCl, 516 N/m
    >>> hcl = np.array([1.007825, 34.968853]), np.array([[0.0, 0, 0], [0, 0, 1.2746]])
    >>> round(float(projected_modes(stretch, *hcl)[0][0]))  # Huber and Herzberg (1979): 2990.9
    2990
    """
    weights = np.repeat(1.0 / np.sqrt(masses_u), 3)
    symmetric = (hessian_hartree_bohr2 + hessian_hartree_bohr2.T) / 2.0
    K = symmetric * np.outer(weights, weights)
    motion = overall_motion(masses_u, coordinates_A)
    rest = np.linalg.svd(motion, full_matrices=True)[0][:, motion.shape[1] :]
    eigenvalues, vectors = np.linalg.eigh(rest.T @ K @ rest)
    wavenumbers = np.sign(eigenvalues) * np.sqrt(np.abs(eigenvalues) * SQUARE_CM2)
    displacements = ((rest @ vectors) * weights[:, None]).T.reshape(-1, masses_u.size, 3)
    return wavenumbers, unit_displacements(displacements)


def unit_displacements(displacements: FloatArray) -> FloatArray:
    """Displacements (m, n, 3) scaled so that each mode has norm 1; a mode of zeros stays."""
    norms = np.linalg.norm(displacements, axis=(1, 2), keepdims=True)
    scaled: FloatArray = np.divide(displacements, norms, out=np.array(displacements, dtype=float), where=norms > 0.0)
    return scaled


def orthonormal_modes(
    displacements: FloatArray, masses_u: FloatArray, coordinates_A: FloatArray
) -> tuple[FloatArray, float]:
    """Mass-weighted modes (m, 3n), orthonormal, nearest to printed Cartesian displacements; and how near those were.

    L = √m × displacement, of norm 1, without overall motion, then L S^(−1/2) with S the overlaps (symmetric
    orthonormalisation).  The second value is the largest deviation of S from the unit matrix.
    Source: P.-O. Löwdin, J. Chem. Phys. 18, 365 (1950).
    """
    L = (displacements * np.sqrt(masses_u)[None, :, None]).reshape(len(displacements), -1)
    L = L / np.linalg.norm(L, axis=1, keepdims=True)
    motion = overall_motion(masses_u, coordinates_A)
    L = L - (L @ motion) @ motion.T
    S = L @ L.T
    worst = float(np.abs(S - np.eye(len(S))).max(initial=0.0))
    values, vectors = np.linalg.eigh(S)
    if not values.size or values[0] <= 1.0e-6:
        return L, np.inf
    return (vectors / np.sqrt(values)) @ vectors.T @ L, worst


def rebuilt_hessian(
    wavenumbers_cm1: FloatArray, displacements: FloatArray, masses_u: FloatArray, coordinates_A: FloatArray
) -> tuple[FloatArray, float]:
    """The Cartesian Hessian (hartree/bohr²) that has these modes: K = Σ sign(f) f² L Lᵀ, mass weights taken off.

    wavenumbers_cm1 : (m,), imaginary ones negative.  displacements : (m, n, 3), Cartesian.
    Also returns how far the displacements were from orthonormal; some 0.03 when they are printed with two decimals.
    """
    L, deviation = orthonormal_modes(displacements, masses_u, coordinates_A)
    K = (L.T * (np.sign(wavenumbers_cm1) * wavenumbers_cm1**2 / SQUARE_CM2)) @ L
    weights = np.repeat(np.sqrt(masses_u), 3)
    return K * np.outer(weights, weights), deviation


def turned_hessian(hessian_hartree_bohr2: FloatArray, rotation: FloatArray) -> FloatArray:
    """The Hessian in a frame in which each position x becomes x @ rotation (3, 3)."""
    n = len(hessian_hartree_bohr2) // 3
    blocks = hessian_hartree_bohr2.reshape(n, 3, n, 3)
    return np.asarray(np.einsum("iajb,ac,bd->icjd", blocks, rotation, rotation).reshape(3 * n, 3 * n))
