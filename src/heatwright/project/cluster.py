"""A dask scheduler that is already running, as the engine of a build; needs the extra ``heatwright[cluster]``."""

from __future__ import annotations

import os
from collections.abc import Callable
from concurrent.futures import Future
from typing import Any, TypeVar

from heatwright.findings import Refused, refuse
from heatwright.project.executors import AHEAD, ATTEMPTS, Engine, unfit

A = TypeVar("A")
R = TypeVar("R")
_ANSWER_S = 10


class Distributed(Engine):
    """A running scheduler, by its address or by the file that it wrote at its start (``--scheduler-file``)."""

    def __init__(self, address: str) -> None:
        """Connect and look at the workers.

        Raises Refused (``scheduler-unfit``) when dask is not installed, when the scheduler cannot be reached, when it
        has no workers, or when a worker has another heatwright than this one.
        """
        self.words = f"by the scheduler at {address}"
        self._client = _client(address)
        try:
            self.workers = _checked_workers(self._client, address)
            self.window = AHEAD * self.workers
            # pure=False: else an earlier result for the same path would come back although the file has changed
            self._executor = self._client.get_executor(pure=False, retries=ATTEMPTS)
        except BaseException:
            self._client.close()
            raise

    def submit(self, work: Callable[[A], R], task: A) -> Future[R]:
        future: Future[R] = self._executor.submit(work, task)
        return future

    def has_workers(self) -> bool:
        try:
            return bool(self._client.nthreads())
        except Exception:  # the scheduler itself is gone
            return False

    def close(self) -> None:
        self._executor.shutdown(wait=False)
        self._client.close()


def _client(address: str) -> Any:
    try:
        import distributed
    except ImportError:
        action = "Install it: pip install 'heatwright[cluster]'."
        raise unfit(address, "dask.distributed is not installed here", action) from None
    named = {"scheduler_file": address} if os.path.isfile(address) else {"address": address}
    connect: Any = distributed.Client  # which says of some of its types only
    try:
        return connect(timeout=_ANSWER_S, **named)
    except Exception as error:
        words = f"the scheduler does not answer ({type(error).__name__}: {error})"
        raise unfit(address, words, "Give the address that it printed, or the file of --scheduler-file.") from error


def _checked_workers(client: Any, address: str) -> int:
    """The number of threads of all workers, after each has shown that it has this very heatwright.

    A worker that lacks a package would leave the driver waiting for ever; the question about its version is answered
    even by one that has none.
    """
    from importlib.metadata import version

    from heatwright.project.fingerprint import reader_fingerprint

    answers = client.run(version, "heatwright", on_error="return")
    if not answers:
        raise unfit(address, "the scheduler has no workers", "Start workers first.")
    for worker, answer in answers.items():
        if isinstance(answer, BaseException):
            action = "Install the same heatwright in the environment of the workers."
            raise unfit(address, f"the worker {worker} has no heatwright ({type(answer).__name__}: {answer})", action)
    for worker, answer in client.run(reader_fingerprint, on_error="return").items():
        if answer != reader_fingerprint():
            found = f"the worker {worker} has another heatwright or cclib (version {answers[worker]}, {answer})"
            action = "Install the same heatwright and cclib everywhere."
            expected = f"the reader {reader_fingerprint()} of this machine"
            raise Refused([refuse("scheduler-unfit", found, where=address, expected=expected, action=action)])
    return max(1, int(sum(client.nthreads().values())))
