"""A table that a user wrote as CSV, read strictly: known columns, full rows, numbers that are numbers, FILE:LINE."""

from __future__ import annotations

import csv
import os
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from math import isfinite
from typing import NoReturn

from heatwright.findings import Refused, refuse
from heatwright.reading.files import read_text


@dataclass(frozen=True, slots=True)
class Row:
    """One row: its texts by column (without spaces around them, empty where nothing is written) and its place."""

    place: str
    values: dict[str, str]
    code: str

    def wrong(self, found: str, expected: str = "", action: str = "") -> NoReturn:
        """Raises Refused at FILE:LINE of this row."""
        raise Refused([refuse(self.code, found, where=self.place, expected=expected, action=action)])

    def text(self, column: str) -> str:
        """A text that has to be there."""
        value = self.values.get(column, "")
        if not value:
            self.wrong(f"{column} is empty")
        return value

    def number(self, column: str) -> float | None:
        """A finite number, None where nothing is written."""
        value = self.values.get(column, "")
        if not value:
            return None
        try:
            number = float(value.replace("−", "-"))
        except ValueError:
            number = float("nan")
        if not isfinite(number) or "_" in value:
            self.wrong(f"{column} is {value!r}", "a number")
        return number

    def whole(self, column: str, default: int | None = None) -> int:
        """A whole number, with or without a sign; *default* where nothing is written."""
        value = self.values.get(column, "")
        if not value and default is not None:
            return default
        digits = value.replace("−", "-").removeprefix("+").removeprefix("-")
        if not (digits.isascii() and digits.isdigit()):
            self.wrong(f"{column} is {value!r}" if value else f"{column} is empty", "a whole number")
        return int(value.replace("−", "-"))


def read_table(
    path: str | os.PathLike[str], code: str, required: Sequence[str], optional: Sequence[str] = ()
) -> tuple[Row, ...]:
    """The rows below the header; blank lines and lines that start with ``#`` are passed over.

    Raises Refused with *code* and FILE:LINE for an unknown, doubled or missing column, for a row with more or fewer
    fields than the header, and when there is no row at all.
    """
    file = os.fspath(path)
    try:
        text = read_text(path).text
    except Refused as refused:
        raise Refused([finding.at(file) for finding in refused.findings]) from None
    lines = _records(text, file, code)
    line, header = next(lines, (1, []))
    _check_header(f"{file}:{line}", code, header, required, optional)
    rows = []
    for line, fields in lines:
        row = Row(f"{file}:{line}", dict(zip(header, fields, strict=False)), code)
        if len(fields) != len(header):
            row.wrong(
                f"the row has {len(fields)} fields",
                f"{len(header)}, as the header",
                "Put a text that holds a comma in double quotes.",
            )
        rows.append(row)
    if not rows:
        raise Refused([refuse(code, "the table has no rows below its header", where=file)])
    return tuple(rows)


def _records(text: str, file: str, code: str) -> Iterator[tuple[int, list[str]]]:
    """(line, fields) of each row that says something; a row in quotes may go over several lines."""
    reader = csv.reader((f"{line}\n" for line in text.split("\n")), strict=True, skipinitialspace=True)
    line = 1
    try:
        for fields in reader:
            start, line = line, reader.line_num + 1
            if fields and not fields[0].lstrip().startswith("#") and any(field.strip() for field in fields):
                yield start, [field.strip().replace("\n", " ") for field in fields]
    except csv.Error as error:
        where = f"{file}:{line}"
        raise Refused([refuse(code, f"the line is no CSV ({error})", where=where)]) from None


def _check_header(
    place: str, code: str, header: Sequence[str], required: Sequence[str], optional: Sequence[str]
) -> None:
    known = (*required, *optional)
    if len(header) == 1 and any(mark in header[0] for mark in ";\t"):
        raise Refused([refuse(code, "the columns are not separated by commas", where=place, expected=",".join(known))])
    for column in header:
        if column not in known:
            near = get_close_matches(column, known, 1, 0.6)
            action = f"Did you mean {near[0]}?" if near else ""
            found, due = f"there is no column {column!r}", f"columns out of {', '.join(known)}"
            raise Refused([refuse(code, found, where=place, expected=due, action=action)])
    if len(set(header)) != len(header):
        twice = next(column for column in header if header.count(column) > 1)
        raise Refused([refuse(code, f"the column {twice!r} is there twice", where=place)])
    missing = [column for column in required if column not in header]
    if missing:
        word = f"the column{'s' if len(missing) > 1 else ''} {', '.join(missing)} missing"
        raise Refused([refuse(code, word.replace(" missing", f" {'are' if len(missing) > 1 else 'is'} missing"),
                              where=place, expected=", ".join(known))])  # fmt: skip
