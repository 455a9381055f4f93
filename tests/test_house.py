"""The shape of the house: what stands at the top, which way imports run, what every table and function must say."""

from __future__ import annotations

import ast
import subprocess
import tomllib
from pathlib import Path

import pytest

from heatwright.explanations import by_group
from heatwright.findings import CODES
from heatwright.resources import data_rows
from heatwright.writing.formats import FORMATS

ROOT = Path(__file__).resolve().parents[1]
SOURCE = ROOT / "src" / "heatwright"
TOP = {"README.md", "DEVELOPERS.md", "pyproject.toml", "src", "tests", "sample_outputs", "templates"}

# A room may import from itself and from rooms before it.
ORDER = [
    "constants", "errors", "findings", "resources", "explanations", "elements", "molecule", "polynomial", "structure",
    "reading", "scales", "partition", "species", "formation", "entry", "writing", "audit", "project", "report", "cli",
]  # fmt: skip


def tracked() -> list[str]:
    done = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=False)
    if done.returncode:
        pytest.skip("not a git checkout, so there is no list of the project's files")
    return done.stdout.splitlines()


def test_the_top_level_is_what_it_should_be() -> None:
    visible = {path.split("/")[0] for path in tracked() if not path.startswith(".")}
    assert visible == TOP


def test_no_file_is_large() -> None:
    assert all((ROOT / path).stat().st_size < 1_500_000 for path in tracked() if (ROOT / path).exists())


def modules() -> list[Path]:
    return [p for p in sorted(SOURCE.rglob("*.py")) if p not in (SOURCE / "__init__.py", SOURCE / "__main__.py")]


def imported_rooms(path: Path) -> set[str]:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    names = [n.module or "" for n in ast.walk(tree) if isinstance(n, ast.ImportFrom)]
    names += [alias.name for n in ast.walk(tree) if isinstance(n, ast.Import) for alias in n.names]
    return {name.split(".")[1] for name in names if name.startswith("heatwright.")}


@pytest.mark.parametrize("path", modules(), ids=lambda p: str(p.relative_to(SOURCE)))
def test_imports_run_down_the_list(path: Path) -> None:
    room = path.relative_to(SOURCE).parts[0].removesuffix(".py")
    assert room in ORDER
    assert {r for r in imported_rooms(path) if ORDER.index(r) > ORDER.index(room)} == set()


@pytest.mark.parametrize("path", modules(), ids=lambda p: str(p.relative_to(SOURCE)))
def test_every_public_function_and_class_has_a_docstring(path: Path) -> None:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    assert ast.get_docstring(tree), f"{path.name} has no docstring"
    for node in tree.body:
        if isinstance(node, ast.FunctionDef | ast.ClassDef) and not node.name.startswith("_"):
            assert ast.get_docstring(node), f"{path.name}: {node.name} has no docstring"


def test_every_finding_code_is_explained() -> None:
    explained = {e.code for group in by_group().values() for e in group}
    assert [code for code in CODES if code not in explained] == []


def test_explanations_are_sentences_that_carry_their_code() -> None:
    for e in (e for group in by_group().values() for e in group):
        assert e.example.endswith(f"[{e.code}]"), e.code
        assert e.example.startswith(("error: ", "warning: ", "note: ")), e.code
        assert e.advice[0].isupper(), e.code
        assert e.advice.endswith("."), e.code


def test_every_finding_code_is_used_in_the_source() -> None:
    text = "".join(p.read_text(encoding="utf-8") for p in modules() if p.name != "findings.py")
    assert [code for code in CODES if f'"{code}"' not in text] == []


def test_every_format_has_its_template() -> None:
    assert all((ROOT / "templates" / row.template).is_file() for row in FORMATS.values())


@pytest.mark.parametrize("name", [p.stem for p in sorted((SOURCE / "data").glob("*.csv"))])
def test_every_data_table_names_its_sources(name: str) -> None:
    text = (SOURCE / "data" / f"{name}.csv").read_text(encoding="utf-8")
    assert text.startswith("# ")
    assert data_rows(name)


def test_dependencies_are_these_and_no_others() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text())["project"]
    names = {d.split(">")[0].split("=")[0].strip() for d in project["dependencies"]}
    assert names == {"numpy", "scipy", "cclib", "click", "jinja2"}
    assert project["license"] == "MIT"
