"""Text as the lines that cclib reads: each of them for a block, only the telling ones for its main loop."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from heatwright.reading.text import Text

_LOOK_BACK = 10
"""Lines behind the present one that cclib's parsers may ask for."""


class Lines:
    """Pieces of text, one after the other, without a copy of them; used together with cclib's own ``FileWrapper``.

    The first loop over it, which is that of cclib itself, gets the first line (a checkpoint file's is like no other)
    and those that hold the pattern; the others are never cut out of the text.  A block takes its lines with ``next``
    or a loop of its own, and gets each of them.
    """

    def __init__(self, pieces: Sequence[Text], pattern: re.Pattern[str] | None) -> None:
        self.filenames = ["output"]
        self.files: list[str] = []  # what the other class would close
        self.size = sum(piece.end - piece.start for piece in pieces)
        self.pieces, self.pattern = pieces, pattern
        self.looped = False
        self.reset()

    def reset(self) -> None:
        """Back to the first piece."""
        self.rest, self.before = iter(self.pieces), 0
        self.whole, self.start, self.at, self.end = "", 0, 0, 0

    def opened(self) -> bool:
        """Whether there is more to read; goes on to the next piece when one is done."""
        while self.at >= self.end:
            piece = next(self.rest, None)
            if piece is None:
                return False
            self.before += self.end - self.start
            self.whole, self.start, self.at, self.end = piece.whole, piece.start, piece.start, piece.end
        return True

    def __next__(self) -> str:
        """The next line with its end, whatever it holds."""
        if self.at >= self.end and not self.opened():
            raise StopIteration
        first = self.at
        self.at = self.whole.find("\n", first, self.end) + 1 or self.end
        return self.whole[first : self.at]

    def __iter__(self) -> Iterator[str]:
        first_loop, self.looped = not self.looped, True
        return self.shown() if first_loop else self

    def shown(self) -> Iterator[str]:
        """The lines for the main loop."""
        if self.opened():
            yield next(self)
        while self.opened():
            if self.pattern is not None:
                found = self.pattern.search(self.whole, self.at, self.end)
                if found is None:
                    self.at = self.end
                    continue
                self.at = self.whole.rfind("\n", self.at, found.start()) + 1 or self.at
            yield next(self)

    @property
    def pos(self) -> int:
        """How many characters were passed."""
        return self.before + self.at - self.start

    @property
    def last_lines(self) -> list[str]:
        """The lines of the piece up to here, at most ten, padded with empty ones."""
        first = self.at
        for _ in range(_LOOK_BACK):
            first = self.whole.rfind("\n", self.start, max(first - 1, self.start)) + 1 or self.start
        lines = self.whole[first : self.at].splitlines(keepends=True)
        return [*[""] * (_LOOK_BACK - len(lines)), *lines][-_LOOK_BACK:]

    def sort(self, order: list[str]) -> None:
        """There is one source."""

    def finish(self) -> None:
        """To the end of the last piece."""
        self.rest, self.at = iter(()), self.end
