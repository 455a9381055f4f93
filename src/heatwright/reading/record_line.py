"""The first line of a fixed record while it is read field by field, and its findings."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import Final

from heatwright.findings import Finding, Severity, note, refuse, warn
from heatwright.reading.yaml_nodes import with_caret

SHIFT_IT: Final = "Shift it into its columns; readers that go by columns take something else from them."
_FIELD_CODES: Final = frozenset({"composition-wrong", "record-columns", "coefficient-wrong"})


@dataclass(slots=True)
class Head:
    """What the first line says, filled in field by field; ``findings`` collects what was noticed."""

    line: str
    number: int
    defaults_K: tuple[float, float, float] | None
    further: tuple[str, ...] = ()
    name: str = ""
    note: str = ""
    phase: str = ""
    composition: dict[str, float] = field(default_factory=dict)
    temperatures_K: tuple[float, float, float] | None = None
    findings: list[Finding] = field(default_factory=list)

    def say(
        self,
        severity: Severity,
        code: str,
        found: str,
        column: int,
        length: int = 1,
        *,
        expected: str = "",
        action: str = "",
    ) -> None:
        """Notes a finding at a column of the line."""
        make = {"refuse": refuse, "warn": warn, "note": note}[severity]
        finding = make(code, found, where=f"line {self.number}:{column}", expected=expected, action=action)
        self.findings.append(finding.shown(with_caret(self.line, column, length)))


def together(findings: list[Finding]) -> list[Finding]:
    """The findings with all refusals about fields of one line, one shift of columns mostly, as one: the first."""
    kept: list[Finding] = []
    further: dict[str, int] = {}
    for finding in findings:
        line = finding.where.split(":")[0]
        if not _is_field_fault(finding):
            kept.append(finding)
        elif line in further:
            further[line] += 1
        else:
            further[line] = 0
            kept.append(finding)
    return [_with_more(f, further[f.where.split(":")[0]]) if _is_field_fault(f) else f for f in kept]


def _is_field_fault(finding: Finding) -> bool:
    return finding.severity == "refuse" and finding.code in _FIELD_CODES


def _with_more(finding: Finding, n: int) -> Finding:
    if not n:
        return finding
    more = f"; {n} further field{'s' if n > 1 else ''} of this line cannot be read either"
    return replace(finding, found=finding.found + more)
