"""Entries with all that is behind them, for a report: those of a manifest or a release; nothing is written."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from contextlib import chdir
from dataclasses import dataclass
from typing import TYPE_CHECKING

from heatwright.findings import Finding, Refused
from heatwright.project.executors import Engine
from heatwright.project.library import Library
from heatwright.project.making import Maker, broken, entries_of, tasks_of
from heatwright.project.plan import Reason, make_plan
from heatwright.project.shelf import Shelf
from heatwright.project.store import Store

if TYPE_CHECKING:
    from heatwright.entry import Entry, EntryRequest
    from heatwright.project.lockfile import Lock, LockedReference
    from heatwright.project.manifest_types import Manifest, ReferenceFolders, SpeciesRequest
    from heatwright.project.texts import Texts
    from heatwright.project.watch import Watch


@dataclass(frozen=True, slots=True)
class MadeEntries:
    """The entries in the order of the manifest, and (file, findings) of species that cannot be made."""

    entries: tuple[Entry, ...]
    failed: tuple[tuple[str, tuple[Finding, ...]], ...]


@dataclass(frozen=True, slots=True)
class Remade:
    """What a project makes of the species of a release now, by name: an entry, or why there is none.

    changed : why a build would make a species again, for those it would.
    """

    entries: Mapping[str, Entry | Refused]
    changed: Mapping[str, tuple[Reason, ...]]


def entries_of_manifest(manifest: Manifest, watch: Watch) -> MadeEntries:
    """Every entry that a build of *manifest* would hold, made anew; what the store knows is taken from it.

    watch : hears what is said about the store and the references, and how far reading is.
    """
    with chdir(manifest.root), Store(manifest.mechanism.store.path, watch.said, read_only=True) as store:
        library = Library(store, Engine())
        made = _made(manifest.species, library, _shelves(manifest, library, {}, watch), watch)
    files = {request.name: request.files[0].output.shown for request in manifest.species}
    failed = tuple((files[name], e.findings) for name, e in made.items() if isinstance(e, Refused))
    return MadeEntries(tuple(e for e in made.values() if not isinstance(e, Refused)), failed)


def remade_release(manifest: Manifest, lock: Lock, texts: Texts, watch: Watch) -> Remade:
    """The species of a release that its manifest has, made anew from what they are made from now.

    texts : of the release's files, by name.   Raises Refused when the references of the manifest cannot be read.
    """
    with chdir(manifest.root), Store(manifest.mechanism.store.path, watch.said, read_only=True) as store:
        library = Library(store, Engine())
        shelves = _shelves(manifest, library, {r.path: r for r in lock.references}, watch)
        plan = make_plan(manifest, library, shelves, lock, texts)
        of_release = [decision for decision in plan.decisions if decision.name in lock.species]
        made = _made([decision.request for decision in of_release], library, shelves, watch)
    changed = {d.name: d.reasons for d in of_release if d.reasons}
    return Remade(made, changed)


def _shelves(
    manifest: Manifest, library: Library, known: Mapping[str, LockedReference], watch: Watch
) -> dict[ReferenceFolders, Shelf]:
    shelves = {f: Shelf(f, library, known) for f in dict.fromkeys(r.formation.folders for r in manifest.species)}
    for shelf in shelves.values():
        shelf.label_all(watch.reading)
    return shelves


def _made(
    requests: Sequence[SpeciesRequest], library: Library, shelves: Mapping[ReferenceFolders, Shelf], watch: Watch
) -> dict[str, Entry | Refused]:
    """The entry of each species by name, or why it cannot be made."""
    library.read((task for request in requests for task in tasks_of(request)), watch.reading)
    maker = Maker(library, shelves, watch.said)
    ready = {request.name: _ingredients(maker, request) for request in requests}
    wanted = {name: made for name, made in ready.items() if not isinstance(made, Refused)}
    entries = dict(zip(wanted, entries_of(list(wanted.values())), strict=True))
    return {name: made if isinstance(made, Refused) else entries[name] for name, made in ready.items()}


def _ingredients(maker: Maker, request: SpeciesRequest) -> EntryRequest | Refused:
    try:
        model = maker.model(request)
        maker.evaluate([(request, model)])
        return maker.ingredients(request, model)
    except Refused as error:
        return error
    except Exception as error:
        return broken(error)
