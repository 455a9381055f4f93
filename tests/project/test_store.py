"""The store: whatever happens to its file, nothing but the memory of earlier builds is lost."""

from __future__ import annotations

import os
import sqlite3
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from heatwright.findings import Finding
from heatwright.project.coding import Unreadable, decoded, encoded
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


def test_a_damaged_value_in_the_store_is_read_again(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    built(folder)
    good = release(folder)
    with sqlite3.connect(folder / ".heatwright.sqlite") as connection:
        connection.execute("UPDATE kept SET value = x'4D00' WHERE key LIKE 'read:%'")
        connection.execute("UPDATE kept SET value = x'7B' WHERE key LIKE 'result:%' OR key LIKE 'lock:%'")
        connection.execute("UPDATE kept SET value = x'00' WHERE key LIKE 'hash:%'")
    connection.close()
    for name in good:
        (folder / "release" / name).unlink()
    told = Told()
    built(folder, told=told)
    assert told.findings == []
    assert release(folder) == good
