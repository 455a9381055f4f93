"""What an atom can do in a Lewis structure: bonds, unpaired electrons, vacant orbitals, formal charge; and its cost.

With V valence electrons, n orbitals of its own, the sum B of its bond orders, u unpaired electrons and w vacant
orbitals an atom has n − B − u − w lone pairs, and its formal charge is q = V − 2n + B + u + 2w.  A negative w is an
expanded shell.  n is 4, and 1 for hydrogen and helium (Lewis 1916); the elements of groups 1, 2, 12 and 13 have only as
many orbitals as valence electrons, so that BF₃ and LiH lack nothing.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Final

from heatwright.elements import symbol
from heatwright.resources import data_rows

COST_VACANCY: Final = 1_000_000_000
COST_CHARGE: Final = 10_000_000
"""Times q²: many small charges rather than one large."""
COST_EXPANSION: Final = 100_000
"""Of an expanded shell; cheaper than charges, so S=O and P=O are written neutral."""
ELECTRONEGATIVITY_UNIT: Final = 100
"""Cost of one unit of Pauling's scale; it only orders structures that have the same cost otherwise."""
HIGHEST_ORDER: Final = 3
_COST_UNUSUAL: Final = COST_VACANCY + COST_CHARGE
_NOBLE_GAS_CORES: Final = (86, 54, 36, 18, 10, 2, 0)
_CHARGES: Final = range(-3, 2)
_NEUTRAL_POINT: Final = 2.2  # for the noble gases without a value, which have one charge state in every structure


@dataclass(frozen=True, slots=True)
class AtomState:
    """One way to complete an atom with a given sum of bond orders: formal charge, unpaired electrons and cost."""

    charge: int
    unpaired: int
    cost: int


@dataclass(frozen=True, slots=True)
class Setting:
    """What else the cost of an atom depends on.

    no_surplus : the molecule carries no negative charge, so a negative atom of group 13 or 14 that has a double
        bond or two charges can only have come by a lone pair of its neighbour.  That is set behind a vacancy: CF₂,
        SiCl₂ and HCOH are carbenes with single bonds, while CO and HNC keep their triple bonds.  From germanium on,
        with its inert pair, no triple bond is made so either: PbO has a double bond.
    bent : the atom has two neighbours, both in one ring of at most five atoms.  Two double bonds or a triple bond there
        are set behind a vacancy too: cyclopropenylidene is a carbene, not an allene.
    """

    no_surplus: bool = True
    bent: bool = False


_PLAIN: Final = Setting()


@cache
def valence_electrons(z: int) -> int | None:
    """Valence electrons of a main-group element (zinc, cadmium and mercury have 2), None for the transition metals.

    >>> [valence_electrons(z) for z in (1, 2, 6, 8, 17, 30, 35, 26)]
    [1, 2, 4, 6, 7, 2, 7, None]
    """
    core = next(c for c in _NOBLE_GAS_CORES if c < z)
    n = z - core
    if n <= 2 or core in (2, 10):
        return n
    d_block_ends = 12 if core in (18, 36) else 26
    return n - d_block_ends + 2 if n >= d_block_ends else None


@cache
def electronegativity(z: int) -> float:
    """Pauling's electronegativity; 2.2 for the noble gases that have none.

    >>> electronegativity(8)
    3.44
    """
    values = {row["symbol"]: float(row["pauling"]) for row in data_rows("electronegativities")}
    return values.get(symbol(z), _NEUTRAL_POINT)


def _orbitals(z: int, V: int) -> int:
    return 1 if z <= 2 else min(V, 4)


def _expansion(z: int, V: int) -> int:
    """By how many orbitals the shell may grow: boron takes one donor, heavier elements up to eight bonds."""
    if z <= 2 or V <= 2:
        return 0
    if z <= 10:
        return 4 - _orbitals(z, V)
    return 3 if V == 3 else 4


@cache
def states(z: int, degree: int, above: int = 0, setting: Setting = _PLAIN) -> tuple[AtomState, ...]:
    """Every way to complete an atom of element z with ``degree`` bonds whose orders add up to degree + ``above``.

    Empty when there is none.

    >>> states(6, 4), [(s.charge, s.unpaired) for s in states(6, 3)]
    ((AtomState(charge=0, unpaired=0, cost=0),), [(-1, 0), (1, 0), (0, 1)])
    """
    V = valence_electrons(z)
    if V is None:
        return ()
    B, n, found = degree + above, _orbitals(z, V), []
    for u in range(4):
        for w in range(-_expansion(z, V), n + 1):
            q = V - 2 * n + B + u + 2 * w
            if n - B - u - w >= 0 and q in _CHARGES:
                unusual = _COST_UNUSUAL if _unusual(z, q, above, setting) else 0
                found.append(AtomState(q, u, unusual + _cost(z, q, w)))
    return tuple(found)


def _unusual(z: int, q: int, above: int, setting: Setting) -> bool:
    """Whether an atom of group 13 or 14 is as :class:`Setting` says it should rather not be."""
    V = valence_electrons(z)
    if V not in (3, 4):
        return False
    donated_to = q < 0 and (above == 1 or (above > 1 and z > 18) or (V == 4 and q < -1))
    return (setting.no_surplus and donated_to) or (V == 4 and setting.bent and above == 2)


def _cost(z: int, q: int, w: int) -> int:
    sense = round(ELECTRONEGATIVITY_UNIT * (4 * q * q + q * (electronegativity(z) - 4.0)))
    return COST_VACANCY * max(w, 0) + COST_EXPANSION * max(-w, 0) + COST_CHARGE * q * q + sense


@cache
def most_bonds(z: int) -> int:
    """The largest sum of bond orders an atom of this element can have.

    >>> [most_bonds(z) for z in (1, 3, 5, 6, 7, 8, 9, 16)]
    [1, 1, 4, 4, 4, 3, 2, 8]
    """
    return max((b for b in range(9) if states(z, b)), default=0)
