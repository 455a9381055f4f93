"""What of heatwright itself decides about a result: hashes of its own sources and tables.

A version number alone would not do: between two of them the code changes, and a store full of molecules that an older
reader made must not be taken for new.
"""

from __future__ import annotations

import hashlib
import os
from collections.abc import Iterator
from functools import cache
from importlib.util import find_spec
from pathlib import Path
from typing import Final

from heatwright.resources import templates

_FOR_READING: Final = (
    "constants.py", "elements.py", "errors.py", "findings.py", "molecule.py", "resources.py", "structure", "reading",
    "partition/rigid.py", "project/coding.py", "project/tasks.py",
)  # fmt: skip
"""What the reading of an output goes through."""
_FOR_ENTRIES: Final = (
    *_FOR_READING, "scales.py", "species.py", "entry.py", "partition", "formation", "polynomial", "writing",
    "project/conversion.py", "project/making.py", "project/shelf.py", "project/record.py", "project/texts.py",
    "project/lockfile.py",
)  # fmt: skip
"""What an entry goes through, from the molecule to its text."""
_TEXTS: Final = ("nasa7.j2", "yaml.j2")


@cache
def reader_fingerprint() -> str:
    """What identifies the reader of outputs: its sources, the tables, and the version of cclib."""
    return _hash(_FOR_READING, _cclib_version())


def _cclib_version() -> str:
    """What cclib's own sources say of its version: importing it, or reading its metadata, would cost more."""
    spec = find_spec("cclib")
    if spec is None or spec.origin is None:
        return "not installed"
    sources = [Path(spec.origin).with_name(name) for name in ("__init__.py", "_version.py")]
    lines = [line for p in sources if p.is_file() for line in p.read_text(encoding="utf-8").splitlines()]
    return "\n".join(line for line in lines if "version" in line)


@cache
def tool_fingerprint() -> str:
    """What identifies everything between an output and the text of its entry."""
    texts = "".join(templates().joinpath(name).read_text(encoding="utf-8") for name in _TEXTS)
    return _hash(_FOR_ENTRIES, reader_fingerprint() + texts)


_PACKAGE: Final = os.path.dirname(os.path.dirname(os.path.abspath(__file__)))


def _hash(parts: tuple[str, ...], more: str) -> str:
    found = hashlib.sha256(more.encode())
    for name in sorted({path for part in (*parts, "data") for path in _sources(part)}):
        with open(os.path.join(_PACKAGE, name), "rb") as stream:
            found.update(f"{name}\0".encode() + stream.read().replace(b"\r\n", b"\n") + b"\0")
    return found.hexdigest()[:16]


def _sources(part: str) -> Iterator[str]:
    """The sources and tables in a part of the package, a file or a folder, as paths with ``/``."""
    place = os.path.join(_PACKAGE, part)
    if not os.path.isdir(place):
        yield part
        return
    for name in os.listdir(place):
        path = f"{part}/{name}"
        if os.path.isdir(os.path.join(place, name)):
            yield from _sources(path)
        elif name.endswith((".py", ".csv")):
            yield path
