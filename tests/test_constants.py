"""The written-out constants against scipy's CODATA tables."""

from __future__ import annotations

import pytest
import scipy.constants as codata

from heatwright import constants as c

# scipy moves to newer adjustments; between those of 2018 and 2022 nothing here changed by more than 2e-9.
ADJUSTMENTS = 2e-9


@pytest.mark.parametrize(
    ("ours", "name", "factor"),
    [
        (c.PLANCK_J_S, "Planck constant", 1.0),
        (c.BOLTZMANN_J_K, "Boltzmann constant", 1.0),
        (c.AVOGADRO_MOL, "Avogadro constant", 1.0),
        (c.LIGHT_SPEED_M_S, "speed of light in vacuum", 1.0),
        (c.ELEMENTARY_CHARGE_C, "elementary charge", 1.0),
        (c.GAS_CONSTANT_J_MOL_K, "molar gas constant", 1.0),
        (c.ATOMIC_MASS_KG, "atomic mass constant", 1.0),
        (c.HARTREE_J, "Hartree energy", 1.0),
        (c.BOHR_M, "Bohr radius", 1.0),
        (c.SECOND_RADIATION_CM_K, "second radiation constant", 100.0),
        (c.HARTREE_CM1, "hartree-inverse meter relationship", 0.01),
    ],
)
def test_constant(ours: float, name: str, factor: float) -> None:
    assert ours == pytest.approx(codata.value(name) * factor, rel=ADJUSTMENTS)


def test_derived_factors() -> None:
    # h/(8 π² c) in u Å² cm⁻¹, as spectroscopists use it (16.857629, common practice).
    assert pytest.approx(16.857629, abs=5e-7) == c.INERTIA_CM1_U_A2
    # 1 hartree in kJ/mol and 1 eV in kJ/mol from the same adjustment (P. J. Mohr et al., CODATA 2018).
    assert pytest.approx(2625.4996395, rel=1e-9) == c.HARTREE_KJ_MOL
    assert pytest.approx(96.48533212, rel=1e-9) == c.EV_KJ_MOL
    assert pytest.approx(c.HARTREE_KJ_MOL, rel=1e-12) == c.CM1_KJ_MOL * c.HARTREE_CM1
