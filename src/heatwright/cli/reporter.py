"""What a command says on standard error, and the exit code that follows from it."""

from __future__ import annotations

from collections.abc import Iterable

import click

from heatwright.findings import Finding, refusals

SOME_FAILED = 3


class Reporter:
    """Counts what was done and what failed, speaks to standard error, and knows the exit code.

    quiet : only errors are printed.   verbose : details are printed too.
    """

    def __init__(self, *, quiet: bool = False, verbose: bool = False) -> None:
        self.quiet = quiet
        self.verbose = verbose
        self.failed: list[tuple[str, tuple[Finding, ...]]] = []

    def say(self, text: str) -> None:
        """One line for the user, unless ``-q``."""
        if not self.quiet:
            click.echo(text, err=True)

    def detail(self, text: str) -> None:
        """One line that only ``-v`` shows."""
        if self.verbose and not self.quiet:
            click.echo(text, err=True)

    def findings(self, file: str, findings: Iterable[Finding]) -> None:
        """The findings of one input: refusals always, warnings and notes unless ``-q``; none of them twice."""
        for finding in dict.fromkeys(f.at(file) for f in findings):
            if finding.severity == "refuse" or not self.quiet:
                click.echo(str(finding), err=True)

    def fail(self, file: str, findings: Iterable[Finding]) -> None:
        """Records an input as failed and says why; nothing is written for it."""
        found = tuple(findings)
        self.failed.append((file, found))
        self.findings(file, refusals(found) or found)

    def tally(self, done: int, what: str) -> None:
        """The closing line of a run over several inputs."""
        if done + len(self.failed) > 1:
            failed = f", {len(self.failed)} failed ({', '.join(f for f, _ in self.failed)})" if self.failed else ""
            self.say(f"{done} {what}{failed}.")

    @property
    def exit_code(self) -> int:
        """0, or 3 when an input could not be processed."""
        return SOME_FAILED if self.failed else 0
