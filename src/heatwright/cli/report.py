"""``heatwright report``: one self-contained HTML page with plots."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.reporter import Reporter
from heatwright.cli.showing import inputs_argument, showing_options, shown_inputs

if TYPE_CHECKING:
    from heatwright.report.species import Species


@click.command(short_help="One self-contained HTML page with plots, for looking at and for print.")
@inputs_argument
@click.option("-o", "--output", "target", type=click.Path(), metavar="FILE", help="Write here, whole or not at all.")
@click.option("--force", is_flag=True, help="Replace FILE when it exists.")
@click.option("--title", metavar="TEXT", help="Of the page.  [default: from the inputs' names]")
@showing_options
@click.pass_context
def report(
    ctx: click.Context,
    /,
    inputs: tuple[str, ...],
    target: str | None,
    force: bool,
    title: str | None,
    quiet: bool,
    verbose: bool,
    **options: Any,
) -> None:
    """Show each INPUT on one HTML page: outputs (made into entries first, with the options of `entry`), JSON documents
    (`entry --format json`), thermo files (80-column records, Cantera YAML) and release folders.

    An index of the species; of each its structure, heat capacity with the points of the table, residuals with the best
    that any polynomial can do, contributions, torsions with levels, conformers, the ledger of ΔfH°, provenance and
    findings.  The page needs no network and holds no script; every plot has its numbers beside it.

    \b
    Examples:
      heatwright report sample_outputs/*.out --atoms sample_outputs/atoms --scale published -o report.html
      heatwright report therm.dat -o therm.html
    """
    from heatwright.report.page import Page, page_html
    from heatwright.writing.render import check_target, write_text

    reporter = Reporter(quiet=quiet, verbose=verbose)
    if target is not None:
        check_target(target, force)
    shown = shown_inputs(ctx, inputs, options, reporter)
    if shown.species:
        page = Page(
            title=title or _title(inputs),
            subtitle=_subtitle(shown.species),
            species=shown.species,
            failed=shown.failed,
        )
        text = page_html(page)
        if target is None:
            click.echo(text, nl=False)
        else:
            write_text(target, text)
            reporter.say(f"{len(shown.species)} species shown in {target}.")
    reporter.tally(len(shown.species), "shown")
    ctx.exit(reporter.exit_code)


def _title(inputs: tuple[str, ...]) -> str:
    from pathlib import PurePath

    if len(inputs) == 1:
        return PurePath(inputs[0]).name
    folders = {str(PurePath(path).parent) for path in inputs}
    name = PurePath(next(iter(folders))).name if len(folders) == 1 else ""
    return f"Thermochemistry of {name}" if name else "Thermochemistry"


def _subtitle(species: tuple[Species, ...]) -> str:
    """How many species, their levels and pressures where they are few."""
    words = [f"{len(species)} species"]
    for values in (
        dict.fromkeys(s.source for s in species if dict(s.facts).get("level")),
        dict.fromkeys(f"{s.pressure_bar:g} bar" for s in species if s.pressure_bar is not None),
    ):
        if len(values) in (1, 2):
            words.append(" and ".join(values))
    return "; ".join(words)
