"""A dask scheduler that is already running, as the engine of a build; needs the extra ``heatwright[cluster]``."""

from __future__ import annotations

import os
from collections.abc import Callable
from typing import Any

from heatwright.findings import Refused, refuse
from heatwright.project.executors import ATTEMPTS, Engine, unfit


def distributed(address: str) -> tuple[Engine, Callable[[], None]]:
    """A running dask scheduler, by its address or by the scheduler file of its start; and what closes the connection.

    Raises Refused (``scheduler-unfit``) when dask is not installed, when the scheduler cannot be reached, when it has
    no workers, or when a worker has another heatwright than this one.
    """
    try:
        from distributed import Client
    except ImportError:
        action = "Install it: pip install 'heatwright[cluster]'."
        raise unfit(address, "dask.distributed is not installed here", action) from None
    try:
        client = Client(scheduler_file=address, timeout=10) if os.path.isfile(address) else Client(address, timeout=10)
    except Exception as error:
        words = f"the scheduler does not answer ({type(error).__name__}: {error})"
        raise unfit(address, words, "Give the address it printed, or the file of --scheduler-file.") from error
    try:
        threads = _checked_workers(client, address)
        return _engine_of(client, threads, address), client.close
    except BaseException:
        client.close()
        raise


def _engine_of(client: Any, threads: int, address: str) -> Engine:
    # pure=False: else the result of an earlier call with the same path would come back, although the file has changed
    executor = client.get_executor(pure=False, retries=ATTEMPTS)
    return Engine(executor, 3 * threads, f"by the scheduler at {address}", alive=lambda: len(client.nthreads()))


def _checked_workers(client: Any, address: str) -> int:
    """The number of threads of all workers, after each has shown that it has this very heatwright.

    A worker that lacks a package would leave the driver waiting for ever; the question about its version is answered
    even by one that has none.
    """
    from importlib.metadata import version

    from heatwright import __version__
    from heatwright.project.fingerprint import reader_fingerprint

    answers = client.run(version, "heatwright", on_error="return")
    if not answers:
        raise unfit(address, "the scheduler has no workers", "Start workers first.")
    for worker, answer in answers.items():
        if isinstance(answer, BaseException):
            action = "Install the same heatwright in the environment of the workers."
            raise unfit(address, f"the worker {worker} has no heatwright ({answer})", action)
    prints = client.run(reader_fingerprint, on_error="return")
    for worker, answer in prints.items():
        if answer != reader_fingerprint():
            found = f"the worker {worker} has another heatwright ({answers[worker]}, {answer})"
            expected = f"{__version__}, {reader_fingerprint()}"
            action = "Install the same heatwright, and cclib, everywhere."
            raise Refused([refuse("scheduler-unfit", found, where=address, expected=expected, action=action)])
    return max(1, int(sum(client.nthreads().values())))
