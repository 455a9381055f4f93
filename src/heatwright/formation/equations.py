"""Reactions that a user writes down: the text, and which species it means."""

from __future__ import annotations

import re
from collections.abc import Collection, Sequence
from difflib import get_close_matches
from typing import TYPE_CHECKING

from heatwright.elements import formula
from heatwright.errors import UsageError
from heatwright.findings import Finding, Refused, refuse
from heatwright.formation.reference_set import Reference, species_name

if TYPE_CHECKING:
    from heatwright.partition.model import ThermoModel

Side = tuple[tuple[int, str], ...]

_ARROW = re.compile(r"<=>|<->|-->|->|=>|⇌|→|=")
_TERM = re.compile(r"(?:(\d+)\s*(?:[*×]\s*|\s))?\s*(\S+)")


def parse_reaction(text: str) -> tuple[Side, Side]:
    """The two sides of a reaction, each as (coefficient, name) pairs; names are parted by `` + `` with blanks.

    >>> parse_reaction("CH3OCH3 + H2O -> 2 CH3OH")
    (((1, 'CH3OCH3'), (1, 'H2O')), ((2, 'CH3OH'),))

    Raises UsageError when the text is no reaction.
    """
    sides = _ARROW.split(text)
    if len(sides) != 2:
        raise UsageError(f"reaction {text!r}: expected two sides with one arrow, such as 'A + B -> 2 C'")
    left, right = (tuple(_term(part, text) for part in re.split(r"\s\+\s", side)) for side in sides)
    return left, right


def _term(part: str, text: str) -> tuple[int, str]:
    match = _TERM.fullmatch(part.strip())
    if match is None or int(match[1] or 1) < 1:
        raise UsageError(
            f"reaction {text!r}: {part.strip()!r} is no species with its coefficient, such as 'CH4' or '2 CH3OH'; "
            "part species by ' + ' with blanks"
        )
    return int(match[1] or 1), match[2]


def resolved(
    text: str, target: ThermoModel, references: Sequence[Reference], *, name: str = ""
) -> tuple[int, tuple[tuple[int, Reference], ...]]:
    """The reaction with the target on the left: its coefficient, and (coefficient, reference) of the others.

    name : what the entry is called.  A species may be called by its file, its name in the table or its formula.
    Raises Refused when a name means no species or several, or when the target is not on exactly one side.
    """
    left, right = parse_reaction(text)
    own = {name, species_name(target.molecule)} - {""}
    if not any(n in own for _, n in (*left, *right)):
        own = {formula(target.composition, target.molecule.charge or 0)}
    sides = [side for side in (left, right) if any(n in own for _, n in side)]
    if len(sides) != 1:
        where = "on both sides" if sides else "on neither side"
        raise Refused(
            [
                refuse(
                    "reaction-wrong",
                    f"in {text!r} the species itself ({' or '.join(sorted(own))}) stands {where}",
                    expected="the species on one side and reference species on the other places",
                    action="A species cannot be its own reference." if sides else "Name it as the entry is named.",
                )
            ]
        )
    flip = 1 if sides[0] is left else -1
    signed = [(-flip * n, called) for n, called in left] + [(flip * n, called) for n, called in right]
    coefficient = -sum(n for n, called in signed if called in own)
    terms: dict[Reference, int] = {}
    for n, called in signed:
        if called not in own:
            reference = _meant(called, references, text)
            terms[reference] = terms.get(reference, 0) + n
    return coefficient, tuple((n, reference) for reference, n in terms.items() if n)


def _meant(called: str, references: Sequence[Reference], text: str) -> Reference:
    for names in (lambda r: {r.name}, lambda r: {r.row.name}, lambda r: r.aliases):
        meant = [r for r in references if called in names(r)]
        if len(meant) == 1:
            return meant[0]
        if meant:
            raise Refused([_ambiguous(called, [f"{r.name} ({r.row.name})" for r in meant], text)])
    known = sorted({r.name for r in references})
    near = get_close_matches(called, known, 1, 0.5)
    raise Refused(
        [
            refuse(
                "reaction-wrong",
                f"there is no reference output for {called!r} in {text!r}",
                expected=f"one of {', '.join(known)}" if known else "reference outputs in the --references folder",
                action=f"Did you mean {near[0]}?" if near else "Compute it at the level of the molecule.",
            )
        ]
    )


def _ambiguous(called: str, candidates: Collection[str], text: str) -> Finding:
    return refuse(
        "reaction-wrong",
        f"{called!r} in {text!r} may mean {' or '.join(candidates)}",
        action="Call the species by the name of its file.",
    )
