"""QCSchema results: Psi4's own against its printed wavenumbers, and everything a result can lack."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from heatwright.findings import Refused, refusals
from heatwright.reading.outputs import read_output
from heatwright.structure.inertia import inertia

DATA = Path(__file__).resolve().parents[1] / "data" / "qcschema"
PRINTED_CM1 = [1826.5537, 4070.4592, 4188.7040]  # Psi4 1.3.2, frequencies('hf') at the same geometry


def document(name: str = "water_hf_hessian") -> dict[str, Any]:
    return json.loads((DATA / f"{name}.json").read_text(encoding="utf-8"))


def read(tmp_path: Path, value: object, name: str = "x.json"):
    file = tmp_path / name
    file.write_text(value if isinstance(value, str) else json.dumps(value), encoding="utf-8")
    return read_output(file)


def test_a_hessian_gives_the_wavenumbers_the_program_prints() -> None:
    molecule = read_output(DATA / "water_hf_hessian.json")
    assert np.abs(molecule.wavenumbers_cm1 - PRINTED_CM1).max() < 5e-4
    assert (molecule.kind, molecule.charge, molecule.multiplicity) == ("frequency", 0, 1)
    assert molecule.level is not None
    assert molecule.level.label == "HF/6-31G*"
    assert molecule.source.program_version == "Psi4 1.3.2"
    assert (molecule.energy_kind, molecule.energy_hartree) == ("SCF", pytest.approx(-76.010746508, abs=1e-8))
    assert molecule.normal_modes.shape == (3, 3, 3)
    assert molecule.hessian_hartree_bohr2.shape == (9, 9)
    assert refusals(molecule.findings) == ()
    assert [f.code for f in molecule.findings] == ["masses-from-table"]
    bond = np.linalg.norm(molecule.coordinates_A[1] - molecule.coordinates_A[0])
    assert bond == pytest.approx(0.9473, abs=5e-4)  # HF/6-31G* water, CCCBDB, from memory


def test_an_energy_and_a_gradient() -> None:
    energy = read_output(DATA / "water_mp2_energy.json")
    assert (energy.kind, energy.energy_kind) == ("energy", "MP2")
    assert set(energy.energies_hartree) == {"SCF", "MP2"}
    assert energy.energy_hartree == pytest.approx(-76.198366704, abs=1e-8)
    assert energy.wavenumbers_cm1.size == 0
    gradient = read_output(DATA / "water_hf_gradient.json")
    assert gradient.kind == "energy"
    assert 0.0 < gradient.max_gradient_hartree_bohr < 1e-6


def test_flat_and_nested_lists_are_one(tmp_path: Path) -> None:
    nested = document()
    nested["return_result"] = np.reshape(nested["return_result"], (9, 9)).tolist()
    nested["molecule"]["geometry"] = np.reshape(nested["molecule"]["geometry"], (3, 3)).tolist()
    molecule = read(tmp_path, nested)
    np.testing.assert_array_equal(molecule.wavenumbers_cm1, read_output(DATA / "water_hf_hessian.json").wavenumbers_cm1)


def test_masses_and_mass_numbers(tmp_path: Path) -> None:
    heavy = document()
    heavy["molecule"]["mass_numbers"] = [16, 2, 2]
    by_number = read(tmp_path, heavy)
    heavy["molecule"]["masses"] = [15.99491462, 2.01410178, 2.01410178]
    by_mass = read(tmp_path, heavy)
    np.testing.assert_allclose(by_number.wavenumbers_cm1, by_mass.wavenumbers_cm1, rtol=1e-7)
    # The product rule of Teller and Redlich (G. Herzberg 1945, section II.6, from memory).
    light = read_output(DATA / "water_hf_hessian.json")
    moments = [inertia(m.masses_u, m.coordinates_A).principal_moments_u_A2.prod() for m in (light, by_mass)]
    atoms = (light.masses_u / by_mass.masses_u).prod()
    rule = atoms**1.5 * (by_mass.mass_u / light.mass_u) ** 1.5 * (moments[1] / moments[0]) ** 0.5
    assert (by_mass.wavenumbers_cm1 / light.wavenumbers_cm1).prod() == pytest.approx(rule, rel=1e-5)
    assert [f.code for f in by_mass.findings if f.severity == "warn"] == ["non-default-isotope"] * 2


def test_a_turned_molecule_has_the_same_wavenumbers(tmp_path: Path) -> None:
    turned = document()
    turn = np.linalg.qr(np.random.default_rng(1).normal(size=(3, 3)))[0]
    x = np.reshape(turned["molecule"]["geometry"], (3, 3)) @ turn.T
    big = np.kron(np.eye(3), turn)
    turned["molecule"]["geometry"] = x.ravel().tolist()
    turned["return_result"] = (big @ np.reshape(turned["return_result"], (9, 9)) @ big.T).ravel().tolist()
    assert np.abs(read(tmp_path, turned).wavenumbers_cm1 - PRINTED_CM1).max() < 5e-4


def test_a_method_with_a_dispersion_correction(tmp_path: Path) -> None:
    changed = document()
    changed["model"] = {"method": "B3LYP-D3BJ", "basis": "cc-pvtz"}
    level = read(tmp_path, changed).level
    assert (level.method, level.dispersion, level.basis) == ("B3LYP", "D3BJ", "cc-pVTZ")


def but(**changes: Any) -> Callable[[dict[str, Any]], None]:
    def change(d: dict[str, Any]) -> None:
        for path, value in changes.items():
            *parents, key = path.split("__")
            inner = d
            for parent in parents:
                inner = inner[parent]
            if value is None:
                del inner[key]
            else:
                inner[key] = value

    return change


@pytest.mark.parametrize(
    ("change", "code", "words"),
    [
        (
            but(success=False, error={"error_type": "x", "error_message": "SCF did\nnot converge"}),
            "job-failed",
            "not conv",
        ),
        (but(success=None), "qcschema-wrong", "success"),
        (but(driver="optimize"), "qcschema-wrong", "'optimize'"),
        (but(driver=None), "qcschema-wrong", "driver"),
        (but(molecule=None), "qcschema-wrong", "molecule is missing"),
        (but(molecule="water"), "qcschema-wrong", "an object"),
        (but(molecule__symbols=None), "qcschema-wrong", "molecule.symbols"),
        (but(molecule__symbols=["O", "H", "Xx"]), "qcschema-wrong", "atom 3 is 'Xx'"),
        (but(molecule__symbols=["O", "H"]), "qcschema-wrong", "6 numbers"),
        (but(molecule__geometry=None), "qcschema-wrong", "molecule.geometry is missing"),
        (but(molecule__geometry=["a"] * 9), "qcschema-wrong", "molecule.geometry"),
        (but(molecule__masses=[1.0]), "qcschema-wrong", "molecule.masses"),
        (but(molecule__mass_numbers=[16, 9, 1]), "qcschema-wrong", "9-H"),
        (but(molecule__real=[True, True, False]), "ghost-atoms", "1 of 3"),
        (but(molecule__molecular_charge=0.5), "qcschema-wrong", "whole number"),
        (but(return_result=None), "qcschema-wrong", "return_result is missing"),
        (but(return_result=[0.0] * 80), "qcschema-wrong", "81 numbers"),
        (but(return_result=[0.0] * 80 + [float("nan")]), "not-a-number", "number 81"),
        (but(return_result=[[0.0] * 9] * 8 + [[0.0] * 8]), "qcschema-wrong", "return_result"),
        (but(return_result=[0.0] * 8 + [0.1] + [0.0] * 72), "qcschema-wrong", "not symmetric"),
        (but(input_data={"specification": {}}), "qcschema-wrong", "schema_version 2"),
        (but(return_result={"a": 1}), "qcschema-wrong", "return_result"),
        (but(properties__return_energy="low"), "qcschema-wrong", "properties.return_energy"),
        (but(properties__scf_total_energy=float("inf")), "not-a-number", "scf_total_energy"),
        (but(schema_name="qcschema_input", return_result=None), "not-an-output", "input"),
    ],
)
def test_what_a_result_can_lack(tmp_path: Path, change, code: str, words: str) -> None:
    changed = document()
    change(changed)
    with pytest.raises(Refused) as refused:
        read(tmp_path, changed)
    assert refused.value.findings[0].code == code
    assert words in refused.value.findings[0].text


def test_a_failed_operation(tmp_path: Path) -> None:
    failed = {"success": False, "error": {"error_type": "x", "error_message": "out of memory"}, "input_data": {}}
    with pytest.raises(Refused, match="out of memory"):
        read(tmp_path, failed)


def test_json_that_is_something_else_or_cut_off(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="not-an-output"):
        read(tmp_path, {"name": "x"})
    with pytest.raises(Refused, match="not-an-output"):
        read(tmp_path, "{ no json at all")
    text = (DATA / "water_hf_hessian.json").read_text(encoding="utf-8")
    with pytest.raises(Refused, match="line ") as refused:
        read(tmp_path, text[: len(text) // 2])
    assert refused.value.findings[0].code == "parser-failed"


def test_a_saddle_point_is_refused(tmp_path: Path) -> None:
    upside_down = document()
    upside_down["return_result"] = [-value for value in upside_down["return_result"]]
    molecule = read(tmp_path, upside_down)
    assert "imaginary-modes" in {f.code for f in refusals(molecule.findings)}


def test_charge_and_multiplicity_of_the_user() -> None:
    molecule = read_output(DATA / "water_hf_hessian.json", charge=1, multiplicity=2)
    assert (molecule.charge, molecule.multiplicity) == (1, 2)
    assert sum(f.code == "user-value" for f in molecule.findings) == 2
    with pytest.raises(Refused, match="one molecule"):
        read_output(DATA / "water_hf_hessian.json", job=2)
