"""The tables of one manifest file: every key known, every value of its kind, every path resolved, with its line."""

from __future__ import annotations

import os
import re
from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any, Final

from heatwright.findings import Finding, Refused, refuse
from heatwright.project.keys import KEYS, TABLES, Key, Place, keys_of
from heatwright.project.kinds import Wrong, is_barrier
from heatwright.project.manifest_types import OutputFiles, ProjectPath, TorsionChoice
from heatwright.project.paths import Here, is_glob
from heatwright.reading.strict import Block, parsed, shown

CODE: Final = "manifest-wrong"


@dataclass(frozen=True, slots=True)
class Given:
    """A value with the place where it is written, ``FILE:LINE``."""

    value: Any
    where: str


Stated = Mapping[str, Given]
"""What a table states, by the names of its keys."""


@dataclass(frozen=True, slots=True)
class FileTables:
    """What one file says: its tables, the faults that were found in them, and the places of the tables with faults."""

    mechanism: Stated
    levels: Mapping[str, tuple[str, Stated]]
    species: Mapping[str, tuple[str, Stated]]
    outputs: tuple[tuple[str, Stated], ...]
    faults: tuple[Finding, ...]
    broken: frozenset[str]
    mechanism_is_broken: bool


def read_tables(text: str, shown_path: str, here: Here) -> FileTables:
    """The tables of a file that is shown as *shown_path*; raises Refused when it is no TOML."""
    file = parsed(text, shown_path, CODE)
    faults = Faults([_unknown_table(file, name) for name in file.values if name not in TABLES])
    before = len(faults)
    mechanism = _table(_inner(file, "mechanism", faults), "mechanism", here, faults)
    mechanism_is_broken = len(faults) > before
    return FileTables(
        mechanism,
        _named(file, "levels", here, faults),
        _named(file, "species", here, faults),
        tuple(_listed(file, here, faults)),
        tuple(faults),
        frozenset(faults.broken),
        mechanism_is_broken,
    )


class Faults(list[Finding]):
    """Faults of a file, with the places of the tables that they are in."""

    def __init__(self, start: Iterable[Finding] = ()) -> None:
        super().__init__(start)
        self.broken: set[str] = set()


def _inner(block: Block, name: str, faults: Faults) -> Block:
    if isinstance(block.values.get(name), list):
        words = f"{name} is a list of tables, [[{name}]]"
        faults.append(refuse(CODE, words, where=block.where(name), expected=_written(name)))
        return Block(name, {}, block.lines, (*block.path, name), block.file, block.code)
    try:
        return block.block(name)
    except Refused as error:
        faults.extend(error.findings)
        return Block(name, {}, block.lines, (*block.path, name), block.file, block.code)


def _named(file: Block, place: Place, here: Here, faults: Faults) -> dict[str, tuple[str, Stated]]:
    """``[species.NAME]`` and ``[levels.NAME]``: name, place and what is stated."""
    outer = _inner(file, place, faults)
    found = {}
    for name, value in outer.values.items():
        if not isinstance(value, dict):
            words = f"{place}.{name} is {shown(value)}"
            faults.append(refuse(CODE, words, where=outer.where(name), expected=f"a table, [{place}.NAME]"))
            continue
        block = outer.block(name)
        found[name] = (block.where(), _table(block, place, here, faults))
    return found


def _listed(file: Block, here: Here, faults: Faults) -> list[tuple[str, Stated]]:
    """Each ``[[outputs]]``: place and what is stated."""
    value = file.values.get("outputs", [])
    if not isinstance(value, list) or not all(isinstance(item, dict) for item in value):
        words = "outputs is a single table" if isinstance(value, dict) else f"outputs is {shown(value)}"
        faults.append(refuse(CODE, words, where=file.where("outputs"), expected="[[outputs]], each with a glob"))
        return []
    blocks = [
        Block("outputs", item, file.lines, ("outputs", index), file.file, file.code) for index, item in enumerate(value)
    ]
    return [(block.where(), _table(block, "outputs", here, faults)) for block in blocks]


def _table(block: Block, place: Place, here: Here, faults: Faults) -> Stated:
    known = keys_of(place)
    stated: dict[str, Given] = {}
    before = len(faults)
    for name, raw in block.values.items():
        if name not in known:
            faults.append(_unknown_key(block, place, name, raw))
            continue
        try:
            value = _checked(block, known[name], raw)
            stated[name] = Given(_resolved(block, known[name], value, here), block.where(name))
        except Refused as error:
            faults.extend(error.findings)
    if len(faults) > before:
        faults.broken.add(block.where())
    return stated


def _checked(block: Block, key: Key, raw: Any) -> Any:
    try:
        return key.kind.read(raw)
    except Wrong as error:
        where = block.where(key.name) if error.item is None else block.where(key.name, error.item)
        found = error.found or f"{key.name} is {shown(raw)}"
        expected = "" if error.found and not error.expected else error.expected or key.kind.expected
        raise Refused([refuse(CODE, found, where=where, expected=expected)]) from None


def _resolved(block: Block, key: Key, value: Any, here: Here) -> Any:
    """The value with its paths resolved; globs that are expanded later keep the place of each item."""
    where = block.where(key.name)
    if key.kind.resolve == "path":
        return here.path(value, where)
    places = [block.where(key.name, i) for i in range(len(value))] if key.kind.resolve else []
    if key.kind.resolve == "globs":
        return tuple(zip(value, places, strict=True))
    if key.kind.resolve == "conformers":
        pairs = zip(value, places, strict=True)
        return tuple(found for (text, energy), place in pairs for found in _conformers(text, energy, place, here))
    if key.kind.resolve == "torsions":
        return tuple(_torsion(text, place, here) for text, place in zip(value, places, strict=True))
    return value


@dataclass(frozen=True, slots=True)
class StatedConformer:
    """A conformer's files; globbed : found by a glob, so that the species' own output is not meant by it."""

    files: OutputFiles
    globbed: bool


def _conformers(text: str, energy: str | None, where: str, here: Here) -> list[StatedConformer]:
    if not is_glob(text) or os.path.exists(os.path.join(here.folder, text)):
        single = None if energy is None else here.path(energy, where)
        return [StatedConformer(OutputFiles(here.path(text, where), single), False)]
    if energy is not None:
        words = f"one energy is given for all files that {text!r} finds"
        raise Refused([refuse(CODE, words, where=where, action="Write each conformer with its own energy.")])
    return [StatedConformer(OutputFiles(path), True) for path in found_files(text, where, here)]


def found_files(pattern: str, where: str, here: Here) -> tuple[ProjectPath, ...]:
    """The files of a glob; raises Refused when it finds none."""
    paths = here.matches(pattern, where)
    if not paths:
        words = f"{'the glob ' if is_glob(pattern) else ''}{pattern!r} matches no file in {here.folder}"
        if is_glob(pattern):
            raise Refused([refuse("glob-empty", words, where=where, action="Correct it, or leave it out.")])
        raise Refused([refuse("file-missing", words, where=where, expected="a file there")])
    return paths


_WITH_ATOMS: Final = re.compile(r"(\d+-\d+-\d+-\d+)\s+(.+)")


def _torsion(text: str, where: str, here: Here) -> TorsionChoice:
    if is_barrier(text):
        return TorsionChoice(barrier=text)
    named = _WITH_ATOMS.fullmatch(text)
    if named is None:
        return TorsionChoice(scan=here.path(text, where))
    return TorsionChoice(atoms=named[1], scan=here.path(named[2], where))


def _unknown_table(file: Block, name: str) -> Finding:
    near = _nearest(name, TABLES)
    action = f"Did you mean {_written(near)}?" if near else ""
    if any(key.name == name and "mechanism" in key.places for key in KEYS):
        action = "It belongs into [mechanism]."
    expected = ", ".join(_written(table) for table in TABLES)
    return refuse(CODE, f"there is no table or key {name!r}", where=file.where(name), expected=expected, action=action)


def _written(table: str) -> str:
    return {"mechanism": "[mechanism]", "outputs": "[[outputs]]"}.get(table, f"[{table}.NAME]")


def _unknown_key(block: Block, place: Place, name: str, raw: Any) -> Finding:
    known = keys_of(place)
    heading = "[[outputs]]" if place == "outputs" else f"[{block.name}]"
    near = _nearest(name, known)
    elsewhere = next((key.places for key in KEYS if key.name == name), ())
    if elsewhere:
        action = f"It can stand in {' or '.join(_written(table) for table in elsewhere)}."
    elif near:
        action = f"Did you mean {near}?"
    elif isinstance(raw, dict):
        action = f'A name with dots is written in quotes, [{place}."A.B"].'
    else:
        action = ""
    expected = "" if action else f"one of {', '.join(known)}"
    return refuse(
        CODE, f"there is no key {name!r} in {heading}", where=block.where(name), expected=expected, action=action
    )


def _nearest(name: str, known: Collection[str]) -> str:
    near = get_close_matches(name.lower().replace("_", "-"), [k.lower() for k in known], 1, 0.5)
    return next((k for k in known if near and k.lower() == near[0]), "")
