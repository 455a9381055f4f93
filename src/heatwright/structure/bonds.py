"""Which atoms are bonded, judged by distance alone; connected parts; a fingerprint that tells isomers apart."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache
from hashlib import blake2b
from typing import TYPE_CHECKING, Final

import numpy as np
from numpy.typing import NDArray

from heatwright.elements import symbol
from heatwright.resources import data_rows

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

BOND_STRETCH: Final = 1.3
"""Two atoms are bonded when they are nearer than this times the sum of their covalent radii (common practice, no
source): long bonds (F-F, N-N of N2O4) lie below 1.27, hydrogen bonds above 1.6."""
_UNKNOWN_RADIUS_A: Final = 1.7


@cache
def covalent_radius_A(z: int) -> float:
    """Covalent radius of an element in Å (Cordero et al. 2008); 1.7 for those without one.

    >>> covalent_radius_A(6), covalent_radius_A(1)
    (0.76, 0.31)
    """
    radii = {row["symbol"]: float(row["radius_A"]) for row in data_rows("covalent_radii")}
    return radii.get(symbol(z), _UNKNOWN_RADIUS_A)


def bonds(atomic_numbers: Sequence[int] | NDArray[np.int64], coordinates_A: FloatArray) -> NDArray[np.bool_]:
    """(n, n) symmetric, True where two atoms are bonded.

    >>> bonds([8, 1, 1], np.array([[0.0, 0, 0], [0, 0.76, 0.59], [0, -0.76, 0.59]]))[0].tolist()
    [False, True, True]
    """
    radii = np.array([covalent_radius_A(int(z)) for z in atomic_numbers])
    distances = np.linalg.norm(coordinates_A[:, None] - coordinates_A[None, :], axis=2)
    near: NDArray[np.bool_] = distances < BOND_STRETCH * (radii[:, None] + radii[None, :])
    np.fill_diagonal(near, False)
    return near


def fragments(bonded: NDArray[np.bool_]) -> tuple[tuple[int, ...], ...]:
    """The connected parts of a graph of bonds, each as ascending indices from 0, in order of their first atom.

    >>> fragments(np.array([[False, True, False], [True, False, False], [False, False, False]]))
    ((0, 1), (2,))
    """
    left = set(range(len(bonded)))
    found: list[tuple[int, ...]] = []
    while left:
        edge = [min(left)]
        part = set(edge)
        while edge:
            new = {int(j) for j in np.flatnonzero(bonded[edge.pop()])} - part
            part |= new
            edge += new
        found.append(tuple(sorted(part)))
        left -= part
    return tuple(found)


def fingerprint(
    atomic_numbers: Sequence[int] | NDArray[np.int64], bonded: NDArray[np.bool_], isotopes: Sequence[int] = ()
) -> tuple[str, ...]:
    """A text for each atom, sorted, equal for equal graphs whatever the order of the atoms.

    isotopes : mass number of each atom that is to count as another element, 0 for the others; none when empty.

    Neighbourhoods are refined as often as there are atoms (Weisfeiler and Leman 1968, from memory); graphs that this
    cannot tell apart are no matter here, as the fingerprint only ever serves to say that two structures differ.

    >>> nitrile = bonds([1, 6, 7], np.array([[0, 0, -1.06], [0, 0, 0.0], [0, 0, 1.15]]))
    >>> isonitrile = bonds([1, 6, 7], np.array([[0, 0, 2.15], [0, 0, 0.0], [0, 0, 1.15]]))
    >>> fingerprint([1, 6, 7], nitrile) == fingerprint([1, 6, 7], isonitrile)
    False
    """
    return tuple(sorted(atom_labels(atomic_numbers, bonded, isotopes)))


def atom_labels(
    atomic_numbers: Sequence[int] | NDArray[np.int64], bonded: NDArray[np.bool_], isotopes: Sequence[int] = ()
) -> list[str]:
    """The texts of :func:`fingerprint` in the order of the atoms: alike for atoms that the graph cannot tell apart."""
    labels = [symbol(int(z)) for z in atomic_numbers]
    if isotopes:
        labels = [f"{a or ''}{label}" for a, label in zip(isotopes, labels, strict=True)]
    neighbours = [np.flatnonzero(row) for row in bonded]
    for _ in range(min(len(labels), 20)):
        wider = [f"{labels[i]}({','.join(sorted(labels[int(j)] for j in near))})" for i, near in enumerate(neighbours)]
        labels = [blake2b(text.encode(), digest_size=8).hexdigest() for text in wider]
    return labels
