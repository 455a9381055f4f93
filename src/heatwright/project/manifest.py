"""Reading a manifest with its includes: every species with every choice, or every fault with its file and line."""

from __future__ import annotations

import fnmatch
import os
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any, Final

from heatwright.findings import Finding, Refused, refuse
from heatwright.project.keys import KEYS
from heatwright.project.manifest_types import Manifest, Mechanism, OutputFiles, ProjectPath, SpeciesRequest
from heatwright.project.merging import Draft, alike, contradictions, over, species_request, with_level
from heatwright.project.paths import Here, RealPaths
from heatwright.project.places import Places
from heatwright.project.tables import CODE, FileTables, Given, Stated, found_files, read_tables

MANIFEST_NAME: Final = "heatwright.toml"
_LARGEST: Final = 50_000_000
_OUTERMOST: Final = ("name", "release", "store", "units")
"""Keys of [mechanism] that only the outermost manifest may have."""


def load_manifest(path: str | os.PathLike[str], *, confine: bool = False) -> Manifest:
    """The manifest in a file (or in ``heatwright.toml`` of a folder) with everything that it includes.

    confine : refuse paths that lead out of the manifest's folder, symbolic links followed.

    Nothing but manifests is read, and outputs need not be there yet.  Raises Refused with every fault that was found,
    each with file and line: ``manifest-wrong`` (no TOML, unknown keys, wrong kinds, contradictions), ``glob-empty``,
    ``include-cycle``, ``duplicate-name``, ``file-twice``, ``name-unfit``, ``outside-project``, ``file-missing``.
    """
    file = os.fspath(path)
    file = os.path.join(file, MANIFEST_NAME) if os.path.isdir(file) else file
    root = os.path.dirname(os.path.abspath(file))
    loading = _Loading(Here(root, root, confine), file, os.path.basename(file))
    loading.outermost()
    species = loading.requests()
    loading.check_names(species)
    loading.check_files(species)
    stated = {key: given.where for key, given in loading.head.items()}
    loading.faults += loading.places.faults(species, stated, loading.shown)
    if loading.faults:
        raise Refused(_in_order(loading.faults))
    return Manifest(
        path=os.path.abspath(file),
        root=root,
        mechanism=loading.mechanism(),
        species=tuple(sorted(species, key=lambda one: one.name)),
        includes=tuple(sorted(loading.included)),
    )


def _in_order(faults: list[Finding]) -> list[Finding]:
    """Each fault once, by file (in the order of reading) and line."""
    places = {fault: fault.where.rpartition(":") for fault in faults}
    files = list(dict.fromkeys(file for file, _, _ in places.values()))
    return sorted(places, key=lambda f: (files.index(places[f][0]), places[f][2].isdigit() and int(places[f][2])))


@dataclass(eq=False)
class _Loading:
    """What has been gathered so far."""

    here: Here
    file: str
    shown: str
    head: Stated = field(default_factory=dict)
    drafts: list[Draft] = field(default_factory=list)
    globs: list[tuple[str, Stated, Stated, Here]] = field(default_factory=list)
    included: dict[str, str] = field(default_factory=dict)
    faults: list[Finding] = field(default_factory=list)
    broken: set[str] = field(default_factory=set)
    mechanism_is_broken: bool = False
    real_paths: RealPaths = field(default_factory=RealPaths)
    real: dict[str, str] = field(default_factory=dict)

    def outermost(self) -> None:
        """The manifest itself."""
        tables = read_tables(_text(self.file, self.shown, ""), self.shown, self.here)
        self.head = tables.mechanism
        self._take(tables, {}, {}, self.here, (os.path.realpath(self.file),), (self.shown,))

    def _take(
        self,
        tables: FileTables,
        inherited: Stated,
        levels: Mapping[str, tuple[str, Stated]],
        here: Here,
        chain: tuple[str, ...],
        names: tuple[str, ...],
    ) -> None:
        """What a file says, with what holds for it from those that include it."""
        self.faults += tables.faults
        self.broken |= tables.broken
        self.mechanism_is_broken |= tables.mechanism_is_broken
        known = self._levels(tables, levels)
        own = with_level(tables.mechanism, known, self.faults)
        defaults = over(own, inherited)
        self.faults += () if tables.mechanism_is_broken else contradictions(defaults)
        for name, (where, stated) in tables.species.items():
            self.drafts.append(Draft(name, where, with_level(stated, known, self.faults), _of_species(defaults)))
        for where, stated in tables.outputs:
            own_stated = with_level(stated, known, self.faults)
            self.globs.append((where, own_stated, _of_species(defaults), here))
        for pattern, where in _value(tables.mechanism, "include", ()):
            self._include(pattern, where, defaults, known, here, chain, names)

    def _levels(self, tables: FileTables, levels: Mapping[str, tuple[str, Stated]]) -> dict[str, tuple[str, Stated]]:
        for name, (where, _) in tables.levels.items():
            if name in levels:
                words = f"the level {name!r} is there already ({levels[name][0]})"
                self.faults.append(refuse(CODE, words, where=where, action="Give it another name."))
        return {**levels, **tables.levels}

    def _include(
        self,
        pattern: str,
        where: str,
        defaults: Stated,
        levels: Mapping[str, tuple[str, Stated]],
        here: Here,
        chain: tuple[str, ...],
        names: tuple[str, ...],
    ) -> None:
        try:
            paths = found_files(pattern, where, here)
        except Refused as error:
            self.faults += error.findings
            return
        for path in paths:
            real = os.path.realpath(path.path)
            if real in chain:
                circle = " includes ".join((*names[chain.index(real) :], path.shown))
                words = f"manifests include each other in a circle: {circle}"
                self.faults.append(refuse("include-cycle", words, where=where, action="Take one of them out."))
            elif real in self.included.values():
                words = f"{path.shown} is included twice"
                self.faults.append(refuse(CODE, words, where=where, expected="each manifest once"))
            else:
                self.included[path.shown] = real
                self._read_included(path, where, defaults, levels, here, (*chain, real), (*names, path.shown))

    def _read_included(
        self,
        path: ProjectPath,
        where: str,
        defaults: Stated,
        levels: Mapping[str, tuple[str, Stated]],
        here: Here,
        chain: tuple[str, ...],
        names: tuple[str, ...],
    ) -> None:
        inside = here.inside(path.path)
        try:
            tables = read_tables(_text(path.path, path.shown, where), path.shown, inside)
        except Refused as error:
            self.faults += error.findings
            return
        for name in _OUTERMOST:
            if name in tables.mechanism:
                words = f"{name} is for the outermost manifest, {self.shown}, and this one is included ({where})"
                place = tables.mechanism[name].where
                self.faults.append(refuse(CODE, words, where=place, action="Leave it out here."))
        self._same_pressure(tables.mechanism, defaults)
        self._take(tables, defaults, levels, inside, chain, names)

    def _same_pressure(self, own: Stated, outer: Stated) -> None:
        if "pressure" not in own:
            return
        given = outer.get("pressure", Given("1bar", f"{self.shown}, by default"))
        if own["pressure"].value != given.value:
            words = f"the standard pressure is {own['pressure'].value} here and {given.value} in {given.where}"
            self.faults.append(refuse(CODE, words, where=own["pressure"].where, expected="one for the whole mechanism"))

    def requests(self) -> list[SpeciesRequest]:
        """Every species that could be made of the tables."""
        if self.mechanism_is_broken:
            return []  # what would be missing from them is a fault of [mechanism] only
        made = [request for draft in self.drafts if (request := self._request(draft)) is not None]
        taken = {self._real(p.path) for draft in self.drafts for p in _named_files(draft.own)}
        for where, stated, inherited, here in self.globs:
            drafts = self._found(where, stated, inherited, here, taken)
            first = self._request(drafts[0]) if drafts else None
            if first is not None:
                made += [first, *(alike(first, draft) for draft in drafts[1:])]
        return made

    def _request(self, draft: Draft) -> SpeciesRequest | None:
        if draft.where in self.broken:
            return None
        try:
            return species_request(draft)
        except Refused as error:
            self.faults += error.findings
            return None

    def _found(self, where: str, stated: Stated, inherited: Stated, here: Here, taken: set[str]) -> list[Draft]:
        """One draft for each output that a glob finds and that no [species] table names itself."""
        from heatwright.writing.names import name_of_file

        if where in self.broken:
            return []
        if "glob" not in stated:
            self.faults.append(refuse(CODE, "[[outputs]] has no glob", where=where, expected='glob = "*.out"'))
            return []
        own = {name: given for name, given in stated.items() if name not in ("glob", "except")}
        left_out = _value(stated, "except", ())
        drafts: dict[str, Draft] = {}
        for pattern, place in stated["glob"].value:
            try:
                found = found_files(pattern, place, here)
                paths = [p for p in found if not (_is_excepted(p, left_out) or self.places.holds(self._real(p.path)))]
            except Refused as error:
                self.faults += error.findings
                continue
            if not paths:
                words = f"the glob {pattern!r} matches no file that except does not leave out"
                self.faults.append(refuse("glob-empty", words, where=place))
            for path in paths:
                if self._real(path.path) not in taken:
                    output = {"output": Given(path, place)}
                    drafts.setdefault(path.path, Draft(name_of_file(path.shown), place, {**own, **output}, inherited))
        return list(drafts.values())

    @cached_property
    def places(self) -> Places:
        """Where the build writes; to be asked for when all manifests are read."""
        mechanism = self.mechanism()
        manifests = {os.path.realpath(self.file): self.shown, **{real: name for name, real in self.included.items()}}
        return Places(mechanism.store, mechanism.release, manifests)

    def _real(self, path: str) -> str:
        if path not in self.real:
            self.real[path] = self.real_paths(path)
        return self.real[path]

    def check_names(self, species: list[SpeciesRequest]) -> None:
        """Faults for names that cannot stand in a record, and for names that two species share."""
        from heatwright.writing.formats import FORMATS

        first: dict[str, SpeciesRequest] = {}
        for one in species:
            action = f"Write a table [species.NAME] with output = {one.files[0].output.shown!r} and a name that fits."
            unfit = FORMATS["nasa7"].name_findings(one.name)
            self.faults += [replace(f, where=one.where, action=action) for f in unfit]
            other = first.setdefault(one.name, one)
            if other is not one:
                words = f"there is a species {one.name} already ({other.where}: {other.files[0].output.shown})"
                also = f"{words}, and this one is {one.files[0].output.shown}"
                act = "Give one of them another name, in a table [species.NAME] of its own."
                self.faults.append(refuse("duplicate-name", also, where=one.where, action=act))

    def check_files(self, species: list[SpeciesRequest]) -> None:
        """Faults for a file that is used twice, unless another job or other isotopes are asked for."""
        first: dict[object, SpeciesRequest] = {}
        for one in species:
            mine: set[object] = set()
            for path, use in _uses(one):
                key = (self._real(path.path), *use)
                other = first.setdefault(key, one)
                if other is not one:
                    words = f"{path.shown} is used for {one.name} and for {other.name} ({other.where})"
                    action = "Correct one of them; say job or isotopes where one file holds both."
                    self.faults.append(refuse("file-twice", words, where=one.where, action=action))
                elif key in mine:
                    words = f"{path.shown} is used twice for {one.name}"
                    self.faults.append(
                        refuse("file-twice", words, where=one.where, expected="each output and energy once")
                    )
                mine.add(key)

    def mechanism(self) -> Mechanism:
        """What holds for the whole mechanism."""
        defaults = {key.name: key.default for key in KEYS}
        release, store = (
            self.head[name].value if name in self.head else self.here.path(defaults[name], self.shown)
            for name in ("release", "store")
        )
        name, units = (_value(self.head, key, defaults[key]) for key in ("name", "units"))
        return Mechanism(name=name, release=release, store=store, units=units)


def _value(stated: Stated, name: str, default: Any) -> Any:
    return stated[name].value if name in stated else default


def _of_species(defaults: Stated) -> Stated:
    """Those values of [mechanism] that its species inherit."""
    return {name: given for name, given in defaults.items() if name not in (*_OUTERMOST, "include")}


def _named_files(own: Stated) -> list[ProjectPath]:
    """The files that a [species] table names as output, energy or conformer."""
    single = [own[name].value for name in ("output", "energy") if name in own]
    files: list[OutputFiles] = [conformer.files for conformer in _value(own, "conformers", ())]
    return [*single, *(p for f in files for p in (f.output, f.energy) if p is not None)]


def _is_excepted(path: ProjectPath, patterns: tuple[str, ...]) -> bool:
    names = (path.shown, os.path.basename(path.path))
    return any(fnmatch.fnmatchcase(name, pattern) for pattern in patterns for name in names)


def _uses(one: SpeciesRequest) -> list[tuple[ProjectPath, tuple[object, ...]]]:
    """The files of a species, each with what tells one use of a file from another."""
    isotopes = one.reading.isotopes
    outputs = [(f.output, (one.reading.job, isotopes)) for f in one.files]
    return [*outputs, *((f.energy, (None, isotopes)) for f in one.files if f.energy is not None)]


def _text(file: str, shown: str, where: str) -> str:
    """The text of a manifest; raises Refused."""
    named = f" ({where})" if where else ""
    try:
        with open(file, "rb") as stream:
            content = stream.read(_LARGEST + 1)
        if len(content) > _LARGEST:
            words = f"the file is larger than {_LARGEST // 1_000_000} MB{named}"
            raise Refused([refuse("file-too-large", words, where=shown, expected="a manifest, which is text by hand")])
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        words = f"byte {error.start} is no UTF-8{named}"
        raise Refused([refuse(CODE, words, where=shown, expected="a text file in UTF-8")]) from error
    except OSError as error:
        words = f"the manifest cannot be read ({error.strerror or error}){named}"
        action = "" if where else "`heatwright start DIR` writes a first one."
        raise Refused([refuse("file-missing", words, where=shown if where else file, action=action)]) from error
