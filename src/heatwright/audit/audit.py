"""Auditing a thermo file: every entry through every check, and all of them together."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Literal

from heatwright.audit.between import composition_findings, copies, doubles, pressure_findings
from heatwright.audit.facts import Facts, facts_of
from heatwright.audit.joint import joint_findings
from heatwright.audit.physics import physics_findings
from heatwright.audit.published import Comparison, compare_published, difference_findings, published_findings
from heatwright.audit.release import Residual, compare_release, not_in_release, residual_findings
from heatwright.findings import Finding, Severity
from heatwright.reading.entry_file import EntryFile, ThermoEntry, decoded

RANK: dict[Severity, int] = {"note": 0, "warn": 1, "refuse": 2}
"""How bad a severity is."""


@dataclass(frozen=True, slots=True)
class AuditedEntry:
    """One entry with all its findings, those of the reader first.

    facts : None when the entry is refused or has no thermo data.
    residual : against a release.   comparisons : against published values.
    """

    entry: ThermoEntry
    facts: Facts | None
    findings: tuple[Finding, ...]
    residual: Residual | None = None
    comparisons: tuple[Comparison, ...] = ()

    @property
    def worst(self) -> Severity | None:
        """The worst severity among the findings, or None."""
        return max((f.severity for f in self.findings), key=RANK.__getitem__, default=None)


@dataclass(frozen=True, slots=True)
class Audit:
    """What the audit of one file says; ``findings`` are about the file as a whole."""

    file: EntryFile
    entries: tuple[AuditedEntry, ...]
    findings: tuple[Finding, ...]

    def all_findings(self) -> Iterator[Finding]:
        """Everything, the file's own first, then in the order of the entries, with the file's path in the places."""
        for finding in (*self.findings, *(f for e in self.entries for f in e.findings)):
            yield finding.at(self.file.path)

    def worse_than(self, allowed: Severity | Literal["none"]) -> Iterator[Finding]:
        """The findings that are worse than *allowed*; with ``"none"`` all of them, with ``"refuse"`` never one."""
        limit = -1 if allowed == "none" else RANK[allowed]
        return (f for f in self.all_findings() if RANK[f.severity] > limit)


def audit_entries(file: EntryFile, *, against: EntryFile | None = None, published: bool = False) -> Audit:
    """Check every entry of *file*.

    against : a release, or another entry file, to compare with.
    published : whether to compare with published values too.
    """
    facts = {e.span: f for e in file.entries if (f := facts_of(e, _comment(file, e))) is not None}
    together: dict[tuple[int, int], list[Finding]] = defaultdict(list)
    for entry, finding in (*doubles(file), *copies(facts.values())):
        together[entry.span].append(finding)
    audited = tuple(_entry(e, facts.get(e.span), tuple(together[e.span]), against, published) for e in file.entries)
    findings = [*file.findings, *pressure_findings(file)]
    if against is not None:
        alone = not_in_release([a.entry for a in audited if a.facts is not None and a.residual is None], against)
        findings.extend(f for f in (alone,) if f is not None)
    return Audit(file, audited, tuple(findings))


def _entry(
    entry: ThermoEntry,
    facts: Facts | None,
    together: tuple[Finding, ...],
    against: EntryFile | None,
    published: bool,
) -> AuditedEntry:
    findings = [*(_named(f, entry) for f in entry.findings), *composition_findings(entry), *together]
    if facts is None:
        return AuditedEntry(entry, None, tuple(findings))
    findings += [*joint_findings(facts), *physics_findings(facts)]
    if not any(f.code == "unit-mistake" for f in findings):
        findings += published_findings(facts)
    residual = None if against is None else compare_release(facts, against)
    comparisons = compare_published(facts) if published else ()
    if residual is not None:
        findings += residual_findings(facts, residual)
    findings += difference_findings(facts, comparisons)
    return AuditedEntry(entry, facts, tuple(findings), residual, comparisons)


def _named(finding: Finding, entry: ThermoEntry) -> Finding:
    """A reader's finding with the species' name in front, where it does not say it."""
    if not entry.name or entry.name in finding.found:
        return finding
    return replace(finding, found=f"{entry.name}: {finding.found}")


def _comment(file: EntryFile, entry: ThermoEntry) -> str:
    start, end = entry.lead
    return decoded(file.data[start:end])
