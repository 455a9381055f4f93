"""``heatwright table``: the thermodynamic functions of outputs, contribution by contribution."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.options import (
    model_options,
    outputs_argument,
    taken_conformers,
    taken_energies,
    taken_model_options,
    taken_reading,
    temperatures,
    units_option,
    words_options,
)
from heatwright.cli.reporter import Reporter

if TYPE_CHECKING:
    from heatwright.findings import Finding
    from heatwright.partition.model import ThermoModel
    from heatwright.partition.table import ThermoTable

    Tabulated = tuple[str, ThermoModel, ThermoTable]


@click.command(short_help="Cp°, H°, S° and G° on a temperature grid, with each contribution's share.")
@outputs_argument
@click.option(
    "--temperatures",
    "temperatures_text",
    metavar="T,T,...",
    help="Temperatures in K: 298.15,500,1000 or first:last:step.",
)
@click.option("--format", "format_name", type=click.Choice(["text", "csv", "json"]), default="text", show_default=True)
@click.option("--json", "as_json", is_flag=True, help="The same as --format json.")
@units_option
@model_options
@words_options
@click.pass_context
def table(
    ctx: click.Context,
    /,
    outputs: tuple[str, ...],
    temperatures_text: str | None,
    format_name: str,
    as_json: bool,
    units: str,
    quiet: bool,
    verbose: bool,
    **options: Any,
) -> None:
    """Cp°, H°−H°(298.15), S° and −[G°−H°(298.15)]/T of each OUTPUT, with the share of each contribution.

    Several outputs are several species.  No enthalpy of formation is needed.

    \b
    Example:
      heatwright table CH3OH.out --temperatures 298.15,500,1000 --frequency-scale 0.9614
    """
    from heatwright.entry import TABLE_TEMPERATURES_K
    from heatwright.findings import Refused
    from heatwright.partition.table import checked_temperatures
    from heatwright.species import usable_species
    from heatwright.writing.names import default_name

    reporter = Reporter(quiet=quiet, verbose=verbose)
    conformers = taken_conformers(options, len(outputs))
    energies = taken_energies(options, len(outputs) + len(conformers))
    reading, chosen = taken_reading(options), taken_model_options(options)
    grid = checked_temperatures(temperatures(temperatures_text) if temperatures_text else list(TABLE_TEMPERATURES_K))
    done: list[Tabulated] = []
    further = tuple(zip(conformers, energies[len(outputs) :], strict=True))
    for path, energy in zip(outputs, energies, strict=False):
        try:
            model = usable_species(((path, energy), *further), reading, chosen)
        except Refused as error:
            reporter.fail(path, error.findings)
            continue
        name, _ = default_name(model.named_after or model.molecule, model.composition)
        done.append((name, model, model.tabulate(grid)))
        for shift in model.motion.shifts:
            reporter.detail(f"  {shift.text}")
        reporter.findings(path, _findings(*done[-1][1:]))
    click.echo(_text(done, "json" if as_json else format_name, units, reporter), nl=False)
    reporter.tally(len(done), "tabulated")
    ctx.exit(reporter.exit_code)


def _findings(model: ThermoModel, values: ThermoTable) -> tuple[Finding, ...]:
    return (*model.molecule.findings, *model.findings, *(values.uncertainty.findings if values.uncertainty else ()))


def _text(done: list[Tabulated], format_name: str, units: str, reporter: Reporter) -> str:
    """The tables in one of the formats; empty when there is nothing to show."""
    from heatwright.writing.document import failure_document, species_document, whole_document
    from heatwright.writing.render import render_format, table_context
    from heatwright.writing.tables import text_table
    from heatwright.writing.units import UNITS

    if format_name == "text":
        return "\n".join(text_table(name, model, values, UNITS[units]) for name, model, values in done)
    documents = [species_document(name, model, values, _findings(model, values)) for name, model, values in done]
    if format_name == "json":
        failed = [failure_document(file, findings) for file, findings in reporter.failed]
        return render_format("json.j2", {"document": whole_document(documents, failed)})
    return render_format("csv.j2", table_context(documents)) if documents else ""
