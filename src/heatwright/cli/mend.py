"""``heatwright mend``: faulty entries of an existing file refitted, every other byte as it was."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

import click

from heatwright.cli.reporter import Reporter

if TYPE_CHECKING:
    from heatwright.audit.mend import MendedFile


@click.command(short_help="Refit faulty entries of an existing file into a new one.")
@click.argument("file", type=click.Path())
@click.option("-o", "--output", "target", required=True, type=click.Path(), metavar="NEW", help="The file to write.")
@click.option(
    "--only",
    multiple=True,
    metavar="NAME",
    help="This entry alone, also when it has only a kink or one range. Can be repeated.",
)
@click.option("--force", is_flag=True, help="Replace NEW when it exists (never FILE).")
@click.option("--json", "as_json", is_flag=True, help="Old and new polynomials for scripts.")
@click.option("-q", "--quiet", is_flag=True, help="Say only what failed.")
@click.pass_context
def mend(
    ctx: click.Context,
    /,
    file: str,
    target: str,
    only: tuple[str, ...],
    force: bool,
    as_json: bool,
    quiet: bool,
) -> None:
    """Refit the entries of FILE whose two ranges do not meet, or of which one is missing, and write all to NEW.

    \b
    Example:
      heatwright mend therm.dat -o mended.dat

    A mended entry is smooth (value and slope of Cp), has its old H° and S° at 298.15 K, and is as close to its old Cp
    as any such polynomial can be. Only the numbers that change are written; FILE itself is never touched. Old and new
    values go to standard output.
    """
    from heatwright.audit.mend import mend_entries
    from heatwright.findings import Refused
    from heatwright.reading.entries import read_entries
    from heatwright.writing.render import check_target, write_bytes

    _check_other(file, target)
    check_target(target, force)
    reporter = Reporter(quiet=quiet)
    try:
        result = mend_entries(read_entries(file), only)
    except Refused as error:
        reporter.fail(file, error.findings)
        ctx.exit(reporter.exit_code)
    write_bytes(target, result.data)
    _show(file, result, reporter, as_json)
    n = len(result.mended)
    reporter.say(f"{n} {'entry' if n == 1 else 'entries'} mended; {target} written.")
    ctx.exit(reporter.exit_code)


def _check_other(file: str, target: str) -> None:
    """Refuses to write over the file that is mended, whatever it is called."""
    from heatwright.errors import UsageError

    if os.path.exists(target) and os.path.exists(file) and os.path.samefile(file, target):
        raise UsageError(f"{target} is the file to be mended, which is never written to; name another one by -o")


def _show(file: str, result: MendedFile, reporter: Reporter, as_json: bool) -> None:
    from heatwright.audit.report import mended_document, mended_lines
    from heatwright.findings import refusals
    from heatwright.writing.document import JSON_VERSION, failure_document
    from heatwright.writing.numbers import json_text

    left = refusals(result.findings)
    for finding in left:
        reporter.fail(file, [finding])
    if as_json:
        failed = [failure_document(file, [f.at(file)]) for f in left]
        entries = [mended_document(m) for m in result.mended]
        click.echo(json_text({"heatwright": JSON_VERSION, "file": file, "mended": entries, "failed": failed}))
    elif not reporter.quiet:
        for m in result.mended:
            for line in mended_lines(m):
                click.echo(line)
