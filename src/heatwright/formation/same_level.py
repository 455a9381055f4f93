"""Whether the energies of two outputs may be combined: the same level of theory, program and kind of energy."""

from __future__ import annotations

from typing import TYPE_CHECKING

from heatwright.findings import Finding, refuse, warn
from heatwright.reading.levels import level_differences, level_unknowns

if TYPE_CHECKING:
    from heatwright.molecule import Molecule


def level_objections(what: str, other: Molecule, molecule: Molecule, *, trust: bool = False) -> tuple[Finding, ...]:
    """What speaks against combining the energy of *other* (called *what*) with that of *molecule*; empty when nothing.

    trust : a known difference is a warning instead of a refusal.  What is not printed is always a warning.
    """
    where = other.source.file
    differences, unknowns = _compared(other, molecule)
    if differences:
        found = f"the {what} is not at the molecule's level of theory ({'; '.join(differences)})"
        if trust:
            return (warn("level-trusted", found, where=where),)
        return (
            refuse(
                "level-differs",
                found,
                where=where,
                expected="the same level by the same program",
                action="Recompute it at that level, or say --trust-levels when you know that the energies belong "
                "together.",
            ),
        )
    if unknowns:
        return (warn("level-unknown", f"not comparable as printed: {'; '.join(unknowns)}", where=where),)
    return ()


def _compared(other: Molecule, molecule: Molecule) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Differences and unknowns of the levels that the two energies are from."""
    mine, theirs = molecule.level_of_energy, other.level_of_energy
    if mine is None or theirs is None:
        differences: tuple[str, ...] = ("the level of theory is not printed",)
        unknowns: tuple[str, ...] = ()
    else:
        differences, unknowns = level_differences(mine, theirs), level_unknowns(mine, theirs)
    if molecule.energy_kind != other.energy_kind and not (_one_electron(other) or _one_electron(molecule)):
        differences = (*differences, f"energy {molecule.energy_kind} against {other.energy_kind}")
    return differences, unknowns


def _one_electron(molecule: Molecule) -> bool:
    """Whether there is no electron correlation to compute, so that a correlated and an SCF energy are the same."""
    return int(molecule.atomic_numbers.sum()) - (molecule.charge or 0) == 1
