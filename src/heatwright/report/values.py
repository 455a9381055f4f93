"""Taking values out of plain data that somebody else wrote, each with its kind and a sentence where it is another."""

from __future__ import annotations

from collections.abc import Mapping
from math import isfinite, nan
from typing import Any, NoReturn

from heatwright.findings import Refused, refuse

_REQUIRED: Any = object()


class Values:
    """One object of a JSON document; ``where`` names it in a refusal.

    >>> Values({"a": [1, 2.5]}, "x.json").numbers("a")
    (1.0, 2.5)
    """

    def __init__(self, values: Any, where: str) -> None:
        self.where = where
        if not isinstance(values, Mapping):
            self._values: Mapping[str, Any] = {}
            self.wrong(f"this is {_kind(values)}", "an object")
        self._values = values

    def wrong(self, found: str, expected: str = "") -> NoReturn:
        """Refuses the document."""
        action = "Make the document by `heatwright entry --format json`."
        raise Refused([refuse("document-wrong", found, where=self.where, expected=expected, action=action)])

    @property
    def keys(self) -> list[str]:
        """The keys in their order."""
        return [str(key) for key in self._values]

    def has(self, key: str) -> bool:
        """Whether there is a value, and not null."""
        return self._values.get(key) is not None

    def shown(self, key: str) -> str:
        """A text, number or truth value in words."""
        value = self._values[key]
        if isinstance(value, bool):
            return "yes" if value else "no"
        return value if isinstance(value, str) else f"{self.number(key):g}"

    def text(self, key: str, default: str = _REQUIRED) -> str:
        """A text; *default* where there is none."""
        value = self._values.get(key)
        if value is None and default is not _REQUIRED:
            return default
        if not isinstance(value, str):
            self.wrong(f"{key} is {_kind(value)}", "a text")
        return value

    def number(self, key: str) -> float:
        """A finite number."""
        return self._number(key, self._values.get(key))

    def _number(self, key: str, value: Any) -> float:
        try:
            number = float(value) if isinstance(value, int | float) and not isinstance(value, bool) else nan
        except OverflowError:
            number = nan
        if not isfinite(number):
            self.wrong(f"{key} is {_kind(value)}", "a finite number")
        return number

    def number_or_none(self, key: str) -> float | None:
        """A finite number, or None where there is none."""
        return self.number(key) if self.has(key) else None

    def whole_or_none(self, key: str) -> int | None:
        """A whole number, or None where there is none."""
        value = self.number_or_none(key)
        if value is not None and value != round(value):
            self.wrong(f"{key} is {value:g}", "a whole number")
        return None if value is None else round(value)

    def _list(self, key: str) -> list[Any]:
        value = self._values.get(key, [])
        if value is None:
            return []
        if not isinstance(value, list | tuple):
            self.wrong(f"{key} is {_kind(value)}", "a list")
        return list(value)

    def length(self, key: str) -> int:
        """Length of a list; 0 where there is none."""
        return len(self._list(key))

    def numbers(
        self, key: str, default: tuple[float, ...] = _REQUIRED, *, length: int | None = None
    ) -> tuple[float, ...]:
        """A list of finite numbers, of this length; *default* where there is none."""
        if not self.has(key) and default is not _REQUIRED:
            return default
        if not self.has(key):
            self.wrong(f"{key} is missing", "a list of numbers")
        found = self._list(key)
        if all(type(x) is float for x in found) and isfinite(sum(found)):
            values = tuple(found)
        else:
            values = tuple(self._number(f"{key}[{i}]", x) for i, x in enumerate(found))
        if length is not None and len(values) != length:
            self.wrong(f"{key} has {len(values)} numbers", str(length))
        return values

    def texts(self, key: str) -> tuple[str, ...]:
        """A list of texts."""
        values = self._list(key)
        if any(not isinstance(x, str) for x in values):
            self.wrong(f"{key} is not a list of texts")
        return tuple(values)

    def rows(self, key: str, length: int) -> list[list[float]]:
        """A list of lists of numbers, each of this length; empty where there is none."""
        return [[self._number(f"{key}[{i}]", x) for x in item] for i, item in enumerate(self.raw_rows(key, length))]

    def raw_rows(self, key: str, length: int) -> list[list[Any]]:
        """The same with whatever the lists hold."""
        items = self._list(key)
        for i, item in enumerate(items):
            if not isinstance(item, list | tuple) or len(item) != length:
                self.wrong(f"{key}[{i}] is not a list of {length}")
        return [list(item) for item in items]

    def inside(self, key: str) -> Values:
        """The object under a key; an empty one where there is none."""
        value = self._values.get(key)
        return Values({} if value is None else value, f"{self.where}: {key}")

    def table(self, key: str) -> Values:
        """The same, and it must be there."""
        if not self.has(key):
            self.wrong(f"{key} is missing", "an object")
        return self.inside(key)

    def items(self, key: str) -> list[Any]:
        """The items of a list as they are; the list must be there."""
        if not self.has(key):
            self.wrong(f"{key} is missing", "a list")
        return self._list(key)

    def tables(self, key: str) -> list[Values]:
        """The objects of a list; none where there is no list."""
        return [Values(item, f"{self.where}: {key}[{i}]") for i, item in enumerate(self._list(key))]


def _kind(value: Any) -> str:
    """What a value is, in words."""
    if value is None:
        return "missing"
    if isinstance(value, Mapping):
        return "an object"
    if isinstance(value, list | tuple):
        return "a list"
    text = repr(value)
    return text if len(text) <= 40 else f"{text[:37]}..."
