"""Force constants as programs print them; one is believed when it gives the printed wavenumbers."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from itertools import pairwise
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.elements import atomic_number
from heatwright.findings import Finding, note
from heatwright.reading.text import Text, number
from heatwright.structure.modes import projected_modes, turned_hessian
from heatwright.structure.superposition import superposed

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule

AGREEMENT_CM1: Final = 2.0
"""How far the wavenumbers of a Hessian may be from the printed ones, 1/cm."""


def rows_under(job: Text, spot: int) -> list[list[float]]:
    """The numbers of the lines after a position that are a label and decimal numbers; headings in between are passed.

    The list ends at the third line in a row that is neither a row, a heading of a matrix nor empty.
    """
    rows: list[list[float]] = []
    strangers = 0
    for index, line in enumerate(job.lines(spot)):
        tokens = line.split()
        if index == 0 or not tokens:
            continue
        values = [number(token) for token in tokens[1:]]
        if values and all(v is not None for v in values) and all("." in token for token in tokens[1:]):
            rows.append([v for v in values if v is not None])
        elif not _is_heading(tokens):
            strangers += 1
            if rows or strangers > 3:
                break
    return rows


def _is_heading(tokens: Sequence[str]) -> bool:
    return all(re.fullmatch(r"\d+|[A-Z]{1,2}[XYZ]\d+|-+", token) for token in tokens)


def matrix(rows: Sequence[Sequence[float]], size: int, *, lower: bool) -> FloatArray | None:
    """A symmetric matrix from rows printed in blocks of columns, whole or as lower triangle; None when incomplete.

    >>> matrix([[1.0], [2.0, 3.0], [4.0, 5.0], [6.0]], 3, lower=True)
    array([[1., 2., 4.],
           [2., 3., 5.],
           [4., 5., 6.]])
    """
    found = np.full((size, size), np.nan)
    first, used = 0, 0
    while first < size:
        block = rows[used : used + (size - first if lower else size)]
        used += len(block)
        width = max((len(row) for row in block), default=0)
        if width == 0 or first + width > size:
            return None
        start = first if lower else 0
        for i, row in enumerate(block, start=start):
            if len(row) != (min(i - first + 1, width) if lower else width):
                return None
            found[i, first : first + len(row)] = row
        first += width
    if lower:
        found = np.where(np.isnan(found), found.T, found)
    return found if np.isfinite(found).all() else None


def from_triangle(values: FloatArray, size: int) -> FloatArray | None:
    """A symmetric matrix from its lower triangle row by row; None when the count is wrong."""
    if values.size != size * (size + 1) // 2:
        return None
    found = np.zeros((size, size))
    found[np.tril_indices(size)] = values
    full: FloatArray = found + np.tril(found, -1).T
    return full if np.isfinite(full).all() else None


def nwchem_hessian(job: Text, masses_u: FloatArray | None) -> FloatArray | None:
    """NWChem's lower triangle in hartree/bohr²/(1000 u), mass weights taken off; the projected one before the other.

    The unprojected one keeps the noise in which a rotation costs energy; what projection takes away in the wavenumbers
    of torsions then depends a little (1 cm⁻¹) on how it is done.
    """
    if masses_u is None:
        return None
    weights = np.repeat(np.sqrt(masses_u / 1000.0), 3)
    for kind in ("PROJECTED", "NUCLEAR"):
        spot = job.rfind(f"MASS-WEIGHTED {kind} HESSIAN (Hartree/Bohr/Bohr/Kamu)")
        found = matrix(rows_under(job, spot), 3 * masses_u.size, lower=True) if spot >= 0 else None
        if found is not None:
            return found * np.outer(weights, weights)
    return None


def qchem_hessian(job: Text, n_atoms: int) -> FloatArray | None:
    """Q-Chem's full matrix in hartree/bohr²: the one before the last vibrational analysis."""
    spot = job.rfind(" Hessian of the SCF Energy")
    return None if spot < 0 else matrix(rows_under(job, spot), 3 * n_atoms, lower=False)


def molpro_hessian(job: Text, n_atoms: int) -> FloatArray | None:
    """Molpro's lower triangle in hartree/bohr²."""
    spot = job.rfind("Force Constants (Second Derivatives of the Energy) in [a.u.]")
    return None if spot < 0 else matrix(rows_under(job, spot), 3 * n_atoms, lower=True)


def checkpoint_array(job: Text, title: str) -> FloatArray | None:
    """An array of real numbers of a formatted checkpoint file."""
    spot = job.find(f"\n{title} ")
    head = re.search(r" R +N= +(\d+)", job.line(spot + 1)) if spot >= 0 else None
    if head is None:
        return None
    found: list[float] = []
    for index, line in enumerate(job.lines(spot + 1)):
        if len(found) >= int(head.group(1)):
            break
        if index:
            values = [number(token) for token in line.split()]
            if not values or any(v is None for v in values):
                break
            found += [v for v in values if v is not None]
    return np.array(found) if len(found) == int(head.group(1)) else None


def archive_parts(job: Text) -> list[str]:
    """The parts of the archive that closes a Gaussian job, which double backslashes separate; empty without one."""
    end = job.rfind("\\\\@") if "\\\\@" in job else job.rfind("||@")
    start = max(job.rfind("\n 1\\1\\", end), job.rfind("\n 1|1|", end)) if end >= 0 else -1
    if start < 0:
        return []
    text = "".join(line[1:] for line in str(job.part(start + 1, end)).split("\n")).replace("|", "\\")
    return text.split("\\\\")


def gaussian_archive(job: Text) -> tuple[FloatArray, FloatArray] | None:
    """Hessian (hartree/bohr²) and its geometry (Å, a frame of its own) of the archive that closes a frequency job."""
    parts = archive_parts(job)
    places = next((found for part in parts[3:5] if (found := _archive_places(part)) is not None), None)
    if places is None:
        return None
    for head, values in pairwise(parts):
        if "NImag=" in head:
            numbers = np.array([value for token in values.split(",") if (value := number(token)) is not None])
            hessian = from_triangle(numbers, places.size)
            return None if hessian is None else (hessian, places)
    return None


def _archive_places(part: str) -> FloatArray | None:
    rows = []
    for item in part.split("\\")[1:]:
        fields = item.split(",")
        try:
            atomic_number(re.sub(r"\(.*", "", fields[0]))
        except KeyError:
            return None
        values = [number(token) for token in fields[-3:]] if len(fields) in (4, 5) else []
        if len(values) != 3 or any(v is None for v in values):
            return None
        rows.append([v for v in values if v is not None])
    return np.array(rows) if rows else None


def turned_to(hessian: FloatArray, own_A: FloatArray, wanted_A: FloatArray) -> FloatArray | None:
    """A Hessian taken from the frame it was printed in to another one; None when the two geometries differ."""
    if own_A.shape != wanted_A.shape:
        return None
    found = superposed(own_A, wanted_A)
    return turned_hessian(hessian, found.rotation) if found.rmsd_A < 1.0e-3 else None


def with_checked_hessian(
    molecule: Molecule, hessian: FloatArray | None, own_A: FloatArray | None, *, alone: bool
) -> tuple[Molecule, tuple[Finding, ...]]:
    """The molecule with a printed Hessian that does not contradict its wavenumbers, or with those only the Hessian has.

    own_A : the coordinates of the Hessian where they are not the molecule's; it is then turned into their frame.
    alone : whether a Hessian without wavenumbers is all that was meant to be there (a checkpoint file), rather than
        what an output that breaks off has left.
    """
    H, n = hessian, molecule.n_atoms
    if H is not None and own_A is not None:
        H = turned_to(H, own_A, molecule.coordinates_A) if own_A.shape == molecule.coordinates_A.shape else None
    if H is None or molecule.is_atom or H.shape != (3 * n, 3 * n):
        return molecule, ()
    if not all(np.isfinite(x).all() for x in (H, molecule.masses_u, molecule.coordinates_A)):
        return molecule, ()
    wavenumbers, displacements = projected_modes(H, molecule.masses_u, molecule.coordinates_A)
    if not molecule.wavenumbers_cm1.size:
        if not alone:
            return molecule, ()
        words = "no wavenumbers are printed; they were computed from the printed Hessian"
        found = molecule.but(
            hessian_hartree_bohr2=H, wavenumbers_cm1=wavenumbers, normal_modes=displacements, kind="frequency"
        )
        return found, (note("modes-from-hessian", words),)
    if (off := largest_difference(wavenumbers, molecule.wavenumbers_cm1)) <= AGREEMENT_CM1:
        return molecule.but(hessian_hartree_bohr2=H), ()
    words = "the printed Hessian was not used: " + (
        f"its wavenumbers are up to {off:.1f} cm⁻¹ from the printed ones"
        if np.isfinite(off)
        else f"it has {wavenumbers.size} vibrations, and {molecule.wavenumbers_cm1.size} are printed"
    )
    return molecule, (note("hessian-unused", words, expected=f"agreement within {AGREEMENT_CM1:g} cm⁻¹"),)


def largest_difference(a: Iterable[float], b: Iterable[float]) -> float:
    """The largest difference of two ascending lists of wavenumbers, infinite when they have not the same length."""
    x, y = np.sort(np.asarray(a, dtype=float)), np.sort(np.asarray(b, dtype=float))
    if x.shape != y.shape:
        return float("inf")
    worst = float(np.abs(x - y).max(initial=0.0))
    return worst if np.isfinite(worst) else float("inf")
