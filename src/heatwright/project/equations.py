"""Reaction equations as Cantera's YAML writes them: species with coefficients, direction, and who only collides.

The rules are those that Cantera 3.2 shows when it reads such equations: words are separated by blanks, a number before
a species is its coefficient, ``M`` and ``(+M)`` are colliders, and a species that stands once on each side of a
reaction of three particles (``H + O2 + AR <=> HO2 + AR``) collides as well instead of reacting.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from math import isfinite
from typing import Final

_REVERSIBLE: Final = ("<=>", "=")
_ARROWS: Final = (*_REVERSIBLE, "=>")


@dataclass(frozen=True, slots=True)
class Equation:
    """Reactants and products with their coefficients, whether the reaction runs both ways, and its collider or ``""``.

    The collider (``M``, or a species) is among neither reactants nor products; it may react besides, as in
    ``H + H + H <=> H2 + H``.
    """

    reactants: Mapping[str, float]
    products: Mapping[str, float]
    reversible: bool
    collider: str = ""

    @property
    def species(self) -> tuple[str, ...]:
        """Every species that reacts or is made, in the order of the equation."""
        return tuple(dict.fromkeys((*self.reactants, *self.products)))

    @property
    def net(self) -> dict[str, float]:
        """Products minus reactants; a species that there is as much of on both sides is left out."""
        change = {s: self.products.get(s, 0.0) - self.reactants.get(s, 0.0) for s in self.species}
        return {s: n for s, n in change.items() if n}


def parse_equation(text: str, kind: str = "", efficiencies: Iterable[str] = ()) -> Equation:
    """The equation that *text* writes.

    kind : the reaction's ``type``, empty where none is given.   efficiencies : the species that its efficiencies name.

    Raises ValueError with what cannot be read.

    >>> equation = parse_equation("H + O2 + N2 <=> HO2 + N2")
    >>> dict(equation.reactants), dict(equation.products), equation.collider
    ({'H': 1.0, 'O2': 1.0}, {'HO2': 1.0}, 'N2')
    >>> parse_equation("2 CH3 (+M) <=> C2H6 (+M)", "falloff").net
    {'CH3': -2.0, 'C2H6': 1.0}
    """
    words = text.split()
    arrows = [i for i, word in enumerate(words) if word in _ARROWS]
    if len(arrows) != 1:
        found = "no arrow" if not arrows else f"{len(arrows)} arrows"
        raise ValueError(f"{found}; expected one of <=>, = and => between blanks")
    at = arrows[0]
    left, left_falloff = _side(words[:at])
    right, right_falloff = _side(words[at + 1 :])
    if left_falloff != right_falloff:
        raise ValueError(f"{left_falloff or 'no (+M)'} on the left and {right_falloff or 'no (+M)'} on the right")
    reversible = words[at] in _REVERSIBLE
    if left_falloff:
        return Equation(left, right, reversible, left_falloff)
    collider = _collider(left, right, kind, tuple(efficiencies))
    return Equation(_without(left, collider), _without(right, collider), reversible, collider)


def _side(words: list[str]) -> tuple[dict[str, float], str]:
    """Species with coefficients of one side, and the collider of ``(+M)``."""
    terms, falloff = _terms(words)
    amounts: dict[str, float] = {}
    for term in terms:
        coefficient, species = _term(term)
        amounts[species] = amounts.get(species, 0.0) + coefficient
    return amounts, falloff


def _terms(words: list[str]) -> tuple[list[list[str]], str]:
    terms: list[list[str]] = [[]]
    falloff = ""
    rest = iter(words)
    for word in rest:
        if word == "+":
            terms.append([])
        elif word.startswith("(+"):
            if falloff:
                raise ValueError("two colliders in brackets on one side")
            falloff = word[2:].removesuffix(")")
            if not word.endswith(")") or not falloff:
                falloff = next(rest, "").removesuffix(")")
            if not falloff:
                raise ValueError(f"{word!r} names no collider; expected (+M) or (+SPECIES)")
        else:
            terms[-1].append(word)
    return terms, falloff


def _term(words: list[str]) -> tuple[float, str]:
    if not words:
        raise ValueError("nothing stands where a species is expected")
    if len(words) > 2:
        raise ValueError(f"{' '.join(words)!r} is no species with its coefficient")
    coefficient = _number(words[0]) if len(words) == 2 else 1.0
    if coefficient is None or coefficient <= 0.0:
        raise ValueError(f"{words[0]!r} before {words[-1]} is no coefficient; expected a positive number")
    return coefficient, words[-1]


def _number(word: str) -> float | None:
    try:
        value = float(word)
    except ValueError:
        return None
    return value if isfinite(value) else None


def _collider(left: dict[str, float], right: dict[str, float], kind: str, efficiencies: tuple[str, ...]) -> str:
    """The species that only collides; empty when all react.  Falloff colliders in brackets are seen to before."""
    both = [species for species in left if species in right]
    if "M" in both:
        return "M"
    if ("M" in left) != ("M" in right):
        raise ValueError("M stands on one side only")
    if not both:
        return ""
    if kind == "electron-collision-plasma":
        return ""
    three_body = kind.startswith("three-body")
    if len(both) > 1 or (left[both[0]] > 1.0 and right[both[0]] > 1.0):
        named = [species for species in both if species in efficiencies]
        return named[0] if len(named) == 1 and len(efficiencies) == 1 else ""
    particles = (*left.values(), *right.values())
    whole = all(n == int(n) for n in particles)
    of_three = whole and 3.0 in (sum(left.values()), sum(right.values()))
    return both[0] if three_body or of_three else ""


def _without(side: dict[str, float], collider: str) -> dict[str, float]:
    """One particle of the collider less."""
    if collider not in side:
        return side
    rest = side[collider] - 1.0
    return {s: (rest if s == collider else n) for s, n in side.items() if s != collider or rest > 0.0}
