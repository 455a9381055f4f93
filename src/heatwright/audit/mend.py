"""Mending a thermo file: what is faulty is refitted, everything else stays as it is, byte for byte."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from difflib import get_close_matches

from heatwright.audit.facts import Facts, facts_of
from heatwright.audit.joint import is_broken
from heatwright.audit.mending import Mended, mend_entry, mended_note, needs_mending
from heatwright.audit.rewriting import rewritten
from heatwright.findings import Finding, Refused, refusals, refuse
from heatwright.reading.entries import parse_entries
from heatwright.reading.entry_file import EntryFile, ThermoEntry


@dataclass(frozen=True, slots=True)
class MendedFile:
    """The bytes of a mended file, what was mended, and what could not be.

    findings : a note for each mended entry, a refusal for each faulty one that stayed as it was.
    """

    data: bytes
    mended: tuple[Mended, ...]
    findings: tuple[Finding, ...]


def mend_entries(file: EntryFile, only: Collection[str] = ()) -> MendedFile:
    """Refit the entries of *file* that need it.

    only : names; then no other entry is touched, and of these also kinks, single ranges and condensed species are.

    Raises Refused (``no-such-entry``) for a name that the file does not have.
    """
    _check_names(file, only)
    mended: list[Mended] = []
    findings: list[Finding] = []
    for entry in file.entries:
        if only and entry.name not in only:
            continue
        facts = facts_of(entry)
        if entry.polynomial is None:
            findings.append(_unread(entry))
        elif facts is not None and (why := needs_mending(facts, asked=bool(only))):
            result = mend_entry(facts, why)
            if isinstance(result, Mended):
                mended.append(result)
                findings.append(mended_note(result))
            else:
                findings.append(result)
    data = rewritten(file, mended)
    _check_result(file, data, mended)
    return MendedFile(data, tuple(mended), tuple(findings))


def _check_names(file: EntryFile, only: Collection[str]) -> None:
    names = {e.name for e in file.entries}
    for name in only:
        if name not in names:
            near = get_close_matches(name, names, 1, 0.5)
            action = f"Did you mean {near[0]}?" if near else "Names are case-sensitive."
            raise Refused([refuse("no-such-entry", f"there is no entry {name}", where=file.path, action=action)])


def _unread(entry: ThermoEntry) -> Finding:
    reason = refusals(entry.findings)[0]
    return refuse(
        "not-mendable",
        f"{entry.name or 'an entry without a name'} cannot be read and stays as it is: {reason.found}",
        where=reason.where,
        expected=reason.expected,
    )


def _check_result(file: EntryFile, data: bytes, mended: list[Mended]) -> None:
    """The new text, read again, has the mended entries, sound, and as many others as before."""
    if not mended:
        return
    again = parse_entries(data, file.path, format=file.format)
    sound = len(again.entries) == len(file.entries)
    for m in mended:
        place = file.entries.index(m.entry)
        facts: Facts | None = facts_of(again.entries[place]) if sound else None
        if facts is None or facts.entry.name != m.entry.name or is_broken(facts.polynomial):
            raise RuntimeError(f"{file.path}: the mended entry {m.entry.name} does not read back")
