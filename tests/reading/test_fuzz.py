"""Fuzzed outputs: no traceback, no hang, and no wrong number without a word where the output prints a check.

Real outputs are cut, and their lines deleted, doubled, exchanged or given other digits, by seeds that are fixed.  The
answer is a refusal, a finding, or a molecule whose formula, number of modes and zero-point energy are the original's.
All the programs here print something to check the modes against; the README names those that do not.
"""

from __future__ import annotations

import random
import re
import time
from pathlib import Path

import pytest

from heatwright.constants import HARTREE_CM1
from heatwright.elements import composition
from heatwright.findings import Refused
from heatwright.molecule import Molecule
from heatwright.reading.outputs import read_output
from kept_outputs import kept, read_text, text_of

NAMES = [
    "gaussian16_dvb_freq.out", "orca50_dvb_freq.out", "orca60_dvb_freq.out", "qchem51_water_freq.out",
    "jaguar83_dvb_freq.out", "nwchem702_hdo_3temps.out", "nwchem702_methyl_cation.out",
    "nwchem702_water_d3bj_numerical.out", "psi4_132_h2o_opt_freq.out", "psi4_132_oh_radical_freq.out",
    "xtb651_methanol_ohess.out", "mopac2206_methanol_force_thermo.out", "nwchem702_water_ccsdt_energy.out",
    "psi4_132_water_ccsdt_energy.out", "gaussian16_water_ccsdt_energy.log", "nwchem702_o_atom_rohf.out",
    "nwchem702_water_mp2_opt_freq.out", "nwchem702_hbr_ecp.out", "qchem51_c_atom.out", "psi4_132_o_atom_b3lyp.out",
]  # fmt: skip
TELLING = re.compile(r"req|cm\*\*-1|cm-1|ero.point|ZPE|Charge|charge|Atom|VIBRATION", re.IGNORECASE)
"""Lines that half of the changes are made to: those about modes and atoms."""
TOLERANCE = 1.1e-3
"""Relative difference of zero-point energies that the printed check of the coarsest program (NWChem) lets pass."""


def fuzzed(text: str, random_: random.Random) -> str:
    """One to three changes of a text."""
    lines = text.split("\n")
    for _ in range(random_.randrange(1, 4)):
        telling = [i for i, line in enumerate(lines) if TELLING.search(line)] or [0]
        i = random_.choice(telling) if random_.random() < 0.5 else random_.randrange(len(lines))
        n = random_.choice([1, 1, 1, 2, 5, 30])
        choice = random_.randrange(7)
        if choice == 0:
            lines = lines[: max(i, 1)]
        elif choice == 1:
            lines = lines[:i] + lines[i + n :]
        elif choice == 2:
            lines = lines[: i + n] + lines[i:]
        elif choice == 3:
            j = random_.randrange(len(lines))
            lines[i], lines[j] = lines[j], lines[i]
        elif choice == 4:
            lines[i] = lines[i][: random_.randrange(len(lines[i]) + 1)]
        elif choice == 5:
            lines[i] = "".join(random_.choice("0123456789") if c.isdigit() else c for c in lines[i])
        else:
            lines[i] = "".join(chr(random_.randrange(32, 127)) if random_.random() < 0.1 else c for c in lines[i])
        lines = lines or [""]
    return "\n".join(lines)


def zpe_hartree(m: Molecule) -> float:
    modes = m.wavenumbers_cm1
    return float(modes[modes > 0.0].sum()) / 2.0 / HARTREE_CM1


def complaint(m: Molecule, full: Molecule) -> str:
    """What a molecule without a finding has wrong, or nothing."""
    if [f.code for f in m.findings] != [f.code for f in full.findings]:
        return ""
    if composition(m.atomic_numbers) != composition(full.atomic_numbers):
        return "formula"
    if m.wavenumbers_cm1.size != full.wavenumbers_cm1.size:
        return "number of modes"
    off = abs(zpe_hartree(m) - zpe_hartree(full))
    if off > TOLERANCE * zpe_hartree(full) + 2e-6:
        return f"zero-point energy, off by {off:.1e} hartree"
    return ""


def fuzz(folder: Path, name: str, seeds: range) -> None:
    text, full = text_of(name), read_output(kept(name))
    for seed in seeds:
        made = fuzzed(text, random.Random(f"{name} {seed}"))
        start = time.perf_counter()
        try:
            m = read_text(folder, made)
        except Refused:
            m = None
        assert time.perf_counter() - start < 10.0, seed
        assert m is None or not complaint(m, full), (seed, complaint(m, full))


@pytest.mark.parametrize("name", NAMES)
def test_fuzzed_outputs(tmp_path: Path, name: str) -> None:
    fuzz(tmp_path, name, range(10))


@pytest.mark.long
@pytest.mark.parametrize("name", NAMES)
def test_many_fuzzed_outputs(tmp_path: Path, name: str) -> None:
    fuzz(tmp_path, name, range(100))
