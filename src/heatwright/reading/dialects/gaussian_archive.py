"""The energies in the archive that closes a Gaussian job, against those found in its text."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING, Final

from heatwright.findings import Finding, refuse, warn
from heatwright.reading.dialects.base import METHOD_RANK
from heatwright.reading.hessians import archive_parts

if TYPE_CHECKING:
    from heatwright.reading.text import Text

_KINDS: Final = {
    "HF": "SCF",
    "MP2": "MP2",
    "MP3": "MP3",
    "MP4DQ": "MP4(DQ)",
    "MP4SDQ": "MP4(SDQ)",
    "MP4SDTQ": "MP4",
    "CCSD": "CCSD",
    "CCSD(T)": "CCSD(T)",
    "QCISD": "QCISD",
    "QCISD(T)": "QCISD(T)",
    "BD": "BD",
    "BD(T)": "BD(T)",
}
"""Names in the archive; others belong to composite methods, whose parts are not told apart here."""
_PRINTED_HARTREE: Final = 2.0e-6
"""Difference of one energy printed twice, which is rounded to seven decimals in the archive."""


def archived_energies(job: Text) -> dict[str, float]:
    """Total energies by kind; empty when there is no archive, or one of a scan with several energies of a kind."""
    found: dict[str, float] = {}
    for part in archive_parts(job):
        for name, value in re.findall(r"(?:^|\\)([A-Z]+\d*[A-Z]*(?:\(T\))?)=(-\d+\.\d+(?:,-?\d+\.\d+)*)", part):
            if "," in value:
                return {}
            if name in _KINDS:
                found[_KINDS[name]] = float(value)
    return found


def contradictions(job: Text, point: Mapping[str, float], kind: str) -> Iterator[Finding]:
    """An energy of a higher level than the one in use that only the archive has, or another value for it."""
    archived = archived_energies(job)
    if not kind or "SCF" not in archived:
        return
    highest = max(archived, key=lambda k: METHOD_RANK[k])
    action = "The output is damaged, or of a version that words its lines differently."
    if METHOD_RANK[highest] > METHOD_RANK.get(kind, 0):
        words = f"the archive names a {highest} energy ({archived[highest]:.7f} hartree) that the text does not hold"
        yield refuse("parser-failed", words, expected=f"{kind} as the highest level", action=action)
    elif kind in archived and abs(archived[kind] - point[kind]) > _PRINTED_HARTREE:
        words = f"the archive names another {kind} energy ({archived[kind]:.7f} hartree) than the text"
        yield warn("parser-failed", words, expected=f"{point[kind]:.7f}", action=action)
