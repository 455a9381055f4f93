"""The options that say how an enthalpy of formation is reached, and the outputs they name.  No heavy import here."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any, TypeVar

import click

from heatwright.cli.reporter import Reporter
from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.formation.atomization import Atoms
    from heatwright.formation.choices import EnergyChoices
    from heatwright.formation.formation import GivenEnthalpy
    from heatwright.formation.reference_set import ReferenceSet
    from heatwright.formation.species_references import SpeciesReference
    from heatwright.molecule import Molecule
    from heatwright.partition.choices import ModelOptions

F = TypeVar("F", bound=Callable[..., Any])

_REFERENCE_OPTIONS = (
    click.option(
        "--atoms",
        "atoms_folder",
        type=click.Path(),
        metavar="DIR",
        help="Folder of atom outputs at the same level: ΔfH° by atomization.",
    ),
    click.option(
        "--references",
        "references_folder",
        type=click.Path(),
        metavar="DIR",
        help="Folder of outputs of reference species at the same level, with or without the atoms.",
    ),
    click.option(
        "--reference-table",
        type=click.Path(),
        metavar="FILE",
        help="CSV of your own reference enthalpies; they come before the built-in ones (see `heatwright references`).",
    ),
    click.option("--trust-levels", is_flag=True, help="Combine energies of different levels or programs; recorded."),
    click.option(
        "--zero-kelvin",
        type=click.Path(),
        metavar="FILE",
        help="CSV of final 0 K energies of a composite scheme (file, energy0_hartree, level, source).",
    ),
    click.option("--spin-orbit", is_flag=True, help="Take computed atoms down to their lowest spin-orbit levels."),
    click.option(
        "--corrections",
        type=click.Path(),
        metavar="FILE",
        help="CSV of your corrections for atoms and bonds (kind, label, value, unit, source).",
    ),
    click.option(
        "--electron",
        type=click.Choice(["thermal", "stationary"]),
        default="thermal",
        show_default=True,
        help="Convention for the electron of an ion at 298.15 K.",
    ),
)


def reference_options(command: F) -> F:
    """The options that name atoms and reference species."""
    for option in reversed(_REFERENCE_OPTIONS):
        command = option(command)
    return command


_ROUTE_OPTIONS = (
    click.option(
        "--dHf298",
        "enthalpies",
        multiple=True,
        metavar="TEXT",
        help='ΔfH°(298.15 K) with its unit, "-200.7 kJ/mol" or "-200.7 +/- 0.2 kJ/mol"; once for each output.',
    ),
    click.option("--source", "sources", multiple=True, metavar="TEXT", help="Where --dHf298 is from."),
    click.option(
        "--route",
        type=click.Choice(["given", "atomization", "reaction", "network", "best"]),
        help="Which way to ΔfH°; best is that of smallest stated uncertainty.  [default: by what is there]",
    ),
    click.option(
        "--reaction",
        "reactions",
        multiple=True,
        metavar="TEXT",
        help='Balanced reaction of --route reaction, "CH3OCH3 + H2O -> 2 CH3OH"; once for each output. Without it one '
        "is looked for.",
    ),
)


def route_options(command: F) -> F:
    """The options that choose among the routes."""
    for option in reversed(_ROUTE_OPTIONS):
        command = option(command)
    return reference_options(command)


def given_enthalpies(
    outputs: tuple[str, ...], options: dict[str, Any]
) -> list[tuple[GivenEnthalpy, str | None] | None]:
    """The enthalpy of formation stated for each output with its source, None for each when none is to be used."""
    from heatwright.formation.formation import parse_enthalpy

    enthalpies, sources, route = options["enthalpies"], options["sources"], options["route"]
    others = options["atoms_folder"] or options["references_folder"]
    if route == "atomization" and not others:
        raise UsageError("--route atomization needs the atoms' outputs: name their folder by --atoms")
    if route in ("reaction", "network", "best") and not options["references_folder"]:
        raise UsageError(f"--route {route} needs outputs of reference species: name their folder by --references")
    if route != "given" and not enthalpies:
        return [None] * len(outputs)
    if route is None and others:
        raise UsageError(
            f"--dHf298 and {'--atoms' if options['atoms_folder'] else '--references'} are two ways to one value; "
            "choose by --route"
        )
    if len(enthalpies) != len(outputs):
        raise UsageError(
            f"--dHf298 was given {len(enthalpies)} times for {len(outputs)} outputs; give it once for each output"
        )
    if len(sources) not in (0, 1, len(outputs)):
        raise UsageError(f"--source was given {len(sources)} times for {len(outputs)} outputs")
    each = sources * len(outputs) if len(sources) == 1 else sources or (None,) * len(outputs)
    return [(parse_enthalpy(text), source) for text, source in zip(enthalpies, each, strict=True)]


def written_reactions(outputs: tuple[str, ...], options: dict[str, Any]) -> list[str | None]:
    """The reaction written for each output, None where one is to be looked for."""
    from heatwright.formation.equations import parse_reaction

    reactions: tuple[str, ...] = options["reactions"]
    if not reactions:
        return [None] * len(outputs)
    if options["route"] not in (None, "reaction", "best") or (options["enthalpies"] and options["route"] is None):
        raise UsageError("--reaction is for --route reaction or best")
    if not options["references_folder"]:
        raise UsageError("--reaction needs outputs of its reference species: name their folder by --references")
    if len(reactions) != len(outputs):
        raise UsageError(
            f"--reaction was given {len(reactions)} times for {len(outputs)} outputs; give it once for each output"
        )
    for text in reactions:
        parse_reaction(text)
    return list(reactions)


def read_atoms(options: dict[str, Any], reporter: Reporter) -> Atoms | None:
    """The atoms of --atoms, else None."""
    from heatwright.formation.atomization import collect_atoms

    folder = options["atoms_folder"]
    if folder is None:
        return None
    return collect_atoms(tuple(_molecules(folder, "--atoms", reporter)))


def own_references(options: dict[str, Any]) -> tuple[SpeciesReference, ...]:
    """The reference enthalpies of --reference-table."""
    from heatwright.formation.species_references import read_references as read_table

    return () if options["reference_table"] is None else read_table(options["reference_table"])


def energy_choices(options: dict[str, Any], own: tuple[SpeciesReference, ...]) -> EnergyChoices:
    """What the options decide about energies and reference values."""
    from heatwright.project.conversion import energy_choices as of_choice
    from heatwright.project.manifest_types import FormationChoice, ProjectPath, ReferenceFolders

    corrections, stated = (
        None if options[name] is None else ProjectPath(options[name], options[name])
        for name in ("corrections", "zero_kelvin")
    )
    choice = FormationChoice(
        trust_levels=options["trust_levels"],
        spin_orbit=options["spin_orbit"],
        electron=options["electron"],
        folders=ReferenceFolders(corrections=corrections, zero_kelvin=stated),
    )
    return of_choice(choice, own, tuple(options["accept"]))


def read_references(
    options: dict[str, Any],
    own: tuple[SpeciesReference, ...],
    atoms: Atoms | None,
    model: ModelOptions,
    reporter: Reporter,
) -> ReferenceSet | None:
    """The reference species of --references with the atoms of --atoms, else those that lie beside them; or None."""
    from heatwright.formation.atomization import collect_atoms
    from heatwright.formation.reference_set import collect_references
    from heatwright.formation.species_references import merged_references

    folder = options["references_folder"]
    if folder is None:
        return None
    table, said = merged_references(own)
    usable = usable_outputs(folder, "--references", reporter)
    reporter.findings(options["reference_table"] or "", said)
    references = collect_references(usable, collect_atoms(tuple(usable)) if atoms is None else atoms, table, model)
    for finding in references.findings:
        reporter.detail(str(finding))
    return references


def usable_outputs(folder: str, option: str, reporter: Reporter) -> list[Molecule]:
    """The outputs of minima and atoms in a folder; others are named in a warning."""
    from heatwright.findings import refusals, warn
    from heatwright.reading.soundness import no_thermochemistry

    usable = []
    for molecule in _molecules(folder, option, reporter):
        wrong = refusals(molecule.findings) or (() if molecule.is_atom else refusals(no_thermochemistry(molecule)))
        if wrong:
            reporter.say(
                str(warn(wrong[0].code, f"passed over as a reference: {wrong[0].found}").at(molecule.source.file))
            )
        else:
            usable.append(molecule)
    return usable


def _molecules(folder: str, option: str, reporter: Reporter) -> list[Molecule]:
    """The outputs in a folder; files that are something else are passed over (``-v`` names them)."""
    from pathlib import Path

    from heatwright.findings import Refused, refuse
    from heatwright.reading.outputs import read_output

    if not Path(folder).is_dir():
        action = f"Name the folder of the outputs by {option}."
        raise Refused([refuse("file-missing", "there is no such folder", where=folder, action=action)])
    molecules = []
    for file in sorted(p for p in Path(folder).iterdir() if p.is_file() and not p.name.startswith(".")):
        try:
            molecules.append(read_output(str(file)))
        except Refused as error:
            reporter.detail(f"passed over: {error.findings[0].at(str(file)).text}")
    return molecules
