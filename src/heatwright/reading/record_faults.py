"""What is wrong with a line that does not belong where it stands among fixed records."""

from __future__ import annotations

from typing import TYPE_CHECKING

from heatwright.findings import Finding, note, refuse, warn
from heatwright.reading.yaml_nodes import with_caret

if TYPE_CHECKING:
    from heatwright.reading.record import Line, Record


def not_a_first(line: Line) -> Finding:
    """A finding that says why *line* is not the first line of a record."""
    expected = "the first line of a record, with the digit 1 in column 80"
    text = line.text.rstrip()
    where = f"line {line.number}"
    if "\t" in text:
        column = text.index("\t") + 1
        found, where = "a tab stands in the line, so its columns are not where they seem", f"{where}:{column}"
        action = "Replace the tab by blanks up to the next field."
    elif len(text) < 80:
        column = max(len(text), 1)
        last = f" (it ends with {text[-1]!r} in column {len(text)})" if text else ""
        found = f"the line has {len(text)} columns{last}"
        action = "A column is missing before it, or the digit is: give every field its width."
        where = f"{where}:{column}"
    else:
        column = 80
        found = f"column 80 holds {line.text[79:80]!r}"
        action = "The fields before it may be shifted, or the digit is missing."
        where = f"{where}:80"
    said = refuse("record-lines", found, where=where, expected=expected, action=action)
    return said.shown(with_caret(line.text, column))


def wrong_line(line: Line | None, digit: str, first: Line) -> Finding:
    """A finding that says what stands where line *digit* of the record of *first* should be."""
    name = (first.text[:24].split() or [""])[0]
    expected = f"line {digit} of the record of {name}, with {digit} in column 80"
    if line is None:
        found, where = f"the section ends inside the record of {name}", f"line {first.number}"
        return refuse("record-lines", found, where=where, expected=expected, action="Fetch the entry again.")
    got = line.text[79:80]
    where, column = f"line {line.number}:80", 80
    if "\t" in line.text:
        found, action = "a tab stands in the line, so its columns are not where they seem", "Replace it by blanks."
        column = line.text.index("\t") + 1
        where = f"line {line.number}:{column}"
    elif got and got in "1234":
        found = f"line {got} of a record stands here"
        action = "Lines are missing or out of order; fetch the entry again."
    else:
        found = f"column 80 holds {got!r}" if got else f"the line has {len(line.text.rstrip())} columns"
        action = "Columns are shifted, or the digit is missing."
    said = refuse("record-lines", found, where=where, expected=expected, action=action)
    return said.shown(with_caret(line.text, column))


def stray(line: Line) -> Finding:
    """A line of coefficients without its record."""
    said = refuse(
        "record-lines",
        "a line of coefficients stands outside any record",
        where=f"line {line.number}",
        expected="the first line of a record before it",
        action="Its record's first line is missing or unreadable.",
    )
    return said.shown(with_caret(line.text, 1, 15))


def not_ascii(record: Record) -> Finding | None:
    """A letter outside ASCII: one column here, several for readers that count bytes, none for those that drop it."""
    for line in (record.first, record.second, record.third, record.fourth):
        text = line.text[:80]
        if not text.isascii():
            column = next(i for i, c in enumerate(text, 1) if not c.isascii())
            make = warn if line is record.first else note
            said = make(
                "record-ascii",
                f"column {column} holds {text[column - 1]!r}, which is no ASCII character",
                where=f"line {line.number}:{column}",
                action="It was counted as one column; other readers shift everything after it. Replace it.",
            )
            return said.shown(with_caret(line.text, column))
    return None
