"""Molecules with hindered rotors against tables, the projected modes, zero-point energies, nothing counted twice."""

from __future__ import annotations

import json
from functools import lru_cache

import numpy as np
import pytest

from heatwright import ModelOptions, ThermoModel, build_model
from heatwright.cli.main import main
from heatwright.constants import CM1_KJ_MOL, GAS_CONSTANT_J_MOL_K
from heatwright.errors import UsageError
from heatwright.findings import Refused
from heatwright.molecule import Molecule
from heatwright.reading.outputs import read_output
from heatwright.reading.torsion_scans import read_torsion
from heatwright.resources import sample_outputs
from heatwright.structure.modes import SQUARE_CM2
from heatwright.structure.torsions import alike_bonds, rotatable_bond, torsion_vectors
from outside import SHARED, needs_shared

R = GAS_CONSTANT_J_MOL_K
METHANOL = str(sample_outputs() / "CH3OH.out")
BARRIER = "3-1-2-4 n=3 V=373 cm-1"


read_once = lru_cache(read_torsion)


def sample(name: str) -> Molecule:
    return read_output(str(sample_outputs() / f"{name}.out"))


def model(m: Molecule, *torsions: str, **options) -> ThermoModel:
    return build_model(m, ModelOptions(torsions=tuple(read_once(t) for t in torsions), **options))


def computed(name: str) -> Molecule:
    assert SHARED is not None
    return read_output(str(SHARED / "computed" / f"{name}.out.gz"))


def scan(name: str, atoms: str = "") -> str:
    assert SHARED is not None
    return f"{atoms} {SHARED / 'computed' / 'scans' / name}".strip()


def codes(made: ThermoModel) -> set[str]:
    return {f.code for f in made.findings}


# S(298.15) and Cp of an independent code for the same outputs and scans, and the table (TM-4513; CRC for ethanol).
CASES = {
    "CH3OH": ([("CH3OH", "")], 239.4, 44.9, 239.81),
    "H2O2": ([("H2O2", "")], 234.2, 41.6, 234.53),
    "CH3OCH3": ([("CH3OCH3", "4-1-2-3"), ("CH3OCH3", "1-2-3-7")], 267.0, 66.3, 267.38),
    "CH3CH2OH": ([("CH3CH2OH_OH", ""), ("CH3CH2OH_CH3", "")], None, None, 281.6),
}


@needs_shared
@pytest.mark.parametrize("name", CASES)
def test_entropies_of_computed_molecules(name: str) -> None:
    scans, s, cp, table = CASES[name]
    made = model(computed(name), *(scan(*each) for each in scans), frequency_scale=0.9614)
    at = made.ln_q(298.15)
    assert float(at.s_R) * R == pytest.approx(table, abs=1.0)
    if s is not None:
        assert float(at.s_R) * R == pytest.approx(s, abs=0.35)
        assert float(at.cp_R) * R == pytest.approx(cp, abs=0.25)
    harmonic = build_model(computed(name), ModelOptions(frequency_scale=0.9614))
    assert abs(float(at.s_R) * R - table) < abs(float(harmonic.s_R(298.15)) * R - table)
    assert all(t.overlap > 0.97 for t in made.torsions)


@needs_shared
def test_mirror_images_are_counted_once() -> None:
    m = computed("H2O2")
    made, harmonic = model(m, scan("H2O2")), build_model(m)
    assert (made.optical_isomers, harmonic.optical_isomers) == (1, 2)
    assert "torsion-counted-twice" in codes(made)
    # the lowest pair of levels is the tunnelling pair of the two mirror images
    assert made.torsions[0].rotor.levels_cm1[1] < 30.0
    twice = model(m, scan("H2O2"), optical_isomers=2)
    assert [f.severity for f in twice.findings if f.code == "torsion-counted-twice"] == ["warn"]
    assert float(twice.s_R(298.15) - made.s_R(298.15)) == pytest.approx(np.log(2))
    # a potential with one well does not hold both
    one_well = model(m, "3-1-2-4 n=1 V=2000 cm-1")
    assert one_well.optical_isomers == 2
    assert "torsion-counted-twice" not in codes(one_well)


@needs_shared
def test_a_given_potential_holds_the_mirror_image_of_gauche_butane() -> None:
    # Three wells of a cosine lie at 65, 185 and 305 degrees; the last is the other gauche form (at 295 in truth).
    methyls = ("5-1-2-3 n=3 V=1000 cm-1", "2-3-4-6 n=3 V=1000 cm-1")
    made = model(computed("gauche_butane"), *methyls, "1-2-3-4 n=3 V=1200 cm-1")
    assert made.optical_isomers == 1
    assert model(computed("gauche_butane"), *methyls).optical_isomers == 2


@needs_shared
def test_gauche_and_trans_ethanol_with_one_potential() -> None:
    torsions = scan("CH3CH2OH_OH"), scan("CH3CH2OH_CH3")
    trans, gauche = (model(computed(n), *torsions) for n in ("CH3CH2OH", "CH3CH2OH_gauche"))
    assert gauche.optical_isomers == 1
    assert float(trans.s_R(298.15)) * R == pytest.approx(float(gauche.s_R(298.15)) * R, abs=0.6)
    lower = [f for f in trans.findings if f.code == "scan-lower-minimum"]
    assert lower
    assert "scan-lower-minimum" not in codes(gauche)
    # H(0) lies 120 1/cm lower than the trans minimum's own zero-point level would say
    (oh,) = (t for t in trans.torsions if t.is_lower_elsewhere)
    assert oh.rotor.ground_cm1 - oh.ground_cm1 == pytest.approx(oh.depth_cm1)
    assert oh.depth_cm1 == pytest.approx(120.0, abs=5.0)


def test_a_rotor_takes_the_place_of_one_mode() -> None:
    m = sample("CH3OH")
    made, harmonic = model(m, BARRIER), build_model(m)
    parts = {c.name: c for c in made.contributions}
    left = np.array(parts["vibration"].wavenumbers_cm1)
    assert left.size == m.wavenumbers_cm1.size - 1
    np.testing.assert_allclose(left, m.wavenumbers_cm1[1:], atol=6.0)  # the OH torsion is the lowest mode
    rotor = made.torsions[0].rotor
    assert made.zpe_kJ_mol == pytest.approx((left.sum() / 2 + rotor.ground_cm1) * CM1_KJ_MOL)
    assert abs(made.zpe_kJ_mol - harmonic.zpe_kJ_mol) < 1.0
    assert made.torsions[0].overlap > 0.99


def test_the_cost_that_is_said_is_the_difference() -> None:
    m = sample("CH3OH")
    made, harmonic = model(m, BARRIER), build_model(m)
    s, cp = (float(f(298.15) - g(298.15)) * R for f, g in ((made.s_R, harmonic.s_R), (made.cp_R, harmonic.cp_R)))
    (words,) = (f.text for f in made.findings if "against harmonic" in f.text)
    assert f"by {s:+.2f} and Cp(298.15 K) by {cp:+.2f}" in words


def test_printed_modes_serve_as_well_as_the_hessian() -> None:
    m = read_output(METHANOL, with_hessian=True)
    assert m.hessian_hartree_bohr2 is not None
    one = model(m, BARRIER)
    two = model(m.but(hessian_hartree_bohr2=None), BARRIER)
    waves = [np.array(next(c for c in x.contributions if c.name == "vibration").wavenumbers_cm1) for x in (one, two)]
    np.testing.assert_allclose(*waves, atol=1.5)
    with pytest.raises(Refused, match="projecting out a torsion needs the force constants"):
        model(m.but(hessian_hartree_bohr2=None, normal_modes=None), BARRIER)


def test_two_tops_and_their_coupling() -> None:
    m = sample("CH3OCH3")
    texts = ("4-1-2-3 n=3 V=900 cm-1", "7-3-2-1 n=3 V=900 cm-1")
    plain, coupled = (model(m, *texts, torsion_coupling=c) for c in (False, True))
    change = float(coupled.s_R(298.15) - plain.s_R(298.15)) * R
    assert change == pytest.approx(-0.16, abs=0.01)  # an independent code
    np.testing.assert_allclose(coupled.cp_R([300.0, 2000.0]), plain.cp_R([300.0, 2000.0]), rtol=1e-12)
    assert len({c.name for c in plain.contributions}) == len(plain.contributions)
    assert all(t.overlap > 0.97 for t in plain.torsions)


def test_one_of_two_equivalent_tops_is_not_a_wrong_mode() -> None:
    # The modes of dimethyl ether are the sum and the difference of its tops' torsions, 0.6 of one top each.
    ether, one, other = sample("CH3OCH3"), "4-1-2-3 n=3 V=900 cm-1", "7-3-2-1 n=3 V=900 cm-1"
    alone = model(ether, one)
    assert "torsion-overlap" not in codes(alone)
    assert alone.torsions[0].overlap > 0.97
    (said,) = [f for f in alone.findings if f.code == "torsion-equivalent"]
    assert said.severity == "warn"
    assert "torsion 1-2-3-7, equivalent to one that is treated, was not given and stays an oscillator" in said.text
    assert "torsion-equivalent" not in codes(model(ether, one, other))
    assert "torsion-equivalent" not in codes(model(sample("CH3OH"), BARRIER))
    masses = ether.masses_u.copy()
    masses[6:] = 2.0141  # CH3OCD3 has no equivalent tops
    bond = rotatable_bond(ether.atomic_numbers, masses, ether.coordinates_A, (3, 0, 1, 2))
    assert alike_bonds(ether.atomic_numbers, masses, ether.coordinates_A, [bond]) == []


@needs_shared
def test_equivalent_tops_of_a_larger_molecule() -> None:
    made = model(computed("isobutane"), "4-3-1-2 n=3 V=1100 cm-1")
    (said,) = [f for f in made.findings if f.code == "torsion-equivalent"]
    assert said.text.count("-") > 6
    assert "were not given and stay oscillators" in said.text
    assert "torsion-overlap" not in codes(made)


def test_a_torsion_mixed_with_another_motion_is_seen() -> None:
    # Force constants in which the torsion of methanol is half of each of two modes, 200 and 600 1/cm.
    m = read_output(METHANOL, with_hessian=True)
    assert m.hessian_hartree_bohr2 is not None
    bond = rotatable_bond(m.atomic_numbers, m.masses_u, m.coordinates_A, (2, 0, 1, 3))
    weights = np.repeat(np.sqrt(m.masses_u), 3)
    torsion = torsion_vectors(m.masses_u, m.coordinates_A, [bond])
    torsion /= np.linalg.norm(torsion)
    K = m.hessian_hartree_bohr2 / np.outer(weights, weights)
    stretch = np.linalg.eigh(K)[1][:, -1:]
    stretch -= torsion * (torsion.T @ stretch)
    stretch /= np.linalg.norm(stretch)
    rest = np.eye(len(K)) - torsion @ torsion.T - stretch @ stretch.T
    K = rest @ K @ rest
    for nu, mixed in ((200.0, torsion + stretch), (600.0, torsion - stretch)):
        K += nu**2 / SQUARE_CM2 * mixed @ mixed.T / 2.0
    waves = np.sqrt(np.abs(np.linalg.eigvalsh(K)[6:]) * SQUARE_CM2)
    made = model(m.but(hessian_hartree_bohr2=K * np.outer(weights, weights), wavenumbers_cm1=waves), BARRIER)
    assert made.torsions[0].overlap == pytest.approx(0.5, abs=0.01)
    assert "torsion-overlap" in codes(made)


def test_what_cannot_be_together() -> None:
    m = sample("CH3OH")
    with pytest.raises(Refused, match="two torsions were asked for about the bond 1-2"):
        model(m, BARRIER, "5-1-2-4 n=3 V=373 cm-1")
    stiff = m.but(wavenumbers_cm1=np.maximum(m.wavenumbers_cm1, 1100.0))
    with pytest.raises(Refused, match="1 torsions were asked for, and 0 modes"):
        model(stiff, BARRIER)
    with pytest.raises(UsageError, match="anharmonic"):
        ModelOptions(anharmonic=True, torsions=(read_torsion(BARRIER),))


def test_a_scan_whose_angles_are_counted_from_elsewhere_is_refused(tmp_path) -> None:
    # The frequencies are at 180 degrees, where a minimum is; these angles start with 0 at the minimum.
    rows = "\n".join(f"{a},{250.0 * (1 - np.cos(np.radians(3 * a)))}" for a in range(0, 360, 30))
    path = tmp_path / "scan.csv"
    path.write_text(f"# atoms 3-1-2-4\nangle_deg,energy_cm-1\n{rows}\n")
    with pytest.raises(Refused, match=r"there the potential .* has no minimum"):
        model(sample("CH3OH"), str(path))


@needs_shared
def test_minima_that_are_no_conformers_besides() -> None:
    made = model(computed("CH3CH2OH_gauche"), scan("CH3CH2OH_OH"), scan("CH3CH2OH_CH3"))
    assert [t.different_minima for t in made.torsions] == [3, 1]  # trans and two gauche; methyl
    assert any("3 different minima" in f.text for f in made.findings)


def test_free_rotor() -> None:
    made = model(sample("CH3OH"), "3-1-2-4 n=3 V=0 cm-1")
    rotor = made.torsions[0].rotor
    assert rotor.ground_cm1 == 0.0
    assert float(rotor.ln_q(np.array([2000.0])).cp_R[0]) == pytest.approx(0.5, abs=1e-6)


def run(capfd, *words: str) -> tuple[int, str, str]:
    with pytest.raises(SystemExit) as stopped:
        main(list(words))
    captured = capfd.readouterr()
    return int(stopped.value.code or 0), captured.out, captured.err


def test_table_as_json_shows_the_torsion(capfd) -> None:
    code, out, _ = run(capfd, "table", METHANOL, "--torsion", BARRIER, "--json", "--temperatures", "298.15")
    assert code == 0
    (species,) = json.loads(out)["species"]
    (torsion,) = species["torsions"]
    assert torsion["atoms"] == [3, 1, 2, 4]
    assert torsion["barrier_cm-1"] == pytest.approx(373.0)
    assert torsion["symmetry"] == 3
    assert torsion["levels_cm-1"][0] == 0.0
    assert torsion["F_cm-1"] == pytest.approx(26.7, abs=0.1)
    assert torsion["overlap"] > 0.99
    assert "torsion" in species["table"]["contributions"]
    assert species["low_modes"] == "harmonic"


def test_the_entry_records_it_in_ascii(capfd) -> None:
    given = ("--dHf298", "-200.7 kJ/mol", "--source", "ATcT 1.112")
    code, out, _ = run(capfd, "entry", METHANOL, "--torsion", BARRIER, *given)
    assert code == 0
    assert out.isascii()
    assert "harmonic oscillators and 1 hindered rotor" in out
    assert "note: torsion 3-1-2-4 (given): barrier 373 cm^-1" in out
    assert "against harmonic oscillators the torsion changed" in " ".join(out.replace("!", "").split())


def test_refusals_have_exit_code_3_and_write_nothing(capfd, tmp_path) -> None:
    target = tmp_path / "x.dat"
    words = ("entry", METHANOL, "--dHf298", "1 kJ/mol", "-o", str(target), "--torsion")
    for torsion in ("1-2-3-4 n=3 V=373 cm-1", str(tmp_path / "nothing")):
        code, out, err = run(capfd, *words, torsion)
        assert (code, out, target.exists()) == (3, "", False)
        assert err.startswith("error: ")
    code, _, err = run(capfd, "table", METHANOL, METHANOL, "--torsion", BARRIER)
    assert code == 2
    assert "belongs to one OUTPUT" in err


def test_the_uncertainty_of_a_barrier(capfd) -> None:
    words = (
        "table",
        METHANOL,
        "--torsion",
        BARRIER,
        "--uncertainty",
        "scale=0,low=0,barrier=0.1",
        "--temperatures",
        "298.15",
        "--json",
    )
    code, out, _ = run(capfd, *words)
    assert code == 0
    low, high = (model(sample("CH3OH"), f"3-1-2-4 n=3 V={373 * f} cm-1") for f in (0.99, 1.01))
    slope = abs(float(high.s_R(298.15) - low.s_R(298.15))) * R / 0.02
    assert "barrier" in out
    (species,) = json.loads(out)["species"]
    (u,) = species["uncertainty"]["S_J_mol_K"]
    assert u == pytest.approx(0.1 * slope, rel=0.02)
