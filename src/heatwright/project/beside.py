"""The project that a release came from, found by where the release lies: a release does not name its manifest."""

from __future__ import annotations

import os
import re
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Final

from heatwright.findings import Refused
from heatwright.project.manifest import MANIFEST_NAME, load_manifest

if TYPE_CHECKING:
    from heatwright.project.lockfile import Lock
    from heatwright.project.manifest_types import Manifest

_UP: Final = 3
"""How many folders above a release its manifest is looked for."""
_MOST: Final = 40
"""Of how many files in one folder."""
_MANIFEST: Final = re.compile(r"^\s*\[+\s*(?:mechanism|species|outputs|levels)\b", re.MULTILINE)


def looks_like_manifest(text: str) -> bool:
    """Whether a TOML text has a table that only manifests have.

    >>> looks_like_manifest('[species.CH4]'), looks_like_manifest('[molecule]')
    (True, False)
    """
    return bool(_MANIFEST.search(text))


def manifest_of_release(folder: str, lock: Lock) -> Manifest | None:
    """The manifest whose release is *folder*; else one above it for a mechanism of the same name (for a release that
    was copied beside its successor); None without either.

    Raises Refused when there is none and a ``heatwright.toml`` above cannot be loaded.
    """
    alike: Manifest | None = None
    refused: Refused | None = None
    for file, above in _candidates(folder):
        try:
            manifest = load_manifest(file)
        except Refused as error:
            refused = refused or (error if above and file.name == MANIFEST_NAME else None)
            continue
        if _same_place(manifest.mechanism.release.path, folder):
            return manifest
        if above and alike is None and manifest.mechanism.name == lock.mechanism:
            alike = manifest
    if alike is None and refused is not None:
        raise refused
    return alike


def _candidates(folder: str) -> Iterator[tuple[Path, bool]]:
    """Files that may be its manifest, the nearest first, and whether they lie above the release."""
    places = dict.fromkeys([Path(os.path.abspath(folder)), Path(os.path.realpath(folder))])
    seen: set[Path] = set()
    for place in places:
        for parent in list(place.parents)[:_UP]:
            for file in _manifests_in(parent):
                if file not in seen:
                    seen.add(file)
                    yield file, True
        for file in sorted(_listed(place.parent, f"*/{MANIFEST_NAME}"))[:_MOST]:
            if file not in seen:
                seen.add(file)
                yield file, False


def _manifests_in(folder: Path) -> list[Path]:
    """``heatwright.toml`` first, then other files that look like manifests."""
    others = [f for f in sorted(_listed(folder, "*.toml"))[:_MOST] if f.name != MANIFEST_NAME and _is_manifest(f)]
    first = folder / MANIFEST_NAME
    return [*([first] if first.is_file() else []), *others]


def _listed(folder: Path, pattern: str) -> list[Path]:
    try:
        return [file for file in folder.glob(pattern) if file.is_file()]
    except OSError:  # a folder above that may not be read
        return []


def _is_manifest(file: Path) -> bool:
    try:
        return file.stat().st_size < 10_000_000 and looks_like_manifest(file.read_text("utf-8", "replace"))
    except OSError:
        return False


def _same_place(one: str, other: str) -> bool:
    return os.path.realpath(one) == os.path.realpath(other)
