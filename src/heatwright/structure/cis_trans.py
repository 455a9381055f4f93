"""On which side of a double bond the groups are, where a SMILES text says so: E and Z isomers are two species."""

from __future__ import annotations

from collections import Counter
from functools import cache
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from heatwright.structure.bonds import atom_labels, bonds, covalent_radius_A
from heatwright.structure.smiles import parse_smiles
from heatwright.structure.torsions import MULTIPLE_BOND, side

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule

Side = tuple[tuple[str, str], bool]
"""The labels of the two atoms of a double bond, sorted, and whether their higher-ranking neighbours are cis.

Neighbours are ranked by the labels of the graph, not by the rules of Cahn, Ingold and Prelog: only equal or not counts.
"""


@cache
def stated_sides(smiles: str) -> tuple[Side, ...]:
    """The sides that the marks of a SMILES text state, sorted; a mark at a bond that has no isomers says nothing.

    >>> stated_sides("C/C=C/C") == stated_sides("C\\\\C=C\\\\C"), stated_sides("C/C=C/C") == stated_sides("C/C=C\\\\C")
    (True, False)
    >>> stated_sides("CC=CC"), stated_sides("C/C=C(/C)C")
    ((), ())
    """
    graph = parse_smiles(smiles)
    bonded, labels = graph.bonded, atom_labels(graph.atomic_numbers, graph.bonded)
    found: list[Side] = []
    for a, i, j, b, cis in graph.sides:
        first, second = _higher(i, j, bonded, labels), _higher(j, i, bonded, labels)
        if first is not None and second is not None:
            found.append((_key(i, j, labels), cis ^ (first != a) ^ (second != b)))
    return tuple(sorted(found))


def has_sides(molecule: Molecule, sides: tuple[Side, ...]) -> bool:
    """Whether the geometry has the stated sides, at bonds between atoms with the same labels.

    The molecule's graph has to be that of the SMILES text that states them.
    """
    if not sides:
        return True
    bonded = bonds(molecule.atomic_numbers, molecule.coordinates_A)
    labels = atom_labels(molecule.atomic_numbers, bonded)
    keys = {key for key, _ in sides}
    found: Counter[Side] = Counter()
    for i, j in np.argwhere(np.triu(bonded)):
        first, second = _higher(int(i), int(j), bonded, labels), _higher(int(j), int(i), bonded, labels)
        if _key(i, j, labels) in keys and first is not None and second is not None:
            x = molecule.coordinates_A
            found[_key(i, j, labels), _are_cis(x[first], x[i], x[j], x[second])] += 1
    return found == Counter(sides)


def shown_sides(molecule: Molecule) -> tuple[Side, ...]:
    """The sides at every bond of a geometry that nothing turns about as it is too short, sorted; rings left out.

    Two geometries of one graph that differ in them are E and Z isomers and no conformers.
    """
    z, x = molecule.atomic_numbers, molecule.coordinates_A
    bonded = bonds(z, x)
    labels = atom_labels(z, bonded)
    found: list[Side] = []
    for i, j in np.argwhere(np.triu(bonded)).tolist():
        radii = covalent_radius_A(int(z[i])) + covalent_radius_A(int(z[j]))
        first, second = _higher(i, j, bonded, labels), _higher(j, i, bonded, labels)
        short = float(np.linalg.norm(x[i] - x[j])) < MULTIPLE_BOND * radii
        if short and first is not None and second is not None and side(bonded, j, i) is not None:
            found.append((_key(i, j, labels), _are_cis(x[first], x[i], x[j], x[second])))
    return tuple(sorted(found))


def _key(i: int, j: int, labels: list[str]) -> tuple[str, str]:
    first, second = sorted((labels[i], labels[j]))
    return first, second


def _higher(i: int, j: int, bonded: NDArray[np.bool_], labels: list[str]) -> int | None:
    """The neighbour of i beside j with the higher label; None when there is none or two of the same label."""
    others = sorted((int(k) for k in np.flatnonzero(bonded[i]) if k != j), key=lambda k: labels[k])
    if not others or len(others) > 2 or len({labels[k] for k in others}) < len(others):
        return None
    return others[-1]


def _are_cis(a: FloatArray, i: FloatArray, j: FloatArray, b: FloatArray) -> bool:
    axis = (j - i) / np.linalg.norm(j - i)
    left, right = ((v - (v @ axis) * axis) for v in (a - i, b - j))
    return bool(left @ right > 0.0)
