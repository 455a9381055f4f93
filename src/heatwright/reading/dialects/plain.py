"""The shape of the smaller dialects: cclib's attributes, plus a handful of hooks for what it leaves out."""

from __future__ import annotations

import re
from collections.abc import Iterable
from typing import TYPE_CHECKING, ClassVar

import numpy as np

from heatwright.reading.dialects.base import Dialect, Facts, Identity, plain_energies
from heatwright.reading.masses import mass_kind
from heatwright.reading.text import Text, number

if TYPE_CHECKING:
    from heatwright.findings import Finding
    from heatwright.molecule import FloatArray, IntArray, Kind, Level, PrintedThermo
    from heatwright.reading.parsing import Parsed


class Plain(Dialect):
    """A dialect made of hooks; each may be left as it is."""

    version_pattern: ClassVar[str] = ""
    coupled_marks: ClassVar[tuple[tuple[str, str], ...]] = (("CCSD(T)", "CCSD(T)"),)
    """Texts that tell which coupled-cluster energy an output ends with, the highest first; without any it is CCSD."""

    def identity(self, job: Text) -> Identity:
        return Identity(has_modes=any(anchor in job for anchor in self.mode_anchors))

    def read(self, job: Text, parsed: Parsed) -> Facts:
        has_modes = any(anchor in job for anchor in self.mode_anchors)
        energies, kind = self.energies(job, parsed, has_modes)
        atoms, coordinates = self.geometry(job)
        known = atoms if atoms is not None else parsed.array("atomnos")
        masses = self.masses(job)
        if masses is None and (given := parsed.array("atommasses")) is not None and given.ndim == 1:
            masses = given if known is None else given[-len(known) :]
        return Facts(
            version=self.version(job),
            charge=self.charge(job),
            multiplicity=self.multiplicity(job, parsed),
            energies=energies,
            energy_kind=kind,
            level=self.level(job, kind),
            atomic_numbers=atoms,
            coordinates_A=coordinates,
            masses_u=masses,
            mass_kind=mass_kind(masses, () if known is None else [int(z) for z in np.ravel(known)]),
            wavenumbers_cm1=self.wavenumbers(job),
            hessian=lambda: (self.hessian(job, 0 if known is None else int(np.size(known))), None),
            printed=self.printed(job),
            max_gradient_hartree_bohr=self.max_gradient(job),
            kind=self.job_kind(job),
            findings=tuple(self.remarks(job)),
        )

    def version(self, job: Text) -> str:
        match = re.search(self.version_pattern, job.whole[:131072]) if self.version_pattern else None
        return " ".join(match.groups()).strip() if match else ""

    def charge(self, job: Text) -> int | None:
        return None

    def multiplicity(self, job: Text, parsed: Parsed) -> int | None:
        return None

    def energies(self, job: Text, parsed: Parsed, has_modes: bool) -> tuple[dict[str, float], str]:
        coupled = next((kind for mark, kind in self.coupled_marks if mark in job), "CCSD")
        return plain_energies(parsed, has_modes, coupled)

    def level(self, job: Text, kind: str) -> Level | None:
        return None

    def geometry(self, job: Text) -> tuple[IntArray | None, FloatArray | None]:
        return None, None

    def masses(self, job: Text) -> FloatArray | None:
        return None

    def wavenumbers(self, job: Text) -> FloatArray | None:
        return None

    def hessian(self, job: Text, n_atoms: int) -> FloatArray | None:
        return None

    def max_gradient(self, job: Text) -> float | None:
        return None

    def printed(self, job: Text) -> tuple[PrintedThermo, ...]:
        return ()

    def job_kind(self, job: Text) -> Kind | None:
        return None

    def remarks(self, job: Text) -> Iterable[Finding]:
        return ()


def last_column(job: Text, anchor: str, *, fields: int, skip: int = 1) -> FloatArray | None:
    """The last column of the table under an anchor: lines of a given number of fields, the last one a number."""
    spot = job.rfind(anchor)
    found: list[float] = []
    for index, line in enumerate(job.lines(spot) if spot >= 0 else ()):
        tokens = line.split()
        value = number(tokens[-1]) if len(tokens) == fields else None
        if index >= skip and value is not None:
            found.append(value)
        elif found:
            break
    return np.array(found) if found else None


def wrapped_numbers(job: Text, anchor: str, *, drop: int = 0) -> FloatArray | None:
    """All numbers of the lines under an anchor until a line holds something else, *drop* leading fields left out."""
    spot = job.rfind(anchor)
    found: list[float] = []
    for index, line in enumerate(job.lines(spot) if spot >= 0 else ()):
        if index == 0:
            continue
        values = [number(token) for token in line.replace("- ", "-").split()[drop:]]
        if not values or any(v is None for v in values):
            break
        found += [v for v in values if v is not None]
    return np.array(found) if found else None
