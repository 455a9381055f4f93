"""Residuals, joint and physics of a polynomial, on polynomials with known faults."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright.polynomial.fit import fit_nasa7
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.polynomial.quality import fit_quality, jumps_at_common, quality_grid
from polynomial.harmonic import tabulated

FLAT = (3.0, 0.0, 0.0, 0.0, 0.0, 100.0, 5.0)


def flat(low=FLAT, high=FLAT):
    return Nasa7(200.0, 1000.0, 6000.0, low, high)


def against_itself(p, bound=0.0, **more):
    return fit_quality(p, p.cp_R, p.h_RT, p.s_R, bound, **more)


def test_grid_shows_ends_and_both_sides_of_the_joint():
    T = quality_grid(flat())
    assert np.all(np.diff(T) > 0)
    assert (T[0], T[-1]) == (200.0, 6000.0)
    joint = int(np.flatnonzero(T == 1000.0)[0])
    assert T[joint + 1] == np.nextafter(1000.0, 2000.0)
    assert T.size >= 350
    # Uniform in T and in ln T: no gap wider than one step of the first.
    assert np.diff(T[:joint]).max() <= 800.0 / 99 + 1e-9
    assert np.diff(T[joint + 1 :]).max() <= 5000.0 / 99 + 1e-9


def test_jumps_are_high_minus_low():
    p = flat(high=(3.1, 2e-4, 0.0, 0.0, 0.0, 90.0, 5.5))
    jumps = jumps_at_common(p)
    assert jumps.cp_R == pytest.approx(0.1 + 0.2, rel=1e-12)
    assert jumps.dcp_R_K == pytest.approx(2e-4, rel=1e-12)
    assert jumps.h_R_K == pytest.approx(0.1 * 1000 + 2e-4 * 1e6 / 2 - 10.0, rel=1e-12)
    assert jumps.s_R == pytest.approx(0.1 * np.log(1000) + 0.2 + 0.5, rel=1e-12)


def test_deviations_and_where_they_are():
    quality = fit_quality(
        flat(),
        lambda T: 3.0 + np.where(T == 1000.0, 0.5, 0.0),
        lambda T: 3.0 + 100.0 / T + np.where(T == 200.0, -0.25, 0.0),
        lambda T: 3.0 * np.log(T) + 5.0 + np.where(T > 5999.0, 0.125, 0.0),
        0.4,
    )
    assert (quality.dcp_R.largest, quality.dcp_R.at_K) == (0.5, 1000.0)
    assert (quality.dh_RT.largest, quality.dh_RT.at_K) == (pytest.approx(0.25, rel=1e-12), 200.0)
    assert (quality.ds_R.largest, quality.ds_R.at_K) == (pytest.approx(0.125, rel=1e-12), 6000.0)
    assert quality.ratio == pytest.approx(1.25, rel=1e-12)
    assert [(f.severity, f.code) for f in quality.findings()] == [("warn", "fit-not-closest"), ("warn", "fit-coarse")]


def test_a_heat_capacity_that_no_two_quartics_can_follow_is_pointed_out():
    def bump(T):  # as of an electronic level that is filled within a few kelvin
        return 3.5 + 6.0 * np.exp(-(((T - 1500.0) / 60.0) ** 2))

    fit = fit_nasa7(bump, 0.0, 20.0)
    quality = fit_quality(fit.polynomial, bump, lambda T: fit.polynomial.h_RT(T), fit.polynomial.s_R, fit.minimax_dCp_R)
    (finding,) = quality.findings()
    assert (finding.severity, finding.code) == ("warn", "fit-coarse")
    assert 1.0 < quality.dcp_R.largest < 6.0


def test_a_fault_on_one_side_of_the_joint_only_is_seen():
    p = flat(high=(3.001, *FLAT[1:]))
    quality = fit_quality(p, lambda T: np.full_like(T, 3.0), flat().h_RT, flat().s_R, 1e-3)
    assert quality.dcp_R.largest == pytest.approx(1e-3, rel=1e-9)
    assert quality.dcp_R.at_K == pytest.approx(1000.0)
    assert quality.dcp_R.at_K > 1000.0


def test_a_heat_capacity_that_is_not_positive_is_refused():
    sinking = flat(high=(4.0, -1e-3, 0.0, 0.0, 0.0, 100.0, 5.0))
    (finding,) = against_itself(sinking).findings()
    assert (finding.severity, finding.code) == ("refuse", "cp-not-positive")
    assert "-2 at 6000 K" in finding.text


def test_a_heat_capacity_above_the_classical_limit_is_pointed_out():
    quality = against_itself(flat(), classical_limit_R=2.9)
    assert quality.exceeds_classical_limit
    (finding,) = quality.findings()
    assert (finding.severity, finding.code) == ("warn", "cp-above-classical")
    assert not against_itself(flat(), classical_limit_R=3.0).exceeds_classical_limit
    assert not against_itself(flat()).exceeds_classical_limit


def test_the_fit_error_is_allowed_above_the_classical_limit():
    for species in tabulated():
        if not species.has_levels:
            fit = fit_nasa7(species.cp_R, species.h298, species.s298)
            limit = species.classical + len(species.modes)
            functions = (species.cp_R, species.h_RT, species.s_R)
            assert fit_quality(fit.polynomial, *functions, fit.minimax_dCp_R, classical_limit_R=limit).findings() == ()


def test_rounding_alone_is_no_distance_from_the_best_fit():
    assert against_itself(flat()).ratio == 1.0
    worse = fit_quality(flat(), lambda T: np.full_like(T, 3.1), flat().h_RT, flat().s_R, 0.0)
    assert worse.ratio == np.inf


def test_values_on_the_grid_serve_as_well_as_functions():
    methane = next(s for s in tabulated() if s.name == "CH4")
    fit = fit_nasa7(methane.cp_R, methane.h298, methane.s298)
    functions = (methane.cp_R, methane.h_RT, methane.s_R)
    T = quality_grid(fit.polynomial)
    values = tuple(function(T) for function in functions)
    assert fit_quality(fit.polynomial, *values, 0.1) == fit_quality(fit.polynomial, *functions, 0.1)
    with pytest.raises(ValueError, match="shape"):
        fit_quality(fit.polynomial, values[0][1:], values[1], values[2], 0.1)
