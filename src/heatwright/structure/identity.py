"""Which species a structure is: composition, isotopes and graph, from a molecule or from SMILES."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from heatwright.elements import composition, element
from heatwright.structure.bonds import bonds, fingerprint
from heatwright.structure.smiles import parse_smiles

if TYPE_CHECKING:
    from heatwright.molecule import Molecule


@dataclass(frozen=True, slots=True)
class Identity:
    """What two structures share when they are the same species (conformers and mirror images are).

    composition : (symbol, count), deuterium as ``D``, Hill order.   graph : the fingerprint of bonds and isotopes.
    Charge and multiplicity are kept beside it.
    """

    composition: tuple[tuple[str, int], ...]
    charge: int
    graph: tuple[str, ...]


@cache
def identity_of_smiles(text: str) -> Identity:
    """The identity that a SMILES text states; raises Refused when it cannot be read."""
    graph = parse_smiles(text)
    isotopes = [
        0 if a == _common_mass_number(z) else a for z, a in zip(graph.atomic_numbers, graph.isotopes, strict=True)
    ]
    marks = fingerprint(graph.atomic_numbers, graph.bonded, isotopes)
    return Identity(tuple(graph.composition.items()), graph.charge, marks)


def identity_of(molecule: Molecule) -> Identity | None:
    """The identity of a molecule, its bonds judged by distance; None without a geometry that could show them.

    Atoms and diatomic molecules need no geometry.
    """
    bonded = _bonded(molecule)
    if bonded is None:
        return None
    isotopes = [
        _unusual_isotope(int(z), float(m)) for z, m in zip(molecule.atomic_numbers, molecule.masses_u, strict=True)
    ]
    counts = composition(molecule.atomic_numbers.tolist(), molecule.masses_u.tolist())
    return Identity(tuple(counts.items()), molecule.charge or 0, fingerprint(molecule.atomic_numbers, bonded, isotopes))


def _bonded(molecule: Molecule) -> NDArray[np.bool_] | None:
    if molecule.n_atoms <= 2:
        return ~np.eye(molecule.n_atoms, dtype=np.bool_)
    return bonds(molecule.atomic_numbers, molecule.coordinates_A) if molecule.has_geometry else None


def _common_mass_number(z: int) -> int:
    return round(element(z).common_mass_u)


def _unusual_isotope(z: int, mass_u: float) -> int:
    """The mass number of an atom that is neither its most abundant isotope nor of average weight, else 0."""
    usual = (element(z).common_mass_u, element(z).average_weight_u)
    return 0 if min(abs(mass_u - m) for m in usual) < 0.05 else round(mass_u)
