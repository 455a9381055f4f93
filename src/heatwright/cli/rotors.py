"""``heatwright rotors``: the rotatable bonds of an output and what each treatment of them gives."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.reporter import Reporter

if TYPE_CHECKING:
    from heatwright.molecule import Molecule
    from heatwright.partition.rotor_survey import SurveyedRotor

_TEMPERATURES_K = (298.15, 1000.0)


@click.command(short_help="Rotatable bonds and what each treatment of them would give.")
@click.argument("output", type=click.Path())
@click.option(
    "--torsion",
    "torsions",
    multiple=True,
    metavar="DIR|FILE|TEXT",
    help='The potential of one: folder of a scan, scan output, CSV, or "3-1-2-4 n=3 V=373 cm-1". Can be repeated.',
)
@click.option("--frequency-scale", type=float, default=1.0, metavar="X", help="Factor on the wavenumbers.")
@click.option("--job", type=click.IntRange(min=1), metavar="N", help="One of several jobs in a file.")
@click.option("--json", "as_json", is_flag=True, help="For scripts.")
@click.option("-q", "--quiet", is_flag=True, help="Say only what failed.")
@click.pass_context
def rotors(
    ctx: click.Context,
    /,
    output: str,
    torsions: tuple[str, ...],
    frequency_scale: float,
    job: int | None,
    as_json: bool,
    quiet: bool,
) -> None:
    """List the bonds of OUTPUT about which something can turn: tops, symmetry, reduced moment, wavenumber, and S° and
    Cp° of that one degree of freedom as an oscillator, by Pitzer and Gwinn, and as a hindered rotor where --torsion
    gives the potential.

    \b
    Example:
      heatwright rotors CH3OH.out --torsion "3-1-2-4 n=3 V=373 cm-1"
    """
    from heatwright.errors import UsageError
    from heatwright.findings import Refused
    from heatwright.partition.rotor_survey import survey_rotors
    from heatwright.reading.torsion_scans import read_torsion
    from heatwright.species import Reading, usable_molecule

    if not 0.0 < frequency_scale < float("inf"):
        raise UsageError(f"--frequency-scale must be a positive number, not {frequency_scale}")
    reporter = Reporter(quiet=quiet)
    try:
        molecule = usable_molecule(output, Reading(job, torsions=True))
        rows, findings = survey_rotors(molecule, tuple(map(read_torsion, torsions)), frequency_scale)
    except Refused as error:
        reporter.fail(output, error.findings)
        if as_json:
            _echo_json([], reporter)
    else:
        if as_json:
            _echo_json([_document(molecule, rows)], reporter)
        else:
            click.echo("\n".join(_text(molecule, rows)))
        reporter.findings(output, (*molecule.findings, *findings))
    ctx.exit(reporter.exit_code)


def _text(molecule: Molecule, rows: list[SurveyedRotor]) -> Iterator[str]:
    from heatwright.elements import composition, formula, symbol

    name = formula(composition(molecule.atomic_numbers, molecule.masses_u), molecule.charge or 0)
    yield f"{molecule.source.file}: {name}, {len(rows) or 'no'} rotatable bond{'' if len(rows) == 1 else 's'}"
    for row in rows:
        j, k = row.bond.atoms[1:3]
        z = molecule.atomic_numbers
        yield ""
        yield (
            f"torsion {row.bond.label} about {symbol(int(z[j]))}{j + 1}-{symbol(int(z[k]))}{k + 1}: symmetry "
            f"{row.bond.symmetry}, reduced moment {row.moment_u_A2:.4f} u Å², F {row.F_cm1:.3f} cm⁻¹"
        )
        yield f"  turning atoms {_atoms(row.bond.top)} against {_atoms(row.bond.frame)}; {_barrier(row)}"
        yield f"  {'J/mol/K':14}" + "".join(f"{f'S°({T:g} K)':>14}{f'Cp°({T:g} K)':>14}" for T in _TEMPERATURES_K)
        for treatment, values in _values(row).items():
            shown = "".join(f"{s:14.3f}{cp:14.3f}" for s, cp in values) if values else f"{'no potential given':>32}"
            yield f"  {treatment:14}{shown}"


def _atoms(atoms: tuple[int, ...]) -> str:
    return ", ".join(str(a + 1) for a in atoms)


def _barrier(row: SurveyedRotor) -> str:
    wave = "" if row.wavenumber_cm1 is None else f"harmonic {row.wavenumber_cm1:.1f} cm⁻¹, "
    if row.barrier_cm1 is None:
        return f"{wave}barrier not known"
    how = "estimated from it" if row.estimated else f"({row.treated.source})" if row.treated else ""
    return f"{wave}barrier {row.barrier_cm1:.0f} cm⁻¹ {how}"


def _values(row: SurveyedRotor) -> dict[str, list[tuple[float, float]] | None]:
    """(S°, Cp°) in J/mol/K at each temperature by treatment."""
    from heatwright.partition.internal_rotation import entropy_J_mol_K, heat_capacity_J_mol_K

    return {
        name: None
        if part is None
        else [(entropy_J_mol_K((part,), T), heat_capacity_J_mol_K((part,), T)) for T in _TEMPERATURES_K]
        for name, part in row.treatments.items()
    }


def _document(molecule: Molecule, rows: list[SurveyedRotor]) -> dict[str, Any]:
    from heatwright.writing.document import torsion_document
    from heatwright.writing.numbers import significant

    def rounded(value: float | None) -> float | None:
        return None if value is None else significant(value)

    torsions = []
    for row in rows:
        document: dict[str, Any] = {
            "atoms": [a + 1 for a in row.bond.atoms],
            "top": [a + 1 for a in row.bond.top],
            "frame": [a + 1 for a in row.bond.frame],
            "symmetry": row.bond.symmetry,
            "reduced_moment_u_A2": significant(row.moment_u_A2),
            "F_cm-1": significant(row.F_cm1),
            "harmonic_cm-1": rounded(row.wavenumber_cm1),
            "barrier_cm-1": rounded(row.barrier_cm1),
            "barrier_estimated": row.estimated,
            "T_K": list(_TEMPERATURES_K),
            "treatments": {
                name: values
                and {f"{what}_J_mol_K": [significant(v[i]) for v in values] for i, what in ((0, "S"), (1, "Cp"))}
                for name, values in _values(row).items()
            },
        }
        if row.treated is not None:
            document |= torsion_document(row.treated)
        torsions.append(document)
    return {"file": molecule.source.file, "torsions": torsions}


def _echo_json(outputs: list[dict[str, Any]], reporter: Reporter) -> None:
    from heatwright.writing.document import JSON_VERSION, failure_document
    from heatwright.writing.render import render_format

    failed = [failure_document(file, findings) for file, findings in reporter.failed]
    document = {"heatwright": JSON_VERSION, "outputs": outputs, "failed": failed}
    click.echo(render_format("json.j2", {"document": document}), nl=False)
