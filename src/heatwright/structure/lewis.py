"""Every best Lewis structure of a graph of atoms at once, without writing them down one by one.

The atoms are taken in an order that keeps the open ends of the graph few.  A partial structure matters for the rest
only through the multiple bonds it has begun, its charge, its unpaired electrons and its cost; partial structures alike
in these are counted together, as Kekulé structures are with a transfer matrix.  The least cost is found first (A*, with
the atoms taken apart as the bound); forward and backward counts within it then say how the structures write each bond.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from heapq import heappop, heappush
from itertools import product
from typing import TYPE_CHECKING, Final

from heatwright.structure.valence import ELECTRONEGATIVITY_UNIT, HIGHEST_ORDER

if TYPE_CHECKING:
    from heatwright.structure.frame import Frame

DEGENERATE: Final = round(0.6 * ELECTRONEGATIVITY_UNIT)
"""Structures whose charges sit on elements that differ by less than this count alike: O and N do, O and C do not."""
MOST_MOVES: Final = 150_000
"""Moves between partial structures that are looked at before a molecule is refused; C₆₀ takes 26,000, C₆₀⁺ 143,000."""
_MOST_CHARGES: Final = 8  # surplus charges that a part of a molecule may carry

_State = tuple[tuple[int, ...], int, int]  # multiple bonds begun at the open atoms, charge, unpaired electrons
_Choice = tuple[tuple[int, ...], int, int, int]  # orders above 1 of the bonds ahead, charge, unpaired, cost of the atom
_Cell = tuple[_State, int]  # a state with the cost up to it
_Move = tuple[_Cell, _Choice, _Cell]
_Path = tuple[_Choice, ...]
_Bound = dict[tuple[int, int], int]  # the least cost of the atoms still to come, by the charge and spin they must bring

_START: Final[_State] = ((), 0, 0)


class TooWide(Exception):
    """The graph has more partial structures than can be counted."""


@dataclass(frozen=True)
class Structures:
    """The best Lewis structures: how many, the orders of each bond and the mean formal charge of each atom."""

    count: int
    orders: tuple[frozenset[int], ...]
    charges: tuple[float, ...]


class _Step:
    """One atom of the order, and what it does to the open atoms before and after it."""

    def __init__(self, frame: Frame, atom: int, before: tuple[int, ...], ahead: tuple[tuple[int, int], ...]) -> None:
        self.frame, self.atom, self.ahead = frame, atom, ahead
        kept = tuple(k for k in before if k != atom)
        self.after = kept + tuple(j for _, j in ahead if j not in kept)
        self._slot = before.index(atom) if atom in before else None
        self._kept = tuple(before.index(k) for k in kept)
        self._ahead = tuple(self.after.index(j) for _, j in ahead)
        self._blank = (0,) * (len(self.after) - len(kept))
        self._choices: dict[int, list[_Choice]] = {}
        self._known: dict[_State, list[tuple[_Choice, _State]]] = {}

    def _possible(self, begun: int) -> list[_Choice]:
        """What the atom can do when multiple bonds worth ``begun`` have reached it already."""
        frame, room = self.frame, self.frame.spare[self.atom] - begun
        ranges = [range(min(HIGHEST_ORDER - 1, room, frame.spare[j]) + 1) for _, j in self.ahead]
        return [
            (orders, *completion)
            for orders in product(*ranges)
            if sum(orders) <= room
            for completion in frame.completions(self.atom, begun + sum(orders))
        ]

    def moves(self, state: _State) -> list[tuple[_Choice, _State]]:
        """Everything the atom can do after a partial structure, and what that leads to."""
        if state not in self._known:
            self._known[state] = list(self._moves(state))
        return self._known[state]

    def _moves(self, state: _State) -> Iterator[tuple[_Choice, _State]]:
        reached, charge, unpaired = state
        begun = 0 if self._slot is None else reached[self._slot]
        if begun not in self._choices:
            self._choices[begun] = self._possible(begun)
        kept = tuple(reached[k] for k in self._kept) + self._blank
        for choice in self._choices[begun]:
            orders, q, u, _ = choice
            new = list(kept)
            for place, e in zip(self._ahead, orders, strict=True):
                new[place] += e
            if all(new[p] <= self.frame.spare[self.after[p]] for p in self._ahead):
                yield choice, (tuple(new), charge + q, unpaired + u)


def _steps(frame: Frame) -> list[_Step]:
    """The order of the atoms: always the one next that leaves the fewest open."""
    near: dict[int, list[tuple[int, int]]] = {i: [] for i in range(len(frame.atomic_numbers))}
    for b in frame.open_bonds:
        i, j = frame.bonds[b]
        near[i].append((b, j))
        near[j].append((b, i))
    left, steps = set(near), []
    before: tuple[int, ...] = ()
    while left:
        i = min(before or left, key=lambda k: (sum(j in left and j not in before for _, j in near[k]), k))
        left.discard(i)
        steps.append(_Step(frame, i, before, tuple((b, j) for b, j in near[i] if j in left)))
        before = steps[-1].after
    return steps


def _bounds(frame: Frame, steps: list[_Step]) -> list[_Bound]:
    """For each step the least cost of all atoms after it, with each atom free to choose its bonds."""
    widest = abs(frame.charge) + _MOST_CHARGES
    bounds: list[_Bound] = [{(0, 0): 0}]
    for step in reversed(steps):
        least: _Bound = {}
        for above in range(frame.spare[step.atom] + 1):
            for q, u, cost in frame.completions(step.atom, above):
                least[q, u] = min(cost, least.get((q, u), cost))
        total: _Bound = {}
        for (q1, u1), c1 in bounds[-1].items():
            for (q2, u2), c2 in least.items():
                if abs(q1 + q2) <= widest and u1 + u2 <= frame.unpaired:
                    total[q1 + q2, u1 + u2] = min(c1 + c2, total.get((q1 + q2, u1 + u2), c1 + c2))
        bounds.append(total)
    return bounds[-2::-1]


def _least_cost(frame: Frame, steps: list[_Step], bounds: list[_Bound]) -> int | None:
    """The cost of the best structure, None when there is none (P. E. Hart et al., A*, 1968, from memory)."""
    heap: list[tuple[int, int, int, _State]] = [(0, 0, 0, _START)]
    done: set[tuple[int, _State]] = set()
    looked = 0
    while heap:
        _, minus, cost, state = heappop(heap)
        if -minus == len(steps):
            return cost
        if (minus, state) in done:
            continue
        done.add((minus, state))
        for choice, after in steps[-minus].moves(state):
            rest = bounds[-minus].get((frame.charge - after[1], frame.unpaired - after[2]))
            looked += 1
            if rest is not None:
                heappush(heap, (cost + choice[3] + rest, minus - 1, cost + choice[3], after))
        if looked > MOST_MOVES:
            raise TooWide
    return None


def _within(frame: Frame, steps: list[_Step], bounds: list[_Bound], most: int) -> list[list[_Move]]:
    """Step by step, every move that can be part of a structure of at most this cost."""
    now: set[_Cell] = {(_START, 0)}
    layers: list[list[_Move]] = []
    looked = 0
    for step, bound in zip(steps, bounds, strict=True):
        moves: list[_Move] = []
        for cell in now:
            state, cost = cell
            for choice, after in step.moves(state):
                looked += 1
                rest = bound.get((frame.charge - after[1], frame.unpaired - after[2]))
                if rest is not None and cost + choice[3] + rest <= most:
                    moves.append((cell, choice, (after, cost + choice[3])))
        if looked > MOST_MOVES:
            raise TooWide
        layers.append(moves)
        now = {after for _, _, after in moves}
    return layers


@dataclass(frozen=True)
class Solution:
    """All best structures of a frame at once: every move between partial structures, and how many ways finish it."""

    frame: Frame
    steps: list[_Step]
    layers: list[list[_Move]]
    ways: list[dict[_Cell, int]]

    def structures(self) -> Structures:
        """All of them, counted."""
        orders: list[set[int]] = [set() for _ in self.frame.bonds]
        for b in set(range(len(orders))) - set(self.frame.open_bonds):
            orders[b] = {1}
        charges = [0] * len(self.steps)
        forward: dict[_Cell, int] = {(_START, 0): 1}
        for step, layer, finish in zip(self.steps, self.layers, self.ways, strict=True):
            reached: dict[_Cell, int] = defaultdict(int)
            for before, (above, q, _, _), after in layer:
                n = forward.get(before, 0) * finish.get(after, 0)
                if not n:
                    continue
                reached[after] += forward[before]
                charges[step.atom] += q * n
                for (b, _), e in zip(step.ahead, above, strict=True):
                    orders[b].add(1 + e)
            forward = reached
        count = sum(forward.values())
        return Structures(count, tuple(frozenset(o) for o in orders), tuple(q / count for q in charges))

    def shortest(self, stretches: Sequence[float]) -> Structures:
        """That one of them whose multiple bonds are on the shortest bonds (lengths over sums of radii)."""
        best: dict[_Cell, tuple[float, _Path]] = {(_START, 0): (0.0, ())}
        for step, layer, finish in zip(self.steps, self.layers, self.ways, strict=True):
            reached: dict[_Cell, tuple[float, _Path]] = {}
            for before, choice, after in layer:
                if before not in best or not finish.get(after, 0):
                    continue
                length, path = best[before]
                total = length + sum(e * stretches[b] for (b, _), e in zip(step.ahead, choice[0], strict=True))
                if after not in reached or total < reached[after][0]:
                    reached[after] = (total, (*path, choice))
            best = reached
        return self._written(min(best.values())[1])

    def _written(self, path: _Path) -> Structures:
        """One structure from what each step's atom does in it."""
        orders, charges = [1] * len(self.frame.bonds), [0.0] * len(self.steps)
        for step, (above, q, _, _) in zip(self.steps, path, strict=True):
            charges[step.atom] = float(q)
            for (b, _), e in zip(step.ahead, above, strict=True):
                orders[b] += e
        return Structures(1, tuple(frozenset({o}) for o in orders), tuple(charges))


def lewis_structures(frame: Frame) -> Solution | None:
    """The best Lewis structures of a graph, or None when there is none of this charge and spin.

    In order: the fewest vacant orbitals, the smallest formal charges, the fewest expanded shells; what is equal so far
    and has its charges on elements nearly as electronegative counts as equal.

    Raises TooWide when the graph is too large and too branched to be counted.

    >>> from heatwright.structure.frame import Frame
    >>> ozone = lewis_structures(Frame((8, 8, 8), ((0, 1), (1, 2)), 0, 0)).structures()
    >>> ozone.count, [sorted(o) for o in ozone.orders], ozone.charges
    (2, [[1, 2], [1, 2]], (-0.5, 1.0, -0.5))
    """
    steps = _steps(frame)
    bounds = _bounds(frame, steps)
    least = _least_cost(frame, steps, bounds)
    if least is None:
        return None
    layers = _within(frame, steps, bounds, least + DEGENERATE)
    ways: list[dict[_Cell, int]] = [{after: 1 for _, _, after in layers[-1]}]
    for layer in reversed(layers[1:]):
        earlier: dict[_Cell, int] = defaultdict(int)
        for before, _, after in layer:
            earlier[before] += ways[-1].get(after, 0)
        ways.append(earlier)
    return Solution(frame, steps, layers, ways[::-1])
