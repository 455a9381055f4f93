"""The other programs cclib recognises, as far as they can be read without a wrong number."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import replace
from itertools import islice
from typing import TYPE_CHECKING, ClassVar, Final

import numpy as np

from heatwright.constants import (
    ATMOSPHERE_PA,
    BOHR_ANGSTROM,
    CALORIE_J,
    GAS_CONSTANT_J_MOL_K,
    HARTREE_CM1,
    HARTREE_KJ_MOL,
)
from heatwright.findings import Finding, warn
from heatwright.molecule import FloatArray, IntArray, Kind, Level, PrintedThermo
from heatwright.reading.dialects.base import Dialect, Facts, Failure, as_integer
from heatwright.reading.dialects.checkpoint import FChk
from heatwright.reading.dialects.gamess import GAMESS, GAMESSUK, Firefly
from heatwright.reading.dialects.plain import Plain, last_column, wrapped_numbers
from heatwright.reading.dialects.semiempirical import MOPAC, XTB
from heatwright.reading.hessians import molpro_hessian
from heatwright.reading.levels import normalise_basis, normalise_method
from heatwright.reading.text import Text, number, numbers

if TYPE_CHECKING:
    from heatwright.reading.parsing import Parsed

_KCAL: Final = CALORIE_J / HARTREE_KJ_MOL


class ADF(Plain):
    """ADF: energies against fragments, which are no total energies; internal energy instead of enthalpy."""

    name = "ADF"
    version_pattern = r"\(ADF\) +(\S+)"
    endings: ClassVar = ("NORMAL TERMINATION",)
    mode_anchors: ClassVar = ("Vibrations and Normal Modes", "List of All Frequencies:")

    def terminated(self, job: Text) -> bool:
        """Each part of a run closes with the same line; the one of the whole run stands near its end."""
        return job.rfind(self.endings[0]) > job.end - 20000

    def energies(self, job: Text, parsed: Parsed, has_modes: bool) -> tuple[dict[str, float], str]:
        return {}, ""

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        block = job.part(max(job.rfind("Statistical Thermal Analysis"), job.start))
        temperature = block.number_after("Temperature:", last=False)
        pressure = block.number_after("Pressure:", last=False)
        entropy = numbers(block.rest_of_first("Entropy (cal/mole-K):"))
        energy = numbers(block.rest_of_first("Internal Energy (Kcal/mole):"))
        sigma = re.search(r"sigma += +(\d+)", block.rest_of_first("reported below were computed using"))
        rt = None if temperature is None else GAS_CONSTANT_J_MOL_K / 1000.0 * temperature / HARTREE_KJ_MOL
        item = PrintedThermo(
            temperature_K=temperature,
            pressure_Pa=None if pressure is None else pressure * ATMOSPHERE_PA,
            symmetry_number=int(sigma.group(1)) if sigma else None,
            zpe_hartree=job.number_after("Zero-Point Energy :"),
            enthalpy_correction_hartree=energy[-1] * _KCAL + rt if energy and rt is not None else None,
            entropy_J_mol_K=entropy[-1] * CALORIE_J if entropy else None,
        )
        return (item,) if temperature is not None else ()

    def remarks(self, job: Text) -> Iterable[Finding]:
        words = "ADF prints bond energies against fragments, no total energy"
        yield warn("energy-not-total", words, action="It cannot enter an atomization or a reaction.")


_CFOUR_KINDS: Final = {
    "MBPT(2)": "MP2",
    "MBPT(3)": "MP3",
    "MBPT(4)": "MP4",
    "SDQ-MBPT(4)": "MP4(SDQ)",
    "M4SDQ": "MP4(SDQ)",
}


class CFOUR(Plain):
    """CFOUR: the pressure (1 bar) and the symmetry number of its table are not printed."""

    name = "CFOUR"
    version_pattern = r"Version (\S+)"
    endings: ClassVar = ("The final electronic energy is",)
    failures: ClassVar = (Failure("--executable xjoda finished with status     1", "CFOUR stopped with an error"),)
    mode_anchors: ClassVar = ("Normal Coordinate Analysis", "IVIB           ANALYTIC", "IVIB           FINDIF")

    def energies(self, job: Text, parsed: Parsed, has_modes: bool) -> tuple[dict[str, float], str]:
        """cclib takes whatever stands in an MP2 or CC line; the level asked for and the closing line decide."""
        found, kind = super().energies(job, parsed, has_modes)
        asked = re.match(r" *ICLLVL +(\S+)", job.rest_of_last("       CALCLEVEL"))
        if asked is None:
            return found, kind
        scf = {name: value for name, value in found.items() if name == "SCF"}
        if asked.group(1) in ("SCF", "HF"):
            return scf, "SCF" if scf else ""
        kind = _CFOUR_KINDS.get(asked.group(1), asked.group(1))
        first = has_modes and "IVIB           FINDIF" in job  # displaced geometries follow
        final = job.number_after("The final electronic energy is", last=not first)
        return ({**scf, kind: final}, kind) if final is not None else (scf, "")

    def masses(self, job: Text) -> FloatArray | None:
        return wrapped_numbers(job, "masses used (in AMU) in vibrational analysis:")

    def read(self, job: Text, parsed: Parsed) -> Facts:
        """The printed normal coordinates are mass-weighted; here they become Cartesian displacements."""
        facts = super().read(job, parsed)
        wavenumbers, modes, masses = parsed.array("vibfreqs"), parsed.array("vibdisps"), facts.masses_u
        if wavenumbers is None or modes is None or masses is None or modes.shape != (wavenumbers.size, masses.size, 3):
            return facts
        return replace(facts, wavenumbers_cm1=wavenumbers.ravel(), normal_modes=modes / np.sqrt(masses)[None, :, None])

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        zpe = re.search(r"= +(\S+) cm-1", job.rest_of_last("Zero-point energy:"))
        spot = job.rfind("Finite temperature thermodynamic corrections:")
        rows = [numbers(line) for line in islice(job.lines(spot), 1, 60)] if spot >= 0 else []
        zero = float(zpe.group(1)) / HARTREE_CM1 if zpe else None
        return tuple(
            PrintedThermo(
                temperature_K=row[0],
                zpe_hartree=zero,
                enthalpy_correction_hartree=None if zero is None else row[2] / HARTREE_KJ_MOL + zero,
                entropy_J_mol_K=row[1],
            )
            for row in rows
            if len(row) == 4
        )


class DALTON(Plain):
    """DALTON: frequencies without thermochemistry."""

    name = "DALTON"
    coupled_marks: ClassVar = (("Total energy CCSD(T)", "CCSD(T)"),)
    version_pattern = r"Release DALTON(\S+)"
    endings: ClassVar = ("Total wall time used in DALTON",)
    failures: ClassVar = (Failure("--- SEVERE ERROR, PROGRAM WILL BE ABORTED ---", "DALTON stopped with an error"),)
    mode_anchors: ClassVar = ("Vibrational Frequencies and IR Intensities",)


class Jaguar(Plain):
    """Jaguar: enthalpies without the zero-point energy; version 13 raises low modes before it sums."""

    name = "Jaguar"
    version_pattern = r"Jaguar version (\S+?), release +(\S+)"
    endings: ClassVar = ("\nJob ",)
    failures: ClassVar = (Failure("ERROR: fatal error", "Jaguar stopped with an error"),)
    mode_anchors: ClassVar = ("\n  frequencies ", "harmonic frequencies in")
    _total: ClassVar = re.compile(r"^ +total +(.*)$", re.MULTILINE)

    def version(self, job: Text) -> str:
        return re.sub(r" (\d)", r" r\1", super().version(job))

    def terminated(self, job: Text) -> bool:
        spot = job.rfind("\nJob ")
        return spot >= 0 and " completed on " in job.line(spot + 1)

    def job_kind(self, job: Text) -> Kind | None:
        return "relaxed scan" if "scan coordinate" in job or "of scan" in job or "Scan Results" in job else None

    def level(self, job: Text, kind: str) -> Level | None:
        functional = re.search(r"^ +U?DFT=.*\((\S+)\)", str(job), re.MULTILINE) if "DFT=" in job else None
        method = normalise_method(functional.group(1)) if functional else "HF"
        basis = job.rest_of_first("basis set: ")
        local = "VWN1RPA" if method == "B3LYP" else ""  # reproduces the energies of that definition
        return (
            Level(method=method, basis=normalise_basis(basis), functional=local, program=self.name) if basis else None
        )

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        zpe = re.search(r"([\d.]+) kcal/mol", job.rest_of_last("The zero point energy (ZPE):"))
        zero = float(zpe.group(1)) * _KCAL if zpe else None
        pressure = job.number_after("Thermochemical properties at ")
        sigma = as_integer(job.number_after("rotational symmetry number:"))
        found = []
        for spot in job.spots("\n  T =  "):
            block = job.part(spot, spot + 1500)
            total = self._total.search(str(block))
            totals = numbers(total.group(1)) if total else []
            if len(totals) < 5:
                continue
            found.append(
                PrintedThermo(
                    temperature_K=next(iter(numbers(job.line(spot + 1).replace("K", " "))), None),
                    pressure_Pa=None if pressure is None else pressure * ATMOSPHERE_PA,
                    symmetry_number=sigma,
                    zpe_hartree=zero,
                    enthalpy_correction_hartree=None if zero is None else totals[3] * _KCAL + zero,
                    entropy_J_mol_K=totals[2] * CALORIE_J,
                )
            )
        return tuple(found)


class Molcas(Plain):
    """OpenMolcas and Molcas: imaginary modes left out of its sums; several temperatures."""

    name = "Molcas"
    coupled_marks: ClassVar = ()
    version_pattern = r"version +(\d\S*)"
    endings: ClassVar = ("Happy landing!", "    Timing: Wall=")
    failures: ClassVar = (Failure("Non-zero return code", "Molcas stopped with an error"),)
    mode_anchors: ClassVar = ("Harmonic frequencies in cm-1", "Harmonic frequencies in")
    own = frozenset({"mult"})

    def multiplicity(self, job: Text, parsed: Parsed) -> int | None:
        spin = job.number_after("Total spin, S   ")
        return None if spin is None else as_integer(2.0 * spin + 1.0)

    def masses(self, job: Text) -> FloatArray | None:
        return last_column(job, "Mass-centered Coordinates (Angstrom):", fields=6, skip=3)

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        spots = job.spots("\n Temperature = ")
        zpe = re.search(r"([\d.]+) +(?:au|hartree)", job.rest_of_last("Zero-point vibrational energy"), re.IGNORECASE)
        blocks = [job.part(a, b) for a, b in zip(spots, [*spots, job.end][1:], strict=True)]
        sigma = as_integer(job.number_after("Rotational Symmetry factor:"))
        items = [_molcas(block, sigma) for block in blocks]
        zero = float(zpe.group(1)) if zpe else None
        if zero is None and blocks and items[0].temperature_K == 0.0:
            zero = items[0].enthalpy_correction_hartree
        found = [replace(item, zpe_hartree=zero) for item in items if item.temperature_K]
        return tuple(sorted(found, key=lambda i: abs((i.temperature_K or 0.0) - 298.15)))


def _molcas(block: Text, sigma: int | None) -> PrintedThermo:
    head = re.search(r"([\d.]+) Kelvin, Pressure = +([\d.]+) atm", block.line(block.start + 1))
    entropy = numbers(block.rest_of_first("\n TOTAL  "))
    enthalpy = re.search(r"(-?[\d.]+) au", block.rest_of_first("\n ENTHALPY  "))
    return PrintedThermo(
        temperature_K=float(head.group(1)) if head else None,
        pressure_Pa=float(head.group(2)) * ATMOSPHERE_PA if head else None,
        symmetry_number=sigma,
        enthalpy_correction_hartree=float(enthalpy.group(1)) if enthalpy else None,
        entropy_J_mol_K=entropy[-1] * CALORIE_J if entropy else None,
    )


class Molpro(Plain):
    """Molpro: average masses; only the zero-point energy is printed."""

    name = "Molpro"
    coupled_marks: ClassVar = (("!CCSD(T)", "CCSD(T)"), ("!CCSD", "CCSD"), ("!CCD", "CCD"))
    version_pattern = r"Version (\d\S*)"
    endings: ClassVar = ("Variable memory released",)
    failures: ClassVar = (Failure("GLOBAL ERROR fehler", "Molpro stopped with an error"),)
    mode_anchors: ClassVar = ("Wavenumbers [cm-1]",)

    def masses(self, job: Text) -> FloatArray | None:
        spot = job.rfind("\n Atomic Masses")
        found: list[float] = []
        for line in islice(job.lines(spot + 1), 1, None) if spot >= 0 else ():
            match = re.match(r" +\d+- *\d+ +(.*)", line)
            if not match:
                break
            found += numbers(match.group(1))
        return np.array(found) if found else None

    def level(self, job: Text, kind: str) -> Level | None:
        group = re.match(r"(\S+?)=(\S+)", job.rest_of_last("Density functional group "))
        basis = job.rest_of_last("SETTING BASIS          =")
        method = normalise_method(group.group(1)) if group else "HF"
        local = "VWN5" if group and "VWN5" in group.group(2) else ""
        name = method if kind in ("SCF", "") else kind
        return Level(method=name, basis=normalise_basis(basis), functional=local, program=self.name)

    def geometry(self, job: Text) -> tuple[IntArray | None, FloatArray | None]:
        """The table of the normal modes: it may have another order than the one at the head, which symmetry sorts."""
        spot = job.rfind("\n Atomic Coordinates\n")
        rows: list[list[float]] = []
        for line in islice(job.lines(spot + 1), 1, None) if spot >= 0 else ():
            fields = line.split()
            values = [number(token) for token in fields[2:]]
            if len(fields) == 6 and fields[0].isdigit() and all(v is not None for v in values):
                rows.append([v for v in values if v is not None])
            elif rows:
                break
        if not rows or not np.isfinite(rows).all():
            return None, None
        table = np.array(rows)
        return table[:, 0].round().astype(np.int64), table[:, 1:] * BOHR_ANGSTROM

    def hessian(self, job: Text, n_atoms: int) -> FloatArray | None:
        return molpro_hessian(job, n_atoms)

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        zpe = job.number_after("Zero point energy:")
        return (PrintedThermo(zpe_hartree=zpe),) if zpe is not None else ()


class Turbomole(Plain):
    """Turbomole's aoforce: neither energy nor charge nor multiplicity."""

    name = "Turbomole"
    coupled_marks: ClassVar = (("Final CCSD energy", "CCSD"), ("Final CC2 energy", "CC2"))
    version_pattern = r"TURBOMOLE (?:rev\. )?V(\S+)"
    endings: ClassVar = ("all done  ****", "ended normally")
    failures: ClassVar = (Failure("ended abnormally", "Turbomole stopped with an error"),)
    mode_anchors: ClassVar = ("NORMAL MODES and VIBRATIONAL FREQUENCIES", "zero point VIBRATIONAL energy")

    def version(self, job: Text) -> str:
        return super().version(job).replace("-", ".")

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        zpe = job.number_after("zero point VIBRATIONAL energy")
        return (PrintedThermo(zpe_hartree=zpe),) if zpe is not None else ()


OTHERS: Final[tuple[type[Dialect], ...]] = (
    GAMESS, Firefly, GAMESSUK, ADF, CFOUR, DALTON, Jaguar, Molcas, Molpro, MOPAC, Turbomole, XTB, FChk,
)  # fmt: skip
