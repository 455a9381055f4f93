"""Thermo files for tests: one good record, ways to break it, and records of any polynomial."""

from __future__ import annotations

from collections.abc import Mapping
from importlib.util import find_spec
from pathlib import Path

from heatwright.polynomial.nasa7 import Nasa7
from heatwright.reading.entries import parse_entries
from heatwright.reading.entry_file import EntryFile, ThermoEntry

CH4 = (
    "CH4               L 8/88C   1H   4          G   200.000  3500.000 1000.00      1",
    " 7.48514950E-02 1.33909467E-02-5.73285809E-06 1.22292535E-09-1.01815230E-13    2",
    "-9.46834459E+03 1.84373180E+01 5.14987613E+00-1.36709788E-02 4.91800599E-05    3",
    "-4.84743026E-08 1.66693956E-11-1.02466476E+04-4.64130376E+00                   4",
)
"""Methane of GRI-Mech 3.0 (G. P. Smith et al., 30 July 1999)."""
CP300, CP1500 = 35.7605, 90.4137
"""Cp of this record at 300 and 1500 K as Cantera 3.2.0 evaluates it, J/mol/K."""
HEAD = ("THERMO", "   300.000  1000.000  5000.000")


def cantera_data() -> Path:
    """The folder of the data files that Cantera ships."""
    found = find_spec("cantera")
    assert found is not None
    assert found.origin is not None
    return Path(found.origin).parent / "data"


def section(*lines: str, head: tuple[str, ...] = HEAD, end: str = "END", newline: str = "\n") -> bytes:
    """The bytes of a THERMO section with these lines."""
    return newline.join([*head, *lines, end, ""]).encode()


def parsed(*lines: str, head: tuple[str, ...] = HEAD) -> EntryFile:
    """The same, read."""
    return parse_entries(section(*lines, head=head), "therm.dat")


def one(*lines: str, head: tuple[str, ...] = HEAD) -> ThermoEntry:
    """The only entry of such a section."""
    (entry,) = parsed(*lines, head=head).entries
    return entry


def codes(entry: ThermoEntry, severity: str = "") -> set[str]:
    """The codes of an entry's findings, of one severity when it is named."""
    return {f.code for f in entry.findings if severity in ("", f.severity)}


def record(name: str, composition: Mapping[str, float], p: Nasa7, phase: str = "G") -> str:
    """A fixed record, made independently of the project's writer: columns as in the public table."""
    elements = "".join(f"{s.upper():<2}{int(n):>3}" for s, n in composition.items()).ljust(20)
    first = f"{name:<18}{'':6}{elements}{phase}{p.t_low_K:10.3f}{p.t_high_K:10.3f}{p.t_common_K:8.2f}{'':6}1"
    values = [f"{a:15.8E}" for a in (*p.high, *p.low)]
    lines = ["".join(values[:5]), "".join(values[5:10]), "".join(values[10:]) + " " * 15]
    return "\n".join([first, *(f"{line}    {i}" for i, line in enumerate(lines, 2))])


def species(name: str, composition: Mapping[str, float], p: Nasa7, thermo: str = "") -> str:
    """The same as an item of a Cantera YAML list; *thermo* is a further line of its thermo data."""
    pairs = ", ".join(f"{s}: {n:g}" for s, n in composition.items())
    rows = [f"    - [{', '.join(repr(a) for a in row)}]" for row in (p.low, p.high)]
    head = [f"- name: {name}", f"  composition: {{{pairs}}}", "  thermo:", "    model: NASA7"]
    temperatures = f"    temperature-ranges: [{p.t_low_K}, {p.t_common_K}, {p.t_high_K}]"
    extra = [f"    {thermo}"] if thermo else []
    return "\n".join([*head, temperatures, *extra, "    data:", *rows])
