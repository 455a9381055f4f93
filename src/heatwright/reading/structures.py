"""Do the structures in one file belong together: the geometry of the modes, of the energy, of another analysis."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.findings import Finding, refuse, warn
from heatwright.structure.bonds import bonds, fingerprint, fragments

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule
    from heatwright.reading.parsing import Parsed

SAME_GEOMETRY_A: Final = 5.0e-3
"""Largest difference of any two interatomic distances of one geometry printed twice, Å."""
MOST_ATOMS: Final = 400
"""Structures larger than this are not compared atom by atom."""


def _comparable(m: Molecule) -> bool:
    return 1 < m.n_atoms <= MOST_ATOMS and m.has_geometry and bool(np.isfinite(m.coordinates_A).all())


def bonded_differently(a: Molecule, b: Molecule) -> bool:
    """Whether two molecules of one formula are isomers: their graphs of bonds cannot be the same."""
    if not (_comparable(a) and _comparable(b)) or a.n_atoms != b.n_atoms:
        return False
    one, other = (fingerprint(m.atomic_numbers, bonds(m.atomic_numbers, m.coordinates_A)) for m in (a, b))
    return one != other


def isomers(one: int, other: int) -> Finding:
    """The refusal of a file that holds analyses of two isomers, by the numbers of their jobs."""
    words = f"jobs {min(one, other)} and {max(one, other)} are of one formula, but their atoms are bonded differently"
    return refuse("isomers", words, expected="one molecule", action="Choose a job with --job N.")


def geometry_differs(m: Molecule, parsed: Parsed) -> tuple[Finding, ...]:
    """The geometry that stands with the modes must be one of those the job computed energies of."""
    read = parsed.array("atomcoords")
    if read is None or read.ndim != 3 or read.shape[1:] != m.coordinates_A.shape or not m.wavenumbers_cm1.size:
        return ()
    if not _comparable(m):
        return ()
    own = _distances(m.coordinates_A)
    least = min(float(np.abs(_distances(x) - own).max()) for x in read)
    if not least > SAME_GEOMETRY_A:
        return ()
    words = f"the geometry of the modes is none of the {len(read)} that were computed (nearest: {least:.3f} Å off)"
    action = "Energy and modes would belong to two structures; run the frequencies at the geometry of the energy."
    return (refuse("geometry-differs", words, expected=f"at most {SAME_GEOMETRY_A:g} Å", action=action),)


def _distances(x: FloatArray) -> FloatArray:
    """All interatomic distances, ascending: two tables of one geometry may have another order of atoms and axes."""
    found: FloatArray = np.sort(np.linalg.norm(x[:, None] - x[None, :], axis=2).ravel())
    return found


def unbonded(m: Molecule) -> tuple[Finding, ...]:
    """The parts of a structure that no bond connects, each with its atoms."""
    if not _comparable(m):
        return ()
    parts = fragments(bonds(m.atomic_numbers, m.coordinates_A))
    if len(parts) == 1:
        return ()
    shown = "; ".join(_atoms(part) for part in parts[:6]) + (" …" if len(parts) > 6 else "")
    words = f"the structure is {len(parts)} parts that are not bonded to each other: {shown}"
    action = "A complex is a species of its own; its loose modes are no harmonic oscillators."
    return (warn("fragments", words, expected="one molecule", action=action),)


def _atoms(part: tuple[int, ...]) -> str:
    numbers = ", ".join(str(i + 1) for i in part[:12]) + (" …" if len(part) > 12 else "")
    return f"atom {numbers}" if len(part) == 1 else f"atoms {numbers}"
