"""Importing cclib without what it imports but the parsers never use.

``cclib`` loads ``scipy.spatial`` for a method that aligns geometries and ``scipy.constants`` for a few constants (most
of its import time), and ``cclib.bridge`` with whatever of pandas, ase and other packages happens to be installed.
For the moment of the import a stand-in takes the place of such a package in ``sys.modules``; it loads the real one on
the first use of any of its names, and it is taken away again afterwards.  Nothing of cclib is changed, and whoever
needs the packages later gets the real ones.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from importlib import import_module
from importlib.util import find_spec
from pathlib import Path
from types import ModuleType
from typing import Any

NOT_NEEDED = ("scipy.spatial", "scipy.constants", "cclib.bridge", "pandas")


@contextmanager
def without_unused_packages() -> Iterator[None]:
    """Inside, an import of the packages in :data:`NOT_NEEDED` costs nothing until one of their names is used."""
    placed = [stand_in for stand_in in map(_stand_in, NOT_NEEDED) if stand_in is not None]
    sys.modules.update({stand_in.__name__: stand_in for stand_in in placed})
    try:
        yield
    finally:
        for stand_in in placed:
            _take_away(stand_in)


def _stand_in(name: str) -> ModuleType | None:
    """A module that becomes the real one when it is used; None when the real one is loaded or cannot be found."""
    top, *rest = name.split(".")
    found = None if name in sys.modules else find_spec(top)  # finding the top package does not import it
    if found is None or not found.submodule_search_locations:
        return None
    module = ModuleType(name)
    if not rest:
        module.__spec__ = found  # cclib asks whether it is installed
    module.__path__ = [str(Path(found.submodule_search_locations[0]).joinpath(*rest))]

    def real(attribute: str) -> Any:
        if attribute.startswith("__"):
            raise AttributeError(attribute)
        _take_away(module)
        return getattr(import_module(name), attribute)

    module.__getattr__ = real  # type: ignore[method-assign]
    return module


def _take_away(module: ModuleType) -> None:
    """Remove the stand-in from ``sys.modules``; an attribute of its parent package stays and leads to the real one."""
    if sys.modules.get(module.__name__) is module:
        del sys.modules[module.__name__]
