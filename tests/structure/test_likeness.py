"""Same conformer, mirror image or neither, whatever the order of the atoms."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from heatwright.reading.outputs import read_output
from heatwright.structure.likeness import likeness

DATA = Path(__file__).resolve().parents[1] / "data" / "conformers"


def geometry(name: str) -> tuple[np.ndarray, np.ndarray]:
    m = read_output(str(DATA / f"{name}.toml"))
    return m.atomic_numbers, m.coordinates_A


def shuffled(z: np.ndarray, x: np.ndarray, seed: int) -> tuple[np.ndarray, np.ndarray]:
    """The molecule turned, moved and with its atoms in another order."""
    random = np.random.default_rng(seed)
    q, r = np.linalg.qr(random.standard_normal((3, 3)))
    q = q * np.sign(np.diag(r))
    q[:, 0] *= np.sign(np.linalg.det(q))
    order = random.permutation(z.size)
    return z[order], (x @ q + random.standard_normal(3))[order]


@pytest.mark.parametrize("seed", range(5))
@pytest.mark.parametrize("name", ["butane_trans", "butane_gauche", "ethanol_trans", "ethanol_gauche"])
def test_a_turned_and_reordered_copy_is_the_same(name: str, seed: int) -> None:
    z, x = geometry(name)
    found = likeness(z, x, *shuffled(z, x, seed))
    assert found.rmsd_A < 1e-6
    assert found.same
    assert not found.mirror


@pytest.mark.parametrize("seed", range(5))
@pytest.mark.parametrize("name", ["butane_gauche", "ethanol_gauche"])
def test_a_mirrored_copy_of_a_chiral_conformer_is_its_mirror_image(name: str, seed: int) -> None:
    z, x = geometry(name)
    found = likeness(z, x, *shuffled(z, x * [1.0, -1.0, 1.0], seed))
    assert found.mirror
    assert found.mirror_rmsd_A < 1e-6
    assert found.rmsd_A > 0.3


@pytest.mark.parametrize("name", ["butane_trans", "ethanol_trans"])
def test_a_mirrored_copy_of_an_achiral_conformer_is_the_same(name: str) -> None:
    z, x = geometry(name)
    assert likeness(z, x, *shuffled(z, -x, 1)).rmsd_A < 0.01


def test_two_optimisations_of_mirror_images() -> None:
    found = likeness(*geometry("ethanol_gauche"), *geometry("ethanol_gauche_mirror"))
    assert found.mirror
    assert found.mirror_rmsd_A < 0.001


@pytest.mark.parametrize("pair", [("butane_trans", "butane_gauche"), ("ethanol_trans", "ethanol_gauche")])
def test_different_conformers_are_neither(pair: tuple[str, str]) -> None:
    found = likeness(*geometry(pair[0]), *geometry(pair[1]))
    assert not found.same
    assert not found.mirror


def test_other_molecules_do_not_match() -> None:
    found = likeness(*geometry("butane_trans"), *geometry("ethanol_trans"))
    assert found.rmsd_A == found.mirror_rmsd_A == np.inf
