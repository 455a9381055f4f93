"""The rigid body of a model: rotor and symmetry from the geometry, or as they are stated where there is none."""

from __future__ import annotations

from collections.abc import Callable

from heatwright.findings import Finding, note
from heatwright.molecule import FloatArray, Molecule
from heatwright.structure.inertia import Inertia, inertia, stated_rotor
from heatwright.structure.symmetry import Symmetry, stated_symmetry, symmetry, symmetry_findings

RigidBody = Callable[[Molecule, FloatArray, float], tuple[Inertia, Symmetry]]


def rigid_body(molecule: Molecule, masses_u: FloatArray, tolerance_A: float) -> tuple[Inertia, Symmetry]:
    """Rotor and symmetry of a molecule; *tolerance_A* is for its geometry.

    Raises ValueError when there is neither a geometry nor stated constants with a symmetry number.
    """
    if molecule.has_geometry:
        x = molecule.coordinates_A
        return inertia(masses_u, x), symmetry(molecule.atomic_numbers, masses_u, x, tolerance_A=tolerance_A)
    stated = molecule.stated
    if not stated.rotational_constants_cm1 or stated.symmetry_number is None:
        raise ValueError(
            f"{molecule.source.file}: without a geometry, rotational constants and a symmetry number have to be stated"
        )
    found = stated_symmetry(stated.point_group, stated.symmetry_number, stated.optical_isomers or 1)
    return stated_rotor(stated.rotational_constants_cm1), found


def symmetry_choice(
    molecule: Molecule, found: Symmetry, symmetry_number: int | None, optical_isomers: int | None
) -> tuple[Finding, ...]:
    """What the user's values replace: those of the geometry, or of the file where there is no geometry."""
    told = "the geometry says" if molecule.has_geometry else "the file states"
    sigma = symmetry_number or (molecule.stated.symmetry_number if molecule.has_geometry else None)
    isomers = optical_isomers or (molecule.stated.optical_isomers if molecule.has_geometry else None)
    said = []
    if sigma is not None:
        group = f" ({found.point_group})" if found.point_group else ""
        said.append(note("user-value", f"symmetry number {sigma} was given; {told} {found.symmetry_number}{group}"))
    if isomers is not None:
        said.append(note("user-value", f"{isomers} optical isomer(s) were given; {told} {found.optical_isomers}"))
    return (*said, *(symmetry_findings(found) if sigma is None else ()))
