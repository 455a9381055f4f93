"""``scales`` and ``explain``: what is looked up, and what happens when it is not there."""

from __future__ import annotations

import json
import subprocess
import sys

import pytest

from heatwright.findings import CODES


def test_scales_of_a_level(run) -> None:
    done = run("scales", "B3LYP/6-31G*")
    first = done.out.splitlines()[1]
    assert done.code == 0
    assert first.split()[:5] == ["B3LYP/6-31G(d)", "0.9614", "0.9806", "0.9989", "1.0015"]
    assert "Scott & Radom 1996" in first
    assert "doi:10.1021/jp960976r" in first


def test_scales_as_json(run) -> None:
    document = json.loads(run("scales", "b3-lyp/6-31g(d)", "--json").out)
    first = document["factors"][0]
    assert (document["heatwright"], document["level"]) == (1, "b3-lyp/6-31g(d)")
    assert (first["fundamental_factor"], first["zpe_factor"], first["doi"]) == (0.9614, 0.9806, "10.1021/jp960976r")
    assert document["factors"][-1]["zpe_factor"] is None


def test_scales_of_a_method_and_of_a_basis(run) -> None:
    assert len(run("scales", "B3LYP").out.splitlines()) > 40
    basis = run("scales", "cc-pVTZ").out.splitlines()[1:]
    assert len(basis) > 20
    assert all("/cc-pVTZ " in line for line in basis)


def test_scales_lists_the_methods(run) -> None:
    rows = json.loads(run("scales", "--json").out)["methods"]
    assert sum(row["rows"] for row in rows) == 499
    assert len(rows) == len({row["method"].lower().replace("-", "") for row in rows})
    lines = run("scales").out.splitlines()
    assert len(lines) == len(rows) + 1
    assert next(line for line in lines if line.startswith("B3LYP ")).split()[1] == "42"


@pytest.mark.parametrize(("level", "near"), [("B3LPY/6-31G*", "B3LYP/6-31G*"), ("B3LYP/6-31G", "B3LYP/6-31G*")])
def test_scales_of_an_unknown_level(run, level: str, near: str) -> None:
    done = run("scales", level)
    assert done.code == 3
    assert done.out == ""
    assert "[no-published-scale]" in done.err
    assert f" {near}" in done.err


@pytest.mark.parametrize("code", CODES)
def test_explain(run, code: str) -> None:
    done = run("explain", code)
    words = " ".join(done.out.split())
    assert done.code == 0
    assert words.startswith(f"{code} (")
    assert CODES[code] in words
    assert "Example: " in words
    assert "What to do: " in words


def test_explain_takes_the_code_as_it_is_printed(run) -> None:
    assert run("explain", "[unscaled]").out == run("explain", "unscaled").out


def test_explain_lists_every_code(run) -> None:
    out = run("explain").out
    assert [code for code in CODES if f"  {code} " not in out] == []
    assert out.startswith("The file:\n")


def test_explain_of_an_unknown_code(run) -> None:
    done = run("explain", "imaginary-mode")
    assert done.code == 2
    assert "imaginary-modes" in done.err


@pytest.mark.parametrize("arguments", [["--help"], ["scales", "--help"], ["explain", "--help"], ["explain"]])
def test_looking_up_is_light(arguments: list[str]) -> None:
    code = (
        "import sys\nfrom heatwright.cli.main import main\n"
        f"try:\n    main({arguments!r})\nexcept SystemExit:\n    pass\n"
        "print([m for m in ('numpy', 'cclib', 'jinja2') if m in sys.modules], file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stderr.strip() == "[]"
