"""``heatwright report``: one self-contained HTML page with plots."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.reporter import Reporter
from heatwright.cli.showing import given_inputs, inputs_argument, kind_of_input, showing_options, shown_inputs

if TYPE_CHECKING:
    from heatwright.project.thermo_set import ThermoSet
    from heatwright.report.species import Species


@click.command(short_help="One self-contained HTML page with plots, for looking at and for print.")
@inputs_argument
@click.option("-o", "--output", "target", type=click.Path(), metavar="FILE", help="Write here, whole or not at all.")
@click.option("--force", is_flag=True, help="Replace FILE when it exists.")
@click.option("--title", metavar="TEXT", help="Of the page.  [default: the mechanism's, else from the inputs' names]")
@click.option(
    "--compare",
    "old",
    type=click.Path(),
    metavar="OLD",
    help="Show what changed against a release, lock or thermo file.",
)
@showing_options
@click.pass_context
def report(
    ctx: click.Context,
    /,
    inputs: tuple[str, ...],
    target: str | None,
    force: bool,
    title: str | None,
    old: str | None,
    quiet: bool,
    verbose: bool,
    **options: Any,
) -> None:
    """Show each INPUT on one HTML page: outputs (made into entries first, with the options of `entry`), a manifest
    (heatwright.toml, also when no INPUT is named), JSON documents (`entry --format json`), thermo files (80-column
    records, Cantera YAML) and release folders.

    An index of the species; of each its structure, heat capacity with the points of the table, residuals with the best
    that any polynomial can do, contributions, torsions with levels, conformers, the ledger of ΔfH°, provenance and
    findings.  The page needs no network and holds no script; every plot has its numbers beside it.

    \b
    Examples:
      heatwright report sample_outputs/*.out --atoms sample_outputs/atoms --scale published -o report.html
      heatwright report heatwright.toml --compare release.old -o report.html
      heatwright report therm.dat -o therm.html
    """
    from heatwright.report.page import Page, page_html
    from heatwright.writing.render import check_target, write_text

    reporter = Reporter(quiet=quiet, verbose=verbose)
    if target is not None:
        check_target(target, force)
    inputs = given_inputs(inputs)
    before = None if old is None else _before(old)
    shown = shown_inputs(ctx, inputs, options, reporter)
    if shown.species:
        page = Page(
            title=title or shown.title or _title(inputs),
            subtitle=_subtitle(shown.species),
            species=shown.species,
            failed=shown.failed,
            remarks=shown.remarks,
            changes=None if before is None else _changes(before, inputs, shown.species),
        )
        text = page_html(page)
        if target is None:
            click.echo(text, nl=False)
        else:
            write_text(target, text)
            reporter.say(f"{len(shown.species)} species shown in {target}.")
    reporter.tally(len(shown.species), "shown")
    ctx.exit(reporter.exit_code)


def _before(old: str) -> ThermoSet:
    """The older side of a comparison; raises Refused."""
    from heatwright.project.thermo_set import read_thermo_set

    return read_thermo_set(old)


def _changes(before: ThermoSet, inputs: tuple[str, ...], species: tuple[Species, ...]) -> dict[str, Any]:
    """What changed: by the files themselves where the one input is a release or thermo file, else by what is shown."""
    from heatwright.project.thermo_set import read_thermo_set
    from heatwright.report.changes import changes_of, set_of

    if len(inputs) == 1 and kind_of_input(inputs[0]) in ("release", "entries"):
        return changes_of(before, read_thermo_set(inputs[0]))
    return changes_of(before, set_of(species, inputs[0] if len(inputs) == 1 else "this report"))


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
