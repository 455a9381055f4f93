"""Electronic levels: from the built-in table, from the spin alone, or as the user states them."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING, ClassVar

import numpy as np

from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.errors import UsageError
from heatwright.partition.contribution import LnQ
from heatwright.resources import data_rows

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

Levels = tuple[tuple[float, int], ...]
"""(wavenumber above the ground level in 1/cm, degeneracy), ascending; the first one is (0, g₀)."""


@dataclass(frozen=True, slots=True)
class ElectronicLevels:
    """q = Σ g exp(−c₂ ν̃/T) over electronic levels counted from the lowest one.

    levels : (wavenumber 1/cm, degeneracy) pairs, the lowest at 0.

    >>> oxygen = ElectronicLevels(((0.0, 5), (158.265, 3), (226.977, 1)))
    >>> round(float(np.exp(oxygen.ln_q(np.array([298.15])).ln_q[0])), 3)
    6.732
    """

    name: ClassVar[str] = "electronic"
    levels: Levels

    def ln_q(self, T: FloatArray) -> LnQ:
        """ln q with the mean and the (centred) variance of the reduced level energies as derivatives."""
        if len(self.levels) == 1:
            return LnQ(np.full(T.shape, np.log(float(self.levels[0][1]))), np.zeros(T.shape), np.zeros(T.shape))
        nu, g = (np.array(column, dtype=float) for column in zip(*self.levels, strict=True))
        x = SECOND_RADIATION_CM_K * nu / T[..., None]
        weight = g * np.exp(-x)
        q = weight.sum(axis=-1)
        mean = (weight * x).sum(axis=-1) / q
        variance = (weight * (x - mean[..., None]) ** 2).sum(axis=-1) / q
        return LnQ(np.log(q), mean, variance - 2.0 * mean)


@dataclass(frozen=True, slots=True)
class TabulatedLevels:
    """One row of the built-in table: species, multiplicity of its ground state, levels and their source."""

    species: str
    multiplicity: int
    state: str
    levels: Levels
    source: str


@cache
def _table() -> dict[tuple[str, int, int], TabulatedLevels]:
    grouped: dict[tuple[str, int, int], list[dict[str, str]]] = {}
    for row in data_rows("electronic_levels"):
        key = (row["species"], int(row["charge"]), int(row["ground_multiplicity"]))
        grouped.setdefault(key, []).append(row)
    return {
        key: TabulatedLevels(
            species=key[0],
            multiplicity=key[2],
            state=rows[0]["state"],
            levels=tuple((float(r["level_cm1"]), int(r["degeneracy"])) for r in rows),
            source="; ".join(dict.fromkeys(r["source"] for r in rows)),
        )
        for key, rows in grouped.items()
    }


def tabulated_levels(formula: str, charge: int, multiplicity: int) -> TabulatedLevels | None:
    """The levels of an atom or molecule with this Hill formula, charge and multiplicity, or None.

    Sources: NIST Atomic Spectra Database (atoms); K. P. Huber, G. Herzberg, Constants of Diatomic Molecules (1979).

    >>> tabulated_levels("HO", 0, 2).levels
    ((0.0, 2), (139.21, 2))
    """
    return _table().get((formula, charge, multiplicity))


_LEVEL = re.compile(r"\s*([0-9.eE+]+)\s*:\s*([0-9]+)\s*")


def parse_levels(text: str) -> Levels:
    """Levels written as ``0:2,139.21:2`` (wavenumber in 1/cm : degeneracy), the lowest at 0.

    Raises UsageError naming the part that cannot be read.

    >>> parse_levels("0:2, 139.21:2")
    ((0.0, 2), (139.21, 2))
    """
    levels = []
    for part in text.split(","):
        match = _LEVEL.fullmatch(part)
        if match is None or int(match[2]) < 1:
            raise UsageError(f"electronic level {part.strip()!r} is not a wavenumber and a degeneracy such as 139.21:2")
        try:
            levels.append((float(match[1]), int(match[2])))
        except ValueError as error:
            raise UsageError(f"electronic level {part.strip()!r}: {match[1]!r} is not a number") from error
    return checked_levels(levels)


def checked_levels(levels: Sequence[tuple[float, int]]) -> Levels:
    """The levels in ascending order; raises UsageError unless the lowest one is at zero."""
    ordered = tuple(sorted(levels))
    if not all(math.isfinite(wavenumber) for wavenumber, _ in ordered):
        raise UsageError("an electronic level has no finite wavenumber; expected a number of 1/cm, such as 139.21:2")
    if not ordered or ordered[0][0] != 0.0:
        raise UsageError(
            "electronic levels are counted from the ground level: the lowest one must be at 0, such as 0:2,139.21:2"
        )
    return ordered
