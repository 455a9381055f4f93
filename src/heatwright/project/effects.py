"""What changed entries do to a mechanism: ln Kc(T) of the reactions they take part in, and reverse rates.

Kc = (p°/RT)^Δn · exp(−ΔrG°/RT); at one temperature and standard pressure only ΔrG° moves, so Δln Kc = −Σ νᵢ ΔGᵢ°/RT.
A reverse rate that Kc makes from the forward one, k_r = k_f/Kc, moves by the factor exp(−Δln Kc).
"""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, log

from heatwright.findings import Finding, note
from heatwright.project.changes import Change, Comparison
from heatwright.project.mechanism import Mechanism, Reaction


@dataclass(frozen=True, slots=True, kw_only=True)
class ReactionChange:
    """One reaction in which a species that moved is reactant or product.

    species : those species.   dlnKc : NEW minus OLD at the comparison's temperatures, None where it cannot be said.
    remarks : why it cannot, or why nothing follows from it.
    """

    reaction: Reaction
    species: tuple[str, ...]
    dlnKc: tuple[float | None, ...]
    remarks: tuple[str, ...] = ()

    @property
    def largest(self) -> float:
        """The largest |Δln Kc|; infinite when none is known."""
        return max((abs(x) for x in self.dlnKc if x is not None), default=float("inf"))

    @property
    def reverse_factors(self) -> tuple[float | None, ...]:
        """By what the reverse rate constant is multiplied; None where Kc does not make it or is not known."""
        if not self.reaction.equation.reversible or self.reaction.forward_moves:
            return (None,) * len(self.dlnKc)
        return tuple(None if x is None else exp(-max(-700.0, min(700.0, x))) for x in self.dlnKc)

    def reverse_moves_by(self, factor: float) -> bool:
        """Whether the reverse rate moves up or down by more than *factor* at one of the temperatures."""
        return any(f is not None and abs(log(f)) > log(factor) for f in self.reverse_factors)


@dataclass(frozen=True, slots=True, kw_only=True)
class MechanismEffect:
    """What the changes do to a mechanism: the reactions concerned, those that move most first, and findings."""

    mechanism: Mechanism
    reactions: tuple[ReactionChange, ...]
    findings: tuple[Finding, ...]

    def beyond(self, factor: float) -> tuple[ReactionChange, ...]:
        """The reactions whose reverse rate moves by more than *factor*."""
        return tuple(r for r in self.reactions if r.reverse_moves_by(factor))


def mechanism_effect(mechanism: Mechanism, comparison: Comparison) -> MechanismEffect:
    """Every reaction in which a species that moved is reactant or product; colliders do not count."""
    # a renamed species is known to the mechanism by its old name
    moved = {c.old.name: c for c in comparison.changes if c.moved and c.old is not None}
    all_of_them = {c.name: c for c in comparison.changes if c.difference is not None and c.kind != "renamed"} | moved
    n = len(comparison.temperatures_K)
    concerned = [
        _reaction_change(reaction, tuple(s for s in reaction.equation.species if s in moved), all_of_them, n)
        for reaction in mechanism.reactions
        if any(s in moved for s in reaction.equation.species)
    ]
    concerned.sort(key=lambda r: (-r.largest, r.reaction.number))
    return MechanismEffect(
        mechanism=mechanism,
        reactions=tuple(concerned),
        findings=(*mechanism.findings, *_absent(mechanism, moved)),
    )


def _reaction_change(
    reaction: Reaction, species: tuple[str, ...], by_name: dict[str, Change], n: int
) -> ReactionChange:
    """*species* are those of the reaction that moved, *n* the number of temperatures."""
    net = reaction.equation.net
    remarks = [r for s in species for r in _cannot(s, by_name[s])]
    sums: list[float | None] = [None] * n
    if not remarks:
        changes = [(nu, by_name[s].difference) for s, nu in net.items() if s in by_name]
        terms = [[None if g is None else -nu * g for g in d.dG_RT] for nu, d in changes if d is not None]
        sums = [_sum([row[i] for row in terms]) for i in range(n)]
    if not any(s in net for s in species):
        remarks.append(f"as much of {', '.join(species)} on both sides")
    if not reaction.equation.reversible:
        remarks.append("irreversible: no rate follows from Kc")
    if reaction.forward_moves:
        remarks.append("the forward rate depends on the enthalpy of reaction and moves as well")
    return ReactionChange(reaction=reaction, species=species, dlnKc=tuple(sums), remarks=tuple(remarks))


def _sum(terms: list[float | None]) -> float | None:
    known = [x for x in terms if x is not None]
    # adding 0.0 turns a sum of −0.0 into 0.0
    return sum(known) + 0.0 if len(known) == len(terms) else None


def _cannot(name: str, change: Change) -> list[str]:
    if change.kind == "removed":
        return [f"NEW has no entry of {name}"]
    if change.kind == "other species":
        return [f"{name} is another species in NEW"]
    if change.kind == "renamed":
        return [f"{name} is called {change.name} in NEW"]
    return []


def _absent(mechanism: Mechanism, moved: dict[str, Change]) -> list[Finding]:
    """Species that moved and are in no reaction of the mechanism."""
    reacting = {s for r in mechanism.reactions for s in r.equation.species}
    absent = sorted(name for name in moved if name not in reacting)
    by_case = {s.upper(): s for s in reacting}
    said = []
    for name in absent:
        near = by_case.get(name.upper())
        found = f"{name} takes part in none of its {len(mechanism.reactions)} reactions"
        action = f"The mechanism has {near}: names are case-sensitive." if near else ""
        said.append(note("not-in-mechanism", found, where=mechanism.path, action=action))
    return said
