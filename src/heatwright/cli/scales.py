"""``heatwright scales``: which scale factors are published for a level of theory."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from heatwright.scales import PublishedFactor


@click.command(short_help="Published scale factors for a level, method or basis.")
@click.argument("level", required=False, metavar="[LEVEL]")
@click.option("--json", "as_json", is_flag=True, help="The same for scripts.")
def scales(level: str | None, as_json: bool) -> None:
    """List the scale factors published for LEVEL: METHOD/BASIS, a method alone or a basis alone.

    Without LEVEL the methods are listed, with how many rows there are for each.  The rows of a level stand in the order
    in which --scale published asks the sources; it takes the first one that has both factors.

    \b
    Examples:
      heatwright scales "B3LYP/6-31G*"
      heatwright scales MP2 --json
    """
    from heatwright.scales import factors_like
    from heatwright.writing.document import JSON_VERSION
    from heatwright.writing.numbers import json_text

    if level is None:
        methods = _methods()
        document: dict[str, Any] = {"heatwright": JSON_VERSION, "methods": methods}
        click.echo(json_text(document) if as_json else _methods_text(methods))
        return
    rows = factors_like(level)
    if not rows:
        raise _unknown(level)
    document = {"heatwright": JSON_VERSION, "level": level, "factors": [_row(row) for row in rows]}
    click.echo(json_text(document) if as_json else _rows_text(rows))


def _unknown(level: str) -> Exception:
    from heatwright.findings import Refused, refuse
    from heatwright.scales import near_levels

    method, _, basis = level.rpartition("/") if "/" in level else (level, "", "")
    near = near_levels(method.strip(), basis.strip())
    action = f"Near to it are {', '.join(near)}." if near else "`heatwright scales` lists the methods."
    return Refused([refuse("no-published-scale", f"no scale factor is published for {level!r}", action=action)])


def _methods() -> list[dict[str, Any]]:
    """Each method once, with the number of its rows and of its basis sets."""
    from heatwright.scales import all_factors, basis_key, method_key

    found: dict[str, list[PublishedFactor]] = {}
    for row in all_factors():
        found.setdefault(method_key(row.method), []).append(row)
    return [
        {
            "method": min((r.method for r in rows), key=lambda name: (len(name), name)),
            "rows": len(rows),
            "basis_sets": len({basis_key(r.basis) for r in rows if r.basis}),
        }
        for _, rows in sorted(found.items())
    ]


def _methods_text(methods: list[dict[str, Any]]) -> str:
    width = max(len(m["method"]) for m in methods)
    lines = [f"{'method':<{width}}  rows  basis sets"]
    lines += [f"{m['method']:<{width}}  {m['rows']:4d}  {m['basis_sets']:10d}" for m in methods]
    return "\n".join(lines)


def _row(row: PublishedFactor) -> dict[str, Any]:
    return {
        "method": row.method,
        "basis": row.basis or None,
        "fundamental_factor": row.fundamental,
        "zpe_factor": row.zpe,
        "harmonic_factor": row.harmonic,
        "enthalpy_factor": row.enthalpy,
        "entropy_factor": row.entropy,
        "fundamental_uncertainty": row.uncertainty,
        "source": row.source,
        "doi": row.doi or None,
    }


def _rows_text(rows: tuple[PublishedFactor, ...]) -> str:
    width = max(len(row.label) for row in rows)
    lines = [f"{'level':<{width}}  fundamental     ZPE    H-H0       S  source"]
    for row in rows:
        values = "  ".join(f"{_cell(v):>6}" for v in (row.zpe, row.enthalpy, row.entropy))
        doi = f", doi:{row.doi}" if row.doi else ""
        lines.append(f"{row.label:<{width}}  {_cell(row.fundamental):>11}  {values}  {row.source}{doi}")
    return "\n".join(lines)


def _cell(value: float | None) -> str:
    return "-" if value is None else f"{value:.4f}"
