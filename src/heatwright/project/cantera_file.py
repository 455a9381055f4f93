"""Phases of a Cantera YAML file and the species they declare, also out of other files; read without Cantera."""

from __future__ import annotations

import os
from collections.abc import Iterator
from dataclasses import dataclass, field
from importlib.util import find_spec
from pathlib import Path
from typing import Final

from heatwright.findings import Refused, refuse
from heatwright.reading.entries import MOST_BYTES
from heatwright.reading.entry_file import decoded
from heatwright.reading.yaml_nodes import Mapping, Node, Scalar, Sequence, Text
from heatwright.reading.yaml_subset import yaml_document

CODE: Final = "mechanism-wrong"
_GASES: Final = frozenset({"ideal-gas", "Redlich-Kwong", "Peng-Robinson", "plasma"})


@dataclass(frozen=True, slots=True)
class Phase:
    """A phase: its name, thermo model, the species it declares, and those of the phases it lies between."""

    name: str
    model: str
    species: tuple[str, ...]
    beside: tuple[str, ...] = ()

    @property
    def is_gas(self) -> bool:
        """Whether it is a gas."""
        return self.model in _GASES


@dataclass(frozen=True, slots=True)
class CanteraFile:
    """A YAML file with its nodes, and the other files that it names (shared among all of them)."""

    path: str
    source: Text
    document: Mapping
    others: dict[str, CanteraFile] = field(default_factory=dict, repr=False)

    @staticmethod
    def load(path: str, others: dict[str, CanteraFile] | None = None) -> CanteraFile:
        """The file at *path*; raises Refused (``file-missing``, ``file-too-large``, ``yaml-unreadable``)."""
        text = decoded(_bytes_of(path)).removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n")
        try:
            return CanteraFile(path, Text.of(text), yaml_document(text), {} if others is None else others)
        except Refused as error:
            raise Refused(f.at(path) for f in error.findings) from error

    def where(self, node: Node) -> str:
        """``FILE:LINE`` of a node."""
        return f"{self.path}:{self.source.place(min(node.start, len(self.source.text)))[0]}"

    def refused(self, node: Node, found: str, expected: str = "", action: str = "") -> Refused:
        """The refusal (``mechanism-wrong``) of a node."""
        return Refused([refuse(CODE, found, where=self.where(node), expected=expected, action=action)])

    def listed(self, name: str, at: Node) -> tuple[CanteraFile, Sequence]:
        """The list that ``section`` or ``file.yaml/section`` names, and its file; refused at the node *at*."""
        path, _, section = name.rpartition("/")
        file = self._other(path, at) if path else self
        node = file.document.items.get(section)
        if isinstance(node, Sequence):
            return file, node
        have = ", ".join(k for k, v in file.document.items.items() if isinstance(v, Sequence)) or "none"
        inside = f" in {path}" if path else ""
        what = "there is no section {}" if node is None else "the section {} is no list"
        found = what.format(section) + inside
        raise self.refused(at, found, f"one of its lists: {have}")

    def _other(self, path: str, at: Node) -> CanteraFile:
        if path in self.others:
            return self.others[path]
        for folder in (str(Path(self.path).parent), *_cantera_folders()):
            candidate = os.path.join(folder, path)
            if os.path.isfile(candidate):
                self.others[path] = CanteraFile.load(candidate, self.others)
                return self.others[path]
        action = "Put it beside the mechanism; Cantera's own files are found where Cantera is installed."
        raise self.refused(at, f"the file {path} is not to be found", action=action)

    # --- phases ----------------------------------------------------------------------------------------------------

    def phase_nodes(self) -> list[Mapping]:
        """The nodes of its phases."""
        node = self.document.items.get("phases")
        return [item for item in node.items if isinstance(item, Mapping)] if isinstance(node, Sequence) else []

    def phase(self, node: Mapping) -> Phase:
        """The phase of a node; raises Refused when it names a section or file that is not there."""
        declared = tuple(dict.fromkeys(self._declared(node)))
        beside = tuple(dict.fromkeys(self._beside(node.items.get("adjacent-phases"))))
        return Phase(word(node.items.get("name")), word(node.items.get("thermo")), declared, beside)

    def _declared(self, phase: Mapping) -> Iterator[str]:
        """Names, ``all``, or names or ``all`` out of sections; without those of undeclared elements where so said."""
        node = phase.items.get("species")
        elements = phase.items.get("elements")
        only = None
        if word(phase.items.get("skip-undeclared-elements")) == "true" and isinstance(elements, Sequence):
            only = {word(e).capitalize() for e in elements.items if isinstance(e, Scalar)}
        if node is None or word(node) == "all":
            yield from _names_in(self.document.items.get("species"), only)
        elif isinstance(node, Sequence):
            for item in node.items:
                if isinstance(item, Scalar):
                    yield item.text
                elif isinstance(item, Mapping):
                    yield from self._out_of_sections(item, only)

    def _out_of_sections(self, item: Mapping, only: set[str] | None) -> Iterator[str]:
        for section, names in item.items.items():
            if isinstance(names, Sequence):
                yield from (word(name) for name in names.items)
            elif word(names) == "all":
                yield from _names_in(self.listed(section, item)[1], only)
            else:
                raise self.refused(item, f"the species from {section} are {word(names)!r}", "all, or a list of names")

    def _beside(self, node: Node | None) -> Iterator[str]:
        """The species of adjacent phases."""
        for item in node.items if isinstance(node, Sequence) else ():
            if isinstance(item, Scalar):
                yield from self._of_phases(self.phase_nodes(), {item.text})
            elif isinstance(item, Mapping):
                for section, names in item.items.items():
                    file, nodes = self.listed(section, item)
                    wanted = {word(n) for n in names.items} if isinstance(names, Sequence) else {word(names)}
                    yield from file._of_phases([n for n in nodes.items if isinstance(n, Mapping)], wanted)

    def _of_phases(self, nodes: list[Mapping], names: set[str]) -> Iterator[str]:
        for node in nodes:
            if word(node.items.get("name")) in names:
                yield from self._declared(node)


def word(node: Node | None) -> str:
    """The text of a scalar, empty for anything else."""
    return node.text if isinstance(node, Scalar) else ""


def _names_in(node: Node | None, only: set[str] | None) -> Iterator[str]:
    """The names of a section of species; *only* those made of these elements."""
    for item in node.items if isinstance(node, Sequence) else ():
        if not isinstance(item, Mapping) or not word(item.items.get("name")):
            continue
        atoms = item.items.get("composition")
        symbols = {key.capitalize() for key in atoms.items} if isinstance(atoms, Mapping) else set()
        if only is None or symbols <= only:
            yield word(item.items.get("name"))


def _bytes_of(path: str) -> bytes:
    action = "Give the path of a mechanism in Cantera's YAML."
    try:
        if os.path.getsize(path) > MOST_BYTES:
            raise Refused([refuse("file-too-large", "the file is too large for a mechanism", where=path)])
        return Path(path).read_bytes()
    except (OSError, ValueError) as error:
        words = getattr(error, "strerror", None) or str(error)
        said = refuse("file-missing", f"the mechanism cannot be read ({words})", where=path, action=action)
        raise Refused([said]) from error


def _cantera_folders() -> list[str]:
    """Where Cantera looks for files besides: CANTERA_DATA, and the data folder of an installed package."""
    folders = [f for f in os.environ.get("CANTERA_DATA", "").split(os.pathsep) if f]
    spec = find_spec("cantera")
    places = spec.submodule_search_locations if spec is not None else None
    return [*folders, *(os.path.join(place, "data") for place in places or ())]
