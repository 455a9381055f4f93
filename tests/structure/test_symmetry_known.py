"""Symmetry numbers of real molecules: those of the G2/97 set that are known, and B3LYP outputs outside the project."""

from __future__ import annotations

import csv
import gzip
import re
from pathlib import Path

import numpy as np
import pytest
from ase.build import molecule

from heatwright.constants import BOHR_ANGSTROM
from heatwright.elements import atomic_number
from heatwright.structure.inertia import inertia
from heatwright.structure.symmetry import Symmetry, symmetry, symmetry_findings
from outside import SHARED, needs_shared

TABLE = Path(__file__).parents[1] / "data" / "structure" / "known_symmetry.csv"
KNOWN = {
    row["g2_name"]: int(row["symmetry_number"])
    for row in csv.DictReader(line for line in TABLE.read_text().splitlines() if not line.startswith("#"))
}


def of(name: str, tolerance_A: float = 0.05, noise_A: float = 0.0, seed: int = 0) -> Symmetry:
    atoms = molecule(name)
    noise = np.random.default_rng(seed).normal(0.0, noise_A, atoms.positions.shape)
    return symmetry(atoms.numbers, atoms.get_masses(), atoms.positions + noise, tolerance_A)


def test_the_table_is_whole() -> None:
    assert len(KNOWN) == 81


@pytest.mark.parametrize("tolerance_A", [0.001, 0.003, 0.01, 0.03, 0.05, 0.1, 0.2, 0.3])
def test_known_molecules_have_their_number(tolerance_A: float) -> None:
    assert {name: of(name, tolerance_A).symmetry_number for name in KNOWN} == KNOWN


@pytest.mark.parametrize("seed", range(4))
@pytest.mark.parametrize(("noise_A", "tolerance_A"), [(0.003, 0.05), (0.003, 0.03), (0.01, 0.1), (0.02, 0.2)])
def test_noise_changes_no_number(noise_A: float, tolerance_A: float, seed: int) -> None:
    assert {name: of(name, tolerance_A, noise_A, seed).symmetry_number for name in KNOWN} == KNOWN


@pytest.mark.parametrize("seed", range(4))
def test_too_much_noise_loses_symmetry_but_never_adds(seed: int) -> None:
    for name, number in KNOWN.items():
        found = of(name, 0.05, 0.03, seed)
        assert number % found.symmetry_number == 0, name  # what is found is a subgroup
        if found.symmetry_number < number:
            assert found.smallest_rejected_deviation_A is not None


def test_exact_geometries_leave_no_doubt() -> None:
    doubtful = [name for name in KNOWN if symmetry_findings(of(name))]
    assert doubtful == []


@pytest.mark.parametrize("name", ["CH3O", "CH3S"])
def test_jahn_teller_distorted_radicals_are_pointed_out(name: str) -> None:
    """Methoxy and methylthio: Cs by a distortion of a few hundredths of an Å from C3v."""
    found = of(name)
    (finding,) = symmetry_findings(found)
    assert found.ambiguous
    assert finding.severity == "warn"
    assert finding.code == "symmetry-ambiguous"
    assert found.if_looser == ("C3v", 3)
    assert "C3v (symmetry number 3)" in finding.text
    assert f"{found.smallest_rejected_deviation_A:.3f} Å" in finding.text
    assert "--symmetry-number" in finding.text
    assert (found.point_group, found.symmetry_number) == ("Cs", 1)
    assert of(name, 0.2).symmetry_number == 3


def test_an_operation_that_only_just_fits_is_pointed_out() -> None:
    found = of("CH3O", 0.1)
    (finding,) = symmetry_findings(found)
    assert found.symmetry_number == 3
    assert found.if_tighter == ("Cs", 1)
    assert "without which it would be Cs (symmetry number 1)" in finding.text


# --- outputs of an independent program, outside the project -----------------------------------------------------------

_INDEX = [] if SHARED is None else list(csv.DictReader((SHARED / "computed/INDEX.csv").read_text().splitlines()))
_ATOM = re.compile(r"^ +([A-Z][a-z]?) +\d+((?: +-?\d\.\d+D[+-]\d\d){4}) *$")


def _last_frequency_job(text: str) -> tuple[list[int], np.ndarray, np.ndarray, np.ndarray]:
    """Atomic numbers, masses (u), places (Å) and printed rotational constants (1/cm) of an NWChem output."""
    block = text.rsplit("Atom information", 1)[1]
    atoms = [found for line in block.splitlines()[:60] if (found := _ATOM.match(line))]
    numbers = np.array([[float(v.replace("D", "E")) for v in found[2].split()] for found in atoms])
    constants = [float(v) for v in re.findall(r"^ [ABC]= +(\d+\.\d+) cm-1", block, re.MULTILINE)]
    z = [atomic_number(found[1]) for found in atoms]
    return z, numbers[:, 3], numbers[:, :3] * BOHR_ANGSTROM, np.array(constants)


@needs_shared
@pytest.mark.parametrize("row", _INDEX, ids=[row["file"] for row in _INDEX])
def test_optimised_geometries_have_number_and_rotational_constants(row: dict[str, str]) -> None:
    """B3LYP/6-31G* minima by NWChem 7.0.2: σ from group theory, rotational constants as the program prints them."""
    assert SHARED is not None
    text = gzip.decompress((SHARED / "computed" / row["file"]).read_bytes()).decode()
    z, masses, place, printed = _last_frequency_job(text)
    found = symmetry(z, masses, place)
    assert found.symmetry_number == int(row["sigma"])
    assert found.ambiguous == (row["species"] == "CH3O")
    assert found.chiral == (row["file"] in CHIRAL)
    constants = inertia(masses, place).rotational_constants_cm1
    assert constants == pytest.approx(printed[printed > 0.0][: constants.size], rel=2e-5)


CHIRAL = {
    "CH3CH2OH_gauche.out.gz",
    "CH3CH2OH_gauche_mirror.out.gz",
    "H2COH.out.gz",
    "H2O2.out.gz",
    "N2H4.out.gz",
    "gauche_butane.out.gz",
}
