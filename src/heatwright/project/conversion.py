"""From the plain values of a manifest, or of the command line, to the options that the engine takes.

One way for both, so that the same choice gives the same entry.  Imports are inside the functions: reading a manifest
needs none of them.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final, Literal

from heatwright.errors import UsageError
from heatwright.species import Reading

if TYPE_CHECKING:
    from heatwright.entry import FitOptions
    from heatwright.formation.choices import EnergyChoices
    from heatwright.formation.corrections import Correction
    from heatwright.formation.formation import GivenEnthalpy
    from heatwright.formation.references import AtomReference
    from heatwright.formation.species_references import SpeciesReference
    from heatwright.formation.zero_kelvin import ZeroKelvinEnergies
    from heatwright.partition.choices import ModelOptions
    from heatwright.partition.lowmodes import LowModes
    from heatwright.partition.radicals import ElectronicOption
    from heatwright.project.manifest_types import (
        FitChoice,
        FormationChoice,
        ModelChoice,
        ProjectPath,
        ReadingChoice,
        SpeciesRequest,
    )
    from heatwright.reading.torsion_scans import Torsion
    from heatwright.structure.isotopes import Isotope


_NAMED_LEVELS: Final[dict[str, Literal["table", "spin", "levels"]]] = {
    "table": "table",
    "spin": "spin",
    "levels": "levels",
}


def model_options(choice: ModelChoice) -> ModelOptions:
    """The options of the model; scans are read here.  Raises UsageError for what contradicts itself, and Refused."""
    from heatwright.constants import ATMOSPHERE_PA, BAR_PA
    from heatwright.partition.choices import ModelOptions
    from heatwright.partition.inputs import parse_uncertainties

    if choice.scale is not None and (choice.frequency_scale is not None or choice.zpe_scale is not None):
        raise UsageError("--scale published chooses both factors; leave out --frequency-scale and --zpe-scale")
    return ModelOptions(
        low_modes=low_modes(choice),
        rotation=choice.rotation,
        scale=choice.scale,
        anharmonic=choice.anharmonic,
        pressure_Pa={"1bar": BAR_PA, "1atm": ATMOSPHERE_PA}[choice.pressure],
        frequency_scale=choice.frequency_scale,
        zpe_scale=choice.zpe_scale,
        symmetry_number=choice.symmetry_number,
        optical_isomers=choice.optical_isomers,
        symmetry_tolerance_A=choice.symmetry_tolerance_A,
        electronic=_electronic(choice.electronic),
        masses=choice.masses,
        uncertainty=None if choice.uncertainty is None else parse_uncertainties(choice.uncertainty),
        torsions=_torsions(choice),
        torsion_coupling=choice.torsion_coupling,
    )


def _torsions(choice: ModelChoice) -> tuple[Torsion, ...]:
    if not choice.torsions:
        return ()
    from heatwright.reading.torsion_scans import read_torsion

    return tuple(read_torsion(torsion.text) for torsion in choice.torsions)


def _electronic(words: str) -> ElectronicOption:
    from heatwright.partition.electronic import parse_levels

    return _NAMED_LEVELS[words] if words in _NAMED_LEVELS else parse_levels(words)


def low_modes(choice: ModelChoice) -> LowModes:
    """The treatment of low modes; raises UsageError for a number that belongs to another treatment."""
    from heatwright.partition.lowmodes import LowModes

    kind, cutoff, moment = choice.low_modes, choice.cutoff_cm1, choice.averaging_moment_kg_m2
    if cutoff is not None and kind == "harmonic":
        raise UsageError("--cutoff is for --low-modes floor or interpolate")
    if moment is not None and kind != "interpolate":
        raise UsageError("--averaging-moment is for --low-modes interpolate")
    given = {"cutoff_cm1": cutoff, "averaging_moment_kg_m2": moment}
    return LowModes(kind, **{name: value for name, value in given.items() if value is not None})


def reading_options(choice: ReadingChoice, *, torsions: bool = False) -> Reading:
    """How outputs are read; torsions : whether force constants are wanted.  Raises UsageError for isotopes."""
    return Reading(
        choice.job,
        choice.charge,
        choice.multiplicity,
        _isotopes(choice),
        accept=choice.accept,
        accept_imaginary_cm1=choice.accept_imaginary_cm1,
        torsions=torsions,
    )


def _isotopes(choice: ReadingChoice) -> tuple[Isotope, ...]:
    if not choice.isotopes:
        return ()
    from heatwright.structure.isotopes import parse_isotope

    return tuple(parse_isotope(text) for text in choice.isotopes)


def species_reading(species: SpeciesRequest) -> Reading:
    """How the outputs of a species are read: with force constants where there are torsions."""
    return reading_options(species.reading, torsions=bool(species.model.torsions))


def fit_options(choice: FitChoice) -> FitOptions:
    """The temperatures of the polynomial."""
    from heatwright.entry import FitOptions

    return FitOptions(choice.t_low_K, choice.t_common_K, choice.t_high_K)


def stated_enthalpy(choice: FormationChoice) -> tuple[GivenEnthalpy, str | None] | None:
    """The enthalpy of formation that is stated and its source; None where there is none."""
    from heatwright.formation.formation import parse_enthalpy

    if choice.dHf298 is None:
        return None
    return parse_enthalpy(choice.dHf298), choice.source


def energy_choices(
    choice: FormationChoice, own: tuple[SpeciesReference, ...] = (), accept: tuple[str, ...] = ()
) -> EnergyChoices:
    """What is decided about energies and reference values; the CSV files are read here.

    own : the reference enthalpies of the user's table.   accept : of the reading choice.
    """
    from heatwright.formation.choices import EnergyChoices

    return EnergyChoices(
        trust_levels=choice.trust_levels,
        spin_orbit=choice.spin_orbit,
        corrections=_corrections(choice.folders.corrections),
        zero_kelvin=_zero_kelvin(choice.folders.zero_kelvin),
        electron=choice.electron,
        atom_values=_atom_values(own),
        accept=accept,
    )


def _corrections(table: ProjectPath | None) -> tuple[Correction, ...]:
    if table is None:
        return ()
    from heatwright.formation.corrections import read_corrections

    return tuple(read_corrections(table.path))


def _zero_kelvin(table: ProjectPath | None) -> ZeroKelvinEnergies | None:
    if table is None:
        return None
    from heatwright.formation.zero_kelvin import read_zero_kelvin_energies

    return read_zero_kelvin_energies(table.path)


def _atom_values(own: tuple[SpeciesReference, ...]) -> dict[str, AtomReference] | None:
    if not own:
        return None
    from heatwright.formation.references import atom_references
    from heatwright.formation.species_references import own_atom_references

    return {**atom_references(), **own_atom_references(own)}
