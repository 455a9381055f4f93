"""From stale species to finished records: outputs are read and entries made side by side, failures are values."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import suppress
from itertools import chain
from time import monotonic
from typing import TYPE_CHECKING, Final, TypeVar

from heatwright.findings import Finding, Refused
from heatwright.project.library import Library
from heatwright.project.lockfile import LockedReference
from heatwright.project.making import Maker, broken, entries_of, tasks_of
from heatwright.project.manifest_types import ReferenceFolders
from heatwright.project.plan import Decision, entry_key
from heatwright.project.record import Record, packed, records, unpacked
from heatwright.project.shelf import Shelf
from heatwright.project.watch import Watch

if TYPE_CHECKING:
    from heatwright.entry import Entry
    from heatwright.project.tasks import ReadTask

T = TypeVar("T")
_BATCH: Final = 128
"""Species made at a time: enough for the fit, few enough for the memory."""
_BATCH_BESIDE: Final = 32
"""The same while others read, who would have to wait for the last ones."""
_WORTH_KEEPING_S: Final = 0.02
"""Entries that took less than this each (torsions, conformers and sums over levels take more) are made again sooner
than they would be kept."""


class Pipeline:
    """Makes the records of species; ``failed`` says of which it could not and why."""

    def __init__(self, library: Library, shelves: Mapping[ReferenceFolders, Shelf], watch: Watch) -> None:
        self.failed: dict[str, tuple[Finding, ...]] = {}
        self._library = library
        self._shelves = shelves
        self._watch = watch
        self._maker = Maker(library, shelves, watch.said)
        self._kept: set[str] = set()

    def records(self, decisions: Sequence[Decision]) -> Iterator[Record]:
        """A record for each species that can be made, in the order in which they are finished."""
        tasks = {decision.name: tuple(tasks_of(decision.request)) for decision in decisions}
        finished: dict[str, Record] | None = None
        for ready in self._ready(decisions, tasks):
            if finished is None:
                finished = self._finished(decisions)
                yield from finished.values()
            yield from self._made([decision for decision in ready if decision.name not in finished], tasks)

    def _ready(
        self, decisions: Sequence[Decision], tasks: Mapping[str, tuple[ReadTask, ...]]
    ) -> Iterator[list[Decision]]:
        """The species in batches, each as soon as everything that they need is read; references come first."""
        first = [task for shelf in self._shelves.values() for task in shelf.unlabelled()]
        of_references = self._keys(first)
        waiting: dict[str, list[Decision]] = {}
        missing: dict[str, int] = {}
        for decision in decisions:
            keys = self._keys(tasks[decision.name])
            missing[decision.name] = len(keys)
            for key in keys:
                waiting.setdefault(key, []).append(decision)
        ready = [decision for decision in decisions if not missing[decision.name]]
        every = chain(first, (task for decision in decisions for task in tasks[decision.name]))
        labelled = False
        batch = _BATCH if self._library.engine.workers == 1 else _BATCH_BESIDE
        for key in self._library.reading(every, self._watch.reading):
            of_references.discard(key)
            for decision in waiting.get(key, ()):
                missing[decision.name] -= 1
                if not missing[decision.name]:
                    ready.append(decision)
            if len(ready) >= batch and not of_references:
                labelled = labelled or self._label()
                yield ready
                ready = []
        labelled = labelled or self._label()
        yield ready

    def _keys(self, tasks: Sequence[ReadTask]) -> set[str]:
        """Of those whose files can be read."""
        return {self._library.key(task) for task in tasks if self._library.sha256(task.path)}

    def _label(self) -> bool:
        for shelf in self._shelves.values():
            shelf.label_read()
        return True

    def _finished(self, decisions: Sequence[Decision]) -> dict[str, Record]:
        """What an earlier build finished and did not come to release."""
        keys = {self._result_key(decision): decision for decision in decisions}
        found = {}
        for key, data in self._library.store.get(keys).items():
            record, decision = unpacked(data), keys[key]
            if record is None:
                self._library.store.drop(key)
                continue
            found[decision.name] = record
            self._kept.add(key)
            self._watch.made(decision, record)
        return found

    def forget_finished(self) -> None:
        """The store need not keep what was finished once that is in the release."""
        self._library.store.drop_all(self._kept)

    def _result_key(self, decision: Decision) -> str:
        """Everything that an entry can depend on; more than it does, as its elements are not known beforehand."""
        shelf = self._shelves[decision.request.formation.folders]
        return f"result:{entry_key(decision, shelf.everything())}"

    def _made(self, batch: Sequence[Decision], tasks: Mapping[str, tuple[ReadTask, ...]]) -> Iterator[Record]:
        began = monotonic()
        self._library.fetch(task for decision in batch for task in tasks[decision.name])
        models = self._each(batch, lambda decision: self._maker.model(decision.request))
        with suppress(Exception):  # each is asked again by itself, and the one at fault says so
            self._maker.evaluate((decision.request, model) for decision, model in models)
        known = {decision.name: model for decision, model in models}
        sound = [decision for decision, _ in models]
        ready = self._each(sound, lambda decision: self._maker.ingredients(decision.request, known[decision.name]))
        entries = entries_of([request for _, request in ready])
        good: list[tuple[Decision, Entry, str, tuple[LockedReference, ...]]] = []
        for (decision, _), entry in zip(ready, entries, strict=True):
            if isinstance(entry, Refused):
                self._fail(decision, entry)
            elif (unfit := _unfit(entry)) is not None:
                self._fail(decision, unfit)
            else:
                shelf = self._shelves[decision.request.formation.folders]
                rests_on = shelf.relevant(decision.request.formation, entry.composition)
                good.append((decision, entry, entry_key(decision, rests_on), rests_on))
        finished = records(good)
        costly = monotonic() - began > _WORTH_KEEPING_S * len(batch)
        for (decision, *_), record in zip(good, finished, strict=True):
            if isinstance(record, Refused):
                self._fail(decision, record)
                continue
            if costly:
                key = self._result_key(decision)
                self._library.store.put({key: packed(record)})
                self._kept.add(key)
            self._watch.made(decision, record)
            yield record

    def _each(self, decisions: Sequence[Decision], work: Callable[[Decision], T]) -> list[tuple[Decision, T]]:
        """What *work* gives for each, without those that fail, which is told."""
        done = []
        for decision in decisions:
            try:
                done.append((decision, work(decision)))
            except Refused as error:
                self._fail(decision, error)
            except Exception as error:
                self._fail(decision, broken(error))
        return done

    def _fail(self, decision: Decision, error: Refused) -> None:
        self.failed[decision.name] = error.findings
        self._watch.failed(decision, error.findings)


def _unfit(entry: Entry) -> Refused | None:
    """Why an entry must not be written: a name that does not fit."""
    from heatwright.writing.formats import FORMATS

    faults = FORMATS["nasa7"].name_findings(entry.name)
    return Refused(faults) if faults else None
