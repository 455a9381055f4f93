"""The library of a build: what is known of every file, from the store or from workers that read it."""

from __future__ import annotations

import hashlib
import json
import os
import stat
import time
from collections.abc import Callable, Iterable, Iterator
from typing import TYPE_CHECKING, Any, Final

from heatwright.findings import Finding, Refused, refuse
from heatwright.project.executors import Engine, Lost, portions, run
from heatwright.project.store import Store
from heatwright.project.tasks import (
    ReadResult,
    ReadTask,
    body_of,
    body_values,
    content_hash,
    do_task,
    do_tasks,
    points_beside,
    read_key,
)

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule
    from heatwright.reading.torsion_scans import TorsionScan
    from heatwright.structure.inertia import Inertia
    from heatwright.structure.symmetry import Symmetry

_WORTH_THREADS: Final = 16
_SETTLED_NS: Final = 2_000_000_000
"""A file changed less than this before it was hashed could change again without its times telling."""

Progress = Callable[[int, int, str], None]
"""Called with the number of files read, that of all to be read, and the path of the one just read."""


class Library:
    """Hashes, molecules, scans and rigid bodies by file; the driver's own, not for workers."""

    def __init__(self, store: Store, engine: Engine) -> None:
        self.store = store
        self.engine = engine
        self._hashes: dict[str, str] = {}
        self._failed: dict[str, Finding] = {}
        self._at_hand: dict[str, bytes] = {}
        self._bodies: dict[object, Any] = {}
        self._keys: dict[ReadTask, str] = {}

    def hashes(self, paths: Iterable[str]) -> dict[str, str]:
        """SHA-256 by absolute path, empty where there is nothing to be read; from the store where no time changed."""
        wanted = list(dict.fromkeys(paths))
        fresh = [path for path in wanted if path not in self._hashes]
        known = self.store.get(f"hash:{path}" for path in fresh)
        learnt: dict[str, bytes] = {}
        times = {path: _times(path) for path in fresh}
        for path in fresh:
            self._hashes[path] = _kept_hash(known.get(f"hash:{path}"), times[path])
        unknown = [path for path in fresh if not self._hashes[path]]
        for path, sha256 in zip(unknown, self._hashed(unknown), strict=True):
            self._hashes[path] = sha256
            before = times[path]
            if before is not None and before == _times(path) and time.time_ns() - before[1] > _SETTLED_NS:
                learnt[f"hash:{path}"] = json.dumps([*before, sha256]).encode()
        if learnt:
            self.store.put(learnt)
        return {path: self._hashes[path] for path in wanted}

    def _hashed(self, paths: list[str]) -> Iterable[str]:
        """The hashes of files, by several threads where several cores were asked for (hashing lets go of the lock)."""
        if self.engine.window == 1 or len(paths) < _WORTH_THREADS:
            return map(content_hash, paths)
        from concurrent.futures import ThreadPoolExecutor

        with ThreadPoolExecutor(min(4, os.cpu_count() or 1)) as threads:
            return list(threads.map(content_hash, paths))

    def sha256(self, path: str) -> str:
        """SHA-256 of one file."""
        return self._hashes[path] if path in self._hashes else self.hashes([path])[path]

    def key(self, task: ReadTask) -> str:
        """The store's key of what a task gives now."""
        if task not in self._keys:
            beside = points_beside(task.path) if task.torsion is not None else ""
            self._keys[task] = read_key(task, self.sha256(task.path) + (self.sha256(beside) if beside else ""))
        return self._keys[task]

    def fetch(self, tasks: Iterable[ReadTask]) -> None:
        """Have what some tasks gave at hand; it is let go when the next ones are fetched."""
        self._at_hand = self.store.get(self.key(task) for task in tasks)
        self._bodies.clear()

    def read(self, tasks: Iterable[ReadTask], progress: Progress) -> None:
        """Have everything in the store that the tasks give and that is not there yet."""
        for _ in self.reading(tasks, progress):
            pass

    def reading(self, tasks: Iterable[ReadTask], progress: Progress) -> Iterator[str]:
        """The key of each task as soon as what it gives is in the store (or is known to have failed), once each.

        Tasks for files that cannot be read at all are left out.
        """
        wanted = {self.key(task): task for task in tasks if self.sha256(task.path)}
        known = self.store.has(wanted)
        missing = [task for key, task in wanted.items() if key not in known]
        if missing:
            self.engine.start()
            progress(0, len(missing), "")
        yield from (key for key in wanted if key in known)
        for count, (task, result) in enumerate(self._results(missing), start=1):
            self._take(task, result)
            progress(count, len(missing), task.path)
            yield self.key(task)
        self.store.flush()

    def _results(self, tasks: list[ReadTask]) -> Iterator[tuple[ReadTask, ReadResult | Lost]]:
        """What workers give for each task; what was lost with others is tried again by itself."""
        again: list[ReadTask] = []
        for portion, results in run(self.engine, do_tasks, portions(tasks, self.engine.workers)):
            if not isinstance(results, Lost):
                yield from zip(portion, results, strict=True)
            elif len(portion) == 1:
                yield portion[0], results
            else:
                again += portion
        for (task,), single in run(self.engine, do_tasks, [(task,) for task in again]):
            yield task, single if isinstance(single, Lost) else single[0]

    def _take(self, task: ReadTask, result: ReadResult | Lost) -> None:
        key = self.key(task)
        if isinstance(result, Lost):
            action = "Look at the file and at the memory of the machine, and build again."
            self._failed[key] = refuse("worker-lost", f"it could not be read: {result.words}", action=action)
        elif result.sha256 != self.sha256(task.path):
            action = "Build again when it is at rest."
            self._failed[key] = refuse("file-changed", "the file changed while it was being read", action=action)
        elif result.broken:
            words = f"reading it ended in an error that should not happen ({result.broken})"
            self._failed[key] = refuse("task-broke", words, action="Please report it with the file.")
        else:
            mark = b"R" if result.failure else b"M"
            self.store.put({key: mark + (result.failure or result.value)})

    def molecule(self, task: ReadTask, shown: str) -> Molecule:
        """The molecule of an output that is called *shown*; raises Refused."""
        molecule: Molecule
        molecule, bodies = self._value(task, shown)
        for masses, tolerance, body in bodies:
            self._bodies[_body_key(molecule, masses, tolerance)] = body
        return molecule

    def scan(self, task: ReadTask, shown: str) -> TorsionScan:
        """The scan of a task whose file or folder is called *shown*; raises Refused."""
        scan: TorsionScan = self._value(task, shown)
        return scan

    def _value(self, task: ReadTask, shown: str) -> Any:
        from heatwright.project.coding import Unreadable, decoded

        if not self.sha256(task.path):
            raise Refused(self._unreadable(task, shown))
        key = self.key(task)
        for _ in range(2):
            if key in self._failed:
                raise Refused([self._failed[key].at(shown)])
            data = self._at_hand.get(key) or self.store.get([key]).get(key)
            try:
                if data is not None:
                    value = decoded(data[1:], shown)
                    break
            except Unreadable:
                self._at_hand.pop(key, None)
                self.store.drop(key)
            self._take(task, do_task(task))
        else:
            words = "what was read of it could not be kept"
            raise Refused([refuse("task-broke", words, where=shown, action="Build again.")])
        if data[:1] == b"R":
            raise Refused(value)
        return value

    def _unreadable(self, task: ReadTask, shown: str) -> tuple[Finding, ...]:
        """Why there is nothing to read, in the reader's own words; such failures are not kept."""
        from heatwright.project.coding import decoded

        result = do_task(task)
        if result.failure:
            found: tuple[Finding, ...] = decoded(result.failure, shown)
            return found
        return (
            refuse("file-missing", "the file cannot be read", where=shown, action="Give the path of an output file."),
        )

    def body(self, molecule: Molecule, masses_u: FloatArray, tolerance_A: float) -> tuple[Inertia, Symmetry]:
        """Rotor and symmetry as :func:`heatwright.partition.rigid.rigid_body` finds them, remembered."""
        from heatwright.partition.rigid import rigid_body
        from heatwright.project.coding import encoded
        from heatwright.project.fingerprint import reader_fingerprint

        key = _body_key(molecule, masses_u, tolerance_A)
        if key not in self._bodies:
            kept = f"body:{hashlib.sha256(f'{reader_fingerprint()} {key!r}'.encode()).hexdigest()}"
            known = self._kept_value(kept)
            self._bodies[key] = known or body_values(*rigid_body(molecule, masses_u, tolerance_A))
            if known is None:
                self.store.put({kept: encoded(self._bodies[key])})
        return body_of(self._bodies[key])

    def _kept_value(self, key: str) -> Any:
        """What the store holds under a key, None when that is nothing or damaged."""
        from heatwright.project.coding import Unreadable, decoded

        data = self.store.get([key]).get(key)
        try:
            return None if data is None else decoded(data)
        except Unreadable:
            self.store.drop(key)
            return None


def _body_key(molecule: Molecule, masses_u: FloatArray, tolerance_A: float) -> tuple[object, ...]:
    """Everything that the rigid body depends on."""
    arrays = (molecule.atomic_numbers, masses_u, molecule.coordinates_A)
    return (*(array.tobytes() for array in arrays), tolerance_A, molecule.stated)


def _times(path: str) -> tuple[int, int, int, int] | None:
    """Size, times and number of a plain file; None for anything else (a folder's content has no time of its own)."""
    try:
        found = os.stat(path)
    except OSError:
        return None
    if not stat.S_ISREG(found.st_mode):
        return None
    return found.st_size, max(found.st_mtime_ns, found.st_ctime_ns), found.st_mtime_ns, found.st_ino


def _kept_hash(data: bytes | None, times: tuple[int, int, int, int] | None) -> str:
    """The hash that was kept for a file with these times, else an empty text."""
    if data is None or times is None:
        return ""
    try:
        *kept, sha256 = json.loads(data)
    except ValueError:
        return ""
    return str(sha256) if tuple(kept) == times else ""
