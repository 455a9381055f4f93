"""The GAMESS family: GAMESS (US), Firefly and GAMESS-UK."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import replace
from itertools import islice
from typing import TYPE_CHECKING, ClassVar

import numpy as np

from heatwright.constants import ATMOSPHERE_PA, GAS_CONSTANT_J_MOL_K, HARTREE_CM1, HARTREE_KJ_MOL
from heatwright.findings import Finding, warn
from heatwright.molecule import FloatArray, Kind, Level, PrintedThermo
from heatwright.reading.dialects.base import Facts, Failure, as_integer
from heatwright.reading.dialects.plain import Plain, last_column
from heatwright.reading.levels import normalise_method
from heatwright.reading.text import Text, numbers

if TYPE_CHECKING:
    from heatwright.reading.parsing import Parsed

_RELATIVE = ("AM1", "PM3", "MNDO", "RM1")


class GAMESS(Plain):
    """GAMESS (US): modes in the text of VIBANL, thermochemistry in kJ and J, its own symmetry number."""

    name = "GAMESS"
    version_pattern = r"GAMESS VERSION = +(.*?) +\*"
    endings: ClassVar = ("TERMINATED NORMALLY",)
    failures: ClassVar = (
        Failure("TERMINATED -ABNORMALLY-", "the program stopped with an error"),
        Failure("SCF IS UNCONVERGED", "the SCF did not converge"),
        Failure("FAILURE TO LOCATE STATIONARY POINT", "the geometry optimisation did not converge"),
    )
    coupled_marks: ClassVar = (
        ("CCSD(T) ENERGY:", "CCSD(T)"),
        ("CCSD[T] ENERGY:", "CCSD[T]"),
        ("CCSD    ENERGY:", "CCSD"),
        ("CCD ENERGY:", "CCD"),
    )
    mode_anchors: ClassVar = ("       FREQUENCY:  ", "NORMAL COORDINATE ANALYSIS IN THE HARMONIC APPROXIMATION")

    def level(self, job: Text, kind: str) -> Level | None:
        functional = re.search(r"DFTTYP=(\w+)", _after(job, "DFTTYP="))
        basis = re.search(r"GBASIS=(\w+) +IGAUSS= +(\d+)", _after(job, "     GBASIS="))
        name = functional.group(1) if functional and functional.group(1) != "NONE" else "HF"
        if basis and basis.group(1) in _RELATIVE:
            return Level(method=basis.group(1), basis="", program=self.name)
        return Level(
            method=normalise_method(name) if kind in ("SCF", "") else kind,
            basis=_basis(basis.group(1), basis.group(2), _after(job, "     NDFUNC=")) if basis else "",
            functional={"B3LYP": "VWN5", "B3LYPV5": "VWN5", "B3LYPV1R": "VWN1RPA", "B3LYPV3": "VWN3"}.get(name, ""),
            spherical={"-1": False, "1": True}.get(_setting(job, "ISPHER=")),
            program=self.name,
        )

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        spots = job.spots("THERMOCHEMISTRY AT T=")
        return tuple(_printed(job.part(a, b)) for a, b in zip(spots, [*spots, job.end][1:], strict=True))

    def job_kind(self, job: Text) -> Kind | None:
        return "rigid scan" if "RUNTYP=SURFACE" in job else None

    def remarks(self, job: Text) -> Iterable[Finding]:
        yield from _not_stationary(job)
        yield from _relative_energy(job)


class Firefly(GAMESS):
    """Firefly (PC GAMESS): as GAMESS, version line of its own."""

    name = "Firefly"
    version_pattern = r"(?:Firefly|PC GAMESS) version (\S+?),"


class GAMESSUK(Plain):
    """GAMESS-UK: masses of the principal isotopes, energies in J and hartree."""

    name = "GAMESS-UK"
    version_pattern = r"version +(\d\S*)"
    endings: ClassVar = ("end of  G A M E S S   program",)
    mode_anchors: ClassVar = (
        "normal coordinate analysis",
        "Vibrational Frequencies Calculated from",
        "frequencies ----",
    )

    def masses(self, job: Text) -> FloatArray | None:
        return last_column(job, " Nuclear masses:", fields=4)

    def wavenumbers(self, job: Text) -> FloatArray | None:
        """Those over the normal coordinates, which its thermochemistry uses; a second, projected list follows later."""
        start = job.rfind("frequencies (cm**-1) and normalised normal coordinates")
        if start < 0:
            return None
        found = [n for spot in job.part(start).spots("frequencies ----") for n in numbers(job.line(spot))]
        return np.array(found) if found else None

    def read(self, job: Text, parsed: Parsed) -> Facts:
        facts = super().read(job, parsed)
        return facts if facts.wavenumbers_cm1 is None else replace(facts, normal_modes=parsed.array("vibdisps"))

    def level(self, job: Text, kind: str) -> Level | None:
        echoed = re.search(r">>>>> *DFT +(\S+)", str(job.part(job.start, job.start + 20000)), re.IGNORECASE)
        basis = re.search(r">>>>> *BASIS +(\S+)", str(job.part(job.start, job.start + 20000)), re.IGNORECASE)
        method = normalise_method(echoed.group(1)) if echoed else "HF"
        local = "VWN1RPA" if method == "B3LYP" else ""  # its B3LYP follows the definition of Gaussian
        name = basis.group(1).upper().replace("STO3G", "STO-3G") if basis else ""
        return Level(method=method if kind in ("SCF", "") else kind, basis=name, functional=local, program=self.name)

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        start = job.rfind("thermochemical analysis")
        if start < 0:
            return ()
        block = job.part(start)
        temperature = block.number_after(" temperature ", last=False)
        pressure = block.number_after(" pressure ", last=False)
        zpe = [n for line in islice(block.lines(block.find("zero point vibrational energy")), 3) for n in numbers(line)]
        thermal = block.number_after("thermal energy correction to total energy:", last=False)
        totals = numbers(block.rest_of_first("\n total "))
        rt = None if temperature is None else GAS_CONSTANT_J_MOL_K / 1000.0 * temperature / HARTREE_KJ_MOL
        item = PrintedThermo(
            temperature_K=temperature,
            pressure_Pa=None if pressure is None else pressure * ATMOSPHERE_PA,
            symmetry_number=as_integer(_whole(block.rest_of_first("rotational symmetry number"))),
            zpe_hartree=zpe[2] if len(zpe) == 3 else None,
            enthalpy_correction_hartree=None if thermal is None or rt is None else thermal + rt,
            entropy_J_mol_K=totals[2] if len(totals) == 3 else None,
        )
        return (item,)


def _whole(rest: str) -> float | None:
    found = re.match(r"\s*(\d+)", rest)
    return float(found.group(1)) if found else None


def _after(job: Text, anchor: str) -> str:
    """The line of the last *anchor*."""
    spot = job.rfind(anchor)
    return job.line(spot) if spot >= 0 else ""


def _setting(job: Text, key: str) -> str:
    match = re.match(r" *(-?\w+)", job.rest_of_first(key))
    return match.group(1) if match else ""


def _basis(family: str, gaussians: str, extras: str) -> str:
    stars = re.search(r"NDFUNC= +(\d+)", extras)
    if family == "STO":
        return f"STO-{gaussians}G"
    if family in ("N21", "N31", "N311"):
        heavy = int(stars.group(1)) if stars else 0
        return f"{gaussians}-{family[1:]}G" + (
            "*" if heavy == 1 else f" with {heavy} sets of d functions" if heavy else ""
        )
    return family


def _printed(block: Text) -> PrintedThermo:
    head = numbers(block.line(block.start))
    pressure = block.number_after("P=", last=False)
    zpe = re.search(r"HARTREE/MOLECULE +(\S+) CM\*\*-1", str(block.part(block.find("THE HARMONIC ZERO POINT"))))
    table = block.find("KJ/MOL    KJ/MOL    KJ/MOL   J/MOL-K")
    totals = numbers(block.line(block.find(" TOTAL ", table))) if table >= 0 else []
    return PrintedThermo(
        temperature_K=head[0] if head else None,
        pressure_Pa=pressure,
        symmetry_number=as_integer(block.number_after("THE ROTATIONAL SYMMETRY NUMBER IS", last=False)),
        zpe_hartree=float(zpe.group(1)) / HARTREE_CM1 if zpe else None,
        enthalpy_correction_hartree=totals[1] / HARTREE_KJ_MOL if len(totals) == 6 else None,
        entropy_J_mol_K=totals[5] if len(totals) == 6 else None,
    )


def _not_stationary(job: Text) -> Iterator[Finding]:
    spot = job.find("THIS IS NOT A STATIONARY POINT")
    if spot >= 0:
        action = "Optimise at the level of the frequencies first."
        words = "the program says that this is not a stationary point"
        yield warn("not-stationary", words, where=job.where(spot), action=action)


def _relative_energy(job: Text) -> Iterator[Finding]:
    basis = re.search(r"GBASIS=(\w+)", _after(job, "     GBASIS="))
    if basis and basis.group(1) in _RELATIVE:
        words = f"the {basis.group(1)} energy refers to valence electrons only"
        yield warn("energy-not-total", words, action="It cannot be combined with energies of other methods.")
