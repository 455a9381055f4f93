"""Fixed records put into an 80-column file: line by line, so that line ends and lines between them stay."""

from __future__ import annotations

import re
from collections.abc import Iterable

from heatwright.findings import Refused, refuse
from heatwright.project.thermo_set import Thermo
from heatwright.reading.entry_file import EntryFile, Span, ThermoEntry, decoded
from heatwright.writing.record import record_lines

_SPECIES = re.compile(
    r"^[ \t]*SPEC(?:IES)?\b(.*?)(?=^[ \t]*(?:END|THER|REAC|ELEM|TRAN)|\Z)", re.MULTILINE | re.DOTALL | re.IGNORECASE
)
_COMMENT = re.compile(r"!.*")


def replaced_record(file: EntryFile, thermo: Thermo, entry: ThermoEntry) -> bytes:
    """The bytes of an entry's span with the lines of the record replaced, each with the line end that it had."""
    first, *rest = _lines(thermo, entry)
    old = file.data[slice(*entry.span)].splitlines(keepends=True)
    content = [i for i, line in enumerate(old) if line.strip() and not line.lstrip().startswith(b"!")]
    # the lines with elements after & lie between the first line and the last three
    gone = set(content[1:-3])
    new = {content[0]: first, **dict(zip(content[-3:], rest, strict=True))}
    out = []
    for i, line in enumerate(old):
        if i in new:
            ending = line[len(line.rstrip(b"\r\n")) :]
            between = ending or file.newline.encode()
            out.append(between.join(text.encode("ascii") for text in new[i]) + ending)
        elif i not in gone:
            out.append(line)
    return _mark(file, entry.span) + b"".join(out)


def _mark(file: EntryFile, span: Span) -> bytes:
    """A byte order mark inside the span, which is no part of the record."""
    mark = b"\xef\xbb\xbf"
    return mark if span[0] == 0 and file.data.startswith(mark) else b""


def _lines(thermo: Thermo, entry: ThermoEntry | None) -> list[list[str]]:
    assert thermo.polynomial is not None
    # the file's own order of elements
    composition = thermo.composition if entry is None else entry.composition
    phase = thermo.phase if entry is None or not entry.phase else entry.phase
    try:
        first, *rest = record_lines(
            thermo.name, composition, thermo.polynomial.rounded(), phase=phase, note=thermo.note
        )
    except Refused as error:
        raise Refused(f.at(thermo.where) for f in error.findings) from error
    return [first, *([line] for line in rest)]


def added_records(file: EntryFile, added: list[Thermo]) -> tuple[Span, bytes]:
    """The place behind the last entry and what is to stand there."""
    if not file.entries:
        found = "the file has no entry behind which others could stand"
        raise Refused([refuse("no-entries", found, where=file.path)])
    end = max(e.span[1] for e in file.entries)
    newline = file.newline.encode()
    lines = [line.encode("ascii") for t in added for part in _lines(t, None) for line in part]
    block = b"".join(line + newline for line in lines)
    return (end, end), block if file.data[:end].endswith((b"\n", b"\r")) else newline + block.removesuffix(newline)


def undeclared_in_records(file: EntryFile, names: Iterable[str]) -> list[str]:
    """Names that the SPECIES section of a mechanism does not hold; none where the file has no such section."""
    sections = [_COMMENT.sub("", m[1]) for m in _SPECIES.finditer(decoded(file.data))]
    words = {word for section in sections for word in section.split()}
    return [n for n in names if n not in words] if sections else []
