"""The error of a level of theory in a calculated enthalpy of formation: what it scales with, and how large it is.

For species i with the bond counts n_i (by bond type), U_i unpaired electrons and the charge z_i, the error e_i of the
enthalpy of formation by atomization is taken as normally distributed about zero with

    cov(e_i, e_j) = s_bond² Σ_t n_it n_jt + s_spin² U_i U_j + s_charge² z_i z_j + δ_ij s_own² (N_i + ½)

and N_i = Σ_t n_it.  The first three parts are what species share through their bonds, their unpaired electrons and
their charge, the last what each has alone.  All that heatwright says about the uncertainty of atomization, of a
balanced reaction and of the network of all references follows from this one covariance, so that the routes can be
compared.  Generalised least squares with such a covariance is the Gaussian process regression of the textbooks (C. E.
Rasmussen, C. K. I. Williams, Gaussian Processes for Machine Learning, MIT Press 2006, ch. 2 and 5, from memory).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray
    from heatwright.structure.bond_orders import Bonding

FEWEST_REFERENCES: Final = 6
"""So many references are needed before the scales are fitted to them; fewer say too little about three numbers."""


@dataclass(frozen=True, slots=True)
class ErrorScales:
    """Standard deviations in kJ/mol: own error (times √(bonds + ½)), for each bond, unpaired electron and charge.

    fitted : whether the first three were fitted to references, or are the defaults.
    """

    own_kJ_mol: float
    bond_kJ_mol: float
    spin_kJ_mol: float
    charge_kJ_mol: float = 20.0
    fitted: bool = False


DEFAULT_SCALES: Final = ErrorScales(3.0, 14.0, 5.0)
"""What fits the errors of B3LYP/6-31G* for 47 small molecules and radicals (tests/benchmarks/formation.py), rounded.

The scale of a charge is never fitted, as few references are ions: density functionals miss ionisation energies by some
0.2 eV (common practice, no source)."""
_SPREAD: Final = 1.0
"""Standard deviation of the natural logarithm of each scale about its default before any reference is seen."""


@dataclass(frozen=True, eq=False)
class Features:
    """What the errors of several species scale with.

    counts : (n, t) bonds of each type.   unpaired : (n,) unpaired electrons.   labels : the t bond types.
    charge : (n,) charges, none where not given.
    """

    counts: FloatArray
    unpaired: FloatArray
    labels: tuple[str, ...]
    charge: FloatArray | None = None

    @property
    def charges(self) -> FloatArray:
        """(n,) charges."""
        return np.zeros(self.unpaired.size) if self.charge is None else self.charge

    @property
    def n_bonds(self) -> FloatArray:
        """(n,) bonds of all types."""
        total: FloatArray = self.counts.sum(axis=1)
        return total


def features(species: Sequence[Bonding], labels: Sequence[str] | None = None) -> Features:
    """The features of several species; *labels* (all bond types that occur, when not given) names the columns.

    A bond type that is not among the labels would be lost, so it is a ValueError.
    """
    found = sorted({label for bonding in species for label in bonding.types})
    columns = tuple(found if labels is None else labels)
    if set(found) - set(columns):
        raise ValueError(f"bond types without a column: {sorted(set(found) - set(columns))}")
    counts = [[float(bonding.types.get(label, 0)) for label in columns] for bonding in species]
    unpaired = np.array([float(bonding.unpaired) for bonding in species])
    charge = np.array([float(bonding.charge) for bonding in species])
    return Features(np.array(counts, dtype=float).reshape(len(species), len(columns)), unpaired, columns, charge)


def shared_covariance(a: Features, b: Features, scales: ErrorScales) -> FloatArray:
    """(n, m) covariance that the species of *a* and *b* share, (kJ/mol)²."""
    shared: FloatArray = scales.bond_kJ_mol**2 * (a.counts @ b.counts.T)
    shared += scales.spin_kJ_mol**2 * np.outer(a.unpaired, b.unpaired)
    shared += scales.charge_kJ_mol**2 * np.outer(a.charges, b.charges)
    return shared


def own_variance(a: Features, scales: ErrorScales) -> FloatArray:
    """(n,) variance that each species has alone, (kJ/mol)²."""
    variance: FloatArray = scales.own_kJ_mol**2 * (a.n_bonds + 0.5)
    return variance


def covariance(a: Features, uncertainty_kJ_mol: FloatArray, scales: ErrorScales) -> FloatArray:
    """(n, n) covariance of calculated minus evaluated enthalpies, (kJ/mol)².

    uncertainty_kJ_mol : (n,) standard uncertainties of the evaluated enthalpies.
    """
    alone = own_variance(a, scales) + uncertainty_kJ_mol**2
    total: FloatArray = shared_covariance(a, a, scales) + np.diag(alone)
    return total


def negative_log_posterior(
    log_scales: FloatArray, errors_kJ_mol: FloatArray, a: Features, uncertainty_kJ_mol: FloatArray
) -> float:
    """−ln p of the logarithms of the three scales, up to a constant: marginal likelihood and the prior about the
    defaults."""
    own, bond, spin = (float(x) for x in np.exp(log_scales))
    scales = ErrorScales(own, bond, spin)
    lower = np.linalg.cholesky(covariance(a, uncertainty_kJ_mol, scales))
    whitened = np.linalg.solve(lower, errors_kJ_mol)
    prior = (log_scales - _defaults()) / _SPREAD
    return float(whitened @ whitened / 2.0 + np.log(np.diag(lower)).sum() + prior @ prior / 2.0)


def _defaults() -> FloatArray:
    return np.log([DEFAULT_SCALES.own_kJ_mol, DEFAULT_SCALES.bond_kJ_mol, DEFAULT_SCALES.spin_kJ_mol])


def fit_scales(errors_kJ_mol: FloatArray, a: Features, uncertainty_kJ_mol: FloatArray) -> ErrorScales:
    """The most probable scales for the errors (calculated minus evaluated) of reference species.

    Raises ValueError with fewer than FEWEST_REFERENCES of them.
    """
    if errors_kJ_mol.size < FEWEST_REFERENCES:
        raise ValueError(f"{errors_kJ_mol.size} references cannot determine the scales of the error model")
    from scipy.optimize import minimize

    found = minimize(
        negative_log_posterior,
        _defaults(),
        args=(errors_kJ_mol, a, uncertainty_kJ_mol),
        method="Nelder-Mead",
        options={"xatol": 1e-4, "fatol": 1e-6, "maxiter": 2000},
    )
    own, bond, spin = (float(x) for x in np.exp(found.x))
    return ErrorScales(own, bond, spin, fitted=True)
