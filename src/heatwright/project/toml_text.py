"""Plain values as TOML text, always the same bytes for the same values."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping, Sequence
from functools import lru_cache
from json.encoder import JSONEncoder, encode_basestring
from math import isfinite
from typing import Any, Final

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
    for kind, writer in _WRITERS.items():
        if isinstance(value, kind):
            return writer(value)
    raise TypeError(f"{type(value).__name__} cannot be written as TOML")


def _value(value: Any) -> str:
    """As :func:`toml_value`, which most values need not be looked at twice for."""
    writer = _WRITERS.get(type(value))
    return toml_value(value) if writer is None else writer(value)


def _number(value: float) -> str:
    if not isfinite(value):
        raise ValueError(f"{value} has no place in a file")
    return float.__repr__(value)


def _flag(value: bool) -> str:
    return "true" if value else "false"


def _list(value: Sequence[object]) -> str:
    if _SCALARS.issuperset(map(type, value)):
        return _ENCODED(value).replace("\x7f", "\\u007f")  # of these JSON and TOML have the same spelling
    return f"[{', '.join([_value(item) for item in value])}]"


def _table(value: Mapping[str, object]) -> str:
    inside = ", ".join([f"{toml_key(k)} = {_value(v)}" for k, v in value.items()])
    return f"{{ {inside} }}" if inside else "{}"


def _text(value: str) -> str:
    return encode_basestring(value).replace("\x7f", "\\u007f")


_SCALARS: Final = frozenset({str, int, float, bool})
_ENCODED: Final = JSONEncoder(ensure_ascii=False, allow_nan=False).encode
_WRITERS: Final[dict[type, Callable[[Any], str]]] = {
    str: _text, float: _number, bool: _flag, int: str, list: _list, tuple: _list, dict: _table,
}  # fmt: skip
"""A flag is a whole number too, so it comes before one."""


def toml_lines(values: Mapping[str, object]) -> list[str]:
    """One line for each key; a list of tables, or a list too long for one line, takes one line for each item."""
    lines: list[str] = []
    for key, value in values.items():
        if isinstance(value, list | tuple) and value:
            items = [_value(item) for item in value]
            if isinstance(value[0], dict) or sum(map(len, items)) > _LONGEST:
                lines += [f"{toml_key(key)} = [", *(f"    {item}," for item in items), "]"]
            else:
                lines.append(f"{toml_key(key)} = [{', '.join(items)}]")
        else:
            lines.append(f"{toml_key(key)} = {_value(value)}")
    return lines
