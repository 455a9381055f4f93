"""Whether an energy can be right at all: the atomization energy against the sum of mean bond enthalpies."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from functools import cache
from typing import TYPE_CHECKING, Final

from heatwright.findings import Finding, Refused, refuse, warn
from heatwright.resources import data_rows
from heatwright.structure.bond_orders import bonding

if TYPE_CHECKING:
    from heatwright.molecule import Molecule

BOUND_KJ_MOL: Final = (175.0, 25.0, 50.0)
"""By how much the two may differ: a fixed part, one for each atom and one for each unpaired electron, kJ/mol (our own
bound; common practice, no source).  Mean bond enthalpies know no strain, resonance or spin, and a level of theory has
its error for each bond; an electron too few or too many, or another program's energy, is off by far more."""


@cache
def mean_bond_enthalpies() -> dict[str, float]:
    """Mean bond enthalpies by label, kJ/mol, from ``data/mean_bond_enthalpies.csv``.

    >>> mean_bond_enthalpies()["C-H"]
    413.0
    """
    return {row["label"]: float(row["enthalpy_kJ_mol"]) for row in data_rows("mean_bond_enthalpies")}


def bond_sum_kJ_mol(types: Mapping[str, int]) -> float | None:
    """The sum of the mean enthalpies of bonds counted by type; None when one of them is not in the table.

    >>> bond_sum_kJ_mol({"H-O": 2}), bond_sum_kJ_mol({"Xe-F": 2})
    (926.0, None)
    """
    table = mean_bond_enthalpies()
    if not types or any(label not in table for label in types):
        return None
    return sum(n * table[label] for label, n in types.items())


def bound_kJ_mol(molecule: Molecule) -> float:
    """The largest difference that is let pass for a molecule, kJ/mol."""
    fixed, each_atom, each_electron = BOUND_KJ_MOL
    return fixed + each_atom * molecule.n_atoms + each_electron * ((molecule.multiplicity or 1) - 1)


def energy_findings(molecule: Molecule, atomization_kJ_mol: float, accept: Collection[str] = ()) -> tuple[Finding, ...]:
    """What is to be said of a calculated atomization energy (0 K): nothing, or that it is off by more than a bond.

    Nothing is said of atoms, of ions, and where the bonds or one of their enthalpies are not known.
    ``"energy"`` in *accept* makes a warning of it.
    """
    expected = None if molecule.is_atom or molecule.charge else _expected_kJ_mol(molecule)
    if expected is None or abs(atomization_kJ_mol - expected) <= bound_kJ_mol(molecule):
        return ()
    make = warn if "energy" in accept else refuse
    action = "Check the energies of the molecule and of its atoms: state, convergence, same job settings."
    if "energy" not in accept:
        action += " Where the level itself is that far off, as Hartree-Fock is, say --accept energy."
    return (
        make(
            "energy-implausible",
            f"the calculated atomization energy is {atomization_kJ_mol:.0f} kJ/mol, and the molecule's bonds are worth "
            f"about {expected:.0f}",
            where=molecule.source.file,
            expected=f"a difference of at most {bound_kJ_mol(molecule):.0f} kJ/mol",
            action=action,
        ),
    )


def _expected_kJ_mol(molecule: Molecule) -> float | None:
    try:
        return bond_sum_kJ_mol(bonding(molecule).types)
    except Refused:  # what cannot be told here, the routes that need bonds will say
        return None
