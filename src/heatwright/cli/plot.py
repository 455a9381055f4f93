"""``heatwright plot``: the figures of the report as files, with their captions."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.reporter import SOME_FAILED, Reporter
from heatwright.cli.showing import given_inputs, inputs_argument, showing_options, shown_inputs

if TYPE_CHECKING:
    from pathlib import Path

    from heatwright.report.drawing import Figure
    from heatwright.report.species import Species

KINDS = ("structure", "cp", "slope", "residuals", "cp-shares", "s-shares", "torsion", "conformers", "formation")
CAPTIONS = "captions.md"


@click.command(short_help="The figures of the report as SVG, PNG or PDF files, with captions.")
@inputs_argument
@click.option("-o", "--output", "folder", required=True, type=click.Path(), metavar="DIR", help="Folder for the files.")
@click.option("--force", is_flag=True, help="Replace files that exist.")
@click.option("--figure", "kinds", multiple=True, type=click.Choice(KINDS), help="Only these; can be repeated.")
@click.option(
    "--format",
    "format_name",
    type=click.Choice(["svg", "png", "pdf"]),
    default="svg",
    show_default=True,
    help="PNG and PDF need matplotlib: pip install 'heatwright[plots]'.",
)
@showing_options
@click.pass_context
def plot(
    ctx: click.Context,
    /,
    inputs: tuple[str, ...],
    folder: str,
    force: bool,
    kinds: tuple[str, ...],
    format_name: str,
    quiet: bool,
    verbose: bool,
    **options: Any,
) -> None:
    """Write the figures of each INPUT (as for `report`) into a folder: SPECIES-FIGURE.svg, and captions.md with their
    captions and sources.

    \b
    Examples:
      heatwright plot CH3OH.out --dHf298 "-200.7 kJ/mol" --source "ATcT 1.112" --figure cp --figure residuals -o figures
      heatwright plot entries.json --format pdf -o figures
    """
    from heatwright.report.figures import kind_of
    from heatwright.report.paper import check_matplotlib

    reporter = Reporter(quiet=quiet, verbose=verbose)
    if format_name != "svg":
        check_matplotlib()
    place = _folder(folder)
    shown = shown_inputs(ctx, given_inputs(inputs), options, reporter)
    named = [
        (f"{name}-{f.key}.{format_name}", f)
        for name, figures in _figures(shown.species)
        for f in figures
        if not kinds or kind_of(f) in kinds
    ]
    if not named and shown.species:
        reporter.say(f"There is no such figure: the inputs have no numbers for {', '.join(kinds)}.")
    elif named:
        _write(place, named, format_name, force)
        reporter.say(f"{len(named)} figure{'s' if len(named) > 1 else ''} and {CAPTIONS} written to {folder}.")
    reporter.tally(len(shown.species), "plotted")
    ctx.exit(reporter.exit_code or (SOME_FAILED if shown.species and not named else 0))


def _folder(folder: str) -> Path:
    """The folder, made when its parent is there; raises Refused."""
    from pathlib import Path

    from heatwright.findings import Refused, refuse

    place = Path(folder)
    try:
        place.mkdir(exist_ok=True)
    except OSError as error:
        found = f"the folder cannot be made ({error.strerror or error})"
        raise Refused([refuse("target-unwritable", found, where=folder, action="Choose another folder.")]) from error
    return place


def _figures(species: tuple[Species, ...]) -> list[tuple[str, tuple[Figure, ...]]]:
    """A name for files, and the figures, of each species."""
    from heatwright.report.figures import figures_of

    names = file_names([s.name for s in species])
    return [(name, figures_of(s)) for name, s in zip(names, species, strict=True)]


def file_names(names: Sequence[str]) -> list[str]:
    """A name for files of each species: letters of any script, digits and ``.+-_()``; none twice, whatever the case.

    >>> file_names(["CH2(S)", "Co", "CO", "e-méthyl", "a/b", "..", "a:b"])
    ['CH2(S)', 'Co', 'CO-2', 'e-méthyl', 'a-b', 'species', 'a-b-2']
    """
    taken: set[str] = set()
    out = []
    for name in names:
        plain = re.sub(r"[^\w.+()-]", "-", name).strip(".-") or "species"
        n = 1
        while (file := plain if n == 1 else f"{plain}-{n}").casefold() in taken:
            n += 1
        taken.add(file.casefold())
        out.append(file)
    return out


def _write(place: Path, named: list[tuple[str, Figure]], format_name: str, force: bool) -> None:
    """All files, or none when one of them must not be replaced."""
    from heatwright.report.paper import paper_bytes
    from heatwright.report.svg import standalone_svg
    from heatwright.writing.render import check_target, write_bytes, write_text

    for file in (*(name for name, _ in named), CAPTIONS):
        check_target(str(place / file), force)
    for name, figure in named:
        if format_name == "svg":
            write_text(str(place / name), standalone_svg(figure))
        else:
            write_bytes(str(place / name), paper_bytes(figure, format_name))
    write_text(str(place / CAPTIONS), _captions(named))


def _captions(named: list[tuple[str, Figure]]) -> str:
    from heatwright.writing.comment import CAUTION

    lines = ["# Captions", ""]
    for name, figure in named:
        source = f" Source: {figure.source}." if figure.source else ""
        lines += [f"- `{name}`: {figure.caption} {figure.description}{source}"]
    return "\n".join([*lines, "", " ".join(CAUTION), ""])
