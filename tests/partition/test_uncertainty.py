"""Propagated uncertainties: sensitivities against differences, columns against Monte Carlo, defaults with sources."""

from __future__ import annotations

from dataclasses import dataclass
from functools import partial
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from heatwright import ModelOptions, build_model
from heatwright.constants import GAS_CONSTANT_J_MOL_K as R
from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.errors import UsageError
from heatwright.molecule import Level
from heatwright.partition.conformers import Conformer
from heatwright.partition.contribution import LnQ
from heatwright.partition.inputs import InputUncertainties, default_scale, parse_uncertainties, stated_inputs
from heatwright.partition.mixing import mixture_model
from heatwright.partition.rotation import ClassicalRotor
from heatwright.partition.translation import Translation
from heatwright.partition.uncertainty import (
    TableUncertainty,
    columns,
    directions,
    propagated,
    sensitivity,
    shifted,
    total,
)
from heatwright.partition.vibration import HarmonicVibration, mode_sensitivities
from heatwright.reading.outputs import read_output
from molecules import water

DATA = Path(__file__).resolve().parents[1] / "data" / "conformers"
GRID = np.array([100.0, 298.15, 1000.0, 3000.0])


def conformer(wavenumbers: tuple[float, ...], energy_kJ_mol: float = 0.0, sigma: int = 1) -> Conformer:
    parts = (Translation(46.0), ClassicalRotor((1.1, 0.3, 0.27), sigma), HarmonicVibration(wavenumbers))
    return Conformer("made.out", energy_kJ_mol, 1, parts)


def as_rows(u: TableUncertainty) -> np.ndarray:
    return np.array([u.cp_J_mol_K, u.h_minus_h298_kJ_mol, u.s_J_mol_K])


# --- sensitivities -------------------------------------------------------------------------------------------------


@given(st.lists(st.floats(5.0, 5000.0), min_size=1, max_size=10), st.floats(50.0, 6000.0))
def test_sensitivities_of_modes_are_derivatives(wavenumbers: list[float], T: float) -> None:
    grid, h = np.array([T]), 1e-3
    each = mode_sensitivities(wavenumbers, grid)
    for i, nu in enumerate(wavenumbers):
        f = {k: HarmonicVibration((nu * np.exp(k * h),)).ln_q(grid) for k in (-2, -1, 1, 2)}
        for name in ("ln_q", "u", "w"):
            v = {k: float(getattr(q, name)[0]) for k, q in f.items()}
            numerical = (v[-2] - 8 * v[-1] + 8 * v[1] - v[2]) / (12 * h)
            assert float(getattr(each, name)[0, i]) == pytest.approx(numerical, rel=1e-8, abs=1e-10)


mixtures = st.lists(
    st.builds(conformer, st.lists(st.floats(30.0, 4000.0), min_size=3, max_size=8).map(tuple), st.floats(0.0, 20.0)),
    max_size=3,
).map(lambda others: (conformer((90.0, 250.0, 1500.0)), *others))


@settings(max_examples=60, deadline=None)
@given(mixtures, st.floats(100.0, 6000.0))
def test_sensitivities_of_mixtures_are_derivatives(members, T: float) -> None:
    inputs, h = stated_inputs(InputUncertainties(), None, n_conformers=len(members)), 1e-3
    grid = np.array([T])
    for d in directions(members, inputs, 400.0):
        f = {k: total(shifted(members, d, k * h), grid) for k in (-2, -1, 1, 2)}
        exact = sensitivity(members, d, grid)
        for name in ("ln_q", "u", "w"):
            v = {k: float(getattr(q, name)[0]) for k, q in f.items()}
            numerical = (v[-2] - 8 * v[-1] + 8 * v[1] - v[2]) / (12 * h)
            assert float(getattr(exact, name)[0]) == pytest.approx(numerical, rel=1e-7, abs=1e-8)


def test_sensitivities_are_consistent_as_ln_q_is() -> None:
    # d/dT of dH is dCp, and T d/dT of dS is dCp: what is propagated stays a thermodynamic function.
    members = (conformer((90.0, 250.0, 1500.0)), conformer((70.0, 300.0, 1400.0), 3.0))
    inputs = stated_inputs(InputUncertainties(), None, n_conformers=2)
    T, h = np.array([400.0]), 0.05
    for d in directions(members, inputs, 400.0):
        low, mid, high = (sensitivity(members, d, T + k * h) for k in (-1, 0, 1))
        slope_h = (high.u * (T + h) - low.u * (T - h)) / (2 * h)
        slope_s = T * (high.s_R - low.s_R) / (2 * h)
        np.testing.assert_allclose(slope_h, mid.cp_R, rtol=1e-5, atol=1e-8)
        np.testing.assert_allclose(slope_s, mid.cp_R, rtol=1e-5, atol=1e-8)


@dataclass(frozen=True, slots=True)
class ClassicalVibration:
    """Another contribution with modes, without a closed form for its sensitivity: ln q = Σ ln(T/c₂ν)."""

    name = "vibration"
    wavenumbers_cm1: tuple[float, ...]

    def ln_q(self, T: np.ndarray) -> LnQ:
        n = len(self.wavenumbers_cm1)
        x = SECOND_RADIATION_CM_K * np.array(self.wavenumbers_cm1) / T[..., None]
        return LnQ(-np.log(x).sum(axis=-1), np.full(T.shape, float(n)), np.full(T.shape, -float(n)))


def test_contributions_without_closed_sensitivities_are_differentiated_numerically() -> None:
    made = Conformer("made.out", 0.0, 1, (Translation(46.0), ClassicalVibration((100.0, 200.0, 700.0))))
    stated = InputUncertainties(scale=0.01, low=0.1)
    u = propagated((made,), stated, None, GRID)
    assert u.s_J_mol_K == pytest.approx(np.full(4, R * np.sqrt(0.03**2 + 2 * 0.1**2)), rel=1e-10)
    assert u.cp_J_mol_K == pytest.approx(np.zeros(4), abs=1e-10)
    assert u.findings == ()


@dataclass(frozen=True, slots=True)
class BarrierOnly:
    """A torsion in its classical high-barrier limit, an oscillator with ν² in proportion to its barrier."""

    barrier_cm1: float
    name = "torsion"

    def ln_q(self, T: np.ndarray) -> LnQ:
        return HarmonicVibration((10.0 * np.sqrt(self.barrier_cm1),)).ln_q(T)

    def with_barrier_factor(self, factor: float) -> BarrierOnly:
        return BarrierOnly(self.barrier_cm1 * factor)


def test_barriers_move_one_by_one() -> None:
    hot, stated = np.array([6000.0]), InputUncertainties(scale=0.0, low=0.0, barrier=0.1)
    made = Conformer("made.out", 0.0, 1, (Translation(30.0), BarrierOnly(30.0), BarrierOnly(60.0)))
    u = propagated((made,), stated, None, hot)
    assert [i.key for i in u.inputs] == ["scale", "low", "barrier"]
    assert float(u.s_J_mol_K[0]) == pytest.approx(np.sqrt(2.0) * R * 0.1 / 2.0, rel=1e-4)  # S = −R/2 ln V each
    assert u.findings == ()
    assert stated_inputs(InputUncertainties(), None, torsions=True)[2].source.startswith("assumed")


# --- Monte Carlo ---------------------------------------------------------------------------------------------------


def harmonic(nu: np.ndarray, T: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Cv/R, U/R (K) and S/R of oscillators (..., m), summed over the modes; written out anew."""
    x = SECOND_RADIATION_CM_K * nu / T
    n = 1.0 / np.expm1(x)
    return (x**2 * n * (n + 1)).sum(-1), (T * x * n).sum(-1), (x * n - np.log1p(-np.exp(-x))).sum(-1)


def drawn(wavenumbers: np.ndarray, scale: float, low: float, T: np.ndarray) -> np.ndarray:
    """(3, n) standard deviations of Cp, H − H(298.15 K) and S in 10,000 draws; one conformer, no degenerate modes."""
    random = np.random.default_rng(20240229)
    exponent = scale * random.standard_normal((10_000, 1)) + np.where(
        wavenumbers < 400.0, low * random.standard_normal((10_000, wavenumbers.size)), 0.0
    )
    nu = wavenumbers * np.exp(exponent)
    reference = harmonic(nu, 298.15)[1]
    rows = []
    for t in T:
        cv, e, s = harmonic(nu, t)
        rows.append([cv.std() * R, (e - reference).std() * R / 1000.0, s.std() * R])
    return np.array(rows).T


def test_one_conformer_agrees_with_10000_draws() -> None:
    nu = np.array([118.0, 237.0, 310.0, 760.0, 1100.0, 1450.0, 2950.0])
    T = np.array([150.0, 400.0, 1000.0, 3000.0])
    u = propagated((conformer(tuple(nu)),), InputUncertainties(scale=0.02, low=0.1), None, T)
    assert as_rows(u) == pytest.approx(drawn(nu, 0.02, 0.1, T), rel=0.05)
    assert u.findings == ()


def test_butane_with_its_energy_agrees_with_10000_draws() -> None:
    names = ("butane_trans", "butane_gauche")
    options = ModelOptions(frequency_scale=0.9614, zpe_scale=0.9806)
    made = mixture_model([build_model(read_output(str(DATA / f"{n}.toml")), options) for n in names])
    T = np.array([250.0, 1000.0])
    stated = InputUncertainties(scale=0.01, low=0.0, conformers_kJ_mol=0.3)
    u = propagated(made.conformers, stated, None, T)
    random = np.random.default_rng(7)
    whole, gauche = directions(made.conformers, stated_inputs(stated, None, n_conformers=2), 400.0)
    both = []
    for a, b in random.standard_normal((10_000, 2)):
        members = shifted(shifted(made.conformers, whole, 0.01 * a), gauche, 0.3 * b)
        both.append(columns(partial(total, members), T))
    assert as_rows(u) == pytest.approx(np.std(both, axis=0), rel=0.05)
    assert u.findings == ()


def test_where_it_is_not_linear_it_is_said() -> None:
    nu = (118.0, 237.0, 310.0, 760.0)
    T = np.array([40.0, 298.15, 1000.0])
    u = propagated((conformer(nu),), InputUncertainties(scale=0.02, low=0.5), None, T)
    (said,) = u.findings
    truth = drawn(np.array(nu), 0.02, 0.5, T)
    off = np.abs(as_rows(u) - truth)[[0, 2]] / truth[[0, 2]]
    assert off.max() > 0.05  # the draws say so as well
    assert said.code == "uncertainty-nonlinear"
    assert "40 K" in said.text


def test_the_direction_of_what_is_not_linear_is_that_of_the_draws() -> None:
    names = ("butane_trans", "butane_gauche")
    made = mixture_model([build_model(read_output(str(DATA / f"{n}.toml"))) for n in names])
    stated, T = InputUncertainties(scale=0.0, low=0.0, conformers_kJ_mol=1.0), np.array([200.0])
    u = propagated(made.conformers, stated, None, T)
    (d,) = directions(made.conformers, stated_inputs(stated, None, n_conformers=2), 400.0)
    draws = np.random.default_rng(3).standard_normal(2000)
    truth = np.std([columns(partial(total, shifted(made.conformers, d, k)), T) for k in draws], axis=0)
    assert as_rows(u)[0] < 0.9 * truth[0]
    assert "that of Cp° is" in u.findings[0].text
    assert "% too small at 200 K" in u.findings[0].text


# --- what is shifted together --------------------------------------------------------------------------------------


def test_degenerate_modes_move_together_and_others_alone() -> None:
    stated = InputUncertainties(scale=0.0, low=0.1)
    hot = np.array([5000.0])

    def entropy(*nu: float) -> float:
        return float(propagated((conformer(nu),), stated, None, hot).s_J_mol_K[0])

    assert entropy(200.0, 200.3, 2000.0) == pytest.approx(2.0 * R * 0.1, rel=1e-3)
    assert entropy(200.0, 230.0, 2000.0) == pytest.approx(np.sqrt(2.0) * R * 0.1, rel=1e-3)
    assert entropy(500.0, 900.0, 2000.0) == 0.0


def test_factors_are_symmetric() -> None:
    # Too large by a factor is as likely as too small by it: S of a classical oscillator moves by as much either way.
    members = (conformer((30.0,)),)
    (d,) = directions(members, stated_inputs(InputUncertainties(scale=0.0, low=0.3), None, n_conformers=1), 400.0)
    up, down = (columns(lambda t, k=k: total(shifted(members, d, k * d.u), t), np.array([3000.0]))[2] for k in (1, -1))
    middle = columns(lambda t: total(members, t), np.array([3000.0]))[2]
    assert up - middle == pytest.approx(middle - down, rel=1e-4)


def test_zero_uncertainties_and_atoms_give_zero() -> None:
    none = InputUncertainties(scale=0.0, low=0.0, conformers_kJ_mol=0.0)
    assert not as_rows(propagated((conformer((100.0, 900.0)),), none, None, GRID)).any()
    atom = Conformer("Ar.out", 0.0, 1, (Translation(39.95),))
    assert not as_rows(propagated((atom,), InputUncertainties(), None, GRID)).any()


def test_h_minus_h298_is_certain_at_298() -> None:
    u = propagated((conformer((100.0, 900.0)),), InputUncertainties(), None, GRID)
    assert u.h_minus_h298_kJ_mol[1] == 0.0
    assert u.h_minus_h298_kJ_mol[0] > 0.0


# --- inputs --------------------------------------------------------------------------------------------------------


def test_defaults_and_their_sources() -> None:
    # K. K. Irikura, R. D. Johnson III, R. N. Kacker, J. Phys. Chem. A 109, 8430 (2005): 0.8982 ± 0.0230, HF/6-31G(d).
    value, source = default_scale(Level("HF", "6-31G*"))
    assert value == pytest.approx(0.0230 / 0.8982)
    assert "stands in" not in source
    stand_in, said = default_scale(Level("B3LYP", "6-31G*"))
    assert stand_in == value
    assert "none is tabulated for this level" in said
    assert all(item.source for item in stated_inputs(InputUncertainties(), None, n_conformers=2))
    assert [item.source for item in stated_inputs(InputUncertainties(0.01, 0.1), None, n_conformers=1)] == [
        "given",
        "given",
    ]


def test_the_text_of_the_option() -> None:
    assert parse_uncertainties("default") == InputUncertainties()
    everything = parse_uncertainties("scale=0.02, low=0.1,cutoff=300,conformers=2,barrier=0.2")
    assert everything == InputUncertainties(0.02, 0.1, 300.0, 2.0, 0.2)


@pytest.mark.parametrize(
    "text",
    ["", "scale", "scale=x", "scale=-0.1", "scale=nan", "scale=2", "scale=0.1,scale=0.2", "speed=3", "low=1e999"],
)
def test_wrong_texts_are_usage_errors(text: str) -> None:
    with pytest.raises(UsageError, match="uncertainty"):
        parse_uncertainties(text)


def test_a_table_carries_its_uncertainty_only_when_asked() -> None:
    assert build_model(water()).tabulate(GRID).uncertainty is None
    table = build_model(water(), ModelOptions(uncertainty=InputUncertainties(scale=0.02))).tabulate(GRID)
    assert table.uncertainty is not None
    assert table.uncertainty.s_J_mol_K.shape == GRID.shape
