"""The ``heatwright`` command: its groups of subcommands and the one place where errors become exit codes."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from typing import NoReturn

import click

from heatwright import __version__
from heatwright.cli.audit import audit
from heatwright.cli.build import build
from heatwright.cli.compare import compare
from heatwright.cli.crosscheck import crosscheck
from heatwright.cli.entry import entry
from heatwright.cli.explain import explain
from heatwright.cli.mend import mend
from heatwright.cli.plot import plot
from heatwright.cli.reactions import reactions
from heatwright.cli.references import references
from heatwright.cli.report import report
from heatwright.cli.rotors import rotors
from heatwright.cli.samples import samples
from heatwright.cli.scales import scales
from heatwright.cli.splice import splice
from heatwright.cli.start import start
from heatwright.cli.survey import survey
from heatwright.cli.table import table
from heatwright.errors import HeatwrightError

BUG = 70
INTERRUPTED = 130

SECTIONS = {
    "One molecule": ("survey", "table", "entry", "rotors"),
    "A mechanism": ("start", "build", "compare", "crosscheck", "report", "plot"),
    "Existing entries": ("audit", "mend", "splice"),
    "Looking things up": ("scales", "references", "reactions", "explain", "samples"),
}
"""How ``--help`` groups the commands."""


class SectionedGroup(click.Group):
    """A group whose help lists its commands under the headings of :data:`SECTIONS`."""

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        for heading, names in SECTIONS.items():
            rows = [(name, self.commands[name].get_short_help_str(70)) for name in names]
            with formatter.section(heading):
                formatter.write_dl(rows)


@click.group(
    cls=SectionedGroup,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100},
    epilog="Exit codes: 0 fine; 1 an asked-for check says no; 2 wrong usage; 3 some input could not be processed; "
    "70 a bug; 130 interrupted.",
)
@click.version_option(__version__, prog_name="heatwright")
def cli() -> None:
    """From quantum-chemistry outputs to thermo entries (NASA polynomials) whose residuals can be checked.

    \b
    Example:
      heatwright entry CH3OH.out --dHf298 "-200.7 kJ/mol" --source "ATcT 1.112"

    The product goes to standard output, words about it to standard error.  Computed data are not validated for safety
    decisions: flame, explosion and process-safety work needs evaluated data, local codes and licensed practice.
    """


for _command in (
    survey,
    table,
    entry,
    rotors,
    start,
    build,
    compare,
    crosscheck,
    report,
    plot,
    audit,
    mend,
    splice,
    scales,
    references,
    reactions,
    explain,
    samples,
):
    cli.add_command(_command)


def main(arguments: Sequence[str] | None = None) -> NoReturn:
    """Run the command line and exit with its code."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="backslashreplace")
    sys.exit(_run(arguments))


def _run(arguments: Sequence[str] | None) -> int:
    try:
        code = cli.main(args=arguments, prog_name="heatwright", standalone_mode=False)
        sys.stdout.flush()
        return code if isinstance(code, int) else 0
    except click.Abort:
        click.echo("interrupted", err=True)
        return INTERRUPTED
    except click.ClickException as error:
        error.show()
        return error.exit_code
    except HeatwrightError as error:
        text = str(error)
        click.echo(text if text.startswith("error: ") else f"error: {text}", err=True)
        return error.exit_code
    except BrokenPipeError:
        # the reader of our output has gone (for instance `| head`); nothing is left to say to it
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except Exception as error:
        return _bug(error)


def _bug(error: Exception) -> int:
    import traceback

    traceback.print_exception(error)
    click.echo(
        f"error: this is a bug in heatwright {__version__} ({type(error).__name__}). Please report it with the lines "
        "above and, if possible, the input.",
        err=True,
    )
    return BUG
