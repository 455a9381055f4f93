"""Diatomic molecules by their real levels, against published tables."""

from __future__ import annotations

from dataclasses import replace

import janaf
import numpy as np
import pytest

from heatwright import ModelOptions, build_model
from heatwright.constants import CM1_KJ_MOL
from heatwright.constants import GAS_CONSTANT_J_MOL_K as R
from heatwright.molecule import DiatomicConstants, Stated
from heatwright.partition.diatomic import doublet_pi_levels, doublet_pi_rotation, vibration_rotation_levels
from heatwright.partition.lowmodes import LowModes
from heatwright.partition.radicals import doublet_pi
from molecules import molecule

# Constants: K. P. Huber, G. Herzberg, Constants of Diatomic Molecules (1979), in 1/cm; D0 from the same.
CO = DiatomicConstants(
    we_cm1=2169.81358, wexe_cm1=13.28831, Be_cm1=1.93128087, alphae_cm1=0.01750441, D0_cm1=89600.0, source="H & H 1979"
)
H2 = DiatomicConstants(
    we_cm1=4401.213, wexe_cm1=121.336, Be_cm1=60.853, alphae_cm1=3.0622, D0_cm1=36118.0, source="H & H 1979"
)


def diatomic(symbols: str, constants: DiatomicConstants, masses_u: list[float], multiplicity: int = 1):
    stated = Stated(
        name=symbols.replace(" ", ""),
        rotational_constants_cm1=(constants.Be_cm1 - constants.alphae_cm1 / 2.0,),
        symmetry_number=2 if len(set(symbols.split())) == 1 else 1,
        diatomic=constants,
    )
    return molecule(
        symbols,
        [],
        [constants.we_cm1 - 2.0 * constants.wexe_cm1],
        masses_u=np.array(masses_u),
        stated=stated,
        multiplicity=multiplicity,
    ).but(coordinates_A=np.empty((0, 3)))


def radical(symbols: str, r_A: float, wavenumber_cm1: float, masses_u: list[float], **changes):
    x = [[0.0, 0.0, 0.0], [0.0, 0.0, r_A]]
    return molecule(symbols, x, [wavenumber_cm1], masses_u=np.array(masses_u), multiplicity=2, **changes)


def test_carbon_monoxide_is_the_table_s() -> None:
    # NIST-JANAF C-093 (M. W. Chase, Monograph 9, 1998) through the package janaf.
    frame = janaf.Table("C-093").df
    frame = frame.filter((frame["T(K)"] >= 100.0) & (frame["T(K)"] <= 3000.0))
    T = frame["T(K)"].to_numpy().astype(float)
    model = build_model(diatomic("C O", CO, [12.011, 15.999]))
    assert T.size > 25
    assert np.abs(model.s_R(T) * R - frame["S"].to_numpy().astype(float)).max() < 0.01
    assert np.abs(model.cp_R(T) * R - frame["Cp"].to_numpy().astype(float)).max() < 0.01
    assert model.h298_minus_h0_kJ_mol == pytest.approx(8.671, abs=0.002)
    assert model.zpe_kJ_mol == pytest.approx((2169.81358 / 2 - 13.28831 / 4) * 0.01196266, rel=1e-6)


def test_the_centrifugal_term_is_what_the_table_needs() -> None:
    # Without it Cp(3000 K) is 0.13 J/mol/K too low.
    stiff = build_model(diatomic("C O", replace(CO, D_cm1=1e-12), [12.011, 15.999]))
    real = build_model(diatomic("C O", CO, [12.011, 15.999]))
    assert float(real.cp_R(3000.0) - stiff.cp_R(3000.0)) * R == pytest.approx(0.13, abs=0.01)


def test_hydrogen() -> None:
    # NIST-JANAF H-050 and ATcT 1.112: S 130.680, Cp 28.836 (McBride et al. 1993 too), H − H(0) 8.467.
    model = build_model(diatomic("H H", H2, [1.008, 1.008]))
    assert float(model.s_R(298.15)) * R == pytest.approx(130.680, abs=0.01)
    assert float(model.cp_R(298.15)) * R == pytest.approx(28.84, abs=0.01)
    assert model.h298_minus_h0_kJ_mol == pytest.approx(8.467, abs=0.01)
    # Equilibrium hydrogen at 100 K: 28.154.
    assert float(model.cp_R(100.0)) * R == pytest.approx(28.154, abs=0.01)


# Enthalpy increments: ATcT 1.112 (B. Ruscic et al.), ΔfH(298.15 K) − ΔfH(0) plus the elements'.  S and Cp of OH and CH:
# B. J. McBride, S. Gordon, M. A. Reno, NASA TM-4513 (1993); of NO and ClO: L. V. Gurvich et al. (1989) through the
# nine-coefficient data of NASA, which have the 318 cm⁻¹ splitting of ClO (NIST-JANAF has not).
@pytest.mark.parametrize(
    ("symbols", "r_A", "nu", "masses", "h", "s", "cp"),
    [
        ("O H", 0.96966, 3568.0, [15.999, 1.008], 8.812, 183.739, 29.886),
        ("C H", 1.1199, 2732.46, [12.011, 1.008], 8.624, 183.036, 29.175),
        ("N O", 1.15077, 1876.05, [14.007, 15.999], 9.179, 210.748, 29.862),
        ("Cl O", 1.56963, 842.8, [35.45, 15.999], 9.522, 225.104, 34.471),
    ],
)
def test_radicals(symbols: str, r_A: float, nu: float, masses: list[float], h: float, s: float, cp: float) -> None:
    model = build_model(radical(symbols, r_A, nu, masses), ModelOptions(electronic="levels"))
    assert model.h298_minus_h0_kJ_mol == pytest.approx(h, abs=0.01)
    assert float(model.s_R(298.15)) * R == pytest.approx(s, abs=0.07 if "Cl" in symbols else 0.01)
    assert float(model.cp_R(298.15)) * R == pytest.approx(cp, abs=0.07 if "Cl" in symbols else 0.01)
    assert [c.name for c in model.contributions] == ["translation", "rotation and electronic", "vibration"]
    assert "level-sum" in {f.code for f in model.findings}


# OH: the lowest real level lies 38.2 cm⁻¹ below the origin, not A/2 = 69.6: B. Ruscic et al., J. Phys. Chem. A 106,
# 2727 (2002), from memory.  CH and NO: ²Π½ has its J = ½ level at B − A/2 exactly.
@pytest.mark.parametrize(
    ("symbols", "r_A", "nu", "masses", "lowest_cm1"),
    [
        ("O H", 0.96966, 3568.0, [15.999, 1.008], -38.2),
        ("C H", 1.1199, 2732.46, [12.011, 1.008], 14.19 - 27.95 / 2.0),
        ("N O", 1.15077, 1876.05, [14.007, 15.999], 1.6961 - 123.13 / 2.0),
    ],
)
def test_where_the_lowest_level_is(symbols: str, r_A: float, nu: float, masses: list[float], lowest_cm1: float) -> None:
    summed = build_model(radical(symbols, r_A, nu, masses), ModelOptions(electronic="levels"))
    assert summed.lowest_level_kJ_mol == pytest.approx(lowest_cm1 * CM1_KJ_MOL, abs=0.1 * CM1_KJ_MOL)
    assert build_model(radical(symbols, r_A, nu, masses)).lowest_level_kJ_mol == 0.0


def test_the_lowest_level_of_a_radical_from_its_constants() -> None:
    oh = DiatomicConstants(
        we_cm1=3737.761, wexe_cm1=84.8813, Be_cm1=18.9108, alphae_cm1=0.7242, A_cm1=-139.21, source="H & H 1979"
    )
    model = build_model(diatomic("O H", oh, [15.999, 1.008], multiplicity=2))
    assert model.lowest_level_kJ_mol == pytest.approx(-38.2 * CM1_KJ_MOL, abs=0.001)
    assert build_model(diatomic("C O", CO, [12.011, 15.999])).lowest_level_kJ_mol == 0.0


def test_mercapto() -> None:
    # NIST-JANAF H-046: S 195.628 with two electronic levels at 377 cm⁻¹, where the lowest real levels are 368 apart.
    sh = radical("S H", 1.3409, 2591.8, [32.06, 1.008])
    assert float(build_model(sh, ModelOptions(electronic="levels")).s_R(298.15)) * R == pytest.approx(195.628, abs=0.1)
    energies, weights = doublet_pi_rotation(-376.96, 9.4611, 0.0005)
    first_of_upper = energies[weights == 4.0].min()
    assert first_of_upper - energies.min() == pytest.approx(376.96 - 9.46, abs=1.0)


@pytest.mark.parametrize(("A", "B"), [(27.95, 14.19), (-139.21, 18.55), (123.13, 1.696), (0.5, 14.0), (-0.5, 14.0)])
def test_doublet_levels_are_the_eigenvalues_of_their_matrix(A: float, B: float) -> None:
    # Hund's case a basis, E. Hill, J. H. Van Vleck (1928): diagonal B(J+½)² − A/2 and B[(J+½)² − 2] + A/2, off-diagonal
    # −B√((J+½)² − 1); J = ½ has the first state only.
    expected = [B - A / 2.0]
    for n in range(2, 12):
        off = B * np.sqrt(n**2 - 1.0)
        expected += np.linalg.eigvalsh([[B * n**2 - A / 2.0, off], [off, B * (n**2 - 2.0) + A / 2.0]]).tolist()
    energies, weights = doublet_pi_rotation(A, B, 0.0)
    few = weights <= 2.0 * (2.0 * 10.5 + 2.0)
    np.testing.assert_allclose(np.sort(energies[few]), np.sort(expected), atol=1e-9)


def test_a_radical_from_its_constants_is_one_contribution() -> None:
    oh = DiatomicConstants(
        we_cm1=3737.761, wexe_cm1=84.8813, Be_cm1=18.9108, alphae_cm1=0.7242, A_cm1=-139.21, source="H & H 1979"
    )
    model = build_model(diatomic("O H", oh, [15.999, 1.008], multiplicity=2))
    assert [c.name for c in model.contributions] == ["translation", "vibration, rotation and electronic"]
    assert model.h298_minus_h0_kJ_mol == pytest.approx(8.812, abs=0.01)  # ATcT 1.112
    assert model.motion.low_modes == "level sum"
    plain = build_model(diatomic("O H", oh, [15.999, 1.008], multiplicity=2), ModelOptions(electronic="spin"))
    assert [c.name for c in plain.contributions] == ["translation", "vibration and rotation", "electronic"]


def test_excited_states_of_the_table_are_kept() -> None:
    # a⁴Σ⁻ of CH at 5844 cm⁻¹ matters at 3000 K.
    ch = radical("C H", 1.1199, 2732.46, [12.011, 1.008])
    levels, table = (build_model(ch, ModelOptions(electronic=kind)) for kind in ("levels", "table"))
    assert len(levels.levels) == 4
    summed = doublet_pi(ch, "levels")
    T = np.array([3000.0])
    gain = summed.contribution().ln_q(T).ln_q - replace(summed, excited=()).contribution().ln_q(T).ln_q
    x = np.exp(-1.438777 * np.array([0.0, 27.95, 5844.0, 23189.8]) / T)
    assert float(gain[0]) == pytest.approx(float(np.log(x @ [2, 2, 4, 4] / (x[:2] @ [2, 2]))), rel=0.01)
    # The rest is B0 for Be and the centrifugal term: S of the two models agrees within 0.1 R.
    assert float(levels.s_R(3000.0)) == pytest.approx(float(table.s_R(3000.0)), abs=0.1)
    assert levels.classical_limit_R is None


def test_where_there_are_no_constants() -> None:
    cn = radical("C N", 1.17, 2042.0, [12.0, 14.003])
    assert "level-sum" in {f.code for f in build_model(cn, ModelOptions(electronic="levels")).findings}
    od = radical("O H", 0.97, 2630.0, [15.995, 2.0141])
    model = build_model(od, ModelOptions(electronic="levels"))
    assert [f.severity for f in model.findings if f.code == "level-sum"] == ["warn"]
    assert "rotation" in [c.name for c in model.contributions]
    closed = molecule("C O", [[0, 0, 0], [0, 0, 1.13]], [2170.0])
    assert "level-sum" not in {f.code for f in build_model(closed, ModelOptions(electronic="levels")).findings}


def test_options_of_oscillators_are_said_to_be_without_effect() -> None:
    options = ModelOptions(frequency_scale=0.9, low_modes=LowModes("floor"), rotation="corrected")
    co = diatomic("C O", CO, [12.011, 15.999])
    model = build_model(co, options)
    (warning,) = [f for f in model.findings if f.severity == "warn"]
    assert all(word in warning.found for word in ("frequency_scale", "low_modes", "rotation"))
    assert float(model.s_R(1000.0)) == float(build_model(co).s_R(1000.0))
    assert model.frequency_scale == 1.0
    oh = radical("O H", 0.96966, 3568.0, [15.999, 1.008])
    said = build_model(oh, ModelOptions(electronic="levels", rotation="sum")).findings
    assert any("--rotation sum has no effect" in f.found for f in said)


def test_levels_end_at_dissociation() -> None:
    for constants in (H2, replace(CO, D0_cm1=30000.0)):
        energies, _ = vibration_rotation_levels(constants)
        assert energies.min() == 0.0
        assert energies.max() < constants.D0_cm1
        free, _ = vibration_rotation_levels(replace(constants, D0_cm1=None))
        assert free.size > energies.size
    open_end = replace(CO, A_cm1=100.0, D0_cm1=20000.0)
    assert np.ptp(doublet_pi_levels(open_end)[0]) < 20000.0
    with pytest.raises(ValueError, match="spin-orbit"):
        doublet_pi_levels(CO)
