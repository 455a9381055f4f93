"""Every closed form against derivatives of its own ln q, by mpmath; Cp = dH/dT and dS/dT = Cp/T for any sum."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.molecule import DiatomicConstants
from heatwright.partition.contribution import ConstantFactor, total_ln_q
from heatwright.partition.diatomic import (
    doublet_pi_levels,
    level_sum,
    rotational_levels,
    vibration_rotation_levels,
)
from heatwright.partition.electronic import ElectronicLevels
from heatwright.partition.lowmodes import InterpolatedVibration, LowModes
from heatwright.partition.potential import cosine_potential
from heatwright.partition.rotation import ClassicalRotor, CorrectedRotor
from heatwright.partition.torsion import hindered_rotor
from heatwright.partition.translation import Translation
from heatwright.partition.vibration import HarmonicVibration, harmonic_sums_of_many

mpmath.mp.dps = 40
C2 = mpmath.mpf(SECOND_RADIATION_CM_K)


def exact_vibration(wavenumbers: list[float]):
    return lambda T: -sum(mpmath.log(1 - mpmath.exp(-C2 * nu / T)) for nu in wavenumbers)


def exact_levels(levels: list[tuple[float, int]]):
    return lambda T: mpmath.log(sum(g * mpmath.exp(-C2 * mpmath.mpf(nu) / T) for nu, g in levels))


def exact_translation(mass_u: float, pressure_Pa: float):
    u, k, h = (mpmath.mpf(text) for text in ("1.66053906660e-27", "1.380649e-23", "6.62607015e-34"))
    return lambda T: mpmath.log((2 * mpmath.pi * mass_u * u * k * T / h**2) ** mpmath.mpf("1.5") * k * T / pressure_Pa)


def exact_rotor(constants: tuple[float, ...], sigma: int):
    if len(constants) == 1:
        return lambda T: mpmath.log(T / (sigma * C2 * mpmath.mpf(constants[0])))
    product = mpmath.mpf(1)
    for b in constants:
        product *= b
    return lambda T: mpmath.log(mpmath.sqrt(mpmath.pi * T**3 / (C2**3 * product)) / sigma)


def exact_interpolation(wavenumbers: list[float], cutoff: float, moment: float):
    h, k, c = (mpmath.mpf(text) for text in ("6.62607015e-34", "1.380649e-23", "29979245800"))

    def ln_q(T):
        total = mpmath.mpf(0)
        for nu in map(mpmath.mpf, wavenumbers):
            mu = h / (8 * mpmath.pi**2 * nu * c)
            mu = mu * mpmath.mpf(moment) / (mu + mpmath.mpf(moment))
            rotor = mpmath.log(mpmath.sqrt(8 * mpmath.pi**3 * mu * k * T / h**2))
            w = 1 / (1 + (mpmath.mpf(cutoff) / nu) ** 4)
            total += w * -mpmath.log(1 - mpmath.exp(-C2 * nu / T)) + (1 - w) * rotor
        return total

    return ln_q


def exact_corrected(constants: tuple[float, ...], sigma: int):
    classical = exact_rotor(constants, sigma)
    if len(constants) == 1:
        return lambda T: classical(T) + C2 * mpmath.mpf(constants[0]) / (3 * T)
    a, b, c = map(mpmath.mpf, constants)
    theta = C2 / 12 * (2 * a + 2 * b + 2 * c - b * c / a - a * c / b - a * b / c)
    return lambda T: classical(T) + theta / T


HYDROGEN = DiatomicConstants(we_cm1=4401.213, wexe_cm1=121.336, Be_cm1=60.853, alphae_cm1=3.0622, D0_cm1=36118.0)
HYDROXYL = DiatomicConstants(
    we_cm1=3737.761, wexe_cm1=84.8813, Be_cm1=18.9108, alphae_cm1=0.7242, D0_cm1=9000.0, A_cm1=-139.21
)
SUMS = [
    level_sum("rotation", rotational_levels(59.3219, 0.0471, 0.25, 0.75)),
    level_sum("vibration and rotation", vibration_rotation_levels(HYDROGEN, 0.25, 0.75)),
    level_sum("vibration, rotation and electronic", doublet_pi_levels(HYDROXYL)),
]

CASES = [
    *((s, exact_levels(list(zip(s.energies_cm1 - s.energies_cm1.min(), s.weights, strict=True)))) for s in SUMS),
    (CorrectedRotor(ClassicalRotor((60.0,), 2)), exact_corrected((60.0,), 2)),
    (CorrectedRotor(ClassicalRotor((27.9, 14.5, 9.3), 2)), exact_corrected((27.9, 14.5, 9.3), 2)),
    (
        InterpolatedVibration((12.0, 350.0, 1500.0, 3800.0), 120.0, 2.0e-44),
        exact_interpolation([12.0, 350.0, 1500.0, 3800.0], 120.0, 2.0e-44),
    ),
    (LowModes("floor", 80.0).contribution((12.0, 350.0)), exact_vibration([80.0, 350.0])),
    (Translation(31.5, 101325.0), exact_translation(31.5, 101325.0)),
    (ClassicalRotor((1.9,), 2), exact_rotor((1.9,), 2)),
    (ClassicalRotor((27.9, 14.5, 9.3), 2), exact_rotor((27.9, 14.5, 9.3), 2)),
    (HarmonicVibration((12.0, 350.0, 1500.0, 3800.0)), exact_vibration([12.0, 350.0, 1500.0, 3800.0])),
    (
        ElectronicLevels(((0.0, 5), (158.265, 3), (226.977, 1), (15867.862, 5))),
        exact_levels([(0.0, 5), (158.265, 3), (226.977, 1), (15867.862, 5)]),
    ),
]


@pytest.mark.parametrize(("contribution", "exact"), CASES, ids=lambda case: getattr(case, "name", "ln q"))
@pytest.mark.parametrize("T", [50.0, 298.15, 1000.0, 6000.0])
def test_closed_forms_are_the_derivatives_of_ln_q(contribution, exact, T: float) -> None:
    t = mpmath.mpf(T)
    first, second = mpmath.diff(exact, t, 1), mpmath.diff(exact, t, 2)
    got = contribution.ln_q(np.array([T]))
    for value, truth in ((got.ln_q, exact(t)), (got.u, t * first), (got.w, t**2 * second)):
        assert abs(float(value[0]) - truth) <= 1e-10 * max(1, abs(truth))


levels_of = st.lists(
    st.tuples(st.floats(1.0, 40000.0), st.integers(1, 12)), min_size=0, max_size=5, unique_by=lambda level: level[0]
).map(lambda excited: ((0.0, 2), *sorted(excited)))

wavenumbers_of = st.lists(st.floats(1.0, 5000.0), min_size=0, max_size=60).map(tuple)


def top(first: float, second: float, share: float) -> CorrectedRotor:
    """A rotor that some distribution of masses can have: no moment of inertia above the sum of the two others."""
    low, high = sorted((first, second))
    third = high + share * low
    return CorrectedRotor(ClassicalRotor((1.0 / low, 1.0 / high, 1.0 / third), 1))


ROTORS = [hindered_rotor(cosine_potential(n, V), F, n) for n, V, F in ((3, 1024.0, 10.7), (1, 300.0, 40.0))]

molecules = st.tuples(
    st.builds(Translation, st.floats(1.0, 1000.0), st.sampled_from([1.0e5, 101325.0])),
    st.one_of(
        st.builds(
            ClassicalRotor,
            st.one_of(st.tuples(st.floats(0.001, 80.0)), st.tuples(*[st.floats(0.001, 80.0)] * 3)),
            st.integers(1, 60),
        ),
        st.floats(0.001, 80.0).map(lambda B: CorrectedRotor(ClassicalRotor((B,), 1))),
        st.builds(top, st.floats(0.05, 500.0), st.floats(0.05, 500.0), st.floats(0.0, 1.0)),
        st.sampled_from(SUMS),
    ),
    st.one_of(
        st.builds(HarmonicVibration, wavenumbers_of),
        st.builds(
            lambda kind, cutoff, modes: LowModes(kind, cutoff).contribution(modes),
            st.sampled_from(["floor", "interpolate"]),
            st.floats(10.0, 400.0),
            wavenumbers_of,
        ),
    ),
    st.builds(ElectronicLevels, levels_of),
    st.builds(ConstantFactor, st.just("optical isomers"), st.integers(1, 4)),
    st.sampled_from(ROTORS),
)


def derivative(function, T: float) -> float:
    """First derivative by Richardson extrapolation of central differences (independent of the closed forms)."""
    steps = [T * 0.02 / 2**i for i in range(6)]
    table = [[(function(T + h) - function(T - h)) / (2 * h) for h in steps]]
    for order in range(1, len(steps)):
        last = table[-1]
        factor = 4.0**order
        table.append([(factor * last[i + 1] - last[i]) / (factor - 1) for i in range(len(last) - 1)])
    return table[-1][0]


@settings(max_examples=150, deadline=None)
@given(molecules, st.floats(100.0, 6000.0))
def test_cp_is_dh_dt_and_t_ds_dt(parts, T: float) -> None:
    at = total_ln_q(parts, np.array([T]))
    cp = float(at.cp_R[0])
    h = derivative(lambda t: float(total_ln_q(parts, np.array([t])).h_RT[0]) * t, T)
    s = derivative(lambda t: float(total_ln_q(parts, np.array([t])).s_R[0]), T) * T
    assert h == pytest.approx(cp, rel=1e-9)
    assert s == pytest.approx(cp, rel=1e-9)


@given(st.lists(st.floats(1.0, 5000.0), min_size=1, max_size=30), st.randoms())
def test_the_order_of_modes_does_not_matter(wavenumbers: list[float], random) -> None:
    shuffled = list(wavenumbers)
    random.shuffle(shuffled)
    grid = np.array([200.0, 1000.0, 6000.0])
    one, two = (HarmonicVibration(tuple(w)).ln_q(grid) for w in (wavenumbers, shuffled))
    np.testing.assert_allclose(one.cp_R, two.cp_R, rtol=1e-12, atol=1e-14)
    np.testing.assert_allclose(one.s_R, two.s_R, rtol=1e-12, atol=1e-14)


def test_limits_of_the_oscillator() -> None:
    # x = 1e-7 (classical) and x = 5000 (frozen): no overflow, no loss of digits.
    grid = np.array([1.0])
    hot = HarmonicVibration((1e-7 / SECOND_RADIATION_CM_K,)).ln_q(grid)
    cold = HarmonicVibration((5000.0 / SECOND_RADIATION_CM_K,)).ln_q(grid)
    assert float(hot.cp_R[0]) == pytest.approx(1.0, abs=1e-12)
    assert float(hot.ln_q[0]) == pytest.approx(-np.log(1e-7), rel=1e-8)
    assert float(cold.cp_R[0]) == float(cold.s_R[0]) == 0.0


@pytest.mark.parametrize("wavenumber", [0.0, -100.0, float("nan")])
def test_a_mode_that_is_not_positive_is_refused(wavenumber: float) -> None:
    with pytest.raises(ValueError, match="mode 2"):
        HarmonicVibration((1000.0, wavenumber))


@given(
    st.lists(st.lists(st.floats(0.5, 5000.0), min_size=0, max_size=90), min_size=1, max_size=30),
    st.lists(st.floats(50.0, 6000.0), min_size=1, max_size=700),
)
@settings(max_examples=60, deadline=None)
def test_many_species_at_once_are_each_species_alone(species: list[list[float]], temperatures: list[float]) -> None:
    T = np.array(temperatures)
    together = harmonic_sums_of_many([np.array(w) for w in species], T)
    assert len(together) == len(species)
    for wavenumbers, got in zip(species, together, strict=True):
        alone = HarmonicVibration(tuple(wavenumbers)).ln_q(T)
        for name in ("ln_q", "u", "w"):
            np.testing.assert_allclose(getattr(got, name), getattr(alone, name), rtol=1e-11, atol=1e-13)


def test_temperatures_in_chunks_are_each_temperature_alone() -> None:
    # 20 modes at 5001 temperatures are more than one chunk, alone and among other species.
    T, modes = np.linspace(100.0, 6000.0, 5001), np.geomspace(30.0, 3500.0, 20)
    whole = HarmonicVibration(tuple(modes.tolist())).ln_q(T)
    beside = harmonic_sums_of_many([modes[:3], modes, modes], T)[1]
    for i in (0, 1637, 1638, 3276, 5000):
        one = HarmonicVibration(tuple(modes.tolist())).ln_q(T[i])
        for name in ("ln_q", "u", "w"):
            assert getattr(whole, name)[i] == pytest.approx(float(getattr(one, name)), rel=1e-13)
            assert getattr(beside, name)[i] == pytest.approx(float(getattr(one, name)), rel=1e-13)
    assert whole.ln_q.shape == T.shape
    assert HarmonicVibration((500.0,)).ln_q(T.reshape(3, -1)).u.shape == (3, 1667)
    assert harmonic_sums_of_many([modes], T[:0])[0].ln_q.shape == (0,)
