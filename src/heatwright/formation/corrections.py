"""Corrections that a user adds to an enthalpy of formation for each atom or bond of a kind, with their sources."""

from __future__ import annotations

import os
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final, Literal

from heatwright.elements import atomic_number
from heatwright.formation.formation import KJ_MOL_PER_UNIT, LedgerLine
from heatwright.reading.tables import Row, read_table
from heatwright.structure.bond_orders import bonding

if TYPE_CHECKING:
    from heatwright.molecule import Molecule

Kind = Literal["atom", "bond"]
COLUMNS: Final = ("kind", "label", "value", "unit", "source")
"""The columns of a table of corrections, all of them needed."""
_BOND = re.compile(r"([A-Z][a-z]?)([-=#:])([A-Z][a-z]?)")


@dataclass(frozen=True, slots=True)
class Correction:
    """What is added to ΔfH° for each atom or bond of one kind, kJ/mol.

    label : an element, ``C``, or a bond as in ``Bonding.types``, ``C-H``, ``C=O``, ``C#N``, ``C:C`` (delocalised).
    """

    kind: Kind
    label: str
    value_kJ_mol: float
    source: str


def bond_label(text: str) -> str | None:
    """A bond's label with its elements by alphabet, None when the text is no such label.

    >>> bond_label("H-C"), bond_label("C=C"), bond_label("CH")
    ('C-H', 'C=C', None)
    """
    match = _BOND.fullmatch(text)
    if match is None or not (_is_element(match[1]) and _is_element(match[3])):
        return None
    first, second = sorted((match[1], match[3]))
    return f"{first}{match[2]}{second}"


def _is_element(symbol: str) -> bool:
    try:
        return atomic_number(symbol) > 0 and symbol == symbol.capitalize()
    except KeyError:
        return False


def read_corrections(path: str | os.PathLike[str]) -> tuple[Correction, ...]:
    """The corrections of a CSV file with the columns :data:`COLUMNS`.

    Raises Refused (``table-wrong``) with FILE:LINE for an unknown kind, element, bond or unit, for a missing value or
    source, and for a label that comes twice.
    """
    found: dict[tuple[str, str], Correction] = {}
    for row in read_table(path, "table-wrong", COLUMNS):
        correction = _correction(row)
        key = (correction.kind, correction.label)
        if key in found:
            row.wrong(f"the {correction.kind} {correction.label} has a correction already", "each label once")
        found[key] = correction
    return tuple(found.values())


def _correction(row: Row) -> Correction:
    value = row.number("value")
    if value is None:
        row.wrong("value is empty", "a number")
    units = {unit.lower(): factor for unit, factor in KJ_MOL_PER_UNIT.items()}
    factor = units.get(row.text("unit").lower())
    if factor is None:
        row.wrong(f"unit is {row.text('unit')!r}", f"one of {', '.join(KJ_MOL_PER_UNIT)}")
    kind: Kind = "bond" if row.text("kind") == "bond" else "atom"
    if kind != row.text("kind"):
        row.wrong(f"kind is {row.text('kind')!r}", "atom or bond")
    return Correction(kind, _label(row, kind), value * factor, row.text("source"))


def _label(row: Row, kind: Kind) -> str:
    text = row.text("label")
    label = bond_label(text) if kind == "bond" else text if _is_element(text) else None
    if label is None:
        bond = "two elements and the order between them: C-H, C=O, C#N, or C:C for a delocalised bond"
        row.wrong(f"{text!r} is no {kind}", bond if kind == "bond" else "the symbol of an element, such as C")
    return label


def correction_lines(
    corrections: Iterable[Correction], composition: Mapping[str, int], molecule: Molecule
) -> tuple[LedgerLine, ...]:
    """A ledger line for each correction whose label is in the molecule: how often, and the sum in kJ/mol.

    Raises Refused when bonds have to be counted and the molecule does not say them (see ``bonding``).
    """
    listed = tuple(corrections)
    bonds = bonding(molecule).types if any(c.kind == "bond" for c in listed) else {}
    counted = [(c, (composition if c.kind == "atom" else bonds).get(c.label, 0)) for c in listed]
    return tuple(
        LedgerLine(f"{n} x correction of the {c.kind} {c.label}", n * c.value_kJ_mol, c.source) for c, n in counted if n
    )
