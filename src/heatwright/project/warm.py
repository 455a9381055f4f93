"""Imported by the process from which local workers are forked: what reading needs is then there in each of them."""

from __future__ import annotations

from importlib import import_module

from heatwright.partition import rigid
from heatwright.project import coding, tasks
from heatwright.reading import outputs
from heatwright.reading.deferral import without_unused_packages

LOADED = (rigid, coding, tasks, outputs)

with without_unused_packages():
    import_module("cclib.parser")
