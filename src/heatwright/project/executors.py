"""Where work is done: in this process, in processes of this machine, or in an engine that is already running.

Whatever it is, only ``submit`` of a :class:`concurrent.futures.Executor` is used, with one module-level function and
plain values, and only a window of tasks is under way at a time.  A worker that dies takes nothing with it but the task
it was at, which is done again.
"""

from __future__ import annotations

import os
import signal
import sys
from collections import deque
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from queue import Empty, SimpleQueue
from threading import Thread
from typing import TYPE_CHECKING, Final, Generic, TypeVar

from heatwright.findings import Refused, refuse

if TYPE_CHECKING:
    from concurrent.futures import Executor, Future, ProcessPoolExecutor

A = TypeVar("A")
R = TypeVar("R")

ATTEMPTS: Final = 2
"""How often the process at work on a task may die before the task goes alone, and is held responsible."""
_PRELOADED: Final = ["heatwright.project.warm"]
AHEAD: Final = 6
"""Tasks under way for each worker, so that none waits while the driver makes a batch of entries."""
_STALLED_S: Final = 30.0


class Engine:
    """Work in this process, one task after the other; the engines that are elsewhere derive from it.

    words : what it is, for people.   workers : how many there are.   window : tasks under way at a time.
    """

    words = "in this process"
    workers = 1
    window = 1

    def start(self) -> None:
        """There will be work; whoever has to be waited for may get ready."""

    def submit(self, work: Callable[[A], R], task: A) -> Future[R]:
        """The future of one task."""
        from concurrent.futures import Future

        future: Future[R] = Future()
        try:
            future.set_result(work(task))
        except Exception as error:
            future.set_exception(error)
        return future

    def mend(self) -> bool:
        """Replace what has broken when a task was lost; whether everything else under way is lost as well."""
        return False

    def has_workers(self) -> bool:
        """Whether there is still somebody to do the work."""
        return True

    def close(self) -> None:
        """Give up what is under way."""


class ExecutorEngine(Engine):
    """Any executor of :mod:`concurrent.futures`, for instance ``mpi4py.futures.MPIPoolExecutor()``."""

    def __init__(self, executor: Executor, workers: int, words: str) -> None:
        self._executor = executor
        self.workers = workers
        self.window = AHEAD * workers
        self.words = words

    def submit(self, work: Callable[[A], R], task: A) -> Future[R]:
        return self._executor.submit(work, task)

    def close(self) -> None:
        self._executor.shutdown(wait=False)


class LocalProcesses(Engine):
    """Processes of this machine, forked from one that has loaded the reader already; started when first needed."""

    def __init__(self, count: int) -> None:
        self.workers = count
        self.window = AHEAD * count
        self.words = f"in {count} processes"
        self._count = count
        self._starting: Thread | None = None
        self._pool: ProcessPoolExecutor | None = None

    def start(self) -> None:
        if self._starting is None:  # beside the driver, as the first process has the reader to import
            self._starting = Thread(target=self._begin)
            self._starting.start()

    def _begin(self) -> None:
        pool = _pool(self._count)
        with _interrupts_blocked(), _same_modules():
            for _ in range(self._count):
                pool.submit(os.getpid)  # each new task starts a process, as long as there are too few
        self._pool = pool

    def submit(self, work: Callable[[A], R], task: A) -> Future[R]:
        self.start()
        assert self._starting is not None
        self._starting.join()
        if self._pool is None:
            raise RuntimeError("no process could be started")
        return self._pool.submit(work, task)

    def mend(self) -> bool:
        self.close()
        return True

    def close(self) -> None:
        if self._starting is not None:
            self._starting.join()
        self._starting = None
        if self._pool is None:
            return
        workers = list((getattr(self._pool, "_processes", None) or {}).values())
        self._pool.shutdown(wait=False, cancel_futures=True)
        for worker in workers:  # what they are at is not wanted any more
            worker.terminate()
        self._pool = None


def _pool(count: int) -> ProcessPoolExecutor:
    from concurrent.futures import ProcessPoolExecutor
    from multiprocessing import get_context

    for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
        os.environ.setdefault(name, "1")  # each worker is one core's work; linear algebra must not add threads
    context = get_context("forkserver")
    context.set_forkserver_preload(list(_PRELOADED))
    return ProcessPoolExecutor(count, mp_context=context, initializer=_end_with_the_driver)


def _end_with_the_driver() -> None:
    """In a worker: watch the driver, and end when it does, however that comes about."""
    from multiprocessing import parent_process
    from multiprocessing.connection import wait

    driver = parent_process()
    assert driver is not None  # this is a worker

    def watch() -> None:
        wait([driver.sentinel])
        os._exit(1)

    Thread(target=watch, daemon=True).start()


@contextmanager
def _interrupts_blocked() -> Iterator[None]:
    """What is started inside never hears an interrupt from the terminal: that is the driver's business."""
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


@contextmanager
def _same_modules() -> Iterator[None]:
    """What is started inside imports from where this process does, also when PYTHONPATH is a relative path."""
    before = os.environ.get("PYTHONPATH")
    os.environ["PYTHONPATH"] = os.pathsep.join(os.path.abspath(path) for path in sys.path if path)
    try:
        yield
    finally:
        if before is None:
            del os.environ["PYTHONPATH"]
        else:
            os.environ["PYTHONPATH"] = before


def unfit(where: str, found: str, action: str) -> Refused:
    """That an engine cannot be used."""
    return Refused([refuse("scheduler-unfit", found, where=where, action=action)])


def portions(tasks: Sequence[A], workers: int) -> list[tuple[A, ...]]:
    """The tasks in portions: a few for each of many workers, as whoever hands them out takes 1 or 2 ms for each.

    >>> [len(portion) for portion in portions(range(10), 1)], len(portions(range(100_000), 2000))
    ([1, 1, 1, 1, 1, 1, 1, 1, 1, 1], 4000)
    """
    if workers == 1:
        return [(task,) for task in tasks]
    each = max(2, min(32, 256 // workers))
    size = max(1, len(tasks) // (workers * each))
    return [tuple(tasks[start : start + size]) for start in range(0, len(tasks), size)]


@dataclass(frozen=True, slots=True)
class Lost:
    """A task that could not be done: the process at work on it died, again and again, or the engine gave it up."""

    words: str


def run(engine: Engine, work: Callable[[A], R], tasks: Iterable[A]) -> Iterator[tuple[A, R | Lost]]:
    """Each task with what *work* gives for it, in the order in which they are done.

    work : a module-level function that never raises.   A task whose process dies is tried again, alone if need be,
    and given up as :class:`Lost` only when it is plainly the one that kills.
    Raises Refused (``scheduler-unfit``) when a scheduler has lost its last worker.
    """
    runner = _Runner(engine, work, iter(tasks))
    while (item := runner.next_done()) is not None:
        yield item


class _Runner(Generic[A, R]):
    """Tasks under way, tasks to be tried again, and what has been heard of them."""

    def __init__(self, engine: Engine, work: Callable[[A], R], fresh: Iterator[A]) -> None:
        self._engine, self._work, self._fresh = engine, work, fresh
        self._running: dict[Future[R], tuple[A, int]] = {}
        self._again: deque[tuple[A, int]] = deque()  # with how often their process died
        self._heard: SimpleQueue[Future[R]] = SimpleQueue()

    def next_done(self) -> tuple[A, R | Lost] | None:
        """The next task that is done or given up; None when there is nothing left."""
        while True:
            self._fill()
            if not self._running:
                return None
            future = self._wait()
            if future not in self._running:
                continue  # of a pool that broke
            task, deaths = self._running.pop(future)
            failure = "CancelledError" if future.cancelled() else type(future.exception()).__name__
            if failure == "NoneType":
                return task, future.result()
            self._mend()
            if deaths >= ATTEMPTS:
                return task, Lost(f"what was at work on it died, {deaths + 1} times ({failure})")
            self._again.append((task, deaths + 1))

    def _fill(self) -> None:
        """Submit as many as the window holds; a task whose processes died twice goes alone, so that it shows."""
        while len(self._running) < self._engine.window:
            item = self._next()
            if item is None:
                return
            try:
                future = self._engine.submit(self._work, item[0])
            except RuntimeError:  # the pool has just broken, or been shut down
                self._mend()
                self._again.appendleft(item)
                continue
            self._running[future] = item
            future.add_done_callback(self._heard.put)

    def _next(self) -> tuple[A, int] | None:
        if any(deaths >= ATTEMPTS for _, deaths in self._running.values()):
            return None
        if self._again and (self._again[0][1] < ATTEMPTS or not self._running):
            return self._again.popleft()
        if self._again:
            return None
        try:
            return next(self._fresh), 0
        except StopIteration:
            return None

    def _wait(self) -> Future[R]:
        while True:
            try:
                return self._heard.get(timeout=_STALLED_S)
            except Empty:
                if not self._engine.has_workers():
                    action = "Start workers and build again; what is done is kept."
                    raise unfit(self._engine.words, "there are no workers any more", action) from None

    def _mend(self) -> None:
        """A fresh pool in the place of one that broke, with everything that was in it to be tried again."""
        if self._engine.mend():
            self._again.extend((task, deaths + 1) for task, deaths in self._running.values())
            self._running.clear()


def engine_for(jobs: int, scheduler: str | None) -> Engine:
    """The engine that ``-j`` and ``--scheduler`` mean.  Raises Refused when the scheduler cannot be used."""
    if scheduler is not None:
        from heatwright.project.cluster import Distributed

        return Distributed(scheduler)
    return LocalProcesses(jobs) if jobs > 1 else Engine()
