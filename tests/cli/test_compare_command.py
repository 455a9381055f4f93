"""``heatwright compare``: what it prints, its JSON, and when a check says no."""

from __future__ import annotations

import json
import shutil
from dataclasses import replace
from pathlib import Path

import cantera as ct
import pytest

from heatwright.project.lockfile import LockedFile
from heatwright.project.thermo_set import Thermo
from releases import GRI, dat_text, gri, moved, record, write_release

NAMES = ("H2O", "CH3OH", "CH4", "CO2", "OH")


@pytest.fixture(scope="module")
def releases(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Path]:
    """Two releases that differ in methanol, whose output changed."""
    folder = tmp_path_factory.mktemp("releases")
    old = gri(*NAMES)
    new = {**old, "CH3OH": replace(old["CH3OH"], polynomial=moved(old["CH3OH"].polynomial, dH_kJ_mol=2.0))}
    records = {n: record(n, t) for n, t in new.items()}
    records["CH3OH"] = replace(records["CH3OH"], files=(LockedFile("output", "CH3OH.out", "cd" * 32),))
    return write_release(folder / "old", old), write_release(folder / "new", new, records)


def test_one_species_its_reason_and_its_reactions(run, releases: tuple[Path, Path]) -> None:
    done = run("compare", *releases, "--mechanism", GRI)
    assert done.code == 0
    lines = done.out.splitlines()
    assert "1 changed, 4 identical." in lines
    at = next(i for i, line in enumerate(lines) if line.startswith("CH3OH"))
    assert lines[at].split()[:3] == ["CH3OH", "changed", "+2.000"]
    assert lines[at + 1] == "  output changed: CH3OH.out"
    rows = [line for line in lines[at + 2 :] if "=>" in line]
    reactions = ct.Solution(str(GRI)).reactions()
    expected = [i for i, r in enumerate(reactions, 1) if "CH3OH" in r.reactants or "CH3OH" in r.products]
    assert sorted(int(row.lstrip(" *").split()[0]) for row in rows) == expected
    assert f"{len(expected)} of 325 reactions" in done.out
    # no other species is named outside those equations
    assert not any(line.startswith(name + " ") for line in lines for name in NAMES if name != "CH3OH")


MANIFEST = """
[mechanism]
name = "pilot"
pressure = "1atm"
atoms = "sample_outputs/atoms"
[species.CH3OH]
output = "sample_outputs/CH3OH.out"
[species.H2O]
output = "sample_outputs/H2O.out"
"""


def test_two_builds_that_differ_in_one_species(run, samples: Path, tmp_path: Path, monkeypatch) -> None:
    shutil.copytree(samples, tmp_path / "sample_outputs")
    monkeypatch.chdir(tmp_path)
    manifest, release, old = (tmp_path / name for name in ("heatwright.toml", "release", "old"))
    manifest.write_text(MANIFEST, encoding="utf-8")
    assert run("build").code == 0
    shutil.copytree(release, old)
    manifest.write_text(MANIFEST.replace('CH3OH.out"', 'CH3OH.out"\nfrequency-scale = 0.9614'), encoding="utf-8")
    with (tmp_path / "sample_outputs" / "H2O.out").open("a", encoding="utf-8") as stream:
        stream.write("\n")  # another file, the same numbers
    assert run("build").code == 0
    done = run("compare", old, release, "--mechanism", GRI, "--json")
    changed, same = json.loads(done.out)["species"]
    assert (changed["name"], changed["kind"]) == ("CH3OH", "changed")
    assert changed["reasons"] == ["options changed: frequency-scale default → 0.9614"]
    assert (same["name"], same["kind"], same["moved"]) == ("H2O", "identical", False)
    assert same["reasons"] == ["output changed: sample_outputs/H2O.out"]
    numbers = [r["number"] for r in json.loads(done.out)["mechanism"]["reactions"]]
    reactions = ct.Solution(str(GRI)).reactions()
    assert sorted(numbers) == [i for i, r in enumerate(reactions, 1) if "CH3OH" in {**r.reactants, **r.products}]
    # the lock files alone say the same to what the polynomials leave
    locked = json.loads(run("compare", old / "thermo.lock.toml", release / "thermo.lock.toml", "--json").out)
    assert locked["species"][0]["dG_kJ_mol"][:3] == pytest.approx(changed["dG_kJ_mol"][:3], abs=0.02)
    # and an entry changed by hand is noticed
    text = (release / "thermo.dat").read_text(encoding="utf-8")
    (release / "thermo.dat").write_text(text.replace("G   200.000", "G   250.000", 1), encoding="utf-8")
    assert run("compare", old, release).err.count("[entry-edited]") == 2


def test_json_holds_the_same(run, releases: tuple[Path, Path]) -> None:
    options = ("--mixture", "fuel=CH4", "--json", "--temperatures", "1000,2000")
    done = run("compare", *releases, "--mechanism", GRI, *options)
    document = json.loads(done.out)
    assert document["heatwright"] == 1
    assert document["temperatures_K"] == [1000.0, 2000.0]
    first, *others = document["species"]
    assert (first["name"], first["kind"], first["moved"]) == ("CH3OH", "changed", True)
    assert first["ddHf298_kJ_mol"] == pytest.approx(2.0, abs=1e-5)
    assert first["dG_kJ_mol"] == pytest.approx([2.0, 2.0], abs=1e-5)
    assert first["reasons"] == ["output changed: CH3OH.out"]
    assert {s["kind"] for s in others} == {"identical"}
    assert document["mechanism"]["n_reactions"] == 325
    assert {tuple(r["species"]) for r in document["mechanism"]["reactions"]} == {("CH3OH",)}
    assert all(len(r["dlnKc"]) == 2 for r in document["mechanism"]["reactions"])
    assert document["flame"]["shift_K"] == pytest.approx(0.0, abs=0.01)
    assert document["moved"][0] == "1 species changed: CH3OH"
    assert document["findings"] == []


def test_a_check(run, releases: tuple[Path, Path]) -> None:
    old, new = releases
    done = run("compare", old, new, "--check")
    assert done.code == 1
    assert "check: 1 species changed: CH3OH" in done.err
    assert run("compare", old, old, "--check").code == 0
    assert run("compare", old, new).code == 0
    assert run("compare", old, new, "--check", "--tolerance", "H=2.5,G=2.5").code == 0
    assert run("compare", old, new, "--check", "--tolerance", "H=2.5").code == 1


def test_a_check_of_reverse_rates_and_of_the_flame(run, releases: tuple[Path, Path]) -> None:
    wide = ("--check", "--tolerance", "H=2.5,G=2.5,flame=0.5", "--mechanism", GRI)
    # within the tolerance methanol has not moved, so no reaction is concerned
    assert run("compare", *releases, *wide).code == 0
    narrow = ("--check", "--tolerance", "H=1,G=1", "--mechanism", GRI)
    done = run("compare", *releases, *narrow, "--factor", "1.2")
    assert done.code == 1
    assert "move by more than a factor of 1.2" in done.err
    assert "factor" not in run("compare", *releases, *narrow, "--factor", "2").err
    burnt = run("compare", *releases, *wide, "--mixture", "fuel=CH3OH; phi=1")
    assert burnt.code == 1
    assert "check: the flame moves by" in burnt.err
    assert "K with OLD's entries" in burnt.out


def test_what_makes_a_check_say_no(run, tmp_path: Path) -> None:
    old = gri(*NAMES)

    def file(name: str, species: dict[str, Thermo], head: str = "") -> Path:
        (tmp_path / name).write_text(head + dat_text(species), encoding="utf-8")
        return tmp_path / name

    a = file("a.dat", old)
    assert run("compare", a, file("more.dat", {**old, **gri("N2")}), "--check").code == 0
    fewer = file("fewer.dat", {n: t for n, t in old.items() if n != "OH"})
    assert "check: 1 species removed: OH" in run("compare", a, fewer, "--check").err
    assert run("compare", a, fewer, "--check", "--common").code == 0
    renamed = file("renamed.dat", {("X" if n == "OH" else n): t for n, t in old.items()})
    assert "check: 1 species renamed: X" in run("compare", a, renamed, "--check").err
    other = file("other.dat", {**old, "OH": replace(old["OH"], composition={"O": 1, "D": 1})})
    assert "check: 1 species with other elements or counts: OH" in run("compare", a, other, "--check").err
    bar, atm = (file(f"{p}.dat", old, f"! standard pressure 1 {p}\n") for p in ("bar", "atm"))
    done = run("compare", bar, atm, "--check")
    assert done.code == 1
    assert "check: the standard pressures differ" in done.err
    assert "[pressure-differs]" in done.err


def test_an_entry_that_cannot_be_read_is_an_error_and_the_others_are_compared(run, tmp_path: Path) -> None:
    good, bad = tmp_path / "a.dat", tmp_path / "b.dat"
    good.write_text(dat_text(gri(*NAMES)), encoding="utf-8")
    lines = dat_text(gri(*NAMES)).splitlines(keepends=True)
    lines[3] = " " * 15 + lines[3][15:]
    bad.write_text("".join(lines), encoding="utf-8")
    done = run("compare", good, bad, "--check")
    assert done.code == 3
    assert f"error: {bad}:4:1: " in done.err
    assert "not compared, since an entry cannot be read: H2O" in done.err
    assert "4 identical." in done.out


def test_units_are_for_reading_only(run, releases: tuple[Path, Path]) -> None:
    done = run("compare", *releases, "--units", "kcal")
    assert "kcal/mol" in done.out
    assert "+0.478" in done.out  # 2 kJ/mol in kcal/mol
    assert run("compare", *releases, "--units", "kcal", "--json").out == run("compare", *releases, "--json").out


def test_everything_is_shown_on_request(run, releases: tuple[Path, Path]) -> None:
    shown = run("compare", *releases, "-v").out
    assert all(f"\n{name} " in shown for name in NAMES)


@pytest.mark.parametrize(
    ("options", "code", "words"),
    [
        (("none.dat",), 3, "file-missing"),
        (("{gri}", "--mechanism", "none.yaml"), 3, "file-missing"),
        (("{gri}", "--mechanism", "{gri}", "--phase", "x"), 3, "there is no phase x"),
        (("{gri}", "--mechanism", "{gri}", "--mixture", "fuel=XYZ"), 3, "does not have"),
        (("{gri}", "--mixture", "fuel=CH4"), 2, "--mechanism FILE"),
        (("{gri}", "--mechanism", "{gri}", "--mixture", "CH4"), 2, "--mixture 'CH4'"),
        (("{gri}", "--factor", "1"), 2, "--factor 1"),
        (("{gri}", "--factor", "nan"), 2, "--factor nan"),
        (("{gri}", "--tolerance", "H:1"), 2, "--tolerance 'H:1'"),
        (("{gri}", "--temperatures", "0"), 2, "not positive"),
    ],
)
def test_bad_input_gets_a_sentence(run, options: tuple[str, ...], code: int, words: str) -> None:
    done = run("compare", GRI, *(o.format(gri=GRI) for o in options))
    assert done.code == code
    assert words in done.err


def test_a_folder_without_a_release(run, tmp_path: Path) -> None:
    done = run("compare", tmp_path, GRI)
    assert done.code == 3
    assert "[no-release]" in done.err


def test_a_lock_file_of_the_future(run, tmp_path: Path) -> None:
    path = tmp_path / "thermo.lock.toml"
    path.write_text("heatwright-lock = 99\n", encoding="utf-8")
    done = run("compare", path, GRI)
    assert done.code == 3
    assert "[lock-newer]" in done.err


def test_what_is_no_thermo_file_is_said_to_be_none(run, samples: Path, tmp_path: Path) -> None:
    output, manifest = samples / "H2O.out", samples / "heatwright.toml"
    numbers = tmp_path / "numbers.txt"
    numbers.write_text("THERMO ALL\n" + f"{'X 1.0 2.0':79}1\n" * 5, encoding="utf-8")
    for file, words, errors in (
        (output, "the file is an output of NWChem", 1),
        (numbers, "the file holds no entry that can be read", 4),  # three of the faults, as it may be one after all
    ):
        for old, new in ((file, GRI), (GRI, file)):
            done = run("compare", old, new)
            assert (done.code, done.out) == (3, "")
            assert f"error: {file}: {words}; expected a thermo file" in done.err
            assert done.err.count("error: ") == errors
    assert run("splice", output, GRI, "-n").code == 3
    done = run("compare", manifest, GRI)
    assert (done.code, done.out) == (3, "")
    assert "this is a manifest; expected a release, a lock file or a thermo file. Give the folder of" in done.err
