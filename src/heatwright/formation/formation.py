"""Formation: an enthalpy of formation with how it was reached, and the conversion between 0 K and 298.15 K."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from math import isfinite
from typing import Final, Literal

from heatwright.constants import CALORIE_J, EV_KJ_MOL, GAS_CONSTANT_J_MOL_K, HARTREE_KJ_MOL, STANDARD_TEMPERATURE_K
from heatwright.errors import UsageError
from heatwright.findings import Finding, note
from heatwright.formation.references import AtomReference, atom_reference

KJ_MOL_PER_UNIT = {
    "kJ/mol": 1.0,
    "J/mol": 1.0e-3,
    "kcal/mol": CALORIE_J,
    "cal/mol": CALORIE_J / 1000.0,
    "eV": EV_KJ_MOL,
    "hartree": HARTREE_KJ_MOL,
}
"""The energy units an enthalpy may be given in, each in kJ/mol."""


Electron = Literal["thermal", "stationary"]
"""The convention for the electron that an ion's enthalpy of formation at other temperatures than 0 K depends on."""
ELECTRON_TEXT: Final[dict[Electron, str]] = {
    "thermal": "thermal electron (Boltzmann statistics)",
    "stationary": "stationary electron (ion convention)",
}
ELECTRON_H298_H0_KJ_MOL: Final = 2.5 * GAS_CONSTANT_J_MOL_K * STANDARD_TEMPERATURE_K / 1000.0
"""H°(298.15 K) − H°(0 K) of the electron as an ideal Boltzmann gas, 6.197 kJ/mol; a stationary electron has 0."""


@dataclass(frozen=True, slots=True)
class LedgerLine:
    """One ingredient of an enthalpy of formation: what it is, its value in kJ/mol and where it comes from."""

    what: str
    value_kJ_mol: float
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Formation:
    """ΔfH°(298.15 K) and ΔfH°(0 K), kJ/mol, and how they were reached.

    dHf0_kJ_mol is None when the conversion to 0 K has no reference increment for an element.
    u95_kJ_mol : 95 % uncertainty, None where nothing defensible can be stated.
    method : ``given``, ``atomization``, ``reaction`` or ``network``.   source : one phrase for the entry's comment.
    ledger : the ingredients; but for a given value they add up to ΔfH°(298.15 K).
    alternatives : the same by other routes, where the best of several was asked for.
    """

    dHf298_kJ_mol: float
    dHf0_kJ_mol: float | None
    u95_kJ_mol: float | None
    method: str
    source: str
    ledger: tuple[LedgerLine, ...] = ()
    findings: tuple[Finding, ...] = ()
    alternatives: tuple[Formation, ...] = ()


@dataclass(frozen=True, slots=True)
class GivenEnthalpy:
    """An enthalpy of formation at 298.15 K as the user wrote it: value and 95 % uncertainty in kJ/mol, and the text."""

    value_kJ_mol: float
    u95_kJ_mol: float | None
    text: str


_ENTHALPY = re.compile(
    r"\s*(?P<value>[-+−]?\d+(?:\.\d*)?(?:[eE][-+]?\d+)?|[-+−]?\.\d+)"
    r"(?:\s*(?:±|\+/-|\+-)\s*(?P<u>\d+(?:\.\d*)?|\.\d+))?\s*(?P<unit>[A-Za-z/]+)\s*"
)


def parse_enthalpy(text: str) -> GivenEnthalpy:
    """An enthalpy with its unit, ``-201.0 kJ/mol``, with or without a 95 % uncertainty, ``-201.0 +/- 0.4 kJ/mol``.

    Raises UsageError when the number or a known unit is missing.

    >>> parse_enthalpy("-48.0 kcal/mol").value_kJ_mol
    -200.832
    """
    match = _ENTHALPY.fullmatch(text)
    units = {unit.lower(): factor for unit, factor in KJ_MOL_PER_UNIT.items()}
    if match is None or match["unit"].lower() not in units:
        raise UsageError(
            f"enthalpy of formation {text!r}: expected a number and one of the units {', '.join(KJ_MOL_PER_UNIT)}, "
            "such as '-201.0 kJ/mol'"
        )
    factor = units[match["unit"].lower()]
    value = float(match["value"].replace("−", "-")) * factor
    if not isfinite(value):
        raise UsageError(f"enthalpy of formation {text!r} is not a finite number")
    return GivenEnthalpy(value, None if match["u"] is None else float(match["u"]) * factor, text.strip())


def element_increment_kJ_mol(
    atoms: Mapping[str, int], references: Mapping[str, AtomReference] | None = None
) -> float | None:
    """Σ [H°(298.15 K) − H°(0 K)] of the elements in a composition, kJ/mol; None when one has no reference.

    references : the atoms' values by symbol, the built-in ones unless given.

    >>> round(element_increment_kJ_mol({"H": 2, "O": 1}), 3)
    12.806
    """
    total = 0.0
    for symbol, count in atoms.items():
        reference = atom_reference(symbol) if references is None else references.get(symbol)
        if reference is None:
            return None
        total += count * reference.element_H298_H0_kJ_mol
    return total


def dHf298_from_dHf0(dHf0_kJ_mol: float, h298_minus_h0_kJ_mol: float, increment_kJ_mol: float) -> float:
    """ΔfH°(298.15 K) = ΔfH°(0 K) + [H°(298.15) − H°(0)] of the species − that of its elements, all in kJ/mol.

    Of an ion this is the value for stationary electrons; see :func:`electron_term_kJ_mol`.
    Water with the values of ATcT 1.112:

    >>> round(dHf298_from_dHf0(-238.919, 9.903, 12.806), 3)
    -241.822
    """
    return dHf0_kJ_mol + h298_minus_h0_kJ_mol - increment_kJ_mol


def electron_term_kJ_mol(charge: int, electron: Electron) -> float:
    """What ΔfH°(298.15 K) of an ion has beyond its value for stationary electrons, kJ/mol.

    A cation is formed with free electrons, an anion from them: + q [H°(298.15) − H°(0)] of the electron.  Data sets
    for NASA polynomials and NIST-JANAF take the thermal electron, Active Thermochemical Tables the stationary one.

    >>> round(electron_term_kJ_mol(1, "thermal"), 3), electron_term_kJ_mol(-1, "stationary")
    (6.197, 0.0)
    """
    return charge * ELECTRON_H298_H0_KJ_MOL if electron == "thermal" else 0.0


def electron_lines(charge: int, electron: Electron) -> tuple[LedgerLine, ...]:
    """The ledger's line for the electrons of an ion; none for a neutral species."""
    if not charge:
        return ()
    count = f"{charge:+d} x H(298.15 K) - H(0) of the electron"
    return (LedgerLine(count, electron_term_kJ_mol(charge, electron), ELECTRON_TEXT[electron]),)


def formation_given(
    enthalpy: GivenEnthalpy,
    source: str | None,
    atoms: Mapping[str, int],
    h298_minus_h0_kJ_mol: float,
    *,
    charge: int = 0,
    electron: Electron = "thermal",
    stated_electron: Electron | None = None,
) -> Formation:
    """The formation a user states at 298.15 K, taken to 0 K where the elements' increments are known.

    electron : the convention of an ion's result.   stated_electron : that of the value given, the same unless said;
    where the two differ the ledger shows the step between them.
    """
    stated = enthalpy.value_kJ_mol
    lines = [LedgerLine("enthalpy of formation at 298.15 K, given", stated, source or "")]
    before = stated_electron or electron
    if charge and before != electron:
        step = electron_term_kJ_mol(charge, electron) - electron_term_kJ_mol(charge, before)
        lines.append(LedgerLine("change of the electron convention", step, f"to {ELECTRON_TEXT[electron]}"))
    value = sum(line.value_kJ_mol for line in lines)
    increment = element_increment_kJ_mol(atoms)
    at_rest = value - electron_term_kJ_mol(charge, electron)
    return Formation(
        dHf298_kJ_mol=value,
        dHf0_kJ_mol=None if increment is None else at_rest - h298_minus_h0_kJ_mol + increment,
        u95_kJ_mol=enthalpy.u95_kJ_mol,
        method="given",
        source=with_electron(source or "source not stated", charge, electron),
        ledger=tuple(lines),
        findings=() if source else (_without_source(enthalpy),),
    )


def with_electron(source: str, charge: int, electron: Electron) -> str:
    """The source of an enthalpy with the convention for the electron, where the species is an ion."""
    return f"{source}; {ELECTRON_TEXT[electron]}" if charge else source


def _without_source(enthalpy: GivenEnthalpy) -> Finding:
    return note(
        "source-not-stated",
        f"the enthalpy of formation {enthalpy.text} was given without its source",
        action="Name it by --source, so that the entry can say where it comes from.",
    )
