"""The first line of a fixed record: name, date, elements, phase and temperatures, column by column.

Columns (counted from 1) of the NASA 7-coefficient, two-range record: 1-18 name, 19-24 date, 25-44 four elements of five
columns, 45 phase, 46-55 and 56-65 ends of the range, 66-73 common temperature, 74-78 a fifth element (CHEMKIN), 80
the digit 1.  Source: the column table in the documentation of Mutation++ (docs/input-files.md) and the behaviour of
``cantera.ck2yaml`` 3.2.0; NASA TM-4513 for the variant with a quality letter and the molar mass.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from typing import Final

from heatwright.findings import Finding, Severity, note, refuse, warn
from heatwright.reading.compositions import count, element_symbol, molar_mass_u
from heatwright.reading.entry_file import USUAL_COMMON_K
from heatwright.reading.yaml_nodes import with_caret

NAME_COLUMNS: Final = 18
LONGEST_OLD_NAME: Final = 16
"""Many readers of the CHEMKIN family keep 16 characters of a name (from memory)."""
MASS_TOLERANCE_U: Final = 0.1

_TEMPERATURE = re.compile(r"\d+\.?\d*|\.\d+")
_LETTER_AND_MASS = re.compile(r" {0,3}([A-Za-z]) +(\d+\.\d*) *")
_FIELD_CODES: Final = frozenset({"composition-wrong", "record-columns", "coefficient-wrong"})
_PHASES: Final = frozenset("GLSC")
_ACTION_COLUMNS: Final = "Shift it into its columns; readers that go by columns take something else from them."


@dataclass(slots=True)
class Head:
    """What the first line says, filled in field by field; ``findings`` collects what was noticed."""

    line: str
    number: int
    defaults_K: tuple[float, float, float] | None
    further: tuple[str, ...] = ()
    name: str = ""
    note: str = ""
    phase: str = ""
    composition: dict[str, float] = field(default_factory=dict)
    temperatures_K: tuple[float, float, float] | None = None
    findings: list[Finding] = field(default_factory=list)

    def say(
        self,
        severity: Severity,
        code: str,
        found: str,
        column: int,
        length: int = 1,
        *,
        expected: str = "",
        action: str = "",
    ) -> None:
        """Notes a finding at a column of the line."""
        make = {"refuse": refuse, "warn": warn, "note": note}[severity]
        finding = make(code, found, where=f"line {self.number}:{column}", expected=expected, action=action)
        self.findings.append(finding.shown(with_caret(self.line, column, length)))


def read_head(
    line: str, number: int, defaults_K: tuple[float, float, float] | None, further: tuple[str, ...] = ()
) -> Head:
    """Everything on the first line of a record (*number* in the file).

    further : the lines with elements that follow after ``&`` at the end of the first.
    """
    head = Head(line, number, defaults_K, further)
    _read_name(head)
    _read_elements(head)
    _read_phase(head)
    _read_temperatures(head)
    head.findings = together(head.findings)
    return head


def together(findings: list[Finding]) -> list[Finding]:
    """The findings with all refusals about fields of one line, one shift of columns mostly, as one: the first."""
    kept: list[Finding] = []
    further: dict[str, int] = {}
    for finding in findings:
        line = finding.where.split(":")[0]
        if not _is_field_fault(finding):
            kept.append(finding)
        elif line in further:
            further[line] += 1
        else:
            further[line] = 0
            kept.append(finding)
    return [_with_more(f, further[f.where.split(":")[0]]) if _is_field_fault(f) else f for f in kept]


def _is_field_fault(finding: Finding) -> bool:
    return finding.severity == "refuse" and finding.code in _FIELD_CODES


def _with_more(finding: Finding, n: int) -> Finding:
    if not n:
        return finding
    more = f"; {n} further field{'s' if n > 1 else ''} of this line cannot be read either"
    return replace(finding, found=finding.found + more)


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


# --- elements ------------------------------------------------------------------------------------------------------


def _read_elements(head: Head) -> None:
    for start in range(24, 44, 5):
        _element_field(head, head.line[start : start + 5], start + 1)
    if head.further:
        _continued(head)
    else:
        _beyond_80(head)


def _element_field(head: Head, text: str, column: int) -> bool:
    """Adds one field of symbol and count; whether it held an element or tried to."""
    if not text.strip() or count(text) == 0:
        return False
    symbol, amount = element_symbol(text[:2]), count(text[2:])
    if symbol is None or amount is None:
        what = f"{text[:2].strip()!r} is no element" if symbol is None else f"{text[2:]!r} is no count"
        head.say(
            "refuse",
            "composition-wrong",
            f"{what} in the element field {text!r}",
            column,
            len(text),
            expected="a symbol in the first two columns and a count, right-justified, in the other three",
            action="For counts above 999 or more than four elements, write & after column 80 and the composition on "
            "the next line.",
        )
        return True
    _add(head, symbol, amount, column, len(text))
    return True


def _add(head: Head, symbol: str, amount: float, column: int, length: int) -> None:
    if amount != int(amount):
        head.say(
            "warn",
            "fractional-count",
            f"the count of {symbol} is {amount:g}",
            column,
            length,
            action="It was read as it stands; other readers cut the fraction off.",
        )
    if amount < 0 and symbol != "E":
        head.say("refuse", "composition-wrong", f"the count of {symbol} is {amount:g}", column, length)
    elif symbol in head.composition:
        head.say("refuse", "composition-wrong", f"the element {symbol} is there twice", column, length)
    elif amount:
        head.composition[symbol] = amount


def _continued(head: Head) -> None:
    """The composition on the lines after ``&``: pairs of symbol and count."""
    if head.composition:
        head.composition.clear()
        head.say(
            "refuse",
            "composition-wrong",
            "elements stand both in columns 25 to 44 and on the line after &",
            25,
            20,
            expected="all of them on one of the two",
            action="Some readers add them up, others take only those after &.",
        )
        return
    for offset, line in enumerate(head.further, 1):
        words = line.replace("&", " ").split("!")[0].split()
        for symbol, amount in _pairs(words):
            known, counted = element_symbol(symbol), count(amount)
            if known is None or counted is None:
                found = f"{symbol} {amount}".strip()
                finding = refuse(
                    "composition-wrong",
                    f"{found!r} on the line after & is no element with its count",
                    where=f"line {head.number + offset}",
                    expected="blank-separated pairs of symbol and count",
                )
                head.findings.append(finding.shown(with_caret(line, line.find(symbol) + 1, len(symbol))))
                return
            if "." in amount and counted == int(counted):
                words_point = f"the count {amount} of {known} is written with a point"
                head.say("warn", "composition-form", words_point, 81, action="Some readers stop at it after &.")
            _add(head, known, counted, 81, 1)


def _pairs(words: list[str]) -> Iterator[tuple[str, str]]:
    yield from zip(words[::2], [*words[1::2], ""][: (len(words) + 1) // 2], strict=True)


def _beyond_80(head: Head) -> None:
    """Elements in fields of ten columns after column 80, an extension; any other text there is a comment."""
    rest = head.line[80:].rstrip()
    chunks = [rest[i : i + 10] for i in range(0, len(rest), 10)]
    pairs = [(element_symbol(c[:2]), count(c[2:])) for c in chunks]
    if not rest or not rest[0].isalpha() or any(symbol is None or n is None for symbol, n in pairs):
        return
    for symbol, n in pairs:
        _add(head, symbol or "", n or 0, 81, len(rest))
    words = f"elements stand in ten-column fields after column 80: {rest.strip()!r}"
    head.say("warn", "composition-form", words, 81, len(rest), action="They were added; most readers leave them out.")


# --- phase and temperatures ----------------------------------------------------------------------------------------


def _read_phase(head: Head) -> None:
    letter = head.line[44:45]
    head.phase = letter.strip().upper()
    if letter.strip() and head.phase not in _PHASES:
        severity: Severity = "warn" if letter.isalpha() else "refuse"
        head.say(
            severity, "record-columns", f"the phase is {letter!r}", 45, expected="G, L, S or C", action=_ACTION_COLUMNS
        )


def _read_temperatures(head: Head) -> None:
    low = _temperature(head, 45, 55, "lowest temperature", 0)
    high = _temperature(head, 55, 65, "highest temperature", 2)
    common = _common(head, low, high)
    if low is not None and high is not None and common is not None:
        head.temperatures_K = (low, common, high)


def _temperature(head: Head, first: int, end: int, what: str, default: int) -> float | None:
    text = head.line[first:end]
    if _TEMPERATURE.fullmatch(text.strip()):
        return float(text)
    if not text.strip() and head.defaults_K is not None:
        value = head.defaults_K[default]
        words = f"the {what} is blank; the section's default, {value:g} K, was taken"
        head.say("warn", "temperature-default", words, first + 1, end - first, action="Write it into the record.")
        return value
    found = f"the field of the {what} holds {text!r}" if text.strip() else f"the {what} is blank"
    expected = f"a temperature in columns {first + 1} to {end}"
    head.say("refuse", "record-columns", found, first + 1, end - first, expected=expected, action=_ACTION_COLUMNS)
    return None


def _common(head: Head, low: float | None, high: float | None) -> float | None:
    """The common temperature in columns 66-73, and what else old files put there and behind it."""
    tail = head.line[65:79]
    with_letter = _LETTER_AND_MASS.fullmatch(tail)
    if with_letter is not None:
        return _mass_instead(head, float(with_letter[2]), f"quality letter {with_letter[1]} and ")
    text, fifth = tail[:8], tail[8:13]
    if fifth[:1].isdigit() and text.strip() and count(fifth) != 0:
        text, fifth = tail[:10], tail[10:13]  # a number that fills columns 66-75
    if not text.strip():
        _fifth_element(head, fifth)
        return _default_common(head, "blank")
    if not _TEMPERATURE.fullmatch(text.strip()):
        head.say(
            "refuse",
            "record-columns",
            f"the field of the common temperature holds {text!r}",
            66,
            8,
            expected="a temperature, or blanks, in columns 66 to 73",
            action=_ACTION_COLUMNS,
        )
        return None
    value = float(text)
    outside = low is not None and high is not None and not low < value < high
    if outside and head.composition and abs(value - molar_mass_u(head.composition)) < MASS_TOLERANCE_U:
        return _mass_instead(head, value, "")
    _fifth_element(head, fifth)
    return value


def _mass_instead(head: Head, mass: float, letter: str) -> float:
    head.say(
        "warn",
        "molar-mass-field",
        f"{letter}the molar mass {mass:g} {'stand' if letter else 'stands'} where the common temperature belongs",
        66,
        13,
        expected="the common temperature in columns 66 to 73",
        action="Readers without this variant take the mass for a temperature; write the common temperature there.",
    )
    computed = molar_mass_u(head.composition)
    if head.composition and abs(mass - computed) > MASS_TOLERANCE_U:
        words = f"the molar mass in the record is {mass:g}, that of its composition {computed:.4f}"
        head.say("warn", "composition-mismatch", words, 66, 13, action="One of the two is wrong.")
    return _default_common(head, "not given")


def _default_common(head: Head, what: str) -> float:
    value = USUAL_COMMON_K if head.defaults_K is None else head.defaults_K[1]
    usual = value == USUAL_COMMON_K
    source = "usual one" if head.defaults_K is None else "section's default"
    head.say(
        "note" if usual else "warn",
        "common-temperature-blank",
        f"the common temperature is {what}; the {source}, {value:g} K, was taken",
        66,
        8,
        action="Write it into the record: in another file the default may be another one.",
    )
    return value


def _fifth_element(head: Head, text: str) -> None:
    if not text.strip() or count(text) == 0:
        return
    before = dict(head.composition)
    if _element_field(head, text, 74) and head.composition != before:
        head.say(
            "warn",
            "fifth-element",
            f"a fifth element stands in columns 74 to 78: {text.strip()!r}",
            74,
            5,
            action="It was read; readers without this extension drop the element without a word, and may take the "
            "default common temperature. Write & after column 80 and the composition on the next line.",
        )
