"""A dask scheduler with two workers on loopback: the same bytes, also when a worker is killed half-way."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

from heatwright.findings import Refused
from heatwright.project.executors import Engine, engine_for
from projects import SAMPLES, Told, built, project, release

distributed = pytest.importorskip("distributed", reason="dask.distributed, the extra heatwright[cluster], is not here")
pytestmark = pytest.mark.filterwarnings("default")  # of the scheduler's own

NAMES = sorted(p.stem for p in SAMPLES.glob("*.out"))


WAIT_S = 120.0
"""For what starts in two seconds on an idle machine."""


@contextmanager
def cluster(folder: Path, workers: int) -> Iterator[tuple[Path, list[subprocess.Popen[bytes]]]]:
    """The scheduler file of a cluster with so many workers, and the processes of the workers."""
    file = folder / "scheduler.json"
    log = (folder / "cluster.log").open("wb")
    started: list[subprocess.Popen[bytes]] = []

    def start(module: str, *options: str) -> None:
        command = [sys.executable, "-m", module, *options, "--scheduler-file", str(file), "--no-dashboard"]
        started.append(subprocess.Popen(command, cwd=folder, stdout=log, stderr=log))

    try:
        start("distributed.cli.dask_scheduler", "--host", "127.0.0.1", "--port", "0")  # a free one
        for _ in range(workers):  # they wait for the file
            start("distributed.cli.dask_worker", "--nthreads", "1", "--no-nanny")
        wait_for(file.exists, started, folder / "cluster.log")
        with distributed.Client(scheduler_file=str(file), timeout=WAIT_S) as client:
            if workers:
                client.wait_for_workers(workers, timeout=WAIT_S)
        yield file, started[1:]
    finally:
        for process in reversed(started):
            process.kill()
            process.wait()
        log.close()


def wait_for(there: Callable[[], bool], started: list[subprocess.Popen[bytes]], log: Path) -> None:
    """Wait until something is there; fail with what the processes said when one of them ends, or it takes too long."""
    end = time.monotonic() + WAIT_S
    while not there():
        ended = any(process.poll() is not None for process in started)
        if ended or time.monotonic() > end:
            pytest.fail(f"the cluster does not start: {log.read_text(errors='replace')}")
        time.sleep(0.05)


def many(folder: Path) -> Path:
    """Every sample output four times, with another title each."""
    project(folder)
    tables = []
    for copy in range(4):
        for name in NAMES:
            text = (SAMPLES / f"{name}.out").read_text()
            (folder / f"{name}{copy}.out").write_text(f"# copy {copy}\n{text}")
            tables.append(f'[species.{name}{copy}]\noutput = "{name}{copy}.out"\n')
    manifest = folder / "heatwright.toml"
    manifest.write_text(manifest.read_text() + "\n".join(tables))
    return folder


def engine(file: Path) -> Engine:
    return engine_for(1, str(file))


class Killing(Told):
    """Kills a worker when half of the outputs are read."""

    def __init__(self, victim: subprocess.Popen[bytes] | None) -> None:
        super().__init__()
        self.victim = victim

    def reading(self, done: int, total: int, path: str) -> None:
        super().reading(done, total, path)
        if self.victim is not None and total > 10 and done == total // 2:
            self.victim.send_signal(signal.SIGKILL)


@pytest.mark.parametrize("killed", [False, True], ids=["undisturbed", "one worker killed half-way"])
def test_the_same_bytes(tmp_path: Path, killed: bool) -> None:
    here, there = many(tmp_path / "here"), many(tmp_path / "there")
    built(here)
    with cluster(tmp_path, 2) as (file, workers):
        work = engine(file)
        try:
            outcome, told = built(there, engine=work, told=Killing(workers[0] if killed else None))
        finally:
            work.close()
        if killed:
            workers[0].wait(WAIT_S)
        assert (workers[0].poll() is not None) == killed
    assert outcome.failed == ()
    assert len(told.read) == 4 + 4 * len(NAMES)
    assert release(there) == release(here)


def test_a_changed_file_is_read_again(tmp_path: Path) -> None:
    folder = project(tmp_path / "p", "H2O")
    with cluster(tmp_path, 1) as (file, _):
        work = engine(file)
        try:
            built(folder, engine=work)
            (folder / "H2O.out").write_text((SAMPLES / "CO2.out").read_text())
            _, told = built(folder, engine=work)
        finally:
            work.close()
    assert told.read == ["H2O.out"]
    assert b'formula = "CO2"' in release(folder)["thermo.lock.toml"]


def test_a_scheduler_without_workers_is_refused_before_anything_is_sent(tmp_path: Path) -> None:
    with cluster(tmp_path, 0) as (file, _), pytest.raises(Refused, match="the scheduler has no workers"):
        engine(file)


def test_workers_with_another_reader_are_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    from heatwright.project import fingerprint

    with cluster(tmp_path, 1) as (file, _):
        monkeypatch.setattr(fingerprint, "reader_fingerprint", _another)
        with pytest.raises(Refused, match="has another heatwright"):
            engine(file)


def _another() -> str:
    return f"another {os.getpid()}"
