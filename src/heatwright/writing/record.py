"""One entry as the lines of a fixed 80-column record, or as the thermo data of a Cantera YAML species."""

from __future__ import annotations

import json
from collections.abc import Mapping
from typing import TYPE_CHECKING

from heatwright.findings import Refused, refuse
from heatwright.writing.numbers import coefficient, continuation, element_fields, fixed, left

if TYPE_CHECKING:
    from heatwright.polynomial.nasa7 import Nasa7

NOTE_COLUMNS = 6


def record_lines(
    name: str, composition: Mapping[str, float], polynomial: Nasa7, *, phase: str = "G", note: str = ""
) -> tuple[list[str], str, str, str]:
    """The lines of a record: the first (with the one after ``&`` where the elements need it) and the other three.

    note : goes into columns 19 to 24 when it fits there.

    Raises Refused (``value-unfit``) for what does not fit its field, a fractional count among them.
    """
    atoms = whole_counts(name, composition)
    date = note if len(note) <= NOTE_COLUMNS and note.isascii() else ""
    t, a, b = polynomial, polynomial.high, polynomial.low
    first = (
        f"{left(name, 18)}{left(date, NOTE_COLUMNS)}{element_fields(atoms)}{left(phase or 'G', 1)}"
        f"{fixed(t.t_low_K, 10, 3)}{fixed(t.t_high_K, 10, 3)}{fixed(t.t_common_K, 8, 2)}{'':6}1{continuation(atoms)}"
    )
    second = "".join(map(coefficient, a[:5])) + "    2"
    third = "".join(map(coefficient, (*a[5:], *b[:3]))) + "    3"
    fourth = "".join(map(coefficient, b[3:])) + f"{'':15}    4"
    return first.split("\n"), second, third, fourth


def whole_counts(name: str, composition: Mapping[str, float]) -> dict[str, int]:
    """The composition as whole numbers; raises Refused (``value-unfit``) where it has a fraction."""
    for symbol, n in composition.items():
        if n != int(n):
            found = f"{name} has {n:g} atoms of {symbol}"
            raise Refused([refuse("value-unfit", found, expected="a whole number, which is all a record can hold")])
    return {symbol: int(n) for symbol, n in composition.items()}


def yaml_thermo_lines(polynomial: Nasa7, *, pressure_Pa: float | None = None, note: str = "") -> list[str]:
    """The lines below ``thermo:`` of a species, without indentation; *pressure_Pa* None leaves the pressure out."""
    p = polynomial
    rows = [f"[{', '.join(coefficient(a).strip() for a in row)}]" for row in (p.low, p.high)]
    lines = ["model: NASA7"]
    if pressure_Pa is not None:
        lines.append(f"reference-pressure: {pressure_Pa!r} Pa")
    lines += [f"temperature-ranges: [{p.t_low_K!r}, {p.t_common_K!r}, {p.t_high_K!r}]", "data:"]
    lines += [f"- {row}" for row in rows]
    return [*lines, f"note: {json.dumps(note)}"] if note else lines


def yaml_thermo_flow(polynomial: Nasa7, *, pressure_Pa: float | None = None, note: str = "") -> str:
    """The same in one pair of braces."""
    lines = yaml_thermo_lines(polynomial, pressure_Pa=pressure_Pa, note=note)
    rows = ", ".join(line.removeprefix("- ") for line in lines if line.startswith("- "))
    others = [line for line in lines if not line.startswith("- ")]
    return "{" + ", ".join(f"data: [{rows}]" if line == "data:" else line for line in others) + "}"
