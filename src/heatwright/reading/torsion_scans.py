"""Torsional potentials as users have them: a barrier, a CSV of angle and energy, one output or a folder of outputs."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import CALORIE_J, CM1_KJ_MOL, EV_KJ_MOL, HARTREE_CM1, HARTREE_KJ_MOL
from heatwright.errors import UsageError
from heatwright.findings import Finding, Refused, refusals, refuse
from heatwright.reading.files import read_text
from heatwright.reading.outputs import read_output

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule

Atoms4 = tuple[int, int, int, int]

_CM1: Final = {
    "cm-1": 1.0,
    "1/cm": 1.0,
    "kj/mol": 1.0 / CM1_KJ_MOL,
    "j/mol": 0.001 / CM1_KJ_MOL,
    "kcal/mol": CALORIE_J / CM1_KJ_MOL,
    "cal/mol": 0.001 * CALORIE_J / CM1_KJ_MOL,
    "ev": EV_KJ_MOL / CM1_KJ_MOL,
    "hartree": HARTREE_KJ_MOL / CM1_KJ_MOL,
}
"""Units of energy, in 1/cm."""
_ATOMS: Final = r"\d+-\d+-\d+-\d+"
_BARRIER: Final = re.compile(rf"({_ATOMS})\s+n\s*=\s*(\d+)\s+V\s*=\s*(\S+)\s+(\S+)")
_NAMED: Final = re.compile(rf"({_ATOMS})\s+(.+)", re.DOTALL)
_EXPECTED: Final = 'a folder, a file or such as "3-1-2-4 n=3 V=373 cm-1"'


@dataclass(frozen=True, slots=True)
class TorsionBarrier:
    """V/2 (1 − cos n(φ − φ₀)) with its minimum at the geometry of the frequencies.

    atoms : of the dihedral angle, from 0.   fold : n.   barrier_cm1 : V, 1/cm.
    """

    atoms: Atoms4
    fold: int
    barrier_cm1: float

    @property
    def source(self) -> str:
        """Where the potential is from."""
        return "given"


@dataclass(frozen=True, eq=False, slots=True)
class TorsionScan:
    """The points of a scan.

    source : path as given.   atoms : of the dihedral angle, from 0, where they are stated.
    energies_cm1 : (points,) above the lowest, 1/cm.   angles_deg : (points,) where they are stated.
    molecules : the geometries, one for each point, where they are there.
    """

    source: str
    atoms: Atoms4 | None
    energies_cm1: FloatArray
    angles_deg: FloatArray | None = None
    molecules: tuple[Molecule, ...] = ()


Torsion = TorsionBarrier | TorsionScan


def read_torsion(text: str) -> Torsion:
    """What ``--torsion`` names: a barrier in words, or the scan in a folder, a CSV file or an output.

    A path may stand behind the atoms, ``"3-1-2-4 FILE"``, which then say what was turned (atoms counted from 1).
    Raises UsageError for words that mean nothing and Refused for files that hold no scan.

    >>> read_torsion("3-1-2-4 n=3 V=1 kcal/mol").barrier_cm1.__round__(2)
    349.76
    """
    barrier = _BARRIER.fullmatch(text.strip())
    if barrier is not None:
        return _barrier(text, barrier)
    named = _NAMED.fullmatch(text.strip())
    atoms, path = (_atoms(named[1], text), Path(named[2])) if named else (None, Path(text))
    if re.search(r"\bn\s*=|\bV\s*=", text) and not path.exists():
        raise UsageError(f"--torsion {text!r}: expected {_EXPECTED}")
    if path.is_dir():
        return _folder(path, atoms)
    if not path.exists():
        action = f"Give {_EXPECTED}."
        raise Refused([refuse("file-missing", "there is no such file or folder", where=str(path), action=action)])
    return _csv(path, atoms) if path.suffix.lower() == ".csv" else _single(path, atoms)


def _atoms(words: str, text: str) -> Atoms4:
    i, j, k, l = (int(word) - 1 for word in words.split("-"))  # noqa: E741
    if min(i, j, k, l) < 0:
        raise UsageError(f"--torsion {text!r}: atoms are counted from 1")
    return i, j, k, l


def _barrier(text: str, match: re.Match[str]) -> TorsionBarrier:
    unit = _CM1.get(match[4].lower())
    try:
        height = float(match[3])
    except ValueError:
        height = float("nan")
    if unit is None or not (np.isfinite(height) and height >= 0.0) or not 1 <= int(match[2]) <= 12:
        words = "a fold from 1 to 12 and a height that is not negative, in one of the units"
        raise UsageError(f"--torsion {text!r}: expected {words} {', '.join(_CM1)}")
    return TorsionBarrier(_atoms(match[1], text), int(match[2]), height * unit)


def _unreadable(where: str, found: str, expected: str = "", action: str = "") -> Refused:
    return Refused([refuse("scan-unreadable", found, where=where, expected=expected, action=action)])


def _folder(path: Path, atoms: Atoms4 | None) -> TorsionScan:
    """One output for each angle; files that are no outputs are passed over."""
    molecules = []
    for file in sorted(p for p in path.iterdir() if p.is_file() and not p.name.startswith(".")):
        try:
            molecule = read_output(str(file), accept=("constraints", "gradient"))
        except Refused as error:
            if any(f.code == "not-an-output" for f in error.findings):
                continue
            raise Refused([f.at(str(file)) for f in error.findings]) from None
        wrong = refusals(molecule.findings)
        if wrong:
            raise Refused([f.at(str(file)) for f in wrong])
        molecules.append(molecule)
    if not molecules:
        raise _unreadable(str(path), "the folder holds no outputs", "one output for each angle of a torsion")
    if len(molecules) == 1 and molecules[0].kind == "relaxed scan":
        return _single(Path(molecules[0].source.file), atoms)
    return _of_molecules(str(path), atoms, tuple(molecules))


def _of_molecules(source: str, atoms: Atoms4 | None, molecules: tuple[Molecule, ...]) -> TorsionScan:
    energies = [m.energy_hartree for m in molecules]
    for molecule, energy in zip(molecules, energies, strict=True):
        if energy is None or molecule.energy_kind != molecules[0].energy_kind:
            kind = molecules[0].energy_kind or "total"
            raise _unreadable(molecule.source.file, "the point has no energy of the kind of the others", kind)
    E = np.array([e for e in energies if e is not None]) * HARTREE_CM1
    return TorsionScan(source, atoms, E - E.min(), None, molecules)


def _csv(path: Path, atoms: Atoms4 | None) -> TorsionScan:
    """Two columns, ``angle_deg`` and ``energy_UNIT``; a comment ``# atoms 3-1-2-4`` says what was turned."""
    lines = [(n, line.strip()) for n, line in enumerate(read_text(path).text.splitlines(), start=1)]
    for _, line in lines:
        named = re.fullmatch(rf"#\s*atoms:?\s+({_ATOMS})", line)
        if named and atoms is None:
            atoms = _atoms(named[1], str(path))
    rows = [(n, [w.strip() for w in line.split(",")]) for n, line in lines if line and not line.startswith("#")]
    unit = _unit(path, rows[0] if rows else (1, []))
    points = []
    for n, words in rows[1:]:
        try:
            angle, energy = (float(word) for word in words)
        except ValueError:
            angle = energy = float("nan")
        if not np.isfinite([angle, energy]).all():
            raise _unreadable(f"{path}:{n}", f"{','.join(words)!r} is no angle and energy", "two numbers")
        points.append((angle, energy * unit))
    if atoms is None:
        action = "Write a line such as `# atoms 3-1-2-4` into it (atoms counted from 1)."
        raise _unreadable(str(path), "the file does not say which dihedral angle was turned", action=action)
    if not points:
        raise _unreadable(str(path), "the file holds no points")
    angles, energies = np.array(points).T
    return TorsionScan(str(path), atoms, energies - energies.min(), angles)


def _unit(path: Path, head: tuple[int, list[str]]) -> float:
    words = head[1]
    named = re.fullmatch(r"energy[_ ]?\(?([^)]+)\)?", words[1].lower()) if len(words) == 2 else None
    if named is None or words[0].lower() != "angle_deg" or named[1] not in _CM1:
        expected = f"angle_deg,energy_UNIT with UNIT one of {', '.join(_CM1)}"
        raise _unreadable(f"{path}:{head[0]}", f"the heading is {','.join(words)!r}", expected)
    return _CM1[named[1]]


def _single(path: Path, atoms: Atoms4 | None) -> TorsionScan:
    """The relaxed points of a scan that is one output."""
    from heatwright.reading.scan_points import relaxed_points

    try:
        molecule = read_output(str(path), accept=("constraints", "gradient"))
    except Refused:
        if re.match(r"\s*\d+\s*\n\s*energy:.*\bxtb:", read_text(path).text[:1000]):
            words = "the file holds the points of an xTB scan, but not their charge and level of theory"
            raise _unreadable(
                str(path), words, action="Give the output of the run, which must lie beside it."
            ) from None
        raise
    wrong: tuple[Finding, ...] = refusals(molecule.findings)
    if wrong:
        raise Refused([f.at(str(path)) for f in wrong])
    if molecule.kind != "relaxed scan":
        words = f"the output is no relaxed scan ({molecule.kind})"
        raise _unreadable(str(path), words, "a relaxed scan", "Give a folder with one output for each angle.")
    return _of_molecules(str(path), atoms, relaxed_points(str(path), molecule))
