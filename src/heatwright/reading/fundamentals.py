"""Anharmonic fundamentals and zero-point energies as programs print them beside their harmonic wavenumbers."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import CALORIE_J, HARTREE_CM1, HARTREE_KJ_MOL
from heatwright.reading.text import Text, number

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

_SAME_CM1: Final = 0.5
"""How far the harmonic column of a table may be from the harmonic wavenumbers for the table to be believed, 1/cm."""


@dataclass(frozen=True, eq=False, slots=True)
class Fundamentals:
    """Anharmonic fundamentals (m,) in the order of the ascending harmonic wavenumbers, 1/cm, and the zero-point energy.

    harmonic_cm1 : (m,) the harmonic wavenumbers beside them, or None where they stand without.
    """

    wavenumbers_cm1: FloatArray = field(default_factory=lambda: np.empty(0))
    zpe_hartree: float | None = None
    harmonic_cm1: FloatArray | None = None

    def of(self, harmonic_cm1: FloatArray) -> tuple[FloatArray | None, float | None]:
        """Fundamentals and zero-point energy when they belong to these harmonic wavenumbers (ascending), else None."""
        if self.wavenumbers_cm1.shape != harmonic_cm1.shape or not harmonic_cm1.size:
            return None, None
        if self.harmonic_cm1 is not None and not np.abs(self.harmonic_cm1 - harmonic_cm1).max() <= _SAME_CM1:
            return None, None
        return self.wavenumbers_cm1, self.zpe_hartree


def qchem_fundamentals(job: Text) -> Fundamentals | None:
    """Q-Chem's list by second-order perturbation theory, ``VPT2[ 1]  1789.71``, in the order of its modes."""
    found: dict[int, float] = {}
    for spot in job.spots("VPT2["):
        match = re.match(r"VPT2\[ *(\d+)\] +(\S+)", job.rest(spot, ""))
        value = number(match[2]) if match else None
        if match and value is not None:
            found[int(match[1])] = value
    if not found or sorted(found) != list(range(1, len(found) + 1)):
        return None
    block = job.part(max(job.rfind("QUANTITIES FOR ANHARMONIC VIBRATION -- VPT2"), job.start))
    kcal = block.number_after("Zero point vibrational energy:", last=False) if block.start > job.start else None
    zpe = None if kcal is None else kcal * CALORIE_J / HARTREE_KJ_MOL
    return Fundamentals(np.array([found[i] for i in sorted(found)]), zpe)


def gaussian_fundamentals(job: Text) -> Fundamentals | None:
    """Gaussian's table "Fundamental Bands" and its anharmonic zero-point energy.

    The forms are those of Gaussian 09 and 16 as remembered; a table is believed only when its harmonic column is the
    printed list of wavenumbers.
    """
    spot = job.find("Fundamental Bands")
    rows: dict[int, tuple[float, float]] = {}
    for index, line in enumerate(job.lines(spot) if spot >= 0 else ()):
        match = re.match(r"\s*(\d+)\(1[^)]*\)\s+(?:[A-Za-z]\w*\s+)?(-?[\d.]+)\s+(-?[\d.]+)", line)
        if match:
            harmonic, anharmonic = number(match[2]), number(match[3])
            if harmonic is not None and anharmonic is not None:
                rows.setdefault(int(match[1]), (harmonic, anharmonic))
        elif rows or index > 12:
            break
    if not rows:
        return None
    table = np.array(sorted(rows.values()))
    return Fundamentals(table[:, 1], _gaussian_zpe(job), table[:, 0])


def _gaussian_zpe(job: Text) -> float | None:
    total = re.search(r"^\s*:\s*cm-1\s*=\s*([\d.]+)", job.rest_of_last("Total Anharm"))
    if total:
        return float(total[1]) / HARTREE_CM1
    older = re.match(r"=\s*(\S+)\s+KJ/mol", job.rest_of_last("ZPE(anh)"), re.IGNORECASE)
    value = number(older[1]) if older else None
    return None if value is None else value / HARTREE_KJ_MOL
