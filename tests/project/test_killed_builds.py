"""Builds killed at random moments: the release is always the whole old or the whole new one, and nothing is lost.

The kill is SIGKILL to the process of a real `heatwright build`, at a moment drawn from the time a build takes.
"""

from __future__ import annotations

import contextlib
import os
import random
import signal
import sqlite3
import subprocess
import sys
import time
from pathlib import Path

import pytest

from projects import MECHANISM, add_by_hand, built, edit, project, release

OUTPUTS = ("CO2", "H2O", "CH3", "N2", "CO", "OH")


def command(folder: Path, *more: str) -> list[str]:
    return [sys.executable, "-m", "heatwright", "build", "-q", str(folder), *more]


def sixty_species(folder: Path) -> Path:
    """Six outputs, which take their time to be read, and 54 molecule files, which do not."""
    add_by_hand(project(folder, *OUTPUTS, head=MECHANISM), 54)
    return folder


def two_releases(folder: Path) -> tuple[dict[str, bytes], dict[str, bytes]]:
    """What undisturbed builds give for the manifest as it is and with another scale factor."""
    built(folder)
    one = release(folder)
    edit(folder / "heatwright.toml", {"frequency-scale = 0.96": "frequency-scale = 0.97"})
    built(folder)
    two = release(folder)
    assert sorted(one) == sorted(two) == ["thermo.dat", "thermo.lock.toml", "thermo.yaml"]
    assert all(one[name] != two[name] for name in one)
    return one, two


def kill_and_look(folder: Path, moment_s: float, allowed: tuple[dict[str, bytes], ...], *more: str) -> bool:
    """Kill a build at a moment; the release is one of those allowed, the store opens; whether the build was done."""
    process = subprocess.Popen(command(folder, *more), stderr=subprocess.DEVNULL)
    try:
        process.wait(timeout=moment_s)
    except subprocess.TimeoutExpired:
        process.send_signal(signal.SIGKILL)
        process.wait()
    if (folder / "release").exists():
        assert release(folder) in allowed
    else:
        assert {} in allowed
    store = folder / ".heatwright.sqlite"
    if store.exists():
        connection = sqlite3.connect(f"file:{store}?mode=ro", uri=True)
        try:
            assert connection.execute("PRAGMA quick_check").fetchone() == ("ok",)
        finally:
            connection.close()
    return process.returncode == 0


def killed_again_and_again(tmp_path: Path, kills: int, seed: int, *more: str) -> None:
    draw = random.Random(seed)
    one, two = two_releases(sixty_species(tmp_path / "undisturbed"))
    folder = sixty_species(tmp_path / "disturbed")
    start = time.perf_counter()
    subprocess.run(command(folder, *more), check=True, stderr=subprocess.DEVNULL)
    span_s = 1.2 * (time.perf_counter() - start)
    assert release(folder) == one
    manifest, scales = folder / "heatwright.toml", ("frequency-scale = 0.96", "frequency-scale = 0.97")
    done = 0
    for number in range(kills):
        old, new = (one, two) if release(folder) == one else (two, one)
        here, there = scales if old is one else scales[::-1]
        if there not in manifest.read_text():
            edit(manifest, {here: there})
        if number % 3 == 0:  # so that outputs are read too when it is killed
            (folder / ".heatwright.sqlite").unlink(missing_ok=True)
        start = time.perf_counter()
        if kill_and_look(folder, draw.uniform(0.0, span_s), (old, new), *more):
            done += 1
            span_s = 1.2 * (time.perf_counter() - start)
        else:  # what a build takes depends on what else the machine does
            span_s *= 1.1
    assert 0 < done < kills, "the moments were all too early or all too late to say something"
    subprocess.run(command(folder), check=True, stderr=subprocess.DEVNULL)
    assert release(folder) == (two if scales[1] in manifest.read_text() else one)
    assert not [p.name for p in folder.iterdir() if p.name.startswith(".release")]


def test_twenty_moments(tmp_path: Path) -> None:
    killed_again_and_again(tmp_path, 20, 20240229)


@pytest.mark.long
def test_two_hundred_moments(tmp_path: Path) -> None:
    killed_again_and_again(tmp_path, 200, 1)


@pytest.mark.long
def test_fifty_moments_with_two_processes(tmp_path: Path) -> None:
    killed_again_and_again(tmp_path, 50, 2, "-j", "2")


def test_the_first_build_killed_leaves_nothing_or_everything(tmp_path: Path) -> None:
    folder = sixty_species(tmp_path / "p")
    built(sixty_species(tmp_path / "undisturbed"))
    whole = release(tmp_path / "undisturbed")
    for moment in (0.3, 0.8, 1.2, 1.6):
        kill_and_look(folder, moment, ({}, whole))
    subprocess.run(command(folder), check=True, stderr=subprocess.DEVNULL)
    assert release(folder) == whole


def test_two_builds_at_the_same_time(tmp_path: Path) -> None:
    one, two = two_releases(sixty_species(tmp_path / "undisturbed"))
    folder = sixty_species(tmp_path / "p")
    both = [subprocess.Popen([*command(folder)], stderr=subprocess.PIPE) for _ in range(2)]
    words = [process.communicate(timeout=120)[1] for process in both]
    assert [process.returncode for process in both] == [0, 0], words
    assert release(folder) == one
    # two mechanisms that share one store
    other = sixty_species(tmp_path / "q")
    edit(other / "heatwright.toml", {"frequency-scale = 0.96": "frequency-scale = 0.97"})
    (folder / ".heatwright.sqlite").unlink()
    for place in (folder, other):
        edit(place / "heatwright.toml", {"[mechanism]\n": f'[mechanism]\nstore = "{tmp_path}/shared.sqlite"\n'})
        for name in ("thermo.dat", "thermo.yaml", "thermo.lock.toml"):
            (place / "release" / name).unlink(missing_ok=True)
    both = [subprocess.Popen([*command(place)], stderr=subprocess.PIPE) for place in (folder, other)]
    words = [process.communicate(timeout=120)[1] for process in both]
    assert [process.returncode for process in both] == [0, 0], words
    assert (release(folder), release(other)) == (one, two)


def descendants(pid: int) -> list[int]:
    """The processes under one, by the table of processes (where there is one)."""
    parents: dict[int, int] = {}
    for file in Path("/proc").glob("[0-9]*/stat"):
        with contextlib.suppress(OSError):  # a process may have gone meanwhile
            parents[int(file.parent.name)] = int(file.read_text().rpartition(")")[2].split()[1])
    found, new = [], [pid]
    while new:
        new = [child for child, parent in parents.items() if parent in new]
        found += new
    return found


def alive(pid: int) -> bool:
    """Whether a process is there and no mere entry in the table."""
    try:
        return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] != "Z"
    except (FileNotFoundError, ProcessLookupError):
        return False


@pytest.mark.skipif(not Path("/proc/self/stat").exists(), reason="there is no /proc to look for processes")
def test_workers_end_with_a_driver_that_is_killed(tmp_path: Path) -> None:
    folder = sixty_species(tmp_path / "p")
    process = subprocess.Popen(command(folder, "-j", "2"), stderr=subprocess.DEVNULL)
    started: list[int] = []
    end = time.monotonic() + 30.0
    while process.poll() is None and len(started) < 4 and time.monotonic() < end:  # server, tracker, two workers
        started = descendants(process.pid)
        time.sleep(0.02)
    process.kill()
    process.wait()
    assert len(started) >= 4
    end = time.monotonic() + 30.0
    while any(map(alive, started)) and time.monotonic() < end:
        time.sleep(0.1)
    assert [pid for pid in started if alive(pid)] == []


def test_interrupted_by_the_keyboard(tmp_path: Path) -> None:
    folder = sixty_species(tmp_path / "p")
    process = subprocess.Popen(command(folder, "-j", "2"), stderr=subprocess.PIPE, text=True, start_new_session=True)
    time.sleep(1.5)
    if process.poll() is None:
        os.killpg(process.pid, signal.SIGINT)
    _, words = process.communicate(timeout=60)
    assert process.returncode in (0, 130, -signal.SIGINT)  # a shell calls both of the last two 130
    assert "Traceback" not in words
    subprocess.run(command(folder), check=True, stderr=subprocess.DEVNULL)
    assert len(release(folder)) == 3
