"""On which line a TOML file sets each of its keys; the standard library's reader does not say."""

from __future__ import annotations

import re
import tomllib
from contextlib import suppress
from functools import cached_property
from typing import Final

KeyPath = tuple[str | int, ...]
"""Names of tables and keys from the top down; an item of a list has its index."""

_BLANK: Final = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_SPACE: Final = re.compile(r"[ \t]*")
_BARE_KEY: Final = re.compile(r"[A-Za-z0-9_-]+")
_TEXT: Final = re.compile(r'"""(?:[^\\]|\\.)*?"{3,5}' r"|'''.*?'{3,5}" r'|"(?:[^"\\\n]|\\.)*"' r"|'[^'\n]*'", re.DOTALL)
_WORD: Final = re.compile(r"\d{4}-\d\d-\d\d \d\d:[^,\]}\s#]*|[^,\]}\s#]+")


class _Stuck(Exception):
    """The text is no TOML from here on."""


class _Scanner:
    """Walks once through a text that is TOML (or is until an error), and notes where keys and tables stand."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.at = 0
        self.lines: dict[KeyPath, int] = {}
        self.twice: dict[KeyPath, tuple[int, int]] = {}
        self._line, self._counted = 1, 0
        self._arrays: dict[KeyPath, int] = {}
        self._heads: dict[KeyPath, int] = {}

    def run(self) -> None:
        here: KeyPath = ()
        while self._skip(_BLANK) or self.at < len(self.text):
            if self.at >= len(self.text):
                return
            if self.text[self.at] == "[":
                here = self._head()
            else:
                self._pair(here)

    def line(self) -> int:
        self._line += self.text.count("\n", self._counted, self.at)
        self._counted = self.at
        return self._line

    def _skip(self, pattern: re.Pattern[str]) -> str:
        found = pattern.match(self.text, self.at)
        if found is None:
            raise _Stuck
        self.at = found.end()
        return found[0]

    def _due(self, mark: str) -> None:
        if not self.text.startswith(mark, self.at):
            raise _Stuck
        self.at += len(mark)

    def _head(self) -> KeyPath:
        """``[a.b]`` or ``[[a.b]]``; the path of the table that it opens."""
        line = self.line()
        several = self.text.startswith("[[", self.at)
        self._due("[[" if several else "[")
        keys = self._keys()
        self._due("]]" if several else "]")
        path: KeyPath = ()
        for position, key in enumerate(keys, start=1):
            path = (*path, key)
            self.lines.setdefault(path, line)
            if position < len(keys) and path in self._arrays:
                path = (*path, self._arrays[path] - 1)
        if several:
            self._arrays[path] = self._arrays.get(path, 0) + 1
            path = (*path, self._arrays[path] - 1)
        elif path in self._heads:
            self.twice.setdefault(path, (self._heads[path], line))
        self._heads.setdefault(path, line)
        self.lines[path] = line
        return path

    def _keys(self) -> list[str]:
        keys = []
        while True:
            self._skip(_SPACE)
            if self.text[self.at : self.at + 1] in ('"', "'"):
                keys.append(_plain(self._skip(_TEXT)))
            else:
                keys.append(self._skip(_BARE_KEY))
            self._skip(_SPACE)
            if not self.text.startswith(".", self.at):
                return keys
            self.at += 1

    def _pair(self, here: KeyPath) -> None:
        line = self.line()
        path = here
        for key in self._keys():
            path = (*path, key)
            self.lines.setdefault(path, line)
        if self.lines[path] != line or path in self._heads:
            self.twice.setdefault(path, (self._heads.get(path, self.lines[path]), line))
        self._due("=")
        self._skip(_SPACE)
        self._value(path)

    def _value(self, path: KeyPath) -> None:
        mark = self.text[self.at : self.at + 1]
        if mark == "[":
            self._items(path)
        elif mark == "{":
            self.at += 1
            while not self._closed("}"):
                self._pair(path)
        else:
            self._skip(_TEXT if mark in ('"', "'") else _WORD)

    def _items(self, path: KeyPath) -> None:
        self.at += 1
        index = 0
        while not self._closed("]"):
            self.lines[*path, index] = self.line()
            self._value((*path, index))
            index += 1

    def _closed(self, mark: str) -> bool:
        """Whether the list or table ends here; commas and what is blank are passed."""
        self._skip(_BLANK)
        while self.text.startswith(",", self.at):
            self.at += 1
            self._skip(_BLANK)
        if self.text.startswith(mark, self.at):
            self.at += 1
            return True
        return False


def _plain(quoted: str) -> str:
    """A quoted key without its quotes and escapes."""
    try:
        return str(tomllib.loads(f"key = {quoted}")["key"])
    except ValueError as error:
        raise _Stuck from error


class TomlLines:
    """The lines of a text, found when they are first asked for."""

    def __init__(self, text: str) -> None:
        self.text = text

    @cached_property
    def of(self) -> dict[KeyPath, int]:
        """The line of each key, table and item of a list; see :func:`key_lines`."""
        return key_lines(self.text)


def _scanned(text: str) -> _Scanner:
    scanner = _Scanner(text)
    with suppress(_Stuck, RecursionError):  # what was seen so far is what can be said
        scanner.run()
    return scanner


def key_lines(text: str) -> dict[KeyPath, int]:
    """The line of each key, table and item of a list, counted from 1; a table's is that of its (last) head.

    >>> key_lines('[a]\\nx = 1\\n[[b]]\\n[[b]]\\ny = ["p",\\n "q"]')[("b", 1, "y", 1)]
    6
    """
    return _scanned(text).lines


def set_twice(text: str) -> dict[KeyPath, tuple[int, int]]:
    """Keys and tables that stand there twice, with both lines.

    >>> set_twice("[a]\\n[b]\\n[a]")
    {('a',): (1, 3)}
    """
    return _scanned(text).twice
