"""Rotation beyond the classical rotor: the first quantum correction and sums over levels with nuclear spins."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright import ModelOptions, build_model
from heatwright.constants import GAS_CONSTANT_J_MOL_K as R
from heatwright.errors import UsageError
from heatwright.findings import Refused
from heatwright.partition.diatomic import level_sum, rotational_levels
from heatwright.partition.levelsum import LevelSum
from heatwright.partition.rotation import ClassicalRotor, CorrectedRotor
from heatwright.partition.spins import spin_weights
from molecules import atom, molecule, water

PROTIUM, DEUTERIUM = 1.00782503, 2.01410178
ROOM = np.array([298.15])


def hydrogen(first_u: float = PROTIUM, second_u: float = PROTIUM, wavenumber_cm1: float = 4401.0):
    return molecule("H H", [[0, 0, 0], [0, 0, 0.74144]], [wavenumber_cm1], masses_u=np.array([first_u, second_u]))


# Limits of the classical rotor's error, + h c B R/3 in H(T) − H(0): arithmetic with B0 of Huber and Herzberg (1979).
@pytest.mark.parametrize(("B", "J_mol"), [(59.3219, 236.5), (20.5567, 82.0), (1.98958, 7.9)])
def test_the_correction_of_a_linear_rotor(B: float, J_mol: float) -> None:
    T = np.array([300.0, 1000.0])
    classical, corrected = ClassicalRotor((B,)), CorrectedRotor(ClassicalRotor((B,)))
    one, two = classical.ln_q(T), corrected.ln_q(T)
    np.testing.assert_allclose((one.h_RT - two.h_RT) * R * T, J_mol, atol=0.1)
    np.testing.assert_allclose(two.cp_R, one.cp_R, rtol=1e-14)
    np.testing.assert_allclose(two.s_R, one.s_R, rtol=1e-14)


@pytest.mark.parametrize("B", [10.4398, 1.92253])
def test_the_correction_is_what_the_sum_over_levels_says(B: float) -> None:
    corrected = CorrectedRotor(ClassicalRotor((B,))).ln_q(ROOM)
    summed = level_sum("rotation", rotational_levels(B)).ln_q(ROOM)
    assert float(corrected.h_RT[0]) == pytest.approx(float(summed.h_RT[0]), abs=2e-4)
    assert float(corrected.s_R[0]) == pytest.approx(float(summed.s_R[0]), abs=2e-4)


def test_a_spherical_top_has_the_correction_of_its_constant() -> None:
    # 2A + 2B + 2C − A − A − A = 3A for equal constants: ϑ = c₂A/4.
    methane = CorrectedRotor(ClassicalRotor((5.241,) * 3, 12))
    assert methane.temperature_K == pytest.approx(1.438777 * 5.241 / 4.0, rel=1e-6)


def test_carbon_monoxide_quantum_sum() -> None:
    # q of CO at 298.15 K: classical 107.7875, sum over levels 108.1215 (B0 1.922529 of Huber and Herzberg 1979;
    # both evaluated independently of this project's code).
    assert float(np.exp(level_sum("rotation", rotational_levels(1.922529)).ln_q(ROOM).ln_q[0])) == pytest.approx(
        108.1215, abs=5e-4
    )


def test_hydrogen_at_low_temperature_is_para_hydrogen() -> None:
    # J = 0 alone at 10 K: no heat capacity.  Cp − 5R/2 of equilibrium hydrogen at 100 K from NIST-JANAF H-050.
    even, odd, _ = spin_weights(np.array([1, 1]), np.array([PROTIUM, PROTIUM]), 2)
    rotor = level_sum("rotation", rotational_levels(59.3219, 0.0471, even, odd))
    values = rotor.ln_q(np.array([10.0, 100.0]))
    assert float(values.cp_R[0]) * R < 1e-3
    assert float(values.cp_R[1]) * R == pytest.approx(28.154 - 20.786, abs=0.01)


@pytest.mark.parametrize(
    ("masses", "sigma", "even_to_odd"),
    [((PROTIUM, PROTIUM), 2, 1 / 3), ((DEUTERIUM, DEUTERIUM), 2, 2.0), ((PROTIUM, DEUTERIUM), 1, 1.0)],
)
def test_spin_weights_have_the_mean_of_the_symmetry_number(masses, sigma: int, even_to_odd: float) -> None:
    even, odd, _ = spin_weights(np.array([1, 1]), np.array(masses), sigma)
    assert (even + odd) / 2.0 == pytest.approx(1.0 / sigma)
    assert even / odd == pytest.approx(even_to_odd)


@pytest.mark.parametrize("masses", [(PROTIUM, PROTIUM), (DEUTERIUM, DEUTERIUM), (PROTIUM, DEUTERIUM)])
def test_the_sum_becomes_the_classical_rotor_when_hot(masses) -> None:
    m = hydrogen(*masses)
    summed, classical = (build_model(m, ModelOptions(rotation=kind)) for kind in ("sum", "classical"))
    a, b = (float(x.tabulate([1500.0]).shares["rotation"].s_J_mol_K[0]) for x in (summed, classical))
    # What is left at 1500 K is the centrifugal term, 2 D kT/(hc B²) in ln q.
    B = float(summed.inertia.rotational_constants_cm1[0])
    D = 4.0 * B**3 / 4401.0**2
    assert a - b == pytest.approx(2.0 * R * 2.0 * D * 1500.0 / 1.438777 / B**2, rel=0.12)


def test_a_symmetric_molecule_that_is_not_hydrogen() -> None:
    # Sums over even and over odd J of N2 are equal, so every level may carry 1/2: H of the corrected rotor
    # but for the centrifugal term, 1.5 J/mol.
    nitrogen = molecule("N N", [[0, 0, 0], [0, 0, 1.0977]], [2359.0])
    summed, corrected = (build_model(nitrogen, ModelOptions(rotation=kind)) for kind in ("sum", "corrected"))
    assert summed.h298_minus_h0_kJ_mol == pytest.approx(corrected.h298_minus_h0_kJ_mol, abs=2e-3)
    assert summed.motion.rotation == "sum"


def test_a_symmetry_number_of_the_user_stays_in_force() -> None:
    one = build_model(hydrogen(), ModelOptions(rotation="sum", symmetry_number=1))
    two = build_model(hydrogen(), ModelOptions(rotation="sum"))
    assert float(one.s_R(298.15) - two.s_R(298.15)) == pytest.approx(np.log(2.0))


def test_what_is_said() -> None:
    (said,) = [f for f in build_model(water(), ModelOptions(rotation="corrected")).findings if f.code == "rotation"]
    assert "Stripp and Kirkwood" in said.found
    assert "J/mol" in said.found
    (said,) = [f for f in build_model(hydrogen(), ModelOptions(rotation="sum")).findings if f.code == "rotation"]
    assert "para : ortho 1 : 3" in said.found
    assert not [f for f in build_model(hydrogen()).findings if f.code == "rotation"]


def test_a_rotor_that_is_not_linear_cannot_be_summed() -> None:
    with pytest.raises(Refused, match="asymmetric top"):
        build_model(water(), ModelOptions(rotation="sum"))
    with pytest.raises(UsageError, match="corrected"):
        ModelOptions(rotation="wrong")  # type: ignore[arg-type]


def test_an_atom_does_not_rotate() -> None:
    assert build_model(atom("N", 4, -54.0), ModelOptions(rotation="sum")).motion.rotation == "none"


@pytest.mark.parametrize(
    ("energies", "weights"), [([0.0, 1.0], [1.0]), ([0.0, np.nan], [1.0, 1.0]), ([0.0, 1.0], [1.0, 0.0]), ([], [])]
)
def test_levels_that_are_none(energies, weights) -> None:
    with pytest.raises(ValueError, match="level"):
        LevelSum("x", np.array(energies), np.array(weights))


def test_blocks_of_temperatures_do_not_show() -> None:
    levels = level_sum("rotation", rotational_levels(0.05))
    grid = np.linspace(100.0, 6000.0, 400)
    whole = levels.ln_q(grid)
    for i in (0, 57, 399):
        alone = levels.ln_q(grid[i : i + 1])
        assert float(alone.cp_R[0]) == pytest.approx(float(whole.cp_R[i]), rel=1e-13)
