"""Is an entry possible at all: its heat capacity, entropy and enthalpy against what its atoms allow.

Bounds that are not plain physics were taken from the 748 gases of NASA TM-4513 as shipped with Cantera 3.2.0 (and
GRI-Mech 3.0), so that 98 % of them or more are inside; what lies outside is worth a look, also there.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Final

import numpy as np

from heatwright.audit.facts import Facts
from heatwright.constants import CALORIE_J, GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding, Severity
from heatwright.formation.references import atom_references
from heatwright.polynomial.plausibility import least_cp_R

ABOVE_LIMIT: Final = {1: 3.5, 2: 1.8, 3: 1.10}
"""Cp may be this times the classical limit (by number of atoms, the last one for all larger ones): electronic levels of
atoms and diatomics, anharmonicity."""
BELOW_LEAST: Final = 0.95
FALL_SEEN: Final = 0.01
FALL_LARGE: Final = 0.05
"""Falls of Cp with temperature, as fractions of Cp, that vibrations do not make."""
QUANTUM_ROTATION_K: Final = 200.0
"""Below it light molecules have less than the classical Cp of rotation; H2 up to 400 K."""
HOT_K: Final = 2000.0
NEARLY_CLASSICAL: Final = 0.6
"""A range that reaches 2000 K has at least this much of the classical limit at its end; asked only where a factor
between units would explain what is impossible otherwise."""
LEAST_CP298: Final = 0.2
"""Cp at 298.15 K as a fraction of the classical limit."""
EARLIEST_USUAL_K: Final = 300.0
LEAST_USEFUL_END_K: Final = 2500.0
"""Flames reach this; common practice, no source."""
ELEMENT_ZERO_KJ: Final = (0.02, 0.1)
"""H°(298.15) of an element up to which nothing is said, and up to which it is a note, kJ/mol (rounding of old fits)."""
ATOMIZATION_KJ: Final = (100.0, 1100.0)
"""Bounds of the energy of atomization at 298.15 K per atom but one, kJ/mol; two atoms may have less."""
STATED_ENTHALPY_K: Final = 0.5
"""The enthalpy printed after the coefficients may differ by this and 0.1 %, K."""
_UNITS: Final = {
    GAS_CONSTANT_J_MOL_K: "J/mol/K, R times too large",
    GAS_CONSTANT_J_MOL_K / CALORIE_J: "cal/mol/K, 1.987 times too large",
    1.0 / GAS_CONSTANT_J_MOL_K: "a factor R too small",
    CALORIE_J / GAS_CONSTANT_J_MOL_K: "a factor 1.987 too small",
}
_DIATOMIC_ELEMENTS: Final = frozenset({"H", "D", "T", "N", "O", "F", "Cl"})
_NOBLE: Final = frozenset({"He", "Ne", "Ar", "Kr", "Xe", "Rn"})


def physics_findings(facts: Facts) -> Iterator[Finding]:
    """What is to be said about the values of one entry."""
    yield from _range(facts)
    yield from _positive(facts)
    if facts.gas:
        wrong_units = _units(facts)
        if wrong_units is not None:
            yield wrong_units
        else:
            yield from _above_and_below(facts)
            yield from _falls(facts)
            yield from _at_298(facts)
        yield from _element(facts)
        yield from _atomization(facts)
    yield from _stated_enthalpy(facts)


def _range(facts: Facts) -> Iterator[Finding]:
    p = facts.polynomial
    if p.t_low_K > STANDARD_TEMPERATURE_K:
        late = facts.gas and p.t_low_K > EARLIEST_USUAL_K
        words = f"the range starts at {p.t_low_K:g} K, above 298.15 K"
        action = "Its enthalpy of formation lies outside its range." if late else ""
        yield facts.say("warn" if late else "note", "range-start", words, action=action)
    if facts.gas and p.t_high_K < LEAST_USEFUL_END_K:
        words = f"the range ends at {p.t_high_K:g} K"
        yield facts.say("note", "range-end", words, expected=f"at least {LEAST_USEFUL_END_K:g} K for flames")


def _positive(facts: Facts) -> Iterator[Finding]:
    lowest = int(facts.cp_R.argmin())
    if facts.cp_R[lowest] <= 0.0:
        words = f"Cp/R is {facts.cp_R[lowest]:.4g} at {facts.T_K[lowest]:g} K"
        yield facts.say("refuse", "cp-not-positive", words, expected="a positive heat capacity over the whole range")


def _above_limit(atoms: float) -> float:
    return ABOVE_LIMIT[min(int(atoms), 3)]


def _above_and_below(facts: Facts) -> Iterator[Finding]:
    highest, lowest = int(facts.cp_R.argmax()), int(facts.cp_R.argmin())
    ratio, margin = float(facts.cp_R[highest]) / facts.limit_R, _above_limit(facts.atoms)
    if ratio > margin:
        severity: Severity = "refuse" if ratio > 2.0 * margin else "warn"
        words = f"Cp/R reaches {facts.cp_R[highest]:.4g} at {facts.T_K[highest]:g} K"
        yield facts.say(
            severity,
            "cp-above-classical",
            words,
            expected=f"at most {margin:g} times the classical limit of its atoms, {facts.limit_R:g}",
            action="Check coefficients, composition and the end of the range.",
        )
    warm = _least_from_K(facts) <= facts.T_K
    if facts.cp_R[lowest] > 0.0 and warm.any() and facts.cp_R[warm].min() < BELOW_LEAST * least_cp_R(facts.atoms):
        at = int(facts.cp_R[warm].argmin())
        words = f"Cp/R is {facts.cp_R[warm][at]:.4g} at {facts.T_K[warm][at]:g} K"
        expected = f"at least {least_cp_R(facts.atoms):g}, of translation and rotation"
        yield facts.say("warn", "cp-below-least", words, expected=expected)


def _least_from_K(facts: Facts) -> float:
    hydrogen = facts.atoms == 2 and set(facts.entry.composition) <= {"H", "D", "T", "E"}
    return 2.0 * QUANTUM_ROTATION_K if hydrogen else QUANTUM_ROTATION_K


def _falls(facts: Facts) -> Iterator[Finding]:
    """Vibrations of three atoms and more only ever raise Cp; atoms and diatomics may pass over electronic levels."""
    if facts.atoms < 3:
        return
    peak = np.maximum.accumulate(facts.cp_R)
    falls = (peak - facts.cp_R) / np.maximum(peak, 1.0e-4)
    at = int(falls.argmax())
    deepest = float(falls[at])
    if deepest > FALL_SEEN:
        severity: Severity = "warn" if deepest > FALL_LARGE else "note"
        words = f"Cp falls by {100.0 * deepest:.2g} % towards {facts.T_K[at]:g} K"
        action = "Vibrations do not do that; low electronic levels and torsions may, a little."
        yield facts.say(severity, "cp-falls", words, expected="Cp to rise with temperature", action=action)


def _at_298(facts: Facts) -> Iterator[Finding]:
    if facts.polynomial.t_low_K > EARLIEST_USUAL_K:
        return
    least, most = facts.entropy_bounds_R
    if not least <= facts.s298_R <= most:
        R = GAS_CONSTANT_J_MOL_K
        words = f"S°(298.15) is {facts.s298_R * R:.1f} J/mol/K"
        expected = f"{least * R:.0f} to {most * R:.0f} for its mass and {_atoms(facts)}"
        yield facts.say("warn", "entropy-implausible", words, expected=expected, action="Check a7 and the composition.")
    if facts.atoms >= 3 and facts.cp298_R < LEAST_CP298 * facts.limit_R:
        words = f"Cp°(298.15)/R is {facts.cp298_R:.3g}"
        expected = f"at least {LEAST_CP298 * facts.limit_R:.3g} for {_atoms(facts)}"
        yield facts.say("warn", "cp-implausible", words, expected=expected, action="Check a1 to a5 of the low range.")


def _atoms(facts: Facts) -> str:
    return f"{facts.atoms:g} atom{'' if facts.atoms == 1 else 's'}"


def _units(facts: Facts) -> Finding | None:
    """Cp and S are out of every bound as they stand, and inside when divided by one factor."""
    if _possible(facts, 1.0):
        return None
    highest, lowest = float(facts.cp_R.max()) / facts.limit_R, float(facts.cp_R.min()) / least_cp_R(facts.atoms)
    for factor, unit in _UNITS.items():
        shows = highest > 1.5 if factor > 1.0 else lowest < 0.8
        classical = facts.polynomial.t_high_K < HOT_K or highest / factor > NEARLY_CLASSICAL
        if shows and classical and _possible(facts, factor):
            return facts.say(
                "refuse",
                "unit-mistake",
                f"Cp and S are impossible as they stand, and right when divided by {factor:.4g}: {unit}",
                expected="coefficients of Cp/R, H/RT and S/R",
                action="Divide all fourteen coefficients by the factor.",
            )
    return None


def _possible(facts: Facts, factor: float) -> bool:
    cp, s = facts.cp_R / factor, facts.s298_R / factor
    least, most = facts.entropy_bounds_R
    warm = cp[_least_from_K(facts) <= facts.T_K]
    low_enough = float(cp.max()) <= _above_limit(facts.atoms) * facts.limit_R
    high_enough = float(warm.min() if warm.size else cp.min()) >= BELOW_LEAST * least_cp_R(facts.atoms)
    return low_enough and high_enough and least <= s <= most and facts.cp298_R / factor >= LEAST_CP298 * facts.limit_R


def reference_element(facts: Facts) -> bool:
    """Whether the entry is an element as gas in its reference state, by composition and name."""
    atoms = {s: n for s, n in facts.entry.composition.items() if s != "E"}
    if len(atoms) != 1 or facts.entry.charge:
        return False
    ((symbol, n),) = atoms.items()
    diatomic = n == 2 and symbol in _DIATOMIC_ELEMENTS
    plain = facts.entry.name.casefold() == (f"{symbol}2" if diatomic else symbol).casefold()
    return plain and (diatomic or (n == 1 and symbol in _NOBLE))


def _element(facts: Facts) -> Iterator[Finding]:
    if not reference_element(facts) or abs(facts.h298_kJ_mol) <= ELEMENT_ZERO_KJ[0]:
        return
    words = f"H°(298.15) of this element is {facts.h298_kJ_mol:.3f} kJ/mol"
    declared = facts.declared_kJ_mol is not None and abs(facts.declared_kJ_mol - facts.h298_kJ_mol) < 0.01
    if declared:
        words += ", as the comment above it declares (computed)"
    severity: Severity = "note" if declared or abs(facts.h298_kJ_mol) <= ELEMENT_ZERO_KJ[1] else "warn"
    expected = "zero, which defines the scale of all enthalpies of formation"
    yield facts.say(severity, "element-enthalpy", words, expected=expected)


def _atomization(facts: Facts) -> Iterator[Finding]:
    """The energy that holds the molecule together; a unit or sign gone wrong in a6 shows here."""
    references = atom_references()
    composition = facts.entry.composition
    if facts.atoms < 2 or facts.entry.charge or any(symbol not in references for symbol in composition):
        return
    atoms_kJ = sum(
        n * (references[s].dHf0_kJ_mol + 2.5 * GAS_CONSTANT_J_MOL_K * STANDARD_TEMPERATURE_K / 1000.0
             - references[s].element_H298_H0_kJ_mol)
        for s, n in composition.items()
    )  # fmt: skip
    each = (atoms_kJ - facts.h298_kJ_mol) / (facts.atoms - 1.0)
    least, most = ATOMIZATION_KJ
    if facts.atoms < 3:
        least = 0.0
    if not least <= each <= most:
        words = f"H°(298.15) is {facts.h298_kJ_mol:.1f} kJ/mol, {each:.0f} kJ/mol below its atoms for each atom but one"
        expected = f"{least:g} to {most:g} kJ/mol"
        action = "Check a6 and its unit (kelvin: H divided by R) and the composition."
        yield facts.say("warn", "enthalpy-implausible", words, expected=expected, action=action)


def _stated_enthalpy(facts: Facts) -> Iterator[Finding]:
    stated = facts.entry.stated_h298_K
    if stated is None:
        return
    ours = facts.h298_kJ_mol * 1000.0 / GAS_CONSTANT_J_MOL_K
    if abs(stated - ours) > STATED_ENTHALPY_K + 1.0e-3 * abs(stated):
        words = f"H°(298.15)/R printed after the coefficients is {stated:.2f} K, that of the coefficients {ours:.2f} K"
        yield facts.say("warn", "stated-enthalpy", words, action="One of the two is wrong.")
