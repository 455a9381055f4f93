"""The entries of a manifest with all that is behind them, for a report; no release is read or written."""

from __future__ import annotations

from collections.abc import Sequence
from contextlib import chdir
from dataclasses import dataclass
from typing import TYPE_CHECKING

from heatwright.findings import Finding, Refused
from heatwright.project.executors import Engine
from heatwright.project.library import Library
from heatwright.project.making import Maker, broken, entries_of, tasks_of
from heatwright.project.shelf import Shelf
from heatwright.project.store import Store

if TYPE_CHECKING:
    from heatwright.entry import Entry, EntryRequest
    from heatwright.project.manifest_types import Manifest, SpeciesRequest
    from heatwright.project.watch import Watch


@dataclass(frozen=True, slots=True)
class MadeEntries:
    """The entries in the order of the manifest, and (file, findings) of species that cannot be made."""

    entries: tuple[Entry, ...]
    failed: tuple[tuple[str, tuple[Finding, ...]], ...]


def entries_of_manifest(manifest: Manifest, watch: Watch) -> MadeEntries:
    """Every entry that a build of *manifest* would hold, made anew; what was read is taken from the store.

    watch : hears what is said about the store and the references, and how far reading is.
    """
    with chdir(manifest.root), Store(manifest.mechanism.store.path, watch.said) as store:
        library = Library(store, Engine())
        shelves = {f: Shelf(f, library, {}) for f in dict.fromkeys(r.formation.folders for r in manifest.species)}
        for shelf in shelves.values():
            shelf.label_all(watch.reading)
        library.read((task for request in manifest.species for task in tasks_of(request)), watch.reading)
        maker = Maker(library, shelves, watch.said)
        return _together([(r, _ingredients(maker, r)) for r in manifest.species])


def _ingredients(maker: Maker, request: SpeciesRequest) -> EntryRequest | Refused:
    try:
        model = maker.model(request)
        maker.evaluate([(request, model)])
        return maker.ingredients(request, model)
    except Refused as error:
        return error
    except Exception as error:
        return broken(error)


def _together(ready: Sequence[tuple[SpeciesRequest, EntryRequest | Refused]]) -> MadeEntries:
    failed = [(r.files[0].output.shown, made.findings) for r, made in ready if isinstance(made, Refused)]
    wanted = [(r, made) for r, made in ready if not isinstance(made, Refused)]
    entries: list[Entry] = []
    for (request, _), entry in zip(wanted, entries_of([made for _, made in wanted]), strict=True):
        if isinstance(entry, Refused):
            failed.append((request.files[0].output.shown, entry.findings))
        else:
            entries.append(entry)
    return MadeEntries(tuple(entries), tuple(failed))
