"""Where work is done: in this process, in processes of this machine, or in an engine that is already running.

Whatever it is, only ``submit`` of :class:`concurrent.futures.Executor` is used, with one module-level function and
plain values, and only a window of tasks is under way at a time.  A worker that dies takes nothing with it but the task
it was at, which is done again.
"""

from __future__ import annotations

import os
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import CancelledError, Executor, Future, ProcessPoolExecutor
from contextlib import suppress
from dataclasses import dataclass
from multiprocessing import get_context
from queue import Empty, SimpleQueue
from typing import Any, Final, Generic, TypeVar

from heatwright.findings import Refused, refuse

A = TypeVar("A")
R = TypeVar("R")

_PRELOADED: Final = ["heatwright.project.warm"]
_STALLED_S: Final = 30.0
ATTEMPTS: Final = 2
"""How often a task may be at work in a process that dies, before it is held responsible."""


class InProcess(Executor):
    """Does each task when it is submitted, in this process."""

    def submit(self, fn: Callable[..., R], /, *args: Any, **kwargs: Any) -> Future[R]:
        """The future of a task that is done already."""
        future: Future[R] = Future()
        try:
            future.set_result(fn(*args, **kwargs))
        except Exception as error:
            future.set_exception(error)
        return future


@dataclass(frozen=True, slots=True)
class Engine:
    """An executor with what the driver has to know of it.

    window : tasks under way at a time.   renew : makes a fresh one when this broke, None where it mends itself.
    words : what it is, for people.   alive : says whether there is still a worker, None where that cannot be asked.
    """

    executor: Executor
    window: int
    words: str
    renew: Callable[[], Engine] | None = None
    alive: Callable[[], int] | None = None


def in_process() -> Engine:
    """Everything in this process, one task after the other."""
    return Engine(InProcess(), 1, "in this process")


def local_processes(count: int) -> Engine:
    """*count* processes of this machine, forked from one that has loaded the reader already."""
    _one_thread_each()
    context = get_context("forkserver")
    context.set_forkserver_preload(list(_PRELOADED))
    pool = ProcessPoolExecutor(count, mp_context=context)
    return Engine(pool, 3 * count, f"in {count} processes", renew=lambda: local_processes(count))


def _one_thread_each() -> None:
    """Each worker is one core's work: linear algebra must not start threads of its own."""
    for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
        os.environ.setdefault(name, "1")


def unfit(where: str, found: str, action: str) -> Refused:
    """That an engine cannot be used."""
    return Refused([refuse("scheduler-unfit", found, where=where, action=action)])


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
    try:
        while (item := runner.next_done()) is not None:
            yield item
    finally:
        runner.stop()


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
            failure = CancelledError() if future.cancelled() else future.exception()
            if failure is None:
                return task, future.result()
            if deaths >= ATTEMPTS:
                self._renew()
                return task, Lost(f"what was at work on it died, {deaths + 1} times ({type(failure).__name__})")
            self._again.append((task, deaths + 1))
            self._renew()

    def stop(self) -> None:
        """Wait for nothing more."""
        for future in self._running:
            future.cancel()
        with suppress(Exception):
            self._engine.executor.shutdown(wait=False)

    def _fill(self) -> None:
        """Submit as many as the window holds; a task whose processes died twice goes alone, so that it shows."""
        while len(self._running) < self._engine.window:
            item = self._next()
            if item is None:
                return
            alone = item[1] >= ATTEMPTS
            if alone and self._running:
                self._again.append(item)
                return
            future = self._engine.executor.submit(self._work, item[0])
            self._running[future] = item
            future.add_done_callback(self._heard.put)
            if alone:
                return

    def _next(self) -> tuple[A, int] | None:
        if any(deaths >= ATTEMPTS for _, deaths in self._running.values()):
            return None
        if self._again:
            return self._again.popleft()
        task = next(self._fresh, self)
        return None if task is self else (task, 0)  # type: ignore[return-value]

    def _wait(self) -> Future[R]:
        while True:
            try:
                return self._heard.get(timeout=_STALLED_S)
            except Empty:
                if self._engine.alive is not None and not self._engine.alive():
                    words = "the scheduler has no workers any more"
                    raise unfit(
                        self._engine.words, words, "Start workers and build again; what is done is kept."
                    ) from None

    def _renew(self) -> None:
        """A fresh pool in the place of one that broke, with everything that was in it to be tried again."""
        if self._engine.renew is None:
            return
        self._again.extend((task, deaths + 1) for task, deaths in self._running.values())
        self._running.clear()
        self._engine.executor.shutdown(wait=False, cancel_futures=True)
        self._engine = self._engine.renew()
