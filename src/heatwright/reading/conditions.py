"""What the molecule was in and under when it was computed: solvent, fields, constraints, excited states, spin, scale.

A gas-phase molecule at its unconstrained minimum in its ground state is what a partition function is of; every other
condition that an output names is a finding.  Each program says these things by lines of its own, or only in the input
that it echoes; :data:`SIGNS` has one row for each.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final, Literal

from heatwright.findings import Finding, note, refuse, warn
from heatwright.reading.text import Text, number, numbers

if TYPE_CHECKING:
    from heatwright.molecule import Molecule
    from heatwright.reading.jobs import Choice

Condition = Literal["solvent", "external-field", "constraints", "excited-state"]


@dataclass(frozen=True, slots=True)
class Sign:
    """How one program shows one condition.

    lines : texts in the output, any of them enough.
    count : texts followed by a number; the condition holds when it is not zero.
    echo : a pattern in the echoed input (lower case, comments removed).
    """

    program: str
    condition: Condition
    lines: tuple[str, ...] = ()
    count: tuple[str, ...] = ()
    echo: str = ""


SIGNS: Final = (
    Sign("GAMESS", "solvent", lines=("INPUT FOR PCM SOLVATION CALCULATION",), echo=r"\$pcm\b"),
    Sign("MOPAC", "solvent", lines=("USE ANDREAS KLAMT'S COSMO",)),
    Sign(
        "NWChem",
        "external-field",
        lines=("Bq Structure Information", "Bq nuclear interaction energy", "Applied E-field = ("),
    ),
    Sign("MOPAC", "external-field", lines=("AN EXTERNAL ELECTRIC FIELD IS TO BE USED", "THE ELECTRIC FIELD IS ")),
    Sign(
        "xTB",
        "external-field",
        lines=("PC potential                     true", "wallpotenial with", "wallpotential with"),
        echo=r"--efield\b",
    ),
    Sign(
        "Gaussian",
        "external-field",
        lines=("The following finite field(s) will be applied", "Background charge distribution read from input"),
        echo=r"\bfield\s*=|(?:^|\s)charge(?:=\S+)?(?:\s|$)",
    ),
    Sign("ORCA", "external-field", echo=r"%\s*pointcharges\b|\befield\b"),
    Sign("Q-Chem", "external-field", echo=r"\$external_charges\b|\$multipole_field\b"),
    Sign(
        "Psi4",
        "external-field",
        lines=("External Potential Field:", "  Perturbing V by "),
        echo=r"\bperturb_h\s+(?:true|1|yes|on)|\bexternal_potentials\s*=|['\"]extern['\"]",
    ),
    Sign("GAMESS", "external-field", echo=r"\$efield\b|\$efrag\b"),
    Sign(
        "NWChem",
        "constraints",
        lines=("fixed atoms     ", "adding spring #"),
        count=("Number of frozen variables =",),
    ),
    Sign(
        "xTB",
        "constraints",
        lines=("constraining bond ", "constraining angle ", "atoms frozen in Hessian calc."),
        count=(":: add. restraining  ",),
    ),
    Sign(
        "Gaussian",
        "constraints",
        lines=("Frozen                 !", "frozen, calculate D2E"),
        echo=r"\bfreeze|\bphess|\boniom\b",
    ),
    Sign(
        "ORCA",
        "constraints",
        echo=r"^[ \t]*constraints\b|\{\s*[badc]\s[^}]*\bc\s*\}|\b(?:partial|hybrid)_hess\b|%geom\s+constraints\b",
    ),
    Sign("Q-Chem", "constraints", echo=r"\$opt\b.*?\b(?:constraint|fixed)\b.*?\$end|^[ \t]*phess[ \t=]+[1-9t]"),
    Sign(
        "Psi4",
        "constraints",
        echo=r"\b(?:frozen|fixed|ranged)_(?:distance|bend|dihedral|cartesian)\b|\bfreeze_list\b|\bfreeze_intrafrag\b",
    ),
    Sign("GAMESS", "constraints", echo=r"\bifreez\b|\biactat\b"),
    Sign("NWChem", "excited-state", lines=("NWChem TDDFT Gradient Module",)),
    Sign(
        "MOPAC",
        "excited-state",
        lines=("FIRST EXCITED STATE IS TO BE OPTIMIZED", *(f'CALCULATION, ROOT "{n}"' for n in range(2, 10))),
    ),
    Sign("Gaussian", "excited-state", lines=("This state for optimization and/or second-order correction.",)),
    Sign("ORCA", "excited-state", lines=("ORCA TD-DFT", "TD-DFT EXCITED STATES", "CIS EXCITED STATES", "EOM-CCSD")),
    Sign("Q-Chem", "excited-state", echo=r"^[ \t]*(?:cis_state_deriv|cis_n_roots|ee_states)[ \t=]+[\[1-9]"),
    Sign("Psi4", "excited-state", echo=r"\beom-cc"),
    Sign("GAMESS", "excited-state", echo=r"\btddft\s*=\s*excite|\bcityp\s*=\s*(?:cis|sfcis)\b"),
)
"""Every sign of a condition that is known, a row for each program (the level of theory names most solvents)."""

_SPIN: Final = {
    "Gaussian": "S**2 before annihilation",
    "ORCA": "Expectation value of <S**2>",
    "Q-Chem": "<S^2> =",
    "Psi4": "@S^2 Observed:",
    "Jaguar": "<S**2> ...",
}
_NWCHEM_SPIN: Final = ("      <S2> =", "                      S^2 =")
_SCALES: Final = {
    "NWChem": "frequency scaling parameter",
    "Gaussian": "frequencies scaled by",
    "GAMESS": "ALL FREQUENCIES ARE SCALED BY",
    "Firefly": "ALL FREQUENCIES ARE SCALED BY",
    "ORCA": "Scaling factor for frequencies =",
    "xTB": ":  scaling factor  ",
}
_ELECTRONIC: Final = {
    "Psi4": ("Total E0, Electronic energy at well bottom at 0 [K]", 2e-8),
    "ORCA": ("Electronic energy                ...", 2e-8),
}
CONTAMINATION: Final = 0.1
"""Deviation of ⟨S²⟩ from S(S+1) above which it is said (common practice, no source)."""
_USUAL_K: Final = 298.15
_USUAL_PA: Final = (101325.0, 1.0e5)


def conditions(m: Molecule, choice: Choice) -> tuple[Finding, ...]:
    """Everything in the text of the job (and of the optimisation before it) that is not a free molecule by itself."""
    found: list[Finding] = []
    if m.level is not None and m.level.solvent:
        found.append(_refusal("solvent", choice.job, -1, m.level.solvent))
    for sign in SIGNS:
        if sign.program not in (m.source.program, _FAMILY.get(m.source.program)):
            continue
        if sign.condition in ("constraints", "excited-state") and not m.wavenumbers_cm1.size:
            continue  # a point of a scan is constrained on purpose; a list of excitations leaves the ground state alone
        for text in choice.related if sign.condition == "constraints" else (choice.job,):
            shown = _shown(sign, text)
            if shown is not None:
                found.append(_refusal(sign.condition, text, *shown))
                break
    one_each = {finding.code: finding for finding in reversed(found)}
    return (*one_each.values(), *_spin(m, choice.job), *_job_conditions(m), *_energy_elsewhere(m, choice.job))


_FAMILY: Final = {"Firefly": "GAMESS"}

_WORDS: Final[dict[Condition, tuple[str, str, str]]] = {
    "solvent": (
        "the molecule was computed in a continuum solvent",
        "Compute it in the gas phase, or accept the solvent with --accept solvent.",
        "a molecule in the gas phase",
    ),
    "external-field": (
        "the molecule was computed in an external field or among point charges",
        "Compute it alone, or accept the field with --accept field.",
        "a free molecule",
    ),
    "constraints": (
        "atoms were frozen or coordinates constrained before or while the modes were computed",
        "Optimise without constraints first, or accept them with --accept constraints.",
        "an unconstrained minimum",
    ),
    "excited-state": (
        "geometry and modes are those of an excited electronic state",
        "Compute the ground state, or accept the state with --accept excited-state.",
        "the electronic ground state",
    ),
}


def _refusal(condition: Condition, text: Text, spot: int, shown: str) -> Finding:
    words, action, expected = _WORDS[condition]
    where = text.where(spot) if spot >= 0 else ""
    return refuse(condition, f"{words} ({shown})", where=where, expected=expected, action=action)


def _shown(sign: Sign, text: Text) -> tuple[int, str] | None:
    """Where the sign stands (-1 for the echoed input) and its words, or None when it is not there."""
    for line in sign.lines:
        spot = text.find(line, _body(sign.program, text))
        if spot >= 0:
            return spot, " ".join(text.line(spot).split())[:80].strip("- !")
    for line in sign.count:
        spot = text.rfind(line)
        if spot >= 0 and (numbers(text.rest(spot, line)) or [0.0])[0] > 0.0:
            return spot, " ".join(text.line(spot).split())
    match = re.search(sign.echo, echoed_input(sign.program, text), _FLAGS) if sign.echo else None
    return (-1, f"input: {' '.join(match.group(0).split())[:60]}") if match else None


def _body(program: str, text: Text) -> int:
    """Where the output proper starts: ORCA names everything it can do in its credits."""
    return max(text.find("END OF INPUT"), text.start) if program == "ORCA" else text.start


_FLAGS: Final = re.MULTILINE | re.DOTALL
_ECHO: Final = {
    "ORCA": ("INPUT FILE", "END OF INPUT", "#"),
    "Q-Chem": ("User input:", "Standard Nuclear Orientation", "!"),
    "Psi4": ("==> Input File <==", "\n---", "#"),
    "GAMESS": ("ECHO OF THE FIRST FEW INPUT CARDS", "BASIS OPTIONS", "!"),
    "Gaussian": ("\n #", "\n ---", ""),
    "xTB": ("program call  ", "\n", "#"),
}
"""Where each program echoes its input, where the echo ends, and what starts a comment in it."""
_LONGEST_ECHO: Final = 50000


def echoed_input(program: str, text: Text) -> str:
    """The input as the output repeats it, lower case and without comments; empty when it does not."""
    if program not in _ECHO:
        return ""
    opening, closing, comment = _ECHO[program]
    whole = Text.of(text.whole) if program in ("Psi4", "ORCA") else text
    start = whole.find(opening)
    if start < 0:
        return ""
    first = start + len(opening)
    if program == "Psi4":  # rules stand above and below the input
        first = max(whole.find(closing, first), first) + len(closing)
    end = whole.find(closing, first)
    limit = min(start + _LONGEST_ECHO, whole.end)
    lines = whole.whole[first : min(end, limit) if end >= 0 else limit].lower().splitlines()
    if program == "ORCA":
        lines = [line.split(">", 1)[-1] for line in lines]
    if program == "Gaussian":
        return "".join(line[1:] for line in lines)
    return "\n".join(line.split(comment)[0] for line in lines)


def _spin(m: Molecule, job: Text) -> list[Finding]:
    """Contamination of an unrestricted wavefunction, from the last ⟨S²⟩ that is printed."""
    observed = _spin_squared(m.source.program, job)
    if observed is None or not m.multiplicity:
        return []
    s = (m.multiplicity - 1) / 2.0
    if abs(observed - s * (s + 1.0)) <= CONTAMINATION:
        return []
    action = "Energy, geometry and modes are those of a mixture of spin states; another reference may be needed."
    words = f"⟨S²⟩ is {observed:.3f}, the spin state is contaminated"
    return [warn("spin-contamination", words, expected=f"{s * (s + 1.0):.3f} for S = {s:g}", action=action)]


def _spin_squared(program: str, job: Text) -> float | None:
    if program == "NWChem":
        spot = max(job.rfind(anchor) for anchor in _NWCHEM_SPIN)
        values = numbers(job.line(spot)) if spot >= 0 else []
        return values[0] if values else None
    anchor = _SPIN.get(program)
    return job.number_after(anchor) if anchor else None


def _job_conditions(m: Molecule) -> list[Finding]:
    """A temperature or pressure of the job's own; its printed values are then for other conditions."""
    temperatures = [p.temperature_K for p in m.printed if p.temperature_K is not None]
    pressures = [p.pressure_Pa for p in m.printed if p.pressure_Pa is not None]
    odd: list[str] = []
    if temperatures and not any(abs(t - _USUAL_K) < 0.2 for t in temperatures):
        odd.append(", ".join(f"{t:g} K" for t in temperatures[:4]))
    if any(min(abs(p / usual - 1.0) for usual in _USUAL_PA) > 1e-3 for p in pressures):
        odd.append(f"{pressures[0]:g} Pa")
    if not odd:
        return []
    action = "It is not used: temperatures and pressure are those of the command."
    return [note("job-conditions", f"the job's own thermochemistry is for {' and '.join(odd)}", action=action)]


def _energy_elsewhere(m: Molecule, job: Text) -> list[Finding]:
    """The electronic energy that the program's thermochemistry prints must be the one in use."""
    stated, tolerance = _electronic_energy(m.source.program, job)
    if stated is None or m.energy_hartree is None or not m.wavenumbers_cm1.size or m.is_atom:
        return []
    if abs(stated - m.energy_hartree) <= tolerance:
        return []
    words = f"no energy in the output is the one that its thermochemistry names ({stated:.8f} hartree)"
    action = "The energy belongs to another geometry, or the output was changed."
    return [refuse("geometry-differs", words, expected=f"{m.energy_hartree:.8f}", action=action)]


def _electronic_energy(program: str, job: Text) -> tuple[float | None, float]:
    if program == "Gaussian":
        total = job.number_after("Sum of electronic and zero-point Energies=")
        zpe = job.number_after("Zero-point correction=")
        return (None if total is None or zpe is None else total - zpe), 2.1e-6
    anchor, tolerance = _ELECTRONIC.get(program, ("", 0.0))
    return (job.number_after(anchor) if anchor else None), tolerance


def stated_scale(program: str, job: Text) -> float | None:
    """The factor by which the program says it scaled wavenumbers, or None when it says nothing."""
    anchor = _SCALES.get(program)
    if anchor is None or anchor not in job:
        return None
    values = [number(word.rstrip(".")) for word in job.rest_of_last(anchor).replace("=", " ").split()]
    return next((value for value in values if value is not None), None)
