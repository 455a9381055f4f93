"""Numbers in fixed fields of 15 columns: exactly one number and nothing else, or a finding with its columns."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final

from heatwright.findings import Finding, note, refuse, warn
from heatwright.reading.yaml_nodes import with_caret

WIDTH: Final = 15

_USUAL = re.compile(r" *-?\d\.\d{6,9}E[+-]\d\d")
_ANY = re.compile(r"[+-]?(?:\d+\.\d*|\.\d+)(?:[EeDd](?: ?[+-]? ?(\d{1,3}))|([+-]\d{1,3}))?")
_ZERO = re.compile(r"[+-]?0+(?:[EeDd]?[+-]?0+)?")
_NO_POINT = re.compile(r"[+-]?\d+(?:[EeDd][+-]?\d+)?")
_NOT_FINITE = re.compile(r"[+-]?(?:nan|inf(?:inity)?)", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Field:
    """A field of a line: what it is called, its text, and its first column (from 1)."""

    what: str
    text: str
    column: int


def fields_of(line: str, names: tuple[str, ...]) -> tuple[Field, ...]:
    """The first fields of 15 columns of *line*, one for each name."""
    return tuple(Field(name, line[WIDTH * i : WIDTH * (i + 1)], WIDTH * i + 1) for i, name in enumerate(names))


def number(field: Field, line: str, line_number: int) -> tuple[float | None, Finding | None]:
    """The number in *field*, and what there is to say about it; no number where it is refused."""
    if _USUAL.fullmatch(field.text) and not _cut(field, line):
        return float(field.text), None
    stripped = field.text.strip()
    if _ZERO.fullmatch(stripped):
        return 0.0, None
    match = _ANY.fullmatch(stripped)
    if match is None or _cut(field, line):
        return None, _unreadable(field, line, line_number)
    text = stripped.upper().replace("D", "E").replace(" ", "")
    bare = match[2] is not None
    if bare:
        text = f"{text[: match.start(2)]}E{match[2]}"
    value = float(text)
    if not abs(value) < 1.0e300:
        return None, _unreadable(field, line, line_number)
    return value, _exponent_said(field, line, line_number, bare, len((match[1] or match[2] or "").lstrip("+-")))


def _cut(field: Field, line: str) -> bool:
    """Whether the number goes on beyond its field, or the exponent lost a digit to the next one."""
    end = field.column - 1 + WIDTH
    following = line[end : end + 1]
    if not following.isdigit() and following != ".":
        return False
    return end % 75 == 0 or re.search(r"[Ee][+-]?\d?$", field.text) is not None


def _exponent_said(field: Field, line: str, line_number: int, bare: bool, digits: int) -> Finding | None:
    if not bare and digits < 3:
        return None
    what = "has no letter E" if bare else "has three digits"
    words = f"the exponent of {field.what}, {field.text.strip()!r}, {what}"
    action = "It was read as Fortran reads it; other readers stop at it or cut it."
    make = warn if bare else note
    return make("exponent-form", words, where=_where(field, line_number), action=action).shown(_caret(field, line))


def _unreadable(field: Field, line: str, line_number: int) -> Finding:
    stripped = field.text.strip()
    expected = f"one number in columns {field.column} to {field.column + WIDTH - 1}"
    action = "Restore the field from where the entry comes from."
    if not stripped:
        found = f"the field of {field.what} is blank"
        action = "Some readers take it as zero, others stop; write the number, or 0.0 where that is meant."
    elif _NOT_FINITE.fullmatch(stripped):
        found = f"{field.what} is {stripped}"
    elif _NO_POINT.fullmatch(stripped):
        found = f"{field.what}, {stripped!r}, has no decimal point"
        action = "Fortran readers take the last eight digits as decimals; write the point."
    elif "*" in stripped:
        found = f"{field.what} is {stripped!r}, what Fortran prints for a number that does not fit"
    elif _cut(field, line):
        found = f"the number in the field of {field.what} goes on beyond the field: {field.text!r}"
        action = "A column is too many, or the exponent has three digits; shift the line back or round the number."
    else:
        found = f"the field of {field.what} holds {field.text!r}"
        action = "Columns may be shifted: each number has 15 of them."
    finding = refuse("coefficient-wrong", found, where=_where(field, line_number), expected=expected, action=action)
    return finding.shown(_caret(field, line))


def _where(field: Field, line_number: int) -> str:
    return f"line {line_number}:{field.column}"


def _caret(field: Field, line: str) -> str:
    return with_caret(line, field.column, WIDTH)
