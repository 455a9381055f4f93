"""What `heatwright build` says, and where."""

from __future__ import annotations

import io
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from projects import MECHANISM, add_by_hand, edit, project


class Terminal(io.StringIO):
    """A stream that is a terminal."""

    def isatty(self) -> bool:
        return True


def test_the_bar_is_for_terminals_and_names_the_file(
    tmp_path: Path, run: Callable[..., Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    folder = project(tmp_path, "H2O", "CO2")
    screen = Terminal()
    monkeypatch.setattr(sys, "stderr", screen)
    run("build", folder)
    drawn = screen.getvalue()
    assert "\rreading [" in drawn
    assert "/s H2O.out" in drawn
    assert "6/6" in drawn  # two outputs and four atoms
    assert "2 made; release written to release." in drawn.splitlines()[-1]


def test_no_bar_elsewhere_and_with_q(tmp_path: Path, run: Callable[..., Any], monkeypatch: pytest.MonkeyPatch) -> None:
    ran = run("build", project(tmp_path / "a", "H2O"))
    assert "reading [" not in ran.err
    screen = Terminal()
    monkeypatch.setattr(sys, "stderr", screen)
    run("build", "-q", project(tmp_path / "b", "H2O"))
    assert screen.getvalue() == ""


def test_many_species_with_one_reason_share_a_line(tmp_path: Path, run: Callable[..., Any]) -> None:
    folder = project(tmp_path, head=MECHANISM)
    add_by_hand(folder, 50)
    ran = run("build", folder)
    assert "M000, M001, M002, M003 and 46 more: new\n50 of 50 species to be made: 50 new.\n" in ran.err
    edit(folder / "heatwright.toml", {"0.96": "0.97"})
    ran = run("build", "-n", folder)
    assert len(ran.out.splitlines()) == 51


def test_findings_are_shown_as_they_matter(tmp_path: Path, run: Callable[..., Any]) -> None:
    folder = project(tmp_path, "O2")
    ran = run("build", folder)
    assert "warning: O2.out: O2 is linear and open-shell" in ran.err
    assert "note: " not in ran.err
    edit(folder / "heatwright.toml", {"0.96": "0.97"})
    ran = run("build", "-v", folder)
    assert "note: O2.out: " in ran.err
    assert "O2 made: dHf(298.15 K) = " in ran.err


def test_processes_and_a_scheduler_exclude_each_other(tmp_path: Path, run: Callable[..., Any]) -> None:
    ran = run("build", project(tmp_path, "H2O"), "-j", "2", "--scheduler", "tcp://127.0.0.1:1")
    assert (ran.code, "-j is for processes of this machine" in ran.err) == (2, True)


def test_a_missing_manifest_is_a_sentence(tmp_path: Path, run: Callable[..., Any]) -> None:
    ran = run("build", tmp_path)
    assert ran.code == 3
    assert "the manifest cannot be read" in ran.err


def test_a_path_that_leaves_the_project_with_confine(tmp_path: Path, run: Callable[..., Any]) -> None:
    folder = project(tmp_path / "p", "H2O")
    (folder / "H2O.out").rename(tmp_path / "H2O.out")
    edit(folder / "heatwright.toml", {'output = "H2O.out"': 'output = "../H2O.out"'})
    ran = run("build", folder, "--confine")
    assert (ran.code, "outside of the project" in ran.err) == (3, True)
    assert run("build", folder).code == 0
