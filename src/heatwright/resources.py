"""Files that belong to the project: templates, sample outputs and data tables, from a wheel or from a checkout."""

from __future__ import annotations

import csv
from collections.abc import Iterator
from functools import cache
from pathlib import Path
from typing import Final

from heatwright.errors import ShippedFileMissing

_PACKAGE: Final = Path(__file__).resolve().parent


def _shipped(name: str) -> Path:
    """The folder *name*, which an installed package carries inside itself and a checkout at its top."""
    installed = _PACKAGE / f"_{name}"
    if installed.is_dir():
        return installed
    checkout = _PACKAGE.parents[1] / name
    if checkout.is_dir():
        return checkout
    raise ShippedFileMissing(f"the folder {name!r} is neither inside the installed package nor at {checkout}")


def templates() -> Path:
    """The folder of the text templates."""
    return _shipped("templates")


def sample_outputs() -> Path:
    """The folder of the sample outputs."""
    return _shipped("sample_outputs")


def data_text(name: str) -> str:
    """The text of ``data/NAME``."""
    return (_PACKAGE / "data" / name).read_text(encoding="utf-8")


@cache
def data_rows(name: str) -> tuple[dict[str, str], ...]:
    """The rows of ``data/NAME.csv`` as texts by column name; lines that start with ``#`` are its sources."""
    lines = [line for line in data_text(f"{name}.csv").splitlines() if line and not line.startswith("#")]
    return tuple(csv.DictReader(lines))


@cache
def data_sources(name: str) -> dict[str, str]:
    """The publication behind each short name of a source, from the lines ``# NAME: PUBLICATION`` of ``data/NAME.csv``.

    >>> data_sources("species_formation")["JANAF 1998"][:14]
    'M. W. Chase Jr'
    """
    comments = [line[2:] for line in data_text(f"{name}.csv").splitlines() if line.startswith("# ")]
    parts = (line.partition(": ") for line in comments)
    return {label: text for label, colon, text in parts if colon and len(label) < 30}


def sample_files() -> dict[str, bytes]:
    """The content of each sample file by its path below the folder of samples, sorted."""
    return dict(sorted(_walk(sample_outputs(), "")))


def _walk(folder: Path, prefix: str) -> Iterator[tuple[str, bytes]]:
    for item in folder.iterdir():
        if item.name.startswith((".", "__")):
            continue
        if item.is_dir():
            yield from _walk(item, f"{prefix}{item.name}/")
        else:
            yield f"{prefix}{item.name}", item.read_bytes()
