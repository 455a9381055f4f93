"""Isotopic masses or average weights: told by which of the two the printed ones are nearer to."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from heatwright.elements import element

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, MassKind


def mass_kind(masses_u: FloatArray | None, atoms: Sequence[int]) -> MassKind:
    """``average`` when most atoms of elements with several isotopes carry the average weight, else ``isotopic``.

    >>> import numpy as np
    >>> mass_kind(np.array([12.011, 1.008]), [6, 1]), mass_kind(np.array([12.0, 1.00783]), [6, 1])
    ('average', 'isotopic')
    """
    if masses_u is None or len(masses_u) != len(atoms):
        return "isotopic"
    votes = 0
    for mass, z in zip(masses_u, atoms, strict=True):
        if not 0 < z <= 103:
            continue
        known = element(int(z))
        to_average, to_isotope = abs(mass - known.average_weight_u), abs(mass - known.common_mass_u)
        if abs(known.average_weight_u - known.common_mass_u) > 1e-4:
            votes += 1 if to_average < to_isotope else -1
    return "average" if votes > 0 else "isotopic"
