"""Rotatable bonds: which they are, tops and their symmetry, reduced moments against published and computed values."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright.molecule import Molecule
from heatwright.reading.outputs import read_output
from heatwright.resources import sample_outputs
from heatwright.structure.torsions import (
    RotatableBond,
    dihedral_deg,
    reduced_moments,
    rotatable_bond,
    rotatable_bonds,
    turned,
)
from outside import SHARED, needs_shared


def methanol() -> Molecule:
    return read_output(str(sample_outputs() / "CH3OH.out"))


def found(m: Molecule) -> list[RotatableBond]:
    return rotatable_bonds(m.atomic_numbers, m.masses_u, m.coordinates_A)


def moment(m: Molecule, atoms: tuple[int, int, int, int]) -> float:
    bond = rotatable_bond(m.atomic_numbers, m.masses_u, m.coordinates_A, atoms)
    return float(reduced_moments(m.masses_u, m.coordinates_A, [bond])[0, 0])


def computed(name: str) -> Molecule:
    assert SHARED is not None
    return read_output(str(SHARED / "computed" / f"{name}.out.gz"))


# Bonds (1-based), symmetry, and the reduced moment of Kilpatrick and Pitzer from an independent code.
KNOWN = {
    "C2H6": [("3-1-2-6", 3, 1.576)],
    "CH3OH": [("3-1-2-4", 3, 0.631)],
    "H2O2": [("3-1-2-4", 1, 0.434)],
    "CH3CHO": [("1-2-4-5", 3, 2.197)],
    "CH3CH2OH": [("7-1-2-3", 3, None), ("1-2-3-4", 1, 0.775)],
    "HCOOCH3": [("2-1-3-5", 1, 3.55), ("1-3-5-6", 3, None)],
    "C2H5": [("3-1-2-6", 6, None)],
    "butadiene": [("1-2-3-4", 1, None)],
    "C2H4": [], "C3H4_C3v": [], "CH2OCH2": [], "C6H6": [], "HCN": [], "N2O": [],
}  # fmt: skip


@needs_shared
@pytest.mark.parametrize("name", KNOWN)
def test_bonds_of_computed_molecules(name: str) -> None:
    m = computed(name)
    bonds = found(m)
    assert [(b.label, b.symmetry) for b in bonds] == [(label, n) for label, n, _ in KNOWN[name]]
    for i, (_, _, known) in enumerate(KNOWN[name]):
        if known is not None:
            assert reduced_moments(m.masses_u, m.coordinates_A, bonds)[i, i] == pytest.approx(known, rel=2e-3)


def test_moment_does_not_depend_on_the_side() -> None:
    for name in ("CH3OH", "CH3OCH3"):
        m = read_output(str(sample_outputs() / f"{name}.out"))
        for bond in found(m):
            i, j, k, l = bond.atoms  # noqa: E741
            assert moment(m, (l, k, j, i)) == pytest.approx(moment(m, bond.atoms), abs=1e-10)


def test_moment_is_that_of_two_coaxial_symmetric_tops() -> None:
    # For symmetric tops on a common axis I = I1 I2/(I1 + I2), exactly.
    angles = np.radians([0.0, 120.0, 240.0])
    ring = np.column_stack([np.cos(angles), np.sin(angles), np.zeros(3)])
    x = np.vstack([[[0, 0, 0], [0, 0, 1.53]], 1.02 * ring + [0, 0, -0.39], 1.5 * ring + [0, 0, 1.9]])
    m = np.array([12.0, 12.0, 1, 1, 1, 19, 19, 19])
    bond = rotatable_bond(np.array([6, 6, 1, 1, 1, 9, 9, 9]), m, x, (2, 0, 1, 5))
    one, two = 3 * 1.02**2, 3 * 19 * 1.5**2
    assert (bond.top_symmetry, bond.frame_symmetry, bond.symmetry) == (3, 3, 3)
    assert reduced_moments(m, x, [bond])[0, 0] == pytest.approx(one * two / (one + two), rel=1e-12)


def test_two_tops_are_coupled() -> None:
    m = read_output(str(sample_outputs() / "CH3OCH3.out"))
    D = reduced_moments(m.masses_u, m.coordinates_A, found(m))
    assert D.shape == (2, 2)
    assert D[0, 0] == pytest.approx(D[1, 1], rel=1e-4)
    # An independent code: the coupled determinant lowers S of dimethyl ether by 0.16 J/mol/K.
    correction = 0.5 * 8.31446 * np.log(np.linalg.det(D) / D[0, 0] / D[1, 1])
    assert correction == pytest.approx(-0.16, abs=0.01)


def test_turning_changes_the_dihedral_angle_alone() -> None:
    m = methanol()
    (bond,) = found(m)
    x = turned(m.coordinates_A, bond, 50.0)
    change = dihedral_deg(x, bond.atoms) - dihedral_deg(m.coordinates_A, bond.atoms)
    assert change % 360.0 == pytest.approx(50.0, abs=1e-9)
    assert moment(m, bond.atoms) == pytest.approx(moment(m.but(coordinates_A=x), bond.atoms), rel=0.05)


def test_an_isotope_breaks_the_symmetry_of_a_top() -> None:
    m = methanol()
    (bond,) = found(m)
    masses = m.masses_u.copy()
    masses[2] = 2.014
    assert bond.symmetry == 3
    assert rotatable_bonds(m.atomic_numbers, masses, m.coordinates_A)[0].symmetry == 1


def test_what_is_no_torsion() -> None:
    m = methanol()
    with pytest.raises(ValueError, match="not bonded one to the next"):
        moment(m, (0, 1, 2, 3))
    angles = np.radians(np.arange(0, 360, 60))
    ring = 1.4 * np.column_stack([np.cos(angles), np.sin(angles), np.zeros(6)])
    with pytest.raises(ValueError, match="ring"):
        rotatable_bond(np.full(6, 6), np.full(6, 12.0), ring, (0, 1, 2, 3))
    line = np.array([[0.9, 0.5, -0.3], [0, 0, 0], [0, 0, 1.46], [0, 0, 2.67]])
    with pytest.raises(ValueError, match="atom 4 lies on the axis"):
        rotatable_bond(np.array([1, 6, 6, 6]), np.array([1.0, 12, 12, 12]), line, (0, 1, 2, 3))
