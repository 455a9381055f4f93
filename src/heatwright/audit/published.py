"""Against published values at 298.15 K: 1 atm entropies, units of the enthalpy, and the differences themselves.

A species is recognised by its name (in any case) and its composition together, never by its formula alone: isomers
share that.  The values are those of ``data/standard_values.csv`` and of the built-in reference species.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from math import log
from typing import Final

from heatwright.audit.facts import Facts
from heatwright.constants import ATMOSPHERE_PA, BAR_PA, CALORIE_J, GAS_CONSTANT_J_MOL_K
from heatwright.elements import parse_formula
from heatwright.findings import Finding
from heatwright.formation.species_references import SpeciesReference, reference_species
from heatwright.resources import data_rows

ATMOSPHERE_SHIFT: Final = GAS_CONSTANT_J_MOL_K * log(ATMOSPHERE_PA / BAR_PA)
"""By how much S° at 1 atm is below S° at 1 bar, J/mol/K (0.1094)."""
SHIFT_TOLERANCE: Final = 0.025
"""An entropy this close to the shifted value, and not to the unshifted one, looks like 1 atm, J/mol/K."""
CHEMICAL_ACCURACY_KJ: Final = CALORIE_J
"""1 kcal/mol, the usual measure of agreement in enthalpies of formation; common practice, no source."""
ENTROPY_ACCURACY: Final = 2.0
"""The same for S° and Cp° at 298.15 K, J/mol/K; common practice, no source."""
_H_FACTORS: Final = {
    CALORIE_J: "in kcal/mol where kJ/mol belongs, multiplied by 1000/R (kcal taken for kJ)",
    1.0 / CALORIE_J: "multiplied by 4.184 once too often (kJ taken for kcal)",
    1.0 / GAS_CONSTANT_J_MOL_K: "not divided by R (a6 in J/mol where kelvin belong)",
    GAS_CONSTANT_J_MOL_K: "divided by R twice",
    1000.0: "in kJ where J belong",
}
_RATIO_TOLERANCE: Final = 0.02
_LEAST_ENTHALPY_KJ: Final = 20.0


@dataclass(frozen=True, slots=True)
class Standard:
    """Published values of one gas at 298.15 K and 1 bar; None where there is none."""

    name: str
    formula: str
    s298_J_mol_K: float | None
    cp298_J_mol_K: float | None
    source: str
    dHf298_kJ_mol: float | None
    dHf298_source: str
    u95_kJ_mol: float | None = None


@dataclass(frozen=True, slots=True)
class Comparison:
    """One quantity of an entry beside another value of it; ``limit`` is what counts as agreement."""

    name: str
    what: str
    unit: str
    ours: float
    other: float
    limit: float
    source: str

    @property
    def difference(self) -> float:
        """Entry minus the other value."""
        return self.ours - self.other

    @property
    def agrees(self) -> bool:
        """Whether the difference is within the limit."""
        return abs(self.difference) <= self.limit


def standard_of(facts: Facts) -> Standard | None:
    """The published values of an entry's species, or None when it is not in the tables."""
    if not facts.gas or facts.entry.charge:
        return None
    found = _standards().get(facts.entry.name.casefold())
    if found is None or parse_formula(found.formula) != facts.entry.composition:
        return None
    return found


def published_findings(facts: Facts) -> Iterator[Finding]:
    """What published values show without being asked: the pressure of the entropy, the unit of the enthalpy."""
    standard = standard_of(facts)
    if standard is None:
        return
    yield from _one_atmosphere(facts, standard)
    yield from _enthalpy_unit(facts, standard)


def compare_published(facts: Facts) -> tuple[Comparison, ...]:
    """H°, S° and Cp° at 298.15 K beside the published values; S° at the pressure that the entry states (else 1 bar)."""
    standard = standard_of(facts)
    if standard is None:
        return ()
    R = GAS_CONSTANT_J_MOL_K
    found = []
    if standard.dHf298_kJ_mol is not None:
        limit = max(CHEMICAL_ACCURACY_KJ, 2.0 * (standard.u95_kJ_mol or 0.0))
        source = standard.dHf298_source
        found.append(_of(facts, "H°(298.15)", "kJ/mol", facts.h298_kJ_mol, standard.dHf298_kJ_mol, limit, source))
    if standard.s298_J_mol_K is not None:
        ours = (facts.s298_R + _to_bar_R(facts)) * R
        found.append(
            _of(facts, "S°(298.15)", "J/mol/K", ours, standard.s298_J_mol_K, ENTROPY_ACCURACY, standard.source)
        )
    if standard.cp298_J_mol_K is not None:
        ours = facts.cp298_R * R
        limit, source = ENTROPY_ACCURACY, standard.source
        found.append(_of(facts, "Cp°(298.15)", "J/mol/K", ours, standard.cp298_J_mol_K, limit, source))
    return tuple(found)


def difference_findings(facts: Facts, comparisons: tuple[Comparison, ...]) -> Iterator[Finding]:
    """A warning for each comparison that does not agree."""
    for c in comparisons:
        if not c.agrees:
            words = f"{c.what} is {c.ours:.2f} {c.unit}, {c.difference:+.2f} from the published value"
            yield facts.say("warn", "differs-from-published", words, expected=f"{c.other:.2f} ({c.source})")


def _of(facts: Facts, what: str, unit: str, ours: float, other: float, limit: float, source: str) -> Comparison:
    return Comparison(facts.entry.name, what, unit, ours, other, limit, source)


def _to_bar_R(facts: Facts) -> float:
    """What has to be added to the entry's S/R to have it at 1 bar; 1 bar where the entry states no pressure."""
    return log((facts.entry.reference_pressure_Pa or BAR_PA) / BAR_PA)


def _one_atmosphere(facts: Facts, standard: Standard) -> Iterator[Finding]:
    if standard.s298_J_mol_K is None:
        return
    off = (facts.s298_R + _to_bar_R(facts)) * GAS_CONSTANT_J_MOL_K - standard.s298_J_mol_K
    if abs(off + ATMOSPHERE_SHIFT) > SHIFT_TOLERANCE:
        return
    value = f"S°(298.15) is {off:+.3f} J/mol/K from the value at 1 bar, {standard.s298_J_mol_K:.3f} ({standard.source})"
    yield facts.say(
        "note",
        "one-atmosphere",
        f"{value}, so it looks like one at 1 atm",
        expected=f"the same pressure for all entries; 1 atm is {-ATMOSPHERE_SHIFT:.3f} J/mol/K",
    )


def _enthalpy_unit(facts: Facts, standard: Standard) -> Iterator[Finding]:
    right, ours = standard.dHf298_kJ_mol, facts.h298_kJ_mol
    if right is None or abs(right) < _LEAST_ENTHALPY_KJ or abs(ours) < 1.0e-6:
        return
    for factor, what in _H_FACTORS.items():
        if abs(ours * factor / right - 1.0) < _RATIO_TOLERANCE:
            yield facts.say(
                "refuse",
                "unit-mistake",
                f"H°(298.15) is {ours:.2f} kJ/mol, which is the published value {what}",
                expected=f"about {right:.2f} kJ/mol ({standard.dHf298_source})",
                action="Correct a6 of both ranges.",
            )
            return


def _same_species(reference: SpeciesReference, formula: str) -> bool:
    return reference.dHf298_kJ_mol is not None and parse_formula(reference.formula) == parse_formula(formula)


@cache
def _standards() -> dict[str, Standard]:
    """By name and alias in lower case; enthalpies of the reference species where they are in both tables."""
    references = {r.name.casefold(): r for r in reference_species() if r.charge == 0}
    found: dict[str, Standard] = {}
    for row in data_rows("standard_values"):
        reference = references.get(row["name"].casefold())
        newer = reference is not None and _same_species(reference, row["formula"])
        entry = Standard(
            row["name"],
            row["formula"],
            float(row["S298_J_mol_K"]),
            float(row["Cp298_J_mol_K"]),
            row["source"],
            reference.dHf298_kJ_mol if newer and reference else float(row["dHf298_kJ_mol"]),
            reference.source if newer and reference else row["dHf298_source"],
            reference.u95_kJ_mol if newer and reference else None,
        )
        for name in (row["name"], *row["aliases"].split()):
            found.setdefault(name.casefold(), entry)
    for key, r in references.items():
        if r.dHf298_kJ_mol is not None:
            only = Standard(r.name, r.formula, None, None, "", r.dHf298_kJ_mol, r.source, r.u95_kJ_mol)
            found.setdefault(key, only)
    return found
