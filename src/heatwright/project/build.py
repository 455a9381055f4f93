"""The build: everything that is stale is made, everything else stays, and the release is switched as a whole.

Only this, the driver, writes: workers send back bytes.  What was read and what was finished is in the store within
half a second, so that a build that is interrupted, in whatever way, goes on from there.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from contextlib import chdir
from dataclasses import dataclass, replace
from typing import Final

from heatwright import __version__
from heatwright.findings import Finding, Refused, refusals, warn
from heatwright.project.executors import Engine
from heatwright.project.fingerprint import tool_fingerprint
from heatwright.project.library import Library
from heatwright.project.lockfile import (
    LOCK_NAME,
    Lock,
    document_text,
    lock_document,
    lock_of,
    lock_values,
)
from heatwright.project.manifest_types import Manifest, ReferenceFolders
from heatwright.project.pipeline import Pipeline
from heatwright.project.plan import Plan, check_pressure, make_plan
from heatwright.project.record import Record
from heatwright.project.release import check_folder, locked, read_release, recover, switch
from heatwright.project.shelf import Shelf
from heatwright.project.store import Store
from heatwright.project.texts import FILES, plain_text, whole_texts, with_remark
from heatwright.project.watch import Watch

_KEPT: Final = "kept from an earlier release"


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of a build.

    failed, kept : names of species.   written : whether there is another release now than before.
    """

    plan: Plan
    made: tuple[str, ...] = ()
    failed: tuple[str, ...] = ()
    kept: tuple[str, ...] = ()
    written: bool = False


def build(manifest: Manifest, watch: Watch, *, engine: Engine | None = None, keep_previous: bool = False) -> Outcome:
    """Make what is stale and write the release.

    engine : where outputs are read, in this process unless said.   keep_previous : a species that cannot be made keeps
    its earlier entry, with a remark.
    Raises Refused when nothing can be done at all: ``pressures-mixed``, ``lock-wrong``, ``lock-newer``,
    ``target-unwritable``, ``scheduler-unfit``.  A species that cannot be made is among those failed.
    """
    release = manifest.mechanism.release.path
    check_pressure(manifest.species)
    check_folder(release, manifest.root)
    with chdir(manifest.root), locked(release, watch.waiting):
        recover(release)
        with Store(manifest.mechanism.store.path, watch.said) as store:
            return _Build(manifest, watch, Library(store, engine or Engine()), keep_previous).run()


def dry_run(manifest: Manifest, watch: Watch) -> Plan:
    """What :func:`build` would do; nothing is written.  Raises Refused as it does."""
    check_pressure(manifest.species)
    check_folder(manifest.mechanism.release.path, manifest.root)
    with chdir(manifest.root), Store(manifest.mechanism.store.path, watch.said, read_only=True) as store:
        return _Build(manifest, watch, Library(store, Engine()), False).plan()


class _Build:
    """One build, from the plan to the release."""

    def __init__(self, manifest: Manifest, watch: Watch, library: Library, keep_previous: bool) -> None:
        self._manifest = manifest
        self._watch = watch
        self._library = library
        self._keep_previous = keep_previous
        names = (LOCK_NAME, *FILES)
        self._before = read_release(manifest.mechanism.release.path, names)
        self._shelves: dict[ReferenceFolders, Shelf] = {}

    def plan(self) -> Plan:
        """The decisions for all species."""
        release = self._manifest.mechanism.release
        lock = None
        if LOCK_NAME in self._before:
            lock = self._lock(plain_text(self._before[LOCK_NAME]), f"{release.shown}/{LOCK_NAME}")
        known = {r.path: r for r in lock.references} if lock is not None else {}
        for folders in dict.fromkeys(request.formation.folders for request in self._manifest.species):
            self._shelves[folders] = Shelf(folders, self._library, known)
        if lock is not None:  # what a species rests on can be a reason
            for shelf in self._shelves.values():
                shelf.label_all(self._watch.reading)
        texts = {file: plain_text(self._before[file]) for file in FILES if file in self._before}
        return make_plan(self._manifest, self._library, self._shelves, lock, texts)

    def _lock(self, text: str, file: str) -> Lock:
        """The lock file with this text; its values are remembered, as TOML is slow to take apart."""
        key = _lock_key(text)
        data = self._library.store.get([key]).get(key)
        if data is not None:
            try:
                return lock_of(json.loads(data), file, trusted=True)
            except (ValueError, Refused):
                self._library.store.drop(key)
        values = lock_values(text, file)
        lock = lock_of(values, file)
        self._library.store.put({key: json.dumps(values, ensure_ascii=False).encode()})
        return lock

    def run(self) -> Outcome:
        """Plan, make, write."""
        if not self._before:
            self._library.engine.start()  # everything is new, so that there will be work
        plan = self.plan()
        self._watch.planned(plan)
        if plan.is_done:
            return Outcome(plan)
        pipeline = Pipeline(self._library, self._shelves, self._watch)
        fresh = {record.locked.name: record for record in pipeline.records(plan.stale)}
        self._library.store.flush()
        kept = self._kept(plan, pipeline.failed)
        written = self._write(plan, {**fresh, **kept})
        pipeline.forget_finished()
        return Outcome(plan, tuple(sorted(fresh)), tuple(sorted(pipeline.failed)), tuple(sorted(kept)), written)

    def _kept(self, plan: Plan, failed: Mapping[str, tuple[Finding, ...]]) -> dict[str, Record]:
        """The earlier entries of species that failed, each with a remark, where they are wanted and there."""
        found = {}
        for decision in plan.stale:
            old = plan.lock.species.get(decision.name) if plan.lock is not None else None
            block = plan.blocks.get(decision.name, {})
            if not self._keep_previous or decision.name not in failed or old is None or set(block) != set(FILES):
                continue
            if plan.lock is None or plan.lock.standard_pressure_Pa != _pressure_Pa(self._manifest):
                words = f"the earlier entry of {decision.name} is for another standard pressure and cannot be kept"
                self._watch.said(warn("pressures-mixed", words, where=decision.request.where))
                continue
            why = refusals(failed[decision.name]) or failed[decision.name]
            texts = {f: with_remark(f, block[f], f"{_KEPT}: {why[0].text}", _KEPT) for f in FILES}
            found[decision.name] = _with_texts(Record(replace(old, kept=why[0].code), texts))
            self._watch.kept(decision)
        return found

    # --- the release ----------------------------------------------------------------------------------------------

    def _write(self, plan: Plan, fresh: dict[str, Record]) -> bool:
        """Compose the files and switch the release; whether it is another one than before."""
        release = self._manifest.mechanism.release
        together = self._together(plan, fresh)
        if not together:
            return False
        species = {record.locked.name: record.locked for record in together}
        elements = dict.fromkeys(symbol for record in together for symbol in _charged(record))
        ends = [record.locked.temperatures_K for record in together]
        texts = whole_texts([record.texts for record in together], ends, list(elements))
        lock = Lock(
            mechanism=self._manifest.mechanism.name,
            tool=__version__,
            fingerprint=tool_fingerprint(),
            standard_pressure_Pa=_pressure_Pa(self._manifest),
            species=species,
            references=tuple(sorted({r for record in together for r in record.rests_on})),
        )
        document = lock_document(lock)
        whole = {**texts, LOCK_NAME: document_text(document)}
        files = {name: text.encode() for name, text in whole.items()}
        if files == self._before:
            return False
        switch(release.path, files)
        key = _lock_key(whole[LOCK_NAME])
        self._library.store.put({key: json.dumps(document, ensure_ascii=False).encode()})
        self._library.store.drop_others("lock", key)  # they are large, and a lock file of old is rarely put back
        return True

    def _together(self, plan: Plan, fresh: dict[str, Record]) -> list[Record]:
        """The records of the new release in the order of its species: made now, kept, or as they were."""
        found = []
        for decision in plan.decisions:
            if decision.name in fresh:
                found.append(fresh[decision.name])
            elif not decision.reasons and plan.lock is not None:
                old = plan.lock.species[decision.name]
                shelf = self._shelves[decision.request.formation.folders]
                rests_on = shelf.relevant(decision.request.formation, old.composition)
                found.append(Record(old, plan.blocks[decision.name], rests_on))
        return found


def _lock_key(text: str) -> str:
    return f"lock:{hashlib.sha256(text.encode()).hexdigest()}"


def _pressure_Pa(manifest: Manifest) -> float:
    from heatwright.constants import ATMOSPHERE_PA, BAR_PA

    pressures = {request.model.pressure for request in manifest.species}
    return ATMOSPHERE_PA if pressures == {"1atm"} else BAR_PA


def _charged(record: Record) -> list[str]:
    """The element symbols of a species, with ``E`` for an ion."""
    return [*record.locked.composition, *(["E"] if record.locked.charge else [])]


def _with_texts(record: Record) -> Record:
    from heatwright.project.texts import text_hash

    return replace(record, locked=replace(record.locked, texts={f: text_hash(record.texts[f]) for f in FILES}))
