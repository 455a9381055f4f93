"""Reference enthalpies: atoms at 0 K, the increments of the elements, spin-orbit lowering, each with its source."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cache
from typing import Final

from heatwright.constants import CM1_KJ_MOL
from heatwright.resources import data_rows

SPIN_ORBIT_SOURCE: Final = "mean of the ground term's levels, NIST Atomic Spectra Database"


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


def atom_references() -> dict[str, AtomReference]:
    """The built-in reference values by element symbol."""
    return dict(_atoms())


def elements_with_reference() -> tuple[str, ...]:
    """The element symbols that have reference values."""
    return tuple(_atoms())


@cache
def _ground_terms() -> dict[str, tuple[tuple[float, int], ...]]:
    """The levels (1/cm, degeneracy) of the ground term of each atom in the table of electronic levels."""
    terms: dict[str, list[tuple[str, float, int]]] = {}
    for row in data_rows("electronic_levels"):
        if row["charge"] == "0" and row["species"] in _atoms():
            term = re.sub(r"[\d/]+$", "", row["state"])  # 3P2 and 2P*3/2 without their J
            terms.setdefault(row["species"], []).append((term, float(row["level_cm1"]), int(row["degeneracy"])))
    return {
        atom: tuple((level, g) for term, level, g in rows if term == min(rows, key=lambda row: row[1])[0])
        for atom, rows in terms.items()
    }


def spin_orbit_lowering_kJ_mol(symbol: str) -> float | None:
    """How far the lowest level of an atom lies below the mean of its ground term, kJ/mol; None when not tabulated.

    Σ gᵢεᵢ/Σ gᵢ over the term's levels: a calculation without spin-orbit coupling gives the mean, enthalpies of
    formation belong to the lowest level (L. A. Curtiss, K. Raghavachari, P. C. Redfern, V. Rassolov, J. A. Pople,
    J. Chem. Phys. 109, 7764 (1998), from memory).

    >>> [round(spin_orbit_lowering_kJ_mol(atom), 2) for atom in ("H", "C", "O", "Cl")]
    [0.0, 0.35, 0.93, 3.52]
    """
    levels = _ground_terms().get(symbol)
    if levels is None:
        return None
    return sum(g * level for level, g in levels) / sum(g for _, g in levels) * CM1_KJ_MOL
