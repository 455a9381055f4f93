"""What the number of atoms says about a polynomial: bounds of Cp, and whether its two ranges are swapped.

The bounds are those of classical mechanics; where real species exceed them (electronic levels, anharmonicity, and fits
that ripple) the margins are those that the 748 gaseous species of NASA TM-4513 and the mechanisms tried need.
"""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.polynomial.nasa7 import Nasa7, cp_of

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

_POINTS: Final = 60
_NOTICEABLE: Final = 0.1
_MUCH_BETTER: Final = 0.3


def classical_limit_R(atoms: float) -> float:
    """Cp/R of a gas of *atoms* atoms a molecule with every vibration classical: of a linear one, which is the larger.

    >>> classical_limit_R(1), classical_limit_R(2), classical_limit_R(5)
    (2.5, 4.5, 13.5)
    """
    return 2.5 if atoms < 2 else 3.0 * atoms - 1.5


def least_cp_R(atoms: float) -> float:
    """Cp/R of translation and (of molecules) the rotation of a linear one, classical."""
    return 2.5 if atoms < 2 else 3.5


def range_grid_K(polynomial: Nasa7, points: int = _POINTS) -> tuple[FloatArray, FloatArray]:
    """Temperatures over the low and over the high range, both with the common temperature, K."""
    low = np.linspace(polynomial.t_low_K, polynomial.t_common_K, points)
    return low, np.linspace(polynomial.t_common_K, polynomial.t_high_K, points)


def cp_on_grid_R(polynomial: Nasa7, points: int = _POINTS) -> tuple[FloatArray, FloatArray]:
    """:func:`range_grid_K` in one array, and Cp/R there, each side of the common temperature by its own range."""
    low, high = range_grid_K(polynomial, points)
    return np.r_[low, high], np.r_[cp_of(polynomial.low, low), cp_of(polynomial.high, high)]


def largest_fall(cp_R: FloatArray) -> float:
    """By how much Cp falls at most from a value at a lower temperature to one at a higher."""
    return float((np.maximum.accumulate(cp_R) - cp_R).max())


def ranges_swapped(polynomial: Nasa7, atoms: float) -> bool:
    """Whether the two sets of coefficients have changed places: as they stand Cp breaks its bounds, else it does not.

    Both branches still meet at the common temperature of such an entry, so that no check of the joint notices it.
    Of the 2100 molecules of gri30, nasa_gas and two mechanisms shipped with Cantera 3.2 none is taken for swapped as it
    stands, and all are when they are.  Atoms are never taken for swapped; their Cp says too little.
    """
    if atoms < 2 or polynomial.low == polynomial.high:
        return False
    here = _implausibility(polynomial, atoms)
    if here <= _NOTICEABLE:
        return False
    return _implausibility(replace(polynomial, low=polynomial.high, high=polynomial.low), atoms) < _MUCH_BETTER * here


def _implausibility(polynomial: Nasa7, atoms: float) -> float:
    """How far Cp leaves its bounds or falls, as a fraction of the bound; zero where it does neither."""
    _, cp = cp_on_grid_R(polynomial)
    limit = classical_limit_R(atoms)
    return max(float(cp.max()) / limit - 1.0, 1.0 - float(cp.min()) / 2.5, largest_fall(cp) / limit, 0.0)
