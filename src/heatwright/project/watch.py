"""What a build tells while it is at work; the driver never prints."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from heatwright.findings import Finding
    from heatwright.project.plan import Decision, Plan
    from heatwright.project.record import Record


class Watch:
    """Listens to a build; this one to nothing."""

    def waiting(self) -> None:
        """Another build of the same release is at work, and this one waits for it."""

    def planned(self, plan: Plan) -> None:
        """What will be done and why."""

    def reading(self, done: int, total: int, path: str) -> None:
        """So many files of so many were read, *path* the last of them (empty at the start)."""

    def made(self, decision: Decision, record: Record) -> None:
        """An entry is finished."""

    def failed(self, decision: Decision, findings: Sequence[Finding]) -> None:
        """A species could not be made."""

    def kept(self, decision: Decision) -> None:
        """The earlier entry of a species that could not be made stays in the release."""

    def said(self, finding: Finding) -> None:
        """Something about the store or the references."""
