"""Gaussian 03 to 16: linked jobs and internal steps, correlated energies in Fortran notation, double hybrids."""

from __future__ import annotations

import re
from itertools import pairwise
from typing import TYPE_CHECKING, ClassVar, Final

import numpy as np

from heatwright.constants import ATMOSPHERE_PA, CALORIE_J
from heatwright.findings import Finding, warn
from heatwright.molecule import FloatArray, Kind, Level, PrintedThermo
from heatwright.reading.dialects.base import (
    Dialect,
    Energy,
    Facts,
    Failure,
    Identity,
    as_integer,
    chosen_point,
    cut,
    or_plain,
    reconciled,
)
from heatwright.reading.dialects.gaussian_archive import contradictions
from heatwright.reading.fundamentals import gaussian_fundamentals
from heatwright.reading.hessians import gaussian_archive
from heatwright.reading.levels import normalise_basis, normalise_method
from heatwright.reading.text import Text, number, numbers

if TYPE_CHECKING:
    from heatwright.reading.parsing import Parsed

_STEP: Final = "Proceeding to internal job step number"
_POST: Final = (
    ("EUMP2 =", "MP2"),
    ("EUMP3=", "MP3"),
    ("UMP4(DQ)=", "MP4(DQ)"),
    ("UMP4(SDQ)=", "MP4(SDQ)"),
    ("UMP4(SDTQ)=", "MP4"),
    ("\n CCSD(T)=", "CCSD(T)"),
    ("\n QCISD(T)=", "QCISD(T)"),
    ("\n BD(T)=", "BD(T)"),
)
_SEMIEMPIRICAL: Final = frozenset({"AM1", "PM3", "PM6", "PM7", "MNDO", "PDDG", "PM3MM", "ZINDO", "CNDO", "INDO"})
_VWN_III: Final = frozenset({"B3LYP", "B3P86", "B3PW91", "SVWN", "O3LYP", "X3LYP"})
_DISPERSION: Final = (("Grimme-D3(BJ)", "D3BJ"), ("Grimme-D3", "D3"), ("Grimme-D2", "D2"), ("Petersson-Frisch", "PFD"))
_BUILT_IN: Final = ("wB97X-D", "B97-D", "B97-D3", "APFD", "B2PLYP-D", "B2PLYP-D3")


class Gaussian(Dialect):
    """The dialect of Gaussian."""

    name = "Gaussian"
    endings: ClassVar = ("Normal termination of Gaussian",)
    failures: ClassVar = (
        Failure("Convergence failure -- run terminated.", "the SCF did not converge"),
        Failure(" Optimization stopped.", "the geometry optimisation did not converge"),
        Failure("Error termination", "Gaussian stopped with an error"),
    )
    mode_anchors: ClassVar = (" Frequencies --", "Harmonic frequencies (cm**-1)")

    def jobs(self, whole: Text) -> list[Text]:
        entries = whole.spots(" Entering Gaussian System, Link 0=") or whole.spots(" Initial command:\n")
        return cut(whole, [*entries[1:], *(_line_start(whole, spot) for spot in whole.spots(_STEP))])

    def identity(self, job: Text) -> Identity:
        spot = job.find(" Charge =")
        match = re.match(r" Charge = +(-?\d+) +Multiplicity = +(\d+)", job.line(spot)) if spot >= 0 else None
        route = _route(job).lower()
        return Identity(
            atoms=_atoms(job),
            charge=int(match.group(1)) if match else None,
            multiplicity=int(match.group(2)) if match else None,
            has_modes=any(a in job for a in self.mode_anchors) or bool(re.search(r"\bfreq\b|\bfreq[=(]", route)),
            optimises=bool(re.search(r"\bf?opt\b|\bf?opt[=(]", route)),
        )

    def read(self, job: Text, parsed: Parsed) -> Facts:
        thermo = _thermo(job)
        wavenumbers, disagree = _wavenumbers(job, parsed)
        reference = _reference(job)
        freq = any(anchor in job for anchor in self.mode_anchors)
        point, kind = chosen_point(_energies(job), reference=reference, first=freq)
        point, kind = or_plain(point, kind, parsed, freq)
        level = _level(job, kind)
        return Facts(
            version=_version(job),
            energies=point,
            energy_kind=kind,
            level=level,
            masses_u=_masses(job, parsed),
            hessian=lambda: gaussian_archive(job) or (None, None),
            fundamentals=gaussian_fundamentals(job),
            printed=(thermo,) if thermo else (),
            max_gradient_hartree_bohr=_max_gradient(job) if freq else None,
            kind=_scan_kind(job),
            wavenumbers_cm1=wavenumbers,
            normal_modes=None if wavenumbers is None else parsed.array("vibdisps"),
            findings=(*_remarks(level), *disagree, *contradictions(job, point, kind)),
        )


def _line_start(whole: Text, spot: int) -> int:
    return whole.whole.rfind("\n", 0, spot) + 1


def _version(job: Text) -> str:
    match = re.search(r"\n Gaussian \d\d: +(\S+)", job.whole)
    return match.group(1) if match else ""


def _route(job: Text) -> str:
    """The route section, its lines joined: from the first line that starts with ``#`` to the closing dashes."""
    spot = job.find("\n #")
    lines: list[str] = []
    for line in job.lines(spot + 1) if spot >= 0 else ():
        if line.startswith(" ---") or len(lines) > 40:
            break
        lines.append(line[1:])
    return "".join(lines)


def _atoms(job: Text) -> tuple[int, ...]:
    """Atomic numbers of the first table of coordinates; ghost atoms count 0, dummies are left out."""
    spot = job.find(" orientation:")
    found: list[int] = []
    for line in job.lines(spot) if spot >= 0 else ():
        fields = line.split()
        if len(fields) == 6 and fields[0].isdigit() and fields[1].lstrip("-").isdigit():
            if int(fields[1]) >= 0:
                found.append(0 if fields[2].startswith("1000") else int(fields[1]))
        elif found:
            return tuple(found)
    return ()  # no table, or one that the end of the file cuts off


def _energies(job: Text) -> list[Energy]:
    found: list[Energy] = []
    for spot in job.spots("SCF Done:  E("):
        match = re.match(r"SCF Done:  E\([^)\n]{1,40}\) = +(\S+)", job.whole[spot : spot + 200])
        value = number(match.group(1)) if match else None
        if value is not None:
            found.append(Energy(spot, "SCF", value))
    for anchor, kind in _POST:
        for spot in job.spots(anchor):
            values = numbers(job.rest(spot, anchor))
            if values:
                found.append(Energy(spot, kind, values[0]))
    return found + _iterative(job) + _double_hybrid(job)


def _iterative(job: Text) -> list[Energy]:
    """Coupled-cluster iterations print the energy each time; the last one before another SCF counts."""
    kind = "QCISD" if "QCISD" in _route(job).upper() else "CCSD"
    scf = [*job.spots("SCF Done:  E("), job.end]
    found: list[Energy] = []
    for start, end in pairwise(scf):
        spot = job.part(start, end).rfind("E(CORR)=")
        values = numbers(job.rest(spot, "E(CORR)=")) if spot > start else []
        if values:
            found.append(Energy(spot, kind, values[0]))
    return found


def _double_hybrid(job: Text) -> list[Energy]:
    found = []
    for spot in job.spots("\n E2("):
        match = re.search(r"E2\(\w+\) = +\S+ +E\((\w+)\) = +(\S+)", job.line(spot + 1))
        value = number(match.group(2)) if match else None
        if value is not None:
            found.append(Energy(spot, "double-hybrid", value))
    return found


def _reference(job: Text) -> float | None:
    total = job.number_after("Sum of electronic and zero-point Energies=")
    zpe = job.number_after("Zero-point correction=")
    return None if total is None or zpe is None else total - zpe


def _wavenumbers(job: Text, parsed: Parsed) -> tuple[FloatArray | None, tuple[Finding, ...]]:
    """With ``freq=hpmodes`` the list is printed twice; what cclib took must be in both."""
    fine = parsed.array("vibfreqs")
    for anchor in (" Frequencies --- ", " Frequencies -- "):
        values = [v for spot in job.spots(anchor) for v in numbers(job.rest(spot, anchor))]
        printed = np.array(values)
        if fine is not None and printed.shape == fine.shape and not (np.abs(printed - fine) <= 0.0051).all():
            return reconciled(printed, fine, job.where(job.find(anchor)))
    return None, ()


def _thermo(job: Text) -> PrintedThermo | None:
    zpe = job.number_after("Zero-point correction=")
    spot = job.rfind(" Temperature ")
    match = re.match(r" Temperature +([\d.]+) Kelvin\. +Pressure +([\d.]+) Atm", job.line(spot)) if spot >= 0 else None
    if zpe is None and match is None:
        return None
    table = job.rfind("E (Thermal)             CV                S")
    row = job.find(" Total ", table) if table >= 0 else -1
    totals = numbers(job.line(row)) if row >= 0 else []
    sigma = as_integer(number(job.rest_of_last("Rotational symmetry number").rstrip(". ")))
    return PrintedThermo(
        temperature_K=float(match.group(1)) if match else None,
        pressure_Pa=float(match.group(2)) * ATMOSPHERE_PA if match else None,
        symmetry_number=sigma,
        zpe_hartree=zpe,
        enthalpy_correction_hartree=job.number_after("Thermal correction to Enthalpy="),
        entropy_J_mol_K=totals[2] * CALORIE_J if len(totals) == 3 else None,
    )


def _masses(job: Text, parsed: Parsed) -> FloatArray | None:
    """The masses of the thermochemistry, with the finer digits of the atom table where both agree."""
    spot = job.find("has atomic number", max(job.rfind("Kelvin.  Pressure"), job.start))
    coarse: list[float] = []
    for line in job.lines(spot) if spot >= 0 else ():
        if "has atomic number" not in line:
            break
        values = numbers(line)
        if len(values) < 3:
            break
        coarse.append(values[-1])
    if not coarse:
        return None
    masses = np.array(coarse)
    fine = parsed.array("atommasses")
    if fine is not None and fine.ndim == 1 and fine.size >= masses.size:
        fine = fine[-masses.size :]
        return np.where(np.abs(fine - masses) < 1.1e-5, fine, masses)
    return masses


def _max_gradient(job: Text) -> float | None:
    spot = job.rfind("Cartesian Forces:  Max")
    if spot >= 0:
        values = numbers(job.rest(spot, "Cartesian Forces:  Max"))
        return values[0] if values else None
    return job.number_after(" Maximum Force ")


def _scan_kind(job: Text) -> Kind | None:
    if "Number of optimizations in scan=" in job:
        return "relaxed scan"
    if " Scan the potential surface." in job or "Summary of the potential surface scan:" in job:
        return "rigid scan"
    return None


def _level(job: Text, kind: str) -> Level | None:
    spot = job.rfind("SCF Done:  E(")
    match = re.search(r"E\(([^)]*)\)", job.line(spot)) if spot >= 0 else None
    scf = normalise_method(match.group(1)) if match else ""
    method = scf if kind in ("SCF", "") else _double_hybrid_name(job) if kind == "double-hybrid" else kind
    basis_spot = job.rfind(" Standard basis: ")
    basis = job.rest(basis_spot, " Standard basis: ") if basis_spot >= 0 else ""
    functions = basis or job.rest_of_last("General basis read from cards:")
    if not method and not basis:
        return None
    dispersion = (
        "" if method in _BUILT_IN else next((s for a, s in _DISPERSION if f"{a} Dispersion energy=" in job), "")
    )
    return Level(
        method=method,
        basis=normalise_basis(re.sub(r"\(\d+[DF].*", "", basis).strip()) if basis else "general" if functions else "",
        functional="VWN1RPA" if method in _VWN_III else "",
        spherical=True if "(5D" in functions else False if "(6D" in functions else None,
        frozen_core=_frozen(job) if kind not in ("SCF", "") else "",
        core_potential="ECP" if "Pseudopotential Parameters" in job else "",
        dispersion=dispersion,
        solvent=_solvent(job),
        program="Gaussian",
    )


def _double_hybrid_name(job: Text) -> str:
    match = re.search(r"E2\((\w+)\)", job.line(job.rfind("\n E2(") + 1))
    return normalise_method(match.group(1)) if match else ""


def _frozen(job: Text) -> str:
    spot = job.rfind(" NFC=")
    match = re.match(r" NFC= *(\d+)", job.rest(spot, "")) if spot >= 0 else None
    if match is None:
        return ""
    return f"frozen {match.group(1)}" if int(match.group(1)) else "all"


def _solvent(job: Text) -> str:
    if "Polarizable Continuum Model (PCM)" not in job:
        return ""
    solvent = re.match(r"\s*([^,]+)", job.rest_of_last(" Solvent              :"))
    model = "SMD" if "SMD-CDS" in job or "smd" in _route(job).lower() else "PCM"
    return f"{model}, {solvent.group(1).strip()}" if solvent else model


def _remarks(level: Level | None) -> tuple[Finding, ...]:
    if level is not None and level.method.upper().lstrip("RU") in _SEMIEMPIRICAL:
        words = f"the {level.method} energy is a heat of formation, not a total energy"
        return (warn("energy-not-total", words, action="It cannot enter an atomization or a reaction."),)
    return ()
