"""Nuclear-spin weights of even and odd rotational levels, for light rotors at equilibrium of their spin forms."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray

_HYDROGEN = {1: (0.25, 0.75, "para : ortho 1 : 3"), 2: (2 / 3, 1 / 3, "ortho : para 6 : 3"), 3: (0.25, 0.75, "1 : 3")}
"""By mass number: weights of even and odd J, normalised to the mean 1/2, and their ratio in words.  Spins ½, 1, ½."""


def spin_weights(atomic_numbers: IntArray, masses_u: FloatArray, symmetry_number: int) -> tuple[float, float, str]:
    """Weights of even and odd J, with mean 1/σ, and what they are in words.

    H2, D2 and T2 have those of their nuclear spins, in equilibrium.  Elsewhere every level has 1/σ: the moments of
    inertia are so large that sums over even and over odd levels are equal at any temperature of a gas.

    >>> import numpy as np
    >>> spin_weights(np.array([1, 1]), np.array([1.00783, 1.00783]), 2)[:2]
    (0.25, 0.75)
    >>> spin_weights(np.array([1, 1]), np.array([1.00783, 2.0141]), 1)[:2]
    (1.0, 1.0)
    """
    if atomic_numbers.tolist() == [1, 1] and abs(masses_u[0] - masses_u[1]) < 0.1:
        found = _HYDROGEN.get(round(float(masses_u[0])))
        if found is not None:
            even, odd, ratio = found
            factor = 2.0 / symmetry_number
            return even * factor, odd * factor, f"nuclear-spin weights of even and odd J, {ratio}, in equilibrium"
    each = 1.0 / symmetry_number
    return each, each, f"every level with the weight 1/{symmetry_number}" if symmetry_number > 1 else "no spin weights"
