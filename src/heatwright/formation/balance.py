"""What a reaction has to balance: elements, charge, unpaired electrons, bonds by type, surroundings of atoms."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from heatwright.molecule import Molecule
    from heatwright.partition.model import ThermoModel
    from heatwright.structure.bond_orders import Bonding


@dataclass(frozen=True, slots=True)
class Account:
    """What one species brings into a reaction, as counts by name.

    elements also holds the charge.   bonds also holds the unpaired electrons: an isodesmic reaction balances both.
    surroundings : atoms by hybridisation and hydrogens; a homodesmotic reaction balances them too
    (S. E. Wheeler, K. N. Houk, P. v. R. Schleyer, W. D. Allen, J. Am. Chem. Soc. 131, 2547 (2009), from memory).
    """

    elements: Mapping[str, int]
    bonds: Mapping[str, int]
    surroundings: Mapping[str, int]


def account(model: ThermoModel, bonding: Bonding) -> Account:
    """The account of one species."""
    molecule: Molecule = model.molecule
    elements = {f"element {symbol}": n for symbol, n in model.composition.items()}
    if molecule.charge:
        elements["charge"] = molecule.charge
    bonds = {f"bond {label}": n for label, n in bonding.types.items()}
    if bonding.unpaired:
        bonds["unpaired electrons"] = bonding.unpaired
    return Account(elements, bonds, {f"atom {label}": n for label, n in bonding.environments.items()})


def surplus(terms: Iterable[tuple[int, Mapping[str, int]]]) -> dict[str, int]:
    """What products have more than reactants (less when negative), by name, of terms (coefficient, counts).

    >>> surplus([(-1, {"C-H": 4}), (1, {"C-H": 3}), (1, {"H-H": 1})])
    {'C-H': -1, 'H-H': 1}
    """
    total: Counter[str] = Counter()
    for coefficient, counts in terms:
        for name, n in counts.items():
            total[name] += coefficient * n
    return {name: total[name] for name in sorted(total) if total[name]}
