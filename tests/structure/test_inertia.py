"""Moments of inertia against closed forms, measured diatomics and an independent program."""

from __future__ import annotations

import math

import numpy as np
import pytest
from ase.build import molecule
from ase.collections import g2
from hypothesis import given, settings
from hypothesis import strategies as st

from heatwright.constants import INERTIA_CM1_U_A2
from heatwright.structure.inertia import Inertia, inertia, line_distances

H, C, N, O = 1.00782503, 12.0, 14.00307400, 15.99491462  # noqa: E741


def bent(angle_degrees: float, first_A: float, second_A: float) -> np.ndarray:
    """Three atoms, the middle one at the origin."""
    angle = math.radians(angle_degrees)
    return np.array([[first_A, 0, 0], [0, 0, 0], [second_A * math.cos(angle), second_A * math.sin(angle), 0]])


@pytest.mark.parametrize(
    ("masses", "r_e_A", "B_e_cm1"),
    [
        # Huber and Herzberg, Constants of Diatomic Molecules (1979), r_e and B_e from memory
        ((C, O), 1.128323, 1.93128),
        ((N, N), 1.097685, 1.99824),
        ((H, 34.96885268), 1.274552, 10.59342),
        ((H, 18.99840316), 0.916808, 20.9557),
        ((34.96885268, 34.96885268), 1.98792, 0.24399),
    ],
)
def test_diatomics_have_their_measured_rotational_constant(masses, r_e_A, B_e_cm1) -> None:
    found = inertia(masses, [[0.3, 0.1, 0], [0.3, 0.1, r_e_A]])
    assert found.kind == "linear"
    assert found.rotational_constants_cm1 == pytest.approx([B_e_cm1], rel=1e-4)


def test_water_follows_the_closed_form() -> None:
    """I_a + I_b = I_c in a plane; about its twofold axis water has 2 m_H y²."""
    r, angle = 0.9572, 104.52
    found = inertia([H, O, H], bent(angle, r, r))
    y = r * math.sin(math.radians(angle / 2))
    z = r * math.cos(math.radians(angle / 2))
    about_c2, in_plane = 2 * H * y**2, 2 * H * O / (2 * H + O) * z**2
    assert found.principal_moments_u_A2 == pytest.approx(sorted([about_c2, in_plane, about_c2 + in_plane]), rel=1e-12)
    assert found.rotational_constants_cm1 == pytest.approx(INERTIA_CM1_U_A2 / found.principal_moments_u_A2)
    assert found.kind == "asymmetric top"
    assert found.n_rotations == 3


def test_methane_is_a_spherical_top() -> None:
    """I = 8/3 m_H r² for XY4."""
    place = np.array([[0, 0, 0], [1, 1, 1], [1, -1, -1], [-1, 1, -1], [-1, -1, 1]]) * 1.0870 / math.sqrt(3)
    found = inertia([C, H, H, H, H], place)
    assert found.kind == "spherical top"
    assert found.principal_moments_u_A2 == pytest.approx([8 / 3 * H * 1.0870**2] * 3, rel=1e-12)


@pytest.mark.parametrize(
    ("name", "kind"),
    [
        ("H", "atom"),
        ("CO2", "linear"),
        ("2-butyne", "prolate symmetric top"),
        ("CH3Cl", "prolate symmetric top"),
        ("C6H6", "oblate symmetric top"),
        ("NH3", "oblate symmetric top"),
        ("CF4", "spherical top"),
        ("C2H4", "asymmetric top"),
    ],
)
def test_rotors_are_named(name: str, kind: str) -> None:
    atoms = molecule(name)
    assert inertia(atoms.get_masses(), atoms.positions).kind == kind


@pytest.mark.parametrize("name", g2.names)
def test_moments_agree_with_an_independent_program(name: str) -> None:
    """ASE's own moments of inertia for all 162 geometries of the G2/97 set."""
    atoms = molecule(name)
    found = inertia(atoms.get_masses(), atoms.positions)
    assert found.principal_moments_u_A2 == pytest.approx(atoms.get_moments_of_inertia(), rel=1e-9, abs=1e-9)
    assert found.centre_of_mass_A == pytest.approx(atoms.get_center_of_mass(), abs=1e-12)


@pytest.mark.parametrize("name", ["H2O", "CO2", "C2H6", "CH3CHO", "bicyclobutane"])
def test_axes_diagonalise_the_inertia_tensor(name: str) -> None:
    atoms = molecule(name)
    m = atoms.get_masses()
    found = inertia(m, atoms.positions)
    r = (atoms.positions - found.centre_of_mass_A) @ found.axes.T
    tensor = np.sum(m * np.sum(r**2, axis=1)) * np.eye(3) - r.T @ (m[:, None] * r)
    assert tensor == pytest.approx(np.diag(found.principal_moments_u_A2), abs=1e-9)
    assert np.linalg.det(found.axes) == pytest.approx(1.0)


def test_atom_has_no_rotation() -> None:
    found = inertia([15.99], [[1.0, 2.0, 3.0]])
    assert (found.kind, found.n_rotations, found.rotational_constants_cm1.size) == ("atom", 0, 0)
    assert found.centre_of_mass_A.tolist() == [1.0, 2.0, 3.0]


# --- what is linear ---------------------------------------------------------------------------------------------------

HCN = np.array([[0, 0, -1.0655], [0, 0, 0], [0, 0, 1.1532]])
CYANOBUTADIYNE_LIKE = np.column_stack([np.zeros((7, 2)), np.cumsum([0, 1.06, 1.21, 1.37, 1.21, 1.37, 1.16])])


@pytest.mark.parametrize("place", [HCN, CYANOBUTADIYNE_LIKE], ids=["HCN", "HC5N"])
@pytest.mark.parametrize("noise_A", [1e-4, 1e-3, 3e-3])
@pytest.mark.parametrize("seed", range(5))
def test_noise_leaves_a_linear_molecule_linear(place, noise_A, seed) -> None:
    rng = np.random.default_rng(seed)
    masses = [H] + [C] * (len(place) - 2) + [N]
    found = inertia(masses, place + rng.normal(0, noise_A, place.shape))
    assert found.is_linear
    assert found.n_rotations == 2
    exact = inertia(masses, place).rotational_constants_cm1
    assert found.rotational_constants_cm1 == pytest.approx(exact, rel=5 * noise_A)


@pytest.mark.parametrize(
    ("masses", "place"),
    [
        ((H, O, H), bent(104.5, 0.96, 0.96)),
        ((H, C, N), bent(175, 1.0655, 1.1532)),
        ((O, C, O), bent(175, 1.16, 1.16)),
        ((H, C, H), bent(175, 1.08, 1.08)),
        ((C, C, C), bent(175, 1.28, 1.28)),
    ],
)
def test_bent_molecules_are_not_linear(masses, place) -> None:
    assert not inertia(masses, place).is_linear
    assert line_distances(place).max() > 0.03  # twice the tolerance


def test_a_heavy_atom_does_not_hide_the_bend() -> None:
    """H–Hg–H bent to 175°: the mass-weighted line would pass within 0.001 Å of the mercury."""
    assert not inertia([H, 201.97, H], bent(175, 1.65, 1.65)).is_linear


def test_tolerance_is_the_callers() -> None:
    assert inertia([H, C, N], bent(175, 1.0655, 1.1532), tolerance_A=0.05).is_linear


# --- invariance -------------------------------------------------------------------------------------------------------


@settings(max_examples=60, deadline=None)
@given(st.integers(0, 2**32 - 1), st.sampled_from(["H2O", "C2H6", "CO2", "CH3CHO", "C6H6", "N2H4"]))
def test_rotation_translation_and_order_change_nothing(seed: int, name: str) -> None:
    rng = np.random.default_rng(seed)
    atoms = molecule(name)
    turn, _ = np.linalg.qr(rng.normal(size=(3, 3)))
    order = rng.permutation(len(atoms))
    moved = (atoms.positions @ turn.T + rng.normal(size=3) * 10)[order]
    before, after = inertia(atoms.get_masses(), atoms.positions), inertia(atoms.get_masses()[order], moved)
    assert after.principal_moments_u_A2 == pytest.approx(before.principal_moments_u_A2, rel=1e-9, abs=1e-9)
    assert after.kind == before.kind


# --- what is refused --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("masses", "place", "words"),
    [
        ([1.0, 1.0], [[0, 0, 0], [0, 0, 1e-3]], r"atoms 1 and 2 are 0\.001 Å apart"),
        ([1.0, 1.0, 1.0], [[0, 0, 0], [0, 0, 1], [0, 0, 1]], "atoms 2 and 3 are 0 Å apart"),
        ([1.0, 1.0], [[0, 0, 0], [0, float("nan"), 1]], "atom 2 has the coordinates"),
        ([1.0, float("inf")], [[0, 0, 0], [0, 0, 1]], "atom 2 has the mass inf u"),
        ([0.0, 1.0], [[0, 0, 0], [0, 0, 1]], r"atom 1 has the mass 0\.0 u"),
        ([1.0], [[0, 0, 0], [0, 0, 1]], r"found shapes \(1,\) and \(2, 3\)"),
        ([1.0, 1.0], [[0, 0], [0, 1]], r"found shapes \(2,\) and \(2, 2\)"),
        ([], np.empty((0, 3)), r"n > 0"),
    ],
)
def test_what_is_no_molecule_is_refused(masses, place, words) -> None:
    with pytest.raises(ValueError, match=words):
        inertia(masses, place)


def test_result_is_frozen() -> None:
    found = inertia([1.0, 1.0], [[0, 0, 0], [0, 0, 0.74]])
    assert isinstance(found, Inertia)
    with pytest.raises(AttributeError):
        found.kind = "atom"  # type: ignore[misc]
