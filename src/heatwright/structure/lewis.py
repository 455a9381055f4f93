"""Every best Lewis structure of a graph of atoms at once, without writing them down one by one.

The atoms are taken in an order that keeps the open ends of the graph few.  A partial structure matters for the rest
only through the multiple bonds it has begun, its charge, its unpaired electrons and its cost; partial structures alike
in these are counted together (the transfer matrix of the counting of Kekulé structures).  Forward and backward counts
give for each bond how many of the best structures write it single, double or triple.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import accumulate, product
from typing import Final

from heatwright.structure.valence import (
    COST_CHARGE,
    COST_EXPANSION,
    COST_VACANCY,
    ELECTRONEGATIVITY_UNIT,
    HIGHEST_ORDER,
    most_bonds,
    states,
    valence_electrons,
)

DEGENERATE: Final = round(0.6 * ELECTRONEGATIVITY_UNIT)
"""Structures whose charges sit on elements that differ by less than this count alike: O and N do, O and C do not."""
MOST_STATES: Final = 60_000
_SENSE: Final = 50 * ELECTRONEGATIVITY_UNIT
_EXPANSIONS: Final = 10 * COST_EXPANSION + _SENSE
_CHARGES: Final = 8 * COST_CHARGE + _EXPANSIONS
# What a structure may cost above the sum of what its atoms cost at least; the search widens from one to the next.
_ALLOWANCES: Final = (
    _SENSE,
    COST_EXPANSION + _SENSE,
    _EXPANSIONS,
    2 * COST_CHARGE + _EXPANSIONS,
    4 * COST_CHARGE + _EXPANSIONS,
    *(n * COST_VACANCY + _CHARGES for n in (0, 1, 2, 3, 4, 6, 8)),
)

_State = tuple[tuple[int, ...], int, int, int]  # multiple bonds begun at the open atoms, charge, unpaired, cost
_Choice = tuple[tuple[int, ...], int, int, int]  # orders above 1 of the bonds ahead, charge, unpaired, cost of the atom
_Move = tuple[_State, _Choice, _State]
_Path = tuple[_Choice, ...]


class TooWide(Exception):
    """The graph has more partial structures than can be counted."""


@dataclass(frozen=True)
class Frame:
    """What a Lewis structure is to be found for: elements, bonds as pairs of indices, charge, unpaired electrons."""

    atomic_numbers: tuple[int, ...]
    bonds: tuple[tuple[int, int], ...]
    charge: int
    unpaired: int

    @cached_property
    def degrees(self) -> tuple[int, ...]:
        """Number of bonds of each atom."""
        return tuple(sum(i in bond for bond in self.bonds) for i in range(len(self.atomic_numbers)))

    @cached_property
    def spare(self) -> tuple[int, ...]:
        """How much each atom can bear above a single bond to each neighbour; nothing for a halogen at an end."""
        pairs = zip(self.atomic_numbers, self.degrees, strict=True)
        return tuple(0 if d == 1 and valence_electrons(z) == 7 else most_bonds(z) - d for z, d in pairs)

    @cached_property
    def open_bonds(self) -> tuple[int, ...]:
        """Bonds that could be multiple, as indices into ``bonds``."""
        return tuple(b for b, (i, j) in enumerate(self.bonds) if self.spare[i] > 0 and self.spare[j] > 0)

    def completions(self, i: int, above: int) -> tuple[tuple[int, int, int], ...]:
        """Charge, unpaired electrons and cost of atom i when its bond orders add up to degree + ``above``."""
        z = self.atomic_numbers[i]
        zwitterion = above == 1 and valence_electrons(z) == 4 and self.charge >= 0
        return tuple((s.charge, s.unpaired, s.cost) for s in states(z, self.degrees[i] + above, zwitterion))

    @cached_property
    def least_costs(self) -> tuple[int, ...]:
        """The least each atom costs, whatever its bonds."""
        every = [range(max(s, 0) + 1) for s in self.spare]
        return tuple(
            min((c for a in above for _, _, c in self.completions(i, a)), default=0) for i, above in enumerate(every)
        )


@dataclass(frozen=True)
class Structures:
    """The best Lewis structures: how many, the orders of each bond and the mean formal charge of each atom."""

    count: int
    orders: tuple[frozenset[int], ...]
    charges: tuple[float, ...]


@dataclass(frozen=True)
class _Step:
    """One atom of the order: the open atoms before it, its bonds ahead (index, other atom), the open atoms after it."""

    atom: int
    before: tuple[int, ...]
    ahead: tuple[tuple[int, int], ...]
    after: tuple[int, ...]


def _steps(frame: Frame) -> list[_Step]:
    """The order of the atoms: always the one next that leaves the fewest open."""
    near: dict[int, list[tuple[int, int]]] = {i: [] for i in range(len(frame.atomic_numbers))}
    for b in frame.open_bonds:
        i, j = frame.bonds[b]
        near[i].append((b, j))
        near[j].append((b, i))
    left, steps = set(near), []
    open_atoms: tuple[int, ...] = ()
    while left:
        i = min(open_atoms or left, key=lambda k: (sum(j in left and j not in open_atoms for _, j in near[k]), k))
        left.discard(i)
        ahead = tuple((b, j) for b, j in near[i] if j in left)
        kept = tuple(k for k in open_atoms if k != i)
        after = kept + tuple(j for _, j in ahead if j not in kept)
        steps.append(_Step(i, open_atoms, ahead, after))
        open_atoms = after
    return steps


def _choices(frame: Frame, step: _Step, begun: int) -> list[_Choice]:
    """What the step's atom can do when multiple bonds worth ``begun`` have reached it already."""
    room = frame.spare[step.atom] - begun
    ranges = [range(min(HIGHEST_ORDER - 1, room, frame.spare[j]) + 1) for _, j in step.ahead]
    return [
        (orders, *completion)
        for orders in product(*ranges)
        if sum(orders) <= max(room, 0)
        for completion in frame.completions(step.atom, begun + sum(orders))
    ]


def _moves(frame: Frame, step: _Step, now: set[_State], most: int) -> list[_Move]:
    """Every allowed move of one step that costs at most ``most`` up to here."""
    place = step.before.index(step.atom) if step.atom in step.before else None
    known: dict[int, list[_Choice]] = {}
    found: list[_Move] = []
    for state in now:
        reached, charge, unpaired, cost = state
        begun = 0 if place is None else reached[place]
        if begun not in known:
            known[begun] = _choices(frame, step, begun)
        kept = dict(zip(step.before, reached, strict=True))
        for choice in known[begun]:
            orders, q, u, c = choice
            if cost + c > most or unpaired + u > frame.unpaired:
                continue
            new = kept | {j: kept.get(j, 0) + e for (_, j), e in zip(step.ahead, orders, strict=True)}
            if all(new[j] <= frame.spare[j] for _, j in step.ahead):
                found.append((state, choice, (tuple(new[k] for k in step.after), charge + q, unpaired + u, cost + c)))
    if len(found) > 4 * MOST_STATES:
        raise TooWide
    return found


def _search(frame: Frame, steps: list[_Step], most: int) -> tuple[list[list[_Move]], list[_State]]:
    """The moves of every step within a total cost, and the final states of the right charge and spin."""
    least = [frame.least_costs[s.atom] for s in steps]
    rest = list(accumulate(reversed(least), initial=0))[::-1][1:]
    now: set[_State] = {((), 0, 0, 0)}
    layers: list[list[_Move]] = []
    for step, later in zip(steps, rest, strict=True):
        layers.append(_moves(frame, step, now, most - later))
        now = {after for _, _, after in layers[-1]}
        if len(now) > MOST_STATES:
            raise TooWide
    return layers, [s for s in now if s[1] == frame.charge and s[2] == frame.unpaired]


def _within_tolerance(frame: Frame, steps: list[_Step]) -> tuple[list[list[_Move]], list[_State]]:
    """The search at the least cost that has a structure, with all that count alike."""
    floor = sum(frame.least_costs)
    for allowance in _ALLOWANCES:
        _, final = _search(frame, steps, floor + allowance)
        if final:
            most = min(s[3] for s in final) + DEGENERATE
            layers, final = _search(frame, steps, most)
            return layers, [s for s in final if s[3] <= most]
    return [], []


def _backward(layers: list[list[_Move]], final: list[_State]) -> list[dict[_State, int]]:
    """For each step and state after it, the number of ways to finish."""
    ways: list[dict[_State, int]] = [dict.fromkeys(final, 1)]
    for layer in reversed(layers[1:]):
        earlier: dict[_State, int] = defaultdict(int)
        for before, _, after in layer:
            earlier[before] += ways[-1].get(after, 0)
        ways.append(earlier)
    return ways[::-1]


def lewis_structures(frame: Frame) -> Structures | None:
    """The best Lewis structures of a graph, or None when there is none of this charge and spin.

    In order: the fewest vacant orbitals, the smallest formal charges, the fewest expanded shells; what is equal so far
    and has its charges on elements nearly as electronegative counts as equal.

    Raises TooWide when the graph is too large and too branched to be counted.

    >>> ozone = lewis_structures(Frame((8, 8, 8), ((0, 1), (1, 2)), 0, 0))
    >>> ozone.count, [sorted(o) for o in ozone.orders], ozone.charges
    (2, [[1, 2], [1, 2]], (-0.5, 1.0, -0.5))
    """
    steps = _steps(frame)
    layers, final = _within_tolerance(frame, steps)
    return _counted(frame, steps, layers, _backward(layers, final)) if final else None


def _counted(frame: Frame, steps: list[_Step], layers: list[list[_Move]], ways: list[dict[_State, int]]) -> Structures:
    orders: list[set[int]] = [set() if b in frame.open_bonds else {1} for b in range(len(frame.bonds))]
    charges = [0] * len(steps)
    forward: dict[_State, int] = {((), 0, 0, 0): 1}
    for step, layer, finish in zip(steps, layers, ways, strict=True):
        reached: dict[_State, int] = defaultdict(int)
        for before, (above, q, _, _), after in layer:
            n = forward[before] * finish.get(after, 0)
            if not n:
                continue
            reached[after] += forward[before]
            charges[step.atom] += q * n
            for (b, _), e in zip(step.ahead, above, strict=True):
                orders[b].add(1 + e)
        forward = reached
    count = sum(forward.values())
    return Structures(count, tuple(frozenset(o) for o in orders), tuple(q / count for q in charges))


def best_by_length(frame: Frame, stretches: Sequence[float]) -> Structures:
    """That one of the best structures whose multiple bonds are on the shortest bonds (lengths over sums of radii)."""
    steps = _steps(frame)
    layers, final = _within_tolerance(frame, steps)
    best: dict[_State, tuple[float, _Path]] = {((), 0, 0, 0): (0.0, ())}
    for step, layer, finish in zip(steps, layers, _backward(layers, final), strict=True):
        reached: dict[_State, tuple[float, _Path]] = {}
        for before, choice, after in layer:
            if before not in best or not finish.get(after, 0):
                continue
            length, path = best[before]
            total = length + sum(e * stretches[b] for (b, _), e in zip(step.ahead, choice[0], strict=True))
            if after not in reached or total < reached[after][0]:
                reached[after] = (total, (*path, choice))
        best = reached
    return _written(frame, steps, min(best.values())[1])


def _written(frame: Frame, steps: list[_Step], path: _Path) -> Structures:
    """One structure from what each step's atom does in it."""
    orders, charges = [1] * len(frame.bonds), [0.0] * len(steps)
    for step, (above, q, _, _) in zip(steps, path, strict=True):
        charges[step.atom] = float(q)
        for (b, _), e in zip(step.ahead, above, strict=True):
            orders[b] += e
    return Structures(1, tuple(frozenset({o}) for o in orders), tuple(charges))
