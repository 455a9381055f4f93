"""What a user of the entries does with them: Cantera reads them, and a flame burns at the right temperature.

The sample outputs become entries through the command line.  Cantera then burns methanol and hydrogen in air with them
(constant enthalpy and pressure, these sixteen species only).  The same with thermo from a second rigid-rotor
harmonic-oscillator evaluation, written below from cclib and numpy and given to Cantera without the two-range
polynomial, tells whether the entries are what the model says; the same with evaluated data tells what the model is
worth.
"""

from __future__ import annotations

import csv
import hashlib
import json
import subprocess
import sys
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from itertools import pairwise
from pathlib import Path

import cantera as ct
import numpy as np
import pytest
import scipy.constants as codata

from entries import cantera_reads

R = codata.R
BAR = 1.0e5
SAMPLES = Path(__file__).parents[2] / "sample_outputs"
REFERENCE = Path(__file__).parents[1] / "data" / "reference" / "gas_standard_thermo.csv"
SCALE = 0.9614  # fundamentals, B3LYP/6-31G(d): A. P. Scott, L. Radom, J. Phys. Chem. 100, 16502 (1996)
TEMPERATURES = [300.0, 1000.0, 3000.0]
FUELS = ["CH3OH", "H2"]

# Symmetry numbers of the rigid molecules (common practice, no source); None for the atoms.
SYMMETRY: dict[str, int | None] = {
    "CH3OH": 1, "CH3OCH3": 2, "CH2O": 2, "HCO": 1, "CH3": 6, "OH": 1, "CO": 1, "CO2": 2, "H2O": 2, "O2": 2, "H2": 2,
    "N2": 2, "H": None, "C": None, "N": None, "O": None,
}  # fmt: skip

# Levels above the ground level, 1/cm, with their degeneracy; the spin degeneracy for all others.  Atoms: NIST Atomic
# Spectra Database; OH: K. P. Huber, G. Herzberg, Constants of Diatomic Molecules (1979) (from memory).
LEVELS = {
    "OH": [(0.0, 2), (139.21, 2)],
    "H": [(0.0, 2)],
    "C": [(0.0, 1), (16.4167, 3), (43.4135, 5), (10192.66, 5), (21648.03, 1), (33735.12, 5)],
    "N": [(0.0, 4), (19224.46, 6), (19233.18, 4), (28838.92, 2), (28839.31, 4)],
    "O": [(0.0, 5), (158.265, 3), (226.977, 1), (15867.86, 5), (33792.58, 1)],
}


# ---- the entries, through the command line ---------------------------------------------------------------------------


def output_of(name: str) -> Path:
    return SAMPLES / ("atoms" if SYMMETRY[name] is None else ".") / f"{name}.out"


@cache
def dHf298_kJ_mol() -> dict[str, float]:
    """ΔfH°(298.15 K): ATcT 1.112 (B. Ruscic et al., Argonne National Laboratory)."""
    with REFERENCE.open(encoding="utf-8") as stream:
        rows = {row["species"]: row["atct_dHf298_kJ_mol"] for row in csv.DictReader(stream)}
    return {name: float(rows[name]) for name in SYMMETRY}


@dataclass(frozen=True)
class Made:
    """The file the command line wrote in each format."""

    folder: Path
    files: Mapping[str, Path]

    def text(self, format_name: str) -> str:
        return self.files[format_name].read_text(encoding="utf-8")


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> Made:
    folder = tmp_path_factory.mktemp("entries")
    options = ["--frequency-scale", str(SCALE), "--source", "ATcT 1.112"]
    for name, enthalpy in dHf298_kJ_mol().items():
        options += ["--name", name, "--dHf298", f"{enthalpy} kJ/mol"]
    outputs = [str(output_of(name)) for name in SYMMETRY]
    files = {}
    for format_name in ("nasa7", "yaml", "json"):
        files[format_name] = folder / f"made.{format_name}"
        target = ["--format", format_name, "-o", str(files[format_name])]
        command = [sys.executable, "-m", "heatwright", "entry", *outputs, *options, *target]
        done = subprocess.run(command, capture_output=True, text=True, check=False)
        assert done.returncode == 0, done.stderr
        assert done.stdout == ""
    return Made(folder, files)


@pytest.fixture(scope="module")
def read(made: Made) -> dict[str, dict[str, dict]]:
    """What Cantera reads from the record and from the YAML, without a word on either stream."""
    return {f: cantera_reads(made.text(f), f, made.folder, TEMPERATURES) for f in ("nasa7", "yaml")}


@pytest.fixture(scope="module")
def documents(made: Made) -> dict[str, dict]:
    return {species["name"]: species for species in json.loads(made.text("json"))["species"]}


def test_every_sample_is_there(documents: dict[str, dict], read: dict[str, dict[str, dict]]) -> None:
    assert sorted(SAMPLES.rglob("*.out")) == sorted(output_of(name).resolve() for name in SYMMETRY)
    assert list(documents) == list(read["nasa7"]) == list(read["yaml"]) == list(SYMMETRY)


@pytest.mark.parametrize("name", SYMMETRY)
@pytest.mark.parametrize("format_name", ["nasa7", "yaml"])
def test_cantera_reads_what_the_table_says(
    format_name: str, name: str, documents: dict[str, dict], read: dict[str, dict[str, dict]]
) -> None:
    document, row = documents[name], read[format_name][name]
    assert document["source"]["sha256"] == hashlib.sha256(output_of(name).read_bytes()).hexdigest()
    assert row["composition"] == document["composition"]
    assert row["T"] == [200.0, 6000.0]
    assert row["p"] == (BAR if format_name == "yaml" else ct.one_atm)  # the record carries no pressure
    table, residuals = document["table"], document["residuals"]
    for T, (cp, h, s) in zip(TEMPERATURES, row["values"], strict=True):
        i = table["T_K"].index(T)
        enthalpy = 1e3 * (dHf298_kJ_mol()[name] + table["H_minus_H298_kJ_mol"][i])
        assert abs(cp / 1e3 - table["Cp_J_mol_K"][i]) / R <= residuals["max_dCp_R"] * 1.001 + 1e-9
        assert abs(h / 1e3 - enthalpy) / (R * T) <= residuals["max_dH_RT"] * 1.001 + 1e-9
        assert abs(s / 1e3 - table["S_J_mol_K"][i]) / R <= residuals["max_dS_R"] * 1.001 + 1e-9


# ---- a second rigid-rotor harmonic-oscillator evaluation -------------------------------------------------------------


@dataclass(frozen=True)
class Rrho:
    """One species from cclib's numbers: Cp, H(T) − H(0), S in units of R at 1 bar and one or many temperatures."""

    mass_u: float
    moments_u_A2: np.ndarray
    theta_K: np.ndarray
    sigma: int | None
    levels: tuple[tuple[float, int], ...]

    @classmethod
    def of(cls, name: str) -> Rrho:
        from cclib.io import ccread

        data = ccread(str(output_of(name)))
        levels = tuple(LEVELS.get(name, [(0.0, data.mult)]))
        # Atomic masses: AME 2020 (from memory); an output of a single atom may not print one.
        masses = np.array([{1: 1.00782503, 6: 12.0, 7: 14.00307400, 8: 15.99491462}[int(z)] for z in data.atomnos])
        if len(masses) == 1:
            return cls(masses[0], np.empty(0), np.empty(0), None, levels)
        r = data.atomcoords[-1] - masses @ data.atomcoords[-1] / masses.sum()
        tensor = sum(m * (np.dot(x, x) * np.eye(3) - np.outer(x, x)) for m, x in zip(masses, r, strict=True))
        moments = np.linalg.eigvalsh(tensor)
        modes = data.vibfreqs[np.abs(data.vibfreqs) > 1.0] * SCALE
        linear = moments[0] < 1e-4 * moments[2]
        assert len(modes) == 3 * len(masses) - (5 if linear else 6)
        theta = codata.h * codata.c * 100.0 * modes / codata.k
        return cls(masses.sum(), moments[1:2] if linear else moments, theta, SYMMETRY[name], levels)

    def cp(self, T: np.ndarray) -> np.ndarray:
        x = self.theta_K / T[:, None]
        einstein = (x / 2.0 / np.sinh(x / 2.0)) ** 2
        energy, weight = self._electronic(T)
        spread = (weight * energy**2).sum(1) - (weight * energy).sum(1) ** 2
        return 2.5 + self._half_rotations() + einstein.sum(1) + spread / T**2

    def h(self, T: np.ndarray) -> np.ndarray:
        """[H(T) − H(0)]/R, K."""
        energy, weight = self._electronic(T)
        oscillators = (self.theta_K / np.expm1(self.theta_K / T[:, None])).sum(1)
        return (2.5 + self._half_rotations()) * T + oscillators + (weight * energy).sum(1)

    def s(self, T: np.ndarray) -> np.ndarray:
        u = codata.value("atomic mass constant")
        wave = np.sqrt(codata.h**2 / (2.0 * np.pi * self.mass_u * u * codata.k * T))
        translation = np.log(codata.k * T / BAR / wave**3) + 2.5
        x = self.theta_K / T[:, None]
        oscillators = (x / np.expm1(x) - np.log(-np.expm1(-x))).sum(1)
        energy, weight = self._electronic(T)
        electronic = np.log(self._degeneracies(T).sum(1)) + (weight * energy).sum(1) / T
        return translation + self._s_rotation(T) + oscillators + electronic

    def _half_rotations(self) -> float:
        return {0: 0.0, 1: 1.0, 3: 1.5}[len(self.moments_u_A2)]

    def _s_rotation(self, T: np.ndarray) -> np.ndarray | float:
        if self.sigma is None:
            return 0.0
        moments = self.moments_u_A2 * codata.value("atomic mass constant") * 1e-20
        theta = codata.h**2 / (8.0 * np.pi**2 * moments * codata.k)
        if len(theta) == 1:
            return np.log(T / (self.sigma * theta[0])) + 1.0
        return np.log(np.sqrt(np.pi * T**3 / np.prod(theta)) / self.sigma) + 1.5

    def _degeneracies(self, T: np.ndarray) -> np.ndarray:
        kelvin, g = np.array(self.levels).T * [[codata.h * codata.c * 100.0 / codata.k], [1.0]]
        return g * np.exp(-kelvin / T[:, None])

    def _electronic(self, T: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Level energies in K and their populations."""
        kelvin = np.array([nu for nu, _ in self.levels]) * codata.h * codata.c * 100.0 / codata.k
        q = self._degeneracies(T)
        return kelvin, q / q.sum(1)[:, None]


def many_ranges(name: str, rrho: Rrho) -> ct.Species:
    """The species for Cantera as polynomials of the fourth degree in ranges of 100 K."""
    offset = 1e3 * dHf298_kJ_mol()[name] / R - rrho.h(np.array([298.15]))[0]
    edges = np.arange(200.0, 6001.0, 100.0)
    rows = []
    for low, high in pairwise(edges):
        T = (low + high) / 2.0 + (high - low) / 2.0 * np.cos(np.pi * (np.arange(5) + 0.5) / 5.0)
        a = np.polynomial.Polynomial.fit(T, rrho.cp(T), 4).convert().coef
        middle = np.array([(low + high) / 2.0])
        powers = np.array([middle[0] ** (k + 1) / (k + 1) for k in range(5)])
        h = rrho.h(middle)[0] + offset - a @ powers
        ln_T = np.array([np.log(middle[0]), *(middle[0] ** k / k for k in range(1, 5))])
        rows.append([0.0, 0.0, *a.tolist(), float(h), float(rrho.s(middle)[0] - a @ ln_T)])
    thermo = {"model": "NASA9", "reference-pressure": BAR, "temperature-ranges": edges.tolist(), "data": rows}
    return ct.Species.from_dict({"name": name, "composition": composition(name), "thermo": thermo})


def composition(name: str) -> dict[str, float]:
    return dict(evaluated(name).composition)


# ---- evaluated data --------------------------------------------------------------------------------------------------


@cache
def _evaluated() -> dict[str, ct.Species]:
    return {species.name: species for species in ct.Species.list_from_file("nasa_gas.yaml")}


def evaluated(name: str) -> ct.Species:
    """The species in B. J. McBride, S. Gordon, M. A. Reno, NASA TM-4513 (1993), which is at 1 bar (Cantera: 1 atm)."""
    theirs = _evaluated()["HCHO,formaldehy" if name == "CH2O" else name]
    species = ct.Species(name, theirs.composition)
    species.thermo = ct.NasaPoly2(200.0, 6000.0, BAR, theirs.thermo.coeffs)
    return species


# ---- the flames ------------------------------------------------------------------------------------------------------


def flame_temperature(species: Mapping[str, ct.Species], fuel: str) -> float:
    """Adiabatic flame temperature, K: fuel and air (O2 + 3.76 N2), phi = 1, from 298.15 K at 1 atm."""
    gas = ct.Solution(thermo="ideal-gas", species=list(species.values()))
    gas.set_equivalence_ratio(1.0, fuel, "O2:1, N2:3.76")
    gas.TP = 298.15, ct.one_atm
    gas.equilibrate("HP", rtol=1e-10)
    return float(gas.T)


@pytest.fixture(scope="module")
def ours(made: Made) -> dict[str, ct.Species]:
    return {species.name: species for species in ct.Species.list_from_file(str(made.files["yaml"]))}


@pytest.fixture(scope="module")
def independent() -> dict[str, ct.Species]:
    return {name: many_ranges(name, Rrho.of(name)) for name in SYMMETRY}


def test_the_second_evaluation_is_faithfully_represented(independent: dict[str, ct.Species]) -> None:
    """Otherwise a difference of the flames would say nothing."""
    T = np.array([200.0, 233.3, 298.15, 777.7, 999.9, 1500.1, 2222.2, 3456.7, 5999.0])
    for name in SYMMETRY:
        rrho, thermo = Rrho.of(name), independent[name].thermo
        offset = 1e3 * dHf298_kJ_mol()[name] / R - rrho.h(np.array([298.15]))[0]
        cp, h, s = (np.array([f(t) for t in T]) / ct.gas_constant for f in (thermo.cp, thermo.h, thermo.s))
        np.testing.assert_allclose(cp, rrho.cp(T), rtol=0.0, atol=5e-5)
        np.testing.assert_allclose(h / T, (rrho.h(T) + offset) / T, rtol=0.0, atol=5e-6)
        np.testing.assert_allclose(s, rrho.s(T), rtol=0.0, atol=5e-6)


@pytest.mark.parametrize("fuel", FUELS)
def test_flame_as_with_a_second_evaluation_of_the_same_model(
    fuel: str, ours: dict[str, ct.Species], independent: dict[str, ct.Species]
) -> None:
    assert flame_temperature(ours, fuel) == pytest.approx(flame_temperature(independent, fuel), abs=1.0)


@pytest.mark.parametrize("fuel", FUELS)
def test_flame_near_that_of_evaluated_data(fuel: str, ours: dict[str, ct.Species]) -> None:
    theirs = {name: evaluated(name) for name in SYMMETRY}
    assert flame_temperature(ours, fuel) == pytest.approx(flame_temperature(theirs, fuel), abs=25.0)


@pytest.mark.parametrize("fuel", FUELS)
def test_the_difference_to_evaluated_data_is_the_sum_of_the_species(fuel: str, ours: dict[str, ct.Species]) -> None:
    """Taking one species after the other from the evaluated data says where the difference comes from: water first."""
    ours_K = flame_temperature(ours, fuel)
    shifts_K = {name: flame_temperature(ours | {name: evaluated(name)}, fuel) - ours_K for name in SYMMETRY}
    total_K = flame_temperature({name: evaluated(name) for name in SYMMETRY}, fuel) - ours_K
    assert sum(shifts_K.values()) == pytest.approx(total_K, abs=0.5)
    assert min(shifts_K, key=shifts_K.__getitem__) == "H2O"
    assert evaluated("H2O").thermo.cp(2200.0) > ours["H2O"].thermo.cp(2200.0)


@pytest.mark.parametrize("fuel", FUELS)
def test_the_record_read_at_one_atmosphere_moves_the_flame_by_half_a_kelvin_at_most(
    fuel: str, made: Made, read: dict[str, dict[str, dict]], ours: dict[str, ct.Species]
) -> None:
    """The record cannot carry its 1 bar; Cantera takes 1 atm, which shifts the dissociation a little."""
    assert set(read["nasa7"]) == set(ours)
    record = {species.name: species for species in ct.Species.list_from_file(str(made.folder / "converted.yaml"))}
    for name, species in record.items():  # the first number is where two ranges meet; equal ranges become one
        np.testing.assert_array_equal(species.thermo.coeffs[1:], ours[name].thermo.coeffs[1:])
    shift = flame_temperature(record, fuel) - flame_temperature(ours, fuel)
    assert -0.5 <= shift < 0.0
