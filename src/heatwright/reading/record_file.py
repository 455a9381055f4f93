"""A file of fixed records: which of its lines are whose, with or without a mechanism around the THERMO section."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from typing import Final

from heatwright.findings import Finding, refuse, warn
from heatwright.reading.entry_file import PassedOver, ThermoEntry, decoded
from heatwright.reading.record import Line, Record, broken_record, read_record
from heatwright.reading.record_faults import not_a_first, not_ascii, stray, wrong_line
from heatwright.reading.yaml_nodes import with_caret

_HEADER = re.compile(r"\s*THER(?:MO)?(?P<all>\s+ALL)?(?P<nine>\s+NASA9)?(?:\s+ALL)?\s*(?:!.*)?", re.IGNORECASE)
_END = re.compile(r"\s*END\b", re.IGNORECASE)
_SECTION = re.compile(r"\s*(ELEM|SPEC|REAC|TRAN|SITE|BULK|SURF|MATE)[A-Z]*\b", re.IGNORECASE)
_NUMERIC = re.compile(r"[\s\d.+\-*EeDd]*(?:(?:NaN|Inf(?:inity)?)[\s\d.+\-*EeDd]*)*", re.IGNORECASE)
_THREE = re.compile(r"\s*(\d+\.?\d*)\s+(\d+\.?\d*)\s+(\d+\.?\d*)\s*(?:!.*)?")
_COUNT_NINE = re.compile(r"\s*([1-9])\b")
_DIGITS: Final = "1234"


@dataclass(slots=True)
class Scan:
    """What the lines of a file hold; ``declared`` are the species of a mechanism's SPECIES section."""

    defaults_K: tuple[float, float, float] | None = None
    entries: list[ThermoEntry] = field(default_factory=list)
    passed_over: list[PassedOver] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)
    declared: dict[str, int] = field(default_factory=dict)
    elements: set[str] = field(default_factory=set)


def lines_of(data: bytes) -> list[Line]:
    """The lines of a file with the offsets of their bytes; one letter is one column, whatever bytes it takes."""
    latin = not _is_utf8(data)
    lines, start = [], 0
    for i, raw in enumerate(data.splitlines(keepends=True), 1):
        bare = raw.rstrip(b"\r\n")
        text = bare.decode("latin-1") if latin else decoded(bare)
        mark = 3 if i == 1 and text.startswith("\ufeff") else 0
        lines.append(Line(i, text.removeprefix("\ufeff") if mark else text, start + mark, start + len(raw)))
        start += len(raw)
    return lines


def scan(lines: Sequence[Line]) -> Scan:
    """Read every record of a file's THERMO sections, or of the whole file where it has no such head."""
    result = Scan()
    headed = any(_header(line) is not None for line in lines)
    walk = _Walk(lines, result, headed)
    walk.run()
    return result


def _is_utf8(data: bytes) -> bool:
    try:
        data.decode("utf-8")
    except UnicodeDecodeError:
        return False
    return True


def _header(line: Line) -> re.Match[str] | None:
    return _HEADER.fullmatch(line.text) if _digit(line) != "1" else None


def _digit(line: Line) -> str:
    return line.text[79:80]


def _is_blank(line: Line) -> bool:
    return not line.text.strip() or line.text.lstrip().startswith("!")


def _is_numeric(line: Line) -> bool:
    """Whether the line looks like one of coefficients."""
    text = line.text[:75]
    return "." in text and _NUMERIC.fullmatch(text) is not None


def _is_first(line: Line) -> bool:
    return _digit(line) == "1" and not _is_numeric(line)


class _Walk:
    """One pass over the lines of a file."""

    def __init__(self, lines: Sequence[Line], result: Scan, headed: bool) -> None:
        self.lines = lines
        self.result = result
        self.headed = headed
        self.i = 0
        self.stray_said = False

    def run(self) -> None:
        if not self.headed:
            self._defaults_without_header()
            self._section(open_end=True)
            return
        while self.i < len(self.lines):
            line = self.lines[self.i]
            header = _header(line)
            if header is not None:
                self.i += 1
                if header["nine"]:
                    self._nine()
                else:
                    self._defaults(line, header["all"] is not None)
                    self._section(open_end=False)
            elif (section := _SECTION.match(line.text)) is not None and not _is_blank(line):
                self._declarations(section[1].upper())
            else:
                self.i += 1

    # --- around the records ----------------------------------------------------------------------------------------

    def _defaults_without_header(self) -> None:
        at = self._next_content(0)
        found = None if at is None else _three(self.lines[at].text)
        if at is not None and found is not None:
            self.result.defaults_K = found
            self.i = at + 1

    def _defaults(self, header: Line, everything: bool) -> None:
        at = self._next_content(self.i)
        found = None if at is None else _three(self.lines[at].text)
        if at is not None and found is not None:
            self.result.defaults_K = found
            self.i = at + 1
            return
        make = refuse if everything else warn
        said = make(
            "defaults-missing",
            f"no line with three temperatures follows {' '.join(header.text.split())}",
            where=f"line {header.number}",
            expected="the default lowest, common and highest temperature on the next line",
            action="Put `   300.000  1000.000  5000.000` there; some readers stop without it.",
        )
        self.result.findings.append(said.shown(with_caret(header.text, 1, len(header.text.rstrip()))))

    def _declarations(self, keyword: str) -> None:
        """An ELEMENTS or SPECIES section of a mechanism; others are passed over line by line."""
        self.i += 1
        if keyword not in ("ELEM", "SPEC"):
            return
        self._declared(self.lines[self.i - 1].text.split("!")[0].split()[1:], keyword, self.i)
        while self.i < len(self.lines):
            line = self.lines[self.i]
            if _header(line) is not None or _SECTION.match(line.text):
                return
            self.i += 1
            if _END.match(line.text):
                return
            self._declared(line.text.split("!")[0].split(), keyword, line.number)

    def _declared(self, words: list[str], keyword: str, number: int) -> None:
        words = words[: words.index("END")] if "END" in words else words
        if keyword == "ELEM":
            self.result.elements.update(word.split("/")[0].capitalize() for word in words if word[0].isalpha())
        else:
            for word in words:
                self.result.declared.setdefault(word, number)

    def _nine(self) -> None:
        """A section of nine-coefficient records, whose species are named and passed over."""
        self.i = self._skip_nine_head(self.i)
        while self.i < len(self.lines):
            line = self.lines[self.i]
            if _END.match(line.text) or _SECTION.match(line.text) or _header(line) is not None:
                return
            self.i += 1
            if _is_blank(line):
                continue
            name = line.text.split()[0]
            self.result.passed_over.append(PassedOver(name, "NASA9", line.number))
            ranges = _COUNT_NINE.match(self.lines[self.i].text) if self.i < len(self.lines) else None
            self.i += 1 + 3 * int(ranges[1]) if ranges else 0

    def _skip_nine_head(self, i: int) -> int:
        at = self._next_content(i)
        return at + 1 if at is not None and re.match(r"\s*\d+\.?\d*\s+\d", self.lines[at].text) else i

    def _next_content(self, i: int) -> int | None:
        return next((j for j in range(i, len(self.lines)) if not _is_blank(self.lines[j])), None)

    # --- records ---------------------------------------------------------------------------------------------------

    def _section(self, open_end: bool) -> None:
        """Records up to END or the next section; where the file has no THERMO head, up to its end."""
        lead: int | None = None
        while self.i < len(self.lines):
            line = self.lines[self.i]
            if _is_blank(line):
                lead = None if not line.text.strip() else self.i if lead is None else lead
                self.i += 1
                continue
            if not open_end and (_header(line) is not None or self._other_section(line)):
                return
            if _END.match(line.text) and _digit(line) != "1":
                self.i += 1
                if not open_end:
                    return
                lead = None
                continue
            start = line.start if lead is None else self.lines[lead].start
            self._one(line, (start, line.start), open_end)
            lead = None

    def _other_section(self, line: Line) -> bool:
        return _digit(line) not in _DIGITS[:1] and _SECTION.match(line.text) is not None and len(line.text.strip()) < 60

    def _one(self, line: Line, lead: tuple[int, int], open_end: bool) -> None:
        if _is_first(line):
            self._record(line, lead)
            return
        self.i += 1
        if _is_numeric(line):
            if not self.stray_said and not open_end:
                self.result.findings.append(stray(line))
                self.stray_said = True
            return
        following = self._next_content(self.i)
        if following is not None and _is_numeric(self.lines[following]):
            last = self._swallow(line)
            name = (line.text.split() or [""])[0]
            self.result.entries.append(broken_record(line, last, lead, name, not_a_first(line)))
        elif not open_end:
            self.result.findings.append(not_a_first(line))

    def _record(self, first: Line, lead: tuple[int, int]) -> None:
        self.i += 1
        further = self._further(first)
        lines: list[Line] = []
        for digit in "234":
            at = self._next_content(self.i)
            line = None if at is None or _ends(self.lines[at]) else self.lines[at]
            if line is None or at is None or _digit(line) != digit:
                last = self._swallow(lines[-1] if lines else first)
                found = wrong_line(line, digit, first)
                name = (first.text[:24].split() or [""])[0]
                self.result.entries.append(broken_record(first, last, lead, name, found))
                return
            lines.append(line)
            self.i = at + 1
        record = Record(first, further, lines[0], lines[1], lines[2], lead)
        entry = read_record(record, self.result.defaults_K)
        said = not_ascii(record)
        if said is not None:
            entry = replace(entry, findings=(*entry.findings, said))
        self.result.entries.append(entry)

    def _further(self, first: Line) -> tuple[Line, ...]:
        further: list[Line] = []
        line = first
        while line.text[80:].split("!")[0].rstrip().endswith("&") or (further and line.text.rstrip().endswith("&")):
            at = self._next_content(self.i)
            if at is None or _digit(self.lines[at]) == "2":
                break
            line = self.lines[at]
            further.append(line)
            self.i = at + 1
        return tuple(further)

    def _swallow(self, last: Line) -> Line:
        """Moves over the coefficient lines that belong to a broken record; its last line."""
        while (at := self._next_content(self.i)) is not None and _is_numeric(self.lines[at]):
            last = self.lines[at]
            self.i = at + 1
        return last


def _ends(line: Line) -> bool:
    """Whether a section ends, or another one starts, with this line."""
    return _header(line) is not None or _END.match(line.text) is not None


def _three(text: str) -> tuple[float, float, float] | None:
    match = _THREE.fullmatch(text)
    if match is not None:
        return float(match[1]), float(match[2]), float(match[3])
    parts = [text[i : i + 10].strip() for i in (0, 10, 20)]
    if not text[30:].strip() and all(re.fullmatch(r"\d+\.\d*", p) for p in parts):
        return float(parts[0]), float(parts[1]), float(parts[2])
    return None
