"""``heatwright crosscheck``: do the enthalpies of formation of a set of species agree with each other?"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.options import units_option, words_options
from heatwright.cli.reporter import Reporter

if TYPE_CHECKING:
    from heatwright.formation.crosscheck import Relation
    from heatwright.formation.entry_set import EntryRow

DISAGREES = 1


@click.command(short_help="Do the enthalpies of formation of a set of entries agree with each other?")
@click.argument("entries", type=click.Path(), metavar="ENTRIES")
@click.option(
    "--outputs",
    "outputs_folder",
    type=click.Path(),
    required=True,
    metavar="DIR",
    help="Folder of outputs of the species at one level, named like the entries, and of the atoms.",
)
@click.option("--zpe-scale", type=float, metavar="X", help="Factor on the zero-point energies.")
@click.option("--all", "show_all", is_flag=True, help="Show the relations that agree as well.")
@click.option("--json", "as_json", is_flag=True, help="As JSON.")
@units_option
@words_options
@click.pass_context
def crosscheck(
    ctx: click.Context, /, entries: str, outputs_folder: str, quiet: bool, verbose: bool, **options: Any
) -> None:
    """Find the reactions that tie the species of ENTRIES together (isomers, one kind of bond broken in two molecules,
    other balanced reactions, each species against all others, one species by two routes) and list those in which the
    enthalpies of formation disagree with the energies of the outputs beyond their joint 95 % uncertainty.

    ENTRIES is what `heatwright entry --format json` wrote, or a CSV with the columns name, dHf298_kJ_mol, u95_kJ_mol
    and source.  Exit code 1 when something disagrees.

    \b
    Example:
      heatwright crosscheck thermo.json --outputs outputs --zpe-scale 0.9806
    """
    from heatwright.findings import Refused

    reporter = Reporter(quiet=quiet, verbose=verbose)
    try:
        rows, found = _relations(entries, outputs_folder, options["zpe_scale"], reporter)
    except Refused as error:
        reporter.fail(entries, error.findings)
        ctx.exit(reporter.exit_code)
    wrong = [r for r in found if r.disagrees]
    shown = found if options["show_all"] else wrong
    if options["as_json"]:
        click.echo(_as_json(shown, found))
    elif shown:
        click.echo(_as_text(shown, options["units"]))
    reporter.say(f"{len(rows)} species, {len(found)} relations, {len(wrong)} disagree.")
    _say_suspects(found, reporter)
    ctx.exit(reporter.exit_code or (DISAGREES if wrong else 0))


def _relations(
    entries: str, folder: str, zpe_scale: float | None, reporter: Reporter
) -> tuple[tuple[EntryRow, ...], tuple[Relation, ...]]:
    from heatwright.cli.formation_options import usable_outputs
    from heatwright.formation.crosscheck import relations, two_routes
    from heatwright.formation.entry_set import entry_references, read_entry_rows
    from heatwright.formation.usable import errors_at_one_level
    from heatwright.partition.choices import ModelOptions

    rows = read_entry_rows(entries)
    molecules = usable_outputs(folder, "--outputs", reporter)
    references, said = entry_references(rows, molecules, ModelOptions(zpe_scale=zpe_scale))
    reporter.findings(entries, said)
    errors, scales = errors_at_one_level(references)
    found = (*two_routes(rows), *relations(references.references, scales, errors))
    return rows, tuple(sorted(found, key=lambda r: (-r.severity, r.text)))


def _as_text(shown: list[Relation] | tuple[Relation, ...], units_name: str) -> str:
    from heatwright.writing.units import UNITS

    units = UNITS[units_name]
    width = max(len(r.text) for r in shown)
    lines = [
        f"{'relation':{width}}  {'kind':17}  {'entries':>9} {'energies':>9} {'differ':>8} {'95 %':>6}  {units.enthalpy}"
    ]
    for r in shown:
        values = [v * units.factor for v in (r.stated_kJ_mol, r.expected_kJ_mol, r.difference_kJ_mol, r.u95_kJ_mol)]
        mark = "  disagree" if r.disagrees else ""
        lines.append(
            f"{r.text:{width}}  {r.kind:17}  {values[0]:9.1f} {values[1]:9.1f} {values[2]:8.1f} {values[3]:6.1f}{mark}"
        )
    return "\n".join(lines)


def _as_json(shown: list[Relation] | tuple[Relation, ...], found: tuple[Relation, ...]) -> str:
    import json

    from heatwright.formation.crosscheck import suspects
    from heatwright.writing.document import JSON_VERSION
    from heatwright.writing.numbers import significant

    return json.dumps(
        {
            "heatwright": JSON_VERSION,
            "relations": [
                {
                    "kind": r.kind,
                    "relation": r.text,
                    "species": list(r.species),
                    "stated_kJ_mol": significant(r.stated_kJ_mol),
                    "expected_kJ_mol": significant(r.expected_kJ_mol),
                    "difference_kJ_mol": significant(r.difference_kJ_mol),
                    "u95_kJ_mol": significant(r.u95_kJ_mol),
                    "disagrees": r.disagrees,
                }
                for r in shown
            ],
            "suspects": [{"species": n, "disagreements": bad, "relations": total} for n, bad, total in suspects(found)],
        },
        indent=1,
    )


def _say_suspects(found: tuple[Relation, ...], reporter: Reporter) -> None:
    from heatwright.formation.crosscheck import suspects

    for name, bad, total in suspects(found)[:5]:
        reporter.say(f"  {name} is in {bad} of them, of {total} relations that it is in")
