"""A release is shown with all that the project beside it knows; nothing is changed by looking."""

from __future__ import annotations

import hashlib
import re
import shutil
from pathlib import Path

import pytest

from heatwright.cli.main import main
from heatwright.project.beside import manifest_of_release
from heatwright.project.lockfile import LOCK_NAME, read_lock
from heatwright.report.remaking import LONE
from heatwright.resources import sample_outputs

MANIFEST = """
[mechanism]
name = "three"
atoms = "atoms"
frequency-scale = 0.96
zpe-scale = 0.98

[[outputs]]
glob = "outs/*.out"

[species.CH3OH]
output = "CH3OH.out"
torsions = ["3-1-2-4 n=3 V=373.6 cm-1"]
"""


def build(folder: Path) -> None:
    with pytest.raises(SystemExit) as stopped:
        main(["build", str(folder / "heatwright.toml"), "-q"])
    assert stopped.value.code == 0


@pytest.fixture(scope="module")
def origin(tmp_path_factory: pytest.TempPathFactory) -> Path:
    samples, folder = Path(str(sample_outputs())), tmp_path_factory.mktemp("origin") / "burner"
    (folder / "outs").mkdir(parents=True)
    shutil.copytree(samples / "atoms", folder / "atoms")
    shutil.copyfile(samples / "CH3OH.out", folder / "CH3OH.out")
    for name in ("CO2", "H2O"):
        shutil.copyfile(samples / f"{name}.out", folder / "outs" / f"{name}.out")
    (folder / "heatwright.toml").write_text(MANIFEST, encoding="utf-8")
    build(folder)
    return folder


@pytest.fixture
def project(origin: Path, tmp_path: Path) -> Path:
    folder = tmp_path / "burner"
    shutil.copytree(origin, folder)
    return folder


def state(folder: Path) -> dict[str, tuple[str, int]]:
    """Every file with its contents and time."""
    return {
        str(p.relative_to(folder)): (hashlib.sha256(p.read_bytes()).hexdigest(), p.stat().st_mtime_ns)
        for p in folder.rglob("*")
        if p.is_file()
    }


def articles(page: str) -> dict[str, str]:
    return {re.search(r'id="s-([^"]*)"', a)[1]: a for a in re.findall(r"<article.*?</article>", page, re.DOTALL)}  # type: ignore[index]


def kinds(article: str) -> list[str]:
    return re.findall(r"<figcaption>(.*?)</figcaption>", article)


WHOLE = ["Structure", "Heat capacity", "Polynomial less table", "Contributions to Cp°", "Contributions to S°"]


def test_everything_that_the_project_knows_is_shown(run, project: Path) -> None:
    before = state(project)
    done = run("report", project / "release")
    assert done.code == 0
    assert "All 3 species were made again from heatwright.toml and come out as released." in done.out
    assert "All 3 species" in done.err
    shown = articles(done.out)
    assert kinds(shown["CO2"]) == WHOLE
    assert kinds(shown["CH3OH"]) == [*WHOLE, "Torsion 3-1-2-4"]
    assert "electronic atomization energy" in shown["H2O"]
    assert "<dt>sha256<dd>" in shown["H2O"]
    assert "not-remade" not in done.out
    assert state(project) == before
    assert {name: kinds(a) for name, a in articles(run("report", project).out).items()} == {
        name: kinds(a) for name, a in shown.items()
    }
    assert state(project) == before


def test_no_store_is_made_by_looking(run, project: Path) -> None:
    for file in project.glob(".heatwright*"):
        file.unlink()
    before = state(project)
    for what in (project / "release", project / "heatwright.toml"):
        assert "Polynomial less table" in run("report", what).out
        assert state(project) == before


def test_a_store_of_another_version_is_left_alone(run, project: Path) -> None:
    (project / ".heatwright.sqlite").write_bytes(b"not a store")
    before = state(project)
    assert "All 3 species" in run("report", project / "release").err
    assert state(project) == before


def test_a_release_alone_says_what_it_lacks(run, project: Path, tmp_path: Path) -> None:
    folder = tmp_path / "elsewhere" / "deeper" / "still" / "release"
    shutil.copytree(project / "release", folder)
    shutil.move(project, tmp_path / "elsewhere" / "gone")
    (tmp_path / "elsewhere" / "gone" / "heatwright.toml").unlink()
    done = run("report", folder)
    assert done.code == 0
    assert LONE in done.out
    assert LONE in done.err
    assert kinds(articles(done.out)["CO2"])[0] == "Heat capacity"
    assert "not-remade" not in done.out


def changed(project: Path, what: str) -> str:
    """Something of the project is another than when the release was made; the species that notices."""
    if what == "output":
        file = project / "outs" / "CO2.out"
        text = file.read_text(encoding="utf-8")
        assert "Total DFT energy" in text
        file.write_text(re.sub(r"(Total DFT energy\s*=\s*-\d+\.57)\d", r"\g<1>0", text), encoding="utf-8")
        return "CO2"
    if what == "gone":
        (project / "CH3OH.out").unlink()
        return "CH3OH"
    manifest = project / "heatwright.toml"
    text = manifest.read_text(encoding="utf-8")
    if what == "option":
        manifest.write_text(text.replace("V=373.6", "V=400"), encoding="utf-8")
        return "CH3OH"
    manifest.write_text(text[: text.index("[species.CH3OH]")], encoding="utf-8")
    return "CH3OH"


@pytest.mark.parametrize(
    ("what", "severity", "words"),
    [
        ("output", "warning", r"not the released entry \(output changed \(outs/CO2.out\)\)"),
        ("gone", "note", r"cannot be made again from heatwright.toml \(CH3OH.out: .*put that right"),
        ("option", "warning", r"not the released entry \(options changed \(torsions .*373.6.*400"),
        ("dropped", "note", "heatwright.toml does not have this species any more"),
    ],
)
def test_a_species_that_is_not_the_released_one(run, project: Path, what: str, severity: str, words: str) -> None:
    name = changed(project, what)
    released = (project / "release" / "thermo.yaml").read_text(encoding="utf-8")
    before = state(project)
    done = run("report", project / "release")
    assert done.code == 0
    assert "2 of 3 species were made again" in done.out
    shown = articles(done.out)
    article = shown[name]
    assert re.search(words, article)
    assert f'<li class="{severity}"><b>{severity}</b>' in article
    assert "<code>not-remade</code>" in article
    assert "Structure" not in kinds(article)
    assert "Only what the release holds is shown" in article
    for other in set(shown) - {name}:
        assert "Structure" in kinds(shown[other])
        assert "not-remade" not in shown[other]
    # what is shown is what was released
    block = released[released.index(f"- name: {name}\n") :]
    first = float(re.search(r"data:\s*\n?\s*- \[\s*([^,]+),", block)[1])  # type: ignore[index]
    assert f"{first:.8E}" in article
    assert state(project) == before
    if severity == "warning":
        assert f"warning: {name}: what heatwright.toml gives now" in done.err


def test_the_same_numbers_from_another_file_are_said(run, project: Path) -> None:
    file = project / "outs" / "CO2.out"
    file.write_text(file.read_text(encoding="utf-8") + "\n# copied\n", encoding="utf-8")
    article = articles(run("report", project / "release").out)["CO2"]
    assert "Structure" in kinds(article)
    assert "it comes out as released, though what it is made from is another (output changed (outs/CO2.out))" in article


def test_a_hand_in_the_text_is_seen(run, project: Path) -> None:
    """In one of the two files it is said; in the file that is shown the entry is another one."""
    for name in ("thermo.dat", "thermo.yaml"):
        file = project / "release" / name
        text = file.read_text(encoding="utf-8")
        at = text.index("\nCO2 " if name == "thermo.dat" else "- name: CO2\n")
        number = re.compile(r"\d\.\d{4}(\d{4})E?").search(
            text, at + 200 if name == "thermo.yaml" else text.index("\n", at + 1)
        )
        assert number is not None
        start, end = number.span(1)
        file.write_text(
            f"{text[:start]}{'9999' if text[start:end] != '9999' else '1111'}{text[end:]}", encoding="utf-8"
        )
        article = articles(run("report", project / "release").out)["CO2"]
        if name == "thermo.dat":
            assert "Structure" in kinds(article)
            assert "not in thermo.dat as it was made" in article
            assert "<code>entry-edited</code>" in article
        else:
            assert "Structure" not in kinds(article)
            assert "not in thermo.dat and thermo.yaml as it was made" in article


def test_a_manifest_that_cannot_be_read(run, project: Path) -> None:
    (project / "heatwright.toml").write_text(MANIFEST + "\n[nonsense]\n", encoding="utf-8")
    done = run("report", project / "release")
    assert done.code == 0
    assert "The project beside the release cannot be read" in done.out
    assert "nonsense" in done.out
    assert all("not-remade" in a for a in articles(done.out).values())


def test_plot_of_a_release_has_all_figures(run, project: Path, tmp_path: Path) -> None:
    before = state(project)
    assert run("plot", project / "release", "-o", tmp_path / "figures").code == 0
    names = {f.name for f in (tmp_path / "figures").iterdir()}
    assert {"CO2-structure.svg", "CO2-residuals.svg", "CH3OH-torsion-1.svg"} <= names
    assert state(project) == before


@pytest.fixture
def release(project: Path) -> Path:
    return project / "release"


def named(release: Path) -> str | None:
    found = manifest_of_release(str(release), read_lock(release / LOCK_NAME))
    return None if found is None else Path(found.path).name


def test_where_the_manifest_is_found(project: Path, release: Path, tmp_path: Path) -> None:
    assert named(release) == "heatwright.toml"
    kept = project / "release.2025"  # a copy beside its successor
    shutil.copytree(release, kept)
    assert named(kept) == "heatwright.toml"
    (project / "heatwright.toml").rename(project / "other.toml")
    assert named(release) == "other.toml"
    text = (project / "other.toml").read_text(encoding="utf-8")
    (project / "other.toml").write_text(text.replace('name = "three"', 'name = "four"'), encoding="utf-8")
    assert named(release) == "other.toml"  # it writes there
    assert named(kept) is None  # another mechanism
    outside = tmp_path / "out" / "release"
    shutil.copytree(release, outside)
    (project / "other.toml").write_text(
        text.replace('name = "three"', 'name = "four"\nrelease = "../out/release"'), encoding="utf-8"
    )
    assert named(release) is None
    link = tmp_path / "link"
    link.symlink_to(project / "release")
    (project / "other.toml").write_text(text, encoding="utf-8")
    assert named(link) == "other.toml"
