"""Raised floor and free-rotor interpolation: limits, published entropy, and what a model says of them."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright import ModelOptions, build_model
from heatwright.constants import GAS_CONSTANT_J_MOL_K as R
from heatwright.errors import UsageError
from heatwright.partition.lowmodes import InterpolatedVibration, LowModes, mode_shifts
from heatwright.partition.vibration import HarmonicVibration
from molecules import water

T = np.array([200.0, 298.15, 1000.0, 3000.0])


def test_the_floor_is_an_oscillator_at_the_cutoff() -> None:
    raised = LowModes("floor", 100.0).contribution((30.0, 80.0, 500.0)).ln_q(T)
    plain = HarmonicVibration((100.0, 100.0, 500.0)).ln_q(T)
    np.testing.assert_array_equal(raised.s_R, plain.s_R)
    np.testing.assert_array_equal(raised.cp_R, plain.cp_R)
    # ln(100/30 · 100/80) in the classical limit
    lower = HarmonicVibration((30.0, 80.0, 500.0)).ln_q(T)
    assert float((raised.s_R - lower.s_R)[-1]) == pytest.approx(-np.log(100.0 / 30.0 * 100.0 / 80.0), abs=1e-3)


def test_the_entropy_of_the_interpolation_is_the_published_one() -> None:
    # S. Grimme, Chem. Eur. J. 18, 9955 (2012), equations 3 to 8 (from memory), typed anew with its own constants.
    nu, cutoff, moment = 60.0, 100.0, 1.0e-44
    h, k, c = 6.62607015e-34, 1.380649e-23, 2.99792458e10
    x = h * c * nu / (k * T)
    vibration = x / (np.exp(x) - 1.0) - np.log(1.0 - np.exp(-x))
    mu = h / (8.0 * np.pi**2 * nu * c)
    mu = mu * moment / (mu + moment)
    rotor = 0.5 + np.log(np.sqrt(8.0 * np.pi**3 * mu * k * T / h**2))
    w = 1.0 / (1.0 + (cutoff / nu) ** 4)
    got = InterpolatedVibration((nu,), cutoff, moment).ln_q(T)
    np.testing.assert_allclose(got.s_R, w * vibration + (1.0 - w) * rotor, rtol=1e-12)


def test_high_modes_stay_harmonic_and_low_ones_become_rotors() -> None:
    high = InterpolatedVibration((3000.0,)).ln_q(T)
    np.testing.assert_allclose(high.cp_R, HarmonicVibration((3000.0,)).ln_q(T).cp_R, atol=2e-6)
    low = InterpolatedVibration((1.0,)).ln_q(T)
    np.testing.assert_allclose(low.cp_R, 0.5, atol=1e-7)


@pytest.mark.parametrize(("nu", "expected"), [(20.0, -1.1), (50.0, -0.9), (100.0, -0.3)])
def test_enthalpy_moves_with_the_entropy(nu: float, expected: float) -> None:
    # −(1 − w)·(U_HO − RT/2), evaluated independently beforehand; rounded to 0.1 kJ/mol.
    (shift,) = mode_shifts([nu], LowModes("interpolate"))
    assert shift.dh_kJ_mol == pytest.approx(expected, abs=0.06)


@pytest.mark.parametrize("kind", ["floor", "interpolate"])
def test_shifts_add_up_to_the_change_of_the_model(kind: str) -> None:
    soft = water().but(wavenumbers_cm1=np.array([40.0, 90.0, 1600.0]))
    plain, treated = build_model(soft), build_model(soft, ModelOptions(low_modes=LowModes(kind)))
    shifts = treated.motion.shifts
    assert len(shifts) == 3
    ds = float(treated.s_R(298.15) - plain.s_R(298.15)) * R
    assert sum(s.ds_J_mol_K for s in shifts) == pytest.approx(ds, abs=1e-9)
    dh = treated.h298_minus_h0_kJ_mol - plain.h298_minus_h0_kJ_mol
    assert sum(s.dh_kJ_mol for s in shifts) == pytest.approx(dh, abs=1e-9)
    assert treated.zpe_kJ_mol == plain.zpe_kJ_mol
    (said,) = [f for f in treated.findings if f.code == "low-modes"]
    assert f"{ds:+.3f} J/mol/K" in said.found
    assert f"{dh:+.3f} kJ/mol" in said.found
    assert "mode 1 (40.0 1/cm)" in said.found
    assert "mode 3" not in said.found
    assert not [f for f in plain.findings if f.code == "low-modes"]


def test_the_scale_factor_comes_before_the_cutoff() -> None:
    soft = water().but(wavenumbers_cm1=np.array([101.0, 1000.0, 1600.0]))
    options = ModelOptions(frequency_scale=0.9, zpe_scale=1.0, low_modes=LowModes("floor"))
    assert [abs(s.ds_J_mol_K) > 0.0 for s in build_model(soft, options).motion.shifts] == [True, False, False]


@pytest.mark.parametrize(
    "values", [{"cutoff_cm1": 0.0}, {"cutoff_cm1": float("nan")}, {"averaging_moment_kg_m2": -1.0}]
)
def test_numbers_that_are_not_positive(values: dict[str, float]) -> None:
    with pytest.raises(UsageError, match="positive"):
        LowModes("interpolate", **values)


def test_an_unknown_treatment() -> None:
    with pytest.raises(UsageError, match="floor"):
        LowModes("magic")  # type: ignore[arg-type]


@pytest.mark.parametrize("kind", ["floor", "interpolate"])
@pytest.mark.parametrize("nu", [0.0, -50.0, float("nan")])
def test_a_mode_that_is_not_positive_is_refused(kind: str, nu: float) -> None:
    with pytest.raises(ValueError, match="mode 2"):
        LowModes(kind).contribution((1000.0, nu))
