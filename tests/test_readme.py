"""What the README says works as it stands there."""

from __future__ import annotations

import re
import shlex
from pathlib import Path

import pytest

from heatwright.cli.main import SECTIONS, main

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")


def commands() -> list[str]:
    blocks = re.findall(r"^```\n(.*?)^```", README, re.MULTILINE | re.DOTALL)
    return [line for block in blocks for line in block.splitlines() if line.startswith("heatwright ")]


@pytest.mark.parametrize("command", commands())
def test_commands(command: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capfd) -> None:
    (tmp_path / "sample_outputs").symlink_to(ROOT / "sample_outputs")
    monkeypatch.chdir(tmp_path)
    words = [
        word
        for part in shlex.split(command)[1:]
        for word in (sorted(map(str, Path().glob(part))) if "*" in part else [part])
    ]
    with pytest.raises(SystemExit) as stopped:
        main(words)
    assert stopped.value.code == 0
    captured = capfd.readouterr()
    assert captured.out or captured.err


def test_the_python_block(monkeypatch: pytest.MonkeyPatch) -> None:
    (block,) = re.findall(r"^```python\n(.*?)^```", README, re.MULTILINE | re.DOTALL)
    monkeypatch.chdir(ROOT)
    names: dict[str, object] = {}
    exec(block, names)  # the README's own text
    assert names["entry"].quality.ratio < 1.05


def test_the_record_shown_is_the_record_made(run_entry) -> None:
    shown = [line for line in README.splitlines() if len(line) == 80 and line[79] in "1234"]
    assert len(shown) == 4
    assert "\n".join(shown) in run_entry


@pytest.fixture
def run_entry(capfd, monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.chdir(ROOT)
    with pytest.raises(SystemExit):
        main(["entry", "sample_outputs/CH3OH.out", "--dHf298", "-200.7 kJ/mol", "--source", "ATcT 1.112"])
    return capfd.readouterr().out


def test_every_command_is_in_the_readme() -> None:
    assert [name for names in SECTIONS.values() for name in names if f"`heatwright {name}" not in README] == []
