"""The search for the common temperature against a plain scan in steps of 25 K."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright.polynomial.common_temperature import search_interval
from heatwright.polynomial.fit import fit_nasa7
from polynomial.harmonic import everything, tabulated

RANGES = [(200.0, 6000.0), (298.15, 3000.0), (300.0, 5000.0)]
SCANNED = ("HCl", "CO", "OH", "CH4", "SO3", "C2H4O_oxirane")


def error_at(species, low, common, high):
    return fit_nasa7(species.cp_R, 0.0, 0.0, t_low_K=low, t_common_K=common, t_high_K=high).max_dCp_R


@pytest.mark.parametrize(("low", "high"), RANGES)
def test_within_four_percent_of_a_scan(low, high):
    first, last = search_interval(low, high)
    for species in (s for s in tabulated() if s.name in SCANNED):
        scan = min(error_at(species, low, t, high) for t in np.arange(first, last + 1.0, 25.0))
        assert error_at(species, low, "auto", high) <= 1.04 * scan, species.name


@pytest.mark.parametrize(("low", "high"), RANGES)
def test_never_worse_than_1000_K(low, high):
    for species in everything():
        assert error_at(species, low, "auto", high) <= error_at(species, low, 1000.0, high), species.name


def test_a_diatomic_gains_a_lot():
    """Up to a factor of four in the error, the reason for having the search (own calculation)."""
    gains = [error_at(s, 200.0, 1000.0, 6000.0) / error_at(s, 200.0, "auto", 6000.0) for s in tabulated() if s.modes]
    assert max(gains) > 3.5
    assert np.median(gains) > 1.1


@pytest.mark.parametrize(("low", "high"), [(300, 501), (100, 500), (1, 700), (298.15, 20000), (200, 400), (250, 1100)])
def test_every_possible_range_has_one(low, high):
    water = next(s for s in tabulated() if s.name == "H2O")
    p = fit_nasa7(water.cp_R, 0.0, 0.0, t_low_K=low, t_common_K="auto", t_high_K=high).polynomial
    assert p.t_common_K == round(p.t_common_K)
    assert max(low + 100.0, 298.15) <= p.t_common_K <= high - 100.0


def test_a_heat_capacity_that_does_not_care_gets_1000_K():
    constant = fit_nasa7(lambda T: np.full_like(T, 2.5), 0.0, 0.0, t_common_K="auto")
    assert constant.polynomial.t_common_K == 1000.0
    short = fit_nasa7(lambda T: np.full_like(T, 2.5), 0.0, 0.0, t_common_K="auto", t_high_K=600.0)
    assert short.polynomial.t_common_K == 500.0
