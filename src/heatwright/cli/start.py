"""``heatwright start``: a first manifest from a folder of outputs, or the schema that editors check manifests by."""

from __future__ import annotations

import sys
from typing import TYPE_CHECKING

import click

from heatwright.cli.options import words_options
from heatwright.cli.reporter import Reporter

if TYPE_CHECKING:
    from heatwright.project.start import FirstManifest


def _print_schema(ctx: click.Context, _: click.Parameter, wanted: bool) -> None:
    if not wanted or ctx.resilient_parsing:
        return
    import json

    from heatwright.project.schema import manifest_schema

    click.echo(json.dumps(manifest_schema(), indent=2, ensure_ascii=False))
    ctx.exit()


@click.command(short_help="Writes a first manifest, heatwright.toml, from a folder of outputs.")
@click.argument("folder", metavar="DIR", type=click.Path())
@click.option(
    "-o", "--output", "target", type=click.Path(), metavar="FILE", help="Write here.  [default: DIR/heatwright.toml]"
)
@click.option("--force", is_flag=True, help="Replace FILE when it exists.")
@click.option(
    "--schema",
    is_flag=True,
    is_eager=True,
    expose_value=False,
    callback=_print_schema,
    help="Print the JSON Schema of a manifest, for editors, and do nothing else.",
)
@words_options
@click.pass_context
def start(ctx: click.Context, /, folder: str, target: str | None, force: bool, quiet: bool, verbose: bool) -> None:
    """Read every output below DIR, group the files by molecule (frequency job, single point at the same geometry, scans
    of torsions, conformers, atoms, references) and write a manifest for them.  What was guessed stands in it as
    comments; what cannot be made is commented out with the reason.

    \b
    Examples:
      heatwright start runs
      heatwright start --schema > heatwright.schema.json
    """
    import os

    from heatwright.project.inventory import files_in
    from heatwright.project.manifest import MANIFEST_NAME
    from heatwright.project.start import first_manifest
    from heatwright.writing.render import check_target, write_text

    reporter = Reporter(quiet=quiet, verbose=verbose)
    file = os.path.join(folder, MANIFEST_NAME) if target is None else target
    if os.path.isdir(folder):
        check_target(file, force)
    hidden = quiet or not sys.stderr.isatty()
    count = len(files_in(folder)) if os.path.isdir(folder) else 0
    with click.progressbar(length=count, label="reading", file=sys.stderr, hidden=hidden, show_pos=True) as bar:
        beside = None if target is None else os.path.dirname(os.path.abspath(target))
        made = first_manifest(folder, beside=beside, seen=lambda _: bar.update(1))
    write_text(file, made.text)
    _say(made, file, reporter)


def _say(made: FirstManifest, file: str, reporter: Reporter) -> None:
    for name, sentence in made.guesses:
        reporter.say(f"{name}: {sentence}.")
    for path, why in made.broken:
        reporter.say(f"left out: {path}: {why}.")
    for path, why in made.unused:
        reporter.say(f"not used: {path}: {why.rstrip('.')}.")
    for path in made.passed_over:
        reporter.detail(f"passed over: {path} is no output.")
    n = made.n_species
    reporter.say(f"{n} species from {made.n_outputs} outputs written to {file}; look over its comments.")
