"""Evaluation of the two-range polynomial: against Cantera's evaluator, quadrature and numerical derivatives."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import quad

from heatwright.findings import Refused
from heatwright.polynomial.nasa7 import Nasa7, round_coefficient

# Methanol in the common form, coefficients near those of published files; only their arithmetic is tested here.
LOW = (5.71539582, -0.0152309129, 6.52441155e-05, -7.10806889e-08, 2.61352698e-11, -25642.7656, -1.50409823)
HIGH = (1.78970791, 0.0140938292, -6.36500835e-06, 1.38171085e-09, -1.1706022e-13, -25374.8747, 14.5023623)
METHANOL = Nasa7(200.0, 1000.0, 3500.0, LOW, HIGH)
GRID = np.array([200.0, 298.15, 555.5, 999.99, 1000.0, 1000.01, 1500.0, 2750.0, 3500.0])


def test_cantera_gives_the_same_values():
    cantera = pytest.importorskip("cantera")
    theirs = cantera.NasaPoly2(200.0, 3500.0, 1e5, [1000.0, *HIGH, *LOW])
    R = cantera.gas_constant
    for T in GRID:
        assert METHANOL.cp_R(T) == pytest.approx(theirs.cp(T) / R, rel=1e-12)
        assert METHANOL.h_R(T) == pytest.approx(theirs.h(T) / R, rel=1e-12)
        assert METHANOL.h_RT(T) == pytest.approx(theirs.h(T) / R / T, rel=1e-12)
        assert METHANOL.s_R(T) == pytest.approx(theirs.s(T) / R, rel=1e-12)


@pytest.mark.parametrize(("start", "end"), [(200.0, 1000.0), (1000.0001, 3500.0)])
def test_enthalpy_and_entropy_are_integrals_of_the_heat_capacity(start, end):
    h, _ = quad(METHANOL.cp_R, start, end, epsabs=1e-10, epsrel=1e-12)
    s, _ = quad(lambda T: METHANOL.cp_R(T) / T, start, end, epsabs=1e-12, epsrel=1e-12)
    assert METHANOL.h_R(end) - METHANOL.h_R(start) == pytest.approx(h, rel=1e-11)
    assert METHANOL.s_R(end) - METHANOL.s_R(start) == pytest.approx(s, rel=1e-11)


def test_slope_is_the_derivative_of_the_heat_capacity():
    T = np.array([250.0, 700.0, 1400.0, 3000.0])
    step = 1e-2
    numerical = (METHANOL.cp_R(T + step) - METHANOL.cp_R(T - step)) / (2 * step)
    assert METHANOL.dcp_R(T) == pytest.approx(numerical, rel=1e-8)


def test_arrays_and_numbers_agree_and_keep_their_shape():
    for function in (METHANOL.cp_R, METHANOL.h_R, METHANOL.h_RT, METHANOL.s_R, METHANOL.dcp_R):
        assert isinstance(function(500.0), float)
        values = function(GRID.reshape(3, 3))
        assert values.shape == (3, 3)
        assert values.ravel().tolist() == [function(float(T)) for T in GRID]


def test_the_common_temperature_belongs_to_the_low_range():
    split = Nasa7(200.0, 1000.0, 3000.0, (1.0, 0, 0, 0, 0, 0, 0), (2.0, 0, 0, 0, 0, 0, 0))
    assert (split.cp_R(1000.0), split.cp_R(np.nextafter(1000.0, 2000.0))) == (1.0, 2.0)


@pytest.mark.parametrize("T", [199.9, 3500.1, float("nan")])
def test_outside_the_range_is_an_error_that_names_the_temperature(T):
    for function in (METHANOL.cp_R, METHANOL.h_R, METHANOL.h_RT, METHANOL.s_R, METHANOL.dcp_R):
        with pytest.raises(ValueError, match=f"{T:g} K is outside the fitted range of 200 to 3500 K"):
            function(np.array([500.0, T]))


def test_extrapolation_has_to_be_asked_for():
    assert METHANOL.cp_R(4000.0, extrapolate=True) == pytest.approx(np.polyval(HIGH[4::-1], 4000.0), rel=1e-13)


def test_the_standard_temperature_is_allowed_in_a_range_that_starts_at_300_K():
    from_300 = Nasa7(300.0, 1000.0, 3500.0, LOW, HIGH)
    assert from_300.h_R(298.15) == METHANOL.h_R(298.15)
    with pytest.raises(ValueError, match=r"298\.2 K is outside"):
        from_300.h_R(298.2)


@pytest.mark.parametrize("temperatures", [(0, 1000, 2000), (300, 300, 2000), (300, 1000, np.inf), (300, np.nan, 2000)])
def test_temperatures_have_to_ascend(temperatures):
    with pytest.raises(ValueError, match="positive and ascending"):
        Nasa7(*temperatures, LOW, HIGH)


def test_each_range_has_seven_coefficients():
    with pytest.raises(ValueError, match="7 coefficients, not 6 and 7"):
        Nasa7(200.0, 1000.0, 3000.0, LOW[:6], HIGH)


def test_rounding_gives_what_a_text_field_gives_back():
    exact = Nasa7(200.0, 1000.0, 3000.0, tuple(a / 3 for a in LOW), tuple(a / 7 for a in HIGH))
    rounded = exact.rounded()
    assert [f"{a:15.8E}" for a in rounded.low] == [f"{a:15.8E}" for a in exact.low]
    assert rounded.low == tuple(float(f"{a:15.8E}") for a in exact.low)
    assert rounded.high == tuple(float(f"{a:15.8E}") for a in exact.high)
    assert rounded.rounded() == rounded


def test_the_exponent_has_two_digits():
    assert round_coefficient(9.99e-100) == 0.0
    assert round_coefficient(-1.5e-99) == -1.5e-99
    assert round_coefficient(9.99999999e99) == 9.99999999e99
    with pytest.raises(Refused, match=r"1\.00000000E\+100.*two-digit exponent.*\[value-unfit\]"):
        round_coefficient(9.999999999e99)
    with pytest.raises(Refused, match="is nan; expected a finite number"):
        round_coefficient(float("nan"))
