"""The JSON Schema of a manifest for editors, and the list of its keys for the README, both from the one definition."""

from __future__ import annotations

from typing import Any, Final

from heatwright.project.keys import KEYS, TABLES, Key, Place, keys_of

DIALECT: Final = "https://json-schema.org/draft/2020-12/schema"


def manifest_schema() -> dict[str, Any]:
    """The JSON Schema (draft 2020-12) of ``heatwright.toml``; editors check and complete TOML files by it.

    What it cannot say, such as which keys exclude each other, is checked when the manifest is read.

    >>> manifest_schema()["properties"]["mechanism"]["properties"]["pressure"]["enum"]
    ['1bar', '1atm']
    """
    return {
        "$schema": DIALECT,
        "title": "heatwright.toml",
        "description": "A mechanism's thermo as a build.",
        "type": "object",
        "properties": {
            "mechanism": _table("mechanism"),
            "levels": _tables("levels"),
            "species": _tables("species"),
            "outputs": {"type": "array", "items": _table("outputs"), "description": TABLES["outputs"]},
        },
        "additionalProperties": False,
    }


_REQUIRED: Final[dict[Place, tuple[str, ...]]] = {"species": ("output",), "outputs": ("glob",)}


def _table(place: Place) -> dict[str, Any]:
    required = list(_REQUIRED.get(place, ()))
    return {
        "type": "object",
        "description": TABLES[place],
        "properties": {name: _value(key) for name, key in keys_of(place).items()},
        **({"required": required} if required else {}),
        "additionalProperties": False,
    }


def _tables(place: Place) -> dict[str, Any]:
    return {"type": "object", "description": TABLES[place], "additionalProperties": _table(place)}


def _value(key: Key) -> dict[str, Any]:
    default = f" Default: {key.default}." if key.default else ""
    return {"description": f"{key.meaning}{default}", **key.kind.schema}


_MARKS: Final[dict[Place, str]] = {"mechanism": "m", "levels": "l", "species": "s", "outputs": "o"}


def keys_table() -> str:
    """The list of keys as a Markdown table, as it stands in the README.

    >>> print(keys_table().splitlines()[2])
    | `name` | m | a text in quotes | What the mechanism is called (mechanism). |
    """
    rows = ["| key | in | value | meaning (default) |", "|---|---|---|---|"]
    for key in KEYS:
        places = " ".join(_MARKS[place] for place in TABLES if place in key.places)
        meaning = f"{key.meaning.removesuffix('.')} ({key.default})." if key.default else key.meaning
        expected = key.kind.expected.replace("|", "\\|")
        rows.append(f"| `{key.name}` | {places} | {expected} | {meaning} |")
    return "\n".join(rows) + "\n"
