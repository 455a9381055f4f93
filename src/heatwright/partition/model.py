"""ThermoModel: a molecule with its chosen contributions and conventions, and the table it gives."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property, reduce
from operator import add
from typing import TYPE_CHECKING, Any, Final

import numpy as np
from numpy.typing import ArrayLike

from heatwright.constants import CM1_KJ_MOL, GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.elements import composition, element
from heatwright.findings import Finding, warn
from heatwright.partition.anharmonic import anharmonic_findings, oscillators
from heatwright.partition.choices import HARMONIC, ModelOptions
from heatwright.partition.conformers import Conformer, ConformerMixture
from heatwright.partition.contribution import ConstantFactor, Contribution, LnQ, total_ln_q
from heatwright.partition.isomers import isomers_with_torsions
from heatwright.partition.motion import Motion, motion
from heatwright.partition.radicals import electronic_choice
from heatwright.partition.rigid import RigidBody, rigid_body, symmetry_choice
from heatwright.partition.scaling import published_choice, scale_findings
from heatwright.partition.table import ThermoTable, checked_temperatures, share_of
from heatwright.partition.translation import Translation
from heatwright.partition.vibration import HarmonicVibration, harmonic_sums_of_many, zero_point_energy_kJ_mol

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, MassKind, Molecule
    from heatwright.partition.electronic import Levels
    from heatwright.partition.internal_rotation import InternalRotation, TreatedTorsion
    from heatwright.partition.uncertainty import TableUncertainty
    from heatwright.scales import ScaleChoice
    from heatwright.structure.inertia import Inertia
    from heatwright.structure.symmetry import Symmetry


_AHEAD: Final = "_ahead"
_NEAR_298: Final = np.array([STANDARD_TEMPERATURE_K, 300.0])
"""298.15 K not alone: sums over a single temperature are added up in another order."""


@dataclass(frozen=True, eq=False, kw_only=True)
class ThermoModel:
    """A molecule's contributions and conventions; it knows how to tabulate, nothing else.

    zpe_kJ_mol : scaled zero-point energy.   levels : electronic levels in use, ``levels_source`` where they are from.
    findings : the choices that were made, for the user to read.
    conformers : those of a mixture, lowest first, which is the one that everything else here describes; else empty.
    named_after : the molecule that the species is called after, when that is not the lowest conformer.
    """

    molecule: Molecule
    options: ModelOptions
    contributions: tuple[Contribution, ...]
    motion: Motion
    inertia: Inertia
    symmetry: Symmetry
    symmetry_number: int
    optical_isomers: int
    masses_u: FloatArray
    mass_kind: MassKind
    levels: Levels
    levels_source: str
    zpe_kJ_mol: float
    findings: tuple[Finding, ...] = field(default=())
    scale_choice: ScaleChoice | None = None
    conformers: tuple[Conformer, ...] = ()
    named_after: Molecule | None = None
    torsions: tuple[TreatedTorsion, ...] = ()

    @property
    def frequency_scale(self) -> float:
        """The factor on the wavenumbers in the thermal functions (1 when none was asked for)."""
        return self.options.frequency_scale or 1.0

    @property
    def zpe_scale(self) -> float:
        """The factor on the wavenumbers in the zero-point energy (1 when none was asked for)."""
        return self.options.zpe_scale or 1.0

    @property
    def scale_source(self) -> str:
        """Where the scale factors are from: a publication, ``given``, or empty when there is none."""
        if self.scale_choice is not None:
            return self.scale_choice.source
        return "" if self.options.frequency_scale is None and self.options.zpe_scale is None else "given"

    @property
    def point_group_text(self) -> str:
        """The point group, or that it is not stated."""
        return self.symmetry.point_group or "point group not stated"

    @property
    def vibration_text(self) -> str:
        """What the oscillators are, in words; empty when there is none."""
        if self.motion.low_modes == "level sum":
            return ""
        kind = "oscillators with anharmonic fundamentals" if self.options.anharmonic else "harmonic oscillators"
        if self.torsions:
            kind += f" and {len(self.torsions)} hindered rotor{'s' if len(self.torsions) > 1 else ''}"
        return f"{kind}, {self.motion.low_modes_text}" if self.motion.low_modes_text else kind

    @property
    def motion_text(self) -> str:
        """Rotation and vibration in words."""
        return ", ".join(text for text in (self.motion.rotation_text, self.vibration_text) if text)

    @property
    def zpe_text(self) -> str:
        """What the zero-point energy is, in words."""
        if self.molecule.stated.diatomic is not None:
            return "from spectroscopic constants"
        if self.options.anharmonic:
            return "anharmonic"
        rotors = ", with the rotors' own" if self.torsions else ""
        return f"harmonic, scaled by {self.zpe_scale:g}{rotors}"

    @property
    def lowest_level_kJ_mol(self) -> float:
        """The level that is H(0), above the sum of electronic and zero-point energy, kJ/mol.

        Not 0 only where levels of a doublet Π state are summed up: the electronic energy of a calculation without
        spin-orbit coupling, and the rotation without its Λ, lie above (OH) or below (CH) the lowest real level.
        """
        return self.motion.lowest_cm1 * CM1_KJ_MOL

    @cached_property
    def composition(self) -> dict[str, int]:
        """Atoms by element symbol, Hill order; deuterium as ``D``."""
        return composition(self.molecule.atomic_numbers, self.masses_u)

    def ln_q(self, T: ArrayLike) -> LnQ:
        """ln q of the whole molecule and its derivatives at temperatures in K."""
        return total_ln_q(self.contributions, checked_temperatures(T))

    def cp_R(self, T: ArrayLike) -> FloatArray:
        """Cp°/R, dimensionless."""
        return self.ln_q(T).cp_R

    def h_minus_h0_R(self, T: ArrayLike) -> FloatArray:
        """[H°(T) − H°(0)]/R, K."""
        h_R: FloatArray = self.ln_q(T).h_RT * np.asarray(T, dtype=float)
        return h_R

    def s_R(self, T: ArrayLike) -> FloatArray:
        """S°/R, dimensionless."""
        return self.ln_q(T).s_R

    def parts(self, T: FloatArray) -> tuple[LnQ, ...]:
        """ln q and its derivatives of each contribution, in their order, at *T*, K; what all functions are made of."""
        ahead = self.__dict__.get(_AHEAD)
        if ahead is not None and ahead[0] is T:
            known: tuple[LnQ, ...] = ahead[1]
            return known
        return tuple([contribution.ln_q(T) for contribution in self.contributions])

    def evaluate_ahead(self, T: FloatArray) -> None:
        """Evaluate at *T*, K, the first of which is 298.15: asked for this very array, :meth:`parts` has it then.

        Nothing else changes: a value does not depend, to the last bit, on the other temperatures it is asked for with.
        """
        self.__dict__[_AHEAD] = (T, self.parts(T))

    def tabulate(self, T: ArrayLike) -> ThermoTable:
        """The table at the temperatures *T*, K."""
        grid = np.atleast_1d(checked_temperatures(T))
        parts = self.parts(np.concatenate([[STANDARD_TEMPERATURE_K], grid]))
        return self.table_from(parts, reduce(add, parts), slice(1, None), grid)

    def table_from(self, parts: Sequence[LnQ], total: LnQ, shown: slice, grid: FloatArray) -> ThermoTable:
        """The table from the values of the contributions (:meth:`parts`) and their sum.

        They are at temperatures of which the first is 298.15 K; those at *shown* are the grid, K.
        """
        whole = share_of(total[shown], total[:1], grid)
        each = zip(self.contributions, parts, strict=True)
        return ThermoTable(
            T_K=grid,
            cp_J_mol_K=whole.cp_J_mol_K,
            h_minus_h298_kJ_mol=whole.h_minus_h298_kJ_mol,
            s_J_mol_K=whole.s_J_mol_K,
            h298_minus_h0_kJ_mol=self.h298_minus_h0_kJ_mol,
            parts={contribution.name: (part[:1], part[shown]) for contribution, part in each},
            populations=self.populations(grid),
            uncertainty=self._uncertainty(grid),
        )

    def populations(self, T: ArrayLike) -> tuple[FloatArray, ...]:
        """The fraction of each conformer at the temperatures, mirror images together; empty without conformers."""
        return tuple(ConformerMixture(self.conformers).populations(checked_temperatures(T))) if self.conformers else ()

    def _uncertainty(self, T: FloatArray) -> TableUncertainty | None:
        stated = self.options.uncertainty
        if stated is None:
            return None
        from heatwright.partition.uncertainty import propagated

        alone = (Conformer(self.molecule.source.file, 0.0, self.optical_isomers, self.contributions),)
        return propagated(self.conformers or alone, stated, self.molecule.level, T)

    @cached_property
    def h298_minus_h0_kJ_mol(self) -> float:
        """H°(298.15 K) − H°(0 K), kJ/mol."""
        ahead = self.__dict__.get(_AHEAD)
        parts = self.parts(_NEAR_298) if ahead is None else ahead[1]
        u = float(reduce(add, [part.u[0] for part in parts]))
        return u * STANDARD_TEMPERATURE_K * GAS_CONSTANT_J_MOL_K / 1000.0

    @property
    def classical_cp_R(self) -> float:
        """The limit of Cp/R at high temperature when only rigid rotation and harmonic vibration are present."""
        rotation = {"atom": 0.0, "linear": 1.0}.get(self.inertia.kind, 1.5)
        return 2.5 + rotation + self.molecule.wavenumbers_cm1.size

    @property
    def classical_limit_R(self) -> float | None:
        """The same where it is a limit of this model, else None: electronic levels, level sums, conformer mixtures."""
        return self.classical_cp_R if len(self.levels) == 1 and self.motion.is_bounded and not self.conformers else None


def evaluate_together(models: Sequence[ThermoModel], T: FloatArray) -> None:
    """As :meth:`ThermoModel.evaluate_ahead` for each model, with all harmonic oscillators at once."""
    harmonic = [c for model in models for c in model.contributions if isinstance(c, HarmonicVibration)]
    sums = iter(harmonic_sums_of_many([np.array(c.wavenumbers_cm1) for c in harmonic], T))
    for model in models:
        parts = [next(sums) if isinstance(c, HarmonicVibration) else c.ln_q(T) for c in model.contributions]
        model.__dict__[_AHEAD] = (T, tuple(parts))


def build_model(
    molecule: Molecule, options: ModelOptions | None = None, *, rigid: RigidBody = rigid_body
) -> ThermoModel:
    """The rigid-rotor harmonic-oscillator model of a molecule that has passed the soundness checks.

    rigid : the function that finds rotor and symmetry, for callers that remember what it found.
    Raises ValueError when the molecule has an imaginary mode or neither modes nor a single atom: the reading room
    refuses those with a sentence before a model is asked for.
    """
    asked = options or ModelOptions()
    options, choice = _scaled(molecule, asked)
    if molecule.n_imaginary or not molecule.has_thermochemistry:
        raise ValueError(f"{molecule.source.file}: a thermodynamic model needs the real modes of a minimum, or an atom")
    masses, mass_kind = chosen_masses(molecule, options.masses)
    moments, found = rigid(molecule, masses, options.symmetry_tolerance_A)
    electronic = electronic_choice(molecule, moments, options.electronic)
    wavenumbers, zpe_kJ_mol = oscillators(molecule, options.anharmonic)
    if molecule.stated.diatomic is not None:
        zpe_kJ_mol = molecule.stated.diatomic.zero_point_cm1 * CM1_KJ_MOL
    stated = molecule.stated
    sigma = options.symmetry_number or stated.symmetry_number or found.symmetry_number
    isomers_found = stated.optical_isomers or found.optical_isomers
    rotors = _rotors(molecule, options)
    isomers, rotor_findings = isomers_with_torsions(options.optical_isomers, isomers_found, rotors)
    if rotors is not None:
        from heatwright.partition.internal_rotation import cost

        wavenumbers, zpe_kJ_mol = rotors.wavenumbers_cm1, zero_point_energy_kJ_mol(rotors.wavenumbers_cm1)
        counted = (options.optical_isomers or isomers_found, isomers)
        said = cost(molecule, rotors, options.frequency_scale or 1.0, counted)
        rotor_findings = (*rotors.findings, said, *rotor_findings)
    made = motion(
        molecule,
        moments=moments,
        masses_u=masses,
        symmetry_number=sigma,
        wavenumbers_cm1=wavenumbers * (options.frequency_scale or 1.0),
        low_modes=options.low_modes,
        rotation=options.rotation,
        levels=electronic.levels,
        radical=electronic.radical,
    )
    return ThermoModel(
        molecule=molecule,
        options=options,
        contributions=_contributions(masses, options, made, rotors, isomers),
        motion=made,
        inertia=moments,
        symmetry=found,
        symmetry_number=sigma,
        optical_isomers=isomers,
        masses_u=masses,
        mass_kind=mass_kind,
        levels=electronic.levels,
        levels_source=electronic.source,
        zpe_kJ_mol=zpe_kJ_mol * (options.zpe_scale or 1.0) + (rotors.ground_kJ_mol if rotors else 0.0),
        findings=(
            *symmetry_choice(molecule, found, options.symmetry_number, options.optical_isomers),
            *electronic.findings,
            *made.findings,
            *rotor_findings,
            *(_without_effect(asked, options) if molecule.stated.diatomic is not None else ()),
            *anharmonic_findings(molecule, options.anharmonic),
            *(
                ()
                if options.anharmonic or molecule.stated.diatomic is not None
                else scale_findings(molecule, options.frequency_scale, options.zpe_scale, choice)
            ),
        ),
        scale_choice=choice,
        torsions=rotors.torsions if rotors else (),
    )


_FOR_OSCILLATORS: Final[dict[str, Any]] = {
    "frequency_scale": None,
    "zpe_scale": None,
    "anharmonic": False,
    "low_modes": HARMONIC,
    "rotation": "classical",
}
"""Options of rotors and oscillators with their defaults; they have no effect on levels from spectroscopic constants."""


def _without_effect(asked: ModelOptions, options: ModelOptions) -> tuple[Finding, ...]:
    """That options for rotors and oscillators have no effect on a molecule given by its spectroscopic constants."""
    idle = [name for name in ("scale", *_FOR_OSCILLATORS) if getattr(asked, name) != getattr(options, name)]
    if not idle:
        return ()
    words = f"levels summed up from spectroscopic constants are used as they are, without {', '.join(idle)}"
    return (warn("level-sum", words),)


def _rotors(molecule: Molecule, options: ModelOptions) -> InternalRotation | None:
    """The torsions that were asked for, or None."""
    if not options.torsions:
        return None
    from heatwright.partition.internal_rotation import internal_rotation

    return internal_rotation(molecule, options.torsions, coupled=options.torsion_coupling)


def _scaled(molecule: Molecule, options: ModelOptions) -> tuple[ModelOptions, ScaleChoice | None]:
    """The options with published factors put in where they were asked for, and the choice that was made."""
    if molecule.stated.diatomic is not None:
        return replace(options, scale=None, **_FOR_OSCILLATORS), None
    choice = published_choice(molecule) if options.scale == "published" else None
    if choice is None:
        return options, None
    return (
        replace(options, scale=None, frequency_scale=choice.frequency_factor, zpe_scale=choice.zpe_factor),
        choice,
    )


def _contributions(
    masses: FloatArray, options: ModelOptions, made: Motion, rotors: InternalRotation | None, isomers: int
) -> tuple[Contribution, ...]:
    translation = Translation(float(masses.sum()), options.pressure_Pa)
    chirality = (ConstantFactor("optical isomers", isomers),) if isomers > 1 else ()
    return (translation, *made.contributions, *(rotors.contributions if rotors else ()), *chirality)


def chosen_masses(molecule: Molecule, kind: MassKind | None) -> tuple[FloatArray, MassKind]:
    """The masses (u) to use: those of the output, or the table's; an isotope the job was given on purpose is kept."""
    if kind is None:
        return molecule.masses_u, molecule.mass_kind
    chosen = molecule.masses_u.copy()
    for i, number in enumerate(molecule.atomic_numbers):
        atom = element(int(number))
        if min(abs(chosen[i] - atom.common_mass_u), abs(chosen[i] - atom.average_weight_u)) < 0.1:
            chosen[i] = atom.average_weight_u if kind == "average" else atom.common_mass_u
    return chosen, kind
