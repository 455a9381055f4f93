"""One fixed 80-column record: its four lines to an entry, every fault with its line and columns."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final, cast

from heatwright.findings import Finding, note, refusals, refuse, warn
from heatwright.polynomial.nasa7 import Coefficients, Nasa7
from heatwright.reading.entry_file import Ranges, Span, ThermoEntry, split_common_K
from heatwright.reading.record_head import read_head
from heatwright.reading.record_line import Head, together
from heatwright.reading.record_numbers import WIDTH, Field, fields_of, number
from heatwright.reading.yaml_nodes import with_caret

_HIGH: Final = tuple(f"a{i} of the high range" for i in range(1, 8))
_LOW: Final = tuple(f"a{i} of the low range" for i in range(1, 8))
_BLANK_BETWEEN: Final = slice(75, 79)


@dataclass(frozen=True, slots=True)
class Line:
    """A line of a file: number from 1, text without its end, offsets of its bytes with its end."""

    number: int
    text: str
    start: int
    end: int

    def span(self, column: int, length: int) -> Span:
        """Offsets of the bytes of *length* columns from *column* (counted from 1)."""
        first, last = (len(self.text[:n].encode(self._encoding)) for n in (column - 1, column - 1 + length))
        return self.start + first, self.start + last

    @property
    def _encoding(self) -> str:
        """Latin-1 where every letter is one byte, else UTF-8; the same for ASCII."""
        return "latin-1" if self.end - self.start - len(self.text) <= 2 else "utf-8"


@dataclass(frozen=True, slots=True)
class Record:
    """The lines of one record: the first, those with elements after ``&``, and the three with coefficients."""

    first: Line
    further: tuple[Line, ...]
    second: Line
    third: Line
    fourth: Line
    lead: Span


def read_record(record: Record, defaults_K: tuple[float, float, float] | None) -> ThermoEntry:
    """The entry of one record; what is wrong with it is among its findings."""
    head = read_head(record.first.text, record.first.number, defaults_K, tuple(line.text for line in record.further))
    findings = list(head.findings)
    values, missing = _coefficients(record, findings)
    findings = together(findings)
    stated = _stated_enthalpy(record.fourth, findings)
    entry = ThermoEntry(
        name=head.name,
        composition=head.composition,
        phase=head.phase,
        note=head.note,
        polynomial=None,
        ranges="both",
        stated_K=head.temperatures_K or (),
        span=(record.first.start, record.fourth.end),
        lines=(record.first.number, record.fourth.number),
        lead=record.lead,
        temperature_spans=tuple(record.first.span(*columns) for columns in ((46, 10), (66, 8), (56, 10))),
        coefficient_spans=_spans(record),
        stated_h298_K=stated,
        findings=tuple(findings),
    )
    if not head.composition and not refusals(findings):
        said = warn("composition-wrong", "the record names no element", where=f"line {head.number}:25")
        entry = replace(entry, findings=(*entry.findings, said.shown(with_caret(head.line, 25, 20))))
    if refusals(findings) or values is None or head.temperatures_K is None:
        return entry
    return _with_polynomial(entry, head, values, missing)


def broken_record(
    first: Line, last: Line, lead: Span, name: str, finding: Finding, composition: dict[str, float] | None = None
) -> ThermoEntry:
    """The place of a record whose lines are not what they should be."""
    return ThermoEntry(
        name=name,
        composition=composition or {},
        phase="",
        note="",
        polynomial=None,
        ranges="both",
        stated_K=(),
        span=(first.start, last.end),
        lines=(first.number, last.number),
        lead=lead,
        findings=(finding,),
    )


def _coefficients(record: Record, findings: list[Finding]) -> tuple[list[float] | None, str]:
    """The fourteen coefficients, high range first, and which range is missing (all blank); None when one is wrong."""
    fields = _fields(record)
    blank = {part for part, i in (("high", 0), ("low", 7)) if not any(f.text.strip() for _, f in fields[i : i + 7])}
    if blank == {"high", "low"}:
        found = "the lines of the record hold no coefficients"
        findings.append(refuse("range-missing", found, where=f"line {record.second.number}"))
        return None, ""
    values: list[float] = []
    for i, (line, field) in enumerate(fields):
        if ("high" if i < 7 else "low") in blank:
            values.append(0.0)
            continue
        value, finding = number(field, line.text, line.number)
        if finding is not None:
            findings.append(finding)
        values.append(0.0 if value is None else value)
    _check_between(record, findings)
    return (None if refusals(findings) else values), "".join(blank)


def _fields(record: Record) -> list[tuple[Line, Field]]:
    second = [(record.second, f) for f in fields_of(record.second.text, _HIGH[:5])]
    third = [(record.third, f) for f in fields_of(record.third.text, (*_HIGH[5:], *_LOW[:3]))]
    return [*second, *third, *((record.fourth, f) for f in fields_of(record.fourth.text, _LOW[3:]))]


def _spans(record: Record) -> tuple[tuple[Span, ...], ...]:
    spans = [line.span(field.column, WIDTH) for line, field in _fields(record)]
    return tuple(spans[7:]), tuple(spans[:7])


def _check_between(record: Record, findings: list[Finding]) -> None:
    """Columns 76-79 hold nothing; a digit there belongs to a number that is cut off."""
    for line in (record.second, record.third, record.fourth):
        between = line.text[_BLANK_BETWEEN]
        known = any(f.where.startswith(f"line {line.number}:") and f.severity == "refuse" for f in findings)
        if between.strip() and not known:
            digits = any(c.isdigit() for c in between)
            make = refuse if digits else warn
            found = f"columns 76 to 79 hold {between!r}"
            action = "The line is shifted or a number is too long." if digits else "Readers leave it out."
            where = f"line {line.number}:76"
            said = make("record-columns", found, where=where, expected="blanks", action=action)
            findings.append(said.shown(with_caret(line.text, 76, 4)))


def _stated_enthalpy(line: Line, findings: list[Finding]) -> float | None:
    """H°(298.15)/R in columns 61-75 of the last line, where files in the manner of Burcat have it."""
    field = Field("H(298.15)/R", line.text[60:75], 61)
    if not field.text.strip():
        return None
    value, finding = number(field, line.text, line.number)
    if value is None:
        found = f"columns 61 to 75 of the last line hold {field.text!r}"
        expected = "blanks, or the enthalpy of formation at 298.15 K divided by R"
        said = warn("record-columns", found, where=f"line {line.number}:61", expected=expected)
        findings.append(said.shown(with_caret(line.text, 61, 15)))
    elif finding is not None:
        findings.append(finding)
    # files that have no enthalpy to say fill the field with zero
    return value or None


def _with_polynomial(entry: ThermoEntry, head: Head, values: list[float], missing: str) -> ThermoEntry:
    t_low, t_common, t_high = head.temperatures_K or (0.0, 0.0, 0.0)
    high, low = cast(Coefficients, tuple(values[:7])), cast(Coefficients, tuple(values[7:]))
    missing = missing or ("high" if not any(high) else "low" if not any(low) else "")
    if missing and not any(low) and not any(high):
        entry = replace(entry, findings=(*entry.findings, all_zero(entry.phase, f"line {entry.lines[0]}")))
    elif missing:
        return _one_of_two(entry, head, low if missing == "high" else high, missing)
    if low == high and t_low < t_high and not t_low < t_common < t_high:
        return _single(entry, head, low)
    if not 0.0 < t_low < t_common < t_high:
        head.say(
            "refuse",
            "temperature-order",
            f"the temperatures are {t_low:g} (lowest), {t_common:g} (common) and {t_high:g} K (highest)",
            46,
            28,
            expected="0 < lowest < common < highest",
            action="Correct them in columns 46-55, 66-73 and 56-65; the coefficients do not tell which is wrong.",
        )
        return replace(entry, findings=(*entry.findings, head.findings[-1]))
    return replace(entry, polynomial=Nasa7(t_low, t_common, t_high, low, high))


def all_zero(phase: str, where: str) -> Finding:
    """What is said of an entry without thermo data, as bare sites of a surface have it."""
    make = note if phase == "S" else warn
    return make("all-zero", "all coefficients of the entry are zero", where=where, expected="thermo data")


def _one_of_two(entry: ThermoEntry, head: Head, given: Coefficients, missing: str) -> ThermoEntry:
    t_low, t_common, t_high = head.temperatures_K or (0.0, 0.0, 0.0)
    start, end = (t_low, t_common) if missing == "high" else (t_common, t_high)
    end = min(end, t_high)
    if not 0.0 < start < end:
        found = f"the {missing} range is empty, and the other one, {start:g} to {end:g} K, is none"
        said = refuse("temperature-order", found, where=f"line {entry.lines[0]}:46", expected="ascending temperatures")
        return replace(entry, findings=(*entry.findings, said))
    whole = end == t_high and start == t_low
    make = note if whole else warn
    said = make(
        "one-range" if whole else "range-missing",
        f"the {missing} range has no coefficients, so the entry ends with {start:g} to {end:g} K"
        if not whole
        else f"the {missing} range has no coefficients and no temperatures; the other one is the whole entry",
        where=f"line {entry.lines[0]}",
        action=""
        if whole
        else "Readers take the missing coefficients as zeros, or stop. `heatwright mend` makes two ranges of what "
        "is there.",
    )
    ranges: Ranges = "one" if whole else "low" if missing == "high" else "high"
    polynomial = Nasa7(start, split_common_K(start, end), end, given, given)
    return replace(entry, polynomial=polynomial, ranges=ranges, findings=(*entry.findings, said))


def _single(entry: ThermoEntry, head: Head, both: Coefficients) -> ThermoEntry:
    t_low, _, t_high = head.temperatures_K or (0.0, 0.0, 0.0)
    found = f"one set of coefficients serves the whole range, {t_low:g} to {t_high:g} K"
    said = note("one-range", found, where=f"line {entry.lines[0]}")
    polynomial = Nasa7(t_low, split_common_K(t_low, t_high), t_high, both, both)
    return replace(entry, polynomial=polynomial, ranges="one", findings=(*entry.findings, said))
