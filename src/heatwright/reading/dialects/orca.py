"""ORCA 4 to 6: average masses, the final energy with all corrections, quasi-harmonic entropies, jobs and compounds."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, ClassVar, Final

from heatwright.constants import ATMOSPHERE_PA, HARTREE_KJ_MOL
from heatwright.elements import atomic_number
from heatwright.molecule import Kind, Level, PrintedThermo
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
)
from heatwright.reading.levels import is_method, normalise_basis, normalise_method
from heatwright.reading.masses import mass_kind
from heatwright.reading.text import Text, number, numbers

if TYPE_CHECKING:
    from heatwright.reading.parsing import Parsed

_FINAL: Final = "FINAL SINGLE POINT ENERGY"
_EXCITED: Final = ("ORCA TD-DFT", "ORCA CIS", "TD-DFT EXCITED STATES", "EOM-CCSD", "ROCIS", "STEOM")
"""Words of excited-state sections; they are looked for below the echoed input, as the credits name them too."""
_CORRELATED: Final = (
    ("E(CCSD(T))  ", "CCSD(T)"),
    ("E(QCISD(T))  ", "QCISD(T)"),
    ("E(CCSD)  ", "CCSD"),
    ("E(QCISD)  ", "QCISD"),
    ("MP3 TOTAL ENERGY", "MP3"),
    ("MP2 TOTAL ENERGY", "MP2"),
    ("E(MP2)  ", "MP2"),
)
_DISPERSION: Final = {
    "d3bj": "D3BJ", "d3": "D3BJ", "d3zero": "D3", "d2": "D2", "d4": "D4", "d3tz": "D3TZ", "nl": "NL", "scnl": "NL",
}  # fmt: skip
_BASES: Final = re.compile(r"(?:ma-)?(?:def2-|aug-cc-|cc-|6-31|3-21|sto-|pc-|ano-|lanl|sv|tzv|qzv|jun-|may-|jul-)")


class ORCA(Dialect):
    """The dialect of ORCA."""

    name = "ORCA"
    endings: ClassVar = ("ORCA TERMINATED NORMALLY",)
    failures: ClassVar = (
        Failure("The optimization did not converge but reached", "the geometry optimisation did not converge"),
        Failure("SCF NOT CONVERGED AFTER", "the SCF did not converge"),
        Failure("This wavefunction IS NOT CONVERGED!", "the SCF did not converge"),
        Failure("ORCA finished by error termination", "ORCA stopped with an error"),
        Failure("aborting the run", "ORCA stopped with an error"),
    )
    mode_anchors: ClassVar = ("VIBRATIONAL FREQUENCIES",)

    def jobs(self, whole: Text) -> list[Text]:
        spots = {_line_start(whole, spot) for spot in whole.spots("* O   R   C   A *")}
        runs = sorted(spots)[1:]
        numbered = [
            _line_start(whole, spot)
            for anchor in ("JOB NUMBER", "COMPOUND JOB")
            for spot in whole.spots(anchor)
            if re.fullmatch(rf"\W*{anchor} +\d+\W*", whole.line(spot))
        ]
        firsts = sorted(numbered)[1:] if numbered else []
        return cut(whole, [*runs, *firsts])

    def identity(self, job: Text) -> Identity:
        return Identity(
            atoms=_atoms(job),
            charge=as_integer(job.number_after(" Total Charge           Charge          ....")),
            multiplicity=as_integer(job.number_after(" Multiplicity           Mult            ....")),
            has_modes=any(a in job for a in self.mode_anchors) or _asks_for_modes(job),
            optimises="GEOMETRY OPTIMIZATION CYCLE" in job or "Geometry Optimization Run" in job,
        )

    def terminated(self, job: Text) -> bool:
        return super().terminated(job) or not job.is_last

    def read(self, job: Text, parsed: Parsed) -> Facts:
        kind = _highest(job)
        printed = _printed(job)
        energies = _energies(job, kind)
        freq = any(anchor in job for anchor in self.mode_anchors)
        reference = job.number_after("Electronic energy                ...") if freq else None
        if freq and reference is None:  # displaced points follow the reference before the modes are printed
            before = job.find(self.mode_anchors[0])
            energies = [e for e in energies if e.spot < before]
        point, kind = chosen_point(
            energies, reference=reference, first=freq and "NUMERICAL FREQUENCIES" in job, tolerance=2e-8
        )
        masses, atoms = parsed.array("atommasses"), _atoms(job)
        if masses is not None and masses.ndim == 1 and len(masses) > len(atoms) > 0:
            masses = masses[-len(atoms) :]
        point, kind = or_plain(point, kind, parsed, freq)
        return Facts(
            version=_version(job),
            energies=point,
            energy_kind=kind,
            level=_level(job, kind),
            masses_u=masses,
            mass_kind=mass_kind(masses, atoms),
            printed=printed,
            max_gradient_hartree_bohr=job.number_after("MAX gradient  ") if freq else None,
            kind=_scan_kind(job),
        )


def _line_start(whole: Text, spot: int) -> int:
    return whole.whole.rfind("\n", 0, spot) + 1


def _version(job: Text) -> str:
    spot = job.whole.find("Program Version ")
    match = re.match(r"Program Version (\S+)", job.whole[spot : spot + 60]) if spot >= 0 else None
    return match.group(1) if match else ""


def _keywords(job: Text) -> str:
    """The words of the simple-input lines (``!``) of the echoed input, lower case, one a line."""
    start = job.find("INPUT FILE")
    words: list[str] = []
    for line in job.lines(start) if start >= 0 else ():
        match = re.match(r"\| *\d+> *!(.*)", line)
        if match:
            words += match.group(1).split("#")[0].lower().split()
        if "END OF INPUT" in line:
            break
    return "\n".join(words)


def _asks_for_modes(job: Text) -> bool:
    return bool({"freq", "anfreq", "numfreq"} & set(_keywords(job).splitlines()))


def _atoms(job: Text) -> tuple[int, ...]:
    """Atoms of the first table of coordinates; embedding charges and ghosts count 0."""
    spot = job.find("CARTESIAN COORDINATES (ANGSTROEM)")
    found: list[int] = []
    for line in job.lines(spot) if spot >= 0 else ():
        fields = line.split()
        if len(fields) in (4, 5) and number(fields[-1]) is not None and number(fields[0]) is None:
            try:
                found.append(0 if fields[0].endswith(":") or ":" in line else atomic_number(fields[0]))
            except KeyError:
                found.append(0)
        elif found:
            return tuple(found)
    return ()  # no table, or one that the end of the file cuts off


def _highest(job: Text) -> str:
    found = next((kind for anchor, kind in _CORRELATED if anchor in job), "SCF")
    if found == "MP2" and _density_functional(job):
        return "double-hybrid"
    return found


def _density_functional(job: Text) -> bool:
    return " Density Functional     Method          .... DFT" in job


def _energies(job: Text, kind: str) -> list[Energy]:
    """The final energy of each geometry, corrections included; the SCF's own where that is an excited state's."""
    found: list[Energy] = []
    body = job.part(max(job.find("END OF INPUT"), job.start))
    excited = kind == "SCF" and any(anchor in body for anchor in _EXCITED)
    scf = [(s, v) for s in job.spots("Total Energy       :") if (v := numbers(job.rest(s, "Total Energy       :")))]
    if excited or kind != "SCF":
        correction = job.number_after("Dispersion correction  ") or 0.0 if excited else 0.0
        found += [Energy(spot, "SCF", values[0] + correction) for spot, values in scf]
    if not excited:
        for spot in job.spots(_FINAL):
            values = numbers(job.rest(spot, _FINAL))
            if values and "not fully converged" not in job.line(spot).lower():
                found.append(Energy(spot, kind, values[0]))
    return found


def _printed(job: Text) -> tuple[PrintedThermo, ...]:
    spots = job.spots("THERMOCHEMISTRY AT ")
    return tuple(_printed_block(job.part(a, b)) for a, b in zip(spots, [*spots, job.end][1:], strict=True))


def _printed_block(block: Text) -> PrintedThermo:
    temperature = block.number_after("Temperature         ...", last=False)
    pressure = block.number_after("Pressure            ...", last=False)
    electronic = block.number_after("Electronic energy                ...", last=False)
    enthalpy = block.number_after("Total Enthalpy                    ...", last=False)
    entropy = block.number_after("Final entropy term                ...", last=False)
    sigma = re.search(r"Symmetry Number: +(\d+)", block.rest_of_first("Point Group:"))
    per_kelvin = None if entropy is None or not temperature else entropy * HARTREE_KJ_MOL * 1000.0 / temperature
    return PrintedThermo(
        temperature_K=temperature,
        pressure_Pa=None if pressure is None else pressure * ATMOSPHERE_PA,
        symmetry_number=int(sigma.group(1)) if sigma else None,
        zpe_hartree=block.number_after("Zero point energy                ...", last=False),
        enthalpy_correction_hartree=None if enthalpy is None or electronic is None else enthalpy - electronic,
        entropy_J_mol_K=per_kelvin,
    )


def _scan_kind(job: Text) -> Kind | None:
    if "RELAXED SURFACE SCAN" in job or "Relaxed Surface Scan" in job:
        return "relaxed scan"
    if "* Parameter Scan Calculation *" in job or "TRAJECTORY STEP" in job:
        return "rigid scan"
    return None


def _level(job: Text, kind: str) -> Level | None:
    words = _keywords(job).splitlines()
    basis = job.rest_of_first("Your calculation utilizes the basis:")
    method = _method(job, words) if kind in ("SCF", "", "double-hybrid") else _local_prefix(words) + kind
    if not method and not basis and not words:
        return None
    local = {"VWN-5": "VWN5", "VWN-3": "VWN1RPA"}.get(
        job.rest_of_last(" LDA part of GGA corr.  LDAOpt          ...."), ""
    )
    return Level(
        method=method,
        basis=normalise_basis(basis or next((w for w in words if _BASES.match(w) and "/" not in w), "")),
        functional=local if method in ("B3LYP", "B3PW91", "B3P86", "X3LYP", "O3LYP") else "",
        spherical=True,
        frozen_core=_frozen(job, words) if kind not in ("SCF", "") else "",
        core_potential=_core_potential(job),
        dispersion=_dispersion(words),
        solvent=_solvent(job, words),
        program="ORCA",
    )


def _method(job: Text, words: list[str]) -> str:
    """The method among the keywords; ``rks`` says nothing, and HF is only meant when no functional is on."""
    names = [normalise_method(_bare(word)) for word in words if is_method(_bare(word))]
    functional = _density_functional(job)
    named = next((name for name in names if name != "HF"), "")
    return named or ("" if functional else "HF")


def _local_prefix(words: list[str]) -> str:
    """Local and density-fitted variants of correlated methods are methods of their own."""
    for prefix in ("dlpno-", "lpno-", "ri-", "f12-"):
        if any(word.startswith(prefix) and word != "ri-jk" for word in words):
            return prefix.upper()
    return ""


def _solvent(job: Text, words: list[str]) -> str:
    named = next((m for w in words if (m := re.fullmatch(r"(c?pcmc?|smd|cosmo|alpb|ddcosmo)\(([^)]*)\)", w))), None)
    if named:
        return f"{named.group(1).upper()}, {named.group(2)}"
    return "CPCM" if "CPCM SOLVATION MODEL" in job else ""


def _core_potential(job: Text) -> str:
    spot = job.find(" core electrons, lmax=")
    match = re.search(r"ECP (\S+) \(replacing", job.line(spot)) if spot >= 0 else None
    return normalise_basis(match.group(1)) if match else ""


def _bare(word: str) -> str:
    return re.sub(
        r"-(?:d3bj|d3zero|d3|d4|d2)$", "", re.sub(r"^(?:ri|dlpno|lpno|ri-|dlpno-)-?(?=mp2|ccsd|b2)", "", word)
    )


def _dispersion(words: list[str]) -> str:
    for word in words:
        ending = word.rsplit("-", 1)[-1]
        if word in _DISPERSION or (ending in _DISPERSION and is_method(_bare(word)) and not is_method(word)):
            return _DISPERSION[ending]
    return ""


def _frozen(job: Text, words: list[str]) -> str:
    """The core policy of a correlated job: its own line when it prints one, else the keyword."""
    line = _line(job, "Frozen core treatment")
    if "nofrozencore" in words or re.search(r"\bNO\b|none", line):
        return "all"
    electrons = re.search(r"(\d+) el", line)
    if electrons:
        return f"frozen {int(electrons.group(1)) // 2}" if int(electrons.group(1)) else "all"
    return "frozen" if line or "frozencore" in words else ""


def _line(job: Text, anchor: str) -> str:
    spot = job.rfind(anchor)
    return job.line(spot) if spot >= 0 else ""
