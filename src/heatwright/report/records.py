"""Entries of a thermo file as species to be shown: the polynomial, and what the audit finds."""

from __future__ import annotations

import os
import re
from typing import Any

from heatwright.audit.audit import Audit, AuditedEntry, audit_entries
from heatwright.constants import BAR_PA
from heatwright.findings import refusals
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.reading.entry_file import EntryFile, ThermoEntry, decoded
from heatwright.report.documents import Failed, Shown
from heatwright.report.taking import species_of
from heatwright.writing.evidence import evidence_of_record


def shown_entries(file: EntryFile) -> Shown:
    """The species of a thermo file with the findings of an audit; entries without a polynomial are named with why."""
    audit = audit_entries(file)
    usable = [a for a in audit.entries if a.entry.polynomial is not None]
    species = tuple(species_of(entry_document(file, a), f"{file.path}: {a.entry.name}") for a in usable)
    return Shown(species, failed_entries(file, audit))


def failed_entries(file: EntryFile, audit: Audit) -> tuple[Failed, ...]:
    """Entries without a polynomial with the reason, and what has to be said about the file as a whole."""
    unread = [a for a in audit.entries if a.entry.polynomial is None]
    failed = [(f"{file.path}: {a.entry.name}", tuple(f.text for f in refusals(a.findings))) for a in unread]
    said = tuple(f.text for f in audit.findings if f.severity != "note" or f.code == "other-model")
    return (*failed, *([(file.path, said)] if said else []))


def entry_document(file: EntryFile, audited: AuditedEntry) -> dict[str, Any]:
    """One entry as an object like those of the JSON document, as far as a thermo file says it."""
    e = audited.entry
    pressure = e.reference_pressure_Pa
    return {
        "name": e.name,
        "formula": record_formula(e.composition),
        "composition": e.composition,
        "charge": e.charge,
        "evidence": _stated_evidence(file, e) or evidence_of_record(os.path.basename(file.path), e.note, e.polynomial),
        "standard_pressure_bar": None if pressure is None else pressure / BAR_PA,
        "nasa7": None if e.polynomial is None else _nasa7(e.polynomial),
        "source": {"file": f"{file.path}:{e.lines[0]}", "note": e.note or None},
        "findings": [f.as_json() for f in audited.findings],
    }


def _nasa7(p: Nasa7) -> dict[str, Any]:
    return {"T_K": [p.t_low_K, p.t_common_K, p.t_high_K], "low": list(p.low), "high": list(p.high)}


def record_formula(composition: dict[str, float]) -> str:
    """A formula in the order in which the entry has its elements, with the charge behind it.

    >>> record_formula({"H": 3, "O": 1, "E": -1})
    'H3O+'
    """
    atoms = "".join(f"{s}{n:g}" if n != 1 else s for s, n in composition.items() if s != "E" and n)
    charge = -round(composition.get("E", 0.0))
    sign = "+" if charge > 0 else "-"
    return f"{atoms}{sign * (charge != 0)}{abs(charge) if abs(charge) > 1 else ''}"


_SIGNS = (("cm^-1", "cm⁻¹"), ("dfH by", "ΔfH° by"), ("dfH given", "ΔfH° given"), ("+/-", "±"), ("in Cp,", "in Cp°,"))
"""What the comment of a record has in ASCII."""
_COMMENT = re.compile(r"^\s*[!#] ?")


def _stated_evidence(file: EntryFile, entry: ThermoEntry) -> str:
    """The evidence statement in the comment above an entry that heatwright wrote; empty without one."""
    words: list[str] = []
    for line in decoded(file.data[slice(*entry.lead)]).splitlines():
        text = _COMMENT.sub("", line)
        if text.startswith("evidence: "):
            words = [text.removeprefix("evidence: ")]
        elif words and text.startswith("  "):
            words.append(text.strip())
        elif words:
            break
    text = " ".join(words)
    for plain, sign in _SIGNS:
        text = text.replace(plain, sign)
    return text
