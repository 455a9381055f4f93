"""Balanced reactions of a target with reference species: found by an integer programme, and what they are worth.

A reaction in which the bonds of every type and the unpaired electrons are balanced (isodesmic) lets the errors of the
level of theory cancel; where the surroundings of the atoms are balanced too it is homodesmotic.  Anything less is worse
than atomization and is not offered.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from math import gcd, sqrt
from typing import TYPE_CHECKING, Any, Final, Literal

import numpy as np

from heatwright.formation.balance import Account, account, surplus

if TYPE_CHECKING:
    from heatwright.formation.error_model import ErrorScales
    from heatwright.formation.reference_set import Reference
    from heatwright.molecule import FloatArray
    from heatwright.partition.model import ThermoModel
    from heatwright.structure.bond_orders import Bonding

Kind = Literal["homodesmotic", "isodesmic", "unbalanced"]
LARGEST_COEFFICIENT: Final = 3
LARGEST_TARGET_COEFFICIENT: Final = 2


@dataclass(frozen=True, eq=False)
class Reaction:
    """A reaction with the target on the left: target_coefficient × target + reactants → products.

    terms : (coefficient, reference), negative coefficients on the left.   kind : what it balances.
    sd_kJ_mol : expected standard deviation of the target's enthalpy of formation, from the error model.
    """

    target: str
    target_coefficient: int
    terms: tuple[tuple[int, Reference], ...]
    kind: Kind
    sd_kJ_mol: float

    @property
    def text(self) -> str:
        """The reaction as a chemist writes it."""
        left = [(self.target_coefficient, self.target)] + [(-n, r.row.name) for n, r in self.terms if n < 0]
        right = [(n, r.row.name) for n, r in self.terms if n > 0]
        return f"{_side(left)} -> {_side(right)}"


def _side(terms: Sequence[tuple[int, str]]) -> str:
    return " + ".join(name if n == 1 else f"{n} {name}" for n, name in terms)


def reaction_sd_kJ_mol(
    bonding: Bonding,
    target_coefficient: int,
    terms: Sequence[tuple[int, Reference]],
    scales: ErrorScales,
) -> float:
    """Standard deviation of the target's enthalpy of formation by a reaction, from the covariance of error_model.

    What is balanced contributes nothing; the own errors of all species and the uncertainties of the references remain.
    """
    rows = [(-target_coefficient, bonding, 0.0), *((n, r.bonding, r.row.u95_kJ_mol / 2.0) for n, r in terms)]
    bonds = surplus([(n, b.types) for n, b, _ in rows])
    unpaired = sum(n * b.unpaired for n, b, _ in rows)
    shared = scales.bond_kJ_mol**2 * sum(x * x for x in bonds.values()) + (scales.spin_kJ_mol * unpaired) ** 2
    shared += (scales.charge_kJ_mol * sum(n * b.charge for n, b, _ in rows)) ** 2
    own = sum(n * n * (scales.own_kJ_mol**2 * (sum(b.types.values()) + 0.5) + u * u) for n, b, u in rows)
    return sqrt(shared + own) / target_coefficient


def find_reactions(
    target: ThermoModel,
    bonding: Bonding,
    references: Sequence[Reference],
    scales: ErrorScales,
    *,
    name: str,
    count: int = 5,
) -> tuple[Reaction, ...]:
    """The balanced reactions of the target with the references, those of smallest expected deviation first.

    Half of the *count* is looked for among homodesmotic reactions, the rest among isodesmic ones; fewer or none come
    back when there are no more.
    """
    mine = account(target, bonding)
    references = _balanceable(mine, references)
    theirs = [account(r.model, r.bonding) for r in references]
    weights = np.sqrt([_own_variance(r.bonding, scales) + (r.row.u95_kJ_mol / 2.0) ** 2 for r in references])
    found: dict[tuple[tuple[int, str], ...], Reaction] = {}
    for kind, most in (("homodesmotic", (count + 1) // 2), ("isodesmic", count)):
        programme = _programme(mine, theirs, kind == "homodesmotic", weights, sqrt(_own_variance(bonding, scales)))
        if programme is None:
            continue
        for coefficient, numbers in programme.solutions(most):
            terms = tuple((int(n), references[i]) for i, n in enumerate(numbers) if n)
            key = tuple((n, r.file) for n, r in terms)
            if key not in found and len(found) < count:
                sd = reaction_sd_kJ_mol(bonding, coefficient, terms, scales)
                found[key] = Reaction(name, coefficient, terms, balanced_kind(mine, theirs, coefficient, numbers), sd)
    return tuple(sorted(found.values(), key=lambda r: (round(r.sd_kJ_mol, 9), len(r.terms), r.text)))


def _balanceable(mine: Account, references: Sequence[Reference]) -> list[Reference]:
    """The references without those that nothing can balance: the only ones with an element or a bond, again and again
    until none is left out."""
    held = [(r, {name for part in (a.elements, a.bonds) for name in part}) for r, a in _accounts(references)]
    while True:
        counts = Counter(name for _, names in held for name in names)
        counts.update({*mine.elements, *mine.bonds})
        kept = [(r, names) for r, names in held if all(counts[name] > 1 for name in names)]
        if len(kept) == len(held):
            return [r for r, _ in kept]
        held = kept


def _accounts(references: Sequence[Reference]) -> list[tuple[Reference, Account]]:
    return [(r, account(r.model, r.bonding)) for r in references]


def _own_variance(bonding: Bonding, scales: ErrorScales) -> float:
    return scales.own_kJ_mol**2 * (sum(bonding.types.values()) + 0.5)


def balanced_kind(mine: Account, theirs: Sequence[Account], coefficient: int, numbers: Sequence[int]) -> Kind:
    """What a reaction balances, by its accounts and coefficients."""

    def left(part: str) -> dict[str, int]:
        rows = [(-coefficient, getattr(mine, part)), *zip(numbers, (getattr(t, part) for t in theirs), strict=True)]
        return surplus([(int(n), counts) for n, counts in rows])

    if left("elements") or left("bonds"):
        return "unbalanced"
    return "isodesmic" if left("surroundings") else "homodesmotic"


@dataclass(frozen=True, eq=False)
class _Programme:
    """balance @ (products − reactants) = balance of the target × its coefficient, all of them whole numbers.

    matrix : (m, n) counts of the references.   target : (m,) of the target.   weights : (n,) and target_weight : costs.
    """

    matrix: FloatArray
    target: FloatArray
    weights: FloatArray
    target_weight: float

    def solutions(self, most: int) -> Iterator[tuple[int, list[int]]]:
        """Coefficient of the target and of each reference (negative as reactant), cheapest first.

        After each solution its set of species is forbidden, supersets of it included.
        """
        from scipy.optimize import Bounds, LinearConstraint, milp

        n = self.weights.size
        cost = np.concatenate([self.weights, self.weights, [self.target_weight], np.zeros(n)])
        low = np.zeros(3 * n + 1)
        low[2 * n] = 1.0
        high = np.concatenate([np.full(2 * n, LARGEST_COEFFICIENT), [LARGEST_TARGET_COEFFICIENT], np.ones(n)])
        eye = np.eye(n)
        balance = np.hstack([self.matrix, -self.matrix, -self.target[:, None], np.zeros((self.target.size, n))])
        used = np.hstack([eye, eye, np.zeros((n, 1)), -LARGEST_COEFFICIENT * eye])
        constraints: list[Any] = [LinearConstraint(balance, 0.0, 0.0), LinearConstraint(used, -np.inf, 0.0)]
        for _ in range(most):
            result = milp(
                cost,
                constraints=constraints,
                integrality=np.ones(cost.size),
                bounds=Bounds(low, high),
                options={"node_limit": 5000},
            )
            if result.x is None:
                return
            x = np.round(result.x).astype(int)
            numbers = x[:n] - x[n : 2 * n]
            coefficient = int(x[2 * n])
            if np.any(self.matrix @ numbers != coefficient * self.target):
                return  # a numerical artefact of the solver is no reaction
            divisor = gcd(coefficient, *(int(k) for k in numbers))
            yield coefficient // divisor, [int(k) // divisor for k in numbers]
            forbidden = np.zeros(cost.size)
            forbidden[2 * n + 1 + np.flatnonzero(numbers)] = 1.0
            constraints.append(LinearConstraint(forbidden[None, :], -np.inf, float(np.count_nonzero(numbers)) - 1.0))


def _programme(
    mine: Account, theirs: Sequence[Account], homodesmotic: bool, weights: FloatArray, target_weight: float
) -> _Programme | None:
    """The integer programme, or None when the target has something that no reference has."""
    rows = [_counts(a, homodesmotic) for a in (mine, *theirs)]
    names = sorted({name for row in rows for name in row})
    table = np.array([[float(row.get(name, 0)) for name in names] for row in rows])
    wanted, matrix = table[0], table[1:].T
    if not theirs or np.any((wanted != 0.0) & ~np.any(matrix != 0.0, axis=1)):
        return None
    return _Programme(matrix, wanted, weights, target_weight)


def _counts(a: Account, homodesmotic: bool) -> Mapping[str, int]:
    return {**a.elements, **a.bonds, **(a.surroundings if homodesmotic else {})}
