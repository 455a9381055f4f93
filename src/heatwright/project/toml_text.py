"""Plain values as TOML text, always the same bytes for the same values."""

from __future__ import annotations

import re
from collections.abc import Mapping
from functools import lru_cache
from json.encoder import encode_basestring
from math import isfinite
from typing import Final

_BARE: Final = re.compile(r"[A-Za-z0-9_-]+")
_LONGEST: Final = 100


@lru_cache(maxsize=4096)
def toml_key(key: str) -> str:
    """*key* bare where TOML allows it, quoted otherwise.

    >>> toml_key("CH3OH"), toml_key("CH2(S)")
    ('CH3OH', '"CH2(S)"')
    """
    return key if _BARE.fullmatch(key) else _text(key)


def toml_value(value: object) -> str:
    """A text, flag, finite number, list or table (inline) as TOML.

    Raises TypeError for anything else (None has no spelling in TOML) and ValueError for numbers that are not finite.

    >>> toml_value({"path": "a.out", "n": [1, 2.0], "new": True})
    '{ path = "a.out", n = [1, 2.0], new = true }'
    """
    if isinstance(value, str):
        return _text(value)
    if isinstance(value, float):
        if not isfinite(value):
            raise ValueError(f"{value} has no place in a file")
        return float.__repr__(value)
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int):
        return str(value)
    if isinstance(value, list | tuple):
        return f"[{', '.join([toml_value(item) for item in value])}]"
    if isinstance(value, dict):
        inside = ", ".join([f"{toml_key(k)} = {toml_value(v)}" for k, v in value.items()])
        return f"{{ {inside} }}" if inside else "{}"
    raise TypeError(f"{type(value).__name__} cannot be written as TOML")


def _text(value: str) -> str:
    return encode_basestring(value).replace("\x7f", "\\u007f")


def toml_lines(values: Mapping[str, object]) -> list[str]:
    """One line for each key; a list of tables, or a list too long for one line, takes one line for each item."""
    lines: list[str] = []
    for key, value in values.items():
        if isinstance(value, list | tuple) and value:
            items = [toml_value(item) for item in value]
            if isinstance(value[0], dict) or sum(map(len, items)) > _LONGEST:
                lines += [f"{toml_key(key)} = [", *(f"    {item}," for item in items), "]"]
            else:
                lines.append(f"{toml_key(key)} = [{', '.join(items)}]")
        else:
            lines.append(f"{toml_key(key)} = {toml_value(value)}")
    return lines
