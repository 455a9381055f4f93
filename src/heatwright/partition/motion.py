"""Rotation, vibration and electronic states of a model: which contributions they become, and what is said of them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.partition.diatomic import level_sum, rotational_levels, vibration_rotation_levels
from heatwright.partition.electronic import ElectronicLevels
from heatwright.partition.electronic import Levels as ElectronicPairs
from heatwright.partition.levelsum import LevelSum
from heatwright.partition.lowmodes import LowModes, ModeShift, low_mode_findings, mode_shifts
from heatwright.partition.rotation import ClassicalRotor, CorrectedRotor
from heatwright.partition.spins import spin_weights

if TYPE_CHECKING:
    from heatwright.molecule import DiatomicConstants, FloatArray, Molecule
    from heatwright.partition.contribution import Contribution
    from heatwright.partition.radicals import DoubletPi
    from heatwright.structure.inertia import Inertia

RotationKind = Literal["classical", "corrected", "sum"]


@dataclass(frozen=True, eq=False, slots=True)
class Motion:
    """The contributions besides translation, and the treatments behind them in words.

    rotation : ``classical``, ``corrected``, ``sum``, ``level sum`` (with other degrees of freedom) or ``none``.
    low_modes : ``harmonic``, ``floor``, ``interpolate``, or ``level sum`` when no oscillator is left.
    shifts : what the treatment of low modes changes, mode by mode.
    lowest_cm1 : the level that is H(0), from where the electronic and the zero-point energy put it, 1/cm.
    """

    contributions: tuple[Contribution, ...]
    rotation: str
    rotation_text: str
    low_modes: str
    low_modes_text: str = ""
    shifts: tuple[ModeShift, ...] = ()
    findings: tuple[Finding, ...] = ()
    lowest_cm1: float = 0.0

    @property
    def is_bounded(self) -> bool:
        """Whether Cp has the classical limit of rigid rotors and oscillators."""
        return not any(isinstance(c, LevelSum) for c in self.contributions)


def motion(
    molecule: Molecule,
    *,
    moments: Inertia,
    masses_u: FloatArray,
    symmetry_number: int,
    wavenumbers_cm1: FloatArray,
    low_modes: LowModes,
    rotation: RotationKind,
    levels: ElectronicPairs,
    radical: DoubletPi | None,
) -> Motion:
    """The contributions of a molecule with these (scaled) wavenumbers.

    Raises Refused (``rotation``) when the levels of a non-linear rotor are to be summed.
    """
    electronic = ElectronicLevels(levels)
    if molecule.is_atom:
        return Motion((electronic,), "none", "", "harmonic")
    if radical is not None and radical.whole:
        text = "vibration-rotation levels of a doublet Pi state"
        whole = (radical.contribution(),)
        words = (radical.finding(),)
        return Motion(whole, "level sum", text, "level sum", findings=words, lowest_cm1=radical.lowest_cm1)
    if molecule.stated.diatomic is not None:
        return _diatomic(molecule, molecule.stated.diatomic, masses_u, symmetry_number, electronic)
    shifts = mode_shifts(wavenumbers_cm1.tolist(), low_modes)
    said = low_mode_findings(shifts, low_modes)
    vibration = low_modes.contribution(wavenumbers_cm1.tolist())
    rest = (low_modes.kind, low_modes.text, shifts)
    if radical is not None:
        both = (radical.contribution(), vibration)
        idle = () if rotation == "classical" else (_idle(rotation),)
        found = (radical.finding(), *idle, *said)
        return Motion(both, "level sum", "doublet Pi levels", *rest, found, radical.lowest_cm1)
    rotor, how, finding = _rotor(molecule, moments, masses_u, symmetry_number, rotation)
    return Motion((rotor, vibration, electronic), rotation, how, *rest, (*finding, *said))


def _idle(rotation: RotationKind) -> Finding:
    return warn("level-sum", f"--rotation {rotation} has no effect: rotation is in the sum over doublet Π levels")


def _rotor(
    molecule: Molecule, moments: Inertia, masses_u: FloatArray, sigma: int, kind: RotationKind
) -> tuple[Contribution, str, tuple[Finding, ...]]:
    classical = ClassicalRotor(tuple(moments.rotational_constants_cm1.tolist()), sigma)
    if kind == "classical":
        return classical, "rigid rotor", ()
    if kind == "corrected":
        corrected = CorrectedRotor(classical)
        words = (
            "the first quantum correction of rotation (Stripp and Kirkwood 1951) lowers H(T) - H(0) by "
            f"{corrected.temperature_K * GAS_CONSTANT_J_MOL_K:.1f} J/mol; Cp and S are those of the classical rotor"
        )
        return corrected, "rigid rotor with its first quantum correction", (note("rotation", words),)
    if moments.kind != "linear":
        found = f"the levels of rotation were to be summed up, and the rotor is not linear ({moments.kind})"
        action = "Say --rotation corrected or classical."
        raise Refused([refuse("rotation", found, expected="a linear molecule", action=action)])
    B = classical.rotational_constants_cm1[0]
    D = _centrifugal_cm1(molecule, B)
    even, odd, weights = spin_weights(molecule.atomic_numbers, masses_u, sigma)
    rotor = level_sum("rotation", rotational_levels(B, D, even, odd))
    dh_J, ds_J = _difference(rotor, classical)
    of_what = "the equilibrium geometry, whose B is larger than B0" if molecule.has_geometry else "the file"
    stretch = f"D = 4 B³/we² = {D:.3g} 1/cm" if D else "no centrifugal term"
    words = (
        f"rotation is a sum over {rotor.energies_cm1.size} levels with B = {B:.5g} 1/cm of {of_what}, {stretch}, "
        f"{weights}; against the classical rotor H(298.15 K) - H(0) moves by {dh_J:+.1f} J/mol and S(298.15 K) by "
        f"{ds_J:+.3f} J/mol/K"
    )
    return rotor, f"rotational levels summed ({weights})", (note("rotation", words),)


def _centrifugal_cm1(molecule: Molecule, B_cm1: float) -> float:
    """Kratzer's 4B³/we² of a diatomic molecule, 1/cm; 0 for others, whose constant is not known."""
    if molecule.n_atoms != 2:
        return 0.0
    return float(4.0 * B_cm1**3 / molecule.wavenumbers_cm1[0] ** 2)


def _difference(one: Contribution, other: Contribution) -> tuple[float, float]:
    """H(298.15 K) − H(0), J/mol, and S(298.15 K), J/mol/K, of one contribution less those of another."""
    T = np.array([STANDARD_TEMPERATURE_K])
    a, b = one.ln_q(T), other.ln_q(T)
    R = GAS_CONSTANT_J_MOL_K
    return float((a.h_RT - b.h_RT)[0]) * R * STANDARD_TEMPERATURE_K, float((a.s_R - b.s_R)[0]) * R


def _diatomic(
    molecule: Molecule, constants: DiatomicConstants, masses_u: FloatArray, sigma: int, electronic: ElectronicLevels
) -> Motion:
    even, odd, weights = spin_weights(molecule.atomic_numbers, masses_u, sigma)
    sums = level_sum("vibration and rotation", vibration_rotation_levels(constants, even, odd))
    end = (
        "up to the highest of each vibrational state, as no dissociation energy is given"
        if constants.D0_cm1 is None
        else f"below the dissociation energy {constants.D0_cm1:g} 1/cm"
    )
    c = constants
    words = (
        f"vibration and rotation are one sum over {sums.energies_cm1.size} levels {end}: we {c.we_cm1:g}, wexe "
        f"{c.wexe_cm1:g}, Be {c.Be_cm1:g}, alphae {c.alphae_cm1:g}, D {c.centrifugal_cm1:.4g} 1/cm, {c.source}; "
        f"{weights}"
    )
    text = f"vibration-rotation levels summed ({weights})"
    return Motion((sums, electronic), "level sum", text, "level sum", findings=(note("level-sum", words),))
