"""What is read from an existing thermo file: its entries with their places, and the file as bytes."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Final, Literal

from heatwright.findings import Finding, refusals

if TYPE_CHECKING:
    from heatwright.polynomial.nasa7 import Nasa7

Ranges = Literal["both", "one", "low", "high"]
Span = tuple[int, int]

USUAL_COMMON_K: Final = 1000.0
"""The common temperature that a file has when it names none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ThermoEntry:
    """One species of a thermo file, as its text says it.

    name : as written.
    composition : atoms by element symbol (``D`` deuterium, ``E`` electrons: -1 in a cation); a fraction stays one.
    phase : ``G``, ``L``, ``S`` or another letter as written; of YAML what the file's phases say; empty when unknown.
    note : source and date, the text that goes with the name.
    polynomial : None when the entry is refused.  Where only one range is given it stands on both sides of a common
        temperature inside that range, and the polynomial ends where the range does.
    ranges : ``both``; ``one`` for the whole span; or only the ``low`` or ``high`` one of two.
    stated_K : the temperatures as stated, low to high.
    reference_pressure_Pa : None where the format or the entry says nothing.
    stated_h298_K : H°(298.15)/R as printed after the coefficients of some fixed records, K.
    span : offsets of its bytes, whole lines; ``lines`` are their numbers from 1, both included.
    lead : offsets of the comment lines directly above it, empty when there are none.
    temperature_spans : offsets of the stated temperatures, low to high (of a fixed record: the whole fields).
    coefficient_spans : offsets of the seven coefficients of each range, low range first.
    findings : what was noticed; with a refusal among them there is no polynomial.
    """

    name: str
    composition: dict[str, float]
    phase: str
    note: str
    polynomial: Nasa7 | None
    ranges: Ranges
    stated_K: tuple[float, ...]
    span: Span
    lines: tuple[int, int]
    lead: Span
    temperature_spans: tuple[Span, ...] = ()
    coefficient_spans: tuple[tuple[Span, ...], ...] = ()
    reference_pressure_Pa: float | None = None
    stated_h298_K: float | None = None
    findings: tuple[Finding, ...] = ()

    @property
    def atoms(self) -> float:
        """Number of atoms, electrons not counted."""
        return sum(n for symbol, n in self.composition.items() if symbol != "E")

    @property
    def charge(self) -> int:
        """The charge that the electrons in the composition make."""
        return -round(self.composition.get("E", 0.0))


@dataclass(frozen=True, slots=True)
class PassedOver:
    """A species whose thermo model is not the two-range polynomial of seven coefficients."""

    name: str
    model: str
    line: int


@dataclass(frozen=True, slots=True, kw_only=True)
class EntryFile:
    """A thermo file: its bytes as they are, and what they say.

    format : ``nasa7`` for fixed 80-column records, ``yaml`` for Cantera YAML.
    newline : the line end that most lines have.
    defaults_K : default temperatures of the THERMO section (low, common, high), or None.
    entries : all of them in the order of the file, the refused ones too.
    passed_over : species with another thermo model.
    findings : about the file as a whole.
    """

    path: str
    data: bytes = field(repr=False)
    format: Literal["nasa7", "yaml"]
    newline: str
    defaults_K: tuple[float, float, float] | None
    entries: tuple[ThermoEntry, ...]
    passed_over: tuple[PassedOver, ...] = ()
    findings: tuple[Finding, ...] = ()

    @property
    def usable(self) -> tuple[ThermoEntry, ...]:
        """The entries that have a polynomial."""
        return tuple(e for e in self.entries if e.polynomial is not None)

    def named(self, name: str) -> tuple[ThermoEntry, ...]:
        """Every entry of this name, in the order of the file."""
        return tuple(e for e in self.entries if e.name == name)

    def text_of(self, entry: ThermoEntry) -> str:
        """The entry's own lines with plain line ends."""
        start, end = entry.span
        return decoded(self.data[start:end]).replace("\r\n", "\n").replace("\r", "\n")

    def all_findings(self) -> Iterator[Finding]:
        """Those of the file and of each entry, with the file's path in their places."""
        for finding in self.findings:
            yield finding.at(self.path)
        for entry in self.entries:
            for finding in entry.findings:
                yield finding.at(self.path)


def with_finding(entry: ThermoEntry, *findings: Finding) -> ThermoEntry:
    """*entry* with further findings; a refusal among them takes its polynomial away."""
    polynomial = None if refusals(findings) else entry.polynomial
    return replace(entry, polynomial=polynomial, findings=(*entry.findings, *findings))


def decoded(data: bytes) -> str:
    """Bytes as text: UTF-8 where they are that, else one letter a byte (Latin-1)."""
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError:
        return data.decode("latin-1")


def split_common_K(t_low_K: float, t_high_K: float) -> float:
    """Where a single range is split in two: 1000 K when that lies inside with 100 K to spare, else the middle.

    >>> split_common_K(200.0, 6000.0), split_common_K(300.0, 900.0)
    (1000.0, 600.0)
    """
    inside = t_low_K + 100.0 <= USUAL_COMMON_K <= t_high_K - 100.0
    return USUAL_COMMON_K if inside else 0.5 * (t_low_K + t_high_K)
