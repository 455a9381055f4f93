"""Vibrations without the torsions: the torsional displacements are projected out of the force constants.

Source: the projection follows W. H. Miller, N. C. Handy, J. E. Adams, J. Chem. Phys. 72, 99 (1980) (from memory),
with the internal rotation in the place of a reaction path.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from heatwright.structure.modes import SQUARE_CM2, overall_motion

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray


def without_torsions(
    hessian_hartree_bohr2: FloatArray,
    masses_u: FloatArray,
    coordinates_A: FloatArray,
    vectors: FloatArray,
    alike: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Wavenumbers of what is left, and how much of each torsion its molecule's best modes are.

    vectors : (3n, t) mass-weighted torsional displacements without overall motion, of any length.
    alike : (3n, s) those of equivalent torsions that are not taken out; the modes mix them with the others.
    Returns wavenumbers (m − t,), ascending, imaginary ones negative, and overlaps (t,): the squared length of each
    normalised torsion in the span of the t + s full modes that lie in all these torsions most.
    """
    weights = np.repeat(1.0 / np.sqrt(masses_u), 3)
    K = (hessian_hartree_bohr2 + hessian_hartree_bohr2.T) / 2.0 * np.outer(weights, weights)
    motion = overall_motion(masses_u, coordinates_A)
    torsions = np.linalg.qr(vectors)[0]
    modes = _eigen(K, motion)[1]
    mixed = np.linalg.qr(np.hstack([vectors, alike]))[0]
    best = np.argsort(((modes.T @ mixed) ** 2).sum(axis=1))[-mixed.shape[1] :]
    unit = vectors / np.linalg.norm(vectors, axis=0)
    overlaps = ((modes[:, best].T @ unit) ** 2).sum(axis=0)
    eigenvalues = _eigen(K, np.hstack([motion, torsions]))[0]
    return np.sign(eigenvalues) * np.sqrt(np.abs(eigenvalues) * SQUARE_CM2), overlaps


def _eigen(K: FloatArray, without: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Eigenvalues and vectors of K outside the span of orthonormal columns."""
    rest = np.linalg.svd(without, full_matrices=True)[0][:, without.shape[1] :]
    values, vectors = np.linalg.eigh(rest.T @ K @ rest)
    return values, rest @ vectors
