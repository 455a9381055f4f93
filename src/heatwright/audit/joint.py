"""Do the two ranges meet at the common temperature: Cp, H, S and dCp/dT, against what others stop at.

Thresholds, each relative (Cp: to Cp; H/T: to Cp; S: to S + Cp), with their sources:

- Cantera 3.2.0 warns at load from 1 % in Cp, 0.1 % in H and 0.1 % in S (its behaviour, found by bisection).
- A flow solver finds T from H by Newton's method to a relative tolerance of 1e-4 in T (OpenFOAM's default, from
  memory); where H jumps by more than 1e-4 Cp T there are enthalpies without a temperature, or with two, and the
  iteration need not end.  0.1 % in Cp and 0.01 % in S beside it are common practice, without a source.
- Below 1e-5 in Cp/R, H/RT and S/R a jump is the rounding of the fields.
- A kink: published fits are rarely smooth (median relative jump of T dCp/dT 3 % in TM-4513); one of half of Cp is seen
  by stiff integrators (common practice, without a source).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

import numpy as np

from heatwright.audit.facts import KJ_PER_K, Facts
from heatwright.findings import Finding, Severity
from heatwright.polynomial.nasa7 import Nasa7, cp_of, h_of, s_of
from heatwright.polynomial.quality import jumps_at_common

ROUNDING_R: Final = 1.0e-5
FLOW: Final = {"cp": 1.0e-3, "h": 1.0e-4, "s": 1.0e-4}
COMBUSTION: Final = {"cp": 1.0e-2, "h": 1.0e-3, "s": 1.0e-3}
GROSS: Final = 10.0
"""From this times the threshold of combustion codes on, an entry cannot be used."""
ELSEWHERE_FROM: Final = 1.0e-3
"""A relative jump from which on another meeting temperature is looked for."""
MEETS: Final = 1.0e-5
"""Relative jumps below which two ranges meet: published ones do within 7e-6 (TM-4513)."""
KINK_SEEN: Final = 1.0e-3
KINK_LARGE: Final = 0.5
_SEARCH_STEP_K: Final = 1.0


@dataclass(frozen=True, slots=True)
class Jump:
    """A jump at the common temperature: what (``cp``, ``h``, ``s``), in R units, and relative to its scale."""

    what: str
    size_R: float
    relative: float

    @property
    def severity(self) -> Severity | None:
        """None within the rounding of the fields."""
        if abs(self.size_R) <= ROUNDING_R:
            return None
        if self.relative <= FLOW[self.what]:
            return "note"
        return "warn" if self.relative <= GROSS * COMBUSTION[self.what] else "refuse"


def jumps(polynomial: Nasa7) -> tuple[Jump, ...]:
    """The jumps of Cp/R, H/RT and S/R at the common temperature, high minus low."""
    T = polynomial.t_common_K
    found = jumps_at_common(polynomial)
    cp = abs(float(cp_of(polynomial.low, np.array(T)))) + 1.0e-4
    s = abs(float(s_of(polynomial.low, np.array(T))))
    h_RT = found.h_R_K / T
    return (
        Jump("cp", found.cp_R, abs(found.cp_R) / cp),
        Jump("h", h_RT, abs(h_RT) / cp),
        Jump("s", found.s_R, abs(found.s_R) / (s + cp)),
    )


def is_broken(polynomial: Nasa7) -> bool:
    """Whether a jump is large enough to matter to a code that uses the entry."""
    return any(jump.severity in ("warn", "refuse") for jump in jumps(polynomial))


def has_kink(polynomial: Nasa7) -> bool:
    """Whether dCp/dT jumps by more than rounding."""
    return abs(_kink_size(polynomial)) > KINK_SEEN


def _kink_size(p: Nasa7) -> float:
    """The jump of dCp/dT times T/Cp."""
    cp = float(cp_of(p.low, np.array(p.t_common_K)))
    return jumps_at_common(p).dcp_R_K * p.t_common_K / max(abs(cp), 1.0e-4)


def joint_findings(facts: Facts) -> Iterator[Finding]:
    """What is to be said about the joint of the two ranges."""
    p = facts.polynomial
    if facts.entry.ranges != "both" or p.low == p.high:
        return
    found = [(jump, jump.severity) for jump in jumps(p)]
    broken = any(severity in ("warn", "refuse") for _, severity in found)
    far = any(jump.relative > ELSEWHERE_FROM for jump, _ in found)
    for jump, severity in found:
        if severity is not None:
            yield facts.say(severity, _CODE[jump.what], _words(p, jump), action=_action(facts, jump, severity))
    if far:
        yield from _elsewhere(facts)
    if not broken:
        yield from _kink(facts)


_CODE: Final = {"cp": "jump-cp", "h": "jump-h", "s": "jump-s"}


def _words(p: Nasa7, jump: Jump) -> str:
    at = f"at {p.t_common_K:g} K"
    if jump.what == "cp":
        return f"Cp jumps by {jump.size_R:+.3g} R ({_percent(jump)}) {at}"
    if jump.what == "s":
        return f"S jumps by {jump.size_R:+.3g} R ({_percent(jump)} of S + Cp) {at}"
    kelvin = jump.relative * p.t_common_K
    return f"H jumps by {jump.size_R * p.t_common_K * KJ_PER_K:+.3g} kJ/mol (worth {kelvin:.2g} K of Cp) {at}"


def _percent(jump: Jump) -> str:
    return f"{100.0 * jump.relative:.2g} %"


def _action(facts: Facts, jump: Jump, severity: Severity) -> str:
    if severity == "note" or not facts.gas:
        return ""
    if jump.relative > COMBUSTION[jump.what]:
        return f"Combustion codes complain from {100.0 * COMBUSTION[jump.what]:g} % on; `heatwright mend` refits it."
    if jump.what == "h":
        return "Flow solvers that find T from H may not converge across it; `heatwright mend` refits it."
    return "More than rounding; `heatwright mend` refits it."


def _kink(facts: Facts) -> Iterator[Finding]:
    p = facts.polynomial
    size = _kink_size(p)
    if abs(size) > KINK_SEEN:
        severity: Severity = "warn" if abs(size) > KINK_LARGE else "note"
        words = f"dCp/dT jumps by {size:+.2g} Cp/T at {p.t_common_K:g} K (Cp has a kink there)"
        action = (
            "Stiff integrators see it; `heatwright mend --only NAME` makes it smooth." if severity == "warn" else ""
        )
        yield facts.say(severity, "jump-slope", words, action=action)


def _elsewhere(facts: Facts) -> Iterator[Finding]:
    p = facts.polynomial
    at = meeting_temperature_K(p)
    if at is not None:
        yield facts.say(
            "warn",
            "meets-elsewhere",
            f"the two ranges meet at {at:g} K, not at the common temperature, {p.t_common_K:g} K",
            action="The common temperature is wrong, or a blank one was filled with another default; "
            "`heatwright mend` puts it right.",
        )


def meeting_temperature_K(polynomial: Nasa7) -> float | None:
    """The temperature (whole kelvin) at which all three functions meet although they do not where they should."""
    p = polynomial
    T = np.arange(np.ceil(p.t_low_K) + 1.0, np.floor(p.t_high_K), _SEARCH_STEP_K)
    if not T.size:
        return None
    cp, s = np.abs(cp_of(p.low, T)) + 1.0e-4, np.abs(s_of(p.low, T))
    d_cp = np.abs(cp_of(p.high, T) - cp_of(p.low, T)) / cp
    d_h = np.abs(h_of(p.high, T) - h_of(p.low, T)) / T / cp
    d_s = np.abs(s_of(p.high, T) - s_of(p.low, T)) / (s + cp)
    worst = np.maximum(np.maximum(d_cp, d_h), d_s)
    best = int(np.argmin(worst))
    return float(T[best]) if worst[best] < MEETS else None
