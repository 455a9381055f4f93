"""How an output is to be read, as commands and manifests say it; no heavy import."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from heatwright.structure.isotopes import Isotope


@dataclass(frozen=True, slots=True)
class Reading:
    """How an output is to be read: which job, values that replace its own, isotopes, and what is accepted.

    energy : the file that gives the energy, when that is another one.
    torsions : whether force constants are wanted, for torsions to be projected out of them.
    """

    job: int | None
    charge: int | None
    multiplicity: int | None
    isotopes: tuple[Isotope, ...] = ()
    accept: tuple[str, ...] = ()
    accept_imaginary_cm1: float = 0.0
    energy: str | None = None
    torsions: bool = False
