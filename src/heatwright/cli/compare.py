"""``heatwright compare``: what changed between two releases or thermo files, why, and whether it matters."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING, Any

import click

from heatwright.cli.options import temperatures, units_option, words_options
from heatwright.cli.reporter import Reporter
from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.findings import Finding
    from heatwright.project.changes import Comparison
    from heatwright.project.effects import MechanismEffect
    from heatwright.project.flame import Flame
    from heatwright.project.thermo_set import ThermoSet

CHECK_SAYS_NO = 1
_VERDICTS = {"other species": "with other elements or counts"}


@click.command(short_help="What changed between two releases or thermo files, and whether it matters.")
@click.argument("old", type=click.Path())
@click.argument("new", type=click.Path())
@click.option("--mechanism", type=click.Path(), metavar="FILE", help="Cantera YAML: what its reactions notice.")
@click.option("--phase", metavar="NAME", help="Only the reactions of this phase of the mechanism.")
@click.option(
    "--factor",
    type=float,
    default=1.1,
    show_default=True,
    help="By how much a reverse rate may move, up or down.",
)
@click.option(
    "--mixture",
    metavar="TEXT",
    help='Flame temperature (Cantera): "fuel=CH4; oxidizer=O2:1,N2:3.76; phi=1; T=298.15 K; p=1 atm", or '
    '"mixture=CH4:1,O2:2".',
)
@click.option(
    "--tolerance",
    metavar="LIST",
    help='Up to where a species is unchanged: "H=0.5,S=0.1,Cp=0.1,G=0.5" (kJ/mol, J/mol/K), "flame=2" (K).  '
    "[default: 0.01 each, flame 1]",
)
@click.option(
    "--temperatures",
    "temperatures_text",
    default="500,1000,1500,2000",
    show_default=True,
    metavar="T,T,...",
    help="Temperatures in K: 500,1000 or first:last:step.",
)
@click.option("--common", is_flag=True, help="Only species that both sides have.")
@click.option("--check", is_flag=True, help="Exit with 1 when anything moved more than allowed.")
@click.option("--json", "as_json", is_flag=True, help="The same for scripts.")
@units_option
@words_options
@click.pass_context
def compare(
    ctx: click.Context,
    /,
    old: str,
    new: str,
    mechanism: str | None,
    phase: str | None,
    factor: float,
    mixture: str | None,
    tolerance: str | None,
    temperatures_text: str,
    common: bool,
    check: bool,
    as_json: bool,
    units: str,
    quiet: bool,
    verbose: bool,
) -> None:
    """Compare OLD and NEW: release folders, lock files (.toml), or thermo files (80-column records, Cantera YAML).

    Species by species: enthalpy of formation, entropy, heat capacity and Gibbs energy, with the reasons that the lock
    files hold, those that matter most first.  -v shows the unchanged ones too.  A check says no when a species
    changed, went, got another name or other elements, when a reverse rate moves by more than --factor, or when the
    flame moves; a new species passes.

    \b
    Examples:
      heatwright compare release.old release
      heatwright compare release.old release --mechanism gri30.yaml --mixture "fuel=CH4; phi=1"
      heatwright compare release.old release --check --tolerance "H=0.5,S=0.2,Cp=0.2,G=0.5"
    """
    from heatwright.project.changes import Tolerance, compare_sets, parse_tolerance
    from heatwright.project.effects import mechanism_effect
    from heatwright.project.flame import flame, parse_mixture
    from heatwright.project.mechanism import read_mechanism
    from heatwright.project.thermo_set import read_thermo_set

    if not 1.0 < factor < float("inf"):
        raise UsageError(f"--factor {factor:g}: expected a number above 1, such as 1.1")
    if mechanism is None and (phase is not None or mixture is not None):
        raise UsageError("--phase and --mixture belong to --mechanism FILE")
    stated = parse_mixture(mixture) if mixture is not None else None
    allowed = Tolerance() if tolerance is None else parse_tolerance(tolerance)
    at = temperatures(temperatures_text)
    reporter = Reporter(quiet=quiet, verbose=verbose)
    sides = read_thermo_set(old), read_thermo_set(new)
    comparison = compare_sets(*sides, tolerance=allowed, temperatures_K=at, only_common=common)
    effect = burnt = None
    if mechanism is not None:
        effect = mechanism_effect(read_mechanism(mechanism, phase), comparison)
        burnt = None if stated is None else flame(effect.mechanism, stated, *sides)
    why = list(_moved(comparison, effect, burnt, factor))
    if as_json:
        click.echo(_json_text(comparison, effect, burnt, factor, why))
    else:
        _echo(comparison, effect, burnt, factor, units, verbose)
    _say_findings(reporter, sides, [*comparison.findings, *(effect.findings if effect else ())])
    _say_flame(reporter, burnt)
    if check:
        for words in why:
            click.echo(f"check: {words}", err=True)
    ctx.exit(reporter.exit_code or (CHECK_SAYS_NO if check and why else 0))


def _moved(
    comparison: Comparison, effect: MechanismEffect | None, burnt: Flame | Finding | None, factor: float
) -> Iterable[str]:
    """What a check says no for, one sentence each."""
    from heatwright.cli.compare_text import listed
    from heatwright.project.changes import MOVED
    from heatwright.project.flame import Flame

    for kind in MOVED:
        names = [c.name for c in comparison.of_kind(kind)]
        if names:
            yield f"{len(names)} species {_VERDICTS.get(kind, kind)}: {listed(names)}"
    if any(f.code == "pressure-differs" for f in comparison.findings):
        yield "the standard pressures differ"
    if effect is not None and (beyond := effect.beyond(factor)):
        which = f"the reverse rates of {len(beyond)} reactions move" if len(beyond) > 1 else "one reverse rate moves"
        yield f"{which} by more than a factor of {factor:g}"
    if isinstance(burnt, Flame) and abs(burnt.new_K - burnt.old_K) > comparison.tolerance.flame_K:
        yield f"the flame moves by {burnt.new_K - burnt.old_K:+.2f} K"


def _echo(
    comparison: Comparison,
    effect: MechanismEffect | None,
    burnt: Flame | Finding | None,
    factor: float,
    units: str,
    verbose: bool,
) -> None:
    from heatwright.cli.compare_text import comparison_lines, effect_lines, flame_lines
    from heatwright.project.flame import Flame
    from heatwright.writing.units import UNITS

    lines = list(comparison_lines(comparison, UNITS[units], everything=verbose))
    if effect is not None:
        lines += ["", *effect_lines(effect, comparison.temperatures_K, factor)]
    if isinstance(burnt, Flame):
        lines += ["", *flame_lines(burnt)]
    click.echo("\n".join(lines))


def _json_text(
    comparison: Comparison,
    effect: MechanismEffect | None,
    burnt: Flame | Finding | None,
    factor: float,
    why: list[str],
) -> str:
    from heatwright.project.change_document import comparison_document, effect_document, flame_document
    from heatwright.writing.document import JSON_VERSION
    from heatwright.writing.numbers import json_text

    document: dict[str, Any] = {"heatwright": JSON_VERSION, **comparison_document(comparison)}
    if effect is not None:
        document["mechanism"] = effect_document(effect, factor)
    if burnt is not None:
        document["flame"] = flame_document(burnt)
    findings = [*comparison.findings, *(effect.findings if effect else ())]
    return json_text({**document, "moved": why, "findings": [f.as_json() for f in findings]})


def _say_findings(reporter: Reporter, sides: tuple[ThermoSet, ThermoSet], findings: list[Finding]) -> None:
    """Refusals count as entries that could not be compared."""
    for finding in dict.fromkeys(findings):
        if finding.severity == "refuse":
            reporter.fail(finding.where, [finding])
        else:
            reporter.findings(finding.where, [finding])
    unusable = sorted(sides[0].unusable | sides[1].unusable)
    if unusable:
        from heatwright.cli.compare_text import listed

        reporter.say(f"not compared, since an entry cannot be read: {listed(unusable)}")


def _say_flame(reporter: Reporter, burnt: Flame | Finding | None) -> None:
    from heatwright.findings import Finding

    if isinstance(burnt, Finding):
        reporter.findings(burnt.where, [burnt])
    elif burnt is not None:
        for finding in burnt.findings:
            reporter.findings(finding.where, [finding])
