"""From what the user names as a torsion to a bond of the molecule and its potential."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from heatwright.constants import HARTREE_CM1
from heatwright.elements import composition, formula
from heatwright.findings import Finding, Refused, refuse, warn
from heatwright.partition.fourier import FittedPotential, fitted_potential
from heatwright.partition.potential import Potential, cosine_potential
from heatwright.reading.levels import level_differences
from heatwright.reading.torsion_scans import Torsion, TorsionBarrier, TorsionScan
from heatwright.structure.bonds import bonds
from heatwright.structure.torsions import (
    Atoms4,
    RotatableBond,
    dihedral_deg,
    is_mirrored,
    reduced_moments,
    rotatable_bond,
    rotatable_bonds,
)

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule

LOWER_CM1 = 20.0
"""A scan's energy so much below that of the frequencies is another minimum and not the optimiser's last digit."""
WIDEST_GAP_DEG = 245.0
"""Gap in the circle that a scan leaves at most: one third of a turn of a methyl group, a point short of it, is 240°."""
RIGID_A = 1.0e-4
"""When all distances across two bonds stay this equal through a scan, nothing but the angle was moved."""


@dataclass(frozen=True, eq=False)
class WishedTorsion:
    """A bond with its potential; ``fit`` is None when the potential was given by a barrier."""

    bond: RotatableBond
    potential: Potential
    fit: FittedPotential | None
    source: str
    findings: tuple[Finding, ...] = ()


def wished(molecule: Molecule, wish: Torsion) -> WishedTorsion:
    """The torsion that is meant, with its potential; raises Refused."""
    if not molecule.has_geometry:
        words = "without a geometry there are no bonds for a torsion"
        raise Refused(
            [refuse("torsion-impossible", words, action="Give an output or a molecule file with a geometry.")]
        )
    if isinstance(wish, TorsionBarrier):
        bond = _bond(molecule, wish.atoms)
        return WishedTorsion(bond, _given(molecule, bond, wish), None, wish.source)
    faults = next((found for m in wish.molecules if (found := _another(molecule, m))), [])
    if faults:  # the first point that does not belong says enough
        raise Refused(faults)
    bond, measured = _named_bond(molecule, wish)
    if wish.angles_deg is not None:
        angles = wish.angles_deg
    else:
        angles = np.array([dihedral_deg(m.coordinates_A, measured.atoms) for m in wish.molecules])
        _check_relaxed(molecule, wish)
    even = is_mirrored(molecule.atomic_numbers, molecule.coordinates_A, [bond])
    fit = fitted_potential(angles, wish.energies_cm1, bond.symmetry, wish.source, even=even)
    return WishedTorsion(bond, fit.potential, fit, f"scan {wish.source}", _lower(molecule, wish))


def _named_bond(molecule: Molecule, wish: TorsionScan) -> tuple[RotatableBond, RotatableBond]:
    """The bond that is meant and the one that was turned; the two differ when equivalent tops share one scan."""
    turned = _turned_bond(molecule, wish) if wish.angles_deg is None and wish.atoms is None else None
    if turned is not None:
        return turned, turned
    assert wish.atoms is not None  # a file of angles names its atoms, or reading it was refused
    bond = _bond(molecule, wish.atoms)
    own = np.array([dihedral_deg(m.coordinates_A, bond.atoms) for m in wish.molecules])
    if not wish.molecules or _unevenness(own)[0] < WIDEST_GAP_DEG:
        return bond, bond
    turned = _turned_bond(molecule, wish)
    if not _equivalent(molecule, bond, turned):
        words = f"the scan turns {turned.label}, and {bond.label} is no torsion of the same kind"
        raise Refused([refuse("scan-of-another", words, where=wish.source, action="Scan each kind of torsion.")])
    return bond, turned


def _equivalent(molecule: Molecule, one: RotatableBond, other: RotatableBond) -> bool:
    """Whether two torsions have the same atoms in their dihedral angles, symmetry and reduced moment."""
    kinds = [[int(molecule.atomic_numbers[a]) for a in bond.atoms] for bond in (one, other)]
    moments = [float(reduced_moments(molecule.masses_u, molecule.coordinates_A, [b])[0, 0]) for b in (one, other)]
    alike = kinds[0] in (kinds[1], kinds[1][::-1])
    return alike and one.symmetry == other.symmetry and abs(moments[0] / moments[1] - 1.0) < 0.01


def _bond(molecule: Molecule, atoms: Atoms4) -> RotatableBond:
    label = "-".join(str(a + 1) for a in atoms)
    if max(atoms) >= molecule.n_atoms:
        words = f"torsion {label}: the molecule has {molecule.n_atoms} atoms"
        raise Refused([refuse("torsion-impossible", words, action="Atoms are counted from 1.")])
    try:
        return rotatable_bond(molecule.atomic_numbers, molecule.masses_u, molecule.coordinates_A, atoms)
    except ValueError as error:
        action = "`heatwright rotors OUTPUT` lists the bonds that can turn."
        raise Refused([refuse("torsion-impossible", f"torsion {label}: {error}", action=action)]) from None


def _given(molecule: Molecule, bond: RotatableBond, wish: TorsionBarrier) -> Potential:
    if wish.barrier_cm1 > 0.0 and wish.fold % bond.symmetry:
        words = f"torsion {bond.label}: the fold {wish.fold} was given, and the top has {bond.symmetry} orientations"
        words += " that are alike"
        raise Refused([refuse("torsion-impossible", words, expected=f"a multiple of {bond.symmetry}")])
    if wish.barrier_cm1 == 0.0:
        return Potential(0.0)
    minimum = np.radians(dihedral_deg(molecule.coordinates_A, bond.atoms))
    return cosine_potential(wish.fold, wish.barrier_cm1, float(minimum))


def _another(molecule: Molecule, point: Molecule) -> list[Finding]:
    """Why a point of a scan does not belong to the molecule."""
    where, mine = point.source.file, molecule.source.file
    action = "Scan the molecule of the frequencies at their level."
    if point.atomic_numbers.tolist() != molecule.atomic_numbers.tolist():
        words = f"the atoms of the scan are not those of {mine} in the same order"
        expected = formula(composition(molecule.atomic_numbers), molecule.charge or 0)
        return [refuse("scan-of-another", words, where=where, expected=expected, action=action)]
    state = (molecule.charge, molecule.multiplicity)
    if (point.charge, point.multiplicity) != state:
        words = f"charge {point.charge} and multiplicity {point.multiplicity} of the scan are not those of {mine}"
        return [refuse("scan-of-another", words, where=where, expected=f"{state[0]} and {state[1]}", action=action)]
    if (
        bonds(point.atomic_numbers, point.coordinates_A) != bonds(molecule.atomic_numbers, molecule.coordinates_A)
    ).any():
        words = f"the atoms of the scan are bonded otherwise than those of {mine}"
        return [refuse("scan-of-another", words, where=where, action=action)]
    if point.level is None or molecule.level is None:
        return []
    differences = level_differences(point.level, molecule.level)
    if not differences:
        return []
    words = f"the level of theory of the scan is not that of {mine}: {', '.join(differences)}"
    return [refuse("scan-of-another", words, where=where, action=action)]


def _turned_bond(molecule: Molecule, scan: TorsionScan) -> RotatableBond:
    """The bond that was turned, with the dihedral angle that has the most even steps."""
    candidates = []
    for found in rotatable_bonds(molecule.atomic_numbers, molecule.masses_u, molecule.coordinates_A):
        for atoms in _dihedrals(molecule, found):
            angles = np.array([dihedral_deg(m.coordinates_A, atoms) for m in scan.molecules])
            candidates.append((*_unevenness(angles), atoms))
    if not candidates or min(c[0] for c in candidates) > WIDEST_GAP_DEG:
        words = "no rotatable bond of the molecule turns by a third of a turn or more through the scan"
        action = 'Name the dihedral angle in front: --torsion "i-j-k-l PATH".'
        raise Refused([refuse("scan-unfit", words, where=scan.source, action=action)])
    return _bond(molecule, _most_even(candidates))


def _most_even(candidates: list[tuple[float, float, Atoms4]]) -> Atoms4:
    widest = min(gap for gap, _, _ in candidates)
    return min((spread, atoms) for gap, spread, atoms in candidates if gap < widest + 20.0)[1]


def _dihedrals(molecule: Molecule, bond: RotatableBond) -> list[Atoms4]:
    _, j, k, _ = bond.atoms
    bonded = bonds(molecule.atomic_numbers, molecule.coordinates_A)
    first, last = ([int(a) for a in np.flatnonzero(bonded[c]) if a != o] for c, o in ((j, k), (k, j)))
    return [(i, j, k, l) for i in first for l in last]  # noqa: E741


def _unevenness(angles_deg: FloatArray) -> tuple[float, float]:
    """The largest gap that the angles leave in the circle, and how unequal their steps are otherwise, degrees."""
    ordered = np.sort(angles_deg % 360.0)
    steps = np.sort(np.diff(ordered, append=ordered[0] + 360.0))
    steps = steps[steps > 1.0]
    if not len(steps):
        return 360.0, 360.0
    return float(steps[-1]), round(float(np.ptp(steps[:-1])) if len(steps) > 2 else 360.0, 3)


def _check_relaxed(molecule: Molecule, scan: TorsionScan) -> None:
    """Refuses a scan in which all bonds and angles are the same at every point."""
    bonded = bonds(molecule.atomic_numbers, molecule.coordinates_A).astype(int)
    near = (bonded + bonded @ bonded) > 0
    distances = [np.linalg.norm(m.coordinates_A[:, None] - m.coordinates_A[None], axis=2)[near] for m in scan.molecules]
    if len(distances) > 2 and float(np.ptp(np.array(distances), axis=0).max()) < RIGID_A:
        words = "the bonds and angles are the same at every point: nothing but the dihedral angle was moved"
        action = "Scan with everything else relaxed."
        raise Refused([refuse("rigid-scan", words, where=scan.source, expected="a relaxed scan", action=action)])


def _lower(molecule: Molecule, scan: TorsionScan) -> tuple[Finding, ...]:
    """That the scan found a lower energy than the frequencies have, where both are known."""
    own = molecule.energies_hartree.get(scan.molecules[0].energy_kind) if scan.molecules else None
    points = [m.energy_hartree for m in scan.molecules if m.energy_hartree is not None]
    if (
        own is None
        or molecule.energy_source is not None
        or not points
        or (own - min(points)) * HARTREE_CM1 <= LOWER_CM1
    ):
        return ()
    lower = (own - min(points)) * HARTREE_CM1
    words = f"the scan {scan.source} has a point {lower:.0f} cm⁻¹ below the energy of the frequencies"
    return (warn("scan-lower-minimum", words, action="Run the frequencies at the lower minimum."),)
