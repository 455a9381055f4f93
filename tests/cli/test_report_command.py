"""``heatwright report`` and ``heatwright plot``: every kind of input, files, refusals."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path
from xml.etree import ElementTree

import pytest

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
    assert done.out.count("<figure>") == 1
    # what stood in the comment above the entry is shown as its evidence
    assert "harmonic oscillators unscaled (lowest 346 cm^-1)" in done.out


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
