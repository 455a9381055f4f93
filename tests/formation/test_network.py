"""The error model and the network: against the same inference written another way, and against simulated errors."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright.formation.error_model import (
    DEFAULT_SCALES,
    ErrorScales,
    Features,
    covariance,
    features,
    fit_scales,
    negative_log_posterior,
    own_variance,
    shared_covariance,
)
from heatwright.formation.network import corrections, leave_one_out

SCALES = ErrorScales(3.0, 9.0, 5.0)


def random_features(n: int, seed: int, types: int = 5) -> Features:
    rng = np.random.default_rng(seed)
    counts = rng.integers(0, 4, (n, types)).astype(float)
    return Features(counts, rng.integers(0, 3, n).astype(float), tuple(f"t{i}" for i in range(types)))


def test_the_covariance_is_that_of_its_parts() -> None:
    """Draws of one error a bond type, one an unpaired electron and one a species have this covariance."""
    f = random_features(4, 1)
    rng = np.random.default_rng(2)
    draws = 400_000
    bond = rng.normal(0.0, SCALES.bond_kJ_mol, (draws, 5)) @ f.counts.T
    spin = rng.normal(0.0, SCALES.spin_kJ_mol, (draws, 1)) @ f.unpaired[None, :]
    own = rng.normal(0.0, 1.0, (draws, 4)) * SCALES.own_kJ_mol * np.sqrt(f.counts.sum(axis=1) + 0.5)
    sampled = np.cov((bond + spin + own).T)
    expected = covariance(f, np.zeros(4), SCALES)
    assert sampled == pytest.approx(expected, rel=0.02, abs=0.01 * expected.max())


@pytest.mark.parametrize("seed", range(5))
def test_the_network_is_the_regression_on_bond_errors(seed: int) -> None:
    """The same posterior in the other form: parameters (errors of bonds and spins) with normal priors, then the target.

    Bayesian linear regression, Rasmussen and Williams (2006) eq. 2.8 and 2.9, against the kernel form 2.25 and 2.26
    (from memory).
    """
    known, targets = random_features(20, seed), random_features(6, seed + 100)
    rng = np.random.default_rng(seed)
    error, u = rng.normal(0.0, 20.0, 20), rng.uniform(0.0, 1.0, 20)
    made = corrections(targets, known, error, u, SCALES)

    design = np.hstack([known.counts, known.unpaired[:, None]])
    prior = np.diag([SCALES.bond_kJ_mol**-2] * 5 + [SCALES.spin_kJ_mol**-2])
    noise = SCALES.own_kJ_mol**2 * (known.counts.sum(axis=1) + 0.5) + u**2
    precision = design.T @ (design / noise[:, None]) + prior
    mean = np.linalg.solve(precision, design.T @ (error / noise))
    new = np.hstack([targets.counts, targets.unpaired[:, None]])
    variance = np.einsum("ij,ji->i", new, np.linalg.solve(precision, new.T)) + own_variance(targets, SCALES)
    assert made.error_kJ_mol == pytest.approx(new @ mean, rel=1e-9, abs=1e-9)
    assert made.sd_kJ_mol == pytest.approx(np.sqrt(variance), rel=1e-9)
    assert made.weights @ error == pytest.approx(made.error_kJ_mol, rel=1e-12)


def test_left_out_is_what_the_others_say() -> None:
    known = random_features(12, 3)
    rng = np.random.default_rng(4)
    error, u = rng.normal(0.0, 15.0, 12), rng.uniform(0.0, 1.0, 12)
    left = leave_one_out(known, error, u, SCALES)
    for i in range(12):
        keep = np.arange(12) != i
        one = Features(known.counts[i : i + 1], known.unpaired[i : i + 1], known.labels)
        rest = Features(known.counts[keep], known.unpaired[keep], known.labels)
        made = corrections(one, rest, error[keep], u[keep], SCALES)
        assert left.residual_kJ_mol[i] == pytest.approx(error[i] - made.error_kJ_mol[0], rel=1e-9, abs=1e-9)
        # the reference's own value is uncertain too, which its prediction does not know
        assert left.sd_kJ_mol[i] == pytest.approx(float(np.hypot(made.sd_kJ_mol[0], u[i])), rel=1e-9)
    assert left.rms_kJ_mol == pytest.approx(float(np.sqrt(np.mean(left.residual_kJ_mol**2))))
    assert left.z_rms == pytest.approx(float(np.sqrt(np.mean((left.residual_kJ_mol / left.sd_kJ_mol) ** 2))))


def test_without_a_reference_for_its_bonds_a_target_keeps_the_whole_uncertainty() -> None:
    known = Features(np.array([[3.0, 0.0], [2.0, 0.0]]), np.zeros(2), ("C-H", "F-N"))
    target = Features(np.array([[0.0, 2.0]]), np.zeros(1), ("C-H", "F-N"))
    made = corrections(target, known, np.array([5.0, 4.0]), np.zeros(2), SCALES)
    assert made.error_kJ_mol[0] == pytest.approx(0.0, abs=1e-12)
    assert made.sd_kJ_mol[0] == pytest.approx(np.sqrt((2 * 9.0) ** 2 + 3.0**2 * 2.5))


def test_the_fitted_scales_are_the_most_probable_ones() -> None:
    f = random_features(40, 7)
    rng = np.random.default_rng(8)
    truth = ErrorScales(2.0, 15.0, 8.0)
    error = np.linalg.cholesky(covariance(f, np.zeros(40), truth)) @ rng.normal(size=40)
    found = fit_scales(error, f, np.zeros(40))
    at = np.log([found.own_kJ_mol, found.bond_kJ_mol, found.spin_kJ_mol])
    here = negative_log_posterior(at, error, f, np.zeros(40))
    for step in 0.02 * np.vstack([np.eye(3), -np.eye(3)]):
        assert negative_log_posterior(at + step, error, f, np.zeros(40)) > here
    assert found.fitted
    assert 1.0 < found.own_kJ_mol < 4.0  # 40 errors determine a scale to some 20 %
    assert 7.0 < found.bond_kJ_mol < 30.0


def test_the_posterior_against_the_normal_density() -> None:
    """Up to a constant −ln p is that of the multivariate normal of scipy and of three normal priors."""
    from scipy.stats import multivariate_normal, norm

    f = random_features(9, 11)
    error = np.random.default_rng(12).normal(0.0, 10.0, 9)
    values = []
    for logs in (np.log([3.0, 9.0, 5.0]), np.log([6.0, 4.0, 2.0])):
        cov = covariance(f, np.full(9, 0.3), ErrorScales(*np.exp(logs).tolist()))
        expected = -multivariate_normal(np.zeros(9), cov).logpdf(error)
        defaults = np.log([DEFAULT_SCALES.own_kJ_mol, DEFAULT_SCALES.bond_kJ_mol, DEFAULT_SCALES.spin_kJ_mol])
        expected -= norm(defaults, 1.0).logpdf(logs).sum()
        values.append((negative_log_posterior(logs, error, f, np.full(9, 0.3)), expected))
    assert values[0][0] - values[1][0] == pytest.approx(values[0][1] - values[1][1], rel=1e-9)


def test_too_few_references_determine_nothing() -> None:
    with pytest.raises(ValueError, match="cannot determine"):
        fit_scales(np.zeros(5), random_features(5, 1), np.zeros(5))


def test_a_bond_type_without_a_column_is_not_lost() -> None:
    from heatwright.structure.bond_orders import bonding
    from molecules import water

    with pytest.raises(ValueError, match="H-O"):
        features([bonding(water())], ["C-H"])
    made = features([bonding(water())])
    assert made.labels == ("H-O",)
    assert made.counts.tolist() == [[2.0]]
    assert shared_covariance(made, made, SCALES).tolist() == [[4 * 81.0]]
    ion = Features(made.counts, made.unpaired, made.labels, np.array([1.0]))
    assert shared_covariance(ion, ion, SCALES)[0, 0] == 4 * 81.0 + SCALES.charge_kJ_mol**2
    assert shared_covariance(ion, made, SCALES)[0, 0] == 4 * 81.0
    alone = corrections(ion, made, np.array([4.0]), np.zeros(1), SCALES).sd_kJ_mol[0]
    assert alone > corrections(made, made, np.array([4.0]), np.zeros(1), SCALES).sd_kJ_mol[0]
