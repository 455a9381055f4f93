"""Semiempirical programs: MOPAC and xtb."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from itertools import islice
from typing import TYPE_CHECKING, ClassVar, Final

import numpy as np

from heatwright.constants import BOHR_ANGSTROM, CALORIE_J, HARTREE_KJ_MOL
from heatwright.elements import atomic_number
from heatwright.findings import Finding, refuse, warn
from heatwright.molecule import FloatArray, IntArray, Kind, Level, PrintedThermo
from heatwright.reading.dialects.base import Failure, as_integer
from heatwright.reading.dialects.plain import Plain
from heatwright.reading.text import Text, number, numbers

if TYPE_CHECKING:
    from heatwright.reading.parsing import Parsed

_KCAL: Final = CALORIE_J / HARTREE_KJ_MOL


class MOPAC(Plain):
    """MOPAC: heats of formation instead of energies; read here, as cclib loses degenerate modes and geometries."""

    name = "MOPAC"
    version_pattern = r"(?:Version |MOPAC v)(\d+\.\d+(?:\.\d+)?)"
    endings: ClassVar = ("== MOPAC DONE ==",)
    job_starts: ClassVar = ("CALCULATION DONE:",)
    mode_anchors: ClassVar = ("NORMAL COORDINATE ANALYSIS", "DESCRIPTION OF VIBRATIONS")
    own = frozenset({"atomnos", "atomcoords", "vibfreqs", "vibdisps"})
    cumulative = True

    def terminated(self, job: Text) -> bool:
        return super().terminated(job) or not job.is_last

    def energies(self, job: Text, parsed: Parsed, has_modes: bool) -> tuple[dict[str, float], str]:
        return {}, ""

    def level(self, job: Text, kind: str) -> Level | None:
        spot = job.whole.find(" CALCULATION RESULTS")
        method = job.line(spot).split()[0] if spot >= 0 and job.line(spot).split() else ""
        return Level(method=method, basis="", program=self.name) if method else None

    def geometry(self, job: Text) -> tuple[IntArray | None, FloatArray | None]:
        spot = max(job.rfind("ORIENTATION OF MOLECULE IN FORCE CALCULATION"), job.rfind("CARTESIAN COORDINATES \n"))
        atoms: list[int] = []
        rows: list[list[float]] = []
        for line in job.lines(spot) if spot >= 0 else ():
            fields = [token for token in line.split() if token != "*"]
            values = [number(token) for token in fields[2:]]
            if len(fields) == 5 and fields[0].isdigit() and all(v is not None for v in values):
                atoms.append(_z(fields[1]))
                rows.append([v for v in values if v is not None])
            elif rows:
                break
        return (np.array(atoms, dtype=np.int64), np.array(rows)) if rows else (None, None)

    def wavenumbers(self, job: Text) -> FloatArray | None:
        """Every root of the analysis, so that degenerate modes stay as many as they are."""
        start = job.find("NORMAL COORDINATE ANALYSIS")
        if start < 0:
            return None
        end = job.find("MASS-WEIGHTED COORDINATE ANALYSIS", start)
        block = job.part(start, end if end >= 0 else None)
        found: list[float] = []
        for spot in block.spots("Root No."):
            n = len(block.line(spot).split()) - 2
            for line in islice(block.lines(spot), 1, 6):
                values = [number(token) for token in line.split()]
                if len(values) == n and all(v is not None for v in values):
                    found += [v for v in values if v is not None]
                    break
        return np.array(found) if found else None

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        zpe = job.number_after("ZERO POINT ENERGY")
        zero = None if zpe is None else zpe * _KCAL
        sigma = re.search(r"= +(\d+)", job.rest_of_last("SYMMETRY NUMBER FOR POINT-GROUP"))
        found = []
        for spot in job.spots("  VIB.  "):
            temperature = number(job.line(spot).split()[0])
            block = job.part(spot, spot + 2000)
            totals = numbers(block.line(block.find(" TOT. "))) if " TOT. " in block else []
            if temperature is not None and len(totals) == 4 and zero is not None:
                heat = totals[1] / 1000.0 * _KCAL
                number_of_rotations = int(sigma.group(1)) if sigma else None
                item = PrintedThermo(temperature, None, number_of_rotations, zero, heat + zero, totals[3] * CALORIE_J)
                found.append(item)
        return tuple(found) or ((PrintedThermo(zpe_hartree=zero),) if zero is not None else ())

    def max_gradient(self, job: Text) -> float | None:
        """Of the table of derivatives, kcal/mol/Å, that a force calculation prints for its geometry."""
        spot = job.rfind("CARTESIAN COORDINATE DERIVATIVES")
        found: list[float] = []
        for line in islice(job.lines(spot), 1, None) if spot >= 0 else ():
            fields = line.split()
            values = [number(token) for token in fields[2:]]
            if len(fields) == 5 and fields[0].isdigit() and all(v is not None for v in values):
                found += [abs(v) for v in values if v is not None]
            elif found:
                break
        return max(found) * _KCAL * BOHR_ANGSTROM if found else None

    def remarks(self, job: Text) -> Iterable[Finding]:
        words = "the energy MOPAC prints is a heat of formation at 298 K, not a total energy"
        action = "Give the enthalpy of formation itself, or energies of a method that has them."
        yield warn("energy-not-total", words, action=action)


def _z(symbol: str) -> int:
    try:
        return atomic_number(re.sub(r"[^A-Za-z].*", "", symbol))
    except KeyError:
        return 0


class XTB(Plain):
    """xtb: spin printed only when asked for, geometry only after an optimisation, entropies of its own."""

    name = "xTB"
    version_pattern = r"xtb version (\d\S*)"
    endings: ClassVar = ("* finished run on",)
    failures: ClassVar = (Failure("abnormal termination of xtb", "xtb stopped with an error"),)
    mode_anchors: ClassVar = ("vibrational frequencies",)
    own = frozenset({"mult", "vibdisps"})

    def multiplicity(self, job: Text, parsed: Parsed) -> int | None:
        call = job.rest_of_first("program call               :")
        unpaired = re.search(r"(?:--uhf|-u) +(\d+)", call)
        if unpaired:
            return int(unpaired.group(1)) + 1
        electrons = as_integer(job.number_after(":  # electrons"))
        if not call or electrons is None or "$spin" in job or ".UHF" in call:
            return parsed.integer("mult")
        return 1 + electrons % 2  # the program's own choice when it is not told

    def energies(self, job: Text, parsed: Parsed, has_modes: bool) -> tuple[dict[str, float], str]:
        total = job.number_after("| TOTAL ENERGY  ")
        return ({"SCF": total}, "SCF") if total is not None else ({}, "")

    def level(self, job: Text, kind: str) -> Level | None:
        match = re.match(r" *(\S+)", job.rest_of_last(":  Hamiltonian  "))
        method = match.group(1) if match else "GFN-FF" if _FORCE_FIELD in job else ""
        return Level(method=method, basis="", solvent=_xtb_solvent(job), program=self.name) if method else None

    def geometry(self, job: Text) -> tuple[IntArray | None, FloatArray | None]:
        """The structure after an optimisation; a plain Hessian run prints none."""
        spot = job.rfind("final structure:")
        atoms: list[int] = []
        rows: list[list[float]] = []
        for line in job.lines(spot) if spot >= 0 else ():
            fields = line.split()
            values = [number(token) for token in fields[1:]]
            if len(fields) == 4 and fields[0].isalpha() and all(v is not None for v in values):
                atoms.append(_z(fields[0]))
                rows.append([v for v in values if v is not None])
            elif rows:
                break
        return (np.array(atoms, dtype=np.int64), np.array(rows)) if rows else (None, None)

    def job_kind(self, job: Text) -> Kind | None:
        return "relaxed scan" if "RELAXED SCAN" in job else None

    def remarks(self, job: Text) -> Iterable[Finding]:
        atoms, _ = self.geometry(job)
        if atoms is not None and any(anchor in job for anchor in self.mode_anchors):
            yield from _fixed_atoms(job, len(atoms))
        if _FORCE_FIELD in job:
            words = "the energy of a force field is no total energy"
            yield warn("energy-not-total", words, action="It cannot enter an atomization or a reaction.")

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        rows = [job.line(spot) for spot in job.spots(" TOT  ")]
        values = next((v for v in map(numbers, rows) if len(v) >= 4), [])
        temperature = next(iter(numbers(_xtb_temperature(job))), None)
        total, enthalpy = job.number_after("| TOTAL ENERGY  "), job.number_after("| TOTAL ENTHALPY  ")
        zpe = job.number_after(":: zero point energy  ")
        if zpe is None:
            return ()
        item = PrintedThermo(
            temperature_K=temperature,
            symmetry_number=as_integer(job.number_after(":  rotational number  ")),
            zpe_hartree=zpe,
            enthalpy_correction_hartree=None if total is None or enthalpy is None else enthalpy - total,
            entropy_J_mol_K=values[2] * CALORIE_J if values else None,
        )
        return (item,)


_FORCE_FIELD: Final = "G F N - F F"


def _xtb_solvent(job: Text) -> str:
    """The model by its name and the solvent, or what the table of settings says of it."""
    model = job.rest_of_last("* Solvation model:")
    if model:
        name = re.search(r"^ +Solvent +(\S+)", str(job.part(job.rfind("* Solvation model:"))), re.MULTILINE)
        return f"{model}, {name.group(1)}" if name else model
    setting = re.match(r" *(\S+)", job.rest_of_last(":  GBSA solvation  "))
    return "" if setting is None or setting.group(1) == "false" else "GBSA/ALPB"


def _fixed_atoms(job: Text, n_atoms: int) -> Iterator[Finding]:
    """Atoms that an optimisation held in place are not named; it has fewer degrees of freedom than the molecule."""
    free = as_integer(job.number_after(":   degrees of freedom  "))
    linear = job.rest_of_last(":   linear?").startswith("true")
    if free is None or n_atoms < 3 or free >= 3 * n_atoms - (5 if linear else 6):
        return
    words = f"the optimisation had {free} degrees of freedom: atoms were held in place"
    expected = f"{3 * n_atoms - (5 if linear else 6)} for {n_atoms} free atoms"
    action = "Optimise without constraints first, or accept them with --accept constraints."
    where = job.where(job.rfind(":   degrees of freedom  "))
    yield refuse("constraints", words, where=where, expected=expected, action=action)


def _xtb_temperature(job: Text) -> str:
    spot = job.find(" VIB  ")
    return job.line(spot) if spot >= 0 else ""
