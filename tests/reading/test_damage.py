"""Damaged outputs: whatever is done to a file, the result is the right molecule or a finding, never a traceback."""

from __future__ import annotations

import random
import re
from pathlib import Path

import numpy as np
import pytest

from heatwright.findings import Refused, refusals
from heatwright.molecule import Molecule
from heatwright.reading.outputs import read_output
from kept_outputs import codes, kept, read_text, text_of

NAMES = [
    "qchem51_water_freq.out", "gaussian16_water_ccsdt_energy.log", "psi4_132_oh_radical_freq.out",
    "psi4_132_water_ccsdt_energy.out", "nwchem702_hdo_3temps.out", "nwchem702_water_ccsdt_energy.out",
    "xtb651_methanol_ohess.out", "mopac2206_methanol_force_thermo.out",
]  # fmt: skip
LONG = ["gaussian16_dvb_freq.out", "orca50_dvb_freq.out", "orca60_dvb_freq.out", "nwchem702_water_mp2_opt_freq.out"]


def same_physics(m: Molecule, full: Molecule) -> bool:
    return (
        m.energy_hartree == full.energy_hartree
        and (m.charge, m.multiplicity) == (full.charge, full.multiplicity)
        and m.wavenumbers_cm1.shape == full.wavenumbers_cm1.shape
        and np.allclose(m.wavenumbers_cm1, full.wavenumbers_cm1, atol=0.006, rtol=0)  # NWChem prints them twice
        and np.allclose(m.masses_u, full.masses_u, atol=2e-5, rtol=0)
        and np.allclose(m.coordinates_A, full.coordinates_A, atol=1e-6, rtol=0)
        and (m.normal_modes is None or full.normal_modes is None or np.allclose(m.normal_modes, full.normal_modes))
    )


def tried(folder: Path, text: str) -> tuple[Molecule | None, set[str]]:
    """The molecule, or None with the codes of the refusal."""
    try:
        return read_text(folder, text), set()
    except Refused as error:
        return None, {f.code for f in refusals(error.findings)}


def cut_and_look(folder: Path, name: str, n: int) -> None:
    text, full = text_of(name), read_output(kept(name))
    for k in range(1, n):
        # places spread by the golden ratio: every region is met, none regularly
        cut = int(len(text) * (k * 0.6180339887 % 1.0))
        m, refused = tried(folder, text[:cut])
        if m is None:
            assert refused <= {"truncated", "not-an-output", "file-empty"}, (name, cut)
            continue
        if refusals(m.findings):
            assert "truncated" in codes(m, "refuse"), (name, cut, m.findings)
        else:
            assert same_physics(m, full), (name, cut)
            assert "no-normal-termination" in codes(m, "warn") or cut > len(text) - 1500, (name, cut)


@pytest.mark.parametrize("name", NAMES)
def test_cut_anywhere(tmp_path: Path, name: str) -> None:
    cut_and_look(tmp_path, name, 10)


@pytest.mark.parametrize("name", LONG)
def test_long_outputs_cut_anywhere(tmp_path: Path, name: str) -> None:
    cut_and_look(tmp_path, name, 5)


@pytest.mark.long
@pytest.mark.parametrize("name", NAMES + LONG)
def test_cut_at_many_places(tmp_path: Path, name: str) -> None:
    cut_and_look(tmp_path, name, 400)


def test_cut_inside_the_table_of_modes_names_the_last_line(tmp_path: Path) -> None:
    text = text_of("gaussian16_dvb_freq.out")
    cut = text[: int(0.6 * len(text))]
    m = read_text(tmp_path, cut)
    (finding,) = refusals(m.findings)
    assert (finding.code, finding.where) == ("truncated", f"line {cut.rstrip().count(chr(10)) + 1}")
    assert m.wavenumbers_cm1.size == 0


def test_missing_closing_line_is_a_warning_when_all_is_there(tmp_path: Path) -> None:
    text = text_of("gaussian16_dvb_freq.out")
    m = read_text(tmp_path, text[: int(0.9 * len(text))])
    assert codes(m) == {"no-normal-termination"}
    assert same_physics(m, read_output(kept("gaussian16_dvb_freq.out")))


NO_NUMBERS = [
    ("gaussian16_dvb_freq.out", "E(RB3LYP) =  -382.308266602 ", "E(RB3LYP) = NaN ", "energy"),
    ("qchem51_water_freq.out", "Frequency:      1860.10", "Frequency:          NaN", "mode"),
    ("qchem51_water_freq.out", "H       0.7906491549 ", "H                NaN ", "atom"),
    ("nwchem702_hdo_3temps.out", "-8.8864714D-01  2.0141018D+00", "-8.8864714D-01            NaN", "atom"),
    ("orca50_dvb_freq.out", "SINGLE POINT ENERGY      -382.055108614160", "SINGLE POINT ENERGY    nan", "energy"),
    ("orca50_dvb_freq.out", "   9:       180.08 cm**-1", "   9:          nan cm**-1", "mode"),
    ("psi4_132_oh_radical_freq.out", "3997.0205       \n  Irrep", "NaN             \n  Irrep", "mode"),
    (
        "nwchem702_water_ccsdt_energy.out",
        "Total CCSD(T) energy:                 -76.241041229610758",
        "Total CCSD(T) energy: ****",
        "energy",
    ),
]


@pytest.mark.parametrize(("name", "old", "new", "where"), NO_NUMBERS)
def test_values_that_are_no_numbers(tmp_path: Path, name: str, old: str, new: str, where: str) -> None:
    text = text_of(name)
    assert old in text
    m = read_text(tmp_path, text.replace(old, new))
    found = [f for f in refusals(m.findings) if f.code == "not-a-number"]
    assert found, m.findings
    assert where in f"{found[0].where} {found[0].found}"


@pytest.mark.parametrize(
    ("name", "pattern"),
    [
        ("gaussian16_dvb_freq.out", r"( Frequencies --- +)(\d)"),
        ("gaussian16_dvb_freq.out", r"( Frequencies --  +)(\d)"),
        ("orca50_dvb_freq.out", r"(   6:      )  (45)"),
        ("orca60_dvb_freq.out", r"(\n +6: +)(\d\d\.\d\d cm)"),
        ("qchem51_water_freq.out", r"(Frequency:     ) (1860)"),
        ("psi4_132_h2o_opt_freq.out", r"(Freq \[cm\^-1\] +\d+\.\d+)( )"),
        ("nwchem702_hdo_3temps.out", r"(P.Frequency +)(1600)"),
    ],
)
def test_a_wavenumber_made_imaginary(tmp_path: Path, name: str, pattern: str) -> None:
    """Wherever an output prints its wavenumbers first or second: one of them turned imaginary is not overlooked."""
    text = text_of(name)
    sign = r"\1i" if name.startswith("psi4") else r"\1-\2"
    changed = re.sub(pattern, sign, text, count=1)
    assert changed != text
    m = read_text(tmp_path, changed)
    assert "imaginary-modes" in codes(m, "refuse")
    assert m.n_imaginary == 1


def mangled(text: str, random_: random.Random) -> str:
    lines = text.split("\n")
    i, n = random_.randrange(len(lines)), random_.randrange(1, 80)
    choice = random_.randrange(6)
    if choice == 0:
        return "\n".join(lines[:i] + lines[i + n :])
    if choice == 1:
        return "\n".join(lines[: i + n] + lines[i:])
    if choice == 2:
        block = [re.sub(r"-?\d+\.\d+", "NaN", line) for line in lines[i : i + n]]
        return "\n".join(lines[:i] + block + lines[i + n :])
    if choice == 3:
        block = [re.sub(r"\d", "*", line) for line in lines[i : i + n]]
        return "\n".join(lines[:i] + block + lines[i + n :])
    if choice == 4:
        junk = "".join(chr(random_.randrange(1, 0x3000)) for _ in range(300))
        return "\n".join([*lines[:i], junk, *lines[i:]])
    return "\n".join(line[: random_.randrange(1, 90)] if i <= k < i + n else line for k, line in enumerate(lines))


def finite(m: Molecule) -> bool:
    printed = [
        v
        for item in m.printed
        for v in (item.zpe_hartree, item.enthalpy_correction_hartree, item.entropy_J_mol_K, item.temperature_K)
        if v is not None
    ]
    arrays = [m.coordinates_A, m.masses_u, m.wavenumbers_cm1, list(m.energies_hartree.values()), printed]
    return all(np.isfinite(values).all() for values in arrays)


def mangle_and_look(folder: Path, name: str, seed: int, n: int) -> None:
    random_ = random.Random(f"{name} {seed}")
    text = text_of(name)
    for _ in range(n):
        m, refused = tried(folder, mangled(text, random_))
        assert refused if m is None else refusals(m.findings) or finite(m)


@pytest.mark.parametrize("name", NAMES)
def test_mangled_outputs(tmp_path: Path, name: str) -> None:
    mangle_and_look(tmp_path, name, 1, 8)


@pytest.mark.long
@pytest.mark.parametrize("name", NAMES + LONG)
def test_many_mangled_outputs(tmp_path: Path, name: str) -> None:
    mangle_and_look(tmp_path, name, 2, 300)
