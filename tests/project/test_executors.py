"""Executors: everything is done once, in whatever place, and a process that dies takes only its own task with it."""

from __future__ import annotations

import os
import signal
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pytest

import worker_tasks
from heatwright.findings import Refused
from heatwright.project.executors import Engine, ExecutorEngine, LocalProcesses, Lost, engine_for, portions, run
from projects import add_by_hand, built, project, release


@pytest.fixture
def two() -> Iterator[LocalProcesses]:
    engine = LocalProcesses(2)
    yield engine
    engine.close()


@pytest.mark.parametrize(
    "make", [Engine, lambda: LocalProcesses(2), lambda: ExecutorEngine(ThreadPoolExecutor(2), 2, "")]
)
def test_each_task_is_done_once(make: object) -> None:
    engine: Engine = make()  # type: ignore[operator]
    try:
        done = list(run(engine, worker_tasks.double, range(40)))
        assert sorted(done) == [(n, 2 * n) for n in range(40)]
    finally:
        engine.close()


def test_local_processes_are_other_processes(two: LocalProcesses) -> None:
    numbers = {n for _, n in run(two, worker_tasks.own_number, range(8))}
    assert len(numbers) == 2
    assert os.getpid() not in numbers


def test_a_task_that_kills_is_the_only_one_lost(two: LocalProcesses) -> None:
    done = dict(run(two, worker_tasks.kills_at_seven, range(20)))
    assert {n: v for n, v in done.items() if n != 7} == {n: 2 * n for n in range(20) if n != 7}
    lost = done[7]
    assert isinstance(lost, Lost)
    assert "died, 3 times" in lost.words


def test_a_task_whose_process_was_killed_is_done_again(two: LocalProcesses, tmp_path: Path) -> None:
    mark = str(tmp_path / "killed")
    done = list(run(two, worker_tasks.kills_once, [(n, mark) for n in range(20)]))
    assert sorted((n, v) for (n, _), v in done) == [(n, 2 * n) for n in range(20)]
    assert Path(mark).exists()


def test_a_worker_killed_from_outside_loses_nothing(two: LocalProcesses) -> None:
    done = []
    for n, value in run(two, worker_tasks.slow_double, range(40)):
        done.append((n, value))
        if len(done) == 10:
            assert two._pool is not None
            os.kill(next(iter(two._pool._processes)), signal.SIGKILL)
    assert sorted(done) == [(n, 2 * n) for n in range(40)]


def test_giving_up_early_leaves_nothing_behind(two: LocalProcesses) -> None:
    work = run(two, worker_tasks.slow_double, range(100))
    next(work)
    work.close()  # type: ignore[attr-defined]
    assert dict(run(two, worker_tasks.double, [1])) == {1: 2}


def test_a_build_in_two_processes_gives_the_same_bytes(tmp_path: Path, two: LocalProcesses) -> None:
    here, there = (project(tmp_path / name, "CO2", "H2O", "CH3", "OH") for name in ("here", "there"))
    built(here)
    outcome, told = built(there, engine=two)
    assert sorted(outcome.made) == ["CH3", "CO2", "H2O", "OH"]
    assert len(told.read) == 8
    assert release(here) == release(there)


def test_which_engine_the_options_mean() -> None:
    assert type(engine_for(1, None)) is Engine
    assert engine_for(3, None).words == "in 3 processes"


def test_a_scheduler_that_is_not_there_is_a_sentence() -> None:
    with pytest.raises(Refused) as error:
        engine_for(1, "tcp://127.0.0.1:9")
    assert [f.code for f in error.value.findings] == ["scheduler-unfit"]


def test_a_file_that_kills_its_readers_is_named_and_the_others_are_made(
    tmp_path: Path, two: LocalProcesses, monkeypatch: pytest.MonkeyPatch
) -> None:
    folder = project(tmp_path)
    add_by_hand(folder, 100)
    monkeypatch.setattr("heatwright.project.library.do_tasks", worker_tasks.reads_but_dies_of_one)
    outcome, told = built(folder, engine=two)
    assert outcome.failed == ("M050",)
    assert len(outcome.made) == 99
    assert [f.code for f in told.failures["M050"]] == ["worker-lost"]
    monkeypatch.undo()
    assert built(folder)[0].made == ("M050",)


def test_portions_hold_each_task_once() -> None:
    for count in (0, 1, 7, 100, 1001):
        for workers in (1, 2, 3, 50, 5000):
            cut = portions(range(count), workers)
            assert [task for portion in cut for task in portion] == list(range(count))
            assert len(cut) <= max(count, 1)
