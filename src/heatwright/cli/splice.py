"""``heatwright splice``: entries of a release put into an existing thermo file, every other byte unchanged."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from heatwright.cli.options import units_option, words_options
from heatwright.cli.reporter import Reporter
from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.project.splice import Splice


@click.command(short_help="Put entries into an existing thermo file; every other byte stays.")
@click.argument("release", type=click.Path())
@click.argument("file", type=click.Path())
@click.option("-o", "--output", "target", type=click.Path(), metavar="NEW", help="The file to write.")
@click.option("-n", "--dry-run", is_flag=True, help="Say what would be done, write nothing.")
@click.option("--only", multiple=True, metavar="NAME", help="Only this species. Can be repeated.")
@click.option("--add", is_flag=True, help="Put in species that FILE does not have as well.")
@click.option(
    "--pressure",
    type=click.Choice(["1bar", "1atm"]),
    help="Standard pressure of FILE's entries, where FILE does not say it.",
)
@click.option("--force", is_flag=True, help="Replace NEW when it exists (it may be FILE itself).")
@click.option("--json", "as_json", is_flag=True, help="What was done, for scripts.")
@units_option
@words_options
@click.pass_context
def splice(
    ctx: click.Context,
    /,
    release: str,
    file: str,
    target: str | None,
    dry_run: bool,
    only: tuple[str, ...],
    add: bool,
    pressure: str | None,
    force: bool,
    as_json: bool,
    units: str,
    quiet: bool,
    verbose: bool,
) -> None:
    """Replace entries of FILE by those of RELEASE that have the same names, and write the result to NEW.

    FILE is a thermo file or a mechanism with 80-column records, or Cantera YAML, of which only what stands under
    `thermo:` of a species changes.  RELEASE is a release folder or a thermo file in either format.  Each replaced
    entry is listed with its change.  Entries for different standard pressures are not mixed.

    \b
    Examples:
      heatwright splice release gri30.yaml -o gri30_new.yaml
      heatwright splice release chem.inp --only CH3OH --only CH3 -o chem_new.inp
    """
    from heatwright.constants import ATMOSPHERE_PA, BAR_PA
    from heatwright.project.splice import splice as spliced
    from heatwright.project.thermo_set import read_entry_file, read_thermo_set
    from heatwright.writing.render import check_target, write_bytes

    if target is None and not dry_run:
        raise UsageError("splice needs -o NEW, the file to write, or -n to say only what would be done")
    reporter = Reporter(quiet=quiet, verbose=verbose)
    if target is not None and not dry_run:
        check_target(target, force)
    done = spliced(
        read_thermo_set(release),
        read_entry_file(file),
        only=only,
        add=add,
        pressure_Pa=None if pressure is None else {"1bar": BAR_PA, "1atm": ATMOSPHERE_PA}[pressure],
    )
    if target is not None and not dry_run:
        write_bytes(target, done.data)
    if as_json:
        click.echo(_json_text(done, file, None if dry_run else target))
    _say(reporter, done, units, "to be " if dry_run else "")
    ctx.exit(reporter.exit_code)


def _say(reporter: Reporter, done: Splice, units: str, to_be: str) -> None:
    from heatwright.cli.compare_text import change_lines, listed
    from heatwright.project.differences import COMPARED_K
    from heatwright.writing.units import UNITS

    if done.replaced:
        for line in change_lines(done.replaced, COMPARED_K, UNITS[units]):
            reporter.say(line)
    n = len(done.replaced)
    reporter.say(f"{n} {'entry' if n == 1 else 'entries'} {to_be}replaced.")
    for names, words in (
        (done.same, "the same already"),
        (done.added, f"{to_be}added"),
        (done.left_out, "not in the file and left out (--add puts them in)"),
    ):
        if names:
            reporter.say(f"{len(names)} {words}: {listed(names)}.")
    for finding in done.findings:
        reporter.findings(finding.where, [finding])


def _json_text(done: Splice, file: str, target: str | None) -> str:
    from heatwright.project.change_document import change_document
    from heatwright.project.differences import COMPARED_K
    from heatwright.writing.document import JSON_VERSION
    from heatwright.writing.numbers import json_text

    return json_text(
        {
            "heatwright": JSON_VERSION,
            "file": file,
            "written": target,
            "temperatures_K": list(COMPARED_K),
            "replaced": [change_document(c) for c in done.replaced],
            "same": list(done.same),
            "added": list(done.added),
            "left_out": list(done.left_out),
            "findings": [f.as_json() for f in done.findings],
        }
    )
