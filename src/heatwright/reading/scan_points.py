"""The relaxed points of a scan in one output: geometry and energy where each constrained optimisation ended.

cclib gives them for Gaussian and Jaguar.  ORCA's final energy holds corrections that cclib's SCF energy lacks, so its
steps are read here; xTB writes its points into ``xtbscan.log``, which has to lie beside the output.
"""

from __future__ import annotations

from itertools import pairwise
from pathlib import Path
from typing import Final

import numpy as np

from heatwright.constants import CCLIB_EV_PER_HARTREE
from heatwright.elements import symbol
from heatwright.findings import Refused, refuse
from heatwright.molecule import FloatArray, Molecule
from heatwright.reading.detection import detect
from heatwright.reading.dialects import dialect_of
from heatwright.reading.files import read_text
from heatwright.reading.jobs import choose
from heatwright.reading.parsing import Parsed, parse
from heatwright.reading.text import Text, numbers

PRINTED_EV: Final = 2.0e-4
"""Energies in a summary of the points are printed with fewer digits than those of the steps; this is 2 1/cm."""


Point = tuple[FloatArray, float]
"""Geometry (n, 3) in Å and energy in hartree."""


def relaxed_points(path: str, molecule: Molecule) -> tuple[Molecule, ...]:
    """One copy of *molecule* (read from the same *path*) for each point, with the point's geometry and energy.

    Raises Refused (``scan-unreadable``) when the points or their energies and geometries cannot be found.
    """
    program = detect(read_text(path).text).program
    if program is None or not program.parser:
        raise _without_points(path, molecule)
    dialect = dialect_of(program.name)
    choice = choose(dialect, Text.of(dialect.repaired(read_text(path).text)), molecule.job)
    if program.name == "ORCA":
        points = orca_points(path, choice.job)
    elif program.name == "xTB":
        points = xtb_points(path, choice.job, [symbol(int(z)) for z in molecule.atomic_numbers])
    else:
        # what says that a point is done may be skipped else
        points = _cclib_points(path, molecule, parse(program.parser, choice.pieces, skip=False))
    if not points or any(x.shape != molecule.coordinates_A.shape for x, _ in points):
        raise _without_points(path, molecule)
    return tuple(molecule.but(coordinates_A=x, energies_hartree={molecule.energy_kind: E}) for x, E in points)


def _cclib_points(path: str, molecule: Molecule, parsed: Parsed) -> list[Point]:
    points, scf = parsed.array("scanenergies"), parsed.array("scfenergies")
    geometries = parsed.array("atomcoords")
    if (
        molecule.energy_kind != "SCF"
        or points is None
        or scf is None
        or geometries is None
        or len(scf) != len(geometries)
    ):
        raise _without_points(path, molecule)
    steps = _steps(points, scf)
    if len(steps) < len(points):
        raise _without_points(path, molecule)
    return [(geometries[i], float(scf[i]) / CCLIB_EV_PER_HARTREE) for i in steps]


def orca_points(path: str, job: Text) -> list[Point]:
    """The end of each step of ORCA's relaxed surface scan: its last final energy and the geometry before that.

    Raises Refused for a step that did not converge, a step that is missing, and a scan of several coordinates.
    """
    starts = [spot for spot in job.spots("RELAXED SURFACE SCAN STEP") if "*" in job.line(spot)]
    end = job.rfind("RELAXED SURFACE SCAN RESULTS")
    steps = [job.part(a, b) for a, b in pairwise([*starts, end if starts and end > starts[-1] else job.end])]
    points = [_orca_step(path, number, step) for number, step in enumerate(steps, start=1)]
    announced = job.part(job.find("Relaxed Surface Scan"), starts[0] if starts else job.start)
    due = announced.number_after("There will be")
    if "parameters to be scanned" in announced:
        action = "Scan one dihedral angle at a time."
        raise _unreadable(path, "the scan turns several coordinates", "a scan of one dihedral angle", action)
    if due is not None and due != len(points):
        action = "Let the scan run to its end, or give a folder with one output for each angle."
        raise _unreadable(path, f"the scan has {len(points)} points", f"the {due:.0f} that it announces", action)
    return points


def _orca_step(path: str, number: int, step: Text) -> Point:
    where = f"{path}:{step.line_number(step.start)}"
    energy_spot = step.rfind("FINAL SINGLE POINT ENERGY")
    energy = step.number_after("FINAL SINGLE POINT ENERGY")
    if "THE OPTIMIZATION HAS CONVERGED" not in step or "not fully converged" in step.line(energy_spot).lower():
        action = "Repeat the scan with more optimisation cycles, or from a nearer geometry."
        raise _unreadable(where, f"point {number} of the scan is not converged", "converged points", action)
    table = step.rfind("CARTESIAN COORDINATES (ANGSTROEM)", energy_spot) if energy_spot >= 0 else -1
    rows: list[list[float]] = []
    for line in step.lines(table) if table >= 0 else ():
        fields = line.split()
        if len(fields) == 4 and len(numbers(line)) == 3:
            rows.append(numbers(line))
        elif rows:
            break
    if energy is None or not rows or not np.isfinite([energy, *np.ravel(rows)]).all():
        raise _unreadable(where, f"point {number} of the scan has no energy with a geometry", "both")
    return np.array(rows), energy


def xtb_points(path: str, job: Text, symbols: list[str]) -> list[Point]:
    """The frames of ``xtbscan.log`` beside an xTB output, whose energies the output prints as well.

    Raises Refused when there is no such file, or one of another run.
    """
    beside = Path(path).parent / "xtbscan.log"
    if not beside.exists():
        action = "Put xtbscan.log of the same run beside it, or give a CSV file of angle and energy."
        raise _unreadable(
            path, "xTB writes the points of a scan into xtbscan.log, and there is none beside", "", action
        )
    lines = read_text(beside).text.splitlines()
    points: list[Point] = []
    while len(lines) >= (size := len(symbols) + 2):
        frame = [line.split() for line in lines[:size]]
        energy = numbers(lines[1].split("energy:")[-1].split("xtb:")[0])
        rows = [numbers(" ".join(fields[1:])) for fields in frame[2:]]
        same = frame[0] == [str(len(symbols))] and [fields[0].capitalize() for fields in frame[2:] if fields] == symbols
        if not same or len(energy) != 1 or any(len(row) != 3 for row in rows):
            words = f"frame {len(points) + 1} does not hold an energy and the atoms of the output"
            raise _unreadable(str(beside), words, action="Give the file of the same run.")
        points.append((np.array(rows), energy[0]))
        lines = lines[size:]
    said = [value for spot in job.spots("unbiased energy:") if (value := numbers(job.rest(spot, "unbiased energy:")))]
    if len(said) != len(points) or any(abs(value[0] - E) > 1.0e-6 for value, (_, E) in zip(said, points, strict=False)):
        words = f"the energies of its {len(points)} frames are not the {len(said)} of the scan in {path}"
        raise _unreadable(str(beside), words, action="Give the file of the same run.")
    return points


def _steps(points: FloatArray, scf: FloatArray) -> list[int]:
    """The optimisation step in which each point of the scan ended, by its energy (eV), in the order of the scan."""
    steps: list[int] = []
    for energy in points:
        off = np.abs(scf - energy)
        off[: steps[-1] + 1 if steps else 0] = np.inf
        same = np.flatnonzero(off < PRINTED_EV)
        if not same.size:
            break
        i = int(same[0])
        while i + 1 < len(off) and off[i + 1] < off[i]:  # the steps before the last differ by little
            i += 1
        steps.append(i)
    return steps


def _unreadable(where: str, found: str, expected: str = "", action: str = "") -> Refused:
    return Refused([refuse("scan-unreadable", found, where=where, expected=expected, action=action)])


def _without_points(path: str, molecule: Molecule) -> Refused:
    found = f"the points of the scan could not be found in the {molecule.source.program_version} output"
    action = "Give a folder with one output for each angle, or a CSV file of angle and energy."
    return _unreadable(path, found, action=action)
