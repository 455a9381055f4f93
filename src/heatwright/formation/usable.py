"""The references for one target: at its level of theory, one output a species, the target itself left out."""

from __future__ import annotations

from collections.abc import Collection, Iterable
from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.findings import Finding, Refused, note, refusals, refuse, warn
from heatwright.formation.choices import PLAIN, EnergyChoices, atomized
from heatwright.formation.error_model import (
    DEFAULT_SCALES,
    FEWEST_REFERENCES,
    ErrorScales,
    Features,
    features,
    fit_scales,
)
from heatwright.formation.network import LeftOut, leave_one_out
from heatwright.formation.same_level import level_objections
from heatwright.reading.levels import level_differences
from heatwright.structure.identity import identity_of

if TYPE_CHECKING:
    from heatwright.formation.atomization import Atoms
    from heatwright.formation.reference_set import Reference, ReferenceSet
    from heatwright.molecule import FloatArray, Molecule
    from heatwright.partition.model import ThermoModel

PLAUSIBLE_ERROR_KJ_MOL: Final = (100.0, 25.0)
"""An energy is not believed when the enthalpy of formation it gives is further from the evaluated one than the first
number plus the second for each atom: that is a bond, not the error of a method (common practice, no source)."""


@dataclass(frozen=True, eq=False)
class ReferenceErrors:
    """Calculated (by atomization) minus evaluated enthalpies of formation at 0 K of the references at one level.

    error_kJ_mol, uncertainty_kJ_mol : (n,), the latter the standard uncertainties of the evaluated values.
    """

    references: tuple[Reference, ...]
    error_kJ_mol: FloatArray

    @cached_property
    def features(self) -> Features:
        """What the errors scale with."""
        return features([r.bonding for r in self.references])

    @cached_property
    def uncertainty_kJ_mol(self) -> FloatArray:
        """(n,) standard uncertainties of the evaluated enthalpies: half of their 95 % uncertainties."""
        return np.array([r.row.u95_kJ_mol / 2.0 for r in self.references])

    @cached_property
    def scales(self) -> ErrorScales:
        """Fitted to the errors, or the defaults when they are too few."""
        if len(self.references) < FEWEST_REFERENCES:
            return DEFAULT_SCALES
        return fit_scales(self.error_kJ_mol, self.features, self.uncertainty_kJ_mol)

    @cached_property
    def left_out(self) -> LeftOut:
        """Every reference predicted from the others."""
        return leave_one_out(self.features, self.error_kJ_mol, self.uncertainty_kJ_mol, self.scales)

    def without(self, references: Collection[Reference]) -> ReferenceErrors:
        """The same for the other references; the scales are fitted anew, so nothing of the left-out ones remains."""
        keep = [i for i, r in enumerate(self.references) if r not in references]
        if len(keep) == len(self.references):
            return self
        return ReferenceErrors(tuple(self.references[i] for i in keep), self.error_kJ_mol[keep])


@dataclass(frozen=True, eq=False)
class UsableReferences:
    """The references for one target, and how wrong the level is for them (None without atoms at the level)."""

    references: tuple[Reference, ...]
    errors: ReferenceErrors | None
    findings: tuple[Finding, ...]

    @property
    def scales(self) -> ErrorScales:
        """The scales of the level's error: fitted where there are enough references and atoms, else the defaults."""
        return DEFAULT_SCALES if self.errors is None else self.errors.scales


def usable_references(
    target: ThermoModel,
    references: ReferenceSet,
    choices: EnergyChoices = PLAIN,
) -> UsableReferences:
    """The references that may be set against *target*.

    A species that is there at another level only is refused, unless levels are trusted.  Of several outputs of one
    species the one of lowest energy at 0 K is taken, as the evaluated enthalpy belongs to it.  The target, its
    conformers and its mirror images are left out.  A reference whose energy is off by more than a bond is refused,
    unless such energies are accepted.
    """
    key = (*_level_key(target.molecule), choices.key)
    chosen, said = references.once(("level", key), lambda: _at_level(target, references, choices.trust_levels))
    errors = references.once(("errors", key), lambda: _errors(chosen, references.atoms, choices))
    mine = (identity_of(target.molecule), target.molecule.multiplicity)
    own = [r for r in chosen if r.species == mine]
    if own:
        names = " and ".join(r.file for r in own)
        said = (*said, note("own-reference", f"the species is itself among the references ({names}) and was left out"))
    left = tuple(r for r in chosen if r not in own)
    if errors is None:
        return UsableReferences(left, None, said)
    all_errors, excluded = errors, tuple(own)
    kept = references.once(("without", key, excluded), lambda: all_errors.without(excluded))
    return UsableReferences(left, kept, said)


def _level_key(molecule: Molecule) -> tuple[object, ...]:
    """What the comparison of levels looks at in a target."""
    energy, modes = molecule.level_of_energy, molecule.level
    elements = frozenset(int(z) for z in molecule.atomic_numbers)
    return energy, modes, molecule.energy_kind, elements, molecule.n_atoms == 1


def _at_level(
    target: ThermoModel, references: ReferenceSet, trust: bool
) -> tuple[tuple[Reference, ...], tuple[Finding, ...]]:
    """One output of each species at the level of the target; raises Refused for species at other levels only."""
    said: list[Finding] = []
    wrong: list[Finding] = []
    chosen: list[Reference] = []
    for group in _species(references.references):
        judged = [(r, _objections(r, target.molecule, trust)) for r in group]
        fit = [(r, f) for r, f in judged if not refusals(f)]
        if not fit:
            wrong.extend(judged[0][1])
            continue
        best, found = min(fit, key=lambda pair: (pair[0].energy0_kJ_mol, pair[0].file))
        said.extend(found)
        chosen.append(best)
    if wrong:
        raise Refused(wrong)
    return tuple(chosen), tuple(dict.fromkeys(said))


def _species(references: Iterable[Reference]) -> list[list[Reference]]:
    groups: dict[object, list[Reference]] = {}
    for reference in references:
        groups.setdefault(reference.species, []).append(reference)
    return list(groups.values())


def _objections(reference: Reference, target: Molecule, trust: bool) -> tuple[Finding, ...]:
    found = level_objections(f"reference {reference.name}", reference.molecule, target, trust=trust)
    modes, mine = reference.molecule.level, target.level
    if refusals(found) or modes is None or mine is None or target.is_atom:
        return found
    differences = level_differences(mine, modes)
    if not differences or (target.energy_source is None and reference.molecule.energy_source is None):
        return found
    words = f"the geometry and modes of {reference.name} are not at the molecule's level ({'; '.join(differences)})"
    make = warn if trust else refuse
    code = "level-trusted" if trust else "level-differs"
    return (*found, make(code, words, where=reference.file, action="Recompute them at that level."))


def _errors(references: tuple[Reference, ...], atoms: Atoms, choices: EnergyChoices) -> ReferenceErrors | None:
    """Calculated minus evaluated enthalpies; None when an atom is missing that the references need."""
    needed = {element for r in references for element in r.model.composition}
    if not needed <= set(atoms):
        return None
    calculated = [atomized(r.model, atoms, replace(choices, accept=("energy",))).dHf0_kJ_mol for r in references]
    error = np.array([c - r.dHf0_kJ_mol for c, r in zip(calculated, references, strict=True) if c is not None])
    found = [_implausible(r, float(e)) for r, e in zip(references, error, strict=True) if _is_implausible(r, float(e))]
    if found and "energy" not in choices.accept:
        raise Refused(found)
    return ReferenceErrors(references, error)


def errors_at_one_level(references: ReferenceSet) -> tuple[ReferenceErrors | None, ErrorScales]:
    """The errors of references that are all at one level, None without their atoms, and the scales of the error."""
    errors = _errors(references.references, references.atoms, EnergyChoices(accept=("energy",)))
    return errors, DEFAULT_SCALES if errors is None else errors.scales


def _is_implausible(reference: Reference, error_kJ_mol: float) -> bool:
    fixed, each = PLAUSIBLE_ERROR_KJ_MOL
    return abs(error_kJ_mol) > fixed + each * reference.molecule.n_atoms


def _implausible(reference: Reference, error_kJ_mol: float) -> Finding:
    fixed, each = PLAUSIBLE_ERROR_KJ_MOL
    return refuse(
        "energy-implausible",
        f"the energy of reference {reference.name} gives an enthalpy of formation {abs(error_kJ_mol):.0f} kJ/mol "
        f"{'above' if error_kJ_mol > 0 else 'below'} the evaluated one ({reference.row.source})",
        where=reference.file,
        expected=f"at most {fixed + each * reference.molecule.n_atoms:.0f} kJ/mol for so many atoms",
        action="Look whether output, level and state are the right ones; --accept energy uses it all the same.",
    )
