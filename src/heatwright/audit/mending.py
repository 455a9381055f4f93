"""Mending an entry: the smooth two-range polynomial closest to what it said, with its own H° and S° at 298.15 K.

Which entries: those whose ranges do not meet (a jump that :mod:`heatwright.audit.joint` warns of) and those of which
one range is missing.  The heat capacity is fitted as a new entry's is: two quartics with continuous value and slope,
with the smallest largest deviation from the old ones, each in its own range.  Nothing is extrapolated: where a range is
missing, the new entry ends where the old one did.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from heatwright.audit.facts import KJ_PER_K, Facts
from heatwright.audit.joint import has_kink, is_broken, meeting_temperature_K
from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding, note, refuse
from heatwright.polynomial.common_temperature import common_limits
from heatwright.polynomial.fit import LATEST_START_K, anchored
from heatwright.polynomial.minimax import design, minimax
from heatwright.polynomial.nasa7 import Nasa7, cp_of, h_of, round_coefficient, s_of
from heatwright.reading.entry_file import ThermoEntry

SHOWN_K: Final = (298.15, 500.0, 1000.0, 1500.0, 2000.0, 3000.0)
"""Temperatures at which old and new are shown, those inside the range."""
_POINTS: Final = 400


@dataclass(frozen=True, slots=True)
class Mended:
    """An entry's old and new polynomial.

    said : as the entry stands.   old : the same, with the common temperature at which its ranges meet.
    why : what was wrong, in words.
    dcp_R, dcp_at_K : the largest change of Cp/R within the ranges of the old one, and where.
    bound_R : proven lower bound of that change for any smooth two-range polynomial with this common temperature.
    anchor_K : where H and S are kept: 298.15 K, or the start of a range that starts above 300 K.
    """

    entry: ThermoEntry
    said: Nasa7
    old: Nasa7
    new: Nasa7
    why: str
    dcp_R: float
    dcp_at_K: float
    bound_R: float
    anchor_K: float


def needs_mending(facts: Facts, asked: bool = False) -> str:
    """What is wrong with an entry that mending can put right, in words; empty when nothing is.

    asked : whether the user named the entry; then kinks, single ranges and condensed species count too.  Unasked they
        do not: most published entries have a kink, a single range is a usual form, and what is condensed may really
        jump where it changes its phase.
    """
    entry, p = facts.entry, facts.polynomial
    if entry.ranges in ("low", "high"):
        return f"the {'high' if entry.ranges == 'low' else 'low'} range is missing"
    if entry.ranges == "both" and (facts.gas or asked) and is_broken(p):
        return f"the ranges do not meet at {p.t_common_K:g} K"
    if asked and entry.ranges == "one":
        return "one set of coefficients serves the whole range"
    if asked and has_kink(p):
        return f"Cp has a kink at {p.t_common_K:g} K"
    return ""


def mend_entry(facts: Facts, why: str) -> Mended | Finding:
    """The mended entry, or the finding that says why it cannot be mended."""
    entry, old = facts.entry, facts.polynomial
    if entry.ranges != "both":
        # one quartic on both sides is as smooth as can be; only the text has to say it twice
        return Mended(entry, old, old, old, why, 0.0, old.t_low_K, 0.0, _anchor_K(old))
    elsewhere = meeting_temperature_K(old) if is_broken(old) else None
    source = old if elsewhere is None else replace(old, t_common_K=elsewhere)
    if elsewhere is not None:
        why = f"{why}, but at {elsewhere:g} K"
    fault = _unfit(source)
    if fault:
        return refuse("not-mendable", f"{entry.name}: {fault}", where=f"line {entry.lines[0]}")
    new, bound = _refit(source)
    T, cp_old, cp_new = _both(source, new)
    worst = int(np.abs(cp_new - cp_old).argmax())
    return Mended(
        entry, old, source, new, why, float((cp_new - cp_old)[worst]), float(T[worst]), bound, _anchor_K(source)
    )


def mended_note(mended: Mended) -> Finding:
    """What was done to an entry, as a finding."""
    m = mended
    kept = f"H° and S° at {m.anchor_K:g} K kept, Cp changed by at most {abs(m.dcp_R):.3g} R (at {m.dcp_at_K:.0f} K)"
    return note("mended", f"{m.entry.name}: {m.why}; {kept}", where=f"line {m.entry.lines[0]}")


def shown_values(mended: Mended) -> list[tuple[float, str, float, float]]:
    """Rows of (T in K, quantity with unit, old, new) at :data:`SHOWN_K`."""
    R, old, new = GAS_CONSTANT_J_MOL_K, mended.said, mended.new
    rows = []
    for T in SHOWN_K:
        if T != STANDARD_TEMPERATURE_K and not new.t_low_K <= T <= new.t_high_K:
            continue
        for name, of, factor in (("Cp J/mol/K", "cp_R", R), ("H kJ/mol", "h_R", KJ_PER_K), ("S J/mol/K", "s_R", R)):
            was, now = (float(getattr(p, of)(T, extrapolate=True)) * factor for p in (old, new))
            rows.append((T, name, was, now))
    return rows


def _anchor_K(p: Nasa7) -> float:
    return STANDARD_TEMPERATURE_K if p.t_low_K <= LATEST_START_K else p.t_low_K


def _unfit(p: Nasa7) -> str:
    """Why the temperatures of an entry cannot carry two ranges; empty when they can."""
    lowest, highest = common_limits(p.t_low_K, p.t_high_K)
    if not lowest <= p.t_common_K <= highest:
        return (
            f"the ranges {p.t_low_K:g}-{p.t_common_K:g}-{p.t_high_K:g} K are too narrow to be refitted; expected a "
            f"common temperature of {lowest:g} to {highest:g} K"
        )
    return ""


def _refit(old: Nasa7) -> tuple[Nasa7, float]:
    """The new polynomial with the coefficients that nine digits hold, and the proven lower bound of its change."""
    temperatures = (old.t_low_K, old.t_common_K, old.t_high_K)
    d = design(*temperatures)
    half = d.nodes_K.size // 2
    cp = np.r_[cp_of(old.low, d.nodes_K[:half]), cp_of(old.high, d.nodes_K[half:])]
    best = minimax(d, cp)
    T0 = np.array(STANDARD_TEMPERATURE_K)
    h298, s298 = float(h_of(old.low, T0)), float(s_of(old.low, T0))
    new = anchored(best.coefficients, temperatures, h298, s298, rounding=round_coefficient)
    if _anchor_K(old) != STANDARD_TEMPERATURE_K:
        # 298.15 K is outside the range: the values at its start count instead
        Ta = np.array(_anchor_K(old))
        h298 += float(h_of(old.low, Ta) - h_of(new.low, Ta))
        s298 += float(s_of(old.low, Ta) - s_of(new.low, Ta))
        new = anchored(best.coefficients, temperatures, h298, s298, rounding=round_coefficient)
    return new, best.lower_bound


def _both(old: Nasa7, new: Nasa7) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Temperatures of both ranges with old and new Cp/R; at the common temperature each range by its own."""
    low = np.linspace(old.t_low_K, old.t_common_K, _POINTS)
    high = np.linspace(old.t_common_K, old.t_high_K, _POINTS)
    cp_old = np.r_[cp_of(old.low, low), cp_of(old.high, high)]
    return np.r_[low, high], cp_old, np.r_[cp_of(new.low, low), cp_of(new.high, high)]
