"""Kinds of values in a manifest: how each is checked, and the same as a piece of a JSON Schema."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from math import isfinite
from typing import Any, Final, Literal

from heatwright.errors import UsageError
from heatwright.reading.strict import shown

Resolve = Literal["", "path", "paths", "globs", "conformers", "torsions"]
"""Whether a value names files, and in which form."""


class Wrong(Exception):
    """A value is not of its kind: the end of a sentence about it, what was expected, and which item of a list it is."""

    def __init__(self, found: str = "", expected: str = "", item: int | None = None) -> None:
        super().__init__(found, expected, item)
        self.found, self.expected, self.item = found, expected, item


@dataclass(frozen=True, slots=True)
class Kind:
    """One kind of value.

    expected : in words.   schema : in JSON Schema.   read : value from the file -> plain hashable value, or Wrong.
    """

    expected: str
    schema: Mapping[str, Any]
    read: Callable[[Any], Any]
    resolve: Resolve = ""


def _text(value: Any) -> str:
    if not isinstance(value, str) or not value.strip():
        raise Wrong
    return " ".join(value.split())


def _lines(value: Any) -> tuple[str, ...]:
    texts = value if isinstance(value, list) else [value]
    for index, text in enumerate(texts):
        if not isinstance(text, str):
            raise Wrong(item=index if isinstance(value, list) else None)
    return tuple(line.rstrip() for text in texts for line in text.splitlines())


def _flag(value: Any) -> bool:
    if not isinstance(value, bool):
        raise Wrong
    return value


def _number(value: Any) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise Wrong
    try:
        number = float(value)
    except OverflowError:
        raise Wrong from None
    if not isfinite(number):
        raise Wrong
    return number


def choice(*words: str) -> Kind:
    """One of some words."""

    def read(value: Any) -> str:
        if not isinstance(value, str) or value not in words:
            raise Wrong
        return value

    expected = " or ".join(f'"{word}"' for word in words) if len(words) < 3 else ", ".join(f'"{w}"' for w in words)
    return Kind(expected if len(words) < 3 else f"one of {expected}", {"enum": list(words)}, read)


def number_between(least: float, most: float | None = None, *, open_below: bool = False) -> Kind:
    """A finite number from *least* (or above it) to *most*."""

    def read(value: Any) -> float:
        number = _number(value)
        if number < least or (open_below and number == least) or (most is not None and number > most):
            raise Wrong
        return number

    schema: dict[str, Any] = {"type": "number", "exclusiveMinimum" if open_below else "minimum": least}
    expected = "a positive number" if open_below and least == 0.0 else f"a number from {least:g}"
    if most is not None:
        schema["maximum"] = most
        expected = f"{expected} {'of at most' if open_below else 'to'} {most:g}"
    return Kind(expected, schema, read)


_MOST: Final = 1_000_000
"""No count or charge is larger."""


def whole(least: int | None = None) -> Kind:
    """A whole number."""

    def read(value: Any) -> int:
        if isinstance(value, bool) or not isinstance(value, int) or not lowest <= value <= _MOST:
            raise Wrong
        return value

    lowest = -_MOST if least is None else least
    words = "a whole number" + (f" of at least {least}" if least is not None else "")
    return Kind(words, {"type": "integer", "minimum": lowest, "maximum": _MOST}, read)


def checked_text(expected: str, example: str, check: Callable[[str], object]) -> Kind:
    """A text that a function of the engine understands; its UsageError says what is wrong."""

    def read(value: Any) -> str:
        text = _text(value)
        try:
            check(text)
        except UsageError as error:
            raise Wrong(_without_option(str(error))) from None
        return text

    return Kind(expected, {"type": "string", "minLength": 1, "examples": [example]}, read)


def _without_option(words: str) -> str:
    """A sentence of the command line's without its options' dashes, which a manifest's keys do not have."""
    return re.sub(r"--(?=[a-z])", "", words)


def several(one: Kind, expected: str, resolve: Resolve = "", *, empty: bool = False) -> Kind:
    """A list, or a single value that stands for a list of one."""

    def read(value: Any) -> tuple[Any, ...]:
        if not isinstance(value, list):
            return (one.read(value),)
        if not value and not empty:
            raise Wrong
        return tuple(_item(one, item, index) for index, item in enumerate(value))

    items = {"type": "array", "items": dict(one.schema), **({} if empty else {"minItems": 1})}
    return Kind(expected, {"anyOf": [dict(one.schema), items]}, read, resolve)


def _item(one: Kind, value: Any, index: int) -> Any:
    try:
        return one.read(value)
    except Wrong as error:
        found = error.found or f"item {index + 1} is {shown(value)}"
        raise Wrong(found, error.expected or one.expected, index) from None


def _temperatures(value: Any) -> tuple[float, float]:
    if not isinstance(value, list) or len(value) != 2:
        raise Wrong
    low, high = (_number(v) for v in value)
    if not 0.0 < low < high:
        raise Wrong
    return low, high


def _common(value: Any) -> float | str:
    if value == "auto":
        return "auto"
    number = _number(value)
    if number <= 0.0:
        raise Wrong
    return number


def _conformer(value: Any) -> tuple[str, str | None]:
    """A file, or a table of it and of the file of its energy."""
    if isinstance(value, str):
        return _text(value), None
    if not isinstance(value, dict):
        raise Wrong
    unknown = sorted(set(value) - {"output", "energy"})
    if unknown:
        raise Wrong(f"there is no key {unknown[0]!r} in a conformer", "output and energy")
    if "output" not in value:
        raise Wrong("a conformer has no output")
    return _text(value["output"]), _text(value["energy"]) if "energy" in value else None


def _enthalpy(text: str) -> object:
    from heatwright.formation.formation import parse_enthalpy

    return parse_enthalpy(text)


def _isotope(text: str) -> object:
    from heatwright.structure.isotopes import parse_isotope

    return parse_isotope(text)


def _electronic(text: str) -> object:
    from heatwright.partition.electronic import parse_levels

    return text if text in ("table", "spin", "levels") else parse_levels(text)


def _uncertainty(text: str) -> object:
    from heatwright.partition.inputs import parse_uncertainties

    return parse_uncertainties(text)


def _reaction(text: str) -> object:
    from heatwright.formation.equations import parse_reaction

    return parse_reaction(text)


_TORSION_WORDS: Final = re.compile(r"\bn\s*=|\bV\s*=")


def is_barrier(text: str) -> bool:
    """Whether a torsion is a barrier in words, such as ``3-1-2-4 n=3 V=373 cm-1``, and no path."""
    return _TORSION_WORDS.search(text) is not None


def _torsion(text: str) -> object:
    if not is_barrier(text):
        return text
    from heatwright.reading.torsion_scans import read_torsion

    return read_torsion(text)


TEXT: Final = Kind("a text in quotes", {"type": "string", "minLength": 1}, _text)
PATH: Final = Kind("a path in quotes", {"type": "string", "minLength": 1}, _text, "path")
FLAG: Final = Kind("true or false", {"type": "boolean"}, _flag)
LINES: Final = Kind(
    "a text or a list of texts",
    {"anyOf": [{"type": "string"}, {"type": "array", "items": {"type": "string"}}]},
    _lines,
)
GLOBS: Final = several(TEXT, "a path or glob, or a list of them", "globs")
NAMES: Final = several(TEXT, "a name or pattern, or a list of them")
POSITIVE: Final = number_between(0.0, open_below=True)
TEMPERATURES: Final = Kind(
    "two temperatures in K, the lower one first, such as [200, 6000]",
    {"type": "array", "items": {"type": "number", "exclusiveMinimum": 0}, "minItems": 2, "maxItems": 2},
    _temperatures,
)
COMMON: Final = Kind(
    'a temperature in K or "auto"',
    {"anyOf": [{"type": "number", "exclusiveMinimum": 0}, {"const": "auto"}]},
    _common,
)
_CONFORMER: Final = Kind(
    'a path or glob, or { output = "...", energy = "..." }',
    {
        "anyOf": [
            {"type": "string", "minLength": 1},
            {
                "type": "object",
                "properties": {name: {"type": "string", "minLength": 1} for name in ("output", "energy")},
                "required": ["output"],
                "additionalProperties": False,
            },
        ]
    },
    _conformer,
)
CONFORMERS: Final = several(_CONFORMER, "a list of outputs", "conformers")
TORSIONS: Final = several(
    checked_text('a folder, a file or "3-1-2-4 n=3 V=373 cm-1"', "3-1-2-4 n=3 V=373 cm-1", _torsion),
    "a list of scans (folder or file) and barriers",
    "torsions",
)
ENTHALPY: Final = checked_text("a text with the unit", "-200.7 +/- 0.2 kJ/mol", _enthalpy)
ISOTOPES: Final = several(checked_text("ATOM=ISOTOPE", "2=2H", _isotope), "a list of ATOM=ISOTOPE")
ELECTRONIC: Final = checked_text('"table", "spin", "levels" or levels', "0:2,139.21:2", _electronic)
UNCERTAINTY: Final = checked_text('"default" or a list in a text', "scale=0.02,low=0.2", _uncertainty)
REACTION: Final = checked_text("a balanced reaction", "CH3OCH3 + H2O -> 2 CH3OH", _reaction)
