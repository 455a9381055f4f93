"""What only several entries of a file show together: doubles, copies, names in different case, missing pressures."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Iterator

from heatwright.audit.facts import Facts
from heatwright.audit.names import charge_in, contradicts
from heatwright.findings import Finding, Severity, note, refuse, warn
from heatwright.reading.entry_file import EntryFile, ThermoEntry

Said = tuple[ThermoEntry, Finding]


def composition_findings(entry: ThermoEntry) -> Iterator[Finding]:
    """Whether the name, read as a formula, says another composition or charge."""
    where = f"line {entry.lines[0]}"
    if entry.composition and contradicts(entry.name, entry.composition):
        found = (
            f"{entry.name}: the composition is {composition_text(entry)}, and the name is the formula of another one"
        )
        yield warn("composition-mismatch", found, where=where, action="One of the two is wrong.")
    charge = charge_in(entry.name, entry.composition)
    if charge is not None and charge != entry.charge:
        found = f"{entry.name}: the composition has the charge {entry.charge:+d}, the name {charge:+d}"
        action = "Give the electrons as element E: -1 for each positive charge."
        yield warn("composition-mismatch", found, where=where, action=action)


def composition_text(entry: ThermoEntry) -> str:
    """The composition in one word.

    For methanol: ``CH4O``.
    """
    return "".join(f"{s}{'' if n == 1 else f'{n:g}'}" for s, n in entry.composition.items()) or "empty"


def doubles(file: EntryFile) -> Iterator[Said]:
    """Every second entry of one name, with the first one's line; names that differ in case only."""
    seen: dict[str, ThermoEntry] = {}
    folded: dict[str, ThermoEntry] = {}
    for entry in file.entries:
        where = f"line {entry.lines[0]}"
        first = seen.get(entry.name)
        if first is not None:
            same = _same(first, entry)
            make = warn if same else refuse
            data = "the same data" if same else "other data"
            found = f"{entry.name} is there twice (first in line {first.lines[0]}), with {data}"
            yield entry, make("duplicate-entry", found, where=where, action="Readers keep one of them or stop.")
            continue
        other = folded.get(entry.name.casefold())
        if other is not None and other.composition == entry.composition:
            found = f"{entry.name} differs from {other.name} in line {other.lines[0]} in case only"
            yield entry, note("duplicate-entry", found, where=where)
        seen[entry.name] = entry
        folded.setdefault(entry.name.casefold(), entry)


def _same(a: ThermoEntry, b: ThermoEntry) -> bool:
    return a.polynomial is not None and a.polynomial == b.polynomial and a.composition == b.composition


def copies(facts: Iterable[Facts]) -> Iterator[Said]:
    """Entries under different names whose coefficients are the same."""
    groups: dict[tuple[tuple[float, ...], tuple[float, ...]], list[Facts]] = defaultdict(list)
    for f in facts:
        groups[f.polynomial.low, f.polynomial.high].append(f)
    for group in groups.values():
        first = group[0].entry
        for f in group[1:]:
            if f.entry.name == first.name:
                continue
            alike = f.entry.composition == first.composition
            severity: Severity = "note" if alike else "warn"
            other = "" if alike else f", which is {composition_text(first)}"
            words = f"has the coefficients of {first.name} (line {first.lines[0]}){other}"
            yield f.entry, f.say(severity, "same-coefficients", words, action="" if alike else "One of them is a copy.")


def pressure_findings(file: EntryFile) -> Iterator[Finding]:
    """Gas entries of a YAML file that state no pressure, and entries that state different ones."""
    if file.format != "yaml" or not file.entries:
        return
    silent = [e for e in file.entries if e.reference_pressure_Pa is None and e.phase in ("G", "")]
    if silent:
        names = f"{silent[0].name} and {len(silent) - 1} more" if len(silent) > 1 else silent[0].name
        yield note(
            "pressure-not-stated",
            f"{names}: no reference-pressure is stated, and Cantera takes 1 atm",
            where=f"line {silent[0].lines[0]}",
            action="For data at 1 bar write `reference-pressure: 1 bar`; S is otherwise 0.11 J/mol/K off.",
        )
    stated = sorted({e.reference_pressure_Pa for e in file.entries if e.reference_pressure_Pa is not None})
    if len(stated) > 1:
        shown = ", ".join(f"{p:g}" for p in stated)
        yield warn("pressure-not-stated", f"entries state different reference pressures: {shown} Pa")
