"""Reference enthalpies: atoms at 0 K and the increments of the elements, each with its source."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from heatwright.resources import data_rows


@dataclass(frozen=True, slots=True)
class AtomReference:
    """What the formation scale needs of one element, per mole of atoms, kJ/mol.

    dHf0_kJ_mol : ΔfH°(0 K) of the gaseous atom, with u95_kJ_mol and its source.
    element_H298_H0_kJ_mol : H°(298.15 K) − H°(0 K) of the element in its reference state, with its source.
    """

    symbol: str
    reference_state: str
    dHf0_kJ_mol: float
    u95_kJ_mol: float
    source: str
    element_H298_H0_kJ_mol: float
    increment_source: str


@cache
def _atoms() -> dict[str, AtomReference]:
    return {
        row["symbol"]: AtomReference(
            symbol=row["symbol"],
            reference_state=row["reference_state"],
            dHf0_kJ_mol=float(row["dHf0_kJ_mol"]),
            u95_kJ_mol=float(row["u95_kJ_mol"]),
            source=row["source"],
            element_H298_H0_kJ_mol=float(row["element_H298_H0_kJ_mol"]),
            increment_source=row["increment_source"],
        )
        for row in data_rows("atomic_formation")
    }


def atom_reference(symbol: str) -> AtomReference | None:
    """The reference values of an element, or None when the table has none.

    >>> atom_reference("H").dHf0_kJ_mol
    216.034
    """
    return _atoms().get(symbol)


def elements_with_reference() -> tuple[str, ...]:
    """The element symbols that have reference values."""
    return tuple(_atoms())
