"""Potentials from scans: Fourier fits, what they refuse, and the forms in which a scan may come."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from heatwright.errors import UsageError
from heatwright.findings import Refused
from heatwright.partition.fourier import fitted_potential
from heatwright.partition.scans import wished
from heatwright.partition.torsion import hindered_rotor
from heatwright.reading.outputs import read_output
from heatwright.reading.torsion_scans import TorsionBarrier, TorsionScan, read_torsion
from heatwright.resources import sample_outputs
from outside import SHARED, needs_shared

TWELVE = np.arange(0.0, 360.0, 30.0)


def refusal(*arguments, **options) -> str:
    with pytest.raises(Refused) as stopped:
        fitted_potential(*arguments, **options)
    (finding,) = stopped.value.findings
    assert finding.code == "scan-unfit"
    return finding.text


def test_a_series_is_found_again() -> None:
    phi = np.radians(TWELVE)
    E = 400 * np.cos(phi) + 120 * np.sin(phi) + 300 * np.cos(2 * phi) - 80 * np.sin(3 * phi) + 25 * np.cos(5 * phi)
    fit = fitted_potential(TWELVE, E, 1)
    assert fit.harmonics == 5
    assert fit.rms_cm1 < 1e-9
    assert fit.potential.cosine_cm1 == pytest.approx((400, 300, 0, 0, 25), abs=1e-9)
    assert fit.potential.sine_cm1 == pytest.approx((120, 0, -80, 0, 0), abs=1e-9)


def test_a_sine_that_is_zero_at_every_point_is_not_fitted() -> None:
    # 12 points every 30 degrees leave sin 6 phi open; with it S of methanol's torsion would be 5 J/mol/K too low.
    E = 250 * (1 + np.cos(np.radians(3 * TWELVE))) + 3 * np.cos(np.radians(6 * TWELVE))
    free, even = (fitted_potential(TWELVE, E, 3, even=even) for even in (False, True))
    assert (free.harmonics, even.harmonics) == (1, 2)
    assert free.rms_cm1 == pytest.approx(3.0, rel=0.01)
    assert even.rms_cm1 < 1e-9
    assert even.potential.cosine_cm1[5] == pytest.approx(3.0)
    T = np.array([298.15])
    s = [float(hindered_rotor(f.potential, 26.7, 3).ln_q(T).s_R[0]) * 8.314 for f in (free, even)]
    assert s[0] == pytest.approx(s[1], abs=0.05)


def test_half_a_turn_is_enough_for_an_even_potential() -> None:
    angles = np.arange(0.0, 181.0, 20.0)
    phi = np.radians(angles)
    E = 993 * np.cos(phi) + 636 * np.cos(2 * phi) + 44 * np.cos(3 * phi)
    fit = fitted_potential(angles, E, 1, even=True)
    assert fit.potential.cosine_cm1[:3] == pytest.approx((993, 636, 44), abs=1e-6)
    assert "do not cover a period of 360°" in refusal(angles, E, 1)


def test_a_rigid_scan_of_methanol_is_not_threefold() -> None:
    # Minima at 0, 538 and 538 1/cm: what the tilt of a methyl group makes of a rigid scan.
    phi = np.radians(TWELVE)
    E = 250 * (1 + np.cos(3 * phi)) + 538 / 1.5 * (1 + np.cos(phi))
    text = refusal(TWELVE, E, 3, "rigid.csv")
    assert text.startswith("rigid.csv: the scan is not 3-fold as its top is")
    assert "relaxed" in text
    assert fitted_potential(TWELVE, E, 1).rms_cm1 < 1e-9


def test_what_is_not_periodic_is_refused() -> None:
    angles = np.arange(0.0, 361.0, 30.0)
    E = 500 * (1 - np.cos(np.radians(angles)))
    E[-1] += 200.0
    assert "differ by 200 cm⁻¹" in refusal(angles, E, 1)
    E[-1] -= 190.0
    assert fitted_potential(angles, E, 1).rms_cm1 < 20.0


def test_too_few_points_are_refused() -> None:
    assert "2 different points in a period of 120°" in refusal(
        np.arange(0.0, 360, 60), np.array([0, 9, 0, 9, 0, 9.0]), 3
    )
    assert "6 different points" in refusal(TWELVE[::2], np.array([0, 9, 3, 9, 4, 9.0]), 1)


def test_points_of_two_conformers_are_refused() -> None:
    E = 500 * (1 + np.cos(np.radians(3 * TWELVE)))
    E[5:8] += 400.0
    E[9] += 300.0
    assert "cm⁻¹" in refusal(TWELVE, E, 3)


def test_barrier_in_words() -> None:
    wish = read_torsion("3-1-2-4 n=3 V=373 cm-1")
    assert wish == TorsionBarrier((2, 0, 1, 3), 3, 373.0)
    assert read_torsion("3-1-2-4 n=3 V=4.184 kJ/mol").barrier_cm1 == pytest.approx(349.755, abs=1e-3)  # 1 kcal/mol
    for text in ("3-1-2-4 n=3 V=373", "3-1-2-4 n=3 V=x cm-1", "0-1-2-4 n=3 V=1 cm-1", "3-1-2-4 n=3 V=-5 cm-1"):
        with pytest.raises(UsageError):
            read_torsion(text)


def write(folder: Path, text: str) -> str:
    path = folder / "scan.csv"
    path.write_text(text)
    return str(path)


def test_a_csv_file(tmp_path: Path) -> None:
    rows = "\n".join(f"{a},{2.0 * (1 + np.cos(np.radians(3 * a)))}" for a in TWELVE)
    path = write(tmp_path, f"# atoms 3-1-2-4\nangle_deg,energy_kJ/mol\n{rows}\n")
    wish = read_torsion(path)
    assert isinstance(wish, TorsionScan)
    assert wish.atoms == (2, 0, 1, 3)
    assert wish.energies_cm1.max() == pytest.approx(4.0 / 0.0119627, rel=1e-4)
    methanol = read_output(str(sample_outputs() / "CH3OH.out"))
    assert wished(methanol, wish).potential.barrier_cm1 == pytest.approx(4.0 / 0.0119627, rel=1e-4)
    assert read_torsion(f"5-1-2-4 {path}").atoms == (4, 0, 1, 3)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("# atoms 3-1-2-4\nangle,energy\n0,1\n", "scan.csv:2: the heading is 'angle,energy'"),
        ("angle_deg,energy_cm-1\n0,1\n", "does not say which dihedral angle"),
        ("# atoms 3-1-2-4\nangle_deg,energy_cm-1\n0,1\n30,nan\n", "scan.csv:4: '30,nan'"),
        ("# atoms 3-1-2-4\nangle_deg,energy_cm-1\n", "no points"),
    ],
)
def test_csv_files_that_cannot_be_read(text: str, words: str, tmp_path: Path) -> None:
    with pytest.raises(Refused, match=words) as stopped:
        read_torsion(write(tmp_path, text))
    assert stopped.value.findings[0].code == "scan-unreadable"


def test_folders_and_files_without_a_scan(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="holds no outputs"):
        read_torsion(str(tmp_path))
    with pytest.raises(Refused, match="no such file or folder"):
        read_torsion(str(tmp_path / "nothing"))
    with pytest.raises(Refused, match="no relaxed scan"):
        read_torsion(str(sample_outputs() / "CH3OH.out"))


def rejected(name: str, wish) -> str:
    with pytest.raises(Refused) as stopped:
        wished(read_output(str(sample_outputs() / f"{name}.out")), wish)
    return str(stopped.value)


def test_bonds_that_cannot_turn() -> None:
    barrier = TorsionBarrier((0, 1, 2, 3), 3, 100.0)
    assert "not bonded one to the next" in rejected("CH3OH", barrier)
    assert "the molecule has 6 atoms" in rejected("CH3OH", TorsionBarrier((2, 0, 1, 9), 3, 100.0))
    assert "expected a multiple of 3" in rejected("CH3OH", TorsionBarrier((2, 0, 1, 3), 2, 100.0))


@needs_shared
@pytest.mark.parametrize(
    "file", ["gaussian09_dvb_relaxed_torsion_scan.log.gz", "jaguar83_dvb_relaxed_torsion_scan.out.gz"]
)
def test_a_scan_in_one_output(file: str) -> None:
    # Divinylbenzene, 13 points from 0 to 360 degrees; the barrier is 22.9 kJ/mol in both programs.
    assert SHARED is not None
    scan = read_torsion(str(SHARED / "outputs" / file))
    assert isinstance(scan, TorsionScan)
    assert len(scan.molecules) == 13
    assert scan.energies_cm1.max() * 0.0119627 == pytest.approx(22.9, abs=0.1)
    made = wished(scan.molecules[0], scan)
    assert made.potential.barrier_cm1 * 0.0119627 == pytest.approx(22.9, abs=0.5)
    assert made.fit is not None
    assert made.fit.rms_cm1 < 20.0


@needs_shared
def test_a_scan_of_another_molecule_is_refused() -> None:
    assert SHARED is not None
    scan = read_torsion(str(SHARED / "computed" / "scans" / "CH3OH"))
    assert isinstance(scan, TorsionScan)
    assert "are not those of" in rejected("CH3OCH3", scan)
    assert "[scan-of-another]" in rejected("CH3OCH3", scan)
    methanol = read_output(str(sample_outputs() / "CH3OH.out"))
    for changes, words in (({"charge": 1}, "charge 1"), ({"level": None}, ""), ({"multiplicity": 3}, "multiplicity 3")):
        other = TorsionScan("other", None, scan.energies_cm1, None, tuple(m.but(**changes) for m in scan.molecules))
        if words:
            with pytest.raises(Refused, match=words):
                wished(methanol, other)
        else:
            assert wished(methanol, other).bond.label == "3-1-2-4"


@needs_shared
def test_a_rigid_scan_of_geometries_is_refused() -> None:
    from heatwright.structure.torsions import rotatable_bonds, turned

    methanol = read_output(str(sample_outputs() / "CH3OH.out"))
    (bond,) = rotatable_bonds(methanol.atomic_numbers, methanol.masses_u, methanol.coordinates_A)
    points = tuple(methanol.but(coordinates_A=turned(methanol.coordinates_A, bond, a)) for a in TWELVE)
    E = 250 * (1 - np.cos(np.radians(3 * TWELVE)))
    with pytest.raises(Refused, match="nothing but the dihedral angle was moved"):
        wished(methanol, TorsionScan("rigid", None, E, None, points))
