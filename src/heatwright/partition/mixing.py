"""From the models of several conformers to the model of the species: checks, merging, order by energy."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import HARTREE_KJ_MOL
from heatwright.elements import formula
from heatwright.findings import Finding, Refused, note, refusals, refuse, warn
from heatwright.partition.conformers import Conformer, ConformerMixture
from heatwright.reading.levels import level_differences, level_unknowns
from heatwright.structure.bonds import bonds, fingerprint
from heatwright.structure.likeness import Likeness, likeness
from heatwright.structure.symmetry import atom_kinds

if TYPE_CHECKING:
    from heatwright.molecule import Molecule
    from heatwright.partition.model import ThermoModel

SAME_ENERGY_KJ_MOL: Final = 0.1
"""Energies of one conformer, optimised twice, differ by less than this, kJ/mol (common practice, no source)."""


def mixture_model(models: Sequence[ThermoModel], *, trust_levels: bool = False) -> ThermoModel:
    """The model of a species from those of its conformers.

    It is the lowest conformer's model (energy, zero-point energy, rotor, modes, shares) with one contribution more, so
    that its ln q is that of the mixture at equilibrium; H(0) is the lowest conformer's.  Identical conformers are
    merged, and so are mirror images, unless optical isomers were stated as 1.

    trust_levels : mix although levels of theory or programs differ; every difference is then a warning.
    Raises Refused when the outputs are not conformers of one species at one level of theory, or have no energy.
    """
    first = models[0]
    faults = [f for model in models for f in _unfit(model)]
    faults += [f for model in models[1:] for f in _another_species(first, model)]
    levels = [f for model in models[1:] for f in _level_objections(first.molecule, model.molecule, trust_levels)]
    if faults or refusals(levels):
        raise Refused((*faults, *levels))
    distinct, said = _merged(models)
    kept = sorted(distinct, key=lambda model: _above_kJ_mol(model, first))
    lowest = kept[0]
    members = tuple(_conformer(model, lowest) for model in kept)
    others = [f for model in models if model is not lowest for f in _own_findings(model, lowest)]
    return replace(
        lowest,
        molecule=lowest.molecule.but(findings=tuple(f.at(_file(lowest)) for f in lowest.molecule.findings)),
        contributions=(*lowest.contributions, *([ConformerMixture(members)] if len(members) > 1 else [])),
        conformers=members,
        named_after=first.molecule,
        findings=(*lowest.findings, *levels, *_order(first, lowest), *said, *_torsions(kept), *others),
    )


def _file(model: ThermoModel) -> str:
    return model.molecule.source.file


def _electronic_hartree(model: ThermoModel) -> float:
    energy = model.molecule.energy_hartree
    assert energy is not None  # checked before
    return energy


def _above_kJ_mol(model: ThermoModel, other: ThermoModel) -> float:
    """How far one conformer's lowest level, electronic and zero-point energy, lies above another's."""
    electronic = (_electronic_hartree(model) - _electronic_hartree(other)) * HARTREE_KJ_MOL
    return electronic + (model.zpe_kJ_mol - other.zpe_kJ_mol)


def _conformer(model: ThermoModel, lowest: ThermoModel) -> Conformer:
    return Conformer(_file(model), _above_kJ_mol(model, lowest), model.optical_isomers, model.contributions)


def _unfit(model: ThermoModel) -> Iterable[Finding]:
    if model.molecule.is_atom:
        yield refuse("conformer-differs", "this is a single atom, which has no conformers", where=_file(model))
    if model.molecule.energy_hartree is None:
        words = "there is no total energy, so the conformer cannot be weighed against the others"
        yield refuse("no-energy", words, where=_file(model), action="Give the energy by --energy.")


def _another_species(first: ThermoModel, other: ThermoModel) -> Iterable[Finding]:
    """Why two outputs cannot be conformers of one species, whatever their level."""
    a, b = first.molecule, other.molecule
    pairs: list[tuple[str, object, object]] = [
        ("composition", formula(first.composition), formula(other.composition)),
        ("charge", a.charge, b.charge),
        ("multiplicity", a.multiplicity, b.multiplicity),
    ]
    found = [f"{what} {theirs} and not {mine}" for what, mine, theirs in pairs if mine != theirs]
    if not found and abs(first.masses_u.sum() - other.masses_u.sum()) > 0.1:
        found.append(f"a mass of {other.masses_u.sum():.3f} u and not {first.masses_u.sum():.3f} u")
    if not found and _graph(a) != _graph(b):
        found.append("other bonds, so that it is an isomer")
    if found:
        yield refuse(
            "conformer-differs",
            f"the output has {'; '.join(found)} as in {_file(first)}".replace("isomer as in", "isomer of that in"),
            where=_file(other),
            expected="another conformer of the same species",
            action="Give isomers and other states as species of their own.",
        )


def _graph(molecule: Molecule) -> tuple[str, ...] | None:
    if not molecule.has_geometry:
        return None
    return fingerprint(molecule.atomic_numbers, bonds(molecule.atomic_numbers, molecule.coordinates_A))


def _level_objections(first: Molecule, other: Molecule, trust: bool) -> tuple[Finding, ...]:
    """What differs in level of theory or program between two conformers, of the modes and of the energies."""
    pairs = [(first.level, other.level)]
    if first.energy_source is not None or other.energy_source is not None:
        pairs.append((first.level_of_energy, other.level_of_energy))
    differences: list[str] = []
    unknowns: list[str] = []
    for a, b in pairs:
        if a is None or b is None:
            differences.append("the level of theory is not printed")
            continue
        differences += level_differences(a, b)
        unknowns += level_unknowns(a, b)
    if first.energy_kind != other.energy_kind:
        differences.append(f"energy {first.energy_kind} and {other.energy_kind}")
    where = other.source.file
    words = (
        f"the conformer is not at the level of theory of {first.source.file} ({'; '.join(dict.fromkeys(differences))})"
    )
    if differences and trust:
        return (warn("level-trusted", words, where=where),)
    if differences:
        action = "Recompute the conformers at one level by one program."
        return (refuse("level-differs", words, where=where, expected="the same level and program", action=action),)
    if unknowns:
        return (warn("level-unknown", f"not comparable as printed: {'; '.join(dict.fromkeys(unknowns))}", where=where),)
    return ()


def _merged(models: Sequence[ThermoModel]) -> tuple[list[ThermoModel], tuple[Finding, ...]]:
    """The conformers that count, each the first of its kind, and what became of the others."""
    kept: list[ThermoModel] = []
    said: list[Finding] = []
    for model in models:
        known = [_relation(model, other) for other in kept]
        said += [f for f in known if f is not None]
        if not any(f is not None and f.code in _MERGING for f in known):
            kept.append(model)
    return kept, tuple(said)


_MERGING: Final = frozenset({"conformer-merged", "conformer-mirror"})


def _relation(model: ThermoModel, other: ThermoModel) -> Finding | None:
    """What a conformer has in common with one that counts already; by the finding's code it counts or does not."""
    found, gap = _likeness(model, other), abs(_above_kJ_mol(model, other))
    if not (found.same or found.mirror):
        return None
    rmsd = found.rmsd_A if found.same else found.mirror_rmsd_A
    near = f"{rmsd:.3f} Å (RMSD) and {gap:.3f} kJ/mol from {'' if found.same else 'the mirror image of '}{_file(other)}"
    if gap > SAME_ENERGY_KJ_MOL:
        action = "If they are one conformer, leave out the one that is less converged; each counts as it stands."
        return warn("conformers-alike", f"the geometry is {near}", where=_file(model), action=action)
    if found.same:
        return note(
            "conformer-merged", f"this is one conformer with another output, {near}; it counts once", where=_file(model)
        )
    if other.optical_isomers == 1:
        return None  # said to be one isomer alone: what is given is what counts
    words = f"{near}; each chiral conformer stands for its mirror image already, so the two count once, with degeneracy"
    return warn("conformer-mirror", f"{words} {other.optical_isomers}", where=_file(model), action="Give one of them.")


def _likeness(model: ThermoModel, other: ThermoModel) -> Likeness:
    a, b = model.molecule, other.molecule
    if a.has_geometry and b.has_geometry:
        kinds = atom_kinds(
            np.concatenate([a.atomic_numbers, b.atomic_numbers]), np.concatenate([model.masses_u, other.masses_u])
        )
        return likeness(kinds[: a.n_atoms], a.coordinates_A, kinds[a.n_atoms :], b.coordinates_A)
    constants = [m.inertia.rotational_constants_cm1 for m in (model, other)]
    modes = [m.wavenumbers_cm1 for m in (a, b)]
    alike = all(np.shape(x) == np.shape(y) and np.allclose(x, y, rtol=2.0e-3) for x, y in (constants, modes))
    return Likeness(0.0 if alike else np.inf, np.inf)


def _order(first: ThermoModel, lowest: ThermoModel) -> tuple[Finding, ...]:
    below = _above_kJ_mol(first, lowest)
    if below < 0.0005:  # nothing that the words could show
        return ()
    words = f"the first output is not the lowest conformer; {_file(lowest)} lies {below:.3f} kJ/mol below it"
    return (note("conformer-not-lowest", f"{words} and gives energy, H(0), geometry and modes"),)


def _torsions(kept: Sequence[ThermoModel]) -> tuple[Finding, ...]:
    """A warning when a torsion's whole turn may hold what is given as conformers as well."""
    turned = [m for m in kept if any(c.name.startswith("torsion") for c in m.contributions)]
    if len(kept) < 2 or not turned:
        return ()
    words = "a torsion is treated over its whole turn, and further conformers are given"
    action = "Leave out the conformers that this torsion turns into each other, which would count twice."
    return (warn("conformers-and-torsion", words, where=_file(turned[0]), action=action),)


def _own_findings(model: ThermoModel, lowest: ThermoModel) -> Iterable[Finding]:
    """What has to be said about another conformer and is not the same for the lowest one."""
    known = {(f.code, f.found) for f in (*lowest.molecule.findings, *lowest.findings)}
    findings = (*model.molecule.findings, *(f for f in model.findings if f.severity == "warn"))
    return (f.at(_file(model)) for f in findings if (f.code, f.found) not in known)
