"""Units for reading on a terminal; files, JSON and CSV always hold kJ/mol and J/mol/K."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from heatwright.constants import CALORIE_J


@dataclass(frozen=True, slots=True)
class Units:
    """Names of the units of enthalpy and entropy, and the factor from kJ/mol and J/mol/K to them.

    >>> round(UNITS["kcal"].factor * 4.184, 12)
    1.0
    """

    enthalpy: str
    entropy: str
    factor: float


UNITS: Final = {
    "kJ": Units("kJ/mol", "J/mol/K", 1.0),
    "kcal": Units("kcal/mol", "cal/mol/K", 1.0 / CALORIE_J),
}
"""The choices of ``--units``; the calorie is the thermochemical one, 4.184 J."""
