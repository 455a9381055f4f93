"""Running the command line inside the test process."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from heatwright.cli.main import main
from heatwright.resources import sample_outputs


@dataclass(frozen=True)
class Ran:
    """What a command did: exit code, standard output, standard error."""

    code: int
    out: str
    err: str


@pytest.fixture
def run(capfd: pytest.CaptureFixture[str]) -> Callable[..., Ran]:
    """Run ``heatwright`` with these arguments."""

    def runner(*arguments: object) -> Ran:
        capfd.readouterr()
        with pytest.raises(SystemExit) as stopped:
            main([str(a) for a in arguments])
        captured = capfd.readouterr()
        assert "Traceback" not in captured.err
        return Ran(int(stopped.value.code or 0), captured.out, captured.err)

    return runner


@pytest.fixture(scope="session")
def samples() -> Path:
    """The folder of the sample outputs."""
    return Path(str(sample_outputs()))
