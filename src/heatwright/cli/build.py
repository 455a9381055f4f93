"""``heatwright build``: a mechanism's thermo as a build."""

from __future__ import annotations

import os
import sys
import time
from collections.abc import Iterable, Sequence
from shutil import get_terminal_size
from typing import TYPE_CHECKING

import click

from heatwright.cli.options import words_options
from heatwright.cli.reporter import Reporter
from heatwright.errors import UsageError
from heatwright.project.watch import Watch

if TYPE_CHECKING:
    from heatwright.findings import Finding
    from heatwright.project.build import Outcome
    from heatwright.project.manifest_types import Manifest
    from heatwright.project.plan import Decision, Plan
    from heatwright.project.record import Record


@click.command(short_help="Make every entry of a mechanism that is stale; says why.")
@click.argument("manifest", default="heatwright.toml", type=click.Path())
@click.option("-n", "--dry-run", is_flag=True, help="Say what would be made and why; make nothing.")
@click.option("-j", "--jobs", type=click.IntRange(min=1), default=1, show_default=True, help="Read in N processes.")
@click.option("--scheduler", metavar="ADDRESS|FILE", help="Read by the workers of a running dask scheduler.")
@click.option(
    "--keep-previous", is_flag=True, help="A species that cannot be made keeps its earlier entry, with a remark in it."
)
@click.option("--confine", is_flag=True, help="Refuse paths that lead out of the manifest's folder.")
@words_options
@click.pass_context
def build(
    ctx: click.Context,
    /,
    manifest: str,
    dry_run: bool,
    jobs: int,
    scheduler: str | None,
    keep_previous: bool,
    confine: bool,
    quiet: bool,
    verbose: bool,
) -> None:
    """Make the release of a mechanism: every entry whose outputs, options or references changed, and only those.

    MANIFEST is a heatwright.toml or the folder that holds one.  The release is a folder with thermo.dat, thermo.yaml
    and thermo.lock.toml, which says how each entry was made.  It is replaced as a whole; whenever a build is
    interrupted the release is the old one, and the next build goes on from what was finished.

    \b
    Examples:
      heatwright build -n
      heatwright build pilot/heatwright.toml -j 4
    """
    from heatwright.findings import Refused, refuse
    from heatwright.project import build as work
    from heatwright.project.executors import engine_for
    from heatwright.project.manifest import load_manifest

    if scheduler is not None and jobs != 1:
        raise UsageError("-j is for processes of this machine; leave it out with --scheduler")
    reporter = Reporter(quiet=quiet, verbose=verbose)
    loaded = load_manifest(manifest, confine=confine)
    if not loaded.species:
        action = 'Write a table [species.NAME] with output = "FILE", or [[outputs]] with a glob.'
        raise Refused([refuse("manifest-wrong", "the manifest names no species", where=manifest, action=action)])
    watch = Words(loaded, reporter)
    if dry_run:
        _show(work.dry_run(loaded, watch))
        ctx.exit(reporter.exit_code)
    engine = engine_for(jobs, scheduler)
    try:
        outcome = work.build(loaded, watch, engine=engine, keep_previous=keep_previous)
    finally:
        engine.close()
    if watch.speaks_of_options:
        reporter.say(OPTIONS)
    _sum_up(loaded, outcome, reporter)
    ctx.exit(reporter.exit_code)


NOTHING = "Nothing to do."
OPTIONS = (
    "An option in these words, such as --charge, is the key of that name in the manifest "
    "(torsions, conformers and isotopes for --torsion, --conformer and --isotope)."
)
_MOST_LINES = 40
"""Species named one by one before a build; with more, those with the same reason share a line (-n and -v name all)."""


def _show(plan: Plan) -> None:
    """The plan on standard output: one line a species that has to be made, and the tally."""
    for line in _plan_lines(plan):
        click.echo(line)


def _plan_lines(plan: Plan, most: int | None = None) -> list[str]:
    """A line for each species that has to be made, or, for more than *most*, one for each reason; and the tally."""
    if plan.is_done:
        return [NOTHING]
    gone = [f"{name}: no longer in the manifest" for name in plan.removed]
    each = [decision.text for decision in plan.stale]
    return [*(each if most is None or len(each) <= most else _by_reason(plan)), *gone, plan.tally]


def _by_reason(plan: Plan) -> list[str]:
    names: dict[str, list[str]] = {}
    for decision in plan.stale:
        names.setdefault(decision.text.partition(": ")[2], []).append(decision.name)
    return [
        f"{', '.join(some[:4])}{f' and {len(some) - 4} more' if len(some) > 4 else ''}: {why}"
        for why, some in names.items()
    ]


def _sum_up(manifest: Manifest, outcome: Outcome, reporter: Reporter) -> None:
    """The closing line."""
    if outcome.plan.is_done:
        reporter.say(NOTHING)
        return
    words = [f"{len(outcome.made)} made"]
    if outcome.failed:
        words.append(f"{len(outcome.failed)} failed ({', '.join(outcome.failed)})")
    if outcome.kept:
        words.append(f"{len(outcome.kept)} kept as before ({', '.join(outcome.kept)})")
    release = manifest.mechanism.release
    end = "no release was written"
    if outcome.written:
        end = f"release written to {release.shown}"
    elif os.path.isdir(release.path):
        end = f"the release in {release.shown} stays as it was"
    reporter.say(f"{', '.join(words)}; {end}.")


class Words(Watch):
    """Says on standard error what a build tells, and shows a bar on a terminal while outputs are read."""

    def __init__(self, manifest: Manifest, reporter: Reporter) -> None:
        from heatwright.writing.units import UNITS

        self._reporter = reporter
        self._units = UNITS[manifest.mechanism.units]
        self._bar = _Bar(manifest.root, reporter.quiet)
        self.speaks_of_options = False

    def waiting(self) -> None:
        """Another build of the same release is at work."""
        self._reporter.say("Another build of this release is at work; waiting for it.")

    def planned(self, plan: Plan) -> None:
        """Each species that will be made with the reasons, and the tally."""
        if not plan.is_done:
            for line in _plan_lines(plan, None if self._reporter.verbose else _MOST_LINES):
                self._reporter.say(line)

    def reading(self, done: int, total: int, path: str) -> None:
        """The bar."""
        self._bar.show(done, total, path)

    def made(self, decision: Decision, record: Record) -> None:
        """The value of a finished entry, and what has to be looked at."""
        self._bar.clear()
        f, units = record.locked.formation, self._units
        value = f"{f.dHf298_kJ_mol * units.factor:.2f} {units.enthalpy}, {f.route}"
        self._reporter.detail(f"{decision.name} made: dHf(298.15 K) = {value}")
        shown = [f for f in record.findings if f.severity == "warn" or self._reporter.verbose]
        self._notice(shown)
        self._reporter.findings(_first_file(decision), shown)

    def failed(self, decision: Decision, findings: Sequence[Finding]) -> None:
        """Why a species could not be made."""
        self._bar.clear()
        self._notice(findings)
        self._reporter.fail(_first_file(decision), findings)

    def kept(self, decision: Decision) -> None:
        """That its earlier entry stays."""
        self._reporter.say(f"{decision.name}: the earlier entry stays, with a remark.")

    def said(self, finding: Finding) -> None:
        """A finding about the store or the references."""
        self._reporter.findings(finding.where, [finding])

    def _notice(self, findings: Iterable[Finding]) -> None:
        self.speaks_of_options = self.speaks_of_options or any(" --" in finding.text for finding in findings)


def _first_file(decision: Decision) -> str:
    return decision.files[0].path


class _Bar:
    """A progress bar on a terminal, with the rate and the file just read; nothing anywhere else."""

    def __init__(self, root: str, quiet: bool) -> None:
        self._root = root
        self._stream = sys.stderr
        self._hidden = quiet or not self._stream.isatty()
        self._began = 0.0
        self._open = False

    def show(self, done: int, total: int, path: str) -> None:
        """So many of so many are done."""
        if self._hidden:
            return
        if not done:
            self._began = time.monotonic()
        seconds = max(time.monotonic() - self._began, 1e-3)
        filled = 24 * done // total
        name = os.path.relpath(path, self._root) if path else ""
        rate = f"{done / seconds:.1f}/s" if done else ""
        line = f"reading [{'#' * filled}{'-' * (24 - filled)}] {done}/{total} {rate} {name}"
        width = get_terminal_size().columns - 1
        self._stream.write(f"\r{line[:width]:<{width}}")
        self._stream.flush()
        self._open = True
        if done == total:
            self.clear()

    def clear(self) -> None:
        """Take the bar away, for words to be written; the next file read draws it again."""
        if self._open:
            self._stream.write(f"\r{'':<{get_terminal_size().columns - 1}}\r")
            self._stream.flush()
            self._open = False
