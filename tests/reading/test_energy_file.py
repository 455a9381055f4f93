"""The energy of a separate single point: only for the same molecule at the same geometry.

The outputs are ours (NWChem 7.0.2): H2O optimised at HF/6-31G* with its frequencies, and frozen-core MP2/6-31G* at that
geometry, there turned, shifted and with the atoms in the order H, O, H; one O-H bond longer by 3 %; the cation.
"""

from __future__ import annotations

import numpy as np
import pytest

from heatwright import build_model
from heatwright.findings import Refused
from heatwright.formation.atomization import collect_atoms, formation_by_atomization
from heatwright.molecule import Molecule
from heatwright.reading.outputs import read_output
from heatwright.reading.single_point import with_energy
from heatwright.structure.superposition import matched, superposed
from kept_outputs import kept
from molecules import LEVEL, atom, water

HARTREE_KJ_MOL = 2625.4996394799  # CODATA 2018


def freq() -> Molecule:
    return read_output(kept("nwchem702_h2o_freq.out"))


def single(name: str = "water_mp2_energy") -> Molecule:
    return read_output(kept(f"nwchem702_{name}.out"))


def test_the_energy_is_the_other_file_s_and_the_rest_stays() -> None:
    m, other = freq(), single()
    made = with_energy(m, other)
    assert (made.energy_hartree, made.energy_kind) == (pytest.approx(-76.193065146883), "MP2")
    assert made.level_text == "MP2/6-31G*//HF/6-31G*"
    assert made.level == m.level
    assert made.level_of_energy == other.level
    assert made.energy_source == other.source
    assert (made.wavenumbers_cm1 == m.wavenumbers_cm1).all()
    (said,) = [f for f in made.findings if f.code == "energy-from-file"]
    assert "MP2 energy -76.19306515 hartree at MP2/6-31G*" in said.text
    assert "at the same geometry, atoms in another order; geometry and modes are at HF/6-31G*" in said.text


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("water_stretched_mp2_energy", r"0\.01\d\d Å \(RMSD\) from that of .*at most 0.01 Å"),
        ("water_cation_energy", r"charge of the energy \(1\) and of the frequencies \(0\) differ"),
        ("methanol_freq", r"atoms of the energy \(CH4O\) and of the frequencies \(H2O\) differ"),
    ],
)
def test_another_molecule_state_or_geometry_is_refused(name: str, words: str) -> None:
    with pytest.raises(Refused, match=words) as stopped:
        with_energy(freq(), single(name))
    assert {f.code for f in stopped.value.findings} == {"energy-of-another"}
    assert all(name in f.where for f in stopped.value.findings)


def test_the_cation_differs_in_charge_and_multiplicity() -> None:
    with pytest.raises(Refused) as stopped:
        with_energy(freq(), single("water_cation_energy"))
    assert len(stopped.value.findings) == 2


def test_an_unusable_or_empty_energy_file_is_refused_with_its_own_reasons() -> None:
    with pytest.raises(Refused) as stopped:
        with_energy(freq(), single("water_opt_failed"))
    assert "job-failed" in {f.code for f in stopped.value.findings}
    with pytest.raises(Refused, match="there is no total energy"):
        with_energy(water(), water(energies_hartree={}))


def test_a_molecule_without_geometry_is_refused() -> None:
    bare = water().but(coordinates_A=np.empty((0, 3)))
    with pytest.raises(Refused, match="without coordinates"):
        with_energy(bare, water(energies_hartree={"SCF": -76.0}))


def test_an_imaginary_mode_at_the_other_level_does_not_matter() -> None:
    ts = read_output(kept("nwchem702_nh3_planar_ts.out"))
    assert ts.n_imaginary == 1
    made = with_energy(ts.but(findings=()), ts)
    assert "imaginary-modes" not in {f.code for f in made.findings}


def test_atomization_compares_the_level_of_the_energy() -> None:
    """dHf(0) = sum dHf(atoms, 0) - [sum E(atoms) - E - ZPE], by hand; ATcT 1.112 for the atoms."""
    atoms = collect_atoms((single("o_atom_mp2"), single("h_atom_mp2")))
    with pytest.raises(Refused, match="method HF and MP2"):
        formation_by_atomization(build_model(freq()), atoms)
    model = build_model(with_energy(freq(), single()))
    formation = formation_by_atomization(model, atoms)
    bonds = (-74.878159576034 - 2 * 0.498232910729 + 76.193065146883) * HARTREE_KJ_MOL
    zpe = (1826.505 + 4056.406 + 4174.519) / 2.0 * 0.0119626565795
    assert formation.dHf0_kJ_mol == pytest.approx(246.844 + 2 * 216.034 - bonds + zpe, abs=0.002)
    assert "atoms at MP2/6-31G*" in formation.source


def test_an_atom_takes_another_energy_too() -> None:
    made = with_energy(single("o_atom_rohf"), single("o_atom_mp2"))
    assert (made.energy_kind, made.level_text) == ("MP2", "MP2/6-31G*//HF/6-31G*")
    formation = formation_by_atomization(build_model(made), collect_atoms((single("o_atom_mp2"),)))
    assert formation.dHf0_kJ_mol == pytest.approx(246.844)  # ATcT 1.112


def test_the_two_levels_of_atoms_made_by_hand() -> None:
    made = with_energy(water(), water(energies_hartree={"SCF": -76.34}, level=LEVEL))
    atoms = collect_atoms((atom("H", 2, -0.5), atom("O", 3, -75.0)))
    assert formation_by_atomization(build_model(made), atoms).method == "atomization"


def turned(x: np.ndarray, seed: int) -> np.ndarray:
    q, _ = np.linalg.qr(np.random.default_rng(seed).normal(size=(3, 3)))
    return x @ (q * np.sign(np.linalg.det(q))) + 0.3


@pytest.mark.parametrize(
    "name", ["methanol_freq", "h2o_freq", "methyl_cation", "nh3_planar_ts", "hbr_ecp", "water_pbe_cosmo"]
)
def test_any_order_and_orientation_is_recognised(name: str) -> None:
    m = single(name)
    rng = np.random.default_rng(5)
    for seed in range(3):
        order = rng.permutation(m.n_atoms)
        found = matched(
            m.atomic_numbers[order], turned(m.coordinates_A[order], seed), m.atomic_numbers, m.coordinates_A
        )
        assert found is not None
        assert found.rmsd_A < 1e-9


def test_a_mirror_image_is_not_the_same_geometry() -> None:
    """A distorted methanol is chiral: no rotation lays it over its image."""
    m = read_output(kept("nwchem702_methanol_freq.out"))
    bent = m.coordinates_A + 0.2 * np.random.default_rng(1).normal(size=m.coordinates_A.shape)
    mirrored = bent * [1.0, 1.0, -1.0]
    assert superposed(mirrored, bent).rmsd_A > 0.05
    assert superposed(turned(bent, 2), bent).rmsd_A < 1e-9
