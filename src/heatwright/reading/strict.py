"""Reading a TOML file strictly: every key is known, every value is of its kind, and every error has its line."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Collection, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from math import isfinite
from typing import Any, NoReturn

from heatwright.findings import Refused, refuse

CODE = "molecule-file-wrong"


@dataclass(frozen=True, slots=True)
class Block:
    """One table of a TOML file: its name, its keys, and the text of the whole file for the line numbers."""

    name: str
    values: Mapping[str, Any]
    text: str

    def __contains__(self, key: str) -> bool:
        return key in self.values

    def wrong(self, key: str, found: str, expected: str = "", action: str = "") -> NoReturn:
        """Raises Refused at the line of *key* (of the block when the key is not there)."""
        where = f"line {line_of(self.text, self.name, key)}"
        raise Refused([refuse(CODE, found, where=where, expected=expected, action=action)])

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
            self.wrong(key, f"{name} is {_shown(value)}", f"a table, [{name}]")
        return Block(name, value, self.text)

    def needs(self, *keys: str) -> None:
        """Refuses a block in which one of the keys is missing."""
        for key in keys:
            if key not in self.values:
                self.wrong(key, f"[{self.name}] has no {key}", f"the key {key}")

    def word(self, key: str, default: str = "") -> str:
        """A text on one line."""
        value = self.values.get(key, default)
        if not isinstance(value, str) or (key in self.values and not value.strip()):
            self.wrong(key, f"{key} is {_shown(value)}", "a text in quotes")
        return " ".join(value.split())

    def whole(self, key: str, least: int | None = None) -> int | None:
        """A whole number, None when it is not there."""
        value = self.values.get(key)
        if value is None:
            return None
        if not isinstance(value, int) or isinstance(value, bool) or (least is not None and value < least):
            due = "a whole number" + (f" of at least {least}" if least is not None else "")
            self.wrong(key, f"{key} is {_shown(value)}", due)
        return value

    def flag(self, key: str) -> bool | None:
        """true or false, None when it is not there."""
        value = self.values.get(key)
        if value is not None and not isinstance(value, bool):
            self.wrong(key, f"{key} is {_shown(value)}", "true or false")
        return value

    def number(self, key: str, value: object, what: str = "") -> float:
        """A finite number that stands (somewhere) in the value of *key*."""
        if isinstance(value, bool) or not isinstance(value, int | float) or not _finite(value):
            self.wrong(key, f"{what or key} is {_shown(value)}", "a finite number")
        return float(value)

    def items(self, key: str) -> list[Any]:
        """A list that is not empty."""
        value = self.values.get(key)
        if not isinstance(value, list) or not value:
            self.wrong(key, f"{key} is {_shown(value)}", "a list in square brackets")
        return value


def _finite(value: float) -> bool:
    try:
        return isfinite(value)
    except OverflowError:  # a whole number beyond the largest float
        return False


def _shown(value: object) -> str:
    """A value as the file could have written it, not too long."""
    words = {True: "true", False: "false"}.get(value) if isinstance(value, bool) else None
    text = words or ("missing" if value is None else str(value) if isinstance(value, int | float) else repr(value))
    return text if len(text) <= 60 else f"{text[:57]}..."


def parsed(text: str) -> Block:
    """The whole file as a block; raises Refused with the line where it is no TOML."""
    try:
        return Block("", tomllib.loads(text), text)
    except (ValueError, RecursionError) as error:
        line = re.search(r"at line (\d+)", str(error))
        words = re.sub(r" \(at .*\)$", "", str(error)) or type(error).__name__
        where = f"line {line[1]}" if line else ""
        raise Refused([refuse(CODE, f"this is no TOML ({words})", where=where, action="Correct that line.")]) from error


def line_of(text: str, block: str, key: str) -> int:
    """The line on which *key* of a block is set; that of the block's head when it is not, else 1.

    >>> line_of("[a]\\nx = 1\\n[b]\\nx = 2", "b", "x"), line_of("[a]\\n[b]\\n", "b", "y"), line_of("z = 1", "", "y")
    (4, 2, 1)
    """
    here, head = "", 0
    for number, line in enumerate(text.splitlines(), start=1):
        if _HEAD.fullmatch(line):
            here = re.sub(r"[\s\[\]\"']|#.*", "", line)
            head = head or (number if here == block or (not block and here == key) else 0)
        elif here == block and re.match(rf"""\s*["']?{re.escape(key)}["']?\s*[.=]""", line):
            return number
    if not head and "." in block:  # a table written inline, on the line of its key
        return line_of(text, *block.rsplit(".", 1))
    return head or 1


_HEAD = re.compile(r"""\s*\[+\s*["'A-Za-z_][\w."' -]*\]+\s*(#.*)?""")
"""A line that opens a table; rows of a list in square brackets hold commas."""
