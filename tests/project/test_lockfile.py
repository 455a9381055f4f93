"""The lock file: what is written is read back, byte for byte the same, and nothing unknown is swallowed."""

from __future__ import annotations

import tomllib
from dataclasses import replace
from pathlib import Path

import pytest

from heatwright.findings import Refused
from heatwright.project.lockfile import (
    Lock,
    LockedFile,
    LockedFormation,
    LockedReference,
    LockedSpecies,
    lock_text,
    parse_lock,
    read_lock,
)
from heatwright.project.toml_text import toml_key, toml_value

WATER = LockedSpecies(
    name="H2O",
    formula="H2O",
    composition={"H": 2, "O": 1},
    charge=0,
    multiplicity=1,
    files=(LockedFile("output", "H2O.out", "ab" * 32), LockedFile("energy", "sp/H2O.out", "cd" * 32)),
    references="12" * 32,
    level="CCSD(T)/cc-pVTZ//B3LYP/6-31G*",
    program="NWChem 7.0.2",
    choices={"frequency_scale": 0.9614, "accept": ["gradient"]},
    conventions={"frequency_scale": 0.9614, "zpe_scale": 1.0, "low_modes": "harmonic", "symmetry_number": 2},
    formation=LockedFormation(route="given", source='a "quoted" source\\', dHf298_kJ_mol=-241.8, dHf0_kJ_mol=-238.9),
    S298_J_mol_K=188.8,
    H298_minus_H0_kJ_mol=9.9,
    Cp_J_mol_K=(33.6, 34.3, 35.2, 36.3, 38.7, 41.3, 47.1),
    temperatures_K=(200.0, 1000.0, 6000.0),
    residuals={"max_dCp_R": 0.0123},
    findings=("note:user-value",),
    key="ef" * 32,
    texts={"thermo.dat": "0123456789abcdef"},
)
LOCK = Lock(
    mechanism="pilot",
    tool="0.1.0",
    fingerprint="77" * 8,
    standard_pressure_Pa=100000.0,
    references=(LockedReference("atoms/H.out", "aa" * 32, "H"), LockedReference("atoms/O.out", "bb" * 32, "O")),
    species={"H2O": WATER, "CH2(S)": replace(WATER, name="CH2(S)", kept="its output is cut off")},
)


def test_what_is_written_is_read_back() -> None:
    text = lock_text(LOCK)
    back = parse_lock(text)
    assert back == replace(LOCK, species=dict(sorted(LOCK.species.items())))
    assert lock_text(back) == text
    assert list(back.species) == ["CH2(S)", "H2O"]


def test_one_changed_species_changes_only_its_own_lines() -> None:
    changed = {**LOCK.species, "H2O": replace(WATER, S298_J_mol_K=189.0)}
    old, new = lock_text(LOCK).splitlines(), lock_text(replace(LOCK, species=changed)).splitlines()
    assert [(a, b) for a, b in zip(old, new, strict=True) if a != b] == [
        ("S298_J_mol_K = 188.8", "S298_J_mol_K = 189.0")
    ]


def test_a_newer_version_is_refused_before_anything_else_is_looked_at(tmp_path: Path) -> None:
    path = tmp_path / "thermo.lock.toml"
    path.write_text('heatwright-lock = 2\nsomething = "new"\n')
    with pytest.raises(Refused) as error:
        read_lock(path)
    assert [f.code for f in error.value.findings] == ["lock-newer"]
    assert "version 2" in str(error.value)


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ("S298_J_mol_K =", "S298_J_mol =", "'S298_J_mol'; expected 'S298_J_mol_K'"),
        ("S298_J_mol_K = 188.8", "S298_J_mol_K = nan", "S298_J_mol_K is nan"),
        ("charge = 0", "charge = true", "charge is True"),
        ("charge = 0\n", "", "charge is missing"),
        ("heatwright-lock = 1", "heatwright-lock = 0", "heatwright-lock is 0"),
        ("[species.H2O]", "<<<<<<< HEAD\n[species.H2O]", "thermo.lock.toml:"),
        ('role = "output"', 'rolle = "output"', "'rolle'; expected 'role'"),
        ("temperatures_K = [200.0, 1000.0, 6000.0]", "temperatures_K = [200.0]", "has 1 numbers"),
    ],
)
def test_a_damaged_lock_is_refused_by_name(old: str, new: str, said: str) -> None:
    text = lock_text(LOCK)
    assert old in text
    with pytest.raises(Refused) as error:
        parse_lock(text.replace(old, new))
    assert [f.code for f in error.value.findings] == ["lock-wrong"]
    assert said in str(error.value)


def test_a_missing_lock_is_a_sentence(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="cannot be read"):
        read_lock(tmp_path / "none.toml")


@pytest.mark.parametrize("value", ['a\tb\n"c" \\ \x7f\x01 é', 1, -0.5, 1e-300, 6.02e23, True, [1.5, "x"], {"a b": {}}])
def test_values_survive_toml(value: object) -> None:
    assert tomllib.loads(f"{toml_key('a key')} = {toml_value(value)}") == {"a key": value}


def test_what_has_no_spelling_in_toml_is_an_error() -> None:
    with pytest.raises(TypeError):
        toml_value(None)
    with pytest.raises(ValueError, match="nan"):
        toml_value(float("nan"))
