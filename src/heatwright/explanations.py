"""Explanations of the finding codes, from ``data/explanations.toml``: group, an example and advice for each."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from functools import cache

from heatwright.findings import CODES
from heatwright.resources import data_text


@dataclass(frozen=True, slots=True)
class Explanation:
    """What one code means (from :data:`heatwright.findings.CODES`), a sentence that carries it, and what to do."""

    code: str
    group: str
    meaning: str
    example: str
    advice: str


@cache
def _all() -> dict[str, Explanation]:
    """Every explained code, in the order of the file; codes that are not (or no longer) registered are left out."""
    groups = tomllib.loads(data_text("explanations.toml"))
    return {
        code: Explanation(code, group, CODES[code], words["example"], words["advice"])
        for group, codes in groups.items()
        for code, words in codes.items()
        if code in CODES
    }


def explanation(code: str) -> Explanation | None:
    """The explanation of a code, or None when there is no such code.

    >>> explanation("imaginary-modes").group
    'Is it a minimum'
    """
    return _all().get(code)


def by_group() -> dict[str, tuple[Explanation, ...]]:
    """Every explanation under its group's heading, in the order of the file."""
    groups = dict.fromkeys(e.group for e in _all().values())
    return {group: tuple(e for e in _all().values() if e.group == group) for group in groups}
