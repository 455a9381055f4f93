"""Plain values as TOML text, always the same bytes for the same values."""

from __future__ import annotations

import json
import re
from collections.abc import Mapping
from math import isfinite
from typing import Final

_BARE: Final = re.compile(r"[A-Za-z0-9_-]+")
_LONGEST: Final = 100


def toml_key(key: str) -> str:
    """*key* bare where TOML allows it, quoted otherwise.

    >>> toml_key("CH3OH"), toml_key("CH2(S)")
    ('CH3OH', '"CH2(S)"')
    """
    return key if _BARE.fullmatch(key) else toml_value(key)


def toml_value(value: object) -> str:
    """A text, flag, finite number, list or table (inline) as TOML.

    Raises TypeError for anything else (None has no spelling in TOML) and ValueError for numbers that are not finite.

    >>> toml_value({"path": "a.out", "n": [1, 2.0], "new": True})
    '{ path = "a.out", n = [1, 2.0], new = true }'
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")
    if isinstance(value, int):
        return str(value)
    if isinstance(value, float):
        if not isfinite(value):
            raise ValueError(f"{value} has no place in a file")
        return repr(value)
    if isinstance(value, list | tuple):
        return f"[{', '.join(toml_value(item) for item in value)}]"
    if isinstance(value, Mapping):
        inside = ", ".join(f"{toml_key(str(k))} = {toml_value(v)}" for k, v in value.items())
        return f"{{ {inside} }}" if inside else "{}"
    raise TypeError(f"{type(value).__name__} cannot be written as TOML")


def toml_lines(values: Mapping[str, object]) -> list[str]:
    """One line for each key; a list of tables, or a list too long for one line, takes one line for each item."""
    lines: list[str] = []
    for key, value in values.items():
        line = f"{toml_key(key)} = {toml_value(value)}"
        spread = isinstance(value, list | tuple) and value and (isinstance(value[0], Mapping) or len(line) > _LONGEST)
        if spread and isinstance(value, list | tuple):
            lines += [f"{toml_key(key)} = [", *(f"    {toml_value(item)}," for item in value), "]"]
        else:
            lines.append(line)
    return lines
