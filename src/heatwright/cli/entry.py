"""``heatwright entry``: the main job in one go, outputs to thermo entries."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.formation_options import (
    energy_choices,
    given_enthalpies,
    own_references,
    read_atoms,
    read_references,
    route_options,
    written_reactions,
)
from heatwright.cli.options import (
    fit_options,
    model_options,
    outputs_argument,
    range_options,
    taken_conformers,
    taken_energies,
    taken_model_options,
    taken_reading,
    units_option,
    words_options,
)
from heatwright.cli.reporter import Reporter
from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.entry import Entry, FitOptions
    from heatwright.findings import Finding
    from heatwright.formation.atomization import Atoms
    from heatwright.formation.choices import EnergyChoices
    from heatwright.formation.formation import GivenEnthalpy
    from heatwright.formation.reference_set import ReferenceSet
    from heatwright.formation.routes import Route
    from heatwright.partition.choices import ModelOptions
    from heatwright.species import Reading


@dataclass(frozen=True, slots=True)
class Request:
    """What was asked for, once for all outputs of a run."""

    reading: Reading
    model: ModelOptions
    fit: FitOptions
    atoms: Atoms | None
    references: ReferenceSet | None
    route: Route | None
    choices: EnergyChoices


@click.command(short_help="Outputs to thermo entries; residuals on standard error.")
@outputs_argument
@click.option("--name", "names", multiple=True, metavar="NAME", help="Species name; once for each output.")
@route_options
@click.option(
    "--format",
    "format_name",
    type=click.Choice(["nasa7", "yaml", "json", "csv"]),
    default="nasa7",
    show_default=True,
    help="80-column record, Cantera YAML, everything as JSON, or the table as CSV.",
)
@click.option("--json", "as_json", is_flag=True, help="The same as --format json.")
@click.option("--template", type=click.Path(), metavar="FILE", help="Your own jinja2 template instead of a format.")
@click.option("-o", "--output", "target", type=click.Path(), metavar="FILE", help="Write here, whole or not at all.")
@click.option("--force", is_flag=True, help="Replace FILE when it exists.")
@range_options
@units_option
@model_options
@words_options
@click.pass_context
def entry(ctx: click.Context, /, outputs: tuple[str, ...], quiet: bool, verbose: bool, **options: Any) -> None:
    """Make the thermo entry of each OUTPUT: partition function, table, constrained fit, exact text, residuals.

    Several outputs are several species in one file.  The enthalpy of formation is given by --dHf298, or reached
    through the atoms in --atoms.

    \b
    Examples:
      heatwright entry CH3OH.out --dHf298 "-200.7 kJ/mol" --source "ATcT 1.112"
      heatwright entry *.out --atoms atoms --format yaml -o thermo.yaml
    """
    from heatwright.writing.render import check_target

    reporter = Reporter(quiet=quiet, verbose=verbose)
    style = _Style("json" if options["as_json"] else options["format_name"], options["template"])
    jobs = entry_jobs(outputs, options)
    if options["target"] is not None:
        check_target(options["target"], options["force"])
    request = entry_request(options, reporter)
    entries = _without_twins(_made(jobs, request, style, reporter), reporter)
    for path, made in entries:
        _describe(path, made, options["units"], reporter)
    if entries or style.is_json:
        _deliver(style.render([made for _, made in entries], reporter), options["target"], len(entries), reporter)
    reporter.tally(len(entries), "made")
    ctx.exit(reporter.exit_code)


@dataclass(frozen=True, slots=True)
class Job:
    """One output to make an entry of: it and its conformers, each with the file of its energy; what was said of it."""

    path: str
    files: tuple[tuple[str, str | None], ...]
    name: str | None
    given: tuple[GivenEnthalpy, str | None] | None
    reaction: str | None


def entry_jobs(outputs: tuple[str, ...], options: dict[str, Any]) -> list[Job]:
    """What to make of each output; raises UsageError where options and outputs do not go together."""
    names = options["names"]
    if names and len(names) != len(outputs):
        raise UsageError(
            f"--name was given {len(names)} times for {len(outputs)} outputs; give it once for each output"
        )
    given, reactions = given_enthalpies(outputs, options), written_reactions(outputs, options)
    conformers = taken_conformers(options, len(outputs))
    energies = taken_energies(options, len(outputs) + len(conformers))
    further = tuple(zip(conformers, energies[len(outputs) :], strict=True))
    return [
        Job(path, ((path, energies[i]), *further), names[i] if names else None, given[i], reactions[i])
        for i, path in enumerate(outputs)
    ]


def _made(jobs: list[Job], request: Request, style: _Style, reporter: Reporter) -> list[tuple[str, Entry]]:
    """The entries that could be made and written; the others are reported as failed."""
    from heatwright.findings import Refused

    entries = []
    for job in jobs:
        try:
            made = made_entry(job, request)
            style.check_name(made.name)
            style.render([made], reporter)  # a value that does not fit its field fails here, alone
        except Refused as error:
            reporter.fail(job.path, error.findings)
        else:
            entries.append((job.path, made))
    return entries


def _without_twins(entries: list[tuple[str, Entry]], reporter: Reporter) -> list[tuple[str, Entry]]:
    """The entries whose name is theirs alone; the others are reported as failed."""
    from heatwright.writing.names import duplicate_names

    twins = duplicate_names([made.name for _, made in entries])
    for path, made in entries:
        if made.name in twins:
            reporter.fail(path, [twins[made.name]])
    return [(path, made) for path, made in entries if made.name not in twins]


def _deliver(text: str, target: str | None, count: int, reporter: Reporter) -> None:
    from heatwright.writing.render import write_text

    if target is None:
        click.echo(text, nl=False)
        return
    write_text(target, text)
    reporter.say(f"{count} {'entry' if count == 1 else 'entries'} written to {target}.")


@dataclass(frozen=True, slots=True)
class _Style:
    """How entries become text: one of the formats, or the user's template."""

    format_name: str
    template: str | None

    @property
    def is_json(self) -> bool:
        return self.template is None and self.format_name == "json"

    def check_name(self, name: str) -> None:
        from heatwright.findings import Refused
        from heatwright.writing.formats import FORMATS

        faults = FORMATS["json" if self.template else self.format_name].name_findings(name)
        if faults:
            raise Refused(faults)

    def render(self, entries: list[Entry], reporter: Reporter) -> str:
        from heatwright.writing.context import entries_context
        from heatwright.writing.formats import FORMATS
        from heatwright.writing.render import render_format, render_user_template

        context = entries_context(entries, reporter.failed)
        if self.template is not None:
            return render_user_template(self.template, context)
        return render_format(FORMATS[self.format_name].template, context)


def entry_request(options: dict[str, Any], reporter: Reporter) -> Request:
    """The choices that hold for all outputs, with the atoms and references they name."""
    fit = fit_options(options["range_text"], options["common"])
    _check_range(fit)
    own = own_references(options)
    choices = energy_choices(options, own)
    reading, model = taken_reading(options), taken_model_options(options)
    atoms, references = None, None
    if options["route"] != "given":
        atoms = read_atoms(options, reporter)
        references = read_references(options, own, atoms, model, reporter)
    return Request(reading, model, fit, atoms, references, options["route"], choices)


def _check_range(fit: FitOptions) -> None:
    """Raises Refused before anything is read when no polynomial can have these temperatures."""
    from heatwright.polynomial.fit import check_temperatures

    check_temperatures(fit.t_low_K, fit.t_common_K, fit.t_high_K)


def made_entry(job: Job, request: Request) -> Entry:
    """The entry of one output; raises Refused."""
    from dataclasses import replace

    from heatwright.entry import make_entry
    from heatwright.formation.routes import RouteRequest, formation_of
    from heatwright.species import usable_species
    from heatwright.writing.names import default_name

    model = usable_species(
        job.files, request.reading, request.model, trust_levels=request.choices.trust_levels, for_entry=True
    )
    said: tuple[Finding, ...] = ()
    name = job.name
    if name is None:
        name, said = default_name(model.named_after or model.molecule, model.composition)
    asked = RouteRequest(
        route=request.route,
        name=name,
        given=job.given,
        atoms=request.atoms,
        references=request.references,
        reaction=job.reaction,
        choices=request.choices,
    )
    made = make_entry(name, model, formation_of(model, asked), request.fit)
    return replace(made, findings=(*made.findings, *said))


def _describe(path: str, made: Entry, units_name: str, reporter: Reporter) -> None:
    """The words about one finished entry."""
    from heatwright.writing.comment import formation_text, ledger_text, residual_text
    from heatwright.writing.units import UNITS

    p, units = made.polynomial, UNITS[units_name]
    reporter.say(f"{made.name} from {path}: {formation_text(made.formation, units)}")
    reporter.say(f"  fitted {p.t_low_K:g}-{p.t_common_K:g}-{p.t_high_K:g} K; {residual_text(made)}")
    for text in ledger_text(made.formation, units):
        reporter.detail(f"  {text}")
    for other in made.formation.alternatives:
        reporter.detail(f"  beside it: {formation_text(other, units)}")
    for shift in made.model.motion.shifts:
        reporter.detail(f"  {shift.text}")
    reporter.findings(path, made.findings)
