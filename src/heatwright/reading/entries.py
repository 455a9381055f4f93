"""Existing thermo files: reading their entries strictly, and putting others in their place.

``read_entries`` takes a file of fixed 80-column records (alone, with a THERMO head, or inside a mechanism) or a Cantera
YAML file.  ``replace_entries`` gives the file's bytes with some entries replaced and every other byte as it was.
"""

from __future__ import annotations

import os
import re
from collections import Counter
from collections.abc import Mapping
from pathlib import Path
from typing import Final, Literal

from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.polynomial.plausibility import ranges_swapped
from heatwright.reading.entry_file import EntryFile, PassedOver, Span, ThermoEntry, decoded, with_finding
from heatwright.reading.record_file import lines_of, scan
from heatwright.reading.yaml_species import scan_yaml

MOST_BYTES: Final = 200_000_000
"""The largest thermo file that is read; mechanisms with thousands of species have 10 MB."""
_YAML = re.compile(rb"^(?:species|phases|units|description|generator|[\w.-]*species)\s*:", re.MULTILINE)
_TWO_LINES = re.compile(rb"^.{79}1(?:&[^\n]*\n[^\n]*)?\r?\n.{79}2\s*$", re.MULTILINE)
_THERMO = re.compile(rb"^[ \t]*THER(?:MO)?(?:[ \t]+(?:ALL|NASA9))*[ \t]*(?:!.*)?\r?$", re.MULTILINE | re.IGNORECASE)

__all__ = ["EntryFile", "PassedOver", "ThermoEntry", "parse_entries", "read_entries", "replace_entries"]


def read_entries(path: str | os.PathLike[str]) -> EntryFile:
    """Every entry of a thermo file, with its place and what there is to say about it.

    Raises Refused (``file-missing``, ``file-empty``, ``file-too-large``, ``no-entries``, ``yaml-unreadable``).  An
    entry that cannot be used does not stop the others: it has no polynomial and says why.
    """
    return parse_entries(_bytes_of(path), os.fspath(path))


def parse_entries(data: bytes, path: str = "", *, format: Literal["nasa7", "yaml"] | None = None) -> EntryFile:
    """The same for bytes; *path* is only for findings, and its ending for the format where the text does not say it.

    >>> zeros, both = f"{0.0:15.8E}" * 4, f"{25473.7:15.8E}{-0.44668:15.8E}"
    >>> first = f"{'H':24}H   1{'':15}G{200.0:10.3f}{6000.0:10.3f}{1000.0:8.2f}{'':6}1"
    >>> second, third = f"{2.5:15.8E}{zeros}    2", f"{both}{2.5:15.8E}{zeros[:30]}    3"
    >>> fourth = f"{zeros[:30]}{both}{'':15}    4"
    >>> file = parse_entries("\\n".join([first, second, third, fourth]).encode())
    >>> file.entries[0].name, file.entries[0].composition, file.entries[0].polynomial.t_high_K
    ('H', {'H': 1}, 6000.0)
    """
    if not data.strip(b" \t\r\n\x00\xef\xbb\xbf"):
        raise Refused([refuse("file-empty", "the file holds nothing to read", action="Give another file.")])
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        action = "Save it as plain text (ASCII or UTF-8)."
        raise Refused([refuse("no-entries", "the file is written in UTF-16", expected="plain text", action=action)])
    kind = format or _format_of(data, path)
    file = _yaml_file(data, path) if kind == "yaml" else _record_file(data, path)
    if not file.usable:
        _refuse_output(data)
    if not file.entries and not file.passed_over:
        raise Refused(
            [
                *(f for f in file.findings if f.severity == "refuse"),
                refuse(
                    "no-entries",
                    "there is no thermo entry in the file",
                    expected="fixed 80-column records (the digit 1 in column 80) or Cantera YAML with species",
                    action="Mechanisms in other forms can be converted by Cantera's cti2yaml and ctml2yaml.",
                ),
            ]
        )
    return file


def _refuse_output(data: bytes) -> None:
    """Raises Refused for a quantum-chemistry output, many lines of which could be those of broken records."""
    from heatwright.reading.detection import HEAD, detect

    program = detect(data[:HEAD].decode("latin-1")).program
    if program is not None:
        words = f"the file is an output of {program.name}"
        action = "`heatwright entry` makes a thermo entry of an output."
        raise Refused([refuse("no-entries", words, expected="a thermo file", action=action)])


def replace_entries(file: EntryFile, texts: Mapping[str | Span, str]) -> bytes:
    """The bytes of *file* with the entries named (or placed) by the keys replaced by *texts*; all others as they are.

    texts : by name, or by span where a name is there twice; lines with plain line ends, which become the file's own.
        YAML text starts with ``- name:`` in the first column and is indented like the item that it replaces.  A text
        ``""`` takes the entry out.

    Raises Refused (``no-such-entry``).
    """
    spans = {_span_of(file, key): text for key, text in texts.items()}
    out, last = [], 0
    for (start, end), text in sorted(spans.items()):
        out.append(file.data[last:start])
        out.append(_fitted(file, file.data[start:end], text))
        last = end
    return b"".join([*out, file.data[last:]])


def _span_of(file: EntryFile, key: str | Span) -> Span:
    if not isinstance(key, str):
        if any(e.span == key for e in file.entries):
            return key
        raise Refused([refuse("no-such-entry", f"no entry stands at bytes {key[0]} to {key[1]}", where=file.path)])
    found = file.named(key)
    if len(found) == 1:
        return found[0].span
    lines = ", ".join(str(e.lines[0]) for e in found)
    what = f"the entry {key} is there {len(found)} times (lines {lines})" if found else f"there is no entry {key}"
    action = "Take out all but one of them first." if found else "Names are case-sensitive."
    raise Refused([refuse("no-such-entry", what, where=file.path, expected="one entry of this name", action=action)])


def _fitted(file: EntryFile, old: bytes, text: str) -> bytes:
    """*text* with the indentation and the line ends of what it replaces."""
    if not text:
        return b""
    lines = text.rstrip("\n").split("\n")
    if file.format == "yaml":
        indent = old[: len(old) - len(old.lstrip(b" "))].decode("ascii")
        if not old.lstrip(b" ").startswith(b"-"):
            raise Refused(
                [
                    refuse(
                        "no-such-entry",
                        "the species stand in one bracketed list, where lines cannot be replaced",
                        where=file.path,
                        expected="a block of lines that starts with `- name:` for each species",
                    )
                ]
            )
        lines = [indent + line if line else line for line in lines]
    ending = b"" if not old.endswith((b"\n", b"\r")) else file.newline.encode()
    encoding = "utf-8" if _is_utf8(file.data) else "latin-1"
    return file.newline.join(lines).encode(encoding, errors="replace") + ending


def _is_utf8(data: bytes) -> bool:
    try:
        data.decode("utf-8")
    except UnicodeDecodeError:
        return False
    return True


def _bytes_of(path: str | os.PathLike[str]) -> bytes:
    file = Path(path)
    action = "Give the path of a thermo file: fixed 80-column records or Cantera YAML."
    try:
        if file.is_dir():
            raise Refused([refuse("file-missing", "this is a directory, not a thermo file", action=action)])
        if file.stat().st_size > MOST_BYTES:
            most = f"at most {MOST_BYTES // 1_000_000} MB"
            raise Refused([refuse("file-too-large", "the file is too large for a thermo file", expected=most)])
        return file.read_bytes()
    except FileNotFoundError:
        raise Refused([refuse("file-missing", "there is no such file", action=action)]) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise Refused([refuse("file-missing", f"the file cannot be read ({reason})", action=action)]) from None


def _format_of(data: bytes, path: str) -> Literal["nasa7", "yaml"]:
    """By the text; by the file's ending where the text says nothing."""
    if path.lower().endswith((".yaml", ".yml")):
        return "yaml"
    return "yaml" if _YAML.search(data) and not _THERMO.search(data) else "nasa7"


def looks_like_entries(text: str) -> bool:
    """Whether a text may be a thermo file: records numbered 1 and 2 in column 80, a THERMO line, or Cantera YAML."""
    data = text.encode("utf-8", errors="replace")
    return any(found.search(data) for found in (_TWO_LINES, _THERMO, _YAML))


def _newline(data: bytes) -> str:
    pairs = data.count(b"\r\n")
    counts = {"\n": data.count(b"\n") - pairs, "\r\n": pairs, "\r": data.count(b"\r") - pairs}
    return max(counts, key=lambda end: counts[end])


def _record_file(data: bytes, path: str) -> EntryFile:
    found = scan(lines_of(data))
    return EntryFile(
        path=path,
        data=data,
        format="nasa7",
        newline=_newline(data),
        defaults_K=found.defaults_K,
        entries=tuple(map(_swapped, found.entries)),
        passed_over=tuple(found.passed_over),
        findings=(*found.findings, *_passed_over(found.passed_over), *_undeclared(found.declared, found.entries)),
    )


def _yaml_file(data: bytes, path: str) -> EntryFile:
    offsets = [0]
    for raw in data.splitlines(keepends=True):
        offsets.append(offsets[-1] + len(raw))
    text = decoded(data).removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n")
    found = scan_yaml(text, tuple(offsets), "utf-8" if _is_utf8(data) else "latin-1")
    return EntryFile(
        path=path,
        data=data,
        format="yaml",
        newline=_newline(data),
        defaults_K=None,
        entries=tuple(map(_swapped, found.entries)),
        passed_over=tuple(found.passed_over),
        findings=(*found.findings, *_passed_over(found.passed_over)),
    )


def _swapped(entry: ThermoEntry) -> ThermoEntry:
    """*entry*, refused when the coefficients of its two ranges have changed places."""
    if entry.polynomial is None or entry.ranges != "both" or not ranges_swapped(entry.polynomial, entry.atoms):
        return entry
    said = refuse(
        "ranges-swapped",
        f"the two ranges of {entry.name} have changed places: as it stands Cp leaves every bound, swapped it does not",
        where=f"line {entry.lines[0]}",
        expected="the high range first in a fixed record, the low range first in YAML",
        action="Exchange the two sets of seven coefficients; both meet at the common temperature either way, so that "
        "other readers do not notice.",
    )
    return with_finding(entry, said)


def _passed_over(species: list[PassedOver]) -> list[Finding]:
    """One finding for each other model, with the species that have it."""
    models = Counter(s.model for s in species)
    said = []
    for model in models:
        those = [s for s in species if s.model == model]
        names = ", ".join(s.name for s in those[:8]) + (", …" if len(those) > 8 else "")
        found = f"{len(those)} species with the model {model} passed over: {names}"
        said.append(note("other-model", found, where=f"line {those[0].line}", expected="NASA7"))
    return said


def _undeclared(declared: dict[str, int], entries: list[ThermoEntry]) -> list[Finding]:
    """Species of the mechanism in the same file that differ from an entry's name in case only."""
    names = {e.name for e in entries}
    by_case = {name.upper(): name for name in names}
    return [
        warn(
            "name-case",
            f"the mechanism declares {word}, the entry is called {by_case[word.upper()]}",
            where=f"line {line}",
            expected="the same name: readers tell upper from lower case",
        )
        for word, line in declared.items()
        if word not in names and word.upper() in by_case
    ]
