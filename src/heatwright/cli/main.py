"""The ``heatwright`` command: its groups of subcommands and the one place where errors become exit codes."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from importlib import import_module
from typing import NoReturn

import click

from heatwright import __version__
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
    """A group of the commands of :data:`SECTIONS`, listed under its headings; each is imported when it is wanted."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return sorted(name for names in SECTIONS.values() for name in names)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in self.commands and cmd_name in self.list_commands(ctx):
            self.add_command(getattr(import_module(f"heatwright.cli.{cmd_name}"), cmd_name))
        return super().get_command(ctx, cmd_name)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        for heading, names in SECTIONS.items():
            commands = [(name, self.get_command(ctx, name)) for name in names]
            rows = [(name, command.get_short_help_str(70)) for name, command in commands if command is not None]
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
