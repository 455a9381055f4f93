"""The question a Lewis structure answers: a graph of atoms with a charge and a number of unpaired electrons."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Final

from heatwright.structure.valence import Setting, most_bonds, states, valence_electrons

_SMALL_RING: Final = 5


@dataclass(frozen=True)
class Frame:
    """What a Lewis structure is to be found for: elements, bonds as pairs of indices, charge, unpaired electrons."""

    atomic_numbers: tuple[int, ...]
    bonds: tuple[tuple[int, int], ...]
    charge: int
    unpaired: int

    @cached_property
    def near(self) -> tuple[tuple[int, ...], ...]:
        """The neighbours of each atom."""
        found: list[list[int]] = [[] for _ in self.atomic_numbers]
        for i, j in self.bonds:
            found[i].append(j)
            found[j].append(i)
        return tuple(map(tuple, found))

    @cached_property
    def spare(self) -> tuple[int, ...]:
        """How much each atom can bear above a single bond to each neighbour; nothing for a halogen at an end."""
        pairs = [(z, len(near)) for z, near in zip(self.atomic_numbers, self.near, strict=True)]
        return tuple(0 if d == 1 and valence_electrons(z) == 7 else max(most_bonds(z) - d, 0) for z, d in pairs)

    @cached_property
    def open_bonds(self) -> tuple[int, ...]:
        """Bonds that could be multiple, as indices into ``bonds``."""
        return tuple(b for b, (i, j) in enumerate(self.bonds) if self.spare[i] and self.spare[j])

    @cached_property
    def settings(self) -> tuple[Setting, ...]:
        """What, besides its bonds, the cost of each atom depends on."""
        return tuple(Setting(self.charge >= 0, self._in_small_ring(i)) for i in range(len(self.atomic_numbers)))

    def _in_small_ring(self, i: int) -> bool:
        """Whether the atom has two neighbours only, and both in one ring of at most five atoms."""
        if len(self.near[i]) != 2:
            return False
        start, end = self.near[i]
        reached = {start}
        for _ in range(_SMALL_RING - 2):
            reached |= {k for j in reached for k in self.near[j] if k != i}
        return end in reached

    def completions(self, i: int, above: int) -> tuple[tuple[int, int, int], ...]:
        """Charge, unpaired electrons and cost of atom i when its bond orders add up to their number + ``above``."""
        found = states(self.atomic_numbers[i], len(self.near[i]), above, self.settings[i])
        return tuple((s.charge, s.unpaired, s.cost) for s in found if s.unpaired <= self.unpaired)
