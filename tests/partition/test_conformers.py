"""Mixtures of conformers: exact derivatives, n-butane and ethanol, what is merged and what is refused."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from heatwright import ModelOptions, ThermoModel, build_model
from heatwright.constants import GAS_CONSTANT_J_MOL_K as R
from heatwright.constants import HARTREE_KJ_MOL, SECOND_RADIATION_CM_K
from heatwright.findings import Refused
from heatwright.molecule import Stated
from heatwright.partition.conformers import Conformer, ConformerMixture, conformer_ln_q, mixed
from heatwright.partition.contribution import ConstantFactor, total_ln_q
from heatwright.partition.mixing import mixture_model
from heatwright.partition.rotation import ClassicalRotor
from heatwright.partition.translation import Translation
from heatwright.partition.vibration import HarmonicVibration
from heatwright.reading.outputs import read_output
from molecules import LEVEL, molecule

mpmath.mp.dps = 40
C2 = mpmath.mpf(SECOND_RADIATION_CM_K)
DATA = Path(__file__).resolve().parents[1] / "data" / "conformers"
SCALES = ModelOptions(frequency_scale=0.9614, zpe_scale=0.9806)


def model_of(name: str, **changes: object) -> ThermoModel:
    return build_model(read_output(str(DATA / f"{name}.toml")).but(**changes), SCALES)


def mixture(*names: str) -> ThermoModel:
    return mixture_model([model_of(name) for name in names])


def codes(model: ThermoModel) -> list[str]:
    return [f.code for f in model.findings if f.code.startswith(("conformer", "level"))]


# --- the mixture is one ln q ---------------------------------------------------------------------------------------

MEMBERS = (
    ((120.0, 900.0), (0.8, 0.12, 0.11), 2, 0.0),
    ((110.0, 880.0), (0.4, 0.16, 0.13), 1, 3.8),
    ((35.0, 1200.0), (0.5, 0.14, 0.12), 3, 12.5),
)


def member(wavenumbers, constants, isomers, energy_kJ_mol) -> Conformer:
    parts = (ClassicalRotor(constants), HarmonicVibration(wavenumbers), ConstantFactor("optical isomers", isomers))
    return Conformer("made.out", energy_kJ_mol, isomers, parts)


def exact_mixture(T):
    def own(wavenumbers, constants, isomers, energy):
        A, B, C = (C2 * mpmath.mpf(b) for b in constants)
        q = isomers * mpmath.sqrt(mpmath.pi * T**3 / (A * B * C))
        for nu in wavenumbers:
            q /= 1 - mpmath.exp(-C2 * mpmath.mpf(nu) / T)
        return q * mpmath.exp(-mpmath.mpf(energy) * 1000 / (mpmath.mpf(R) * T))

    return mpmath.log(sum(own(*m) for m in MEMBERS))


@pytest.mark.parametrize("T", [50.0, 298.15, 1000.0, 6000.0])
def test_closed_forms_are_the_derivatives_of_ln_q(T: float) -> None:
    t = mpmath.mpf(T)
    members = tuple(member(*m) for m in MEMBERS)
    got = total_ln_q((*members[0].contributions, ConformerMixture(members)), np.array([T]))
    first, second = mpmath.diff(exact_mixture, t, 1), mpmath.diff(exact_mixture, t, 2)
    for value, truth in ((got.ln_q, exact_mixture(t)), (got.u, t * first), (got.w, t**2 * second)):
        assert abs(float(value[0]) - truth) <= 1e-10 * max(1, abs(truth))


conformers = st.lists(
    st.builds(
        member,
        st.lists(st.floats(20.0, 4000.0), min_size=1, max_size=20).map(tuple),
        st.tuples(*[st.floats(0.01, 20.0)] * 3),
        st.integers(1, 2),
        st.floats(0.0, 40.0),
    ),
    min_size=0,
    max_size=4,
).map(lambda others: (member(*MEMBERS[0]), *others))


def derivative(function, T: float) -> float:
    """First derivative by Richardson extrapolation of central differences (independent of the closed forms)."""
    table = [[(function(T + h) - function(T - h)) / (2 * h) for h in (T * 0.02 / 2**i for i in range(6))]]
    for order in range(1, 6):
        last, factor = table[-1], 4.0**order
        table.append([(factor * last[i + 1] - last[i]) / (factor - 1) for i in range(len(last) - 1)])
    return table[-1][0]


@settings(max_examples=100, deadline=None)
@given(conformers, st.floats(100.0, 6000.0))
def test_cp_is_dh_dt_and_t_ds_dt(members, T: float) -> None:
    parts = (Translation(58.0), *members[0].contributions, ConformerMixture(members))
    cp = float(total_ln_q(parts, np.array([T])).cp_R[0])
    h = derivative(lambda t: float(total_ln_q(parts, np.array([t])).h_RT[0]) * t, T)
    s = derivative(lambda t: float(total_ln_q(parts, np.array([t])).s_R[0]), T) * T
    assert h == pytest.approx(cp, rel=1e-9)
    assert s == pytest.approx(cp, rel=1e-9)


@given(conformers, st.floats(1.0, 6000.0))
def test_populations_are_fractions_in_proportion_to_exp_ln_q(members, T: float) -> None:
    grid = np.array([T])
    p = ConformerMixture(members).populations(grid)
    assert p.sum() == pytest.approx(1.0, abs=1e-14)
    own = [conformer_ln_q(m, grid).ln_q[0] for m in members]
    whole = mixed(tuple(conformer_ln_q(m, grid) for m in members))[0].ln_q[0]
    np.testing.assert_allclose(p[:, 0], np.exp(np.array(own) - whole), rtol=1e-10, atol=1e-300)


def test_a_mixture_starts_with_the_lowest() -> None:
    with pytest.raises(ValueError, match="lowest"):
        ConformerMixture((member(*MEMBERS[1]),))


# --- n-butane and ethanol ------------------------------------------------------------------------------------------


def butane_by_hand(T: np.ndarray) -> np.ndarray:
    """ln(q/N) of n-butane from the numbers in the molecule files, written out anew: trans once, gauche twice."""
    k, h, u, c = 1.380649e-23, 6.62607015e-34, 1.66053906660e-27, 299792458.0
    terms = []
    ground = None
    for name, degeneracy in (("butane_trans", 1), ("butane_gauche", 2)):
        m = read_output(str(DATA / f"{name}.toml"))
        x, masses, nu = m.coordinates_A * 1e-10, m.masses_u * u, m.wavenumbers_cm1 * 100.0 * h * c / k
        x = x - masses @ x / masses.sum()
        tensor = sum(w * (r @ r * np.eye(3) - np.outer(r, r)) for w, r in zip(masses, x, strict=True))
        ln_q = 1.5 * np.log(2 * np.pi * masses.sum() * k * T / h**2) + np.log(k * T / 1e5)
        ln_q = ln_q + 0.5 * np.log(np.pi * np.prod(np.linalg.eigvalsh(tensor))) - np.log(2.0)  # both have a C2 axis
        ln_q = ln_q + 1.5 * np.log(8 * np.pi**2 * k * T / h**2)
        ln_q = ln_q - np.log1p(-np.exp(-0.9614 * nu[:, None] / T)).sum(axis=0)
        level = m.energies_hartree["SCF"] * 4.3597447222071e-18 / k + 0.9806 * nu.sum() / 2.0
        ground = level if ground is None else ground
        terms.append(np.log(degeneracy) + ln_q - (level - ground) / T)
    return np.logaddexp(*terms)


def test_butane_is_the_analytic_mixture_of_trans_and_twice_gauche() -> None:
    T = np.array([100.0, 298.15, 700.0, 2000.0, 6000.0])
    made = mixture("butane_trans", "butane_gauche")
    assert [c.degeneracy for c in made.conformers] == [1, 2]
    assert made.conformers[1].relative_energy_kJ_mol == pytest.approx(3.83, abs=0.01)
    np.testing.assert_allclose(made.ln_q(T).ln_q, butane_by_hand(T), rtol=1e-9)
    entropy = derivative(lambda t: t * float(butane_by_hand(np.array([t]))[0]), 298.15)  # S = −dG/dT
    assert float(made.s_R(298.15)) == pytest.approx(entropy, rel=1e-9)
    # NASA TM-4513 (B. J. McBride, S. Gordon, M. A. Reno, 1993): 309.88 J/mol/K; trans alone misses it by 7.6.
    assert float(made.s_R(298.15)) * R == pytest.approx(309.88, abs=1.0)
    assert abs(float(model_of("butane_trans").s_R(298.15)) * R - 309.88) > 7.0


def test_shares_add_up_and_h0_is_the_lowest_conformers() -> None:
    made = mixture("butane_trans", "butane_gauche")
    table = made.tabulate([200.0, 298.15, 1000.0])
    assert list(table.shares)[-1] == "conformers"
    alone = model_of("butane_trans").tabulate(table.T_K)
    for name, share in alone.shares.items():
        np.testing.assert_array_equal(table.shares[name].s_J_mol_K, share.s_J_mol_K)
    np.testing.assert_allclose(table.cp_J_mol_K, made.cp_R(table.T_K) * R, rtol=1e-12)
    assert float(made.h_minus_h0_R(1.0)) == pytest.approx(4.0, abs=1e-6)  # only trans at 1 K: 5/2 + 3/2
    assert made.zpe_kJ_mol == model_of("butane_trans").zpe_kJ_mol
    assert np.sum(table.populations, axis=0) == pytest.approx([1.0] * 3, abs=1e-14)


def test_a_duplicate_changes_nothing() -> None:
    T = np.array([200.0, 298.15, 3000.0])
    once = mixture("butane_trans", "butane_gauche")
    gauche = model_of("butane_gauche")
    x = gauche.molecule.coordinates_A[::-1] @ np.array([[0.0, 1.0, 0.0], [-1.0, 0.0, 0.0], [0.0, 0.0, 1.0]]) + 2.0
    turned = gauche.molecule.but(
        coordinates_A=x,
        atomic_numbers=gauche.molecule.atomic_numbers[::-1].copy(),
        masses_u=gauche.molecule.masses_u[::-1].copy(),
    )
    again = [model_of("butane_trans"), gauche, build_model(turned, SCALES), model_of("butane_trans")]
    twice = mixture_model(again)
    for a, b in ((once.ln_q(T).ln_q, twice.ln_q(T).ln_q), (once.cp_R(T), twice.cp_R(T)), (once.s_R(T), twice.s_R(T))):
        np.testing.assert_array_equal(a, b)
    assert codes(twice) == ["conformer-merged"] * 2


def test_the_order_of_the_outputs_does_not_matter() -> None:
    T = np.array([200.0, 298.15, 3000.0])
    one, other = mixture("butane_trans", "butane_gauche"), mixture("butane_gauche", "butane_trans")
    np.testing.assert_array_equal(one.ln_q(T).ln_q, other.ln_q(T).ln_q)
    assert codes(one) == []
    (said,) = [f for f in other.findings if f.code == "conformer-not-lowest"]
    assert "butane_trans.toml lies 3.826 kJ/mol below it" in said.text
    assert other.molecule.source.file.endswith("butane_trans.toml")
    assert other.named_after.source.file.endswith("butane_gauche.toml")


def test_gauche_ethanol_and_its_mirror_image() -> None:
    made = mixture("ethanol_gauche", "ethanol_gauche_mirror", "ethanol_trans")
    assert codes(made) == ["conformer-mirror"]
    assert [(Path(c.file).stem, c.degeneracy) for c in made.conformers] == [("ethanol_gauche", 2), ("ethanol_trans", 1)]
    np.testing.assert_array_equal(made.s_R(298.15), mixture("ethanol_gauche", "ethanol_trans").s_R(298.15))
    # NASA TM-4513: 280.59 J/mol/K. Harmonic torsions leave the mixture 1.5 too low, one conformer alone 5 to 10.
    assert float(made.s_R(298.15)) * R == pytest.approx(279.12, abs=0.02)
    assert 280.59 - float(model_of("ethanol_trans").s_R(298.15)) * R == pytest.approx(9.9, abs=0.1)
    assert 280.59 - float(model_of("ethanol_gauche").s_R(298.15)) * R == pytest.approx(4.9, abs=0.1)


def test_one_enantiomer_alone_counts_what_is_given() -> None:
    one = ModelOptions(optical_isomers=1)
    pair = [build_model(read_output(str(DATA / f"ethanol_gauche{m}.toml")), one) for m in ("", "_mirror")]
    made = mixture_model(pair)
    assert codes(made) == []
    assert float(made.s_R(298.15) - pair[0].s_R(298.15)) == pytest.approx(np.log(2.0), abs=1e-4)


# --- what is not a mixture -----------------------------------------------------------------------------------------


def refused(*models: ThermoModel, **options: bool) -> list[tuple[str, str]]:
    with pytest.raises(Refused) as error:
        mixture_model(models, **options)
    return [(f.code, f.text) for f in error.value.findings]


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"charge": 1, "multiplicity": 2}, "charge 1 and not 0; multiplicity 2 and not 1"),
        ({"multiplicity": 3}, "multiplicity 3 and not 1"),
    ],
)
def test_other_states_are_refused(changes: dict, words: str) -> None:
    found = refused(model_of("butane_trans"), model_of("butane_gauche", **changes))
    assert found[0][0] == "conformer-differs"
    assert words in found[0][1]
    assert "butane_gauche.toml" in found[0][1]


def test_another_composition_is_refused() -> None:
    ((code, text),) = refused(model_of("butane_trans"), model_of("ethanol_trans"))
    assert code == "conformer-differs"
    assert "composition C2H6O and not C4H10" in text


def test_an_isomer_is_refused() -> None:
    geometry = [[0, 0, -1.06], [0, 0, 0], [0, 0, 1.15]]
    nitrile = molecule("H C N", geometry, [713, 713, 2130, 3440], energies_hartree={"SCF": -93.4})
    isonitrile = nitrile.but(coordinates_A=np.array([[0, 0, 2.15], [0, 0, 0], [0, 0, 1.17]]))
    ((code, text),) = refused(build_model(nitrile), build_model(isonitrile))
    assert code == "conformer-differs"
    assert "so that it is an isomer of that in" in text


def test_another_isotope_is_refused() -> None:
    gauche = model_of("butane_gauche")
    masses = gauche.molecule.masses_u.copy()
    masses[np.flatnonzero(gauche.molecule.atomic_numbers == 6)[0]] = 13.003355
    ((code, text),) = refused(model_of("butane_trans"), model_of("butane_gauche", masses_u=masses))
    assert code == "conformer-differs"
    assert "a mass of 59.08" in text


@pytest.mark.parametrize(
    ("other", "words"),
    [
        ({"basis": "cc-pVTZ"}, "basis 6-31G* and cc-pVTZ"),
        ({"program": "ORCA"}, "program NWChem and ORCA"),
        ({"functional": "VWN5"}, "VWN1RPA and with VWN5"),
    ],
)
def test_levels_and_programs_are_not_mixed_unless_trusted(other: dict, words: str) -> None:
    pair = (model_of("butane_trans"), model_of("butane_gauche", level=replace(LEVEL, **other)))
    ((code, text),) = refused(*pair)
    assert code == "level-differs"
    assert words in text
    trusted = mixture_model(pair, trust_levels=True)
    assert codes(trusted) == ["level-trusted"]
    assert len(trusted.conformers) == 2


def test_energies_of_another_kind_or_none_are_refused() -> None:
    mp2 = {"energies_hartree": {"MP2": -157.9}, "energy_kind": "MP2"}
    assert "energy SCF and MP2" in refused(model_of("butane_trans"), model_of("butane_gauche", **mp2))[0][1]
    none = model_of("butane_gauche", energies_hartree={}, energy_kind="")
    assert refused(model_of("butane_trans"), none)[0][0] == "no-energy"


def test_nearly_one_geometry_with_two_energies_is_a_warning() -> None:
    gauche = model_of("butane_gauche").molecule
    energy = gauche.energies_hartree["SCF"] + 0.5 / HARTREE_KJ_MOL
    made = mixture_model([model_of("butane_gauche"), model_of("butane_gauche", energies_hartree={"SCF": energy})])
    assert codes(made) == ["conformers-alike"]
    assert len(made.conformers) == 2


def test_conformers_beside_a_torsion_are_a_warning() -> None:
    trans = model_of("butane_trans")
    turning = replace(trans, contributions=(*trans.contributions, ConstantFactor("torsion 1-2", 1.0)))
    assert codes(mixture_model([turning, model_of("butane_gauche")])) == ["conformers-and-torsion"]
    assert codes(mixture_model([turning])) == []


def test_conformers_without_geometry_are_compared_by_constants_and_modes() -> None:
    def stated(constants: tuple[float, ...], energy: float) -> ThermoModel:
        known = Stated(rotational_constants_cm1=constants, symmetry_number=1, point_group="C1")
        made = molecule("O H H", [[0, 0, 0]] * 3, [300.0, 900.0, 3000.0], energies_hartree={"SCF": energy})
        return build_model(made.but(coordinates_A=np.empty((0, 3)), stated=known))

    one, again, other = stated((3.0, 2.0, 1.0), -1.0), stated((3.0, 2.0, 1.0), -1.0), stated((3.0, 2.0, 1.2), -1.0)
    assert len(mixture_model([one, again]).conformers) == 1
    assert len(mixture_model([one, other]).conformers) == 2
