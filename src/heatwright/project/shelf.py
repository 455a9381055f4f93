"""The references of a build: outputs of atoms and reference species, and tables, that enthalpies of formation rest on.

Which of them a species rests on decides when it has to be made again: with atomization the atoms of its elements, with
the routes through references all of them.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from functools import lru_cache
from typing import TYPE_CHECKING, Final

from heatwright.findings import Finding, Refused, refusals, refuse, warn
from heatwright.project.library import Library, Progress
from heatwright.project.lockfile import LockedReference
from heatwright.project.manifest_types import FormationChoice, ProjectPath, ReferenceFolders, canonical_hash
from heatwright.project.tasks import ReadTask

if TYPE_CHECKING:
    from heatwright.formation.atomization import Atoms
    from heatwright.formation.reference_set import ReferenceSet
    from heatwright.formation.species_references import SpeciesReference
    from heatwright.molecule import Molecule
    from heatwright.partition.choices import ModelOptions

ATOM: Final = " atom"
"""Ends the label of an atom's output, ``C atom``."""
TABLE: Final = "table"
UNUSED: Final = ""
"""The label of a file that is no atom and no reference species."""
_MISSING: Final = "missing"

Say = Callable[[Finding], None]


def route_of(choice: FormationChoice) -> str | None:
    """The route that a choice means, as :attr:`heatwright.formation.routes.RouteRequest.chosen` has it."""
    if choice.route is not None:
        return choice.route
    if choice.dHf298 is not None:
        return "given"
    if choice.reaction is not None:
        return "reaction"
    if choice.folders.references is not None:
        return "best"
    return "atomization" if choice.folders.atoms is not None else None


class Shelf:
    """The files of one set of folders and tables, and what they are."""

    def __init__(self, folders: ReferenceFolders, library: Library, known: Mapping[str, LockedReference]) -> None:
        """known : what the last release knew of reference files, by path as shown."""
        self.folders = folders
        self._library = library
        self._known = known
        self._labels: dict[str, str] = {}
        self._unknown: dict[ProjectPath, str] = {}
        self._molecules: dict[str, Molecule | None] = {}
        self._sets: dict[object, ReferenceSet] = {}
        self._said: set[Finding] = set()
        self._files: dict[ProjectPath, tuple[ProjectPath, ...]] = {}
        self._atoms: Atoms | None = None
        self._everything: tuple[LockedReference, ...] | None = None
        self._of_elements: dict[frozenset[str], tuple[LockedReference, ...]] = {}

    def files(self, folder: ProjectPath | None) -> tuple[ProjectPath, ...]:
        """The files of a folder that may be outputs, sorted by name; none when it is not there."""
        if folder is None:
            return ()
        if folder not in self._files:
            self._files[folder] = _files_in(folder)
        return self._files[folder]

    def unlabelled(self) -> tuple[ReadTask, ...]:
        """What has to be read before it is known what each file is: what neither store nor last release know."""
        files = [*self.files(self.folders.atoms), *self.files(self.folders.references)]
        hashes = self._library.hashes(file.path for file in files)
        keys = {file: f"label:{self._library.key(ReadTask(path=file.path))}" for file in files}
        kept = self._library.store.get(keys.values())
        self._unknown = {}
        for file, key in keys.items():
            locked = self._known.get(file.shown)
            if key in kept:
                self._labels[file.path] = kept[key].decode()
            elif locked is not None and locked.sha256 == hashes[file.path]:
                self._labels[file.path] = locked.species
            else:
                self._unknown[file] = key
        return tuple(ReadTask(path=file.path) for file in self._unknown)

    def label_all(self, progress: Progress) -> None:
        """Find out what each file is, reading what has to be read."""
        self._library.read(self.unlabelled(), progress)
        self.label_read()

    def label_read(self) -> None:
        """Find out what each file is, once those that are :meth:`unlabelled` have been read."""
        for file, key in self._unknown.items():
            self._labels[file.path] = label = self._label(file)
            self._library.store.put({key: label.encode()})
        self._unknown = {}

    def _label(self, file: ProjectPath) -> str:
        from heatwright.elements import symbol
        from heatwright.formation.reference_set import species_name

        molecule = self._molecule(file)
        if molecule is None:
            return UNUSED
        if molecule.is_atom:
            return f"{symbol(int(molecule.atomic_numbers[0]))}{ATOM}" if molecule.charge == 0 else UNUSED
        return UNUSED if _unusable(molecule) else species_name(molecule)

    def _molecule(self, file: ProjectPath) -> Molecule | None:
        """The molecule of a reference file, None when it is no output or cannot be read."""
        if file.path not in self._molecules:
            try:
                self._molecules[file.path] = self._library.molecule(ReadTask(path=file.path), file.shown)
            except Refused:
                self._molecules[file.path] = None
        return self._molecules[file.path]

    def relevant(self, choice: FormationChoice, composition: Collection[str]) -> tuple[LockedReference, ...]:
        """What a species with these elements rests on, sorted by path."""
        if route_of(choice) in (None, "given"):
            return ()
        if self.folders.references is not None:
            return self.everything()
        return tuple(
            r for r in self.everything() if not r.species.endswith(ATOM) or r.species.removesuffix(ATOM) in composition
        )

    def everything(self) -> tuple[LockedReference, ...]:
        """All references and tables, sorted by path."""
        if self._everything is None:
            tables = [
                LockedReference(path.shown, self._library.sha256(path.path), TABLE)
                for path in (self.folders.reference_table, self.folders.zero_kelvin, self.folders.corrections)
                if path is not None
            ]
            rows = (*self._rows(self.folders.atoms), *self._rows(self.folders.references), *tables)
            self._everything = tuple(sorted(set(rows)))
        return self._everything

    def _rows(self, folder: ProjectPath | None) -> list[LockedReference]:
        if folder is None:
            return []
        if _trouble(folder):
            return [LockedReference(folder.shown, "", _MISSING)]
        rows = [
            LockedReference(f.shown, self._library.sha256(f.path), self._labels[f.path]) for f in self.files(folder)
        ]
        return [row for row in rows if row.species != UNUSED]

    # --- for making entries ---------------------------------------------------------------------------------------

    def atoms(self) -> Atoms | None:
        """The atoms of the atoms' folder; None when there is no such folder.  Raises Refused when it is missing."""
        from heatwright.formation.atomization import collect_atoms

        if self.folders.atoms is not None and self._atoms is None:
            self._atoms = collect_atoms(tuple(self._outputs(self.folders.atoms, ATOM)))
        return self._atoms

    def reference_set(self, own: Sequence[SpeciesReference], options: ModelOptions, say: Say) -> ReferenceSet | None:
        """The reference species for targets with these options; None without their folder.  Raises Refused."""
        from heatwright.formation.atomization import collect_atoms
        from heatwright.formation.reference_set import collect_references, reference_options
        from heatwright.formation.species_references import merged_references

        if self.folders.references is None:
            return None
        wanted = reference_options(options)
        if wanted not in self._sets:
            table, said = merged_references(own)
            usable = []
            for molecule in self._outputs(self.folders.references):
                wrong = _unusable(molecule)
                if wrong:
                    words = f"passed over as a reference: {wrong[0].found}"
                    self._once(warn(wrong[0].code, words).at(molecule.source.file), say)
                else:
                    usable.append(molecule)
            for finding in said:
                self._once(finding, say)
            atoms = self.atoms()
            self._sets[wanted] = collect_references(
                usable, collect_atoms(tuple(usable)) if atoms is None else atoms, table, wanted
            )
        return self._sets[wanted]

    def _once(self, finding: Finding, say: Say) -> None:
        if finding not in self._said:
            self._said.add(finding)
            say(finding)

    def _outputs(self, folder: ProjectPath, ending: str = "") -> Iterable[Molecule]:
        """The molecules in a folder, only those whose label has this ending.  Raises Refused for a missing folder."""
        trouble = _trouble(folder)
        if trouble:
            action = "Correct the folder in the manifest, or its permissions."
            raise Refused([refuse("file-missing", trouble, where=folder.shown, action=action)])
        for file in self.files(folder):
            if ending and not self._labels[file.path].endswith(ending):
                continue
            molecule = self._molecule(file)
            if molecule is not None:
                yield molecule


def _trouble(folder: ProjectPath) -> str:
    """Why a folder cannot be looked into, in words; empty when it can."""
    if not os.path.isdir(folder.path):
        return "there is no such folder"
    return "" if os.access(folder.path, os.R_OK | os.X_OK) else "the folder may not be read (permission denied)"


def _files_in(folder: ProjectPath) -> tuple[ProjectPath, ...]:
    if _trouble(folder):
        return ()
    names = sorted(e.name for e in os.scandir(folder.path) if e.is_file() and not e.name.startswith("."))
    start = "" if folder.shown == "." else f"{folder.shown.rstrip('/')}/"
    return tuple(ProjectPath(f"{start}{name}", os.path.join(folder.path, name)) for name in names)


def _unusable(molecule: Molecule) -> tuple[Finding, ...]:
    """Why a molecule cannot be a reference, empty when it can."""
    from heatwright.reading.soundness import no_thermochemistry

    return refusals(molecule.findings) or (() if molecule.is_atom else refusals(no_thermochemistry(molecule)))


@lru_cache(maxsize=4096)
def references_hash(rows: tuple[LockedReference, ...]) -> str:
    """One hash of what a species rests on; empty when that is nothing."""
    return canonical_hash([[r.path, r.sha256, r.species] for r in rows]) if rows else ""
