"""What lies in a folder of outputs: each file read once and sorted by what it can serve for."""

from __future__ import annotations

import os
import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from pathlib import PurePath
from typing import Final

from heatwright.findings import Refused, refusals, refuse
from heatwright.formation.references import atom_reference
from heatwright.molecule import Molecule
from heatwright.reading.outputs import read_output
from heatwright.reading.soundness import no_thermochemistry

_OF_SCANS: Final = frozenset({"constraints", "not-stationary"})
"""What outputs are refused for that the points of a scan may well be."""
_REFERENCES: Final = re.compile(r"ref(erence)?s?", re.IGNORECASE)
_SILENT: Final = frozenset({"not-an-output", "file-empty"})


@dataclass(frozen=True, eq=False, slots=True)
class Found:
    """An output: its path from the folder that was searched, with ``/`` between its parts, and what is in it."""

    path: str
    molecule: Molecule

    @property
    def folder(self) -> str:
        """The folder it lies in, ``.`` for the searched one."""
        return os.path.dirname(self.path) or "."


@dataclass(eq=False)
class Inventory:
    """The outputs of a folder by what they can serve for.

    minima : with modes, usable.   atoms : single atoms.   references : minima and atoms in folders of references.
    energies : single points and optimisations.   points : further such outputs, usable as points of a scan only.
    scans : outputs with a whole relaxed scan.   unusable : path and reason.   passed_over : files that are no outputs.
    """

    minima: list[Found] = field(default_factory=list)
    atoms: list[Found] = field(default_factory=list)
    references: list[Found] = field(default_factory=list)
    energies: list[Found] = field(default_factory=list)
    points: list[Found] = field(default_factory=list)
    scans: list[Found] = field(default_factory=list)
    unusable: list[tuple[str, str]] = field(default_factory=list)
    passed_over: list[str] = field(default_factory=list)

    @property
    def n_outputs(self) -> int:
        """How many outputs there are, unusable ones included."""
        kinds = (self.minima, self.atoms, self.references, self.energies, self.points, self.scans, self.unusable)
        return sum(len(kind) for kind in kinds)


def files_in(folder: str) -> list[str]:
    """The files below a folder by their paths from it, sorted; hidden files and folders are left out.

    Raises Refused when a folder may not be read.
    """
    found = []
    for here, subfolders, names in os.walk(folder, onerror=_unreadable):
        subfolders[:] = sorted(name for name in subfolders if not name.startswith("."))
        for name in names:
            if not name.startswith(".") and os.path.isfile(os.path.join(here, name)):
                found.append(os.path.relpath(os.path.join(here, name), folder).replace(os.sep, "/"))
    return sorted(found)


def _unreadable(error: OSError) -> None:
    words = f"the folder may not be read ({error.strerror})"
    action = "Give yourself the permission, or move it away."
    raise Refused([refuse("file-missing", words, where=str(error.filename), action=action)]) from error


def take_inventory(
    folder: str, files: list[str], seen: Callable[[str], None] = lambda path: None, others: tuple[str, ...] = ()
) -> Inventory:
    """Reads every file and sorts it.

    seen : is told each path when it has been dealt with.   others : files to leave alone.
    """
    inventory = Inventory()
    for path in files:
        if path not in others:
            _sort(inventory, path, os.path.join(folder, path))
        seen(path)
    return inventory


def _sort(inventory: Inventory, path: str, file: str) -> None:
    if not path.isprintable():
        inventory.unusable.append((_printable(path), "the name holds a character that no manifest can; rename it"))
        return
    try:
        molecule = read_output(file)
    except Refused as error:
        if {f.code for f in error.findings} <= _SILENT:
            inventory.passed_over.append(path)
        else:
            inventory.unusable.append((path, reason(error, file)))
        return
    _sort_molecule(inventory, Found(path, molecule), file)


def _printable(path: str) -> str:
    return "".join(c if c.isprintable() else c.encode("unicode_escape", "replace").decode() for c in path)


def _sort_molecule(inventory: Inventory, found: Found, file: str) -> None:
    molecule = found.molecule
    refused = refusals(molecule.findings)
    kind = molecule.kind
    if molecule.is_atom and not refused and molecule.charge == 0 and atom_reference_of(molecule):
        (inventory.references if is_reference_folder(found.folder) else inventory.atoms).append(found)
    elif kind == "relaxed scan" and {f.code for f in refused} <= _OF_SCANS:
        inventory.scans.append(found)
    elif refused and kind in ("energy", "optimisation") and {f.code for f in refused} <= _OF_SCANS:
        inventory.points.append(found)
    elif refused:
        inventory.unusable.append((found.path, reason(Refused(refused), file)))
    elif not refusals(no_thermochemistry(molecule)):
        (inventory.references if is_reference_folder(found.folder) else inventory.minima).append(found)
    elif kind in ("energy", "optimisation"):
        inventory.energies.append(found)
    else:
        inventory.unusable.append((found.path, f"this is {kind}, which gives no species"))


def atom_reference_of(molecule: Molecule) -> bool:
    """Whether an atom's element has a reference enthalpy, so that the atom serves for atomization."""
    from heatwright.elements import symbol

    return atom_reference(symbol(int(molecule.atomic_numbers[0]))) is not None


def is_reference_folder(folder: str) -> bool:
    """Whether a folder is called after references."""
    return any(_REFERENCES.fullmatch(part) for part in PurePath(folder).parts)


def reason(error: Refused, *files: str) -> str:
    """The first refusal in one line, without the paths of the files, which stand before it."""
    first = (refusals(error.findings) or error.findings)[0]
    text = first.text
    for file in files:
        text = text.replace(f"{file}: ", "").replace(f"{file}:", "line ").replace(file, os.path.basename(file))
    return " ".join(text.split())


def by_folder(found: list[Found]) -> Iterator[tuple[str, list[Found]]]:
    """The outputs folder by folder, in the order of the folders' names."""
    for folder in sorted({f.folder for f in found}):
        yield folder, [f for f in found if f.folder == folder]
