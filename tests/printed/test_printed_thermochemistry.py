"""Zero-point energy, H(T) − E and S against what the programs printed in their own outputs.

A program's thermochemistry is an outside check of reading, structure and engine together: same masses, geometry and
wavenumbers, its temperature, pressure and symmetry number.  Where a program does something else than the rigid-rotor
harmonic oscillator with the CODATA constants, that is added here by separate code, and what is left must be of the size
of the printed digits.
"""

from __future__ import annotations

import csv
import gzip
import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
import pytest
import scipy.constants as codata

from heatwright import ModelOptions, build_model
from heatwright.findings import refusals
from heatwright.molecule import Molecule, PrintedThermo
from heatwright.reading.outputs import read_output
from outside import SHARED, needs_shared

R = codata.R
HARTREE_J_MOL = codata.value("Hartree energy") * codata.N_A
ATMOSPHERE = 101325.0
SAMPLES = Path(__file__).parents[2] / "sample_outputs"


@dataclass(frozen=True)
class Values:
    """Zero-point energy and H(T) − E in hartree, S in J/mol/K."""

    zpe: float
    h: float
    s: float


@dataclass(frozen=True)
class Tolerance:
    """Largest |own − printed|: µhartree, µhartree, J/mol/K; ``relative`` is a part of the value on top of it."""

    zpe: float
    h: float
    s: float
    relative: float = 0.0


# What is left is printed digits: 8 decimals in hartree (Psi4, ORCA), 6 decimals (Gaussian, NWChem), kcal/mol and
# cal/mol/K with 3 decimals (Q-Chem, Jaguar, NWChem).  NWChem's factors are known to 5 decimals: the relative part.
TOLERANCE = {
    "Psi4": Tolerance(0.04, 0.04, 0.0008),
    "Gaussian": Tolerance(0.5, 0.5, 0.002),
    "Q-Chem": Tolerance(0.8, 0.8, 0.004),
    "ORCA": Tolerance(0.1, 0.4, 0.0075),
    "NWChem": Tolerance(0.5, 0.55, 0.0042, relative=5e-6),
    "GAMESS": Tolerance(0.1, 0.1, 0.004),
    "Firefly": Tolerance(0.1, 0.15, 0.004),
    "Jaguar": Tolerance(0.5, 0.6, 0.001),
    "CFOUR": Tolerance(0.05, 0.4, 0.002),
    "ADF": Tolerance(0.4, 0.6, 0.002),
}


def own(molecule: Molecule, T: float, pressure_Pa: float, symmetry_number: int) -> Values:
    """The project's values as a program would print them: every mode harmonic, spin degeneracy, no optical isomers."""
    options = ModelOptions(
        pressure_Pa=pressure_Pa, symmetry_number=symmetry_number, optical_isomers=1, electronic="spin"
    )
    model = build_model(molecule, options)
    zpe_J_mol = 1000.0 * model.zpe_kJ_mol
    h_J_mol = zpe_J_mol + float(model.h_minus_h0_R(T)) * R
    return Values(zpe_J_mol / HARTREE_J_MOL, h_J_mol / HARTREE_J_MOL, float(model.s_R(T)) * R)


# ---- what programs do differently -----------------------------------------------------------------------------------


def free_rotor_share_of_entropy(wavenumbers_cm1: np.ndarray, T: float) -> float:
    """How much S (J/mol/K) changes when low modes turn into free rotors, ORCA's default.

    S. Grimme, Chem. Eur. J. 18, 9955 (2012): weight 1/(1 + (ω₀/ω)⁴) of the oscillator with ω₀ = 100 1/cm, the rest is
    a free rotor of the moment μ' = μ B/(μ + B), μ = h/(8π²cω), B = 1e-44 kg m² (citation and values from memory).
    """
    nu = 100.0 * codata.c * wavenumbers_cm1
    kT = codata.k * T
    x = codata.h * nu / kT
    oscillator = x / np.expm1(x) - np.log1p(-np.exp(-x))
    moment = codata.h / (8.0 * np.pi**2 * nu)
    moment = moment * 1e-44 / (moment + 1e-44)
    rotor = 0.5 + 0.5 * np.log(8.0 * np.pi**3 * moment * kT / codata.h**2)
    weight = 1.0 / (1.0 + (100.0 / wavenumbers_cm1) ** 4)
    return float(R * np.sum((1.0 - weight) * (rotor - oscillator)))


def principal_moments(masses: np.ndarray, xyz: np.ndarray) -> np.ndarray:
    """Principal moments of inertia in the units of the arguments, ascending."""
    r = xyz - masses @ xyz / masses.sum()
    return np.linalg.eigvalsh(np.einsum("i,ij,ij->", masses, r, r) * np.eye(3) - np.einsum("i,ij,ik->jk", masses, r, r))


def isotope_share_of_entropy(molecule: Molecule) -> float:
    """How much S (J/mol/K) changes when translation and rotation are those of the most common isotopes (NWChem).

    Atomic masses of 1H and 16O: AME 2020 (from memory).
    """
    common = np.array([{1: 1.00782503, 8: 15.99491462}[int(z)] for z in molecule.atomic_numbers])
    mass = common.sum() / molecule.masses_u.sum()
    moments = (principal_moments(m, molecule.coordinates_A) for m in (common, molecule.masses_u))
    default, isotopic = (float(np.prod(i)) for i in moments)
    return float(R * (1.5 * np.log(mass) + 0.5 * np.log(default / isotopic)))


def as_the_program_does(values: Values, molecule: Molecule, T: float) -> Values:
    """The project's values with the program's own ways added."""
    program = molecule.source.program
    if program == "ORCA":
        return Values(values.zpe, values.h, values.s + free_rotor_share_of_entropy(molecule.wavenumbers_cm1, T))
    if program == "NWChem":
        return _old_constants(values, molecule)
    return values


def _old_constants(values: Values, molecule: Molecule) -> Values:
    """NWChem: R = 1.9863 cal/mol/K and the h, k, c of its time, no electronic entropy, an isotope only in the modes.

    Observed, no source: the same three factors in all its outputs, from 2 to 20 atoms.
    """
    assert molecule.multiplicity is not None
    s = values.s - R * np.log(molecule.multiplicity)
    if any(f.code == "non-default-isotope" for f in molecule.findings):
        s += isotope_share_of_entropy(molecule)
    zpe = 0.99952 * values.zpe
    old_R = 1.9863 * codata.calorie / R
    return Values(zpe, zpe + old_R * (values.h - values.zpe), 0.99956 * s)


# ---- the comparison --------------------------------------------------------------------------------------------------


def differences(values: Values, printed: Values) -> dict[str, float]:
    """Own − printed in µhartree, µhartree and J/mol/K; a value that is not printed is left out."""
    found = {
        "zpe": 1e6 * (values.zpe - printed.zpe),
        "h": 1e6 * (values.h - printed.h),
        "s": values.s - printed.s,
    }
    return {name: value for name, value in found.items() if not np.isnan(value)}


def assert_close(values: Values, printed: Values, program: str) -> None:
    tolerance = TOLERANCE[program]
    scale = {"zpe": 1e6 * values.zpe, "h": 1e6 * values.h, "s": 0.0}
    found = differences(values, printed)
    assert {"h", "s"} <= set(found)
    for name, difference in found.items():
        assert abs(difference) <= getattr(tolerance, name) + tolerance.relative * scale[name], (name, found)


def printed_values(printed: PrintedThermo) -> Values:
    zpe, h, s = printed.zpe_hartree, printed.enthalpy_correction_hartree, printed.entropy_J_mol_K
    return Values(*(np.nan if value is None else value for value in (zpe, h, s)))


def check(molecule: Molecule, printed: PrintedThermo) -> None:
    assert not refusals(molecule.findings)
    assert printed.temperature_K is not None
    values = own(molecule, printed.temperature_K, printed.pressure_Pa or ATMOSPHERE, printed.symmetry_number or 1)
    explained = as_the_program_does(values, molecule, printed.temperature_K)
    assert_close(explained, printed_values(printed), molecule.source.program)


# ---- NWChem: the project's own samples and the folder of computed minima ---------------------------------------------


@cache
def computed() -> tuple[Path, ...]:
    """The outputs of ``computed`` that are minima."""
    if SHARED is None:
        return ()
    with (SHARED / "computed" / "INDEX.csv").open(encoding="utf-8") as stream:
        return tuple(SHARED / "computed" / r["file"] for r in csv.DictReader(stream) if r["check"] != "refuse")


def nwchem_text(path: Path) -> Values:
    """The values in the text of an NWChem output, found without the project's reader."""
    opener = gzip.open if path.suffix == ".gz" else open
    with opener(path, "rt", encoding="utf-8") as stream:
        text = stream.read()
    number = r"=\s*[\d.]+ kcal/mol\s*\(\s*([\d.]+) au\)"
    zpe, h = (re.findall(label + number, text)[-1] for label in (r"Zero-Point correction to Energy\s*",
                                                                 r"Thermal correction to Enthalpy\s*"))  # fmt: skip
    s = re.findall(r"Total Entropy\s*=\s*([\d.]+) cal/mol-K", text)[-1]
    return Values(float(zpe), float(h), float(s) * codata.calorie)


def or_skip(cases: list) -> list:
    """The cases, or one that says why there is none."""
    return cases or [pytest.param(None, marks=needs_shared, id="none")]


SAMPLE_FILES = sorted(SAMPLES.glob("*.out"))


def test_there_are_samples() -> None:
    assert len(SAMPLE_FILES) == 12


@pytest.mark.parametrize(
    "path", SAMPLE_FILES + or_skip(list(computed())), ids=lambda p: f"{p.parent.name}/{p.name}" if p else "none"
)
def test_nwchem_output(path: Path) -> None:
    molecule = read_output(path)
    (printed,) = molecule.printed
    text = nwchem_text(path)
    assert printed_values(printed) == Values(text.zpe, text.h, pytest.approx(text.s, rel=1e-12))
    assert (printed.temperature_K, printed.pressure_Pa) == (298.15, None)
    check(molecule, printed)


@pytest.mark.parametrize(("name", "sigma"), [("CH3", 6), ("CO2", 2), ("H2O", 2), ("CH3OCH3", 2), ("OH", 1), ("O2", 2)])
def test_the_test_sees_what_it_should(name: str, sigma: int) -> None:
    """A wrong pressure, symmetry number, spin factor or mode shows; without NWChem's constants H and S are off."""
    molecule = read_output(SAMPLES / f"{name}.out")
    (printed,) = molecule.printed
    assert printed.symmetry_number == sigma
    plain = own(molecule, 298.15, ATMOSPHERE, sigma)
    wrong = {
        "pressure": own(molecule, 298.15, 1e5, sigma),
        "symmetry": own(molecule, 298.15, ATMOSPHERE, sigma + 1),
        "mode": own(molecule.but(wavenumbers_cm1=molecule.wavenumbers_cm1 * 1.001), 298.15, ATMOSPHERE, sigma),
        "spin": own(molecule.but(multiplicity=molecule.multiplicity + 1), 298.15, ATMOSPHERE, sigma),
    }
    for values in wrong.values():
        with pytest.raises(AssertionError):
            assert_close(as_the_program_does(values, molecule, 298.15), printed_values(printed), "NWChem")
    with pytest.raises(AssertionError):
        assert_close(plain, printed_values(printed), "NWChem")


# ---- outputs of other programs ---------------------------------------------------------------------------------------

READ_BY_THE_PROJECT = ("Gaussian", "ORCA", "Q-Chem", "NWChem", "Psi4")


@cache
def table(name: str) -> tuple[dict[str, str], ...]:
    if SHARED is None:
        return ()
    with (SHARED / name).open(encoding="utf-8") as stream:
        return tuple(csv.DictReader(stream))


def usable_rows(programs: tuple[str, ...]) -> Iterator[dict[str, str]]:
    for row in table("outputs/MANIFEST.csv"):
        usable = row["expected_outcome"].startswith(("ok", "warning"))
        if usable and row["program"] in programs and row["printed_S_J_mol_K"]:
            yield row


def number(text: str) -> float:
    return float(text) if text else np.nan


OUTPUTS = [pytest.param(r, id=r["file"]) for r in usable_rows(READ_BY_THE_PROJECT)]


@pytest.mark.parametrize("row", or_skip(OUTPUTS))
def test_output_of_a_program_the_project_reads(row: dict[str, str]) -> None:
    assert SHARED is not None
    molecule = read_output(SHARED / "outputs" / row["file"])
    first = molecule.printed[0]
    assert first.temperature_K == float(row["printed_T_K"])
    assert first.pressure_Pa == (float(row["printed_p_Pa"]) if row["printed_p_Pa"] else None)
    assert first.symmetry_number == (int(row["printed_symmetry_number"]) if row["printed_symmetry_number"] else None)
    listed = [r for r in table("printed_thermo.csv") if r["file"] == row["file"]]
    if not listed:  # a cut-off copy of a file that is listed
        assert row["file"].startswith("truncated")
        listed = [r for r in table("printed_thermo.csv") if row["file"] == f"truncated_{r['file'][:-4]}_90pct.out"]
    assert sorted(p.temperature_K for p in molecule.printed) == sorted(float(r["T_K"]) for r in listed)
    by_temperature = {float(r["T_K"]): r for r in listed}
    for printed in molecule.printed:
        theirs = by_temperature[printed.temperature_K]
        columns = (theirs[f"printed_{c}"] for c in ("zpe_hartree", "H_minus_E_hartree", "S_J_mol_K"))
        found = differences(printed_values(printed), Values(*map(number, columns)))
        assert all(abs(found[k]) <= limit for k, limit in {"h": 0.011, "s": 1e-4}.items()), found
        assert abs(found.get("zpe", 0.0)) <= 0.011
        check(molecule, printed)


def test_the_list_of_outputs_covers_every_program() -> None:
    if SHARED is None:
        pytest.skip("the optional folder of reference data is not here")
    assert {r["program"] for r in usable_rows(READ_BY_THE_PROJECT)} == set(READ_BY_THE_PROJECT)
    assert len(OUTPUTS) >= 12


# GAMESS-UK makes its thermochemistry from the wavenumbers before translation and rotation are projected out and cclib
# reads those after it (up to 1 1/cm apart, 31 µhartree in the zero-point energy), so it cannot be compared to digits.
OTHERS = [pytest.param(r, id=r["file"]) for r in usable_rows(("GAMESS", "Firefly", "Jaguar", "CFOUR", "ADF"))]


@pytest.mark.parametrize("row", or_skip(OTHERS))
def test_output_of_a_program_read_through_cclib_alone(row: dict[str, str]) -> None:
    """Their thermochemistry is not read by the project; the printed values are those of the outside table."""
    assert SHARED is not None
    molecule = read_output(SHARED / "outputs" / row["file"])
    listed = [r for r in table("printed_thermo.csv") if r["file"] == row["file"]]
    assert listed
    for r in listed:
        printed = Values(*(number(r[f"printed_{c}"]) for c in ("zpe_hartree", "H_minus_E_hartree", "S_J_mol_K")))
        values = own(molecule, float(r["T_K"]), float(r["p_Pa_used"]), int(r["symmetry_number"]))
        assert_close(values, printed, row["program"])
