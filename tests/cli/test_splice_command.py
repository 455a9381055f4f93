"""``heatwright splice``: the file it writes, what it says, and when it writes nothing."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest

from heatwright.constants import ATMOSPHERE_PA
from releases import GRI, dat_text, gri, moved, write_release


@pytest.fixture
def release(tmp_path: Path) -> Path:
    old = gri("CH3OH", "CH4")
    new = {n: replace(t, polynomial=moved(t.polynomial, dH_kJ_mol=2.0)) for n, t in old.items()}
    return write_release(tmp_path / "release", new, standard_pressure_Pa=ATMOSPHERE_PA)


def test_into_a_mechanism_and_back_in_comparison(run, release: Path, tmp_path: Path) -> None:
    target = tmp_path / "new.yaml"
    done = run("splice", release, GRI, "-o", target)
    assert (done.code, done.out) == (0, "")
    assert "2 entries replaced." in done.err
    assert "CH3OH" in done.err
    assert "+2.000" in done.err
    assert "2 changed, 51 identical." in run("compare", GRI, target).out
    assert run("compare", release, target, "--common", "--check").code == 0


def test_into_a_file_of_records(run, release: Path, tmp_path: Path) -> None:
    path = tmp_path / "therm.dat"
    path.write_text(dat_text(gri("CH4", "OH")), encoding="utf-8")
    before = path.read_bytes()
    done = run("splice", release, path, "-o", path)
    assert done.code == 3
    assert "[target-exists]" in done.err
    assert path.read_bytes() == before
    done = run("splice", release, path, "-o", path, "--force", "--pressure", "1atm")
    assert done.code == 0
    assert "1 not in the file and left out (--add puts them in): CH3OH." in done.err
    assert path.read_bytes() != before
    again = run("splice", release, path, "-n")
    assert "1 the same already: CH4." in again.err


def test_a_dry_run_writes_nothing(run, release: Path, tmp_path: Path) -> None:
    done = run("splice", release, GRI, "-n", "-o", tmp_path / "new.yaml", "--json")
    assert done.code == 0
    document = json.loads(done.out)
    assert document["written"] is None
    assert sorted((r["name"], r["kind"]) for r in document["replaced"]) == [("CH3OH", "changed"), ("CH4", "changed")]
    assert not (tmp_path / "new.yaml").exists()
    assert "2 entries to be replaced." in done.err


def test_nothing_is_written_when_anything_is_refused(run, release: Path, tmp_path: Path) -> None:
    text = GRI.read_text(encoding="utf-8")
    twice = tmp_path / "twice.yaml"
    start = text.index("- name: CH4\n")
    twice.write_text(text.replace("reactions:\n", text[start : text.index("- name: CO\n")] + "\nreactions:\n", 1))
    target = tmp_path / "new.yaml"
    done = run("splice", release, twice, "-o", target)
    assert done.code == 3
    assert "[duplicate-entry]" in done.err
    assert not target.exists()
    assert run("splice", release, twice, "-o", target, "--only", "CH3OH").code == 0
    assert target.exists()


@pytest.mark.parametrize(
    ("options", "code", "words"),
    [
        ((), 2, "-o NEW"),
        (("-n", "--only", "XYZ"), 3, "no usable entry of XYZ"),
        (("-n", "--pressure", "1bar"), 3, "pressure-differs"),
        (("-o", "no/such/folder/x.yaml"), 3, "target-unwritable"),
    ],
)
def test_bad_input_gets_a_sentence(run, release: Path, options: tuple[str, ...], code: int, words: str) -> None:
    done = run("splice", release, GRI, *options)
    assert done.code == code
    assert words in done.err


def test_files_that_are_not_there(run, release: Path, tmp_path: Path) -> None:
    for arguments in ((tmp_path / "none", GRI), (release, tmp_path / "none.yaml")):
        done = run("splice", *arguments, "-n")
        assert done.code == 3
        assert "[file-missing]" in done.err
