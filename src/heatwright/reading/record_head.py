"""The first line of a fixed record: name, date, elements, phase and temperatures, column by column.

Columns (counted from 1) of the NASA 7-coefficient, two-range record: 1-18 name, 19-24 date, 25-44 four elements of five
columns, 45 phase, 46-55 and 56-65 ends of the range, 66-73 common temperature, 74-78 a fifth element (CHEMKIN), 80
the digit 1.  Source: the column table in the documentation of Mutation++ (docs/input-files.md) and the behaviour of
``cantera.ck2yaml`` 3.2.0; NASA TM-4513 for the variant with a quality letter and the molar mass.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from heatwright.reading.record_elements import read_elements
from heatwright.reading.record_line import SHIFT_IT, Head, together
from heatwright.reading.record_temperatures import read_temperatures

if TYPE_CHECKING:
    from heatwright.findings import Severity

NAME_COLUMNS: Final = 18
LONGEST_OLD_NAME: Final = 16
"""Many readers of the CHEMKIN family keep 16 characters of a name (from memory)."""
_PHASES: Final = frozenset("GLSC")


def read_head(
    line: str, number: int, defaults_K: tuple[float, float, float] | None, further: tuple[str, ...] = ()
) -> Head:
    """Everything on the first line of a record (*number* in the file).

    further : the lines with elements that follow after ``&`` at the end of the first.
    """
    head = Head(line, number, defaults_K, further)
    _read_name(head)
    read_elements(head)
    _read_phase(head)
    read_temperatures(head)
    head.findings = together(head.findings)
    return head


def _read_name(head: Head) -> None:
    field_text = head.line[:24]
    words = field_text.split()
    head.name = words[0] if words else ""
    head.note = " ".join(words[1:])
    if not words:
        head.say("refuse", "name-ambiguous", "the name field is blank", 1, NAME_COLUMNS, expected="a name in column 1")
        return
    start = field_text.index(head.name)
    if start + len(head.name) > NAME_COLUMNS and start < NAME_COLUMNS:
        columns = field_text[:NAME_COLUMNS].strip()
        head.say(
            "refuse",
            "name-ambiguous",
            f"the name runs into the columns of the date: {columns!r} by columns, {head.name!r} by blanks",
            NAME_COLUMNS,
            2,
            expected="a name of at most 18 characters and a blank, or nothing, after it",
            action="Shorten the name, or take out the date.",
        )
        return
    if not all("!" <= c <= "~" for c in head.name):
        head.say(
            "warn", "name-ambiguous", f"the name {head.name!r} holds letters outside ASCII", start + 1, len(head.name)
        )
    elif start:
        head.say(
            "note", "name-ambiguous", f"the name {head.name} starts in column {start + 1}, not in column 1", start + 1
        )
    elif len(head.name) > LONGEST_OLD_NAME:
        words_16 = f"the name {head.name} has {len(head.name)} characters, and many readers keep {LONGEST_OLD_NAME}"
        head.say("note", "name-ambiguous", words_16, LONGEST_OLD_NAME + 1, len(head.name) - LONGEST_OLD_NAME)


def _read_phase(head: Head) -> None:
    letter = head.line[44:45]
    head.phase = letter.strip().upper()
    if letter.strip() and head.phase not in _PHASES:
        severity: Severity = "warn" if letter.isalpha() else "refuse"
        head.say(severity, "record-columns", f"the phase is {letter!r}", 45, expected="G, L, S or C", action=SHIFT_IT)
