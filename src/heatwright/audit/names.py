"""What composition a species name can stand for, so that a name and a composition that contradict each other are seen.

Names of mechanisms are written in capitals (``CO`` is not cobalt), carry prefixes, labels and states, and many are no
formula at all.  Only a name that reads as a formula from end to end says anything here.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from functools import cache

from heatwright.reading.compositions import element_symbol

Counts = tuple[tuple[str, int], ...]

_STATE = re.compile(r"\((?:[a-zA-Z]{1,4}\d?)\)$|[*']+$|,.*$")
_CHARGE = re.compile(r"(?<=[A-Za-z0-9)])([+-]+)$")
_PREFIXES = re.compile(r"(?:cis-|trans-|cyc|[NISTCAPOMXWB](?=[A-Z]))", re.IGNORECASE)
_MOST_READINGS = 64


def charge_in(name: str, composition: Mapping[str, float]) -> int | None:
    """The charge that a name ends with; None when it says nothing, or is no formula, so that the sign may be a label.

    >>> charge_in("NO+", {"N": 1, "O": 1}), charge_in("A1-", {"C": 6, "H": 5}), charge_in("CH4", {"C": 1, "H": 4})
    (1, None, None)
    """
    plain = _STATE.sub("", name)
    match = _CHARGE.search(plain)
    wanted = {s: n for s, n in composition.items() if s != "E"}
    if match is None or not any(_fits(r, wanted) for r in _readings(plain[: match.start()])):
        return None
    return match[1].count("+") - match[1].count("-")


def contradicts(name: str, composition: Mapping[str, float]) -> bool:
    """Whether *name* is a formula, and certainly another one than *composition*.

    >>> contradicts("CH3OH", {"C": 1, "H": 3, "O": 1}), contradicts("CO2", {"C": 1, "O": 2})
    (True, False)
    >>> contradicts("NC7H16", {"C": 7, "H": 16}), contradicts("PROPANE", {"C": 3, "H": 8})
    (False, False)
    """
    wanted = {s: n for s, n in composition.items() if s != "E"}
    bare = _CHARGE.sub("", _STATE.sub("", name))
    readings = list(_readings(bare))
    if not readings or any(_fits(r, wanted) for r in readings):
        return False
    if any(_fits(r, wanted) for text in _shorter(bare) for r in _readings(text)):
        return False
    # only a name of the same elements, in other numbers, is certainly a formula
    return any({s for s, _ in r} == set(wanted) for r in readings) and len(bare) > 1


def _fits(reading: Counts, wanted: Mapping[str, float]) -> bool:
    return dict(reading) == wanted


def _shorter(name: str) -> Iterator[str]:
    """The name without a prefix, and without digits at its end that may be a label."""
    prefix = _PREFIXES.match(name)
    starts = [name] if prefix is None else [name, name[prefix.end() :]]
    for text in starts:
        yield text
        digits = len(text) - len(text.rstrip("0123456789"))
        yield from (text[:-cut] for cut in range(1, digits + 1))
        if text.endswith("C"):
            yield text[:-1]  # cyclic


def _readings(name: str) -> tuple[Counts, ...]:
    if not re.fullmatch(r"[A-Za-z0-9()]+", name) or len(name) > 24:
        return ()
    return tuple(sorted({_sorted(c) for c in _parse(name)}))[:_MOST_READINGS]


def _sorted(counts: Counts) -> Counts:
    total: dict[str, int] = {}
    for symbol, n in counts:
        total[symbol] = total.get(symbol, 0) + n
    return tuple(sorted(total.items()))


@cache
def _parse(text: str) -> tuple[Counts, ...]:
    """Every way to read *text* as symbols with counts, in any case, and groups in parentheses."""
    if not text:
        return ((),)
    if text[0] == "(":
        return _group(text)
    found: list[Counts] = []
    for width in (1, 2):
        symbol = element_symbol(text[:width]) if text[:width].isalpha() and len(text) >= width else None
        if symbol is None or symbol in ("E", "T"):
            continue
        digits = re.match(r"\d*", text[width:])
        number = digits[0] if digits else ""
        if number and int(number) == 0:
            continue
        rest = text[width + len(number) :]
        found.extend((((symbol, int(number or 1)), *more)) for more in _parse(rest))
        if len(found) > _MOST_READINGS:
            break
    return tuple(found[:_MOST_READINGS])


def _group(text: str) -> tuple[Counts, ...]:
    close = text.find(")")
    inside = text[1:close]
    if close < 0 or "(" in inside:
        return ()
    digits = re.match(r"\d*", text[close + 1 :])
    number = digits[0] if digits else ""
    rest = text[close + 1 + len(number) :]
    times = int(number or 1)
    return tuple((*((s, n * times) for s, n in group), *more) for group in _parse(inside) for more in _parse(rest))[
        :_MOST_READINGS
    ]
