"""The relaxed points of a scan in one output: geometry and energy where each constrained optimisation ended."""

from __future__ import annotations

from typing import Final

import numpy as np

from heatwright.constants import CCLIB_EV_PER_HARTREE
from heatwright.findings import Refused, refuse
from heatwright.molecule import FloatArray, Molecule
from heatwright.reading.detection import detect
from heatwright.reading.dialects import dialect_of
from heatwright.reading.files import read_text
from heatwright.reading.jobs import choose
from heatwright.reading.parsing import parse
from heatwright.reading.text import Text

PRINTED_EV: Final = 2.0e-4
"""Energies in a summary of the points are printed with fewer digits than those of the steps; this is 2 1/cm."""


def relaxed_points(path: str, molecule: Molecule) -> tuple[Molecule, ...]:
    """One copy of *molecule* (read from the same *path*) for each point, with the point's geometry and energy.

    Raises Refused (``scan-unreadable``) when cclib finds no energies of the points or no geometries with them.
    """
    program = detect(read_text(path).text).program
    if program is None or not program.parser:
        raise _without_points(path, molecule)
    dialect = dialect_of(program.name)
    choice = choose(dialect, Text.of(dialect.repaired(read_text(path).text)), molecule.job)
    parsed = parse(program.parser, choice.pieces, skip=False)  # what says that a point is done may be skipped else
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
    if len(steps) < len(points) or geometries.shape[1:] != molecule.coordinates_A.shape:
        raise _without_points(path, molecule)
    return tuple(
        molecule.but(
            coordinates_A=geometries[i],
            energies_hartree={molecule.energy_kind: float(scf[i]) / CCLIB_EV_PER_HARTREE},
        )
        for i in steps
    )


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


def _without_points(path: str, molecule: Molecule) -> Refused:
    found = f"the points of the scan could not be found in the {molecule.source.program_version} output"
    action = "Give a folder with one output for each angle, or a CSV file of angle and energy."
    return Refused([refuse("scan-unreadable", found, where=path, action=action)])
