"""What the templates see: the species as in the JSON document, with the few texts that only records need."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

from heatwright.writing.comment import CAUTION, comment_lines
from heatwright.writing.document import failure_document, nasa7_document, species_document, whole_document
from heatwright.writing.render import table_context

if TYPE_CHECKING:
    from heatwright.entry import Entry
    from heatwright.findings import Finding


def entries_context(entries: Sequence[Entry], failed: Iterable[tuple[str, Iterable[Finding]]] = ()) -> dict[str, Any]:
    """The variables of an entry template.

    species : the species objects of the JSON document, each with ``charged_composition`` (with ``E`` for the electrons
    of an ion), ``phase``, ``standard_pressure_Pa``, ``note`` and ``comment`` (lines of ASCII text) besides.
    document : the whole JSON document.   defaults : low, common and high temperature for a file's head.
    elements : all element symbols.   contribution_names : for the table.   caution : two lines for the file's head.
    """
    documents = [species_document(e.name, e.model, e.table, e.findings, e) for e in entries]
    species = [document | _record(e) for document, e in zip(documents, entries, strict=True)]
    polynomials = [e.polynomial for e in entries]
    return {
        "document": whole_document(documents, [failure_document(file, found) for file, found in failed]),
        "defaults": [
            min((p.t_low_K for p in polynomials), default=200.0),
            1000.0,
            max((p.t_high_K for p in polynomials), default=6000.0),
        ],
        "elements": list(dict.fromkeys(symbol for s in species for symbol in s["charged_composition"])),
        "caution": CAUTION,
        **table_context(species),
    }


def records_context(entries: Sequence[Entry], defaults_K: Sequence[float], elements: Sequence[str]) -> dict[str, Any]:
    """What the templates of records need, and no more: the formats ``nasa7`` and ``yaml`` without the JSON document.

    defaults_K, elements : for the file's head, as :func:`entries_context` finds them for all entries of a file.
    """
    records = [{"name": e.name, "nasa7": nasa7_document(e.polynomial), **_record(e)} for e in entries]
    return {"species": records, "defaults": list(defaults_K), "elements": list(elements), "caution": CAUTION}


def _record(entry: Entry) -> dict[str, Any]:
    return {
        "charged_composition": entry.charged_composition,
        "phase": entry.phase,
        "standard_pressure_Pa": entry.model.options.pressure_Pa,
        "note": entry.note,
        "comment": list(comment_lines(entry)),
    }
