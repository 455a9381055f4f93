"""What the reader of YAML gives: scalars, mappings and sequences, each with its place in the text."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import NoReturn

from heatwright.findings import Refused, refuse


@dataclass(frozen=True, slots=True)
class Scalar:
    """A text as YAML gives it, before anybody asks whether it is a number; ``start`` and ``end`` are offsets."""

    text: str
    quoted: bool
    start: int
    end: int


@dataclass(frozen=True, slots=True)
class Mapping:
    """Values by key in the order of the file; ``keys`` are the key scalars with their places."""

    items: dict[str, Node]
    keys: dict[str, Scalar]
    start: int
    end: int
    flow: bool = False


@dataclass(frozen=True, slots=True)
class Sequence:
    """Values in order; ``marks`` are the offsets of the dashes of a block sequence."""

    items: tuple[Node, ...]
    start: int
    end: int
    flow: bool = False
    marks: tuple[int, ...] = ()


Node = Scalar | Mapping | Sequence


@dataclass(frozen=True, slots=True)
class Text:
    """A text with the offsets at which its lines start."""

    text: str
    starts: tuple[int, ...] = field(default=())

    @staticmethod
    def of(text: str) -> Text:
        """*text*, whose lines end with ``\\n``, with its line starts."""
        return Text(text, tuple(_line_starts(text)))

    def place(self, offset: int) -> tuple[int, int]:
        """Line and column of an offset, both counted from 1.

        >>> Text.of("a: 1\\nb: 2\\n").place(5)
        (2, 1)
        """
        line = bisect_right(self.starts, offset)
        return line, offset - self.starts[line - 1] + 1

    def line(self, number: int) -> str:
        """The text of a line (counted from 1) without its end."""
        start = self.starts[number - 1]
        end = self.text.find("\n", start)
        return self.text[start : len(self.text) if end < 0 else end]

    def where(self, offset: int) -> str:
        """A finding's place: ``line 12:5``."""
        line, column = self.place(offset)
        return f"line {line}:{column}"

    def caret(self, offset: int, length: int = 1) -> str:
        """The line of an offset with carets under what is meant."""
        line, column = self.place(offset)
        return with_caret(self.line(line), column, length)

    def refuse(self, code: str, offset: int, found: str, *, expected: str = "", action: str = "") -> NoReturn:
        """Raises Refused at an offset, with the line and a caret."""
        finding = refuse(code, found, where=self.where(offset), expected=expected, action=action)
        raise Refused([finding.shown(self.caret(offset))])


def with_caret(line: str, column: int, length: int = 1) -> str:
    """*line* and below it ``^`` under *length* columns from *column* (counted from 1); tabs are shown as ``→``.

    >>> print(with_caret("CH4   C  1", 7, 2))
    CH4   C  1
          ^^
    """
    shown = "".join("→" if c == "\t" else c if c.isprintable() else "?" for c in line)
    # a long line is cut around the place
    first = max(0, column - 100) if len(shown) > 140 else 0
    return f"{shown[first : first + 140]}\n{' ' * (column - 1 - first)}{'^' * max(length, 1)}"


def _line_starts(text: str) -> Iterator[int]:
    yield 0
    at = text.find("\n")
    while at >= 0 and at + 1 < len(text):
        yield at + 1
        at = text.find("\n", at + 1)
