"""Torsions of a molecule as hindered rotors: bonds and potentials put together, and what they take the place of."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from heatwright.constants import CM1_KJ_MOL, GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.partition.contribution import ConstantFactor, Contribution, total_ln_q
from heatwright.partition.fourier import FittedPotential, tolerated_cm1
from heatwright.partition.pitzer_gwinn import PitzerGwinnRotor
from heatwright.partition.plane_waves import basis_size
from heatwright.partition.scans import WishedTorsion, wished
from heatwright.partition.torsion import MOST_WAVES, HinderedRotor, hindered_rotor
from heatwright.partition.vibration import HarmonicVibration
from heatwright.structure.isotopes import force_constants
from heatwright.structure.torsion_modes import without_torsions
from heatwright.structure.torsions import (
    RotatableBond,
    alike_bonds,
    dihedral_deg,
    is_mirrored,
    reduced_moments,
    rotational_constant_cm1,
    torsion_vectors,
)

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule
    from heatwright.partition.potential import Potential
    from heatwright.reading.torsion_scans import Torsion

LOW_CM1 = 1000.0
"""A torsion has a wavenumber below this (common practice, no source); the highest here is N2H4's at some 400."""
OVERLAP = 0.8
CHECK_J_MOL_K = 0.5
NEAR_DEG = 25.0
"""A well this near to −φ is that of the mirror image: a given cosine has its wells where its fold puts them."""


@dataclass(frozen=True, eq=False, kw_only=True)
class TreatedTorsion:
    """One torsion as it was treated.

    bond : its atoms and tops.   potential : V(φ), φ the dihedral angle of bond.atoms.   fit : of a scan, or None.
    moment_u_A2, F_cm1 : reduced moment of inertia and rotational constant.   angle_deg : φ of the frequencies.
    rotor : the contribution.   check : the form of Pitzer and Gwinn.   overlap : of the torsion with the low modes.
    """

    bond: RotatableBond
    potential: Potential
    fit: FittedPotential | None
    source: str
    moment_u_A2: float
    F_cm1: float
    angle_deg: float
    rotor: HinderedRotor | PitzerGwinnRotor
    check: PitzerGwinnRotor
    overlap: float

    @property
    def depth_cm1(self) -> float:
        """How far below the geometry of the frequencies the potential's lowest minimum lies, 1/cm."""
        at = self.potential(np.array(np.radians(self.angle_deg)))
        return float(at) - self.potential.minimum[1]

    @property
    def different_minima(self) -> int:
        """Number of minima of the potential that are not alike by the top's symmetry; mirror images count apart."""
        return max(len(self.potential.minima) // self.bond.symmetry, 1) if self.potential.fold else 1

    @property
    def is_lower_elsewhere(self) -> bool:
        """Whether the geometry of the frequencies is not at the lowest minimum."""
        return self.depth_cm1 > tolerated_cm1(self.potential.barrier_cm1)

    @property
    def ground_cm1(self) -> float:
        """The rotor's zero-point level above the energy of the geometry of the frequencies, 1/cm."""
        return self.rotor.ground_cm1 - (self.depth_cm1 if self.is_lower_elsewhere else 0.0)

    @property
    def text(self) -> str:
        """The torsion in words."""
        fit = f", fit residual {self.fit.rms_cm1:.1f} cm⁻¹" if self.fit else ""
        n = self.bond.symmetry
        wells = self.different_minima
        several = f"; its {wells} different minima are levels of the rotor, no conformers besides" if wells > 1 else ""
        return (
            f"torsion {self.bond.label} ({self.source}): barrier {self.potential.barrier_cm1:.0f} cm⁻¹, "
            f"{n} equivalent orientation{'s' if n > 1 else ''}, F = {self.F_cm1:.2f} cm⁻¹{fit}{several}"
        )


@dataclass(frozen=True, eq=False, kw_only=True)
class InternalRotation:
    """All treated torsions of a molecule.

    wavenumbers_cm1 : (m − t,) what is left of the modes, unscaled.   coupling : factor of the coupled determinant.
    holds_mirror_image : whether the potentials take the molecule over into its mirror image.
    """

    torsions: tuple[TreatedTorsion, ...]
    wavenumbers_cm1: FloatArray
    coupling: ConstantFactor | None
    holds_mirror_image: bool
    findings: tuple[Finding, ...]

    @property
    def contributions(self) -> tuple[Contribution, ...]:
        """The rotors, and the coupling between them where it was asked for."""
        return (*(t.rotor for t in self.torsions), *((self.coupling,) if self.coupling else ()))

    @property
    def ground_kJ_mol(self) -> float:
        """Sum of the rotors' zero-point energies, kJ/mol."""
        return sum(t.ground_cm1 for t in self.torsions) * CM1_KJ_MOL


def internal_rotation(molecule: Molecule, wishes: Sequence[Torsion], *, coupled: bool = False) -> InternalRotation:
    """The torsions of a molecule that are wished for.

    coupled : multiply by √(det D/∏ Dᵢᵢ) of the reduced moments (Kilpatrick and Pitzer 1949).
    Raises Refused: ``torsion-impossible``, ``scan-unfit``, ``scan-of-another``, ``no-force-constants``.
    """
    tops = [wished(molecule, wish) for wish in wishes]
    _check_together(molecule, tops)
    bonds, masses, x = [t.bond for t in tops], molecule.masses_u, molecule.coordinates_A
    hessian, _, _ = force_constants(molecule, "projecting out a torsion")
    alike = alike_bonds(molecule.atomic_numbers, masses, x, bonds)
    vectors = (torsion_vectors(masses, x, tops) for tops in (bonds, alike))
    left, overlaps = without_torsions(hessian, masses, x, *vectors)
    if not (left > 0.0).all():
        found = f"without the torsions the lowest mode is {left[0]:.2f} cm⁻¹"
        raise Refused([refuse("imaginary-modes", found, expected="a minimum", action="Look at the lowest modes.")])
    D = reduced_moments(masses, x, bonds)
    treated = tuple(
        _treated(molecule, top, float(D[i, i]), float(overlaps[i]), len(tops) == 1) for i, top in enumerate(tops)
    )
    coupling = None
    if coupled and len(tops) > 1:
        coupling = ConstantFactor("torsion coupling", float(np.sqrt(np.linalg.det(D) / D.diagonal().prod())))
    return InternalRotation(
        torsions=treated,
        wavenumbers_cm1=left,
        coupling=coupling,
        holds_mirror_image=_holds_mirror_image(molecule, treated),
        findings=(
            *(f for t, top in zip(treated, tops, strict=True) for f in (*top.findings, *_findings(t))),
            *_untreated(alike),
        ),
    )


def _check_together(molecule: Molecule, tops: list[WishedTorsion]) -> None:
    """Two torsions about one bond, or more torsions than low modes, cannot be."""
    axes = [t.bond.bond for t in tops]
    twice = next((t for t in tops if axes.count(t.bond.bond) > 1), None)
    low = int(np.count_nonzero(molecule.wavenumbers_cm1 < LOW_CM1))
    if twice is not None:
        words = f"two torsions were asked for about the bond {twice.bond.bond[0] + 1}-{twice.bond.bond[1] + 1}"
        raise Refused([refuse("torsion-impossible", words, action="Give each torsion once.")])
    if len(tops) > low:
        words = f"{len(tops)} torsions were asked for, and {low} modes are below {LOW_CM1:g} cm⁻¹"
        raise Refused([refuse("torsion-impossible", words, action="A torsion takes the place of one low mode.")])


def _treated(molecule: Molecule, top: WishedTorsion, moment: float, overlap: float, alone: bool) -> TreatedTorsion:
    F, n = rotational_constant_cm1(moment), top.bond.symmetry
    angle = dihedral_deg(molecule.coordinates_A, top.bond.atoms)
    _check_minimum(top, angle)
    name = "torsion" if alone else f"torsion {top.bond.label}"
    check = PitzerGwinnRotor(top.potential, F, n, name)
    heavy = basis_size(top.potential, F) > MOST_WAVES
    return TreatedTorsion(
        bond=top.bond,
        potential=top.potential,
        fit=top.fit,
        source=top.source,
        moment_u_A2=moment,
        F_cm1=F,
        angle_deg=angle,
        rotor=check if heavy else hindered_rotor(top.potential, F, n, name),
        check=check,
        overlap=overlap,
    )


def _check_minimum(top: WishedTorsion, angle_deg: float) -> None:
    """The geometry of the frequencies is a minimum, so it cannot lie where the potential bends down."""
    curvature = float(top.potential.derivatives(np.array(np.radians(angle_deg)))[2])
    if curvature >= 0.0 or top.potential.barrier_cm1 <= 2.0 * tolerated_cm1(0.0):
        return
    words = (
        f"the geometry of the frequencies has {top.bond.label} at {angle_deg:.0f}°, and there the potential "
        f"({top.source}) has no minimum"
    )
    lowest = np.degrees(top.potential.minimum[0])
    action = "Count the angles of the scan as those of this dihedral angle, or name the one that was turned."
    raise Refused([refuse("scan-unfit", words, expected=f"an angle near {lowest:.0f}°", action=action)])


def _findings(t: TreatedTorsion) -> tuple[Finding, ...]:
    """What has to be said of one torsion."""
    said = [note("torsion", t.text)]
    label = f"torsion {t.bond.label}"
    if t.overlap < OVERLAP:
        words = f"{label} makes up only {t.overlap:.2f} of the modes nearest to it"
        action = "Another motion is mixed in."
        said.append(warn("torsion-overlap", words, expected=f"{OVERLAP:g}", action=action))
    if isinstance(t.rotor, PitzerGwinnRotor):
        words = (
            f"{label} is so heavy (F = {t.F_cm1:.2f} cm⁻¹) that its classical form with a quantum correction was taken"
        )
        said.append(note("torsion-classical", words))
    apart = entropy_J_mol_K((t.rotor,)) - entropy_J_mol_K((t.check,))
    if t.potential.fold and abs(apart) > CHECK_J_MOL_K:
        words = f"{label}: S(298.15 K) from the levels is {apart:.2f} J/mol/K from that of Pitzer and Gwinn"
        action = "Look at the potential between the points."
        said.append(warn("torsion-check", words, expected=f"{CHECK_J_MOL_K:g}", action=action))
    if t.is_lower_elsewhere:
        at = (np.degrees(t.potential.minimum[0]) + 180.0) % 360.0 - 180.0
        words = (
            f"the potential of {label} ({t.source}) has a minimum {t.depth_cm1:.0f} cm⁻¹ below the geometry of the "
            f"frequencies, at {at:.0f}° where that is at {t.angle_deg:.0f}°"
        )
        said.append(warn("scan-lower-minimum", words, action="Run the frequencies at the lower minimum."))
    return tuple(said)


def _untreated(alike: list[RotatableBond]) -> tuple[Finding, ...]:
    """That torsions equivalent to treated ones were not given."""
    if not alike:
        return ()
    many = len(alike) > 1
    labels = ", ".join(bond.label for bond in alike)
    words = (
        f"{'torsions' if many else 'torsion'} {labels}, equivalent to one that is treated, "
        f"{'were' if many else 'was'} not given and {'stay oscillators' if many else 'stays an oscillator'}"
    )
    action = f'Give {"them" if many else "it"} as well, --torsion "{alike[0].label} …"; a scan of one serves the other.'
    return (warn("torsion-equivalent", words, action=action),)


def entropy_J_mol_K(parts: Sequence[Contribution], T_K: float = STANDARD_TEMPERATURE_K) -> float:
    """S of some contributions at one temperature, J/mol/K."""
    return float(total_ln_q(parts, np.array([T_K])).s_R[0]) * GAS_CONSTANT_J_MOL_K


def heat_capacity_J_mol_K(parts: Sequence[Contribution], T_K: float = STANDARD_TEMPERATURE_K) -> float:
    """Cp of some contributions at one temperature, J/mol/K."""
    return float(total_ln_q(parts, np.array([T_K])).cp_R[0]) * GAS_CONSTANT_J_MOL_K


def cost(molecule: Molecule, done: InternalRotation, scale: float, isomers: tuple[int, int]) -> Finding:
    """What the rotors change against the harmonic oscillator.

    scale : factor on the wavenumbers.   isomers : optical isomers counted without and with the rotors.
    """
    before, after = (ConstantFactor("optical isomers", n) for n in isomers)
    harmonic = (HarmonicVibration(tuple((molecule.wavenumbers_cm1 * scale).tolist())), before)
    hindered = (HarmonicVibration(tuple((done.wavenumbers_cm1 * scale).tolist())), *done.contributions, after)
    s = entropy_J_mol_K(hindered) - entropy_J_mol_K(harmonic)
    cp = heat_capacity_J_mol_K(hindered) - heat_capacity_J_mol_K(harmonic)
    many = f"the {len(done.torsions)} torsions" if len(done.torsions) > 1 else "the torsion"
    words = f"{many} changed S(298.15 K) by {s:+.2f} and Cp(298.15 K) by {cp:+.2f} J/mol/K"
    return note("torsion", f"against harmonic oscillators {words}")


def _holds_mirror_image(molecule: Molecule, torsions: tuple[TreatedTorsion, ...]) -> bool:
    """Whether turning every torsion from φ to −φ gives the mirror image, and there is a well as low at −φ."""
    for t in torsions:
        here = float(t.potential(np.array(np.radians(t.angle_deg))))
        there = t.potential(np.radians(-t.angle_deg + np.arange(-NEAR_DEG, NEAR_DEG + 1.0)))
        if float(there.min()) - here > tolerated_cm1(t.potential.barrier_cm1):
            return False
    return is_mirrored(molecule.atomic_numbers, molecule.coordinates_A, [t.bond for t in torsions])
