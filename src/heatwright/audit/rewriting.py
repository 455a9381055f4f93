"""Mended entries as text: only the numbers that changed, in their own places; every other byte stays."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from heatwright.audit.mending import Mended
from heatwright.findings import Refused, refuse
from heatwright.reading.entry_file import EntryFile, Span
from heatwright.writing.numbers import coefficient, fixed

Edit = tuple[Span, bytes]


def rewritten(file: EntryFile, mended: Iterable[Mended]) -> bytes:
    """The bytes of *file* with the numbers of the mended entries in the place of the old ones.

    Raises Refused when the new numbers have no place in the text.
    """
    edits = sorted(edit for m in mended for edit in _edits(file, m))
    out, last = [], 0
    for (start, end), text in edits:
        out.append(file.data[last:start])
        out.append(text)
        last = end
    return b"".join([*out, file.data[last:]])


def _edits(file: EntryFile, m: Mended) -> Iterator[Edit]:
    rows = (m.new.low, m.new.high)
    spans = m.entry.coefficient_spans
    if len(spans) == 1:
        yield from _second_row(file, m)
        return
    if m.new is m.old:
        yield from _copied_row(file, m)
    else:
        for row, places in zip(rows, spans, strict=True):
            changed = zip(row, places, strict=True)
            yield from ((span, _number(file, value)) for value, span in changed if not _says(file, span, value))
    temperatures = (m.new.t_low_K, m.new.t_common_K, m.new.t_high_K)
    for i, (value, span) in enumerate(zip(temperatures, m.entry.temperature_spans, strict=True)):
        # a blank common temperature that was taken from the head stays blank as long as it is the same
        if value != m.entry.stated_K[i]:
            yield span, _temperature(file, span, value, i).encode()


def _copied_row(file: EntryFile, m: Mended) -> Iterator[Edit]:
    """The numbers of the range that is there, as they are written, in the places of the other one."""
    low, high = m.entry.coefficient_spans
    given, missing = (high, low) if m.entry.ranges == "high" else (low, high)
    if m.entry.ranges == "one" and any(m.new.low) and not any(_value(file, span) for span in low):
        given, missing = high, low
    for source, target in zip(given, missing, strict=True):
        yield target, file.data[slice(*source)]


def _value(file: EntryFile, span: Span) -> float:
    text = file.data[slice(*span)].decode("latin-1").strip().upper().replace("D", "E")
    return float(text) if text else 0.0


def _says(file: EntryFile, span: Span, value: float) -> bool:
    try:
        return _value(file, span) == value
    except ValueError:
        return False


def _number(file: EntryFile, value: float) -> bytes:
    text = coefficient(value)
    return (text if file.format == "nasa7" else text.strip().lower()).encode()


def _temperature(file: EntryFile, span: Span, value: float, which: int) -> str:
    if file.format == "yaml":
        return repr(value)
    width = span[1] - span[0]
    return fixed(value, width, 2 if which == 1 else 3)


def _second_row(file: EntryFile, m: Mended) -> Iterator[Edit]:
    """One range of YAML becomes two: its row of coefficients twice, a common temperature between the two others."""
    (row,) = m.entry.coefficient_spans
    opening = file.data.rfind(b"[", m.entry.span[0], row[0][0])
    closing = file.data.find(b"]", row[-1][1], m.entry.span[1])
    if opening < 0 or closing < 0 or len(m.entry.temperature_spans) != 2:
        words = f"{m.entry.name}: there is no place for a second range in the text"
        raise Refused([refuse("not-mendable", words, where=f"{file.path}:{m.entry.lines[0]}")])
    copy = file.data[opening : closing + 1]
    line = file.data.rfind(b"\n", 0, opening) + 1
    before = file.data[line:opening]
    between = file.newline.encode() + before if before.strip() == b"-" else b", "
    yield (closing + 1, closing + 1), between + copy
    end = m.entry.temperature_spans[0][1]
    yield (end, end), f", {m.new.t_common_K!r}".encode()
