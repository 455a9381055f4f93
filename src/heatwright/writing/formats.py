"""Formats: each one is a row with a name, a template, and what its fields can hold."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

from heatwright.findings import Finding, refuse


@dataclass(frozen=True, slots=True)
class Format:
    """One output format: its name, the template that makes it, and the check a species name has to pass."""

    name: str
    template: str
    about: str
    name_findings: Callable[[str], tuple[Finding, ...]]


NASA7_NAME_COLUMNS: Final = 18
"""Columns 1-18 of the fixed record hold the species name."""


_KEYWORD: Final = re.compile(
    r"(END|ELEM(ENTS)?|SPEC(IES)?|THER(M|MO)?|REAC(TIONS?)?|TRAN(SPORT)?|SITE|BULK|SURF(ACE)?|MATE(RIAL)?)\b",
    re.IGNORECASE,
)
"""What opens or closes a section where a line begins with it."""


def _nasa7_name(name: str) -> tuple[Finding, ...]:
    if not name:
        return (refuse("name-unfit", "the species has no name", action="Give one by --name."),)
    if len(name) > NASA7_NAME_COLUMNS:
        return (
            refuse(
                "name-unfit",
                f"the species name {name!r} has {len(name)} characters",
                expected=f"at most {NASA7_NAME_COLUMNS}, the width of the record's name field",
                action="Give a shorter one by --name.",
            ),
        )
    bad = sorted({c for c in name if not ("!" < c <= "~")} | ({"&"} & set(name)))
    if bad:
        return (
            refuse(
                "name-unfit",
                f"the species name {name!r} holds {' '.join(map(repr, bad))}",
                expected="printable ASCII characters without blanks, '!' and '&'",
                action="Give another one by --name.",
            ),
        )
    if _KEYWORD.match(name):
        words = f"the species name {name!r} reads as the keyword of a section at the start of a record"
        return (refuse("name-unfit", words, action="Give another one by --name."),)
    return ()


def _free_name(name: str) -> tuple[Finding, ...]:
    if name and all(c.isprintable() for c in name):
        return ()
    return (
        refuse(
            "name-unfit",
            f"the species name {name!r} is empty or holds control characters",
            action="Give another one by --name.",
        ),
    )


FORMATS: Final[dict[str, Format]] = {
    row.name: row
    for row in (
        Format("nasa7", "nasa7.j2", "the fixed 80-column record of a thermo file", _nasa7_name),
        Format("yaml", "yaml.j2", "Cantera YAML species", _free_name),
        Format("json", "json.j2", "everything, for scripts", _free_name),
        Format("csv", "csv.j2", "the table of functions", _free_name),
    )
}
"""The formats of ``entry`` by name; a new one is a row here and a file in ``templates/``."""


def fits_record_name(name: str) -> bool:
    """Whether *name* can stand in the fixed record."""
    return not _nasa7_name(name)
