"""Molecules and what is found about them as bytes: JSON beside the raw numbers of arrays, with a checksum.

Only the types in :data:`_HOMES` can come out of such bytes, whatever they hold: nothing in them is ever executed.
"""

from __future__ import annotations

import json
import zlib
from collections.abc import Callable, Mapping
from dataclasses import MISSING, dataclass, fields
from functools import cache
from importlib import import_module
from math import prod
from typing import Any, Final

import numpy as np

NAME: Final = "\0"
"""Stands for the name of a file in what is kept of it; whoever uses it puts in how the file is to be called."""
_NAME_IN_JSON: Final = "\\u0000"
_PLAIN: Final = b"HW1"
_PACKED: Final = b"HZ1"
_WORTH_PACKING: Final = 1 << 14
_DTYPES: Final = {name: np.dtype(name) for name in ("float64", "int64", "bool", "int32", "int16", "int8", "uint8")}


_SCALARS: Final = frozenset({str, int, float, bool, type(None)})


class Unreadable(ValueError):
    """The bytes were not written by :func:`encoded`, or are damaged."""


@dataclass(frozen=True, eq=False)
class _Kind:
    """A dataclass that may be encoded: its type, the names of its fields, and the defaults that need no writing."""

    type: type
    names: tuple[str, ...]
    defaults: dict[str, Any]


_HOMES: Final = {
    "Finding": "findings",
    **dict.fromkeys(("DiatomicConstants", "Level", "Molecule", "PrintedThermo", "Source", "Stated"), "molecule"),
    **dict.fromkeys(("TorsionBarrier", "TorsionScan"), "reading.torsion_scans"),
}
"""The dataclasses that may be encoded, and where they live; they are imported when they are met."""


@cache
def _kind_of(name: str) -> _Kind | None:
    """One of the dataclasses that may be encoded, None for any other name."""
    if name not in _HOMES:
        return None
    c = getattr(import_module(f"heatwright.{_HOMES[name]}"), name)
    defaults = {f.name: f.default for f in fields(c) if f.default is not MISSING}
    return _Kind(c, tuple(f.name for f in fields(c)), defaults)


def encoded(value: object) -> bytes:
    """*value* as bytes; the same value gives the same bytes.

    Raises TypeError for a type that is not known.

    >>> decoded(encoded((1.5, None, "a", {"b": np.array([1.0, 2.0])})))
    (1.5, None, 'a', {'b': array([1., 2.])})
    """
    arrays: list[bytes] = []
    text = json.dumps(_plain(value, arrays), ensure_ascii=False, separators=(",", ":")).encode()
    body = len(text).to_bytes(8, "little") + text + b"".join(arrays)
    mark, stored = (_PLAIN, body) if len(body) < _WORTH_PACKING else (_PACKED, zlib.compress(body, 1))
    return mark + zlib.crc32(body).to_bytes(4, "little") + stored


def decoded(data: bytes, name: str | None = None) -> Any:
    """What :func:`encoded` was given; arrays are read-only.  Raises Unreadable when the bytes are damaged.

    name : takes the place of :data:`NAME` wherever it stands in a text.

    >>> decoded(encoded(("error in \\0", 1)), "a.out")
    ('error in a.out', 1)
    """
    try:
        if data[:3] not in (_PLAIN, _PACKED):
            raise Unreadable("the bytes are not of this format")
        body = data[7:] if data[:3] == _PLAIN else zlib.decompress(data[7:])
        if zlib.crc32(body) != int.from_bytes(data[3:7], "little"):
            raise Unreadable("the checksum is wrong")
        size = int.from_bytes(body[:8], "little")
        text = body[8 : 8 + size].decode()
        if name is not None:
            text = text.replace(_NAME_IN_JSON, json.dumps(name)[1:-1])
        return _value(json.loads(text), body, 8 + size)
    except Unreadable:
        raise
    except Exception as error:  # whatever damaged bytes provoke
        raise Unreadable(f"{type(error).__name__}: {error}") from error


def _plain(value: Any, arrays: list[bytes]) -> Any:
    """*value* with lists for tuples, and one-key objects for what JSON has no word for."""
    if value is None or isinstance(value, bool | str):
        return value
    if isinstance(value, int | np.integer):
        return int(value)
    if isinstance(value, float):
        return float(value)
    if isinstance(value, tuple):
        return [_plain(item, arrays) for item in value]
    if isinstance(value, np.ndarray):
        return _array(value, arrays)
    if isinstance(value, Mapping):
        return {"%": {str(key): _plain(item, arrays) for key, item in value.items()}}
    name = type(value).__name__
    kind = _kind_of(name)
    if kind is None or kind.type is not type(value):
        raise TypeError(f"{name} has no place in the store")
    return {"@": [name, {f: _plain(v, arrays) for f in kind.names if not _is_default(kind, f, v := getattr(value, f))}]}


def _is_default(kind: _Kind, name: str, value: Any) -> bool:
    """Whether a field holds its default, so that it need not be written."""
    if name not in kind.defaults or isinstance(value, np.ndarray):
        return False
    default = kind.defaults[name]
    return value is default or (type(value) is type(default) and bool(value == default))


def _array(value: np.ndarray[Any, Any], arrays: list[bytes]) -> dict[str, Any]:
    if value.dtype.name not in _DTYPES:
        raise TypeError(f"arrays of {value.dtype} have no place in the store")
    data = np.ascontiguousarray(value).tobytes()
    start = sum(map(len, arrays))
    arrays.append(data)
    return {"#": [value.dtype.name, list(value.shape), start]}


def _value(plain: Any, body: bytes, start: int) -> Any:
    """The value of a list or an object; scalars are left as they are by whoever calls."""
    if type(plain) is list:
        return tuple([item if type(item) in _SCALARS else _value(item, body, start) for item in plain])
    if type(plain) in _SCALARS:
        return plain
    ((mark, inside),) = plain.items()
    return _MARKED[mark](inside, body, start)


def _object(inside: list[Any], body: bytes, start: int) -> Any:
    name, given = inside
    for field, value in given.items():
        if type(value) not in _SCALARS:
            given[field] = _value(value, body, start)
    kind = _kind_of(name)
    if kind is None:
        raise Unreadable(f"an object of the type {name}")
    return kind.type(**given)


def _mapping(inside: dict[str, Any], body: bytes, start: int) -> dict[str, Any]:
    return {key: _value(item, body, start) for key, item in inside.items()}


def _numbers(inside: list[Any], body: bytes, start: int) -> np.ndarray[Any, Any]:
    name, shape, offset = inside
    dtype = _DTYPES.get(name)
    if dtype is None:
        raise Unreadable(f"an array of {name}")
    values = np.frombuffer(body, dtype, prod(shape), start + offset)
    return values if len(shape) == 1 else values.reshape(shape)


_MARKED: Final[dict[str, Callable[..., Any]]] = {"@": _object, "%": _mapping, "#": _numbers}
