"""``heatwright samples``: the sample outputs, written to a folder."""

from __future__ import annotations

import click


@click.command(short_help="Write the shipped sample outputs to a folder.")
@click.argument("directory", metavar="DIR", type=click.Path(file_okay=False))
@click.option("--force", is_flag=True, help="Replace files of the same name.")
def samples(directory: str, force: bool) -> None:
    """Write the shipped sample outputs, with their README, to the folder DIR (made when missing).

    \b
    Example:
      heatwright samples pilot_burner
    """
    from pathlib import Path

    from heatwright.findings import Refused, refuse
    from heatwright.resources import sample_files

    target = Path(directory)
    files = sample_files()
    present = [name for name in files if (target / name).exists()]
    if present and not force:
        raise Refused(
            [
                refuse(
                    "target-exists",
                    f"{len(present)} of the sample files exist already, such as {present[0]}",
                    where=directory,
                    action="Choose another folder, or say --force to replace them.",
                )
            ]
        )
    try:
        for name, content in files.items():
            (target / name).parent.mkdir(parents=True, exist_ok=True)
            (target / name).write_bytes(content)
    except OSError as error:
        raise Refused(
            [
                refuse(
                    "target-unwritable",
                    f"the samples cannot be written ({error.strerror or error})",
                    where=directory,
                    action="Choose a folder that may be written to.",
                )
            ]
        ) from error
    click.echo(f"{len(files)} files written to {directory}.", err=True)
