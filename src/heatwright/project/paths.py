"""Paths and globs that a manifest writes: where they lead, how they are shown, and whether they leave the project."""

from __future__ import annotations

import glob
import os
from collections.abc import Iterable
from dataclasses import dataclass, replace

from heatwright.findings import Refused, refuse
from heatwright.project.manifest_types import ProjectPath


@dataclass(frozen=True, slots=True)
class Here:
    """Where paths are written: in a file in *folder*, in the project in *root* (both absolute).

    confine : refuse what leads out of the root, symbolic links followed.
    """

    root: str
    folder: str
    confine: bool = False

    def inside(self, file: str) -> Here:
        """The same for what is written in another file."""
        return replace(self, folder=os.path.dirname(os.path.abspath(file)))

    def path(self, text: str, where: str) -> ProjectPath:
        """The path that *text* names; raises Refused, with *where* it is written, when it leaves a confined project."""
        if not text.isprintable():
            found = f"the path {text!r} holds characters that are not printable"
            raise Refused([refuse("manifest-wrong", found, where=where, expected="a plain path")])
        joined = os.path.join(self.folder, text)
        path = os.path.normpath(joined)
        if ".." in text.replace(os.sep, "/").split("/") and os.path.realpath(path) != os.path.realpath(joined):
            path = joined  # through a symbolic link the file system's way back is another one
        if self.confine:
            self._confined(text, path, where)
        return ProjectPath(self._shown(text), path)

    def matches(self, pattern: str, where: str) -> tuple[ProjectPath, ...]:
        """The files that a glob names, sorted by what is shown, each file once; possibly none."""
        if not pattern.isprintable():
            found = f"the glob {pattern!r} holds characters that are not printable"
            raise Refused([refuse("manifest-wrong", found, where=where, expected="a plain path with * and ?")])
        named = glob.glob(pattern, root_dir=self.folder, recursive=True)
        files = [text for text in named if os.path.isfile(os.path.join(self.folder, text))]
        once: dict[str, str] = {}
        real = RealPaths()
        for text in sorted(files, key=lambda text: (len(text), text)):
            once.setdefault(real(os.path.join(self.folder, text)), text)
        return tuple(sorted(self.path(text, where) for text in once.values()))

    def _shown(self, text: str) -> str:
        if self.folder == self.root and not os.path.isabs(text):
            return os.path.normpath(text).replace(os.sep, "/")
        relative = os.path.relpath(os.path.join(self.folder, text), self.root)
        leaves = relative.split(os.sep)[0] == os.pardir
        return (text if leaves and os.path.isabs(text) else relative).replace(os.sep, "/")

    def _confined(self, text: str, path: str, where: str) -> None:
        root = os.path.realpath(self.root)
        for place in (path, *_entries(path)):
            real = os.path.realpath(place)
            if real != root and os.path.commonpath([real, root]) != root:
                found = f"{text!r} leads to {real}, outside of the project"
                action = "Copy what is needed into the project, or build without --confine."
                raise Refused([refuse("outside-project", found, where=where, expected=f"inside {root}", action=action)])


class RealPaths:
    """As ``os.path.realpath``, which asks about every folder on the way to a file; this one asks once for a folder."""

    def __init__(self) -> None:
        self._folders: dict[str, str] = {}

    def __call__(self, path: str) -> str:
        folder, name = os.path.split(path)
        if name in ("", os.curdir, os.pardir) or os.path.islink(path):
            return os.path.realpath(path)
        if folder not in self._folders:
            self._folders[folder] = os.path.realpath(folder)
        return os.path.join(self._folders[folder], name)


def _entries(path: str) -> Iterable[str]:
    """What lies directly in a folder, which is read file by file; nothing for a file."""
    try:
        return sorted(entry.path for entry in os.scandir(path))
    except OSError:
        return ()


def is_glob(text: str) -> bool:
    """Whether a text is meant as a glob."""
    return glob.has_magic(text)
