"""The build: what is made and why, what stays as it was, and that the text is what the command line gives."""

from __future__ import annotations

import os
import shutil
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from heatwright.cli.main import main
from heatwright.findings import Refused
from heatwright.project.build import build, dry_run
from heatwright.project.executors import Engine
from heatwright.project.library import Library
from heatwright.project.lockfile import read_lock
from heatwright.project.manifest import load_manifest
from heatwright.project.manifest_types import ModelChoice, SpeciesRequest
from heatwright.project.plan import check_pressure
from heatwright.project.store import Store
from heatwright.project.tasks import ReadTask
from heatwright.project.watch import Watch
from outside import SHARED, needs_shared
from projects import MECHANISM, SAMPLES, Told, add_by_hand, built, edit, project, release

Run = Callable[..., tuple[int, str, str]]


@pytest.fixture
def run(capfd: pytest.CaptureFixture[str]) -> Run:
    def runner(*arguments: object) -> tuple[int, str, str]:
        capfd.readouterr()
        with pytest.raises(SystemExit) as stopped:
            main([str(a) for a in arguments])
        captured = capfd.readouterr()
        assert "Traceback" not in captured.err
        return int(stopped.value.code or 0), captured.out, captured.err

    return runner


def test_the_sample_project_builds_and_then_there_is_nothing_to_do(tmp_path: Path, run: Run) -> None:
    shutil.copytree(SAMPLES, tmp_path / "burner")
    manifest = tmp_path / "burner" / "heatwright.toml"
    code, out, err = run("build", manifest)
    assert (code, out) == (0, "")
    assert "12 of 12 species to be made: 12 new." in err
    assert "12 made; release written to release." in err
    before = release(tmp_path / "burner")
    assert sorted(before) == ["thermo.dat", "thermo.lock.toml", "thermo.yaml"]
    code, out, err = run("build", manifest)
    assert (code, out, err) == (0, "", "Nothing to do.\n")
    code, out, err = run("build", "-n", tmp_path / "burner")
    assert (code, out, err) == (0, "Nothing to do.\n", "")
    # another scale factor for one species: that one, for that reason, and nothing else
    edit(manifest, {"[species.CH3OH]\n": "[species.CH3OH]\nfrequency-scale = 0.95\nzpe-scale = 0.98\n"})
    code, out, err = run("build", "-n", manifest)
    assert code == 0
    assert out.splitlines()[0].startswith("CH3OH: options changed (")
    assert "frequency-scale as by default -> 0.95" in out
    assert out.splitlines()[1:] == ["1 of 12 species to be made: 1 options changed."]
    assert release(tmp_path / "burner") == before
    code, out, err = run("build", manifest)
    assert code == 0
    assert "1 made; release written to release." in err
    changed = [name for name in before if release(tmp_path / "burner")[name] != before[name]]
    assert changed == ["thermo.dat", "thermo.lock.toml", "thermo.yaml"]


@pytest.mark.parametrize("format_name", ["nasa7", "yaml"])
def test_the_release_is_what_the_entry_command_writes(tmp_path: Path, run: Run, format_name: str,
                                                      monkeypatch: pytest.MonkeyPatch) -> None:  # fmt: skip
    names = ["CH3OCH3", "CO2", "H2O", "OH"]
    built(project(tmp_path, *names))
    monkeypatch.chdir(tmp_path)
    scales = ["--frequency-scale", "0.96", "--zpe-scale", "0.98"]
    code, out, _ = run("entry", *(f"{n}.out" for n in names), "--atoms", "atoms", *scales, "--format", format_name)
    assert code == 0
    file = {"nasa7": "thermo.dat", "yaml": "thermo.yaml"}[format_name]
    assert (tmp_path / "release" / file).read_text(encoding="utf-8") == out


def test_the_same_inputs_give_the_same_bytes_in_another_place_and_without_the_store(tmp_path: Path) -> None:
    one = project(tmp_path / "one", "CO2", "H2O", "CH3")
    built(one)
    (tmp_path / "far" / "away").mkdir(parents=True)
    other = tmp_path / "far" / "away" / "two"
    shutil.copytree(one, other, ignore=shutil.ignore_patterns("release", ".heatwright*"))
    built(other)
    assert release(one) == release(other)
    assert str(tmp_path).encode() not in b"".join(release(one).values())
    shutil.rmtree(one / "release")
    (one / ".heatwright.sqlite").unlink()
    built(one)
    assert release(one) == release(other)


def test_one_changed_species_changes_only_its_own_lines(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O", "OH")
    built(folder)
    before = release(folder)
    edit(folder / "heatwright.toml", {'output = "H2O.out"': 'output = "H2O.out"\nsymmetry-number = 1'})
    built(folder)
    for name, data in release(folder).items():
        old, new = before[name].decode().splitlines(), data.decode().splitlines()
        first = next(i for i, (a, b) in enumerate(zip(old, new, strict=False)) if a != b)
        tail = next(i for i, (a, b) in enumerate(zip(old[::-1], new[::-1], strict=False)) if a != b)
        part = "\n".join(new[first : len(new) - tail])
        assert all(word not in part for word in ("CO2", "OH.out", "species.OH")), name


def test_every_reason_has_its_name(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    folder = project(tmp_path, "CO2", "H2O", "N2")
    _, told = built(folder)
    assert told.reasons == {"CO2": ["new"], "H2O": ["new"], "N2": ["new"]}
    with (folder / "H2O.out").open("a") as stream:
        stream.write("\n")
    _, told = built(folder)
    assert told.reason_texts == {"H2O": "output changed (H2O.out)"}
    with (folder / "atoms" / "C.out").open("a") as stream:
        stream.write("\n")
    _, told = built(folder)
    assert told.reason_texts == {"CO2": "reference changed (atoms/C.out)"}
    edit(folder / "heatwright.toml", {'output = "N2.out"': 'output = "N2.out"\nmasses = "average"'})
    _, told = built(folder)
    assert told.reason_texts == {"N2": "options changed (masses as by default -> average)"}
    edit(folder / "release" / "thermo.dat", {"CO2                ": "CO2                X"})
    _, told = built(folder)
    assert told.reason_texts == {"CO2": "missing (not in thermo.dat as it was made)"}
    (folder / "release" / "thermo.yaml").unlink()
    _, told = built(folder)
    assert set(told.reason_texts.values()) == {"missing (not in thermo.yaml)"}
    monkeypatch.setattr("heatwright.project.plan.tool_fingerprint", lambda: "another")
    monkeypatch.setattr("heatwright.project.build.tool_fingerprint", lambda: "another")
    _, told = built(folder)
    assert set(told.reason_texts.values()) == {"tool changed (heatwright 0.1.0, changed)"}
    assert built(folder)[0].plan.is_done


def test_files_that_come_and_go_are_reasons(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    built(folder)
    shutil.copyfile(folder / "H2O.out", folder / "water.out")
    edit(folder / "heatwright.toml", {'output = "H2O.out"': 'output = "water.out"'})
    assert built(folder)[1].reason_texts == {"H2O": "output changed (now with water.out, without H2O.out)"}
    (folder / "water.out").unlink()
    outcome, told = built(folder, keep_previous=True)
    assert told.reason_texts == {"H2O": "output changed (water.out is gone)"}
    assert outcome.failed == ("H2O",)
    (folder / "atoms" / "O.out").unlink()
    assert built(folder)[1].reason_texts["CO2"] == "reference changed (without atoms/O.out)"


def test_a_cached_rebuild_reads_no_output(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    assert sorted(built(folder)[1].read) == ["C.out", "CO2.out", "H.out", "H2O.out", "N.out", "O.out"]
    edit(folder / "heatwright.toml", {"0.96": "0.97"})
    _, told = built(folder)
    assert told.read == []
    assert told.made_names == ["CO2", "H2O"]


def test_without_a_store_only_what_changed_is_read(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O", "N2")
    built(folder)
    (folder / ".heatwright.sqlite").unlink()
    assert built(folder)[0].plan.is_done
    (folder / ".heatwright.sqlite").unlink()
    edit(folder / "heatwright.toml", {'output = "N2.out"': 'output = "N2.out"\nmasses = "average"'})
    _, told = built(folder)
    assert told.read == ["N2.out"]
    assert told.made_names == ["N2"]


def test_what_was_finished_is_kept_when_a_build_is_interrupted(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O", "N2", "CO")

    class Impatient(Told):
        def made(self, decision: Any, record: Any) -> None:
            super().made(decision, record)
            if len(self.made_names) == 2:
                raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        built(folder, told=Impatient())
    assert not (folder / "release").exists()
    outcome, told = built(folder)
    assert told.read == []
    assert sorted(outcome.made) == ["CO", "CO2", "H2O", "N2"]
    undisturbed = project(tmp_path / "other", "CO2", "H2O", "N2", "CO")
    built(undisturbed)
    assert release(folder) == release(undisturbed)


def test_one_bad_species_does_not_stop_the_rest(tmp_path: Path, run: Run) -> None:
    folder = project(tmp_path, "CO2", "H2O", "N2")
    built(folder)
    good = release(folder)
    (folder / "H2O.out").write_text("this is no output\n")
    (folder / "N2.out").write_text((folder / "N2.out").read_text() + "\n")
    code, _, err = run("build", folder)
    assert code == 3
    assert "error: H2O.out: no banner of a quantum-chemistry program is in the head of the file" in err
    assert "1 made, 1 failed (H2O); release written to release." in err
    assert list(read_lock(folder / "release" / "thermo.lock.toml").species) == ["CO2", "N2"]
    assert "H2O " not in (folder / "release" / "thermo.dat").read_text()
    shutil.copyfile(SAMPLES / "H2O.out", folder / "H2O.out")
    shutil.copyfile(SAMPLES / "N2.out", folder / "N2.out")
    assert run("build", folder)[0] == 0
    assert release(folder) == good


def test_keep_previous_keeps_the_entry_and_says_so_in_the_files(tmp_path: Path, run: Run) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    built(folder)
    good = release(folder)
    (folder / "H2O.out").write_text("this is no output\n")
    for _ in range(2):  # the remark does not pile up
        code, _, err = run("build", "--keep-previous", folder)
        assert code == 3
        assert "H2O: the earlier entry stays, with a remark." in err
        dat = (folder / "release" / "thermo.dat").read_text()
        assert dat.count("! kept from an earlier release: ") == 1
        assert (folder / "release" / "thermo.yaml").read_text().count("# kept from an earlier release: ") == 1
    assert read_lock(folder / "release" / "thermo.lock.toml").species["H2O"].kept == "not-an-output"
    records = [line for line in dat.splitlines() if not line.startswith("!")]
    assert records == [line for line in good["thermo.dat"].decode().splitlines() if not line.startswith("!")]
    shutil.copyfile(SAMPLES / "H2O.out", folder / "H2O.out")
    _, told = built(folder)
    assert told.reason_texts == {"H2O": "missing (an earlier entry stands in its place)"}
    assert release(folder) == good


def test_when_nothing_can_be_made_the_release_stays(tmp_path: Path, run: Run) -> None:
    folder = project(tmp_path, "H2O")
    built(folder)
    good = release(folder)
    (folder / "H2O.out").write_text("")
    code, _, err = run("build", folder)
    assert code == 3
    assert "0 made, 1 failed (H2O); the release in release stays as it was." in err
    assert release(folder) == good


def test_a_species_that_left_the_manifest_leaves_the_release(tmp_path: Path, run: Run) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    built(folder)
    edit(folder / "heatwright.toml", {'[species.H2O]\noutput = "H2O.out"\n': ""})
    code, out, _ = run("build", "-n", folder)
    assert (code, out) == (0, "H2O: no longer in the manifest\n"
                           "0 of 1 species to be made; 1 no longer in the manifest.\n")  # fmt: skip
    built(folder)
    assert list(read_lock(folder / "release" / "thermo.lock.toml").species) == ["CO2"]


def test_a_dry_run_writes_nothing(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    before = sorted(p.name for p in folder.iterdir())
    plan = dry_run(load_manifest(folder), Watch())
    assert [d.name for d in plan.stale] == ["CO2", "H2O"]
    assert sorted(p.name for p in folder.iterdir()) == before


def test_standard_pressures_are_not_mixed() -> None:
    species = [
        SpeciesRequest(name="A", files=(), model=ModelChoice(pressure="1bar")),
        SpeciesRequest(name="B", files=(), model=ModelChoice(pressure="1atm")),
    ]
    with pytest.raises(Refused, match=r"1atm: B; 1bar: A") as error:
        check_pressure(species)
    assert [f.code for f in error.value.findings] == ["pressures-mixed"]
    check_pressure(species[:1])


def test_a_changed_pressure_does_not_let_an_old_entry_stay(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    built(folder)
    edit(folder / "heatwright.toml", {"[mechanism]\n": '[mechanism]\npressure = "1atm"\n'})
    (folder / "H2O.out").write_text("no output\n")
    outcome, told = built(folder, keep_previous=True)
    assert (outcome.failed, outcome.kept) == (("H2O",), ())
    assert [f.found for f in told.findings] == [
        "the earlier entry of H2O is for another standard pressure and cannot be kept"
    ]
    lock = read_lock(folder / "release" / "thermo.lock.toml")
    assert (list(lock.species), lock.standard_pressure_Pa) == (["CO2"], 101325.0)


def test_references_are_watched_all_together_on_the_routes_through_them(tmp_path: Path) -> None:
    head = '[mechanism]\nroute = "network"\nreferences = "refs"\natoms = "atoms"\n'
    folder = project(tmp_path, "CH3OCH3", head=head)
    (folder / "refs").mkdir()
    for name in ("H2O", "CH3OH", "CO2", "CH2O", "CO", "N2"):
        shutil.copyfile(SAMPLES / f"{name}.out", folder / "refs" / f"{name}.out")
    (folder / "refs" / "README.md").write_text("not an output\n")
    outcome, told = built(folder)
    assert outcome.made == ("CH3OCH3",), told.failures
    lock = read_lock(folder / "release" / "thermo.lock.toml")
    assert "refs/README.md" not in {r.path for r in lock.references}
    assert {"refs/N2.out", "atoms/N.out"} <= {r.path for r in lock.references}
    (folder / "refs" / "README.md").write_text("changed\n")
    assert built(folder)[0].plan.is_done
    (folder / "refs" / "N2.out").unlink()
    _, told = built(folder)
    assert told.reasons == {"CH3OCH3": ["reference changed"]}


def test_notes_and_comments_come_into_the_files(tmp_path: Path) -> None:
    more = ('[species.W]\noutput = "W.out"\nnote = "by hand"\ncomments = ["checked in May"]\n'
            'symmetry-number = 2\nsymmetry-reason = "C2v"\n')  # fmt: skip
    folder = project(tmp_path, "CO2", more=more)
    shutil.copyfile(SAMPLES / "H2O.out", folder / "W.out")
    built(folder)
    dat = (folder / "release" / "thermo.dat").read_text()
    yaml = (folder / "release" / "thermo.yaml").read_text()
    for line in ("reason for the symmetry: C2v", "checked in May", "note: by hand"):
        assert f"! {line}\n" in dat
        assert f"# {line}\n" in yaml
    assert "    note: " in yaml
    assert built(folder)[0].plan.is_done


def test_a_species_whose_making_breaks_is_one_failure(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    from heatwright.project import library

    real = library.Library.body

    def breaks(self: Any, molecule: Any, *rest: Any) -> Any:
        if molecule.n_atoms == 3 and molecule.atomic_numbers[0] == 8:
            raise ZeroDivisionError("as a test")
        return real(self, molecule, *rest)

    monkeypatch.setattr(library.Library, "body", breaks)
    outcome, told = built(folder)
    assert outcome.made == ("CO2",)
    assert "ZeroDivisionError: as a test" in told.failures["H2O"][0].text


def test_a_file_that_changes_while_it_is_read_is_not_taken(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O")

    class Meddler(Told):
        def planned(self, plan: Any) -> None:
            super().planned(plan)
            with (folder / "H2O.out").open("a") as stream:
                stream.write("\n")

    outcome, told = built(folder, told=Meddler())
    assert outcome.made == ("CO2",)
    assert [f.code for f in told.failures["H2O"]] == ["file-changed"]
    assert built(folder)[0].made == ("H2O",)


def test_a_newer_lock_is_left_alone(tmp_path: Path, run: Run) -> None:
    folder = project(tmp_path, "H2O")
    built(folder)
    lock = folder / "release" / "thermo.lock.toml"
    edit(lock, {"heatwright-lock = 1": "heatwright-lock = 2"})
    before = release(folder)
    code, _, err = run("build", folder)
    assert code == 3
    assert "made by a newer version of heatwright" in err
    assert release(folder) == before


def test_sixty_species_by_hand_are_made_together(tmp_path: Path) -> None:
    folder = project(tmp_path, head=MECHANISM)
    add_by_hand(folder, 60)
    outcome, _ = built(folder)
    assert len(outcome.made) == 60
    assert build(load_manifest(folder), Watch()).plan.is_done


def test_names_that_have_to_be_quoted(tmp_path: Path) -> None:
    names = ["NO", "CH2(S)", "C3H4-a", "1,3-C4H6", "y", "A'B", "N+", "~x", '"q"']
    tables = []
    folder = project(tmp_path)
    for i, name in enumerate(names):
        shutil.copyfile(SAMPLES / "CO2.out", folder / f"{i}.out")
        quoted = name.replace('"', '\\"')
        tables.append(f'[species."{quoted}"]\noutput = "{i}.out"\n')
    manifest = folder / "heatwright.toml"
    manifest.write_text(manifest.read_text() + "\n".join(tables))
    outcome, told = built(folder)
    assert sorted(outcome.made) == sorted(names), told.failures
    good = release(folder)
    assert sorted(read_lock(folder / "release" / "thermo.lock.toml").species) == sorted(names)
    assert built(folder)[0].plan.is_done
    edit(manifest, {'output = "0.out"': 'output = "0.out"\nmasses = "average"'})
    assert built(folder)[1].made_names == ["NO"]
    edit(manifest, {'output = "0.out"\nmasses = "average"': 'output = "0.out"'})
    built(folder)
    assert release(folder) == good


def test_line_ends_that_version_control_changed_are_no_change(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2", "H2O")
    built(folder)
    for path in (folder / "release").iterdir():
        path.write_bytes(path.read_bytes().replace(b"\n", b"\r\n"))
    assert built(folder)[0].plan.is_done


def test_the_mechanism_may_be_renamed(tmp_path: Path) -> None:
    folder = project(tmp_path, "CO2")
    built(folder)
    edit(folder / "heatwright.toml", {'name = "test"': 'name = "other"'})
    outcome, _ = built(folder)
    assert (outcome.made, outcome.written) == ((), True)
    assert read_lock(folder / "release" / "thermo.lock.toml").mechanism == "other"


def test_torsions_and_conformers_are_watched_too(tmp_path: Path) -> None:
    scan = "# atoms 3-1-2-4\nangle_deg,energy_kJ/mol\n" + "".join(
        f"{a},{2.2 * (1 + np.cos(np.deg2rad(3 * a))):.6f}\n" for a in range(0, 360, 15)
    )
    more = '[species.CH3OH]\noutput = "CH3OH.out"\ntorsions = ["scan.csv"]\n'
    folder = project(tmp_path, "H2O", more=more)
    shutil.copyfile(SAMPLES / "CH3OH.out", folder / "CH3OH.out")
    (folder / "scan.csv").write_text(scan)
    outcome, told = built(folder)
    assert outcome.failed == (), told.failures
    assert read_lock(folder / "release" / "thermo.lock.toml").species["CH3OH"].conventions["torsions"] == 1
    (folder / "scan.csv").write_text(scan.replace("60,0.000000", "60,0.000001", 1))
    assert built(folder)[1].reason_texts == {"CH3OH": "output changed (scan.csv)"}
    (folder / "scan.csv").write_text("nonsense\n")
    outcome, told = built(folder)
    assert [f.code for f in told.failures["CH3OH"]] == ["scan-unreadable"]
    assert told.failures["CH3OH"][0].where.startswith("scan.csv")


def test_an_entry_whose_heat_capacity_is_not_positive_is_refused_as_on_the_command_line(
    tmp_path: Path, run: Run
) -> None:
    steep = 'dHf298 = "0 kJ/mol"\nsource = "test"\nelectronic = "0:1,3000:100000"\n'
    folder = project(tmp_path, "H2O", "N2", more=steep)
    code, _, err = run("build", folder)
    assert code == 3
    assert "error: N2.out: the polynomial's Cp/R is -7.0" in err
    assert "[cp-not-positive]" in err
    assert "1 made, 1 failed (N2); release written to release." in err
    assert b"\nN2 " not in release(folder)["thermo.dat"]


def test_a_first_build_that_makes_nothing_speaks_of_no_release(tmp_path: Path, run: Run) -> None:
    folder = project(tmp_path, "H2O")
    (folder / "H2O.out").write_text("")
    code, _, err = run("build", folder)
    assert code == 3
    assert "0 made, 1 failed (H2O); no release was written." in err
    assert not (folder / "release").exists()


def test_options_in_words_about_a_species_are_keys(tmp_path: Path, run: Run) -> None:
    folder = project(tmp_path, "H2O", head="[mechanism]\n")
    code, _, err = run("build", folder)
    assert code == 3
    assert 'expected --dHf298 "VALUE kJ/mol" --source TEXT' in err
    assert err.count("is the key of that name in the manifest") == 1
    edit(folder / "heatwright.toml", {'output = "H2O.out"': 'output = "nix.out"'})
    assert "is the key of that name" not in run("build", folder)[2]


def test_a_manifest_without_species_is_no_build(tmp_path: Path, run: Run) -> None:
    folder = project(tmp_path)
    code, _, err = run("build", folder)
    assert code == 3
    assert err.startswith(f"error: {folder}: the manifest names no species. Write a table [species.NAME]")
    assert not (folder / ".heatwright.sqlite").exists()


def test_words_about_the_store_begin_with_its_path(tmp_path: Path, run: Run) -> None:
    folder = project(tmp_path, "H2O")
    (folder / ".heatwright.sqlite").write_bytes(b"this is no store")
    code, _, err = run("build", folder)
    assert code == 0
    assert f"\nwarning: {folder}/.heatwright.sqlite: the store cannot be used" in f"\n{err}"


def test_a_folder_of_atoms_that_may_not_be_read(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, run: Run) -> None:
    folder = project(tmp_path, "H2O")
    built(folder)
    good, access = release(folder), os.access
    monkeypatch.setattr(os, "access", lambda path, *a, **k: Path(path).name != "atoms" and access(path, *a, **k))
    code, _, err = run("build", folder)
    assert code == 3
    assert "error: H2O.out: atoms: the folder may not be read (permission denied). Correct the folder" in err
    assert release(folder) == good


def test_the_points_beside_an_output_of_xtb_belong_to_the_scan(tmp_path: Path) -> None:
    folder = project(tmp_path, "CH3OH", more='torsions = "scan/x.out"\n')
    (folder / "scan").mkdir()
    (folder / "scan" / "x.out").write_text("the output")
    scan = ReadTask(path=str(folder / "scan" / "x.out"), torsion="")

    def looked() -> tuple[str, list[str]]:
        (decision,) = dry_run(load_manifest(folder), Told()).decisions
        with Store(str(folder / "none"), lambda finding: None, read_only=True) as store:
            return Library(store, Engine()).key(scan), [file.path for file in decision.files]

    alone, files = looked()
    assert files == ["CH3OH.out", "scan/x.out"]
    keys = {alone}
    for content in ("one", "two"):
        (folder / "scan" / "xtbscan.log").write_text(content)
        key, files = looked()
        keys.add(key)
        assert files == ["CH3OH.out", "scan/x.out", "scan/xtbscan.log"]
    assert len(keys) == 3


@needs_shared
def test_a_scan_by_xtb_whose_points_come_later(tmp_path: Path, run: Run) -> None:
    assert SHARED is not None
    source = SHARED / "outputs" / "xtb651_h2o2_relaxed_torsion_scan"
    folder = project(tmp_path, "H2O", more='torsions = "scan/h2o2_scan.out"\n')
    (folder / "scan").mkdir()
    shutil.copy(source / "h2o2_scan.out", folder / "scan")
    assert "xTB writes the points of a scan into xtbscan.log, and there is none beside" in run("build", folder)[2]
    shutil.copy(source / "xtbscan.log", folder / "scan")
    err = run("build", folder)[2]
    assert "there is none beside" not in err
    assert "[scan-of-another]" in err
