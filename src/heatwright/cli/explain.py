"""``heatwright explain``: what a finding's code means, an example of it, and what to do."""

from __future__ import annotations

import textwrap
from typing import TYPE_CHECKING

import click

from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.explanations import Explanation


@click.command(short_help="What a finding's code means and what to do.")
@click.argument("code", required=False, metavar="[CODE]")
def explain(code: str | None) -> None:
    """Say what the finding CODE means, show a sentence that carries it, and say what to do.

    The code is what stands in brackets at the end of an error, warning or note.  Without CODE all of them are listed.

    \b
    Examples:
      heatwright explain imaginary-modes
      heatwright explain
    """
    from heatwright.explanations import explanation

    if code is None:
        click.echo(_all())
        return
    found = explanation(code.strip().strip("[]"))
    if found is None:
        raise UsageError(f"{code!r} is no finding's code.{_near(code)} `heatwright explain` lists all of them")
    click.echo(_one(found))


def _near(code: str) -> str:
    from difflib import get_close_matches

    from heatwright.findings import CODES

    near = get_close_matches(code.lower(), CODES, 3, 0.4)
    return f" The nearest are {', '.join(near)}." if near else ""


def _one(found: Explanation) -> str:
    parts = (
        f"{found.code}  ({found.group})",
        "",
        *_wrapped("", found.meaning),
        "",
        *_wrapped("Example: ", found.example),
        "",
        *_wrapped("What to do: ", found.advice),
    )
    return "\n".join(parts)


def _wrapped(label: str, text: str) -> list[str]:
    return textwrap.wrap(label + text, 100, subsequent_indent=" " * len(label), break_on_hyphens=False)


def _all() -> str:
    from heatwright.explanations import by_group

    lines: list[str] = []
    for group, found in by_group().items():
        lines += ["", f"{group}:"] if lines else [f"{group}:"]
        lines += [f"  {e.code:<24} {e.meaning}" for e in found]
    return "\n".join(lines)
