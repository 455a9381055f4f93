"""All figures of one species, in the order in which they are shown."""

from __future__ import annotations

from heatwright.report.curves import heat_capacity, residual_strips
from heatwright.report.drawing import Figure
from heatwright.report.potential import torsional_potential
from heatwright.report.routes import formation_routes
from heatwright.report.shares import populations, stacked_shares
from heatwright.report.slopes import slope
from heatwright.report.species import Species
from heatwright.report.structure import structure

KINDS = ("structure", "cp", "slope", "residuals", "cp-shares", "s-shares", "torsion", "conformers", "formation")
"""The kinds of figures; a species has as many of ``torsion`` as it has torsions."""


def figures_of(species: Species, *, brief: bool = False) -> tuple[Figure, ...]:
    """Those figures that the species has the numbers for; with *brief* drawn with fewer points, for very many."""
    found = (
        structure(species),
        heat_capacity(species, brief=brief),
        slope(species),
        residual_strips(species, brief=brief),
        stacked_shares(species, "Cp"),
        stacked_shares(species, "S"),
        *(torsional_potential(species, i) for i in range(len(species.torsions))),
        populations(species),
        formation_routes(species),
    )
    return tuple(f for f in found if f is not None)


def kind_of(figure: Figure) -> str:
    """Which of :data:`KINDS` a figure is."""
    return "torsion" if figure.key.startswith("torsion-") else figure.key
