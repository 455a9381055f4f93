"""``heatwright report`` and ``heatwright plot``: every kind of input, files, refusals."""

from __future__ import annotations

import json
import shutil
import subprocess
import sys
from pathlib import Path
from xml.etree import ElementTree

import pytest

from heatwright.cli.main import main
from heatwright.resources import sample_outputs

GIVEN = ("--dHf298", "-200.7 kJ/mol", "--source", "ATcT 1.112")


def test_outputs(run, samples: Path, tmp_path: Path) -> None:
    target = tmp_path / "page.html"
    done = run("report", samples / "CH3OH.out", *GIVEN, "--frequency-scale", "0.9614", "-o", target)
    assert (done.code, done.out) == (0, "")
    assert "1 species shown" in done.err
    text = target.read_text(encoding="utf-8")
    assert "<h1>CH3OH.out</h1>" in text
    assert "1 species; B3LYP/6-31G*, NWChem 7.0.2; 1 bar" in text
    assert "harmonic oscillators scaled by 0.9614" in text


def test_documents_give_the_same_page_as_their_outputs(run, samples: Path, tmp_path: Path) -> None:
    options = (*GIVEN, "--frequency-scale", "0.9614")
    document = tmp_path / "entries.json"
    run("entry", samples / "CH3OH.out", *options, "--format", "json", "-o", document)
    one = run("report", samples / "CH3OH.out", *options, "--title", "T").out
    other = run("report", document, "--title", "T").out
    assert one == other
    assert one.endswith("</html>\n")


def test_some_fail_and_are_named(run, samples: Path, tmp_path: Path) -> None:
    bad = tmp_path / "bad.out"
    bad.write_text("nothing", encoding="utf-8")
    done = run("report", samples / "H2O.out", bad, "--dHf298", "-241.8 kJ/mol", "--dHf298", "1 kJ/mol")
    assert done.code == 3
    assert "Not shown" in done.out
    assert "bad.out</b>: " in done.out
    assert "1 shown, 1 failed" in done.err


def test_nothing_is_written_when_nothing_can_be_shown(run, tmp_path: Path) -> None:
    target = tmp_path / "page.html"
    done = run("report", tmp_path / "missing.out", *GIVEN, "-o", target)
    assert done.code == 3
    assert not target.exists()


def test_a_thermo_file_is_shown_with_its_audit(run, samples: Path, tmp_path: Path) -> None:
    file = tmp_path / "therm.dat"
    run("entry", samples / "CH3OH.out", *GIVEN, "-o", file)
    text = file.read_text(encoding="ascii")
    line = next(row for row in text.splitlines() if row.endswith("    2"))
    broken = text.replace(line, " 4" + line[2:])
    file.write_text(broken, encoding="ascii")
    done = run("report", file)
    assert done.code == 0
    assert "jump-cp" in done.out
    assert "<h1>therm.dat</h1>" in done.out
    assert done.out.count("<figure>") == 2  # Cp and its slope
    # what stood in the comment above the entry is shown as its evidence
    assert "harmonic oscillators unscaled (lowest 346 cm⁻¹); ΔfH° given" in done.out


def test_an_entry_that_cannot_be_read_is_named(run, samples: Path, tmp_path: Path) -> None:
    file = tmp_path / "therm.dat"
    run("entry", samples / "CH3OH.out", samples / "H2O.out", *GIVEN, "--dHf298", "-241.8 kJ/mol", "-o", file)
    lines = file.read_text(encoding="ascii").splitlines()
    at = next(i for i, row in enumerate(lines) if row.startswith("H2O "))
    lines[at + 1] = lines[at + 1].replace("E", "X", 1)
    file.write_text("\n".join(lines), encoding="ascii")
    done = run("report", file)
    assert "therm.dat: H2O</b>" in done.out
    assert done.out.count("<article") == 1


def test_yaml(run, samples: Path, tmp_path: Path) -> None:
    file = tmp_path / "thermo.yaml"
    run("entry", samples / "CH3OH.out", *GIVEN, "--format", "yaml", "-o", file)
    done = run("report", file)
    assert done.code == 0
    assert "1 bar" in done.out


def test_choices_without_outputs_are_a_contradiction(run, samples: Path, tmp_path: Path) -> None:
    document = tmp_path / "entries.json"
    run("entry", samples / "CH3OH.out", *GIVEN, "--format", "json", "-o", document)
    for words in (("--scale", "published"), ("--range", "300,3000"), ("--dHf298", "1 kJ/mol"), ("--name", "X")):
        done = run("report", document, *words)
        assert done.code == 2
        assert words[0] in done.err
        assert "none of the inputs is one" in done.err


def test_an_existing_page_is_kept(run, samples: Path, tmp_path: Path) -> None:
    target = tmp_path / "page.html"
    target.write_text("mine", encoding="utf-8")
    done = run("report", samples / "CH3OH.out", *GIVEN, "-o", target)
    assert done.code == 3
    assert "target-exists" in done.err
    assert target.read_text(encoding="utf-8") == "mine"
    assert run("report", samples / "CH3OH.out", *GIVEN, "-o", target, "--force").code == 0


def test_a_damaged_document_is_refused_with_its_place(run, samples: Path, tmp_path: Path) -> None:
    document = tmp_path / "entries.json"
    run("entry", samples / "CH3OH.out", *GIVEN, "--format", "json", "-o", document)
    values = json.loads(document.read_text(encoding="utf-8"))
    values["species"][0]["table"]["T_K"].pop()
    document.write_text(json.dumps(values), encoding="utf-8")
    done = run("report", document)
    assert done.code == 3
    assert "species 1 (CH3OH): table: Cp_J_mol_K has 29 numbers; expected 28" in done.err
    assert "document-wrong" in done.err


def test_plot_as_svg(run, samples: Path, tmp_path: Path) -> None:
    folder = tmp_path / "figures"
    done = run("plot", samples / "CH3OH.out", *GIVEN, "-o", folder)
    assert done.code == 0
    names = sorted(f.name for f in folder.iterdir())
    assert names == ["CH3OH-cp-shares.svg", "CH3OH-cp.svg", "CH3OH-residuals.svg", "CH3OH-s-shares.svg",
                     "CH3OH-structure.svg", "captions.md"]  # fmt: skip
    for file in folder.glob("*.svg"):
        assert ElementTree.fromstring(file.read_text(encoding="utf-8")).tag.endswith("svg")
    captions = (folder / "captions.md").read_text(encoding="utf-8")
    assert "`CH3OH-cp.svg`: Heat capacity Cp°/R of CH3OH" in captions
    assert "Source: B3LYP/6-31G*, NWChem 7.0.2." in captions
    assert "not validated for safety decisions" in captions
    again = run("plot", samples / "CH3OH.out", *GIVEN, "-o", folder)
    assert again.code == 3
    assert "target-exists" in again.err


def test_plot_only_what_is_asked_for(run, samples: Path, tmp_path: Path) -> None:
    folder = tmp_path / "figures"
    assert run("plot", samples / "CH3OH.out", *GIVEN, "-o", folder, "--figure", "cp").code == 0
    assert sorted(f.name for f in folder.iterdir()) == ["CH3OH-cp.svg", "captions.md"]
    done = run("plot", samples / "CH3OH.out", *GIVEN, "-o", tmp_path / "none", "--figure", "torsion")
    assert done.code == 3
    assert "no numbers for torsion" in done.err


@pytest.mark.parametrize("kind", ["png", "pdf"])
def test_plot_for_a_paper(run, samples: Path, tmp_path: Path, kind: str) -> None:
    pytest.importorskip("matplotlib")
    made = []
    for folder in (tmp_path / "one", tmp_path / "two"):
        done = run(
            "plot", samples / "H2O.out", "--dHf298", "-241.8 kJ/mol", "--figure", "cp", "--format", kind, "-o", folder
        )
        assert done.code == 0
        made.append((folder / f"H2O-cp.{kind}").read_bytes())
    assert made[0] == made[1]
    assert made[0].startswith({"png": b"\x89PNG", "pdf": b"%PDF"}[kind])
    assert len(made[0]) > 5000


def test_without_matplotlib_it_says_what_to_do(samples: Path, tmp_path: Path) -> None:
    code = (
        "import sys\n"
        "sys.modules['matplotlib'] = None\n"
        "from heatwright.cli.main import main\n"
        f"main(['plot', {str(samples / 'H2O.out')!r}, '--dHf298', '-241.8 kJ/mol', '--format', 'png', "
        f"'-o', {str(tmp_path / 'f')!r}])\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 3
    assert "pip install 'heatwright[plots]'" in done.stderr
    assert "no-matplotlib" in done.stderr
    assert not (tmp_path / "f").exists()


def test_plot_needs_a_folder_that_can_be(run, samples: Path, tmp_path: Path) -> None:
    file = tmp_path / "file"
    file.write_text("", encoding="utf-8")
    done = run("plot", samples / "H2O.out", "--dHf298", "-241.8 kJ/mol", "-o", file / "inside")
    assert done.code == 3
    assert "target-unwritable" in done.err


@pytest.fixture(scope="module")
def project(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The pilot burner with two releases: as it is shipped, and with other scale factors."""
    folder = tmp_path_factory.mktemp("pilot") / "burner"
    shutil.copytree(str(sample_outputs()), folder)
    manifest = folder / "heatwright.toml"
    for name in ("release.old", "release"):
        with pytest.raises(SystemExit) as stopped:
            main(["build", str(manifest), "-q"])
        assert stopped.value.code == 0
        if name != "release":
            shutil.copytree(folder / "release", folder / name)
            text = manifest.read_text(encoding="utf-8")
            changed = text.replace('scale = "published"', "frequency-scale = 0.95\nzpe-scale = 0.97")
            assert changed != text
            manifest.write_text(changed, encoding="utf-8")
    return folder


def test_a_release_is_shown_with_what_its_lock_knows(run, project: Path) -> None:
    done = run("report", project / "release")
    assert done.code == 0
    assert done.out.count("<article") == 12
    assert "scaled by 0.95 (lowest" in done.out  # the evidence, from the comment of the entry
    assert "<dt>sha256<dd>" in done.out
    assert "Scott" not in done.out
    assert "ATcT 1.112" in done.out


def test_a_manifest_is_shown_with_everything(run, project: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(project)
    before = sorted(str(p) for p in project.rglob("*"))
    done = run("report")
    assert done.code == 0
    assert done.out.count("<article") == 12
    assert done.out.count("Polynomial less table") > 12
    assert "<h1>pilot burner</h1>" in done.out
    assert run("report", ".").out == done.out
    assert sorted(str(p) for p in project.rglob("*")) == before  # nothing was written beside the store


@pytest.mark.parametrize("new", ["release", "heatwright.toml"])
def test_changes_against_an_older_release(run, project: Path, new: str) -> None:
    done = run("report", project / new, "--compare", project / "release.old")
    assert done.code == 0
    section = done.out[done.out.index('id="changes"') :].split("</section>")[0]
    assert "12 changed" in section
    assert section.count("<tr><td>") >= 24  # the rows, and the numbers of the figure
    assert "<title" in section
    if new == "release":
        assert "frequency-scale default" in section


def test_no_change_says_so(run, project: Path) -> None:
    done = run("report", project / "release", "--compare", project / "release")
    section = done.out[done.out.index('id="changes"') :].split("</section>")[0]
    assert "12 identical" in section
    assert "<figure" not in section


def test_a_missing_older_side_is_refused_before_anything_is_done(run, project: Path, tmp_path: Path) -> None:
    done = run("report", project / "release", "--compare", tmp_path / "none", "-o", tmp_path / "x.html")
    assert done.code == 3
    assert "file-missing" in done.err
    assert not (tmp_path / "x.html").exists()


def test_nothing_named_and_no_manifest(run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    done = run("report")
    assert done.code == 2
    assert "no heatwright.toml here" in done.err
    assert run("plot", "-o", tmp_path / "f").code == 2


def test_an_entry_that_the_lock_does_not_know(run, project: Path, tmp_path: Path) -> None:
    folder = tmp_path / "release"
    shutil.copytree(project / "release", folder)
    for name in ("thermo.yaml", "thermo.dat"):
        file = folder / name
        file.write_text(file.read_text(encoding="utf-8").replace("CH3OCH3", "CH3OCH3x"), encoding="utf-8")
    done = run("report", folder)
    assert done.code == 0
    assert "thermo.lock.toml does not know CH3OCH3x" in done.out


def test_a_file_without_anything_to_show_is_not_passed_over_in_silence(run, tmp_path: Path) -> None:
    file = tmp_path / "other.yaml"
    file.write_text(
        "species:\n- name: AR\n  composition: {Ar: 1}\n  thermo:\n    model: constant-cp\n    cp0: 20.8\n",
        encoding="utf-8",
    )
    for words in (("report", file, "-o", tmp_path / "x.html"), ("plot", file, "-o", tmp_path / "figures")):
        done = run(*words)
        assert done.code == 3
        assert "there is nothing to show" in done.err
        assert "constant-cp" in done.err
    assert not (tmp_path / "x.html").exists()


def test_what_of_a_file_is_not_shown_is_said(run, samples: Path, tmp_path: Path) -> None:
    file = tmp_path / "therm.dat"
    run("entry", samples / "CH3OH.out", samples / "H2O.out", *GIVEN, "--dHf298", "-241.8 kJ/mol", "-o", file)
    lines = file.read_text(encoding="ascii").splitlines()
    at = next(i for i, row in enumerate(lines) if row.startswith("H2O "))
    lines[at + 1] = lines[at + 1].replace("E", "X", 1)
    file.write_text("\r\n".join(lines), encoding="ascii")
    done = run("report", file, "-o", tmp_path / "x.html")
    assert done.code == 0
    assert f"not shown: {file}: H2O: " in done.err
    assert f"{file}: 2 entries; 1 error in 1, 0 warnings in 0" in run("audit", file).out


UNUSUAL = """
species:
- name: "é-méthane"
  composition: {C: 1, H: 4}
  thermo: &ch4
    model: NASA7
    temperature-ranges: [200.0, 1000.0]
    data:
    - [5.14987613, -0.0136709788, 4.91800599e-05, -4.84743026e-08, 1.66693956e-11, -10246.6476, -4.64130376]
- name: "CO"
  composition: {C: 1, O: 1}
  thermo:
    model: NASA7
    temperature-ranges: [200.0, 1000.0, 3500.0]
    data:
    - [3.57953347, -0.00061035368, 1.01681433e-06, 9.07005884e-10, -9.04424499e-13, -14344.086, 3.50840928]
    - [2.71518561, 0.00206252743, -9.98825771e-07, 2.30053008e-10, -2.03647716e-14, -14151.8724, 7.81868772]
- name: "Co"
  composition: {Co: 1}
  thermo:
    model: NASA7
    temperature-ranges: [200.0, 6000.0]
    data:
    - [2.5, 0.0, 0.0, 0.0, 0.0, 50000.0, 6.0]
"""


def test_unusual_names_and_one_range(run, tmp_path: Path) -> None:
    file = tmp_path / "unusual.yaml"
    file.write_text(UNUSUAL.replace(" &ch4", ""), encoding="utf-8")
    done = run("report", file)
    assert done.code == 0
    assert '<div class="rows bare"' in done.out  # no column for pictures where there are none
    assert "é-méthane" in done.out
    first = done.out[done.out.index("<article") : done.out.index("</article")]
    assert "<dt>polynomial</dt><dd>200–1000 <small>K" in first
    assert "ranges meet" not in first
    assert "ranges meet, 1000 K" in done.out
    assert "Read from unusual.yaml; nothing is known" in first  # not its whole path; that is under provenance
    assert f"<dd>{file}:" in first
    assert run("plot", file, "-o", tmp_path / "figures", "--figure", "cp").code == 0
    names = {f.name for f in (tmp_path / "figures").iterdir()}
    assert names == {"é-méthane-cp.svg", "CO-cp.svg", "Co-2-cp.svg", "captions.md"}
