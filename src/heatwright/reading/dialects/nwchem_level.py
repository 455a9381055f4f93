"""NWChem's levels of theory: the functional by its parts, the basis by element, core potential, dispersion, solvent."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Final

from heatwright.findings import Finding, refuse
from heatwright.molecule import Level
from heatwright.reading.levels import normalise_basis, normalise_method
from heatwright.reading.text import Text

_LOCAL_CORRELATION: Final = {
    "VWN I RPA": "VWN1RPA",
    "VWN V ": "VWN5",
    "VWN III": "VWN3",
    "VWN II ": "VWN2",
    "VWN IV": "VWN4",
    "VWN I ": "VWN1",
}
_PAIRS: Final = (
    ("PerdewBurkeErnzerhof Exchange", "Perdew 1996", "PBE"),
    ("PerdewBurkeErnzerhof Exchange", "Perdew 1991 LDA", "PBE"),
    ("Becke 1988 Exchange", "Lee-Yang-Parr", "BLYP"),
    ("Becke 1988 Exchange", "Perdew 1986", "BP86"),
    ("TPSS metaGGA Exchange", "TPSS metaGGA Corr", "TPSS"),
)


_FUNCTIONAL: Final = "              XC Information"


def level_of(job: Text, kind: str) -> Level | None:
    """The level of a task: functional with its parts, basis with its kind of functions, and what surrounds them."""
    basis_spot = max(job.rfind('Basis "ao basis" -> "ao basis" ('), job.rfind('Summary of "ao basis" -> "'))
    whole = Text(job.whole, 0, job.end)
    if basis_spot < 0:
        basis_spot = whole.rfind('Summary of "ao basis" -> "')
    header = whole.line(basis_spot).lower() if basis_spot >= 0 else ""
    marks = ("SCF calculation type: DFT", "The DFT is already converged")
    is_dft = max(job.rfind(mark) for mark in marks) > job.rfind("NWChem SCF Module")
    stated = job if _FUNCTIONAL in job else whole  # a task that finds its orbitals converged does not say it again
    method, functional = _functional(stated) if is_dft else ("HF" if kind == "SCF" else kind, "")
    if not method and basis_spot < 0:
        return None
    return Level(
        method=normalise_method(method),
        basis=_basis_name(whole),
        functional=functional,
        spherical=True if "(spherical)" in header else False if "(cartesian)" in header else None,
        frozen_core=_frozen(job) if kind not in ("SCF", "") else "",
        core_potential=_core_potential(whole),
        dispersion=_dispersion(stated) if is_dft and "Dispersion correction" in job else "",
        solvent=_solvent(job),
        program="NWChem",
    )


def _basis_name(whole: Text) -> str:
    """The names of the last summary; one name when all atoms share it, else element by element."""
    spot = whole.rfind('Summary of "ao basis"')
    names: dict[str, str] = {}
    for line in whole.lines(spot) if spot >= 0 else ():
        match = re.match(r"^ (\S+) {3,}(\S.*?) {2,}(?:\d+ +\d+ +\S+|on all atoms)\s*$", line)
        if match:
            names[match.group(1)] = normalise_basis(re.sub(r"\s+ecp$", "", match.group(2), flags=re.IGNORECASE))
        elif names:
            break
    if len(set(names.values())) <= 1:
        return next(iter(names.values()), "")
    return ", ".join(f"{name} ({tag})" for tag, name in sorted(names.items()))


def _functional(job: Text) -> tuple[str, str]:
    spot = job.rfind(_FUNCTIONAL)
    block = job.part(spot, job.find("Grid Information", spot)) if spot >= 0 else job.part(job.start, job.start)
    text = str(block)
    named = re.search(r"^ +(\S.*?) Method XC (?:Potential|Functional)", text, re.MULTILINE)
    local = next((short for long, short in _LOCAL_CORRELATION.items() if f"{long.rstrip()} Corr" in text), "")
    if named:
        return named.group(1).strip(), local
    for exchange, correlation, name in _PAIRS:
        if exchange in text and correlation in text and "Hartree-Fock (Exact)" not in text:
            return name, local
    parts = re.findall(r"^ +(\S.*?) (?:Functional|Exchange) +(\d\.\d+)", text, re.MULTILINE)
    if parts == [("Hartree-Fock (Exact)", "1.000")]:
        return "HF", local
    return " + ".join(f"{weight} {part}" for part, weight in parts), local


def _frozen(job: Text) -> str:
    """Of the MP2, the CCSD and the TCE module, in their own words."""
    counts = (job.number_after(a) for a in ("  Frozen core           =", " number of core  ", "Alpha frozen cores :"))
    core = next((int(count) for count in counts if count is not None), None)
    if core is None:
        return ""
    return f"frozen {core}" if core else "all"


def _core_potential(whole: Text) -> str:
    if ' ECP       "ecp basis"' not in whole:
        return ""
    spot = whole.rfind('Summary of "ao basis"')
    match = re.search(r" {3,}(\S+) ecp +", whole.whole[spot : spot + 2000], re.IGNORECASE) if spot >= 0 else None
    return normalise_basis(match.group(1)) + " ECP" if match else "ECP"


def _dispersion(job: Text) -> str:
    spot = job.rfind("Dispersion Parameters")
    if spot < 0:
        return ""
    match = re.search(r"DFT-(D\w+) Model", job.whole[spot : spot + 200])
    return match.group(1) if match else "dispersion"


def _solvent(job: Text) -> str:
    if "-cosmo- solvent" not in job:
        return ""
    epsilon = job.number_after("dielectric constant -eps-     =")
    model = "SMD" if "SMD model" in job or "smd" in job.rest_of_last("do_cosmo_smd") else "COSMO"
    return f"{model}, epsilon {epsilon:g}" if epsilon is not None else model


_CORRELATED: Final = (
    "NWChem MP2 Semi-direct Energy/Gradient Module",
    "NWChem RI-MP2 Module",
    "NWChem Extensible Many-Electron Theory Module",
    "NWChem Direct MCSCF Module",
)


def missed_correlation(job: Text, kind: str) -> Iterator[Finding]:
    """The refusal of a task whose module goes beyond the SCF, and whose own energy was not found."""
    title = next((title for title in _CORRELATED if title in job), None)
    if title is None or kind not in ("", "SCF"):
        return
    words = f"the energy of the {title.removeprefix('NWChem ')} is not in the output, only that of the SCF"
    action = "The output is damaged, or the energy of this module is not read."
    yield refuse("parser-failed", words, where=job.where(job.find(title)), action=action)
