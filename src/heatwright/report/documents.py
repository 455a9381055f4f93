"""JSON documents of entries (``heatwright entry --format json``) as species to be shown."""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from heatwright.findings import Refused, refuse
from heatwright.reading.files import read_text
from heatwright.report.species import Species
from heatwright.report.taking import species_of
from heatwright.report.values import Values
from heatwright.writing.document import JSON_VERSION, species_document

if TYPE_CHECKING:
    from heatwright.entry import Entry

Failed = tuple[str, tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class Shown:
    """Species to be shown, and (file, sentences) of what could not be.

    title : what they are together, where that is known.   remarks : what has to be said about all of them.
    """

    species: tuple[Species, ...]
    failed: tuple[Failed, ...] = ()
    title: str = ""
    remarks: tuple[str, ...] = ()


def read_documents(path: str) -> Shown:
    """The species of a JSON document; raises Refused (``document-wrong``) with the key that is wrong."""
    try:
        document = json.loads(read_text(path).text)
    except (ValueError, RecursionError) as error:
        raise Refused([refuse("document-wrong", f"this is no JSON ({error})", where=path)]) from error
    return shown_documents(document, path)


def shown_documents(document: Any, where: str = "the document") -> Shown:
    """The same for a document that has been read already, or was just made."""
    v = Values(document, where)
    version = v.whole_or_none("heatwright")
    if version != JSON_VERSION:
        found = "it has no key heatwright" if version is None else f"its version is {version}"
        v.wrong(found, f"a document of version {JSON_VERSION}")
    species = [species_of(s, f"{where}: species {i}") for i, s in enumerate(v.items("species"), start=1)]
    failed = []
    for item in v.tables("failed"):
        failed.append((item.text("file"), tuple(f.text("text") for f in item.tables("findings"))))
    return Shown(tuple(species), tuple(failed))


def document_of_entry(made: Entry) -> dict[str, Any]:
    """An entry as the object of a JSON document."""
    return species_document(made.name, made.model, made.table, made.findings, made)


def is_document(text: str) -> bool:
    """Whether a text may be a JSON document of heatwright's: an object with that key near its start."""
    head = text[:400].lstrip("\ufeff \t\r\n")
    return head.startswith("{") and '"heatwright"' in head
