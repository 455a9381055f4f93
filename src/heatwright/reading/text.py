"""The text of an output, or a part of it, with cheap searching: ``str.find`` for rare anchors, no regex passes."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass

_NUMBER = re.compile(r"[-+]?(?:\d+\.?\d*|\.\d+)(?:[eEdD][-+]?\d+)?")
_LONG_EXPONENT = re.compile(r"([-+]?\d*\.\d+)([-+]\d{3})")  # Fortran drops the letter before three digits
LONGEST_LINE = 2048
"""Characters looked at on either side of an anchor: a file without line ends must not be copied for each of them."""
_BLANKS = re.compile(r"\s*")
_NO_NUMBER = re.compile(r"[-+]?(?:nan|inf|infinity)|\*{3,}", re.IGNORECASE)


def number(token: str) -> float | None:
    """The number a token stands for, Fortran exponents included; None when it is none.

    ``NaN``, ``Infinity`` and the asterisks of a number that did not fit its field are NaN: something was meant to stand
    there.

    >>> number("-0.75002282127453D+02"), number("1.5-101"), number("*****"), number("H1")
    (-75.002282127453, 1.5e-101, nan, None)
    """
    if _NUMBER.fullmatch(token):
        return float(token.replace("D", "E").replace("d", "e"))
    if long := _LONG_EXPONENT.fullmatch(token):
        return float(f"{long[1]}e{long[2]}")
    return float("nan") if _NO_NUMBER.fullmatch(token) else None


def numbers(line: str) -> list[float]:
    """All numbers of a line that stand alone between blanks, ``=``, ``:``, ``,`` or brackets.

    >>> numbers("Zero-Point correction to Energy  =   12.444 kcal/mol  (  0.019831 au)")
    [12.444, 0.019831]
    """
    values = (number(token) for token in re.split(r"[\s=:,()\[\]]+", line))
    return [value for value in values if value is not None]


@dataclass(frozen=True, slots=True)
class Text:
    """The part [start, end) of a whole output; positions are those of the whole, so line numbers stay true."""

    whole: str
    start: int
    end: int

    @classmethod
    def of(cls, whole: str) -> Text:
        """The whole as one part."""
        return cls(whole, 0, len(whole))

    def part(self, start: int, end: int | None = None) -> Text:
        """A smaller part; positions as in the whole."""
        return Text(self.whole, max(start, self.start), self.end if end is None else min(end, self.end))

    def __str__(self) -> str:
        return self.whole[self.start : self.end]

    def __contains__(self, anchor: str) -> bool:
        return self.find(anchor) >= 0

    def find(self, anchor: str, after: int = 0) -> int:
        """Position of the first *anchor* at or after a position, or -1."""
        return self.whole.find(anchor, max(after, self.start), self.end)

    def rfind(self, anchor: str, before: int | None = None) -> int:
        """Position of the last *anchor* that ends before a position, or -1."""
        return self.whole.rfind(anchor, self.start, self.end if before is None else min(before, self.end))

    def spots(self, anchor: str) -> list[int]:
        """Positions of every *anchor*."""
        found: list[int] = []
        spot = self.find(anchor)
        while spot >= 0:
            found.append(spot)
            spot = self.find(anchor, spot + len(anchor))
        return found

    def count(self, anchor: str) -> int:
        """How often *anchor* occurs."""
        return self.whole.count(anchor, self.start, self.end)

    def line(self, spot: int) -> str:
        """The line a position lies in."""
        return self.whole[self._line_start(spot) : self._line_end(spot)]

    def _line_start(self, spot: int) -> int:
        """Where the line of a position starts, at most :data:`LONGEST_LINE` before it."""
        earliest = max(spot - LONGEST_LINE, 0)
        found = self.whole.rfind("\n", earliest, spot) + 1
        return found if found else earliest

    def _line_end(self, spot: int) -> int:
        """Where the line of a position ends, at most :data:`LONGEST_LINE` after it."""
        latest = min(spot + LONGEST_LINE, len(self.whole))
        found = self.whole.find("\n", spot, latest)
        return found if found >= 0 else latest

    def lines(self, spot: int) -> Iterator[str]:
        """The lines from the one a position lies in to the end of the part, without one that the file cuts off."""
        first = max(self._line_start(spot), self.start)
        while first < self.end:
            last = self.whole.find("\n", first, self.end)
            if last < 0 and self.end >= len(self.whole):
                return
            last = self.end if last < 0 else last
            yield self.whole[first:last]
            first = last + 1

    def line_number(self, spot: int) -> int:
        """Number of the line a position lies in, counted from 1 in the whole."""
        return self.whole.count("\n", 0, spot) + 1

    def where(self, spot: int) -> str:
        """``line 1234``, as findings say it."""
        return f"line {self.line_number(spot)}"

    def rest(self, spot: int, anchor: str) -> str:
        """What follows *anchor* (found at *spot*) on its line."""
        first = spot + len(anchor)
        return self.whole[first : self._line_end(first)]

    def rest_of_last(self, anchor: str) -> str:
        """What follows the last *anchor* on its line, stripped; empty when it is not there."""
        spot = self.rfind(anchor)
        return self.rest(spot, anchor).strip() if spot >= 0 else ""

    def rest_of_first(self, anchor: str) -> str:
        """What follows the first *anchor* on its line, stripped; empty when it is not there."""
        spot = self.find(anchor)
        return self.rest(spot, anchor).strip() if spot >= 0 else ""

    def number_after(self, anchor: str, *, last: bool = True) -> float | None:
        """The first number that follows the last (or first) *anchor* on its line."""
        found = numbers(self.rest_of_last(anchor) if last else self.rest_of_first(anchor))
        return found[0] if found else None

    @property
    def is_last(self) -> bool:
        """Whether nothing but blanks and line ends follows in the whole."""
        match = _BLANKS.match(self.whole, min(self.end, len(self.whole)))
        return match is not None and match.end() == len(self.whole)

    @property
    def last_line(self) -> int:
        """Number of the last line with anything on it."""
        return self.whole.count("\n", 0, len(self.whole.rstrip())) + 1
