"""The release on disk: a folder that is switched as a whole, so that it is always the old or the new one.

The new folder is written and synced beside the old one (``.NAME.new``), and then the two change places in one step of
the file system (``renameat2`` with ``RENAME_EXCHANGE`` on Linux, ``renamex_np`` on macOS).  Whoever reads the folder,
at whatever moment, and whenever the machine dies, sees one whole release; to version control it is the same folder
with other files in it.  On file systems that cannot exchange two folders the old one is renamed away and the new one
renamed into its place: between the two renames, a matter of microseconds, there is no folder of that name, and the next
build finishes what was begun.  Other files in the folder, such as a README, come along.
"""

from __future__ import annotations

import errno
import os
import shutil
import sys
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from typing import Final

from heatwright.findings import Refused, refuse

DAT_NAME: Final = "thermo.dat"
YAML_NAME: Final = "thermo.yaml"


def read_release(folder: str, names: tuple[str, ...]) -> dict[str, bytes]:
    """The files of a release that are there, by name.  Raises Refused when one is there and cannot be read."""
    found = {}
    for name in names:
        path = os.path.join(folder, name)
        try:
            with open(path, "rb") as stream:
                found[name] = stream.read()
        except (FileNotFoundError, NotADirectoryError):
            continue
        except OSError as error:
            raise _unfit(path, error.strerror or str(error)) from error
    return found


def check_folder(folder: str, root: str) -> None:
    """Raises Refused when *folder* cannot be switched as a whole: it is no folder, holds folders, or the manifest."""
    real = os.path.realpath(folder)
    if os.path.commonpath([real, os.path.realpath(root)]) == real:
        raise _unfit(folder, "the manifest lies in it", "Give the release a folder of its own.")
    if not os.path.lexists(real):
        return
    if not os.path.isdir(real):
        raise _unfit(folder, "it is not a folder")
    with os.scandir(real) as entries:
        inner = sorted(entry.name for entry in entries if entry.is_dir(follow_symlinks=False))
    if inner:
        raise _unfit(folder, f"it holds the folder {inner[0]}", "Give the release a folder of its own.")


def switch(folder: str, files: Mapping[str, bytes]) -> None:
    """Put a release into *folder*: these files, and those others that are in it already.

    To be called under :func:`locked`, after :func:`recover`.  Raises Refused when something cannot be written; what was
    in the folder before is then still there.
    """
    real = os.path.realpath(folder)
    new, old = _beside(real)
    try:
        os.makedirs(os.path.dirname(real), exist_ok=True)
        os.mkdir(new)
        for name, data in files.items():
            _write(os.path.join(new, name), data)
        if os.path.isdir(real):
            _bring_along(real, new, files)
            shutil.copymode(real, new)
        _sync(new)
        _change_places(real, new, old)
        _sync(os.path.dirname(real))
    except OSError as error:
        if os.path.isdir(real):
            shutil.rmtree(new, ignore_errors=True)
        raise _unfit(folder, error.strerror or str(error)) from error
    shutil.rmtree(new, ignore_errors=True)
    shutil.rmtree(old, ignore_errors=True)


def recover(folder: str) -> None:
    """Finish or clear away what a build that died left beside the release.  To be called under :func:`locked`."""
    real = os.path.realpath(folder)
    new, old = _beside(real)
    if os.path.isdir(old) and not os.path.lexists(real):
        # it died between two renames; the new one was whole before the first of them
        os.rename(new if os.path.isdir(new) else old, real)
    shutil.rmtree(new, ignore_errors=True)
    shutil.rmtree(old, ignore_errors=True)


@contextmanager
def locked(folder: str, waiting: Callable[[], None]) -> Iterator[None]:
    """One build at a time for one release; *waiting* is called when another one is at work.

    The lock lies on the folder that holds the release and goes with the process, however it ends.  Where the system
    has no such locks (Windows), builds of one release must not run at the same time.
    """
    try:
        import fcntl
    except ImportError:
        yield
        return
    parent = os.path.dirname(os.path.realpath(folder))
    try:
        os.makedirs(parent, exist_ok=True)
        handle = os.open(parent, os.O_RDONLY)
    except OSError as error:
        raise _unfit(folder, error.strerror or str(error)) from error
    try:
        try:
            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            waiting()
            fcntl.flock(handle, fcntl.LOCK_EX)
        yield
    finally:
        os.close(handle)


def _beside(real: str) -> tuple[str, str]:
    parent, name = os.path.split(real)
    return os.path.join(parent, f".{name}.new"), os.path.join(parent, f".{name}.old")


def _write(path: str, data: bytes) -> None:
    with open(path, "wb") as stream:
        stream.write(data)
        stream.flush()
        os.fsync(stream.fileno())


def _bring_along(real: str, new: str, files: Mapping[str, bytes]) -> None:
    """The other files of the folder, the same on disk where it can be."""
    with os.scandir(real) as entries:
        others = [entry for entry in entries if entry.name not in files and not entry.is_dir(follow_symlinks=False)]
    for entry in others:
        target = os.path.join(new, entry.name)
        try:
            os.link(entry.path, target, follow_symlinks=False)
        except (OSError, NotImplementedError):
            shutil.copy2(entry.path, target, follow_symlinks=False)


def _sync(folder: str) -> None:
    try:
        handle = os.open(folder, os.O_RDONLY)
    except OSError:
        return  # a folder cannot be opened for this everywhere
    try:
        os.fsync(handle)
    except OSError as error:
        if error.errno not in (errno.EINVAL, errno.ENOTSUP):
            raise
    finally:
        os.close(handle)


def _change_places(real: str, new: str, old: str) -> None:
    if not os.path.lexists(real):
        os.rename(new, real)
    elif not _exchanged(real, new):
        os.rename(real, old)
        os.rename(new, real)


_AT_FDCWD: Final = -100
_EXCHANGE: Final = 2
_UNKNOWN: Final = (errno.ENOSYS, errno.EINVAL, errno.ENOTSUP, errno.EOPNOTSUPP)


def _exchanged(one: str, other: str) -> bool:
    """Let two folders change places in one step; False where the system or the file system cannot."""
    import ctypes

    a, b = os.fsencode(one), os.fsencode(other)
    libc = ctypes.CDLL(None, use_errno=True) if os.name == "posix" else None
    if sys.platform == "darwin" and hasattr(libc, "renamex_np"):
        done = libc.renamex_np(a, b, _EXCHANGE)
    elif libc is not None and hasattr(libc, "renameat2"):
        done = libc.renameat2(_AT_FDCWD, a, _AT_FDCWD, b, _EXCHANGE)
    else:
        return False
    if done == 0:
        return True
    code = ctypes.get_errno()
    if code in _UNKNOWN:
        return False
    raise OSError(code, os.strerror(code), one)


def _unfit(folder: str, found: str, action: str = "What was there before is still there.") -> Refused:
    words = f"the release cannot be written ({found})"
    return Refused([refuse("target-unwritable", words, where=folder, action=action)])
