"""The store: whatever happens to its file, nothing but the memory of earlier builds is lost."""

from __future__ import annotations

import os
import sqlite3
import subprocess
import sys
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest

from heatwright.findings import Finding
from heatwright.project import build as work
from heatwright.project import library, pipeline
from heatwright.project.build import dry_run
from heatwright.project.coding import Unreadable, decoded, encoded
from heatwright.project.manifest import load_manifest
from heatwright.project.store import STORE_VERSION, Store
from heatwright.reading.outputs import read_output
from projects import SAMPLES, Told, built, edit, project, release


def opened(path: Path, **options: bool) -> tuple[Store, list[Finding]]:
    said: list[Finding] = []
    return Store(str(path), said.append, **options), said


def test_what_is_put_is_there_for_the_next_one(tmp_path: Path) -> None:
    path = tmp_path / "deep" / "store.sqlite"
    store, said = opened(path)
    with store:
        store.put({f"k:{i}": bytes([i]) for i in range(200)})
        assert store.get(["k:1", "k:none"]) == {"k:1": b"\x01"}
    store, _ = opened(path)
    with store:
        assert len(store.get(f"k:{i}" for i in range(1000))) == 200
        assert store.has(["k:3", "k:300"]) == {"k:3"}
        store.drop("k:3")
        assert store.has(["k:3"]) == set()
    assert said == []


def damaged(path: Path, how: str) -> None:
    """A store that cannot be used any more."""
    with opened(path)[0] as store:
        store.put({f"k:{i}": os.urandom(5000) for i in range(100)})
    if how == "garbage":
        path.write_bytes(b"this is no database at all" * 100)
    elif how == "cut off":
        path.write_bytes(path.read_bytes()[:20000])
    elif how == "overwritten":
        data = bytearray(path.read_bytes())
        data[4096 : len(data) // 2] = os.urandom(len(data) // 2 - 4096)
        path.write_bytes(bytes(data))
    elif how == "older":
        with sqlite3.connect(path) as connection:
            connection.execute(f"PRAGMA user_version = {STORE_VERSION + 1}")
        connection.close()
    else:
        path.unlink()
        with sqlite3.connect(path) as connection:
            connection.execute("CREATE TABLE something (a)")
        connection.close()


@pytest.mark.parametrize("how", ["garbage", "cut off", "overwritten", "older", "another database"])
def test_an_unusable_file_is_set_aside_and_made_anew(tmp_path: Path, how: str) -> None:
    path = tmp_path / "store.sqlite"
    damaged(path, how)
    store, said = opened(path)
    with store:
        found = store.get(f"k:{i}" for i in range(100))
        store.put({"new": b"1"})
        store.flush()
        assert store.get(["new"]) == {"new": b"1"}
    assert [f.code for f in said] == ["store-set-aside"]
    assert (tmp_path / "store.sqlite.aside").exists()
    assert found == {}
    store, said = opened(path)
    with store:
        assert store.get(["new"]) == {"new": b"1"}
    assert said == []


def test_two_set_aside_do_not_overwrite_each_other(tmp_path: Path) -> None:
    path = tmp_path / "store.sqlite"
    for _ in range(2):
        path.write_bytes(b"no database" * 1000)
        opened(path)[0].close()
    assert sorted(p.name for p in tmp_path.iterdir() if "aside" in p.name and "-" not in p.name) == [
        "store.sqlite.aside",
        "store.sqlite.aside.2",
    ]


def test_a_build_on_a_broken_store_gives_the_same_bytes(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    built(folder)
    good = release(folder)
    for name in ("thermo.dat", "thermo.yaml", "thermo.lock.toml"):
        (folder / "release" / name).unlink()
    (folder / ".heatwright.sqlite").write_bytes(b"\0" * 9999)
    _, told = built(folder)
    assert [f.code for f in told.findings] == ["store-set-aside"]
    assert release(folder) == good


class FullAfter(Store):
    """A store whose disk is full after so many pages."""

    pages = 4

    def _open(self) -> None:
        super()._open()
        if self._connection is not None:
            self._connection.execute(f"PRAGMA max_page_count = {self.pages}")


def test_a_full_disk_loses_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    folder = project(tmp_path, "CO2", "H2O", "CH3OCH3")
    built(folder)
    good = release(folder)
    edit(folder / "heatwright.toml", {"0.96": "0.97"})
    built(folder)
    changed = release(folder)
    edit(folder / "heatwright.toml", {"0.97": "0.96"})
    (folder / ".heatwright.sqlite").unlink()
    monkeypatch.setattr("heatwright.project.build.Store", FullAfter)
    outcome, told = built(folder)
    assert [f.code for f in told.findings] == ["store-off"]
    assert "full" in told.findings[0].found
    assert sorted(outcome.made) == ["CH3OCH3", "CO2", "H2O"]
    assert release(folder) == good != changed
    monkeypatch.undo()
    edit(folder / "heatwright.toml", {"0.96": "0.97"})
    _, told = built(folder)
    assert told.findings == []
    assert release(folder) == changed


def test_a_full_disk_while_the_release_is_written_leaves_the_old_one(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from heatwright.findings import Refused
    from heatwright.project import release as place

    folder = project(tmp_path, "CO2", "H2O")
    built(folder)
    good = release(folder)
    edit(folder / "heatwright.toml", {"0.96": "0.97"})
    real = place._write

    def full(path: str, data: bytes) -> None:
        if path.endswith(".yaml"):
            real(path, data[: len(data) // 2])
            raise OSError(28, "No space left on device")
        real(path, data)

    monkeypatch.setattr(place, "_write", full)
    with pytest.raises(Refused, match="No space left on device"):
        built(folder)
    assert release(folder) == good
    assert not [p for p in folder.iterdir() if p.name.startswith(".release")]
    monkeypatch.undo()
    _, told = built(folder)
    assert told.read == []
    assert release(folder) != good


@pytest.mark.skipif(os.geteuid() != 0, reason="only root can mount a file system")
def test_a_small_file_system_that_fills_up(tmp_path: Path) -> None:
    place = tmp_path / "small"
    place.mkdir()
    mounted = subprocess.run(
        ["mount", "-t", "tmpfs", "-o", "size=1500k", "tmpfs", str(place)], capture_output=True, check=False
    )
    if mounted.returncode:
        pytest.skip("a file system cannot be mounted here")
    try:
        folder = project(tmp_path / "roomy", "CO2", "H2O", "CH3OCH3")
        built(folder)
        good = release(folder)
        (folder / ".heatwright.sqlite").unlink()
        edit(
            folder / "heatwright.toml",
            {"[mechanism]\n": f'[mechanism]\nstore = "{place}/store.sqlite"\nrelease = "{place}/release"\n'},
        )
        (place / "ballast").write_bytes(b"x" * 1_450_000)
        from heatwright.findings import Refused

        with pytest.raises(Refused, match="No space left"):
            built(folder)
        assert not (place / "release").exists()
        (place / "ballast").unlink()
        built(folder)
        names = sorted(p.name for p in (place / "release").iterdir())
        assert names == sorted(good)
        assert (place / "release" / "thermo.dat").read_bytes() == good["thermo.dat"]
    finally:
        subprocess.run(["umount", str(place)], check=False)


WRITER = """
import sys
from heatwright.project.manifest import load_manifest
from heatwright.project.store import Store
said = []
with Store(sys.argv[1], said.append) as store:
    for i in range(300):
        store.put({f"{sys.argv[2]}:{i}": bytes(2000)})
        store.get([f"a:{i}", f"b:{i}"])
sys.exit(len(said))
"""


def test_two_at_once(tmp_path: Path) -> None:
    path = tmp_path / "store.sqlite"
    both = [subprocess.Popen([sys.executable, "-c", WRITER, str(path), name]) for name in ("a", "b")]
    assert [one.wait(timeout=120) for one in both] == [0, 0]
    with opened(path)[0] as store:
        assert len(store.has(f"{name}:{i}" for name in ("a", "b") for i in range(300))) == 600


def test_a_read_only_store_is_never_made_nor_written(tmp_path: Path) -> None:
    path = tmp_path / "store.sqlite"
    store, said = opened(path, read_only=True)
    with store:
        store.put({"k": b"1"})
        assert store.get(["k"]) == {"k": b"1"}
    assert (said, path.exists()) == ([], False)
    with opened(path)[0] as store:
        store.put({"k": b"2"})
    store, _ = opened(path, read_only=True)
    with store:
        store.put({"k": b"3", "l": b"4"})
    with opened(path)[0] as store:
        assert store.get(["k", "l"]) == {"k": b"2"}


def test_a_dry_run_leaves_nothing_behind(tmp_path: Path) -> None:
    folder = project(tmp_path, "H2O")
    built(folder)
    before = {path.name: path.read_bytes() for path in folder.iterdir() if path.is_file()}
    assert dry_run(load_manifest(folder), Told()).is_done
    assert {path.name: path.read_bytes() for path in folder.iterdir() if path.is_file()} == before


def test_a_store_that_may_not_be_written_is_read_all_the_same(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "store.sqlite"
    with opened(path)[0] as store:
        store.put({"k": b"1"})
    before = path.read_bytes()
    monkeypatch.setattr(os, "access", lambda *_: False)  # root may write anywhere
    store, said = opened(path, read_only=True)
    with store:
        assert store.get(["k"]) == {"k": b"1"}
    assert (said, path.read_bytes(), [p.name for p in tmp_path.iterdir()]) == ([], before, ["store.sqlite"])


def kinds(store: Path) -> dict[str, int]:
    """How many values of each kind are in a store."""
    connection = sqlite3.connect(store)
    rows = connection.execute("SELECT substr(key, 1, instr(key, ':') - 1), count(*) FROM kept GROUP BY 1").fetchall()
    connection.close()
    return dict(rows)


def test_changing_options_again_and_again_does_not_make_the_store_grow(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(pipeline, "_WORTH_KEEPING_S", 0.0)  # every entry is kept until it is released
    folder = project(tmp_path, "H2O", "CO2")
    built(folder)
    first = kinds(folder / ".heatwright.sqlite")
    scales = [f"frequency-scale = {0.9 + i / 100}" for i in range(5)]
    for old, new in pairwise(["frequency-scale = 0.96", *scales]):
        edit(folder / "heatwright.toml", {old: new})
        built(folder)
    assert kinds(folder / ".heatwright.sqlite") == first
    assert "result" not in first


def test_what_was_finished_is_kept_until_it_is_released(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(pipeline, "_WORTH_KEEPING_S", 0.0)
    folder = project(tmp_path, "H2O", "CO2")
    with monkeypatch.context() as patch:
        patch.setattr(work, "switch", interrupted)
        with pytest.raises(KeyboardInterrupt):
            built(folder)
    assert kinds(folder / ".heatwright.sqlite")["result"] == 2
    outcome, told = built(folder)
    assert (outcome.made, told.read) == (("CO2", "H2O"), [])
    assert "result" not in kinds(folder / ".heatwright.sqlite")


def interrupted(*_: object) -> None:
    raise KeyboardInterrupt


# --- what is kept: molecules as bytes ------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["CH3OCH3.out", "OH.out", "atoms/O.out"])
def test_molecules_survive_to_the_last_bit(name: str) -> None:
    molecule = read_output(SAMPLES / name, with_hessian=True)
    data = encoded(molecule)
    back = decoded(data)
    assert encoded(back) == data
    assert (back.coordinates_A == molecule.coordinates_A).all()
    assert (back.source, back.level, back.findings, back.printed) == (
        molecule.source,
        molecule.level,
        molecule.findings,
        molecule.printed,
    )
    assert dict(back.energies_hartree) == dict(molecule.energies_hartree)


def test_damaged_bytes_are_noticed_wherever_they_are() -> None:
    data = encoded((np.arange(50.0), "text", {"a": (1, None, True, 2.5)}))
    decoded(data)
    for i in range(len(data)):
        broken = data[:i] + bytes([data[i] ^ 0x55]) + data[i + 1 :]
        with pytest.raises(Unreadable):
            decoded(broken)
    for end in (0, 1, len(data) // 2, len(data) - 1):
        with pytest.raises(Unreadable):
            decoded(data[:end])


def test_unknown_types_are_not_taken() -> None:
    for value in (object(), {1, 2}, np.array(["a"]), Path("x")):
        with pytest.raises(TypeError):
            encoded(value)


def test_a_damaged_value_in_the_store_is_as_good_as_missing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(pipeline, "_WORTH_KEEPING_S", 0.0)
    monkeypatch.setattr(library, "_SETTLED_NS", 0)  # the hashes of files that are new are kept too
    folder = project(tmp_path / "p", "CO2", "H2O")
    built(folder)
    edit(folder / "heatwright.toml", {"frequency-scale = 0.96": "frequency-scale = 0.97"})
    with monkeypatch.context() as patch:
        patch.setattr(work, "switch", interrupted)
        with pytest.raises(KeyboardInterrupt):
            built(folder)  # so that there are finished entries too
    store = folder / ".heatwright.sqlite"
    whole, before = store.read_bytes(), release(folder)
    assert set(kinds(store)) >= {"hash", "label", "lock", "read", "result"}
    connection = sqlite3.connect(store)
    values = dict(connection.execute("SELECT key, value FROM kept").fetchall())
    connection.close()
    good: dict[str, bytes] = {}
    for key in ("none", *values):
        store.write_bytes(whole)
        for name, data in before.items():
            (folder / "release" / name).write_bytes(data)
        if key != "none":
            value = bytearray(values[key])
            value[-3] ^= 1  # a digit of a hash, of a number, a letter
            with sqlite3.connect(store) as connection:
                connection.execute("UPDATE kept SET value = ? WHERE key = ?", (bytes(value), key))
            connection.close()
        outcome, told = built(folder)
        good = good or release(folder)
        assert (key, outcome.failed, told.findings) == (key, (), [])
        assert set(told.reason_texts.values()) == {"options changed (frequency-scale 0.96 -> 0.97)"}
        assert release(folder) == good
