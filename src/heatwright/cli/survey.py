"""``heatwright survey``: one line per output, what it is and whether it can be used."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.reporter import Reporter

if TYPE_CHECKING:
    from heatwright.findings import Finding
    from heatwright.molecule import Molecule


@click.command(short_help="One line per output: what it is, its level, whether it is usable.")
@click.argument("paths", nargs=-1, required=True, metavar="PATH...", type=click.Path())
@click.option("--json", "as_json", is_flag=True, help="The same for scripts.")
@click.option("-q", "--quiet", is_flag=True, help="Say only what failed.")
@click.option("-v", "--verbose", is_flag=True, help="Say every finding in full, and name the files passed over.")
@click.pass_context
def survey(ctx: click.Context, /, paths: tuple[str, ...], as_json: bool, quiet: bool, verbose: bool) -> None:
    """Read each output (in a folder: every file that is one) and say what it is.

    \b
    Examples:
      heatwright survey CH3OH.out
      heatwright survey runs --json
    """
    from heatwright.findings import Refused
    from heatwright.reading.outputs import read_output
    from heatwright.writing.numbers import json_text

    reporter = Reporter(quiet=quiet, verbose=verbose)
    rows: list[dict[str, Any]] = []
    passed_over = 0
    for path, named in _files(paths):
        try:
            molecule = read_output(path)
        except Refused as error:
            if not named and {f.code for f in error.findings} <= {"not-an-output", "file-empty"}:
                passed_over += 1
                reporter.detail(f"passed over: {error.findings[0].at(path).text}")
                continue
            reporter.failed.append((path, error.findings))
            rows.append(_unread_row(path, error.findings))
        else:
            rows.append(_row(path, molecule))
        if not as_json:
            click.echo(_line(rows[-1]))
            if verbose:
                reporter.findings(path, molecule.findings if rows[-1]["kind"] != "unknown" else reporter.failed[-1][1])
    if as_json:
        from heatwright.writing.document import JSON_VERSION

        click.echo(json_text({"heatwright": JSON_VERSION, "outputs": rows}))
    usable = sum(row["usable"] for row in rows)
    rest = f"; {passed_over} other files passed over" if passed_over else ""
    if len(rows) + passed_over > 1:
        reporter.say(f"{usable} of {len(rows)} outputs usable{rest}.")
    ctx.exit(reporter.exit_code)


def _files(paths: tuple[str, ...]) -> Iterator[tuple[str, bool]]:
    """Each file to look at, and whether the user named it (rather than the folder it is in)."""
    import os

    for path in paths:
        if not os.path.isdir(path):
            yield path, True
            continue
        for folder, subfolders, files in os.walk(path):
            subfolders[:] = sorted(d for d in subfolders if not d.startswith("."))
            yield from ((os.path.join(folder, f), False) for f in sorted(files) if not f.startswith("."))


def _row(path: str, molecule: Molecule) -> dict[str, Any]:
    from heatwright.constants import HARTREE_KJ_MOL
    from heatwright.elements import composition, formula
    from heatwright.findings import refusals
    from heatwright.partition.vibration import zero_point_energy_kJ_mol
    from heatwright.writing.numbers import significant

    modes = molecule.wavenumbers_cm1
    zpe = zero_point_energy_kJ_mol(modes[modes > 0.0]) / HARTREE_KJ_MOL if modes.size else None
    return {
        "file": path,
        "sha256": molecule.source.sha256,
        "program": molecule.source.program,
        "version": molecule.source.version,
        "kind": molecule.kind,
        "usable": not refusals(molecule.findings),
        "formula": formula(composition(molecule.atomic_numbers, molecule.masses_u), molecule.charge or 0),
        "charge": molecule.charge,
        "multiplicity": molecule.multiplicity,
        "level": molecule.level.label if molecule.level else None,
        "energy_hartree": molecule.energy_hartree,
        "energy_kind": molecule.energy_kind or None,
        "zpe_hartree": None if zpe is None else significant(zpe),
        "n_modes": int(modes.size),
        "n_imaginary": molecule.n_imaginary,
        "findings": [f.as_json() for f in molecule.findings],
    }


def _unread_row(path: str, findings: tuple[Finding, ...]) -> dict[str, Any]:
    """The row of a file of which no molecule can be made."""
    empty = dict.fromkeys(
        ("sha256", "program", "version", "formula", "charge", "multiplicity", "level", "energy_hartree", "energy_kind",
         "zpe_hartree", "n_modes", "n_imaginary")
    )  # fmt: skip
    return {
        "file": path,
        **empty,
        "kind": "unknown",
        "usable": False,
        "findings": [f.as_json() for f in findings],
    }


def _line(row: dict[str, Any]) -> str:
    refusal = next((f["text"] for f in row["findings"] if f["severity"] == "refuse"), None)
    verdict = "usable" if row["usable"] else f"not usable: {refusal}"
    if row["kind"] == "unknown" and row["program"] is None:
        return f"{row['file']}  {verdict}"
    modes = {0: "no modes", 1: "1 mode"}.get(row["n_modes"], f"{row['n_modes']} modes")
    parts = (
        row["file"],
        row["kind"],
        f"{row['formula']} ({row['charge']}, {row['multiplicity']})",
        row["level"] or "level not printed",
        f"{row['program']} {row['version']}".rstrip(),
        modes,
        verdict,
    )
    warnings = sum(f["severity"] == "warn" for f in row["findings"])
    return "  ".join(parts) + (f", {warnings} warning{'s' if warnings > 1 else ''}" if warnings else "")
