"""Elements and counts as thermo files write them."""

from __future__ import annotations

import re
from collections.abc import Mapping
from functools import cache

from heatwright.elements import atomic_number, element

_COUNT = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)")


def element_symbol(text: str) -> str | None:
    """The symbol as it is usually written, or None for what is no element; ``D``, ``T`` and ``E`` (electrons) count.

    >>> element_symbol("CL"), element_symbol("d"), element_symbol("X")
    ('Cl', 'D', None)
    """
    symbol = text.strip().capitalize()
    return symbol if symbol in _known() else None


def count(text: str) -> float | None:
    """A count as a number, an integer where it is one; None for anything else.

    >>> count("  4"), count("1."), count(".5"), count("1 2")
    (4, 1, 0.5, None)
    """
    stripped = text.strip()
    if not _COUNT.fullmatch(stripped):
        return None
    value = float(stripped)
    return int(value) if value.is_integer() else value


def molar_mass_u(composition: Mapping[str, float]) -> float:
    """Average molar mass, u; electrons weigh nothing here."""
    return sum(n * _weight(symbol) for symbol, n in composition.items())


@cache
def _known() -> frozenset[str]:
    return frozenset({element(z).symbol for z in range(1, 104)} | {"D", "T", "E"})


@cache
def _weight(symbol: str) -> float:
    if symbol in ("D", "T", "E"):
        return {"D": 2.0141, "T": 3.0160, "E": 0.0}[symbol]
    return element(atomic_number(symbol)).average_weight_u
