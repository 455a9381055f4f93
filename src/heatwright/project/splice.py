"""Entries of a release put into an existing thermo file or mechanism; every byte that is not theirs stays."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass, field
from typing import Final

from heatwright.constants import ATMOSPHERE_PA
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.project.changes import Change, compare_sets
from heatwright.project.splice_records import added_records, replaced_record, undeclared_in_records
from heatwright.project.splice_yaml import YamlPlaces
from heatwright.project.thermo_set import Thermo, ThermoSet, default_pressure_Pa, stated_pressure_Pa, thermo_set_of
from heatwright.reading.entries import parse_entries
from heatwright.reading.entry_file import EntryFile, Span, ThermoEntry
from heatwright.writing.formats import FORMATS

_SHOWN: Final = 12


@dataclass(frozen=True, slots=True, kw_only=True)
class Splice:
    """A file with entries put into it.

    data : its bytes.   replaced : the change of each replaced entry, those that matter most first.
    same : names whose entry was the same already.   added, left_out : names that the file did not have.
    """

    data: bytes = field(repr=False)
    replaced: tuple[Change, ...]
    same: tuple[str, ...]
    added: tuple[str, ...]
    left_out: tuple[str, ...]
    findings: tuple[Finding, ...]


def splice(
    release: ThermoSet,
    file: EntryFile,
    *,
    only: Collection[str] = (),
    add: bool = False,
    pressure_Pa: float | None = None,
) -> Splice:
    """The bytes of *file* with the entries of *release* in the place of those of the same names.

    only : the names to take, all when empty.   add : put in what the file does not have, instead of leaving it out.
    pressure_Pa : the standard pressure that the file's entries are for, where it does not say so itself.

    Raises Refused, and then nothing was made: standard pressures that differ, a name that is there twice, an entry
    that cannot be read, other elements, another thermo model, what does not fit its field.
    """
    chosen = _chosen(release, only)
    findings = _check_pressure(chosen, file, pressure_Pa)
    named = {t.name: file.named(t.name) for t in chosen}
    absent = [t for t in chosen if not named[t.name]]
    refusals = [f for t in chosen if named[t.name] for f in _unfit(t, named[t.name], file)]
    refusals += [f for t in absent for f in _not_addable(t, file, add, bool(only))]
    if refusals:
        raise Refused(refusals)
    states = any(e.reference_pressure_Pa is not None for e in file.entries)
    pairs = [(t, named[t.name][0]) for t in chosen if named[t.name]]
    due = [(t, e) for t, e in pairs if t.polynomial != e.polynomial]
    data = _spliced(file, due, absent if add else [], states)
    _check_read_back(file, data, due, absent if add else [])
    return Splice(
        data=data,
        replaced=_changes(release, file, [t.name for t, _ in due]),
        same=tuple(t.name for t, e in pairs if t.polynomial == e.polynomial),
        added=tuple(t.name for t in absent) if add else (),
        left_out=() if add else tuple(t.name for t in absent),
        findings=(*findings, *_kept_comments(file, due), *_rounded(due), *_undeclared(file, absent if add else [])),
    )


def _chosen(release: ThermoSet, only: Collection[str]) -> list[Thermo]:
    missing = [n for n in only if n not in release.species]
    if missing:
        found = f"there is no usable entry of {', '.join(missing)}"
        action = "Names are case-sensitive."
        raise Refused([*release.findings, refuse("no-such-entry", found, where=release.path, action=action)])
    if release.unusable and not only:
        raise Refused(f for f in release.findings if f.severity == "refuse")
    chosen = [t for n, t in sorted(release.species.items()) if not only or n in only]
    if any(t.polynomial is None for t in chosen):
        found = "a lock file holds no polynomials"
        action = "Give the release folder it lies in, or a thermo file."
        raise Refused([refuse("no-release", found, where=release.path, action=action)])
    return chosen


# --- standard pressures --------------------------------------------------------------------------------------------


def _check_pressure(chosen: list[Thermo], file: EntryFile, said_Pa: float | None) -> list[Finding]:
    """Raises Refused when the entries would stand beside others for another standard pressure."""
    ours = {t.pressure_Pa for t in chosen}
    if len(ours) > 1:
        shown = " and ".join(sorted("none" if p is None else f"{p:g} Pa" for p in ours))
        raise _mixed(f"the entries to be put in name different standard pressures, {shown}", file.path)
    theirs = file_pressure_Pa(file, said_Pa)
    mine = ours.pop() if ours else theirs
    if mine is not None and theirs is not None and mine != theirs:
        silent = file.format == "yaml" and stated_pressure_Pa(file) is None and said_Pa is None
        how = " (Cantera takes 1 atm where a file says nothing)" if silent else ""
        found = f"the entries to be put in are for {mine:g} Pa, the file's own for {theirs:g} Pa{how}"
        raise _mixed(found, file.path)
    if (mine is None) == (theirs is None):
        return []
    which = "the file" if theirs is None else "the release"
    found = f"{which} does not say for which standard pressure its entries are; {mine or theirs:g} Pa was taken"
    action = "1 bar and 1 atm differ by 0.109 J/mol/K in every entropy."
    return [note("pressure-not-stated", found, where=file.path, action=action)]


def file_pressure_Pa(file: EntryFile, said_Pa: float | None = None) -> float | None:
    """What the entries of a file are for: what they or their comments say, what the user says, Cantera's 1 atm.

    None for fixed records of which nobody says anything.  Raises Refused when the file mixes pressures or the user
    contradicts it.
    """
    own = stated_pressure_Pa(file)
    if own is None and any(e.reference_pressure_Pa is not None for e in file.entries):
        raise _mixed("the file's own entries are for different standard pressures", file.path)
    own = default_pressure_Pa(file) if own is None else own
    if own is not None and said_Pa is not None and own != said_Pa:
        raise _mixed(f"the file is for {own:g} Pa by its own words, and {said_Pa:g} Pa was said", file.path)
    if own is not None or said_Pa is not None:
        return own if said_Pa is None else said_Pa
    return ATMOSPHERE_PA if file.format == "yaml" else None


def _mixed(found: str, path: str) -> Refused:
    action = (
        "Build the release for the file's standard pressure (`pressure` in heatwright.toml); or say --pressure, where "
        "the file does not name its own."
    )
    return Refused([refuse("pressure-differs", found, where=path, expected="one standard pressure", action=action)])


# --- what cannot be replaced or added ------------------------------------------------------------------------------


def _unfit(thermo: Thermo, entries: tuple[ThermoEntry, ...], file: EntryFile) -> Iterable[Finding]:
    """Why the entry of a name cannot be replaced."""
    where = f"{file.path}:{entries[0].lines[0]}"
    if len(entries) > 1:
        lines = ", ".join(str(e.lines[0]) for e in entries)
        found = f"{thermo.name} is there {len(entries)} times, in lines {lines}"
        yield refuse("duplicate-entry", found, where=where, action="Take out all but one of them first.")
        return
    entry = entries[0]
    if entry.polynomial is None:
        yield from (f.at(file.path) for f in entry.findings if f.severity == "refuse")
    elif entry.composition != thermo.composition:
        found = f"{thermo.name} is {_formula(entry.composition)} in the file and {_formula(thermo.composition)} here"
        action = "These are two species; rename one of them, or choose the others by --only."
        yield refuse("other-species", found, where=where, action=action)
    if file.format == "nasa7":
        yield from (f.at(where) for f in FORMATS["nasa7"].name_findings(thermo.name))


def _formula(composition: object) -> str:
    items = composition.items() if isinstance(composition, dict) else ()
    return "".join(f"{symbol}{n:g}" for symbol, n in items) or "without elements"


def _not_addable(thermo: Thermo, file: EntryFile, add: bool, asked: bool) -> Iterable[Finding]:
    """Why a name that the file does not have cannot be put in, or what to say when it was asked for by name."""
    other = next((p for p in file.passed_over if p.name == thermo.name), None)
    if other is not None:
        found = f"{thermo.name} has the thermo model {other.model} here"
        action = "Only two-range polynomials of seven coefficients are replaced."
        yield refuse("other-model", found, where=f"{file.path}:{other.line}", expected="NASA7", action=action)
    elif not add and asked:
        near = next((e.name for e in file.entries if e.name.upper() == thermo.name.upper()), "")
        also = f" It has {near}: names are case-sensitive." if near else ""
        action = f"Say --add to put it in.{also}"
        yield refuse("no-such-entry", f"the file has no entry of {thermo.name}", where=file.path, action=action)
    elif add and file.format == "nasa7":
        yield from (f.at(thermo.where) for f in FORMATS["nasa7"].name_findings(thermo.name))


# --- the bytes -----------------------------------------------------------------------------------------------------


def _spliced(
    file: EntryFile, due: list[tuple[Thermo, ThermoEntry]], added: list[Thermo], states_pressure: bool
) -> bytes:
    pieces: list[tuple[Span, bytes]] = []
    if file.format == "yaml":
        places = YamlPlaces(file, states_pressure)
        pieces = [places.replaced(thermo, entry) for thermo, entry in due]
        if added:
            pieces.append(places.added(added))
    else:
        pieces = [(entry.span, replaced_record(file, thermo, entry)) for thermo, entry in due]
        if added:
            pieces.append(added_records(file, added))
    out, last = [], 0
    for (start, end), text in sorted(pieces):
        out += [file.data[last:start], text]
        last = end
    return b"".join([*out, file.data[last:]])


def _check_read_back(file: EntryFile, data: bytes, due: list[tuple[Thermo, ThermoEntry]], added: list[Thermo]) -> None:
    """Raises Refused (``splice-failed``) unless the new bytes read back as the old entries with the new ones."""
    new = {e.span: t for t, e in due}
    wanted = [_read_as(new[e.span]) if e.span in new else (e.name, e.polynomial, e.composition) for e in file.entries]
    wanted += [_read_as(t) for t in added]
    found = [(e.name, e.polynomial, e.composition) for e in parse_entries(data, file.path, format=file.format).entries]
    if found != wanted:
        wrong = [a[0] for a, b in zip(wanted, found, strict=False) if a != b] or ["their number"]
        words = f"the file that came out does not read back as it should ({_shown(wrong)}); nothing was written"
        raise Refused([refuse("splice-failed", words, where=file.path, action="Report the file: this is a fault.")])


def _read_as(thermo: Thermo) -> tuple[str, Nasa7 | None, dict[str, float]]:
    polynomial = None if thermo.polynomial is None else thermo.polynomial.rounded()
    return thermo.name, polynomial, dict(thermo.composition)


def _shown(names: Sequence[str]) -> str:
    return ", ".join(names[:_SHOWN]) + (", …" if len(names) > _SHOWN else "")


# --- what is said --------------------------------------------------------------------------------------------------


def _changes(release: ThermoSet, file: EntryFile, names: list[str]) -> tuple[Change, ...]:
    """Each replaced entry against the one that took its place."""
    changes = compare_sets(thermo_set_of(file), release, only_common=True).changes
    return tuple(c for c in changes if c.name in names)


def _kept_comments(file: EntryFile, due: list[tuple[Thermo, ThermoEntry]]) -> list[Finding]:
    names = [t.name for t, e in due if e.lead[0] < e.lead[1]]
    if not names:
        return []
    found = f"comment lines stand above {len(names)} replaced entries and were kept: {_shown(names)}"
    return [note("comment-kept", found, where=file.path, action="They may speak of the old entries.")]


def _rounded(due: list[tuple[Thermo, ThermoEntry]]) -> list[Finding]:
    names = [t.name for t, _ in due if t.polynomial is not None and t.polynomial.rounded() != t.polynomial]
    if not names:
        return []
    found = f"coefficients of {_shown(names)} have more than nine digits and were rounded to them"
    return [note("value-unfit", found)]


def _undeclared(file: EntryFile, added: list[Thermo]) -> list[Finding]:
    names = [t.name for t in added]
    if not names:
        return []
    in_yaml = file.format == "yaml"
    missing = YamlPlaces(file, False).undeclared(names) if in_yaml else undeclared_in_records(file, names)
    if not missing:
        return []
    found = f"the mechanism in the file does not declare {_shown(missing)}"
    action = "Add the name to its species, or the entry stays unused."
    return [warn("not-declared", found, where=file.path, action=action)]
