"""NWChem 6 and 7: one banner, many tasks; 3N wavenumbers; masses and the Hessian's geometry under one heading."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, ClassVar, Final

import numpy as np

from heatwright.constants import CALORIE_J
from heatwright.findings import Finding, refuse
from heatwright.molecule import FloatArray, PrintedThermo
from heatwright.reading.dialects.base import (
    Dialect,
    Energy,
    Facts,
    Failure,
    Identity,
    as_integer,
    chosen_point,
    cut,
    reconciled,
)
from heatwright.reading.dialects.nwchem_level import level_of, missed_correlation
from heatwright.reading.hessians import nwchem_hessian
from heatwright.reading.text import Text, number, numbers

if TYPE_CHECKING:
    from heatwright.reading.parsing import Parsed

_TASK = "NWChem Input Module"
_ATOM_INFORMATION: Final = "---- Atom information ----"
_TABLE: Final = "  No.       Tag          Charge"
_BOHR_PER_ANGSTROM: Final = 1.889725989
"""The scale NWChem itself prints over its coordinates; used to turn its bohr back into the ångströms it was given."""
_ENERGIES: Final = (
    ("Total SCF energy =", "SCF"),
    ("Total DFT energy =", "SCF"),
    ("Total MP2 energy ", "MP2"),
    ("Total MP2 energy:", "MP2"),
    ("Total SCS-MP2 energy ", "SCS-MP2"),
    ("Total CCSD energy:", "CCSD"),
    ("Total CCSD(T) energy:", "CCSD(T)"),
    ("CCSD total energy / hartree", "CCSD"),
    ("CCSD(T) total energy / hartree", "CCSD(T)"),
    ("CCSDT total energy / hartree", "CCSDT"),
    ("MBPT(2) total energy / hartree", "MP2"),
    ("QCISD total energy / hartree", "QCISD"),
    ("CISD total energy / hartree", "CISD"),
)
_TITLE_LINES: Final = 12
"""Lines after the title of a table within which its rows start; a title may be repeated without any."""
_MODULES: Final = re.compile(r"^ +NWChem (?:\S+ )*(?:Module|Optimization|Analysis|Calculation)\s*$", re.MULTILINE)


class NWChem(Dialect):
    """The dialect of NWChem."""

    name = "NWChem"
    endings: ClassVar = ("Total times  cpu:",)
    failures: ClassVar = (
        Failure("Failed to converge in maximum number of steps", "the geometry optimisation did not converge"),
        Failure("This type of error is most commonly associated with", "NWChem stopped with an error"),
        Failure("There is an error in the input file", "NWChem found an error in its input"),
        Failure("Calculation failed to converge", "the SCF did not converge"),
        Failure("Received an Error in Communication", "NWChem stopped with an error"),
        Failure("Segmentation Violation error", "NWChem crashed"),
    )
    mode_anchors: ClassVar = ("NORMAL MODE EIGENVECTORS IN CARTESIAN COORDINATES",)
    cumulative = True

    def jobs(self, whole: Text) -> list[Text]:
        """One job a task; input without a task, and the module that closes the run, belong to their neighbours."""
        starts = whole.spots(_TASK)
        edges: list[int] = []
        for start, end in zip(starts, [*starts, whole.end][1:], strict=True):
            part = whole.part(start + len(_TASK), end)
            if _MODULES.search(part.whole, part.start, part.end):
                edges.append(start)
        return cut(whole, edges[1:])

    def prologue(self, first: Text, same_molecule: bool) -> Text:
        start = first.find(_TASK)
        module = _MODULES.search(first.whole, start + len(_TASK), first.end) if start >= 0 else None
        if same_molecule and module:
            return first.part(first.start, module.start())
        return first.part(first.start, start if start >= 0 else first.end)

    def identity(self, job: Text) -> Identity:
        return Identity(
            atoms=_atoms(job),
            charge=_charge(job),
            multiplicity=_multiplicity(job),
            has_modes=any(anchor in job for anchor in self.mode_anchors),
            optimises="NWChem Geometry Optimization" in job,
        )

    def identities(self, jobs: Sequence[Text]) -> list[Identity]:
        """A task that prints no atoms works on those of the task before."""
        found: list[Identity] = []
        for job in jobs:
            own = self.identity(job)
            found.append(own if _TABLE in job or not found else replace(own, atoms=found[-1].atoms))
        return found

    def terminated(self, job: Text) -> bool:
        """The closing line stands once, after the last task; a task followed by another one has ended well too."""
        return super().terminated(job) or (job.end < len(job.whole) and "Task  times  cpu:" in job)

    def read(self, job: Text, parsed: Parsed) -> Facts:
        energies = [Energy(spot, kind, value) for anchor, kind in _ENERGIES for spot, value in _values(job, anchor)]
        finite = "NWChem Finite-difference Hessian" in job
        has_modes = any(anchor in job for anchor in self.mode_anchors)
        heading = job.rfind("NWChem Nuclear Hessian and Frequency Analysis")
        own = [e for e in energies if e.spot > heading] if has_modes else energies
        point, kind = chosen_point(own or energies, first=finite)
        if kind == "SCS-MP2":  # printed beside every MP2 energy, never the task's own method
            kind = "MP2"
        atoms, coordinates, masses = _atom_information(job)
        wavenumbers, disagree = _wavenumbers(job, parsed)
        return Facts(
            version=_version(job),
            charge=_charge(job),
            multiplicity=_multiplicity(job),
            energies=point,
            energy_kind=kind,
            level=level_of(job, kind),
            coordinates_A=coordinates,
            masses_u=masses if masses is not None else _masses_by_tag(Text(job.whole, 0, job.end), atoms),
            hessian=lambda: (nwchem_hessian(job, masses), None),
            printed=_printed(job),
            wavenumbers_cm1=wavenumbers,
            normal_modes=None if wavenumbers is None else parsed.array("vibdisps"),
            findings=(*_unread_masses(job, masses), *disagree, *missed_correlation(job, kind)),
            max_gradient_hartree_bohr=_max_gradient(Text(job.whole, 0, job.end), coordinates) if has_modes else None,
        )


def _values(job: Text, anchor: str) -> list[tuple[int, float]]:
    found = ((spot, numbers(job.rest(spot, anchor))) for spot in job.spots(anchor))
    return [(spot, values[0]) for spot, values in found if values]


def _version(job: Text) -> str:
    match = re.search(r"\(NWChem\) (\S+)", job.whole[:65536])
    return match.group(1) if match else ""


def _charge(job: Text) -> int | None:
    dft, scf = job.rfind("          Charge           :"), job.rfind("  charge          =")
    if dft < 0 and scf < 0:
        return None
    found = numbers(job.line(max(dft, scf)))
    return as_integer(found[0]) if found else None


def _multiplicity(job: Text) -> int | None:
    dft, scf = job.rfind("          Spin multiplicity:"), job.rfind("  wavefunction    = ")
    if dft < 0 and scf < 0:
        return None
    if dft > scf:
        return as_integer(job.number_after("          Spin multiplicity:"))
    block = job.part(max(job.rfind("NWChem SCF Module", scf), job.start), scf)
    alpha, beta = block.number_after("  alpha electrons ="), block.number_after("  beta  electrons =")
    if alpha is not None and beta is not None:
        return as_integer(alpha - beta + 1.0)
    unpaired = block.number_after("  open shells     =")
    return as_integer(unpaired + 1.0) if unpaired is not None else None


def _atoms(whole: Text) -> tuple[int, ...]:
    """Nuclear charges of the last table of atoms; ghost atoms have none."""
    spot = whole.rfind(_TABLE)
    found: list[int] = []
    if spot < 0:
        return ()
    lines = whole.lines(spot)
    next(lines)
    for line in lines:
        fields = line.split()
        if len(fields) != 6 or not fields[0].isdigit():
            if found:
                return tuple(found)
            if fields and not line.startswith(" ----"):
                break
            continue
        charge = number(fields[2])
        found.append(round(charge) if charge is not None and np.isfinite(charge) else 0)
    return ()  # a table that the end of the file cuts off


def _atom_information(job: Text) -> tuple[tuple[int, ...], FloatArray | None, FloatArray | None]:
    """Atoms, coordinates (Å) and masses (u) of the Hessian's geometry."""
    spot = job.rfind(_ATOM_INFORMATION)
    atoms = _atoms(Text(job.whole, 0, job.end))
    if spot < 0:
        return atoms, None, None
    rows: list[list[float]] = []
    for line in job.lines(spot):
        values = [number(token) for token in line.split()[-4:]] if len(line.split()) >= 6 else []
        if len(values) == 4 and all(v is not None for v in values):
            rows.append([v for v in values if v is not None])
        elif rows:
            break
    if len(rows) != len(atoms):
        return atoms, None, None
    table = np.array(rows, dtype=float)
    return atoms, table[:, :3] / _BOHR_PER_ANGSTROM, table[:, 3].copy()


def _wavenumbers(job: Text, parsed: Parsed) -> tuple[FloatArray | None, tuple[Finding, ...]]:
    """All 3N projected wavenumbers as they stand over the modes, with the third decimal of the table of intensities."""
    start = job.rfind("(Projected Frequencies expressed in cm-1)")
    if start < 0:
        return None, ()
    block = job.part(start)
    printed = np.array([v for spot in block.spots(" P.Frequency ") for v in numbers(block.rest(spot, " P.Frequency "))])
    fine = parsed.array("vibfreqs")
    if fine is None or fine.shape != printed.shape:
        return None, ()
    return reconciled(printed, fine, job.where(start))


def _unread_masses(job: Text, masses: FloatArray | None) -> tuple[Finding, ...]:
    """The masses of the Hessian may differ from those of the elements, so they are not replaced when unreadable."""
    spot = job.rfind(_ATOM_INFORMATION)
    if spot < 0 or masses is not None or job.end - spot < 200:
        return ()
    words = "the table of atoms and masses of the Hessian cannot be read"
    return (refuse("atoms-disagree", words, where=job.where(spot), action="The output is damaged; fetch it again."),)


def _masses_by_tag(whole: Text, atoms: tuple[int, ...]) -> FloatArray | None:
    """Masses of the table of tags under the geometry, for jobs without a Hessian."""
    table, spot = whole.rfind(_TABLE), whole.rfind("Atomic Mass")
    if table < 0 or spot < table:
        return None
    rows = [line.split() for line in whole.part(table, spot).lines(table)]
    tags = [row[1] for row in rows if len(row) == 6 and row[0].isdigit()]
    masses: dict[str, float] = {}
    for line in _block(whole, spot):
        fields = line.split()
        value = number(fields[1]) if len(fields) == 2 else None
        if value is not None:
            masses[fields[0]] = value
    if len(tags) != len(atoms) or not all(tag in masses for tag in tags):
        return None
    return np.array([masses[tag] for tag in tags])


def _block(whole: Text, spot: int) -> list[str]:
    """The lines of the table of masses: from its title to the nuclear repulsion energy."""
    end = whole.find("Effective nuclear repulsion", spot)
    return str(whole.part(spot, end if end >= 0 else whole.end)).splitlines()


def _max_gradient(whole: Text, coordinates: FloatArray | None) -> float | None:
    """Largest gradient component of the last gradient that was computed at the geometry of the frequencies."""
    for spot in reversed(whole.spots("ENERGY GRADIENTS")):
        rows: list[list[float]] = []
        for index, line in enumerate(whole.lines(spot)):
            fields = line.split()
            values = [number(f) for f in fields[2:]] if len(fields) == 8 and fields[0].isdigit() else []
            if len(values) == 6 and all(v is not None for v in values):
                rows.append([v for v in values if v is not None])
            elif rows or index > _TITLE_LINES or len(line) > 200:
                break
        table = np.array(rows, dtype=float)
        if coordinates is None and table.size:
            return float(np.abs(table[:, 3:]).max())
        if coordinates is not None and table.shape[:1] == coordinates.shape[:1]:
            shift = np.abs(table[:, :3] - coordinates * _BOHR_PER_ANGSTROM).max()
            if shift < 2e-5:
                return float(np.abs(table[:, 3:]).max())
    return None


def _printed(job: Text) -> tuple[PrintedThermo, ...]:
    """One block a temperature; no pressure is printed, and the constants are old (0.048 % low)."""
    spots = job.spots(" Temperature                      =")
    blocks = [job.part(a, b) for a, b in zip(spots, [*spots, job.end][1:], strict=True)]
    return tuple(_printed_block(block) for block in blocks)


def _printed_block(block: Text) -> PrintedThermo:
    temperature = re.match(r"\s*([\d.]+)", block.rest_of_first(" Temperature                      ="))
    entropy = block.number_after("Total Entropy                    =", last=False)
    sigma = re.search(r"symmetry #  = *(\d+)", block.whole[block.start : min(block.end, block.start + 1500)])
    return PrintedThermo(
        temperature_K=float(temperature.group(1)) if temperature else None,
        symmetry_number=int(sigma.group(1)) if sigma else None,
        zpe_hartree=_hartree(block.rest_of_first("Zero-Point correction to Energy  =")),
        enthalpy_correction_hartree=_hartree(block.rest_of_first("Thermal correction to Enthalpy   =")),
        entropy_J_mol_K=None if entropy is None else entropy * CALORIE_J,
    )


def _hartree(rest: str) -> float | None:
    match = re.search(r"\(\s*(-?[\d.]+) au\)", rest)
    return float(match.group(1)) if match else None
