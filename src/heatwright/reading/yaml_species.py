"""Species of a Cantera YAML file: composition, thermo model and the two-range polynomial, each with its place."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import Final

from heatwright.constants import ATMOSPHERE_PA, BAR_PA
from heatwright.findings import Finding, note, refusals, refuse, warn
from heatwright.polynomial.nasa7 import Coefficients, Nasa7
from heatwright.reading.compositions import element_symbol
from heatwright.reading.entry_file import PassedOver, Ranges, ThermoEntry, split_common_K
from heatwright.reading.record import all_zero
from heatwright.reading.yaml_nodes import Mapping, Node, Scalar, Sequence, Text, with_caret
from heatwright.reading.yaml_phases import phase_letters
from heatwright.reading.yaml_subset import yaml_document

CODE: Final = "yaml-entry-wrong"
_NUMBER = re.compile(r"[-+]?(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?")
_WITH_UNIT = re.compile(rf"({_NUMBER.pattern})\s*(\S*)")
_PRESSURE_PA: Final = {"Pa": 1.0, "": 1.0, "kPa": 1.0e3, "MPa": 1.0e6, "bar": BAR_PA, "atm": ATMOSPHERE_PA}


@dataclass(slots=True)
class YamlScan:
    """What a YAML file holds."""

    entries: list[ThermoEntry] = field(default_factory=list)
    passed_over: list[PassedOver] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)


def scan_yaml(text: str, offsets: tuple[int, ...], encoding: str = "utf-8") -> YamlScan:
    """Every species of a Cantera YAML text with line ends ``\\n``; lists of reactions are not looked at.

    offsets : for each line of *text* the offset of its first byte in the file, and the file's length at the end.
    encoding : how the file's letters are bytes.

    Raises Refused (``yaml-unreadable``) where the text cannot be read at all.
    """
    document = yaml_document(text, skip=lambda key: key == "reactions" or key.endswith("-reactions"))
    scan = YamlScan()
    reader = _Species(Text.of(text), offsets, encoding, phase_letters(document), scan)
    for section, node in document.items.items():
        if isinstance(node, Sequence) and _is_species_section(section, node):
            for i, item in enumerate(node.items):
                reader.species(item, node, i)
    return scan


def _is_species_section(name: str, node: Sequence) -> bool:
    if name in ("phases", "elements") or name.endswith("reactions"):
        return False
    maps = [item for item in node.items if isinstance(item, Mapping)]
    return any("thermo" in m.items and isinstance(m.items["thermo"], Mapping) for m in maps)


class _Species:
    """Reads one species after the other into a scan."""

    def __init__(
        self, source: Text, offsets: tuple[int, ...], encoding: str, letters: dict[str, str], scan: YamlScan
    ) -> None:
        self.source = source
        self.offsets = offsets
        self.encoding = encoding
        self.letters = letters
        self.scan = scan

    def species(self, node: Node, section: Sequence, index: int) -> None:
        if not isinstance(node, Mapping):
            self.scan.findings.append(self._said(node, "a species is no mapping", "`name: …` and what belongs to it"))
            return
        name = self._name(node)
        thermo = node.items.get("thermo")
        if thermo is None:
            where = f"line {self.source.place(node.start)[0]}"
            said = note("other-model", f"the species {name} has no thermo data", where=where)
            self.scan.findings.append(said)
            return
        model = thermo.items.get("model") if isinstance(thermo, Mapping) else None
        kind = model.text if isinstance(model, Scalar) else ""
        if isinstance(thermo, Mapping) and kind and kind != "NASA7":
            self.scan.passed_over.append(PassedOver(name, kind, self.source.place(node.start)[0]))
            return
        self.scan.entries.append(self._entry(name, node, thermo, section, index))

    def _name(self, node: Mapping) -> str:
        name = node.items.get("name")
        if isinstance(name, Scalar) and name.text:
            return name.text
        self.scan.findings.append(self._said(node, "a species has no name", "`name: …`"))
        return ""

    def _entry(self, name: str, node: Mapping, thermo: Node, section: Sequence, index: int) -> ThermoEntry:
        findings: list[Finding] = []
        composition = self._composition(node, findings)
        phase = self._phase(name, node)
        parts = self._parts(thermo, phase, findings)
        stated = thermo.items if isinstance(thermo, Mapping) else {}
        pressure = self._pressure(stated.get("reference-pressure"), findings)
        remark = stated.get("note") or node.items.get("note")
        span, lines, lead = self._places(node, section, index)
        polynomial, ranges, temperatures = parts or (None, "both", ())
        return ThermoEntry(
            name=name,
            composition=composition,
            phase=phase,
            note=" ".join(remark.text.split()) if isinstance(remark, Scalar) else "",
            polynomial=None if refusals(findings) else polynomial,
            ranges=ranges,
            stated_K=temperatures,
            reference_pressure_Pa=pressure,
            span=span,
            lines=lines,
            lead=lead,
            temperature_spans=self._number_spans(thermo, "temperature-ranges"),
            coefficient_spans=self._coefficient_spans(thermo),
            findings=tuple(findings),
        )

    def _phase(self, name: str, node: Mapping) -> str:
        if name in self.letters:
            return self.letters[name]
        state = node.items.get("equation-of-state")
        model = state.items.get("model") if isinstance(state, Mapping) else None
        condensed = isinstance(model, Scalar) and model.text in ("constant-volume", "density-temperature-polynomial")
        return "S" if condensed else ""

    # --- parts -----------------------------------------------------------------------------------------------------

    def _composition(self, node: Mapping, findings: list[Finding]) -> dict[str, float]:
        given = node.items.get("composition")
        if not isinstance(given, Mapping):
            findings.append(self._said(given or node, "the species has no composition", "`composition: {C: 1, H: 4}`"))
            return {}
        composition: dict[str, float] = {}
        for key, value in given.items.items():
            symbol = element_symbol(key)
            number = self._number(value, f"the count of {key}", findings)
            if symbol is None:
                findings.append(self._said(given.keys[key], f"{key!r} is no element", "a symbol"))
            elif number is not None and number < 0 and symbol != "E":
                findings.append(self._said(value, f"the count of {key} is {number:g}", "a positive number"))
            elif number is not None and number:
                composition[symbol] = int(number) if number.is_integer() else number
                if not number.is_integer():
                    found = f"the count of {symbol} is {number:g}"
                    findings.append(note("fractional-count", found, where=self.source.where(value.start)))
        return composition

    def _parts(
        self, thermo: Node, phase: str, findings: list[Finding]
    ) -> tuple[Nasa7 | None, Ranges, tuple[float, ...]] | None:
        """The polynomial, which ranges are given, and the stated temperatures."""
        if not isinstance(thermo, Mapping) or not isinstance(thermo.items.get("model"), Scalar):
            findings.append(self._said(thermo, "the thermo data name no model", "`model: NASA7`"))
            return None
        temperatures = self._numbers(thermo, "temperature-ranges", "K", findings)
        rows = self._rows(thermo, findings)
        if temperatures is None or rows is None:
            return None
        place = thermo.items["temperature-ranges"]
        if len(temperatures) != len(rows) + 1 or len(rows) not in (1, 2):
            found = f"there are {len(temperatures)} temperatures and {len(rows)} sets of coefficients"
            findings.append(self._said(place, found, "three and two, or two and one"))
            return None
        if not all(a < b for a, b in zip((0.0, *temperatures), temperatures, strict=False)):
            found = f"the temperatures are {', '.join(f'{t:g}' for t in temperatures)} K"
            findings.append(self._said(place, found, "ascending ones", code="temperature-order"))
            return None
        return (*self._polynomial(temperatures, rows, place, phase, findings), temperatures)

    def _polynomial(
        self,
        temperatures: tuple[float, ...],
        rows: list[Coefficients],
        place: Node,
        phase: str,
        findings: list[Finding],
    ) -> tuple[Nasa7 | None, Ranges]:
        where = self.source.where(place.start)
        empty = not any(any(row) for row in rows)
        if empty:
            findings.append(all_zero(phase, where))
        if len(rows) == 1:
            low, high = temperatures
            found = f"one set of coefficients serves the whole range, {low:g} to {high:g} K"
            findings.append(note("one-range", found, where=where))
            return Nasa7(low, split_common_K(low, high), high, rows[0], rows[0]), "one"
        low, common, high = temperatures
        if empty or all(any(row) for row in rows):
            return Nasa7(low, common, high, rows[0], rows[1]), "both"
        ranges: Ranges = "low" if any(rows[0]) else "high"
        start, end, row = (low, common, rows[0]) if ranges == "low" else (common, high, rows[1])
        found = f"the coefficients of one range are zero, so the entry ends with {start:g} to {end:g} K"
        action = "`heatwright mend` makes two ranges of what is there."
        findings.append(warn("range-missing", found, where=where, action=action))
        return Nasa7(start, split_common_K(start, end), end, row, row), ranges

    def _rows(self, thermo: Mapping, findings: list[Finding]) -> list[Coefficients] | None:
        data = thermo.items.get("data")
        if not isinstance(data, Sequence) or not data.items:
            found = "there are no coefficients"
            findings.append(self._said(data or thermo, found, "`data:` with two lists of seven numbers"))
            return None
        rows = []
        for row in data.items:
            values = self._list(row, "the coefficients", "", findings)
            if values is None:
                return None
            if len(values) != 7:
                findings.append(self._said(row, f"there are {len(values)} coefficients", "seven"))
                return None
            a1, a2, a3, a4, a5, a6, a7 = values
            rows.append((a1, a2, a3, a4, a5, a6, a7))
        return rows

    def _numbers(self, thermo: Mapping, key: str, unit: str, findings: list[Finding]) -> tuple[float, ...] | None:
        node = thermo.items.get(key)
        if node is None:
            findings.append(self._said(thermo, f"there is no {key}", f"`{key}: […]`"))
            return None
        return self._list(node, key, unit, findings)

    def _list(self, node: Node, what: str, unit: str, findings: list[Finding]) -> tuple[float, ...] | None:
        if not isinstance(node, Sequence):
            findings.append(self._said(node, f"{what} is no list", "numbers in brackets"))
            return None
        values = [self._number(item, what, findings, unit) for item in node.items]
        good = [v for v in values if v is not None]
        return tuple(good) if len(good) == len(values) else None

    def _number(self, node: Node, what: str, findings: list[Finding], unit: str = "") -> float | None:
        text = node.text if isinstance(node, Scalar) else ""
        bare = text.removesuffix(unit).rstrip() if unit else text
        value = float(bare) if _NUMBER.fullmatch(bare) else None
        if value is None or not abs(value) < 1.0e300:
            shown = text if isinstance(node, Scalar) else "a collection"
            findings.append(self._said(node, f"{what}: {shown!r} is no finite number", "a number"))
            return None
        return value

    def _pressure(self, node: Node | None, findings: list[Finding]) -> float | None:
        if node is None:
            return None
        match = _WITH_UNIT.fullmatch(node.text.strip()) if isinstance(node, Scalar) else None
        if match is None or match[2] not in _PRESSURE_PA:
            found = "the reference pressure cannot be read"
            where = self.source.where(node.start)
            findings.append(warn(CODE, found, where=where, expected=f"a number with {', '.join(_PRESSURE_PA)}"))
            return None
        return float(match[1]) * _PRESSURE_PA[match[2]]

    # --- places ----------------------------------------------------------------------------------------------------

    def _places(
        self, node: Mapping, section: Sequence, index: int
    ) -> tuple[tuple[int, int], tuple[int, int], tuple[int, int]]:
        """Byte span of whole lines, their numbers, and the span of the comment lines directly above."""
        start = section.marks[index] if section.marks else node.start
        first, last = self.source.place(start)[0], self.source.place(max(node.end - 1, start))[0]
        above = first
        while above > 1 and self.source.line(above - 1).lstrip().startswith("#"):
            above -= 1
        span = (self.offsets[first - 1], self.offsets[last])
        return span, (first, last), (self.offsets[above - 1], span[0])

    def _bytes(self, node: Node) -> tuple[int, int]:
        """Offsets of a value's bytes in the file."""
        return self._byte(node.start), self._byte(node.end)

    def _byte(self, offset: int) -> int:
        line, column = self.source.place(offset)
        before = self.source.line(line)[: column - 1]
        return self.offsets[line - 1] + (len(before) if before.isascii() else len(before.encode(self.encoding)))

    def _number_spans(self, thermo: Node, key: str) -> tuple[tuple[int, int], ...]:
        node = thermo.items.get(key) if isinstance(thermo, Mapping) else None
        return tuple(self._bytes(item) for item in node.items) if isinstance(node, Sequence) else ()

    def _coefficient_spans(self, thermo: Node) -> tuple[tuple[tuple[int, int], ...], ...]:
        data = thermo.items.get("data") if isinstance(thermo, Mapping) else None
        rows = data.items if isinstance(data, Sequence) else ()
        return tuple(tuple(self._bytes(item) for item in row.items) for row in rows if isinstance(row, Sequence))

    def _said(self, node: Node, found: str, expected: str, code: str = CODE) -> Finding:
        line, column = self.source.place(node.start)
        length = max(1, min(node.end - node.start, len(self.source.line(line)) - column + 1))
        said = refuse(code, found, where=f"line {line}:{column}", expected=expected)
        return said.shown(with_caret(self.source.line(line), column, length))
