"""The release folder: at any moment the whole old or the whole new release, also when a step fails in the middle."""

from __future__ import annotations

import os
import threading
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path

import pytest

from heatwright.findings import Refused
from heatwright.project import release as place
from heatwright.project.release import check_folder, locked, read_release, recover, switch

OLD = {"thermo.dat": b"old dat", "thermo.yaml": b"old yaml", "thermo.lock.toml": b"old lock"}
NEW = {name: data.replace(b"old", b"new") for name, data in OLD.items()}


def content(folder: Path) -> dict[str, bytes]:
    return {p.name: p.read_bytes() for p in sorted(folder.iterdir())}


def test_a_release_takes_the_place_of_another(tmp_path: Path) -> None:
    folder = tmp_path / "release"
    switch(str(folder), OLD)
    assert content(folder) == OLD
    switch(str(folder), NEW)
    assert content(folder) == NEW
    assert [p.name for p in tmp_path.iterdir()] == ["release"]


def test_other_files_come_along_and_folders_are_refused(tmp_path: Path) -> None:
    folder = tmp_path / "release"
    switch(str(folder), OLD)
    (folder / "README.md").write_text("ours")
    (folder / "link").symlink_to("README.md")
    folder.chmod(0o750)
    switch(str(folder), NEW)
    assert (folder / "README.md").read_text() == "ours"
    assert os.readlink(folder / "link") == "README.md"
    assert folder.stat().st_mode & 0o777 == 0o750
    check_folder(str(folder), str(tmp_path))
    (folder / "inner").mkdir()
    with pytest.raises(Refused, match="it holds the folder inner"):
        check_folder(str(folder), str(tmp_path))
    with pytest.raises(Refused, match="the manifest lies in it"):
        check_folder(str(tmp_path), str(tmp_path))


def test_a_link_to_a_folder_stays_a_link(tmp_path: Path) -> None:
    (tmp_path / "elsewhere").mkdir()
    (tmp_path / "release").symlink_to("elsewhere")
    switch(str(tmp_path / "release"), OLD)
    switch(str(tmp_path / "release"), NEW)
    assert (tmp_path / "release").is_symlink()
    assert content(tmp_path / "elsewhere") == NEW


class Stop(BaseException):
    """The process is killed here."""


STEPS = ["os.mkdir", "os.rename", "os.fsync", "os.link", "shutil.copymode", "shutil.rmtree", "_exchanged", "_write"]


def killing(monkeypatch: pytest.MonkeyPatch, step: str, at: int, *, after: bool) -> None:
    """Make the *at*-th call of a step the last thing that happens."""
    module, _, name = step.rpartition(".")
    owner = {"os": place.os, "shutil": place.shutil, "": place}[module]
    real: Callable[..., object] = getattr(owner, name)
    calls = 0

    def killed(*arguments: object, **options: object) -> object:
        nonlocal calls
        calls += 1
        if calls == at and not after:
            raise Stop
        result = real(*arguments, **options)
        if calls == at:
            raise Stop
        return result

    monkeypatch.setattr(owner, name, killed)


@pytest.mark.parametrize("exchange", [True, False], ids=["exchange", "two renames"])
@pytest.mark.parametrize("after", [False, True], ids=["before", "after"])
@pytest.mark.parametrize("step", STEPS)
@pytest.mark.parametrize("at", [1, 2, 3, 4])
def test_killed_at_any_step_the_next_build_finds_one_whole_release(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, step: str, at: int, after: bool, exchange: bool
) -> None:
    folder = tmp_path / "release"
    switch(str(folder), OLD)
    (folder / "README.md").write_text("ours")
    if not exchange:
        monkeypatch.setattr(place, "_exchanged", lambda *_: False)
    killing(monkeypatch, step, at, after=after)
    with suppress(Stop):
        switch(str(folder), NEW)
    monkeypatch.undo()
    if exchange:  # without it there is a moment between two renames in which the next build has to help
        assert read_release(str(folder), tuple(OLD)) in (OLD, NEW)
    recover(str(folder))
    assert read_release(str(folder), tuple(OLD)) in (OLD, NEW)
    assert (folder / "README.md").read_text() == "ours"
    assert [p.name for p in tmp_path.iterdir()] == ["release"]
    switch(str(folder), NEW)
    assert read_release(str(folder), tuple(OLD)) == NEW


def read_in(folder: int, name: str) -> bytes:
    handle = os.open(name, os.O_RDONLY, dir_fd=folder)
    try:
        return os.read(handle, 99)
    finally:
        os.close(handle)


def test_a_reader_never_sees_a_mixture(tmp_path: Path) -> None:
    folder = tmp_path / "release"
    versions = [{name: f"{i} {name}".encode() for name in OLD} for i in range(60)]
    switch(str(folder), versions[0])
    done, seen = threading.Event(), []

    def reader() -> None:
        while not done.is_set():
            handle = os.open(folder, os.O_RDONLY)  # one release, whatever its name leads to later
            try:
                seen.append({name: read_in(handle, name) for name in os.listdir(handle)})
            except FileNotFoundError:
                pass  # that release was cleared away meanwhile
            finally:
                os.close(handle)

    thread = threading.Thread(target=reader)
    thread.start()
    for version in versions[1:]:
        switch(str(folder), version)
    done.set()
    thread.join()
    assert seen
    assert all(found in versions for found in seen if len(found) == len(OLD))


def test_one_build_at_a_time(tmp_path: Path) -> None:
    folder = str(tmp_path / "release")
    events = []
    second_waits = threading.Event()

    def second() -> None:
        with locked(folder, lambda: (events.append("waits"), second_waits.set())):
            events.append("second")

    with locked(folder, lambda: events.append("first waits")):
        thread = threading.Thread(target=second)
        thread.start()
        assert second_waits.wait(10)
        events.append("first")
    thread.join()
    assert events == ["waits", "first", "second"]


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write anywhere")
def test_a_folder_that_must_not_be_written_to_is_a_sentence(tmp_path: Path) -> None:
    tmp_path.chmod(0o500)
    with pytest.raises(Refused, match="the release cannot be written"):
        switch(str(tmp_path / "release"), OLD)
