"""Soundness of molecules made by hand: each check finds what it is for and nothing else."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright.constants import HARTREE_CM1
from heatwright.molecule import Molecule, PrintedThermo
from heatwright.reading.soundness import expected_modes, is_linear, no_thermochemistry, soundness
from molecules import molecule

ENERGY = {"energies_hartree": {"SCF": -76.0}}
WATER_A = [[0.0, 0.0, 0.117], [0.0, 0.757, -0.469], [0.0, -0.757, -0.469]]
CO2_A = [[0.0, 0.0, 0.0], [0.0, 0.0, 1.16], [0.0, 0.0, -1.16]]


def water(modes: list[float] | None = None, **changes: object) -> Molecule:
    values = modes if modes is not None else [1600.0, 3700.0, 3800.0]
    return molecule("O H H", WATER_A, values, **ENERGY).but(**changes)


def found(m: Molecule) -> list[tuple[str, str]]:
    return [(f.severity, f.code) for f in soundness(m)]


def test_a_sound_molecule_has_no_findings() -> None:
    assert found(water()) == []
    assert found(molecule("O C O", [CO2_A[1], CO2_A[0], CO2_A[2]], [660.0, 660.0, 1340.0, 2350.0], **ENERGY)) == []
    assert found(molecule("O", [[0.0, 0.0, 0.0]], [], multiplicity=3, **ENERGY)) == []


def test_saddle_points() -> None:
    first = soundness(water([-500.0, 3700.0, 3800.0]))[0]
    assert (first.severity, first.code) == ("refuse", "imaginary-modes")
    assert "first-order saddle point" in first.text
    assert "500.00i" in first.text
    assert "A transition state has no thermo entry" in first.text
    assert "higher-order" in soundness(water([-500.0, -20.0, 3800.0]))[0].text


def test_number_of_modes() -> None:
    assert expected_modes(water()) == 3
    assert found(water([1600.0, 3700.0])) == [("refuse", "mode-count")]
    bent = molecule(
        "O C O", [[0.0, 0.3, 1.16], [0.0, 0.0, 0.0], [0.0, 0.0, -1.16]], [660.0, 660.0, 1340.0, 2350.0], **ENERGY
    )
    assert found(bent) == [("refuse", "mode-count")]
    assert "expected 3 (3N−6)" in soundness(bent)[0].text


def test_linearity() -> None:
    assert is_linear(np.array(CO2_A))
    assert not is_linear(np.array(WATER_A))
    assert is_linear(np.array([[0.0, 0.004, 0.0], *CO2_A[1:]]))
    assert not is_linear(np.full((3, 3), np.nan))


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"coordinates_A": np.array([*WATER_A[:2], [np.nan, 0.0, 0.0]])}, "atom 3: a coordinate"),
        ({"masses_u": np.array([15.99, np.inf, 1.008])}, "atom 2: the mass"),
        ({"wavenumbers_cm1": np.array([1600.0, 3700.0, np.nan])}, "mode 3: the wavenumber"),
        ({"normal_modes": np.full((3, 3, 3), np.nan)}, "mode 1: a displacement"),
        ({"max_gradient_hartree_bohr": np.nan}, "the gradient"),
        ({"printed": (PrintedThermo(298.15, entropy_J_mol_K=np.inf),)}, "the printed entropy"),
    ],
)
def test_what_is_not_finite_is_named(changes: dict[str, object], words: str) -> None:
    findings = [f for f in soundness(water(**changes)) if f.code == "not-a-number"]
    assert findings
    assert findings[0].severity == "refuse"
    assert words in findings[0].text


@pytest.mark.parametrize(
    ("charge", "multiplicity", "sound"),
    [(0, 1, True), (0, 2, False), (1, 2, True), (0, 0, False), (0, 13, False), (0, 3, True), (11, 1, False)],
)
def test_multiplicity_and_electrons(charge: int, multiplicity: int, sound: bool) -> None:
    codes = {code for _, code in found(water(charge=charge, multiplicity=multiplicity))}
    assert ("multiplicity-impossible" not in codes) is sound


@pytest.mark.parametrize(
    ("symbol", "multiplicity"),
    [
        ("He", 1),
        ("C", 3),
        ("N", 4),
        ("O", 3),
        ("F", 2),
        ("Si", 3),
        ("P", 4),
        ("Cr", 7),
        ("Fe", 5),
        ("Ni", 3),
        ("Kr", 1),
    ],
)
def test_ground_states_of_atoms(symbol: str, multiplicity: int) -> None:
    """Hund's rules; Cr has one 4s electron (NIST Atomic Spectra Database, from memory)."""
    place = [[0.0, 0.0, 0.0]]
    assert found(molecule(symbol, place, [], multiplicity=multiplicity, **ENERGY)) == []
    other = multiplicity + 2
    assert found(molecule(symbol, place, [], multiplicity=other, **ENERGY)) == [("warn", "atom-not-ground-state")]


def test_ions_of_atoms_are_not_judged() -> None:
    assert found(molecule("C", [[0.0, 0.0, 0.0]], [], charge=1, multiplicity=4, **ENERGY)) == []


def test_gradient() -> None:
    assert found(water(max_gradient_hartree_bohr=4.4e-4)) == []
    assert found(water(max_gradient_hartree_bohr=4.6e-4)) == [("warn", "not-stationary")]


def test_masses() -> None:
    assert found(water(masses_u=np.array([15.999, 1.008, 1.008]), mass_kind="average")) == []
    heavy = soundness(water(masses_u=np.array([15.9949, 2.0141, 1.00783])))
    assert [(f.severity, f.code, f.where) for f in heavy] == [("warn", "non-default-isotope", "atom 2")]
    assert "2-H" in heavy[0].text
    wrong = soundness(water(masses_u=np.array([15.9949, 14.2, 1.00783])))
    assert [(f.severity, f.code) for f in wrong] == [("refuse", "atoms-disagree")]


def test_atoms_on_top_of_each_other() -> None:
    near = np.array([WATER_A[0], WATER_A[1], [0.0, 0.757, -0.40]])
    assert ("refuse", "atoms-disagree") in found(water(coordinates_A=near))


def test_tiny_wavenumber_and_missing_energy() -> None:
    assert found(water([3.0, 3700.0, 3800.0])) == [("warn", "zero-wavenumber")]
    assert found(water(energies_hartree={})) == [("warn", "no-energy")]


def test_rigid_scan() -> None:
    assert found(water([], kind="rigid scan")) == [("refuse", "rigid-scan")]
    assert found(water([], kind="relaxed scan")) == []


def test_printed_zero_point_energy() -> None:
    zpe = 9100.0 / 2.0 / HARTREE_CM1
    assert found(water(printed=(PrintedThermo(298.15, zpe_hartree=round(zpe, 6)),))) == []
    scaled = PrintedThermo(298.15, zpe_hartree=0.98 * zpe)
    assert found(water(printed=(scaled,))) == [("warn", "printed-values-differ")]
    low = PrintedThermo(298.15, zpe_hartree=zpe * (1.0 - 4.8e-4))  # NWChem's older constants
    assert found(water(printed=(low,))) == []


def test_no_thermochemistry() -> None:
    assert no_thermochemistry(water()) == ()
    assert no_thermochemistry(molecule("O", [[0.0, 0.0, 0.0]], [], multiplicity=3)) == ()
    (finding,) = no_thermochemistry(water([], kind="energy"))
    assert (finding.severity, finding.code) == ("refuse", "no-frequencies")
    assert "a single point without vibrational modes" in finding.text


def test_a_nearly_linear_molecule_and_a_high_wavenumber_are_warned_about() -> None:
    bent = molecule("C O O", [[0, 0, 0.03], [0, 1.16, 0], [0, -1.16, 0]], [600.0, 1300.0, 2300.0])
    straight = molecule("H H", [[0, 0, 0], [0, 0, 0.74]], [5400.0])
    assert "nearly-linear" in {f.code for f in soundness(bent)}
    assert "high-wavenumber" in {f.code for f in soundness(straight)}
    assert not {"nearly-linear", "high-wavenumber"} & {f.code for f in soundness(water())}
