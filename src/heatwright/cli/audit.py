"""``heatwright audit``: is an existing thermo file sound?"""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING

import click

from heatwright.cli.reporter import Reporter

if TYPE_CHECKING:
    from heatwright.audit.audit import Audit
    from heatwright.reading.entry_file import EntryFile

_CHECK_SAYS_NO = 1
_WORDS = ("error", "warning", "note")


@click.command(short_help="Is an existing thermo file sound? Format, continuity, physics.")
@click.argument("files", nargs=-1, required=True, metavar="FILE...", type=click.Path())
@click.option(
    "--against", type=click.Path(), metavar="RELEASE", help="Compare with computed data: a release's folder, or a file."
)
@click.option("--against-published", is_flag=True, help="Compare H°, S° and Cp° at 298.15 K with published values.")
@click.option(
    "--fail-on",
    type=click.Choice(["none", "note", "warn", "refuse"]),
    default="note",
    show_default=True,
    help="Exit with 1 when a finding is worse than this: `note` fails on warnings and errors, `warn` on errors alone, "
    "`none` on notes too, `refuse` never.",
)
@click.option("--json", "as_json", is_flag=True, help="Every entry with its values and findings, for scripts.")
@click.option("-q", "--quiet", is_flag=True, help="Say only what is an error.")
@click.option("-v", "--verbose", is_flag=True, help="Say every note in full.")
@click.pass_context
def audit(
    ctx: click.Context,
    /,
    files: tuple[str, ...],
    against: str | None,
    against_published: bool,
    fail_on: str,
    as_json: bool,
    quiet: bool,
    verbose: bool,
) -> None:
    """Check the entries of each FILE (fixed 80-column records, also inside a mechanism, or Cantera YAML; a folder is a
    release).

    Exit code 1 when anything is worse than --fail-on, whose level still passes: by default a note passes, a warning or
    an error does not.

    \b
    Examples:
      heatwright audit therm.dat
      heatwright audit gri30.yaml --against-published --fail-on warn
      heatwright audit mechanism.yaml --against release

    Errors, warnings and notes go to standard output with file and line; notes are counted unless -v is given.
    `heatwright explain CODE` says what a finding means, `heatwright mend` refits entries that jump.
    """
    from heatwright.audit.release import read_release
    from heatwright.findings import SEVERITY_WORD

    reporter = Reporter(quiet=quiet, verbose=verbose)
    release = None if against is None else read_release(against)
    audits = [a for a in (_one(path, release, against_published, reporter) for path in files) if a is not None]
    _show(audits, reporter, as_json)
    worse = Counter(SEVERITY_WORD[f.severity] for a in audits for f in a.worse_than(fail_on))  # type: ignore[arg-type]
    if worse:
        each = [f"{worse[word]} {word}{'s' if worse[word] > 1 else ''}" for word in _WORDS if worse[word]]
        reporter.say(f"Worse than --fail-on {fail_on}: {' and '.join(each)}.")
    ctx.exit(reporter.exit_code or (_CHECK_SAYS_NO if worse else 0))


def _one(path: str, release: EntryFile | None, published: bool, reporter: Reporter) -> Audit | None:
    from heatwright.audit.audit import audit_entries
    from heatwright.audit.release import read_release
    from heatwright.findings import Refused

    try:
        return audit_entries(read_release(path), against=release, published=published)
    except Refused as error:
        reporter.fail(path, error.findings)
        return None


def _show(audits: list[Audit], reporter: Reporter, as_json: bool) -> None:
    from heatwright.audit.report import audit_document, audit_lines
    from heatwright.writing.document import JSON_VERSION, failure_document
    from heatwright.writing.numbers import json_text

    if as_json:
        failed = [failure_document(file, findings) for file, findings in reporter.failed]
        documents = [audit_document(a) for a in audits]
        click.echo(json_text({"heatwright": JSON_VERSION, "audits": documents, "failed": failed}))
        return
    level = "refuse" if reporter.quiet else "note" if reporter.verbose else "warn"
    for audit in audits:
        for line in audit_lines(audit, level):  # type: ignore[arg-type]
            click.echo(line)
