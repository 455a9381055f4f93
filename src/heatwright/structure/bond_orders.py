"""Bonds with their orders: a graph from the distances, then Lewis structures of this charge and multiplicity.

Where the best Lewis structures of a molecule differ, the bond is delocalised and has order 1.5 (benzene, ozone, allyl,
carboxylates).  The geometry says which atoms are bonded, and decides between structures that are equal by counting but
not by their lengths (cyclobutadiene).  The ground states of O₂, S₂ and SO have order 2: one bond and two three-electron
bonds (L. Pauling, J. Am. Chem. Soc. 53, 1367 and 3225 (1931), from memory).
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property, lru_cache
from typing import TYPE_CHECKING, Final

import numpy as np
from numpy.typing import NDArray

from heatwright.elements import symbol
from heatwright.findings import Refused, refuse
from heatwright.structure.bonds import bonds, covalent_radius_A, fragments
from heatwright.structure.frame import Frame
from heatwright.structure.lewis import Solution, Structures, TooWide, lewis_structures
from heatwright.structure.valence import most_bonds, valence_electrons

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule

BoolArray = NDArray[np.bool_]

DELOCALISED: Final = 1.5
ORDER_SYMBOL: Final = {1.0: "-", DELOCALISED: ":", 2.0: "=", 3.0: "#"}
"""How the order of a bond is written; as in SMILES (D. Weininger, J. Chem. Inf. Comput. Sci. 28, 31 (1988))."""
CONTACT: Final = 1.12
"""Two atoms farther apart than this times the sum of their radii and with a common neighbour may just be near to each
other, as the ends of a cage are; no multiple bond is that long either (common practice, no source)."""
ALTERNATION_A: Final = 0.1
"""Lengths of like bonds that differ by more than this are single and double; in aromatic molecules they differ by less
than 0.06 Å, in cyclobutadiene by more than 0.2 Å (common practice, no source)."""
HALF_BONDED: Final = 1.45
"""A hydrogen nearer to a second atom than this times the sum of their radii is a bridge or half-way; hydrogen bonds are
above 1.55, geminal atoms above 1.9 (common practice, no source)."""
_ALKALI: Final = frozenset({3, 11, 19, 37, 55})
_ACTION: Final = "Use a route that needs no bonds: atomization, or an enthalpy of formation that is given."


@dataclass(frozen=True, slots=True)
class Bond:
    """A bond between two atoms (indices from 0, ``first`` < ``second``) of order 1, 2, 3, or 1.5 when delocalised."""

    first: int
    second: int
    order: float


@dataclass(frozen=True)
class Bonding:
    """The Lewis structure of a molecule: bonds with orders, unpaired electrons, charge and mean formal charges.

    formal_charges : of each atom; the mean over all best Lewis structures, so −0.5 for each O of a carboxylate.
    """

    atomic_numbers: tuple[int, ...]
    bonds: tuple[Bond, ...]
    unpaired: int
    charge: int
    formal_charges: tuple[float, ...]

    @cached_property
    def types(self) -> dict[str, int]:
        """Bonds counted by type, ``C-H``, ``C=O``, ``C#N``, ``C:C`` (delocalised); elements by alphabet, sorted."""
        return _counted(self._type(b) for b in self.bonds)

    @cached_property
    def environments(self) -> dict[str, int]:
        """Atoms counted by element, hydrogens on it and the other bonds it has: ``C(3H,-)`` is a methyl group.

        These are what a homodesmotic reaction keeps (S. E. Wheeler, K. N. Houk, P. v. R. Schleyer, W. D. Allen, J. Am.
        Chem. Soc. 131, 2547 (2009), from memory).  A hydrogen counts with the atom it is on; those of H₂ are ``H(1H)``.
        """
        return _counted(self._environment(i) for i in range(len(self.atomic_numbers)) if self._counts_itself(i))

    def _type(self, bond: Bond) -> str:
        a, b = sorted((symbol(self.atomic_numbers[bond.first]), symbol(self.atomic_numbers[bond.second])))
        return f"{a}{ORDER_SYMBOL[bond.order]}{b}"

    def _around(self, i: int) -> Iterator[tuple[int, float]]:
        """The neighbours of an atom and the orders of the bonds to them."""
        yield from ((b.second if b.first == i else b.first, b.order) for b in self.bonds if i in (b.first, b.second))

    def _counts_itself(self, i: int) -> bool:
        return self.atomic_numbers[i] != 1 or all(self.atomic_numbers[j] == 1 for j, _ in self._around(i))

    def _environment(self, i: int) -> str:
        around = list(self._around(i))
        n_hydrogen = sum(self.atomic_numbers[j] == 1 for j, _ in around)
        other = "".join(ORDER_SYMBOL[order] for order in sorted(o for j, o in around if self.atomic_numbers[j] != 1))
        charge = f",{self.formal_charges[i]:+.2g}" if self.formal_charges[i] else ""
        return f"{symbol(self.atomic_numbers[i])}({n_hydrogen}H{',' if other else ''}{other}{charge})"


def bonding(molecule: Molecule) -> Bonding:
    """The bonds of a molecule with their orders.

    Raises Refused (``bonding-unclear``, with the atoms named) for bridging hydrogen, clusters, transition metals, atoms
    with more neighbours than they can bind and whatever has no Lewis structure; ``fragments`` for parts that are not
    bonded to each other; ``no-charge``, ``no-multiplicity``, ``no-geometry`` when the molecule lacks these.
    """
    if molecule.charge is None:
        raise Refused([refuse("no-charge", "bonds cannot be counted without the charge", action="Give --charge.")])
    if molecule.multiplicity is None:
        words = "bonds cannot be counted without the spin multiplicity"
        raise Refused([refuse("no-multiplicity", words, action="Give --multiplicity.")])
    numbers = tuple(int(z) for z in molecule.atomic_numbers)
    return _bonding(numbers, _coordinates(molecule).tobytes(), molecule.charge, molecule.multiplicity - 1)


def _coordinates(molecule: Molecule) -> FloatArray:
    """The geometry, (n, 3) in Å; two atoms without one are bonded all the same."""
    if molecule.has_geometry:
        return np.ascontiguousarray(molecule.coordinates_A, dtype=float)
    if molecule.n_atoms > 2:
        raise Refused([refuse("no-geometry", "bonds cannot be found without a geometry", action=_ACTION)])
    along = np.cumsum([covalent_radius_A(int(z)) for z in molecule.atomic_numbers])
    return np.outer(along, [0.0, 0.0, 1.0])


@lru_cache(maxsize=512)
def _bonding(numbers: tuple[int, ...], coordinates: bytes, charge: int, unpaired: int) -> Bonding:
    if len(numbers) == 1:
        return Bonding(numbers, (), unpaired, charge, (float(charge),))
    x = np.frombuffer(coordinates).reshape(-1, 3)
    lengths: FloatArray = np.linalg.norm(x[:, None] - x[None, :], axis=2)
    stretches = lengths / np.add.outer(*2 * [np.array([covalent_radius_A(z) for z in numbers])])
    pairs = _pairs(numbers, bonds(numbers, x), stretches)
    _possible(numbers, pairs, lengths, stretches)
    _whole(numbers, pairs)
    frame = Frame(numbers, pairs, charge, unpaired)
    special = _by_orbitals(frame)
    if special:
        return Bonding(numbers, (Bond(0, 1, special),), unpaired, charge, (charge / 2, charge / 2))
    found = _localised(_solution(frame), lengths, stretches)
    orders = [float(min(o)) if len(o) == 1 else DELOCALISED for o in found.orders]
    _not_too_long(numbers, pairs, orders, lengths, stretches)
    listed = tuple(Bond(i, j, order) for (i, j), order in zip(pairs, orders, strict=True))
    return Bonding(numbers, listed, unpaired, charge, found.charges)


def _counted(labels: Iterator[str]) -> dict[str, int]:
    return dict(sorted(Counter(labels).items()))


def _name(numbers: tuple[int, ...], i: int) -> str:
    return f"{symbol(numbers[i])}{i + 1}"


def _unclear(found: str, where: str = "", expected: str = "") -> Refused:
    return Refused([refuse("bonding-unclear", found, where=where, expected=expected, action=_ACTION)])


# --- the graph ----------------------------------------------------------------------------------------------------


def _pairs(numbers: tuple[int, ...], bonded: BoolArray, stretches: FloatArray) -> tuple[tuple[int, int], ...]:
    """The bonds, without contacts across a common neighbour where an atom would have too many bonds otherwise."""
    bonded = bonded.copy()
    for i, z in enumerate(numbers):
        while valence_electrons(z) is not None and bonded[i].sum() > max(most_bonds(z), 1):
            contacts = [int(j) for j in np.flatnonzero(bonded[i]) if (bonded[i] & bonded[j]).any()]
            far = max(contacts, key=lambda j: stretches[i, j], default=i)
            if stretches[i, far] < CONTACT or not _may_be_contact(z, numbers[far]):
                break
            bonded[i, far] = bonded[far, i] = False
    return tuple((int(i), int(j)) for i, j in np.argwhere(np.triu(bonded)))


def _may_be_contact(z1: int, z2: int) -> bool:
    """Hydrogen between two atoms is a bridge or on its way, unless one of them is a large metal atom as in CsOH."""
    return 1 not in (z1, z2) or any((valence_electrons(z) or 0) == 2 or z in _ALKALI for z in (z1, z2))


def _whole(numbers: tuple[int, ...], pairs: tuple[tuple[int, int], ...]) -> None:
    """Refuse parts that are not bonded to each other."""
    bonded = np.zeros((len(numbers), len(numbers)), dtype=bool)
    for i, j in pairs:
        bonded[i, j] = bonded[j, i] = True
    parts = fragments(bonded)
    if len(parts) > 1:
        shown = "; ".join(" ".join(_name(numbers, i) for i in part[:8]) for part in parts[:4])
        words = f"the structure is {len(parts)} parts that are not bonded to each other: {shown}"
        action = "Bond types are counted for one molecule; treat the parts as species of their own."
        raise Refused([refuse("fragments", words, expected="one molecule", action=action)])


def _possible(
    numbers: tuple[int, ...], pairs: tuple[tuple[int, int], ...], lengths: FloatArray, stretches: FloatArray
) -> None:
    """Refuse transition metals, atoms with more neighbours than they can bind, and hydrogen between two atoms."""
    near: list[list[int]] = [[] for _ in numbers]
    for i, j in pairs:
        near[i].append(j)
        near[j].append(i)
    for i in sorted(range(len(numbers)), key=lambda i: numbers[i] != 1):
        z = numbers[i]
        if valence_electrons(z) is None:
            words = f"{symbol(z)} has no fixed valence, so its bonds have no order"
            raise _unclear(words, _name(numbers, i), "main-group elements")
        others = near[i] if z != 1 else near[i] + _half_bonded(numbers, near, stretches, i)
        if len(others) > most_bonds(z):
            shown = ", ".join(f"{_name(numbers, j)} ({lengths[i, j]:.2f} Å)" for j in others)
            words = f"the atom is near enough to be bonded to {len(others)} others: {shown}"
            allowed = f"at most {most_bonds(z)} for {symbol(z)} (bridges, clusters and transition states have no Lewis "
            raise _unclear(words, _name(numbers, i), allowed + "structure)")


def _half_bonded(numbers: tuple[int, ...], near: list[list[int]], stretches: FloatArray, i: int) -> list[int]:
    """Non-metal atoms a hydrogen is as near to as it only is on its way to them or from them."""
    return [
        j
        for j, z in enumerate(numbers)
        if j != i and j not in near[i] and stretches[i, j] < HALF_BONDED and (z == 1 or (valence_electrons(z) or 0) > 3)
    ]


# --- the orders ---------------------------------------------------------------------------------------------------


def _by_orbitals(frame: Frame) -> float:
    """The order of diatomic molecules whose octets cannot be counted, from molecular orbitals; else 0.

    Two atoms of group 16 with two unpaired electrons (³Σ⁻: σ²π⁴π*²) have 2; C₂, Si₂ and SiC (8 valence electrons)
    have 2, B₂ and Al₂ (6) have 1, half the excess of bonding electrons (G. Herzberg, Spectra of Diatomic Molecules,
    2nd ed., 1950, chapter VI, from memory).
    """
    if len(frame.atomic_numbers) != 2 or frame.charge:
        return 0.0
    groups = {valence_electrons(z) for z in frame.atomic_numbers}
    if groups == {6}:
        return 2.0 if frame.unpaired == 2 else 0.0
    few = 2.0 if groups == {4} else 1.0 if groups == {3} else 0.0
    return few if frame.unpaired in (0, 2) else 0.0


def _solution(frame: Frame) -> Solution:
    electrons = sum(frame.atomic_numbers) - frame.charge
    state = f"charge {frame.charge:+d} and multiplicity {frame.unpaired + 1}"
    if (electrons - frame.unpaired) % 2:
        words = f"{electrons} electrons cannot have multiplicity {frame.unpaired + 1}"
        raise Refused([refuse("multiplicity-impossible", words, action="Check --charge and --multiplicity.")])
    try:
        found = lewis_structures(frame)
    except TooWide:
        raise _unclear(
            f"the {len(frame.atomic_numbers)} atoms allow too many Lewis structures to be searched"
        ) from None
    if found is None:
        atoms = " ".join(_name(frame.atomic_numbers, i) for i, z in enumerate(frame.atomic_numbers) if z != 1)
        raise _unclear(f"no Lewis structure with {state} fits the bonds found between the atoms {atoms or 'H'}")
    return found


def _localised(solution: Solution, lengths: FloatArray, stretches: FloatArray) -> Structures:
    """All the best structures, or the one whose double bonds are the short ones if lengths alternate too much."""
    found, frame = solution.structures(), solution.frame
    varying = [b for b, orders in enumerate(found.orders) if len(orders) > 1]
    if not varying or any(found.orders[b] != {1, 2} for b in varying):
        return found
    best = solution.shortest([float(stretches[i, j]) for i, j in frame.bonds])
    return best if _alternation_A(frame, best, varying, lengths) > ALTERNATION_A else found


def _alternation_A(frame: Frame, one: Structures, varying: list[int], lengths: FloatArray) -> float:
    """How much longer the single bonds of a structure are than its double bonds, for the pair of elements for which it
    is least, Å; 0 when no pair of elements has both."""
    kinds: dict[tuple[int, ...], dict[int, list[float]]] = {}
    for b in varying:
        i, j = frame.bonds[b]
        pair = tuple(sorted((frame.atomic_numbers[i], frame.atomic_numbers[j])))
        kinds.setdefault(pair, {1: [], 2: []})[min(one.orders[b])].append(float(lengths[i, j]))
    return min((float(np.mean(k[1]) - np.mean(k[2])) for k in kinds.values() if k[1] and k[2]), default=0.0)


def _not_too_long(
    numbers: tuple[int, ...],
    pairs: tuple[tuple[int, int], ...],
    orders: list[float],
    lengths: FloatArray,
    stretches: FloatArray,
) -> None:
    """Refuse a double or triple bond that is longer than single bonds are."""
    for (i, j), order in zip(pairs, orders, strict=True):
        if order >= 2.0 and stretches[i, j] > CONTACT:
            name = f"{_name(numbers, i)}-{_name(numbers, j)}"
            words = (
                f"the only Lewis structures have a bond of order {order:g} here, but it is {lengths[i, j]:.2f} Å long"
            )
            raise _unclear(words, name, "a minimum with the stated charge and multiplicity")
