"""Fixed-width fields: a value that does not fit, or would be read back as another one, is an error, never a shift."""

from __future__ import annotations

import json
import re
from collections.abc import Mapping, Sequence
from functools import lru_cache
from math import isfinite
from typing import Any

from heatwright.findings import Refused, refuse

_PLAIN_YAML = re.compile(r"[A-Za-z][A-Za-z0-9_()]*(?:[-+*.'/]+[A-Za-z0-9_()]+)*")
_YAML_WORDS = {"null", "true", "false", "yes", "no", "on", "off", "y", "n"}


def left(text: str, width: int) -> str:
    """*text* left-justified in exactly *width* columns; raises Refused when it is longer.

    >>> left("CH4", 6)
    'CH4   '
    """
    if len(text) > width:
        raise Refused([refuse("value-unfit", f"{text!r} has {len(text)} characters", expected=f"at most {width}")])
    return text.ljust(width)


def fixed(value: float, width: int, decimals: int) -> str:
    """*value* right-justified with *decimals* places, only if the text reads back as the same number.

    >>> fixed(200.0, 10, 3)
    '   200.000'
    """
    text = f"{value:{width}.{decimals}f}"
    if not isfinite(value) or len(text) > width or float(text) != float(value):
        raise Refused(
            [
                refuse(
                    "value-unfit",
                    f"{value!r} cannot be written in {width} columns with {decimals} decimals",
                    expected="a value that reads back unchanged",
                    action="Choose a rounder number.",
                )
            ]
        )
    return text


@lru_cache(maxsize=4096)
def coefficient(value: float) -> str:
    """One polynomial coefficient in 15 columns, nine significant digits, two-digit exponent.

    >>> coefficient(-1.23456789e-03)
    '-1.23456789E-03'
    """
    text = f"{value:15.8E}"
    if not isfinite(value) or len(text) != 15 or text[-4] != "E":
        raise Refused(
            [refuse("value-unfit", f"the coefficient {value!r} does not fit 15 columns with a two-digit exponent")]
        )
    return text


def coefficients(values: Sequence[float]) -> str:
    """Coefficients as a list of plain numbers, each as :func:`coefficient` writes it.

    >>> coefficients([2.5, -1.0e-3])
    '2.50000000E+00, -1.00000000E-03'
    """
    return ", ".join([coefficient(value).strip() for value in values])


def columns(values: Sequence[float]) -> str:
    """Coefficients side by side, each as :func:`coefficient` writes it.

    >>> columns([2.5, -1.0e-3])
    ' 2.50000000E+00-1.00000000E-03'
    """
    return "".join([coefficient(value) for value in values])


def marked(lines: Sequence[str], mark: str) -> str:
    """Lines of a comment, each behind its mark.

    >>> marked(["made from", "a.out"], "! ")
    '! made from\\n! a.out'
    """
    return "\n".join([mark + line for line in lines])


def element_fields(atoms: Mapping[str, int]) -> str:
    """Columns 25-44 of a fixed record: four fields of symbol (2) and count (3), or blanks when they cannot hold all.

    >>> element_fields({"C": 1, "H": 4, "O": 1})
    'C   1H   4O   1     '
    """
    if needs_continuation(atoms):
        return " " * 20
    return "".join(f"{symbol.upper():<2}{count:3d}" for symbol, count in atoms.items()).ljust(20)


def needs_continuation(atoms: Mapping[str, int]) -> bool:
    """Whether a composition exceeds four fields of three digits and must go on a line of its own after ``&``."""
    return len(atoms) > 4 or any(not -99 <= count <= 999 for count in atoms.values())


def continuation(atoms: Mapping[str, int]) -> str:
    """The text after column 80 of a record's first line: nothing, or ``&`` and the composition on the next line."""
    if not needs_continuation(atoms):
        return ""
    return "&\n" + " ".join(f"{symbol.upper()} {count}" for symbol, count in atoms.items())


def significant(value: float, digits: int = 12) -> float:
    """*value* rounded to *digits* significant digits, so that files do not depend on a machine's last bit.

    >>> significant(0.1 + 0.2)
    0.3
    """
    return float(f"{value:.{digits - 1}e}")


def yaml_text(text: str) -> str:
    """*text* as a YAML scalar: plain where that is safe in every YAML version, quoted otherwise.

    >>> yaml_text("CH3OH"), yaml_text("NO")
    ('CH3OH', '"NO"')
    """
    if _PLAIN_YAML.fullmatch(text) and text.lower() not in _YAML_WORDS:
        return text
    return json.dumps(text, ensure_ascii=False)


def yaml_map(values: Mapping[str, int]) -> str:
    """Whole numbers by name as a YAML mapping on one line.

    >>> yaml_map({"N": 1, "O": 1})
    '{"N": 1, O: 1}'
    """
    return f"{{{', '.join([f'{yaml_text(name)}: {value}' for name, value in values.items()])}}}"


def comma(values: Sequence[float]) -> str:
    """Numbers with commas between them, each in the shortest form that reads back.

    >>> comma([200.0, 1000.0])
    '200.0, 1000.0'
    """
    return ", ".join(map(str, values))


def csv_text(text: str) -> str:
    """*text* as one CSV field.

    >>> csv_text('CH2(S)'), csv_text('a,b')
    ('CH2(S)', '"a,b"')
    """
    return '"' + text.replace('"', '""') + '"' if any(c in text for c in ',"\n') else text


def json_text(value: Any) -> str:
    """*value* as indented JSON with lists of numbers on one line; raises ValueError for NaN.

    >>> print(json_text({"a": [1, 2], "b": {"c": None}}))
    {"a": [1, 2], "b": {"c": null}}
    """
    return _json(value, "")


def _json(value: Any, indent: str) -> str:
    flat = json.dumps(value, ensure_ascii=False, allow_nan=False)
    if not isinstance(value, dict | list) or len(flat) + len(indent) <= 100 or _all_scalars(value):
        return flat
    inner = indent + "  "
    if isinstance(value, dict):
        items = [f"{inner}{json.dumps(k, ensure_ascii=False)}: {_json(v, inner)}" for k, v in value.items()]
        return "{\n" + ",\n".join(items) + f"\n{indent}}}"
    return "[\n" + ",\n".join(f"{inner}{_json(v, inner)}" for v in value) + f"\n{indent}]"


def _all_scalars(value: Any) -> bool:
    return isinstance(value, list) and not any(isinstance(item, dict | list) for item in value)
