"""Which phase a species belongs to, as the phases of its own Cantera YAML file say."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Final

from heatwright.reading.yaml_nodes import Mapping, Node, Scalar, Sequence

_GAS: Final = frozenset({"ideal-gas", "Redlich-Kwong", "Peng-Robinson", "plasma", "ideal-gas-VPSS"})


def phase_letters(document: Mapping) -> dict[str, str]:
    """The phase of each species that the file's own phases name: ``G`` for a gas, ``S`` for anything condensed."""
    letters: dict[str, str] = {}
    phases = document.items.get("phases")
    for phase in phases.items if isinstance(phases, Sequence) else ():
        if not isinstance(phase, Mapping):
            continue
        thermo = phase.items.get("thermo")
        letter = "G" if isinstance(thermo, Scalar) and thermo.text in _GAS else "S"
        for name in _names_in(phase.items.get("species"), document):
            letters.setdefault(name, letter)
    return letters


def _names_in(node: Node | None, document: Mapping) -> Iterator[str]:
    """Species that a phase lists: names, ``all``, or sections with names or ``all``."""
    if isinstance(node, Scalar):
        if node.text == "all":
            yield from _names_of_section(document.items.get("species"))
    elif isinstance(node, Sequence):
        for item in node.items:
            if isinstance(item, Scalar):
                yield item.text
            elif isinstance(item, Mapping):
                for section, names in item.items.items():
                    whole = isinstance(names, Scalar) and names.text == "all"
                    yield from _names_of_section(document.items.get(section)) if whole else _names_in(names, document)


def _names_of_section(node: Node | None) -> Iterator[str]:
    for item in node.items if isinstance(node, Sequence) else ():
        name = item.items.get("name") if isinstance(item, Mapping) else None
        if isinstance(name, Scalar):
            yield name.text
