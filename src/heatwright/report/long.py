"""What a page of very many species says once, or in a line, where a page of few has a caption or a table for each."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import replace
from typing import Final

from heatwright.report.drawing import Figure
from heatwright.report.species import Route, Species

MOST_IN_FULL: Final = 100
"""Up to so many species a page shows every table whole."""

OWN_CAPTIONS: Final = ("torsion", "conformers")
"""Kinds of figures whose captions hold numbers of their species, so that a long page keeps them."""

LEGEND: Final = {
    "structure": "Structures are projected; bonds in colour are treated as torsions.",
    "cp": "Heat capacity Cp°/R: the line is the two-range polynomial, dots are the table from the partition function "
    "(shaded: two standard uncertainties, where they were stated); the ranges meet at the dotted line.",
    "slope": "A step of T d(Cp°/R)/dT at the common temperature (dotted) is a kink of Cp°.",
    "residuals": "Polynomial less table: the band is the proven lower bound of the largest error in Cp°/R of any two "
    "quartics joined with continuous value and slope; dotted is the common temperature.",
    "cp-shares": "Contributions are stacked in the order of the names at the right.",
    "formation": "ΔfH°(298.15 K) is shown by each route, the first one in use; bars are 95 % uncertainties.",
}
"""One sentence for each kind of figure."""

HOW_TO_SEE_ALL: Final = (
    "the numbers beside each plot are few telling rows, and what all species have in common is said here once. Every "
    "row is in a report of fewer of them; `heatwright table OUTPUT --format csv` has the functions at any temperature."
)


def legend(kinds: Collection[str]) -> list[str]:
    """The sentences for the kinds of figures that occur."""
    return [text for kind, text in LEGEND.items() if kind in kinds]


def common_facts(species: Sequence[Species]) -> tuple[tuple[str, str], ...]:
    """Facts that all of several species have with the same value."""
    if len(species) < 2:
        return ()
    shared = set(species[0].facts).intersection(*(s.facts for s in species[1:]))
    return tuple(fact for fact in species[0].facts if fact in shared)


def facts_line(species: Species, common: Collection[tuple[str, str]]) -> str:
    """The other facts of one species and its wavenumbers in one line."""
    facts = [f"{what}: {value}" for what, value in species.facts if (what, value) not in common]
    nu = ", ".join(f"{value:.0f}".replace("-", "−") for value in species.wavenumbers_cm1)
    return "; ".join([*facts, *([f"wavenumbers: {nu} cm⁻¹, unscaled"] if nu else [])])


def ledger_text(route: Route) -> str:
    """A ledger as lines of text, the numbers below one another.

    >>> print(ledger_text(Route("given", "", -1.5, None, 0.25, (("as given", -1.5, "a paper"),))))
          −1.500  as given (a paper)
          −1.500  ΔfH°(298.15 K), ± 0.25
    """
    items = [(value, f"{what}{f' ({source})' if source else ''}") for what, value, source in route.ledger]
    unsure = "" if route.u95_kJ_mol is None else f", ± {route.u95_kJ_mol:.2f}"
    items.append((route.dHf298_kJ_mol, f"ΔfH°(298.15 K){unsure}"))
    return "\n".join(f"{value:z12.3f}".replace("-", "−") + f"  {what}" for value, what in items)


def ledger_line(route: Route) -> str:
    """A ledger as one line: every item with its value; sources are in the sentence that goes with the route.

    >>> ledger_line(Route("reactions", "", -1.0, None, None, (("CH4 + H2O", -0.25, "x"), ("ZPE", 1.0, ""))))
    'CH4 + H2O −0.250; ZPE 1.000'
    """
    items = (f"{what} {value:z.3f}" for what, value, _ in route.ledger)
    return "; ".join(items).replace(" -", " −")


def telling(figure: Figure) -> Figure:
    """The figure with those rows that a long page shows; of a structure the coordinates in one column."""
    rows = figure.rows
    if figure.key == "structure":
        joined = tuple((atom, f"{x} {y} {z}", bonds) for atom, x, y, z, bonds in rows)
        return replace(figure, columns=("atom", "x, y, z / Å", "bonds"), rows=joined)
    few = rows if figure.telling is None else tuple(rows[i] for i in figure.telling if i < len(rows))
    return replace(figure, rows=few)
