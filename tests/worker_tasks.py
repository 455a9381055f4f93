"""What workers do in tests of the executors; at the top of a module, so that it can be sent to another process."""

from __future__ import annotations

import os
import signal
import time
from pathlib import Path

from heatwright.project.tasks import ReadResult, ReadTask, do_tasks


def double(n: int) -> int:
    """Ordinary work."""
    return 2 * n


def slow_double(n: int) -> int:
    """Work that takes a moment."""
    time.sleep(0.05)
    return 2 * n


def kills_at_seven(n: int) -> int:
    """Ends its process whenever it is given a seven."""
    if n == 7:
        os.kill(os.getpid(), signal.SIGKILL)
    return 2 * n


def kills_once(task: tuple[int, str]) -> int:
    """Ends its process at seven, the first time only; the file says whether it has been."""
    n, mark = task
    if n == 7 and not Path(mark).exists():
        Path(mark).touch()
        os.kill(os.getpid(), signal.SIGKILL)
    return 2 * n


def own_number(_: int) -> int:
    """The number of the process at work."""
    time.sleep(0.05)
    return os.getpid()


def reads_but_dies_of_one(tasks: tuple[ReadTask, ...]) -> tuple[ReadResult, ...]:
    """Ordinary reading, but for one file."""
    if any(task.path.endswith("M050.toml") for task in tasks):
        os.kill(os.getpid(), signal.SIGKILL)
    return do_tasks(tasks)
