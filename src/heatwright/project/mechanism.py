"""The reactions of a Cantera YAML mechanism, read without Cantera."""

from __future__ import annotations

import os
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Final

from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.project.cantera_file import CODE, CanteraFile, Phase, word
from heatwright.project.equations import Equation, parse_equation
from heatwright.reading.yaml_nodes import Mapping, Node, Scalar, Sequence

_RULES: Final = ("all", "declared-species", "none")
_RATE_BY_ENTHALPY: Final = "Blowers-Masel"


@dataclass(frozen=True, slots=True, kw_only=True)
class Reaction:
    """One reaction of a mechanism.

    number : its place among the mechanism's reactions, from 1.   text : the equation as written.
    kind : its ``type``, empty where none is given.   where : ``FILE:LINE``.
    """

    number: int
    text: str
    equation: Equation
    kind: str
    duplicate: bool
    where: str

    @property
    def forward_moves(self) -> bool:
        """Whether the forward rate itself depends on the enthalpy of reaction (Blowers and Masel)."""
        return _RATE_BY_ENTHALPY in self.kind


@dataclass(frozen=True, slots=True, kw_only=True)
class Mechanism:
    """Phases and reactions of a Cantera YAML file, with what was noticed."""

    path: str
    phases: tuple[Phase, ...]
    reactions: tuple[Reaction, ...]
    findings: tuple[Finding, ...] = ()

    @property
    def declared(self) -> frozenset[str]:
        """Every species that a phase declares."""
        return frozenset(s for phase in self.phases for s in (*phase.species, *phase.beside))


def read_mechanism(path: str | os.PathLike[str], phase: str | None = None) -> Mechanism:
    """The mechanism in a Cantera YAML file: the reactions of all its phases, each once, or of the one called *phase*.

    A file in which no phase names reactions gives every section whose name ends with ``reactions``.

    Raises Refused: ``file-missing``, ``yaml-unreadable``, or ``mechanism-wrong`` with file and line.
    """
    file = CanteraFile.load(os.fspath(path))
    nodes = _wanted(file, phase)
    collected = _Collected()
    phases = []
    for node in nodes:
        phases.append(file.phase(node))
        for (of, section), rule in _sections(file, node):
            collected.take(of, section, rule, phases[-1])
    findings = [] if collected.reactions else _loose(file, phase, bool(nodes), collected)
    if not collected.reactions:
        inside = f" in phase {phase}" if phase else ""
        expected = "a list of reactions that a phase names, or a section called reactions"
        raise Refused([refuse(CODE, f"the file holds no reactions{inside}", where=file.path, expected=expected)])
    found = Mechanism(path=file.path, phases=tuple(phases), reactions=tuple(collected.reactions))
    findings += _undeclared(found)
    return Mechanism(path=file.path, phases=found.phases, reactions=found.reactions, findings=tuple(findings))


def _wanted(file: CanteraFile, phase: str | None) -> list[Mapping]:
    nodes = file.phase_nodes()
    names = [word(n.items.get("name")) for n in nodes]
    if phase is not None and phase not in names:
        found, have = f"there is no phase {phase}", ", ".join(names) or "none"
        raise Refused([refuse(CODE, found, where=file.path, expected=f"one of its phases: {have}")])
    return [n for n, name in zip(nodes, names, strict=True) if phase in (None, name)]


def _sections(file: CanteraFile, phase: Mapping) -> Iterator[tuple[tuple[CanteraFile, Sequence], str]]:
    """The lists of reactions that a phase names, each with its file and rule."""
    node = phase.items.get("reactions")
    if node is None:
        if "kinetics" in phase.items and "reactions" in file.document.items:
            yield file.listed("reactions", phase), "all"
        return
    if isinstance(node, Sequence):
        asked = [pair for item in node.items for pair in _asked(item)]
    else:
        asked = [("reactions", word(node), node)]
    for name, rule, at in asked:
        if rule not in _RULES:
            raise file.refused(at, f"the rule for {name} is {rule!r}", f"one of {', '.join(_RULES)}")
        if rule != "none":
            yield file.listed(name, at), rule


def _asked(item: Node) -> Iterator[tuple[str, str, Node]]:
    if isinstance(item, Mapping):
        yield from ((name, word(rule), item) for name, rule in item.items.items())
    else:
        yield word(item), "all", item


def _loose(file: CanteraFile, phase: str | None, with_phases: bool, collected: _Collected) -> list[Finding]:
    """Takes the reactions of a file in which no phase names any; says so where there are phases."""
    items = file.document.items.items()
    sections = {n: node for n, node in items if n.endswith("reactions") and isinstance(node, Sequence)}
    if phase is not None or not sections:
        return []
    for node in sections.values():
        collected.take(file, node, "all", Phase("", "", ()))
    words = f"no phase of the file names reactions, so those of {', '.join(sections)} were taken"
    return [note("mechanism-choice", words, where=file.path)] if with_phases else []


@dataclass(slots=True)
class _Collected:
    """The reactions so far, and the places they were read from."""

    reactions: list[Reaction] = field(default_factory=list)
    places: set[tuple[str, int]] = field(default_factory=set)

    def take(self, file: CanteraFile, section: Sequence, rule: str, phase: Phase) -> None:
        """Adds the reactions of a section that are not there yet, only those of declared species where so said."""
        declared = {*phase.species, *phase.beside, "M", ""}
        for node in section.items:
            place = (file.path, node.start)
            if place in self.places:
                continue
            reaction = _reaction(file, node, len(self.reactions) + 1)
            named = (*reaction.equation.species, reaction.equation.collider)
            if rule == "declared-species" and not declared.issuperset(named):
                continue
            self.places.add(place)
            self.reactions.append(reaction)


def _reaction(file: CanteraFile, node: Node, number: int) -> Reaction:
    equation = node.items.get("equation") if isinstance(node, Mapping) else None
    if not isinstance(node, Mapping) or not isinstance(equation, Scalar):
        raise file.refused(node, "a reaction has no equation", "`equation: A + B <=> C`")
    kind = word(node.items.get("type"))
    efficiencies = node.items.get("efficiencies")
    named = tuple(efficiencies.items) if isinstance(efficiencies, Mapping) else ()
    try:
        parsed = parse_equation(equation.text, kind, named)
    except ValueError as error:
        raise file.refused(equation, f"the equation {equation.text!r} cannot be read: {error}") from error
    return Reaction(
        number=number,
        text=" ".join(equation.text.split()),
        equation=parsed,
        kind=kind,
        duplicate=word(node.items.get("duplicate")) == "true",
        where=file.where(node),
    )


def _undeclared(mechanism: Mechanism) -> list[Finding]:
    """Species that reactions name and no phase declares; nothing is said where the file has no phases."""
    declared = mechanism.declared
    missing = {s: r for r in reversed(mechanism.reactions) for s in r.equation.species if s not in declared}
    if not declared or not missing:
        return []
    names = sorted(missing)
    shown = ", ".join(names[:8]) + (", …" if len(names) > 8 else "")
    found = f"{len(names)} species of reactions {'are' if len(names) > 1 else 'is'} in no phase: {shown}"
    action = "Cantera refuses such a file; a blank may be missing in an equation."
    return [warn(CODE, found, where=missing[names[0]].where, action=action)]
