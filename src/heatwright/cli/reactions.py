"""``heatwright reactions``: balanced reactions of a species with the references at its level."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.formation_options import (
    energy_choices,
    own_references,
    read_atoms,
    read_references,
    reference_options,
)
from heatwright.cli.options import reading_of_target, target_options, units_option, words_options
from heatwright.cli.reporter import Reporter
from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.formation.formation import Formation
    from heatwright.formation.reactions import Reaction
    from heatwright.formation.usable import UsableReferences
    from heatwright.partition.model import ThermoModel
    from heatwright.structure.bond_orders import Bonding


@click.command(short_help="Balanced reactions of a species with the references at its level.")
@click.argument("output", type=click.Path(), metavar="OUTPUT")
@reference_options
@click.option("--reaction", "written", metavar="TEXT", help='Judge this reaction instead, "CH3OCH3 + H2O -> 2 CH3OH".')
@click.option("--count", type=click.IntRange(min=1, max=50), default=5, show_default=True, help="So many at most.")
@click.option("--json", "as_json", is_flag=True, help="As JSON.")
@units_option
@target_options
@words_options
@click.pass_context
def reactions(ctx: click.Context, /, output: str, quiet: bool, verbose: bool, **options: Any) -> None:
    """Propose reactions of OUTPUT with the reference species in --references that balance elements, charge, bonds of
    each type and unpaired electrons (isodesmic), and where it can be the surroundings of the atoms too (homodesmotic).

    They are ranked by the uncertainty that the error of the level leaves in them.  The species itself, its conformers
    and its mirror images are left out of the references.

    \b
    Example:
      heatwright reactions CH3OCH3.out --references refs --zpe-scale 0.9806
    """
    from heatwright.findings import Refused

    if options["references_folder"] is None:
        raise UsageError("name the folder of outputs of reference species by --references")
    reporter = Reporter(quiet=quiet, verbose=verbose)
    try:
        text = _proposals(output, options, reporter)
    except Refused as error:
        reporter.fail(output, error.findings)
    else:
        click.echo(text)
    ctx.exit(reporter.exit_code)


def _proposals(output: str, options: dict[str, Any], reporter: Reporter) -> str:
    from heatwright.findings import Refused
    from heatwright.formation.by_reaction import formation_of_reaction, no_reaction, written_reaction
    from heatwright.formation.reactions import find_reactions
    from heatwright.formation.reference_set import species_name
    from heatwright.formation.usable import usable_references
    from heatwright.partition.model import build_model
    from heatwright.species import usable_molecule
    from heatwright.structure.bond_orders import bonding
    from heatwright.writing.comment import ledger_text

    own = own_references(options)
    energies = energy_choices(options, own)
    reading, choices = reading_of_target(options)
    model = build_model(usable_molecule(output, reading), choices)
    references = read_references(options, own, read_atoms(options, reporter), choices, reporter)
    assert references is not None  # --references is there
    usable = usable_references(model, references, energies)
    mine, name = bonding(model.molecule), species_name(model.molecule)
    if options["written"] is not None:
        found: tuple[Reaction, ...] = (
            written_reaction(model, mine, usable, options["written"], name=name, accept=energies.accept),
        )
    else:
        found = find_reactions(model, mine, usable.references, usable.scales, name=name, count=options["count"])
    if not found:
        raise Refused([no_reaction(usable)])
    reporter.findings(output, usable.findings)
    rows = [(reaction, formation_of_reaction(model, reaction, usable, energies)) for reaction in found]
    if options["as_json"]:
        return _as_json(name, model, usable, rows)
    for reaction, formation in rows:
        reporter.detail(reaction.text)
        for text in ledger_text(formation):
            reporter.detail(f"  {text}")
    return _as_text(name, mine, usable, rows, options["units"])


def _as_text(
    name: str, mine: Bonding, usable: UsableReferences, rows: list[tuple[Reaction, Formation]], units_name: str
) -> str:
    from heatwright.writing.units import UNITS

    units = UNITS[units_name]
    bonds = ", ".join(f"{n} {label}" for label, n in mine.types.items()) or "no bonds"
    unpaired = f"; {mine.unpaired} unpaired" if mine.unpaired else ""
    width = max(len(reaction.text) for reaction, _ in rows)
    lines = [
        f"{name}: {bonds}{unpaired}; {len(usable.references)} references",
        f"{'reaction':{width}}  {'kind':12}  dHf(298.15 K) {units.enthalpy}, 95 %",
    ]
    for reaction, formation in rows:
        value = formation.dHf298_kJ_mol * units.factor
        spread = (formation.u95_kJ_mol or 0.0) * units.factor
        lines.append(f"{reaction.text:{width}}  {reaction.kind:12}  {value:9.2f} +/- {spread:.1f}")
    return "\n".join(lines)


def _as_json(name: str, model: ThermoModel, usable: UsableReferences, rows: list[tuple[Reaction, Formation]]) -> str:
    import json

    from heatwright.writing.document import JSON_VERSION
    from heatwright.writing.numbers import significant

    return json.dumps(
        {
            "heatwright": JSON_VERSION,
            "species": name,
            "file": model.molecule.source.file,
            "references": len(usable.references),
            "reactions": [
                {
                    "reaction": reaction.text,
                    "kind": reaction.kind,
                    "target_coefficient": reaction.target_coefficient,
                    "terms": [
                        {"coefficient": n, "name": r.row.name, "file": r.file, "source": r.row.source}
                        for n, r in reaction.terms
                    ],
                    "dHf0_kJ_mol": significant(formation.dHf0_kJ_mol or 0.0),
                    "dHf298_kJ_mol": significant(formation.dHf298_kJ_mol),
                    "u95_kJ_mol": significant(formation.u95_kJ_mol or 0.0),
                }
                for reaction, formation in rows
            ],
            "findings": [f.as_json() for f in usable.findings],
        },
        indent=1,
    )
