"""The public names are what they say, and starting a command loads nothing heavy."""

from __future__ import annotations

import pickle
import subprocess
import sys

import heatwright


def test_every_public_name_can_be_had_and_the_list_is_sorted() -> None:
    assert heatwright.__all__ == sorted(heatwright.__all__)
    assert set(heatwright.__all__) == set(heatwright._HOME) | {"__version__"}
    assert all(getattr(heatwright, name) is not None for name in heatwright.__all__)
    assert dir(heatwright) == sorted(heatwright.__all__)


def test_an_unknown_name_is_an_attribute_error() -> None:
    assert not hasattr(heatwright, "partition_coefficient")


def test_help_imports_nothing_heavy() -> None:
    code = (
        "import sys\n"
        "from heatwright.cli.main import cli\n"
        "cli.main(['--help'], standalone_mode=False)\n"
        "heavy = {'numpy', 'scipy', 'cclib', 'jinja2', 'pandas', 'matplotlib'} & set(sys.modules)\n"
        "sys.exit(', '.join(heavy) or 0)\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert (done.returncode, done.stderr) == (0, "")


def test_errors_survive_pickling() -> None:
    from heatwright import Finding, Refused, UsageError

    refused = Refused([Finding("refuse", "file-empty", "the file is empty", "a.out", "text", "Look at the job.")])
    back = pickle.loads(pickle.dumps(refused))
    assert (type(back), back.findings, back.exit_code) == (Refused, refused.findings, 3)
    usage = pickle.loads(pickle.dumps(UsageError("--range 1: expected two ends")))
    assert (str(usage), usage.exit_code) == ("--range 1: expected two ends", 2)
