"""Thermo data put into the species of a Cantera YAML file: only what stands under ``thermo:`` is replaced."""

from __future__ import annotations

from heatwright.findings import Refused, refuse
from heatwright.project.cantera_file import CanteraFile, word
from heatwright.project.thermo_set import Thermo
from heatwright.reading.entry_file import EntryFile, Span, ThermoEntry, decoded
from heatwright.reading.yaml_nodes import Mapping, Sequence, Text
from heatwright.reading.yaml_subset import yaml_document
from heatwright.writing.numbers import yaml_text
from heatwright.writing.record import whole_counts, yaml_thermo_flow, yaml_thermo_lines


class YamlPlaces:
    """Where the thermo data of each species stand in a YAML file.

    states_pressure : whether the file's entries name their standard pressure, and new ones are to do so too.
    """

    def __init__(self, file: EntryFile, states_pressure: bool) -> None:
        text = decoded(file.data).removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n")
        self.file = file
        self.states_pressure = states_pressure
        self.source = Text.of(text)
        self.document = yaml_document(text, skip=lambda key: key == "reactions" or key.endswith("-reactions"))
        self.lines = file.data.splitlines(keepends=True)
        self.starts = [0]
        for line in self.lines:
            self.starts.append(self.starts[-1] + len(line))

    def replaced(self, thermo: Thermo, entry: ThermoEntry) -> tuple[Span, bytes]:
        """The span of the thermo data of an entry and what takes its place."""
        node = self._thermo(entry)
        span = self._byte(node.start), self._byte(node.end)
        assert thermo.polynomial is not None
        pressure = thermo.pressure_Pa if self.states_pressure else None
        polynomial = thermo.polynomial.rounded()
        if node.flow:
            return span, yaml_thermo_flow(polynomial, pressure_Pa=pressure, note=provenance(thermo)).encode()
        column = self.source.place(node.start)[1] - 1
        lines = yaml_thermo_lines(polynomial, pressure_Pa=pressure, note=provenance(thermo))
        return span, f"{self.file.newline}{' ' * column}".join(lines).encode()

    def added(self, added: list[Thermo]) -> tuple[Span, bytes]:
        """The place behind the last species and what is to stand there."""
        section, last = self._last()
        if section.flow or not section.marks:
            raise Refused(
                [
                    refuse(
                        "no-such-entry",
                        "the species stand in one bracketed list, to which lines cannot be added",
                        where=self.file.path,
                        expected="a block of lines that starts with `- name:` for each species",
                    )
                ]
            )
        column = self.source.place(section.marks[-1])[1] - 1
        end = last.span[1]
        newline = self.file.newline
        lines = [" " * column + line for t in added for line in self._species(t)]
        block = "".join(line + newline for line in lines).encode(self._encoding)
        if self.file.data[:end].endswith((b"\n", b"\r")):
            return (end, end), block
        return (end, end), newline.encode() + block.removesuffix(newline.encode())

    def undeclared(self, names: list[str]) -> list[str]:
        """Names that no phase of the file takes up; none where the file has no phases."""
        document = CanteraFile(self.file.path, self.source, self.document)
        nodes = document.phase_nodes()
        whole = [n for n in nodes if n.items.get("species") is None or word(n.items.get("species")) == "all"]
        if not nodes or whole:
            return []
        declared = {s for n in nodes for s in document.phase(n).species}
        return [n for n in names if n not in declared]

    @property
    def _encoding(self) -> str:
        try:
            self.file.data.decode("utf-8")
        except UnicodeDecodeError:
            return "latin-1"
        return "utf-8"

    def _byte(self, offset: int) -> int:
        line, column = self.source.place(offset)
        return self.starts[line - 1] + len(self.source.line(line)[: column - 1].encode(self._encoding))

    def _thermo(self, entry: ThermoEntry) -> Mapping:
        for node in self.document.items.values():
            for item in node.items if isinstance(node, Sequence) else ():
                thermo = item.items.get("thermo") if isinstance(item, Mapping) else None
                if not isinstance(item, Mapping) or not isinstance(thermo, Mapping):
                    continue
                line = self.source.place(item.start)[0]
                if word(item.items.get("name")) == entry.name and entry.lines[0] <= line <= entry.lines[1]:
                    return thermo
        raise AssertionError(f"the reader found {entry.name}, and it is not to be found again")

    def _last(self) -> tuple[Sequence, ThermoEntry]:
        if not self.file.entries:
            found = "the file has no entry behind which others could stand"
            raise Refused([refuse("no-entries", found, where=self.file.path)])
        last = max(self.file.entries, key=lambda e: e.span[1])
        for node in self.document.items.values():
            if isinstance(node, Sequence) and any(self._is(item, last) for item in node.items):
                return node, last
        raise AssertionError(f"the reader found {last.name}, and it is not to be found again")

    def _is(self, item: object, entry: ThermoEntry) -> bool:
        if not isinstance(item, Mapping) or word(item.items.get("name")) != entry.name:
            return False
        return entry.lines[0] <= self.source.place(item.start)[0] <= entry.lines[1]

    def _species(self, thermo: Thermo) -> list[str]:
        assert thermo.polynomial is not None
        atoms = ", ".join(f"{yaml_text(s)}: {n}" for s, n in whole_counts(thermo.name, thermo.composition).items())
        pressure = thermo.pressure_Pa if self.states_pressure else None
        lines = yaml_thermo_lines(thermo.polynomial.rounded(), pressure_Pa=pressure, note=provenance(thermo))
        head = [f"- name: {yaml_text(thermo.name)}", f"  composition: {{{atoms}}}", "  thermo:"]
        return [*head, *(f"    {line}" for line in lines)]


def provenance(thermo: Thermo) -> str:
    """Where an entry comes from, in one line: its note, and level and route to the enthalpy from its record."""
    record = thermo.record
    if record is None:
        return thermo.note
    f = record.formation
    route = f"dHf298 {f.route}{f': {f.source}' if f.source else ''}"
    made = f"heatwright: {record.level or 'level not printed'}; {route}"
    return f"{thermo.note}; {made}" if thermo.note else made
