"""The energy of a separate, usually higher, single point for the geometry and modes of a frequency job."""

from __future__ import annotations

from math import inf
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.elements import composition, formula
from heatwright.findings import Finding, Refused, note, refuse
from heatwright.structure.superposition import Superposition, matched, superposed

if TYPE_CHECKING:
    from heatwright.molecule import Molecule

SAME_GEOMETRY_A: Final = 0.01
"""Root-mean-square distance after superposition up to which two geometries are one, Å."""
_OF_MODES: Final = frozenset({"imaginary-modes", "mode-count", "no-frequencies", "high-wavenumber", "zero-wavenumber"})
"""Findings about modes, which are not taken from the file of the energy."""


def with_energy(molecule: Molecule, other: Molecule) -> Molecule:
    """The molecule with the energy in use of another output, and with the level of that energy.

    Raises Refused when the other output is unusable or has no energy, is of another molecule, charge or multiplicity,
    or when its geometry is not that of the frequencies (:data:`SAME_GEOMETRY_A`).
    """
    file = other.source.file
    faults = [f.at(file) for f in other.findings if f.severity == "refuse" and f.code not in _OF_MODES]
    faults += [] if other.energy_hartree is not None else [refuse("no-energy", "there is no total energy", where=file)]
    faults += _another_molecule(molecule, other)
    if faults:
        raise Refused(faults)
    fit = _fit(molecule, other)
    if fit is None or not fit.rmsd_A <= SAME_GEOMETRY_A:
        raise Refused([_another_geometry(molecule, other, fit)])
    warnings = tuple(
        f.at(file) for f in other.findings if f.severity == "warn" and f.code not in (*_OF_MODES, "no-energy")
    )
    return molecule.but(
        energies_hartree=dict(other.energies_hartree),
        energy_kind=other.energy_kind,
        energy_source=other.source,
        energy_level=other.level,
        findings=(*(f for f in molecule.findings if f.code != "no-energy"), _said(molecule, other, fit), *warnings),
    )


def geometry_distance_A(molecule: Molecule, other: Molecule) -> float:
    """How far (RMSD, Å) another output's geometry is from a molecule's, atoms in any order; inf where none is there."""
    fit = _fit(molecule, other)
    return inf if fit is None else fit.rmsd_A


def _another_molecule(molecule: Molecule, other: Molecule) -> list[Finding]:
    faults = []
    action = "Give the single point of the same molecule in the same state."
    mine, theirs = (formula(composition(m.atomic_numbers)) for m in (molecule, other))
    pairs = (
        ("atoms", mine, theirs),
        ("charge", molecule.charge, other.charge),
        ("multiplicity", molecule.multiplicity, other.multiplicity),
    )
    for what, of_modes, of_energy in pairs:
        if of_modes != of_energy:
            found = f"the {what} of the energy ({of_energy}) and of the frequencies ({of_modes}) differ"
            faults.append(refuse("energy-of-another", found, where=other.source.file, action=action))
    return faults


def _fit(molecule: Molecule, other: Molecule) -> Superposition | None:
    """The geometry of the energy laid over that of the modes: in the same order where that fits, else in the best."""
    if not (molecule.has_geometry and other.has_geometry):
        return None
    direct = None
    if (molecule.atomic_numbers == other.atomic_numbers).all():
        direct = superposed(other.coordinates_A, molecule.coordinates_A)
        if direct.rmsd_A <= SAME_GEOMETRY_A:
            return direct
    best = matched(other.atomic_numbers, other.coordinates_A, molecule.atomic_numbers, molecule.coordinates_A)
    found = [fit for fit in (direct, best) if fit is not None]
    return min(found, key=lambda fit: fit.rmsd_A) if found else None


def _another_geometry(molecule: Molecule, other: Molecule, fit: Superposition | None) -> Finding:
    if fit is not None:
        found = f"the geometry of the energy is {fit.rmsd_A:.4f} Å (RMSD) from that of {molecule.source.file}"
    elif molecule.has_geometry and other.has_geometry:
        found = f"the geometry of the energy cannot be laid over that of {molecule.source.file}"
    else:
        found = f"without coordinates on both sides the energy cannot be compared with {molecule.source.file}"
    return refuse(
        "energy-of-another",
        found,
        where=other.source.file,
        expected=f"at most {SAME_GEOMETRY_A:g} Å after superposition",
        action="Compute the single point at the geometry of the frequencies.",
    )


def _said(molecule: Molecule, other: Molecule, fit: Superposition) -> Finding:
    levels = [m.level.label if m.level else "a level that is not printed" for m in (other, molecule)]
    order = ", atoms in another order" if fit.reordered else ""
    same = "" if np.isclose(fit.rmsd_A, 0.0, atol=5e-5) else f", {fit.rmsd_A:.4f} Å (RMSD) away"
    place = "at the same geometry" if not same else f"at a geometry that counts as the same{same}"
    return note(
        "energy-from-file",
        f"the {other.energy_kind} energy {other.energy_hartree:.8f} hartree at {levels[0]} was taken from "
        f"{other.source.file}, {place}{order}; geometry and modes are at {levels[1]}",
    )
