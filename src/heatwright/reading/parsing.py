"""One run of a cclib parser over a piece of text: silent, and never losing what was read before something went wrong.

cclib gives up a whole file for one block it cannot read (orbitals, populations, basis names).  Here each line's
handler is guarded, so that a mishap costs its own block only and is reported with its line.
"""

from __future__ import annotations

import importlib
import io
import logging
import re
import warnings
from collections.abc import Collection, Sequence
from contextlib import redirect_stderr, redirect_stdout
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from heatwright.reading.deferral import without_unused_packages
from heatwright.reading.lines import Lines
from heatwright.reading.skipping import shown_lines

if TYPE_CHECKING:
    from heatwright.reading.text import Text

_WANTED = frozenset(
    ["atomnos", "atomcoords", "atommasses", "natom", "charge", "mult", "vibfreqs", "vibdisps", "scfenergies",
     "mpenergies", "ccenergies", "scanenergies", "scannames", "scanparm", "optstatus", "metadata"]
)  # fmt: skip
"""Attributes used here; the others (orbitals, gradients) are dropped before cclib turns them into arrays."""
_MOST_MISHAPS = 10


@dataclass(frozen=True, slots=True)
class Mishap:
    """A handler that failed: position in the text it was given, and the error in words."""

    spot: int
    words: str


@dataclass(frozen=True, slots=True)
class Parsed:
    """What cclib read, by attribute name; where handlers failed; whether the text ended inside a block."""

    values: dict[str, Any] = field(default_factory=dict)
    mishaps: tuple[Mishap, ...] = ()
    ended_inside: bool = False

    def array(self, name: str) -> np.ndarray[Any, np.dtype[np.float64]] | None:
        """An attribute as an array of floats, or None when it is missing or ragged."""
        value = self.values.get(name)
        if value is None:
            return None
        try:
            return np.asarray(value, dtype=float)
        except (TypeError, ValueError):
            return None

    def integer(self, name: str) -> int | None:
        """An attribute as an integer, or None."""
        value = self.values.get(name)
        try:
            return None if value is None else int(value)
        except (TypeError, ValueError, OverflowError):
            return None


def parse(parser: str, pieces: Sequence[Text], *, due: Collection[str] = (), skip: bool = True) -> Parsed:
    """Run cclib's parser class of this name over pieces of text, one after the other; never raises, never prints.

    due : attributes that the text has to have.
    skip : leave out the lines that cannot matter (:mod:`heatwright.reading.skipping`); when something that is due is
        missing then, all lines are parsed.
    """
    pattern = shown_lines(parser) if skip else None
    found = _parsed(parser, pieces, pattern)
    if pattern is not None and any(name not in found.values for name in due):
        found = _parsed(parser, pieces, None)
    return found


def _parsed(parser: str, pieces: Sequence[Text], pattern: re.Pattern[str] | None) -> Parsed:
    sink = io.StringIO()
    with warnings.catch_warnings(), redirect_stdout(sink), redirect_stderr(sink), np.errstate(all="ignore"):
        warnings.simplefilter("ignore")
        log: list[Mishap] = []
        ended: list[bool] = []
        values = _values(parser, pieces, pattern, log, ended)
    return Parsed(values, tuple(log), bool(ended))


def _values(
    parser: str, pieces: Sequence[Text], pattern: re.Pattern[str] | None, log: list[Mishap], ended: list[bool]
) -> dict[str, Any]:
    guarded = _guarded(_parser_class(parser), log, ended)
    run: Any = None
    try:
        run = guarded(_source(pieces, pattern), loglevel=logging.CRITICAL + 1, logstream=io.StringIO())
        return {name: value for name, value in vars(run.parse()).items() if name in _WANTED}
    except Exception as error:
        _note(log, sum(piece.end - piece.start for piece in pieces), error)
        return {}
    finally:
        if run is not None:
            run.logger.handlers.clear()


def _source(pieces: Sequence[Text], pattern: re.Pattern[str] | None) -> Any:
    """The pieces as the kind of input cclib reads from."""
    from cclib.parser.logfilewrapper import FileWrapper

    return type("Source", (Lines, FileWrapper), {})(pieces, pattern)


def _parser_class(name: str) -> Any:
    with without_unused_packages():
        return getattr(importlib.import_module("cclib.parser"), name)


def _note(log: list[Mishap], spot: int, error: Exception) -> None:
    if len(log) < _MOST_MISHAPS:
        log.append(Mishap(spot, f"{type(error).__name__}: {error}".rstrip(": ")))


def _guarded(base: Any, log: list[Mishap], ended: list[bool]) -> Any:
    from cclib.parser.logfileparser import StopParsing

    extract = base.extract

    class Guarded(base):  # type: ignore[misc]
        def extract(self, inputfile: Any, line: str) -> None:
            try:
                extract(self, inputfile, line)
            except StopIteration:
                ended.append(True)
                raise
            except StopParsing:
                raise
            except Exception as error:
                _note(log, inputfile.pos, error)

        def set_attribute(self, name: str, value: Any, check_change: bool = True) -> None:
            """Without the comparison with the old value: it only serves a log message and costs a third of the time."""
            setattr(self, name, value)

        def skip_lines(self, inputfile: Any, sequence: Any) -> list[str]:
            """Without the checks of what is skipped: they only serve log messages, and cost a look at the stack."""
            return [next(inputfile) for _ in sequence]

        def updateprogress(self, inputfile: Any, msg: str, xupdate: float = 0.05) -> None:
            """Nobody watches."""

        def after_parsing(self) -> None:
            try:
                super().after_parsing()
            except Exception as error:
                _note(log, self.inputfile.pos, error)
            for name in [n for n in vars(self) if n not in _WANTED and n in _attribute_names()]:
                delattr(self, name)
            _drop_ragged(self, log)

    return Guarded


def _attribute_names() -> frozenset[str]:
    from cclib.parser.data import ccData

    return frozenset(ccData._attrlist)


def _drop_ragged(parser: Any, log: list[Mishap]) -> None:
    """Remove what cannot become an array (a table cut short), so that the rest survives cclib's own conversion."""
    for name in ("atomcoords", "vibdisps", "vibfreqs", "mpenergies", "scfenergies", "ccenergies", "atomnos"):
        value = getattr(parser, name, None)
        if value is None:
            continue
        try:
            np.asarray(value, dtype=float)
        except (TypeError, ValueError) as error:
            whole = [entry for entry in value if name == "atomcoords" and np.shape(entry) == np.shape(value[-1])]
            if whole:
                setattr(parser, name, whole[-1:])
            else:
                delattr(parser, name)
            _note(log, parser.inputfile.pos, error)
