"""The engine against published tables, from spectroscopic constants (tests/data/reference/README.md)."""

from __future__ import annotations

import janaf
import numpy as np
import pytest

from heatwright.constants import GAS_CONSTANT_J_MOL_K as R
from heatwright.elements import atomic_number, element
from heatwright.partition.contribution import total_ln_q
from heatwright.partition.electronic import ElectronicLevels, tabulated_levels
from heatwright.partition.rotation import ClassicalRotor
from heatwright.partition.translation import Translation, translational_states_per_volume
from heatwright.partition.vibration import HarmonicVibration
from spectroscopy import contributions, rows

SPECTRA = rows("spectroscopic_constants")
TABLES = rows("gas_standard_thermo")

# Tables of NIST-JANAF (M. W. Chase, Monograph 9, 1998) that are themselves rigid-rotor harmonic-oscillator.
HARMONIC_TABLES = ["CH4", "CF4", "N2O", "CH2O", "PH3", "SO3", "HO2", "SiH4", "CH3F", "C2H4", "CH3Cl"]


def janaf_columns(species: str) -> dict[str, np.ndarray]:
    frame = janaf.Table(TABLES[species]["janaf_table"]).df
    keep = frame.filter((frame["T(K)"] >= 200.0) & (frame["T(K)"] <= 6000.0))
    return {name: keep[name].to_numpy().astype(float) for name in ("T(K)", "Cp", "S", "H-H(Tr)")}


@pytest.mark.parametrize("species", HARMONIC_TABLES)
def test_heat_capacity_of_harmonic_janaf_tables(species: str) -> None:
    table = janaf_columns(species)
    cp = total_ln_q(contributions(SPECTRA[species]), table["T(K)"]).cp_R * R
    assert table["T(K)"].size > 50
    assert np.abs(cp - table["Cp"]).max() <= 0.13


@pytest.mark.parametrize("species", [s for s, row in SPECTRA.items() if row["status"].startswith("ok")])
def test_entropy_at_298_within_a_published_table(species: str) -> None:
    s = float(total_ln_q(contributions(SPECTRA[species]), np.array([298.15])).s_R[0]) * R
    columns = ("janaf_S298_J_mol_K", "tm4513_S298_J_mol_K", "cea9_S298_J_mol_K", "crc_S298_J_mol_K")
    published = [float(TABLES[species][c]) for c in columns if TABLES[species][c]]
    assert min(abs(s - value) for value in published) <= 0.30


def test_enough_rows_are_marked_ok() -> None:
    assert sum(row["status"].startswith("ok") for row in SPECTRA.values()) >= 50


@pytest.mark.parametrize("atom", ["H", "He", "C", "N", "O", "F", "Ne", "Si", "P", "S", "Cl", "Ar", "Br"])
def test_atoms_against_janaf(atom: str) -> None:
    known = element(atomic_number(atom))
    multiplicity = {"H": 2, "C": 3, "N": 4, "O": 3, "F": 2, "Si": 3, "P": 4, "S": 3, "Cl": 2, "Br": 2}.get(atom, 1)
    tabulated = tabulated_levels(atom, 0, multiplicity)
    assert tabulated is not None
    parts = (Translation(known.average_weight_u), ElectronicLevels(tabulated.levels))
    q = total_ln_q(parts, np.array([298.15]))
    assert float(q.s_R[0]) * R == pytest.approx(float(TABLES[atom]["janaf_S298_J_mol_K"]), abs=0.002)
    assert float(q.cp_R[0]) * R == pytest.approx(float(TABLES[atom]["janaf_Cp298_J_mol_K"]), abs=0.002)


# Worked example of CO: constants of Huber and Herzberg (1979), S and Cp of the parts computed by hand from them
# (average masses, 1 bar): T, S_trans, S_rot, S_vib, S, Cp.
CARBON_MONOXIDE = [
    (298.15, 150.4180, 47.2275, 0.0030, 197.6485, 29.1293),
    (300.0, 150.5466, 47.2789, 0.0032, 197.8287, 29.1308),
    (1000.0, 175.5725, 57.2893, 1.6201, 234.4820, 33.0768),
    (3000.0, 198.4085, 66.4237, 8.4425, 273.2746, 36.7201),
]


@pytest.mark.parametrize("row", CARBON_MONOXIDE)
def test_worked_example_of_carbon_monoxide(row: tuple[float, ...]) -> None:
    T, *expected = row
    fundamental = 2169.81358 - 2 * 13.28831
    b0 = 1.93128087 - 0.01750441 / 2
    parts = (Translation(12.011 + 15.999), ClassicalRotor((b0,), 1), HarmonicVibration((fundamental,)))
    grid = np.array([T])
    shares = [float(part.ln_q(grid).s_R[0]) * R for part in parts]
    whole = total_ln_q(parts, grid)
    got = [*shares, float(whole.s_R[0]) * R, float(whole.cp_R[0]) * R]
    # Half a unit of the last printed digit; the printed 8.4425 is one unit more than its own row's sum leaves for it.
    allowed = [5.1e-5, 5.1e-5, 1.0e-4 if T == 3000.0 else 5.1e-5, 5.1e-5, 5.1e-5]
    assert all(abs(g - e) <= a for g, e, a in zip(got, expected, allowed, strict=True)), got


def test_magnitudes_every_teacher_knows_of_carbon_monoxide() -> None:
    # Common practice, no source: I = 1.45e-46 kg m², ν = 6.4e13 s⁻¹.
    h, k, c = 6.62607015e-34, 1.380649e-23, 29979245800.0
    b_cm1 = h / (8 * np.pi**2 * c * 1.45e-46)
    q_rot = np.exp(ClassicalRotor((b_cm1,), 1).ln_q(np.array([300.0])).ln_q[0])
    assert q_rot == pytest.approx(108.0, abs=0.5)
    assert h * 6.4e13 / (k * 300.0) == pytest.approx(10.24, abs=0.005)
    q_vib = np.exp(HarmonicVibration((6.4e13 / c,)).ln_q(np.array([3000.0])).ln_q[0])
    assert q_vib == pytest.approx(1.56, abs=0.005)
    assert translational_states_per_volume(28.010, 300.0) == pytest.approx(1.45e32, rel=0.005)


# Classical rotational partition functions at 298.15 K, computed by hand from published rotational constants.
@pytest.mark.parametrize(
    ("constants", "sigma", "q"),
    [
        ((1.989582,), 2, 52.0774),
        ((1.4376766,), 2, 72.0693),
        ((0.390219,), 2, 265.5235),
        ((27.8806, 14.5216, 9.2777), 2, 43.1349),
        ((5.2410, 5.2410, 5.2410), 12, 36.7227),
        ((0.189763, 0.189763, 0.094882), 12, 7537.93),
    ],
)
def test_classical_rotational_partition_function(constants: tuple[float, ...], sigma: int, q: float) -> None:
    got = np.exp(ClassicalRotor(constants, sigma).ln_q(np.array([298.15])).ln_q[0])
    assert got == pytest.approx(q, rel=2e-6)


def test_one_bar_against_one_atmosphere() -> None:
    grid = np.array([298.15])
    bar, atm = (Translation(39.95, p).ln_q(grid) for p in (1.0e5, 101325.0))
    assert float((bar.s_R - atm.s_R)[0]) * R == pytest.approx(0.109443, abs=1e-6)
    assert float(bar.cp_R[0]) == float(atm.cp_R[0]) == 2.5
