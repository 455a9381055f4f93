"""Every output of the optional reference folder: printed values, kinds, expected outcomes; the computed minima."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from heatwright.findings import refusals
from heatwright.molecule import Molecule
from heatwright.reading.levels import level_differences, level_unknowns
from heatwright.reading.outputs import read_output
from kept_outputs import codes, outcome
from outside import SHARED, needs_shared

pytestmark = needs_shared
MAIN = {"NWChem", "Gaussian", "ORCA", "Q-Chem", "Psi4"}
PRINTED = (
    ("printed_zpe_hartree", "zpe_hartree", 2e-8),
    ("printed_H_corr_hartree", "enthalpy_correction_hartree", 4e-8),
    ("printed_S_J_mol_K", "entropy_J_mol_K", 2e-3),
    ("printed_T_K", "temperature_K", 1e-6),
    ("printed_p_Pa", "pressure_Pa", 0.5),
    ("printed_symmetry_number", "symmetry_number", 0),
)


def rows(name: str) -> list[dict[str, str]]:
    if SHARED is None:
        return []
    with (SHARED / name).open(encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream))


MANIFEST = rows("outputs/MANIFEST.csv")
COMPUTED = rows("computed/INDEX.csv")


def expected_severity(words: str) -> str:
    return {"error": "refuse", "warning": "warn"}.get(words.split(":")[0], "ok")


@pytest.mark.parametrize("row", MANIFEST, ids=lambda r: r["file"])
def test_manifest(row: dict[str, str]) -> None:
    assert SHARED is not None
    severity, found, m = outcome(SHARED / "outputs" / row["file"])
    assert severity == expected_severity(row["expected_outcome"]), found
    if m is None:
        return
    if row["file"] != "serenity161_dvb_sp.out" and row["kind"] != "energy" and not row["file"].startswith("truncated"):
        assert m.kind == row["kind"]
    for column, value in (
        ("natom", m.n_atoms),
        ("charge", m.charge),
        ("multiplicity", m.multiplicity),
        ("n_real_modes", int(np.count_nonzero(m.wavenumbers_cm1 > 0))),
        ("n_imaginary_modes", m.n_imaginary),
    ):
        assert not row[column] or int(row[column]) == value, column
    if row["reference_energy_hartree"] and "scan" not in m.kind:
        assert m.energy_hartree == pytest.approx(float(row["reference_energy_hartree"]), abs=6e-9, rel=0)
    if row["masses_printed"]:
        assert m.masses_printed == (row["masses_printed"] == "yes")
    printed = m.printed[0] if m.printed else None
    for column, attribute, tolerance in PRINTED:
        if row[column]:
            assert getattr(printed, attribute) == pytest.approx(float(row[column]), abs=tolerance, rel=0), column


def test_versions_of_the_main_programs() -> None:
    assert SHARED is not None
    for row in MANIFEST:
        if row["program"] in MAIN and "scan" not in row["kind"]:
            _, _, m = outcome(SHARED / "outputs" / row["file"])
            assert m is None or (m.source.program, m.source.version) == (row["program"], row["version"])


@pytest.mark.parametrize("row", COMPUTED, ids=lambda r: r["species"])
def test_computed_molecules(row: dict[str, str]) -> None:
    """Every minimum is clean; the one that is none is refused."""
    assert SHARED is not None
    m = read_output(SHARED / "computed" / row["file"])
    assert (m.kind, m.multiplicity) == ("frequency", int(row["multiplicity"]))
    assert m.masses_printed
    assert m.energy_hartree is not None
    if row["check"] == "refuse":
        assert codes(m, "refuse") == {"imaginary-modes"}
    else:
        assert m.findings == ()


def computed(pattern: str) -> list[Path]:
    return sorted((SHARED / "computed").glob(pattern)) if SHARED else []


@pytest.fixture(scope="module")
def methanol() -> Molecule:
    assert SHARED is not None
    return read_output(SHARED / "computed" / "CH3OH.out.gz")


@pytest.mark.parametrize("path", computed("atoms/*.gz"), ids=lambda p: p.name)
def test_atoms_are_at_the_level_of_the_molecules(path: Path, methanol: Molecule) -> None:
    atom = read_output(path)
    assert (atom.kind, atom.findings) == ("atom", ())
    assert atom.level is not None
    assert methanol.level is not None
    assert level_differences(methanol.level, atom.level) == ()
    assert level_unknowns(methanol.level, atom.level) == ()


@pytest.mark.parametrize("path", computed("scans/*/*.gz"), ids=lambda p: p.name)
def test_scan_points_are_optimisations(path: Path) -> None:
    point = read_output(path)
    assert point.kind == "optimisation"
    assert refusals(point.findings) == ()
    assert point.energy_hartree is not None
