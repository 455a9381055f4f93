"""The error of a level of theory, learnt from all references at once and taken off a target's calculated enthalpy.

Generalised least squares (formulae: error_model): with the errors e of the references, their covariance C and the
covariance k between target and references,

    correction = kᵀ C⁻¹ e,     variance = k_tt − kᵀ C⁻¹ k + own variance of the target

It does at once what the balanced reactions of the target with the references would do one by one, and its variance
grows where no reference has the target's bonds.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from heatwright.formation.error_model import ErrorScales, Features, covariance, own_variance, shared_covariance

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray


@dataclass(frozen=True, eq=False)
class Corrections:
    """What the references say of the errors of m targets.

    error_kJ_mol : (m,) expected error of each calculated enthalpy, to be taken off.
    sd_kJ_mol : (m,) standard deviation that is left.
    weights : (m, n) share of each reference's error in the expected one.
    """

    error_kJ_mol: FloatArray
    sd_kJ_mol: FloatArray
    weights: FloatArray


def corrections(
    targets: Features,
    references: Features,
    errors_kJ_mol: FloatArray,
    uncertainty_kJ_mol: FloatArray,
    scales: ErrorScales,
) -> Corrections:
    """The expected errors of the targets from those of the references (the labels of both are the same).

    errors_kJ_mol, uncertainty_kJ_mol : (n,) calculated minus evaluated enthalpies, and the standard uncertainties of
        the latter.
    """
    k = shared_covariance(targets, references, scales)
    weights: FloatArray = (np.linalg.inv(covariance(references, uncertainty_kJ_mol, scales)) @ k.T).T
    bonds = scales.bond_kJ_mol**2 * (targets.counts**2).sum(axis=1)
    spins, charges = scales.spin_kJ_mol * targets.unpaired, scales.charge_kJ_mol * targets.charges
    prior = bonds + spins**2 + charges**2 + own_variance(targets, scales)
    sd: FloatArray = np.sqrt(prior - (weights * k).sum(axis=1))
    return Corrections(weights @ errors_kJ_mol, sd, weights)


@dataclass(frozen=True, eq=False)
class LeftOut:
    """Each reference predicted from all the others.

    residual_kJ_mol : (n,) error that is left after the correction.   sd_kJ_mol : (n,) standard deviation stated for it.
    """

    residual_kJ_mol: FloatArray
    sd_kJ_mol: FloatArray

    @property
    def rms_kJ_mol(self) -> float:
        """Root mean square of the residuals."""
        return float(np.sqrt(np.mean(self.residual_kJ_mol**2)))

    @property
    def z(self) -> FloatArray:
        """(n,) residuals in units of their standard deviations."""
        z: FloatArray = self.residual_kJ_mol / self.sd_kJ_mol
        return z

    @property
    def z_rms(self) -> float:
        """Root mean square of the z-scores; near 1 when the stated deviations are honest."""
        return float(np.sqrt(np.mean(self.z**2)))


def leave_one_out(
    references: Features, errors_kJ_mol: FloatArray, uncertainty_kJ_mol: FloatArray, scales: ErrorScales
) -> LeftOut:
    """Every reference predicted from the others with the same scales, by the formula that needs one inverse only.

    Source: Rasmussen and Williams, Gaussian Processes for Machine Learning (2006), eq. 5.12 (from memory).
    """
    inverse = np.linalg.inv(covariance(references, uncertainty_kJ_mol, scales))
    diagonal = np.diag(inverse)
    return LeftOut((inverse @ errors_kJ_mol) / diagonal, np.sqrt(1.0 / diagonal))
