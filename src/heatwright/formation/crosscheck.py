"""Whether the enthalpies of formation of a set of species agree with each other, judged by energies of one level.

Every balanced reaction among the species ties their enthalpies together: what the entries say of its heat and what the
energies say must agree within the joint uncertainty of both.  Isomers and bonds of one kind that break in two molecules
are the reactions that a chemist would look at first.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations
from math import hypot
from typing import TYPE_CHECKING, Literal

from heatwright.formation.balance import account, surplus
from heatwright.formation.phrases import COVERAGE
from heatwright.formation.reactions import Reaction, find_reactions, reaction_sd_kJ_mol

if TYPE_CHECKING:
    from heatwright.formation.entry_set import EntryRow
    from heatwright.formation.error_model import ErrorScales
    from heatwright.formation.reference_set import Reference
    from heatwright.formation.usable import ReferenceErrors

RelationKind = Literal["isomers", "bond dissociation", "reaction", "all others", "two routes"]


@dataclass(frozen=True, slots=True)
class Relation:
    """One thing that ties enthalpies of formation together, kJ/mol at 0 K (two routes: at 298.15 K).

    text : the reaction, or what is compared.   species : the names in it.
    stated_kJ_mol : by the entries.   expected_kJ_mol : by the energies.   u95_kJ_mol : of their difference.
    """

    kind: RelationKind
    text: str
    species: tuple[str, ...]
    stated_kJ_mol: float
    expected_kJ_mol: float
    u95_kJ_mol: float

    @property
    def difference_kJ_mol(self) -> float:
        """Stated minus expected."""
        return self.stated_kJ_mol - self.expected_kJ_mol

    @property
    def disagrees(self) -> bool:
        """Whether the difference is beyond the joint 95 % uncertainty."""
        return abs(self.difference_kJ_mol) > self.u95_kJ_mol

    @property
    def severity(self) -> float:
        """The difference in units of its 95 % uncertainty."""
        return abs(self.difference_kJ_mol) / self.u95_kJ_mol


def relations(
    species: Sequence[Reference], scales: ErrorScales, errors: ReferenceErrors | None, *, reactions_each: int = 2
) -> tuple[Relation, ...]:
    """All relations among species at one level, those that disagree most first.

    species : one output each, with the enthalpy of its entry as reference row.   errors : with atoms at the level, for
    the comparison of each species with all others together.
    """
    found: dict[str, Relation] = {}
    sources = (
        _isomers(species, scales),
        _dissociations(species, scales),
        _reactions(species, scales, reactions_each),
        _left_out(errors),
    )
    for relation in (r for source in sources for r in source):
        found.setdefault(_key(relation), relation)
    return tuple(sorted(found.values(), key=lambda r: (-r.severity, r.text)))


def _key(relation: Relation) -> str:
    """The same for a reaction and its reverse."""
    sides = relation.text.split(" -> ")
    return " = ".join(sorted(" + ".join(sorted(side.split(" + "))) for side in sides))


def _relation(kind: RelationKind, first: Reference, coefficient: int, others: Reaction) -> Relation:
    """A reaction with *first* on the left as a relation: heat of reaction by the entries and by the energies."""
    terms = ((-coefficient, first), *others.terms)
    stated = sum(n * r.dHf0_kJ_mol for n, r in terms)
    expected = sum(n * r.energy0_kJ_mol for n, r in terms)
    sd = hypot(others.sd_kJ_mol * coefficient, coefficient * first.row.u95_kJ_mol / COVERAGE)
    names = tuple(dict.fromkeys(r.name for _, r in terms))
    return Relation(kind, others.text, names, stated, expected, COVERAGE * sd)


def _made(first: Reference, terms: tuple[tuple[int, Reference], ...], scales: ErrorScales) -> Reaction:
    sd = reaction_sd_kJ_mol(first.bonding, 1, terms, scales)
    return Reaction(first.row.name, 1, terms, "isodesmic", sd)


def _isomers(species: Sequence[Reference], scales: ErrorScales) -> Iterator[Relation]:
    """Pairs of one composition and charge; where bond types differ the uncertainty says so."""
    for a, b in combinations(species, 2):
        if not surplus([(-1, account(a.model, a.bonding).elements), (1, account(b.model, b.bonding).elements)]):
            yield _relation("isomers", a, 1, _made(a, ((1, b),), scales))


def _dissociations(species: Sequence[Reference], scales: ErrorScales) -> Iterator[Relation]:
    """RH + R' -> R + R'H: one kind of bond to hydrogen broken in two molecules."""
    pairs = [(parent, radical, bond) for parent in species for radical in species if (bond := _broken(parent, radical))]
    for (rh, r, bond), (other_rh, other_r, other_bond) in combinations(pairs, 2):
        if bond == other_bond and rh is not other_rh and r is not other_r:
            yield _relation("bond dissociation", rh, 1, _made(rh, ((-1, other_r), (1, r), (1, other_rh)), scales))


def _broken(parent: Reference, radical: Reference) -> str:
    """The bond to hydrogen in which a parent and its radical differ, or an empty text."""
    if radical.bonding.unpaired != parent.bonding.unpaired + 1:
        return ""
    mine, theirs = account(parent.model, parent.bonding), account(radical.model, radical.bonding)
    if surplus([(1, mine.elements), (-1, theirs.elements)]) != {"element H": 1}:
        return ""
    lost = surplus([(1, parent.bonding.types), (-1, radical.bonding.types)])
    only = [label for label, n in lost.items() if n == 1 and "H" in label.split("-")]
    return only[0] if len(lost) == 1 and only else ""


def _reactions(species: Sequence[Reference], scales: ErrorScales, each: int) -> Iterator[Relation]:
    for target in species:
        others = [r for r in species if r is not target]
        for reaction in find_reactions(target.model, target.bonding, others, scales, name=target.row.name, count=each):
            yield _relation("reaction", target, reaction.target_coefficient, reaction)


def _left_out(errors: ReferenceErrors | None) -> Iterator[Relation]:
    if errors is None:
        return
    left = errors.left_out
    for reference, residual, sd in zip(errors.references, left.residual_kJ_mol, left.sd_kJ_mol, strict=True):
        stated = reference.dHf0_kJ_mol
        text = f"{reference.row.name} and all others"
        u95 = COVERAGE * float(sd)
        yield Relation("all others", text, (reference.name,), stated, stated + float(residual), u95)


def two_routes(rows: Sequence[EntryRow]) -> Iterator[Relation]:
    """Pairs of routes that were gone for one species and state their uncertainties, compared at 298.15 K."""
    for row in rows:
        stated = [(route, value, u95) for route, value, u95 in row.routes if u95 is not None]
        for (route, value, u95), (other, other_value, other_u95) in combinations(stated, 2):
            text = f"{row.name}: {route} and {other}"
            yield Relation("two routes", text, (row.name,), value, other_value, hypot(u95, other_u95))


def suspects(found: Sequence[Relation]) -> tuple[tuple[str, int, int], ...]:
    """Each species that is in a relation that disagrees: name, number of those, number of all it is in; worst first."""
    tally: dict[str, list[int]] = {}
    for relation in found:
        for name in relation.species:
            counts = tally.setdefault(name, [0, 0])
            counts[0] += relation.disagrees
            counts[1] += 1
    rows = [(name, bad, total) for name, (bad, total) in tally.items() if bad]
    return tuple(sorted(rows, key=lambda row: (-row[1] / row[2], -row[1], row[0])))
