"""The store: what was read and computed, by content, in one SQLite file.

It may be deleted at any time and is never the only copy of anything.  Whatever happens to it, the work goes on: a file
that is damaged or of another version is set aside under another name, and where nothing can be written (a full disk, a
folder that must not be written to) things are remembered in memory until the end of the run.  Both are said.

Keys are ``KIND:HASH``; the hash covers everything that decides about the value, so a value never gets stale.  Each
value has a checksum, which SQLite itself does not keep: one that was damaged on the disk is as good as missing.
"""

from __future__ import annotations

import os
import sqlite3
import time
import zlib
from collections.abc import Callable, Iterable, Mapping, Sequence
from contextlib import suppress
from typing import Any, Final, TypeVar

from heatwright.findings import Finding, warn

STORE_VERSION: Final = 3
"""The layout of the file (``PRAGMA user_version``); a file of another one is set aside."""
_APPLICATION: Final = 0x48574B31
_WAIT_S: Final = 60.0
_AT_ONCE: Final = 400
"""Keys asked for in one statement."""
_HOLD_S: Final = 0.5
_HOLD: Final = 64
"""Values are written after this time, or when there are so many: what a killed run can lose."""

T = TypeVar("T")
Say = Callable[[Finding], None]


class Store:
    """An open store.  Use it as a context manager, so that the last values are written."""

    def __init__(self, path: str, say: Say, *, read_only: bool = False) -> None:
        """Open the file at *path*, which is made when it is missing; *say* hears of troubles.

        read_only : nothing is written, not even a journal beside the file, and a missing file stays missing.
        """
        self.path = path
        self._say = say
        self._read_only = read_only
        self._memory: dict[str, bytes] = {}
        self._waiting: dict[str, bytes] = {}
        self._since = time.monotonic()
        self._connection: sqlite3.Connection | None = None
        if not read_only or _is_readable(path):
            self._open()

    def __enter__(self) -> Store:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def get(self, keys: Iterable[str]) -> dict[str, bytes]:
        """The values that are there, by key."""
        wanted = list(dict.fromkeys(keys))
        found = {key: value for key in wanted if (value := self._waiting.get(key, self._memory.get(key))) is not None}
        missing = [key for key in wanted if key not in found]
        for start in range(0, len(missing), _AT_ONCE):
            rows = self._rows("key, value", missing[start : start + _AT_ONCE])
            found.update({key: sealed[_SEAL:] for key, sealed in rows if _is_whole(key, sealed)})
        return found

    def has(self, keys: Iterable[str]) -> set[str]:
        """Those of the keys that have a value."""
        wanted = list(dict.fromkeys(keys))
        found = {key for key in wanted if key in self._waiting or key in self._memory}
        missing = [key for key in wanted if key not in found]
        for start in range(0, len(missing), _AT_ONCE):
            found.update(key for (key,) in self._rows("key", missing[start : start + _AT_ONCE]))
        return found

    def _rows(self, columns: str, keys: list[str]) -> list[Any]:
        statement = f"SELECT {columns} FROM kept WHERE key IN ({','.join('?' * len(keys))})"
        return self._guarded(lambda c: c.execute(statement, keys).fetchall()) or []

    def put(self, values: Mapping[str, bytes]) -> None:
        """Keep values; they are written soon, and at the latest when the store is closed."""
        if self._connection is None or self._read_only:
            self._memory.update(values)
            return
        self._waiting.update(values)
        if len(self._waiting) >= _HOLD or time.monotonic() - self._since > _HOLD_S:
            self.flush()

    def drop(self, key: str) -> None:
        """Forget a value that turned out to be damaged."""
        self._waiting.pop(key, None)
        self._memory.pop(key, None)
        if not self._read_only:
            self._guarded(lambda c: c.execute("DELETE FROM kept WHERE key = ?", (key,)))

    def drop_all(self, keys: Iterable[str]) -> None:
        """Forget values that have served, in one transaction."""
        rows = [(key,) for key in keys]
        if rows and not self._read_only:
            self._guarded(lambda c: _change(c, "DELETE FROM kept WHERE key = ?", rows))

    def drop_others(self, kind: str, key: str) -> None:
        """Forget all values of a kind (``lock``) but one that may still be of use."""
        if self._read_only:
            return
        ends = (f"{kind}:", f"{kind};", key)  # a semicolon comes right after a colon
        self._guarded(lambda c: c.execute("DELETE FROM kept WHERE key >= ? AND key < ? AND key != ?", ends))

    def flush(self) -> None:
        """Write what is waiting, in one transaction."""
        self._since = time.monotonic()
        rows = list(self._waiting.items())
        if not rows:
            return
        self._memory.update(rows)  # so that they are not lost when the file turns out to be unusable
        sealed = [(key, _sealed(key, value)) for key, value in rows]
        done = self._guarded(lambda c: _change(c, "INSERT OR REPLACE INTO kept (key, value) VALUES (?, ?)", sealed))
        self._waiting.clear()
        if done is not None:
            for key, _ in rows:
                del self._memory[key]

    def close(self) -> None:
        """Write what is waiting and close the file."""
        self.flush()
        if self._connection is not None:
            with suppress(sqlite3.Error):
                self._connection.close()
            self._connection = None

    def _open(self) -> None:
        """Connect and check the file; set it aside once when it is not a sound store of this version."""
        for attempt in (1, 2):
            try:
                self._connection = _connected(self.path, self._read_only)
                return
            except _Unfit as error:
                if attempt == 2 or self._read_only or not self._set_aside(str(error)):
                    return
            except (sqlite3.Error, OSError) as error:
                self._off(error)
                return

    def _guarded(self, work: Callable[[sqlite3.Connection], T]) -> T | None:
        """What *work* gives; None when the store is off or fails now, which is said and dealt with."""
        for attempt in (1, 2):
            if self._connection is None:
                return None
            try:
                return work(self._connection)
            except sqlite3.Error as error:
                if isinstance(error, sqlite3.OperationalError) and "malformed" not in str(error):
                    self._off(error)
                    return None
                self._disconnect()
                if attempt == 2 or self._read_only or not self._set_aside(str(error)):
                    return None
                self._open()
        return None

    def _set_aside(self, why: str) -> bool:
        """Rename the file (with its journal files) and say so; False, and the store is off, when that fails."""
        aside = _free_name(self.path)
        try:
            os.rename(self.path, aside)
            for ending in ("-wal", "-shm"):
                with suppress(FileNotFoundError):
                    os.rename(self.path + ending, aside + ending)
        except OSError as error:
            self._off(error)
            return False
        action = f"It was set aside as {os.path.basename(aside)} and is made anew; delete it when you like."
        self._say(warn("store-set-aside", f"the store cannot be used ({why})", where=self.path, action=action))
        return True

    def _off(self, error: Exception) -> None:
        self._disconnect()
        action = "The build goes on without it; what was read is not remembered for the next one."
        self._say(warn("store-off", f"the store cannot be read or written ({error})", where=self.path, action=action))

    def _disconnect(self) -> None:
        if self._connection is not None:
            with suppress(sqlite3.Error):
                self._connection.close()
        self._connection = None


def _is_readable(path: str) -> bool:
    """Whether the file can be read as it is: a log without its index is that of a build that was killed, and reading
    it would write the index."""
    return os.path.exists(path) and (os.path.exists(f"{path}-shm") or not os.path.exists(f"{path}-wal"))


class _Unfit(Exception):
    """The file is no sound store of this version; the words say why."""


def _connected(path: str, read_only: bool) -> sqlite3.Connection:
    """An open connection to a sound store; raises _Unfit, sqlite3.Error or OSError."""
    if not read_only:
        os.makedirs(os.path.dirname(path) or ".", exist_ok=True)
    how = _way_to_read(path) if read_only else "mode=rwc"
    connection = sqlite3.connect(f"file:{_quoted(path)}?{how}", uri=True, timeout=_WAIT_S, isolation_level=None)
    try:
        _check(connection, read_only)
    except sqlite3.OperationalError:
        connection.close()
        raise
    except sqlite3.DatabaseError as error:
        connection.close()
        raise _Unfit(str(error)) from error
    except BaseException:
        connection.close()
        raise
    return connection


def _way_to_read(path: str) -> str:
    """One that could write clears its journal files away at the end (it is told not to write anything else); where
    nothing can be written no journal can be opened either, and the file is read as it stands."""
    may_write = os.access(path, os.W_OK) and os.access(os.path.dirname(path) or ".", os.W_OK)
    return "mode=rw" if may_write else "mode=ro&immutable=1"


def _check(connection: sqlite3.Connection, read_only: bool) -> None:
    """Raises _Unfit or sqlite3.Error for a file that is not a store of this version; a new file becomes one."""
    found = connection.execute("PRAGMA user_version").fetchone()[0]
    tables = {name for (name,) in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")}
    if not tables and not found and not read_only:
        _use_wal(connection)
        connection.execute("BEGIN IMMEDIATE")  # another build may be doing the same
        # with rows, so that keys are found in an index of keys alone: among values of megabytes they are slow to find
        connection.execute("CREATE TABLE IF NOT EXISTS kept (key TEXT PRIMARY KEY, value BLOB NOT NULL)")
        connection.execute(f"PRAGMA application_id = {_APPLICATION}")
        connection.execute(f"PRAGMA user_version = {STORE_VERSION}")
        connection.execute("COMMIT")
    elif connection.execute("PRAGMA application_id").fetchone()[0] != _APPLICATION:
        raise _Unfit("it is no store of heatwright")
    elif found != STORE_VERSION:
        raise _Unfit(f"it is of version {found}, and this heatwright uses version {STORE_VERSION}")
    connection.execute("SELECT count(*) FROM (SELECT key FROM kept LIMIT 1)")
    if read_only:
        connection.execute("PRAGMA query_only = ON")
    # with WAL a power failure may cost the last values, never the file
    connection.execute("PRAGMA synchronous = NORMAL")


def _use_wal(connection: sqlite3.Connection) -> None:
    """Turn the write-ahead log on; SQLite does not wait by itself while another process does the same."""
    end = time.monotonic() + _WAIT_S
    while True:
        try:
            connection.execute("PRAGMA journal_mode = WAL")
            return
        except sqlite3.OperationalError as error:
            if "locked" not in str(error) or time.monotonic() > end:
                raise
            time.sleep(0.02)


_SEAL: Final = 4


def _sealed(key: str, value: bytes) -> bytes:
    return zlib.crc32(value, zlib.crc32(key.encode())).to_bytes(_SEAL, "little") + value


def _is_whole(key: str, sealed: object) -> bool:
    """Whether this is what was once put under the key."""
    return isinstance(sealed, bytes) and sealed == _sealed(key, sealed[_SEAL:])


def _change(connection: sqlite3.Connection, statement: str, rows: Sequence[tuple[Any, ...]]) -> bool:
    connection.execute("BEGIN IMMEDIATE")
    try:
        connection.executemany(statement, rows)
        connection.execute("COMMIT")
    except sqlite3.Error:
        with suppress(sqlite3.Error):
            connection.execute("ROLLBACK")
        raise
    return True


def _quoted(path: str) -> str:
    return path.replace("%", "%25").replace("?", "%3f").replace("#", "%23")


def _free_name(path: str) -> str:
    """``PATH.aside``, or ``PATH.aside.2`` and so on when that is taken."""
    number, name = 1, f"{path}.aside"
    while os.path.exists(name):
        number += 1
        name = f"{path}.aside.{number}"
    return name
