"""Final energies at 0 K of composite schemes, which a user states for molecules and atoms in the place of E + ZPE."""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

from heatwright.findings import Finding, refuse
from heatwright.reading.tables import Row, read_table

if TYPE_CHECKING:
    from heatwright.molecule import Molecule

COLUMNS: Final = ("file", "energy0_hartree", "level", "source")
"""The columns of a table of 0 K energies, all of them needed."""


@dataclass(frozen=True, slots=True)
class ZeroKelvinEnergy:
    """The final energy at 0 K, zero-point energy included, of the molecule or atom of one output.

    level : name of the scheme, ``G4``, ``W1``.   place : FILE:LINE of the table.
    """

    energy0_hartree: float
    level: str
    source: str
    place: str


@dataclass(frozen=True, slots=True)
class ZeroKelvinEnergies:
    """The 0 K energies of a table by the path of the output; ``path`` is the table's own."""

    path: str
    by_file: Mapping[str, ZeroKelvinEnergy]

    def of(self, molecule: Molecule) -> ZeroKelvinEnergy | None:
        """The energy stated for the output that a molecule was read from, None when there is none."""
        return self.by_file.get(os.path.realpath(molecule.source.file))

    def levels_text(self, molecules: Iterable[Molecule]) -> str:
        """The levels stated for some outputs, once each."""
        return ", ".join(dict.fromkeys(e.level for e in map(self.of, molecules) if e is not None))


def read_zero_kelvin_energies(path: str | os.PathLike[str]) -> ZeroKelvinEnergies:
    """The energies of a CSV file with the columns :data:`COLUMNS`; a relative ``file`` counts from the table's folder.

    Raises Refused (``table-wrong``) with FILE:LINE for a missing value, level or source and for a file named twice.
    """
    folder = os.path.dirname(os.path.realpath(path))
    found: dict[str, ZeroKelvinEnergy] = {}
    for row in read_table(path, "table-wrong", COLUMNS):
        file = os.path.realpath(os.path.join(folder, row.text("file")))
        if file in found:
            row.wrong(f"{row.text('file')} has an energy already", "each file once")
        found[file] = _energy(row)
    return ZeroKelvinEnergies(os.fspath(path), found)


def _energy(row: Row) -> ZeroKelvinEnergy:
    energy = row.number("energy0_hartree")
    if energy is None or energy >= 0.0:
        found = "energy0_hartree is empty" if energy is None else f"energy0_hartree is {energy:g}"
        row.wrong(found, "a total energy, which is negative")
    return ZeroKelvinEnergy(energy, " ".join(row.text("level").split()), row.text("source"), row.place)


def with_stated_energy(
    molecule: Molecule, candidates: Mapping[str, Sequence[Molecule]], table: ZeroKelvinEnergies | None
) -> tuple[dict[str, tuple[Molecule, ...]] | None, tuple[Finding, ...]]:
    """The atoms that have a stated energy of the molecule's level, by element; None when none of all has one.

    What is said is a refusal when the molecule or an element has no energy, or one of another level.
    """
    if table is None:
        return None, ()
    mine = table.of(molecule)
    stated = {e: [(atom, energy) for atom in atoms if (energy := table.of(atom))] for e, atoms in candidates.items()}
    if mine is None:
        elements = [element for element, found in stated.items() if found]
        return None, (_only_atoms(molecule, elements, table),) if elements else ()
    chosen: dict[str, tuple[Molecule, ...]] = {}
    said = []
    for element, found in stated.items():
        same = tuple(atom for atom, energy in found if energy.level.lower() == mine.level.lower())
        if same:
            chosen[element] = same
        elif candidates[element]:
            said.append(_other_level(element, found[0][1], mine) if found else _no_atom(element, table))
    return chosen, tuple(said)


def _only_atoms(molecule: Molecule, elements: Sequence[str], table: ZeroKelvinEnergies) -> Finding:
    return refuse(
        "energy0-incomplete",
        f"{table.path} states 0 K energies for the atoms {', '.join(elements)} and none for {molecule.source.file}",
        expected="a row for the molecule too, as its energy has to be set against those of its atoms",
        action="Add the row, or leave the table out for this species.",
    )


def _no_atom(element: str, table: ZeroKelvinEnergies) -> Finding:
    return refuse(
        "energy0-incomplete",
        f"{table.path} states a 0 K energy for the molecule and none for an output of the {element} atom",
        expected="a row for the molecule and for each of its atoms",
        action="Add the row of the atom.",
    )


def _other_level(element: str, energy: ZeroKelvinEnergy, mine: ZeroKelvinEnergy) -> Finding:
    return refuse(
        "energy0-incomplete",
        f"the 0 K energy of the {element} atom is of {energy.level}, that of the molecule of {mine.level}",
        where=energy.place,
        expected="one level for the molecule and its atoms",
    )
