"""Reading a TOML file strictly: every key is known, every value is of its kind, and every error has its line."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Collection, Mapping
from dataclasses import dataclass, replace
from difflib import get_close_matches
from math import isfinite
from typing import Any, NoReturn

from heatwright.findings import Finding, Refused, refuse
from heatwright.reading.toml_lines import KeyPath, TomlLines, set_twice

CODE = "molecule-file-wrong"


@dataclass(frozen=True, slots=True)
class Block:
    """One table of a TOML file: its name, its keys, and the lines of the whole file.

    path : names of the tables that it is in, and its own.   file : opens the place of an error where it is known.
    code : of the findings about it.
    """

    name: str
    values: Mapping[str, Any]
    lines: TomlLines
    path: KeyPath = ()
    file: str = ""
    code: str = CODE

    def __contains__(self, key: str) -> bool:
        return key in self.values

    def line(self, *keys: str | int) -> int:
        """The line of a key, or of an item of its list; of the nearest table around it where it is not there."""
        lines = self.lines.of
        path: KeyPath = (*self.path, *keys)
        while path and path not in lines:
            path = path[:-1]
        return lines.get(path, 1)

    def where(self, *keys: str | int) -> str:
        """``FILE:LINE``, or ``line LINE`` where the caller names the file."""
        line = self.line(*keys)
        return f"{self.file}:{line}" if self.file else f"line {line}"

    def wrong(self, key: str, found: str, expected: str = "", action: str = "") -> NoReturn:
        """Raises Refused at the line of *key* (of the block when the key is not there)."""
        raise Refused([refuse(self.code, found, where=self.where(key), expected=expected, action=action)])

    def only(self, known: Collection[str]) -> None:
        """Refuses a key that is not known, with the nearest one that is."""
        for key in self.values:
            if key not in known:
                near = get_close_matches(key, known, 1, 0.5)
                action = f"Did you mean {near[0]}?" if near else ""
                inside = f" in [{self.name}]" if self.name else ""
                self.wrong(key, f"there is no key {key!r}{inside}", f"one of {', '.join(known)}", action)

    def block(self, key: str) -> Block:
        """A table inside this one; an empty one when it is not there."""
        name = f"{self.name}.{key}".lstrip(".")
        value = self.values.get(key, {})
        if not isinstance(value, dict):
            self.wrong(key, f"{name} is {shown(value)}", f"a table, [{name}]")
        return replace(self, name=name, values=value, path=(*self.path, key))

    def needs(self, *keys: str) -> None:
        """Refuses a block in which one of the keys is missing."""
        for key in keys:
            if key not in self.values:
                self.wrong(key, f"[{self.name}] has no {key}", f"the key {key}")

    def word(self, key: str, default: str = "") -> str:
        """A text on one line."""
        value = self.values.get(key, default)
        if not isinstance(value, str) or (key in self.values and not value.strip()):
            self.wrong(key, f"{key} is {shown(value)}", "a text in quotes")
        return " ".join(value.split())

    def whole(self, key: str, least: int | None = None) -> int | None:
        """A whole number, None when it is not there."""
        value = self.values.get(key)
        if value is None:
            return None
        if not isinstance(value, int) or isinstance(value, bool) or (least is not None and value < least):
            due = "a whole number" + (f" of at least {least}" if least is not None else "")
            self.wrong(key, f"{key} is {shown(value)}", due)
        return value

    def flag(self, key: str) -> bool | None:
        """true or false, None when it is not there."""
        value = self.values.get(key)
        if value is not None and not isinstance(value, bool):
            self.wrong(key, f"{key} is {shown(value)}", "true or false")
        return value

    def number(self, key: str, value: object, what: str = "") -> float:
        """A finite number that stands (somewhere) in the value of *key*."""
        if isinstance(value, bool) or not isinstance(value, int | float) or not _finite(value):
            self.wrong(key, f"{what or key} is {shown(value)}", "a finite number")
        return float(value)

    def items(self, key: str) -> list[Any]:
        """A list that is not empty."""
        value = self.values.get(key)
        if not isinstance(value, list) or not value:
            self.wrong(key, f"{key} is {shown(value)}", "a list in square brackets")
        return value


def _finite(value: float) -> bool:
    try:
        return isfinite(value)
    except OverflowError:  # a whole number beyond the largest float
        return False


def shown(value: object) -> str:
    """A value as the file could have written it, not too long."""
    words = {True: "true", False: "false"}.get(value) if isinstance(value, bool) else None
    text = words or ("missing" if value is None else str(value) if isinstance(value, int | float) else repr(value))
    return text if len(text) <= 60 else f"{text[:57]}..."


def parsed(text: str, file: str = "", code: str = CODE) -> Block:
    """The whole file as a block; raises Refused with the line where it is no TOML."""
    try:
        return Block("", tomllib.loads(text), TomlLines(text), (), file, code)
    except (ValueError, RecursionError) as error:
        raise Refused([_no_toml(text, file, code, error)]) from error


def _no_toml(text: str, file: str, code: str, error: Exception) -> Finding:
    def place(line: int) -> str:
        return f"{file}:{line}" if file else f"line {line}"

    for path, (first, again) in set_twice(text).items():
        name = ".".join(str(part) for part in path)
        found = f"{name} is set twice, the first time on line {first}"
        return refuse(code, found, where=place(again), expected="each key and table once")
    line = re.search(r"at line (\d+)", str(error))
    words = re.sub(r" \(at .*\)$", "", str(error)) or type(error).__name__
    where = place(int(line[1])) if line else file
    return refuse(code, f"this is no TOML ({words})", where=where, action="Correct that line.")


def line_of(text: str, block: str, key: str) -> int:
    """The line on which *key* of a block is set; that of the block's head when it is not, else 1.

    >>> line_of("[a]\\nx = 1\\n[b]\\nx = 2", "b", "x"), line_of("[a]\\n[b]\\n", "b", "y"), line_of("z = 1", "", "y")
    (4, 2, 1)
    """
    return Block(block, {}, TomlLines(text), tuple(part for part in block.split(".") if part)).line(key)
