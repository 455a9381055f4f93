"""Imported by the process from which local workers are forked: what reading needs is then there in each of them."""

from __future__ import annotations

import sys
from importlib import import_module
from types import TracebackType

from heatwright.partition import rigid
from heatwright.project import coding, tasks
from heatwright.reading import outputs
from heatwright.reading.deferral import without_unused_packages

LOADED = (rigid, coding, tasks, outputs)

with without_unused_packages():
    import_module("cclib.parser")


def _say_nothing_of_a_driver_that_has_gone(
    kind: type[BaseException], error: BaseException, trace: TracebackType | None
) -> None:
    """A worker that was being started when its driver ended finds the driver's locks and pipes gone; that is no fault
    to tell the user, who interrupted the build and has been answered."""
    if not isinstance(error, (FileNotFoundError, EOFError, ConnectionError, BrokenPipeError, KeyboardInterrupt)):
        sys.__excepthook__(kind, error, trace)


if __name__ == "heatwright.project.warm" and "multiprocessing.forkserver" in sys.modules:
    sys.excepthook = _say_nothing_of_a_driver_that_has_gone
