"""Routes to the enthalpy of formation on the command line: entry, reactions, crosscheck."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import pytest

ATOMS = ("H", "C", "O")


@pytest.fixture
def refs(samples: Path, tmp_path: Path) -> Path:
    """A folder of the samples with their atoms beside them."""
    folder = tmp_path / "refs"
    folder.mkdir()
    for file in (*samples.glob("*.out"), *(samples / "atoms").glob("*.out")):
        shutil.copyfile(file, folder / file.name)
    return folder


def edited(file: Path, old: str, new: str) -> None:
    text = file.read_text()
    assert old in text
    file.write_text(text.replace(old, new))


def document(run, *arguments) -> dict:
    done = run("entry", *arguments, "--json", "-q")
    assert done.code == 0, done.err
    return json.loads(done.out)["species"][0]


def test_network_of_the_samples(run, samples: Path, refs: Path) -> None:
    made = document(run, samples / "CH3OH.out", "--references", refs, "--route", "network", "--zpe-scale", "0.9806")
    formation = made["formation"]
    assert formation["method"] == "network"
    # ATcT 1.112: -200.70 kJ/mol
    assert abs(formation["dHf298_kJ_mol"] - -200.70) < formation["u95_kJ_mol"] < 40.0
    assert sum(line["value_kJ_mol"] for line in formation["ledger"]) == pytest.approx(
        formation["dHf298_kJ_mol"], abs=1e-6
    )
    assert all(line["source"] for line in formation["ledger"])


def test_best_shows_all_routes(run, samples: Path, refs: Path) -> None:
    done = run("entry", samples / "CH3OCH3.out", "--references", refs, "--zpe-scale", "0.9806", "--json")
    formation = json.loads(done.out)["species"][0]["formation"]
    methods = [formation["method"], *(f["method"] for f in formation["other_routes"])]
    assert sorted(methods) == ["atomization", "network", "reaction"]
    spreads = [formation["u95_kJ_mol"], *(f["u95_kJ_mol"] for f in formation["other_routes"])]
    assert spreads[0] == min(spreads)
    assert "has the smallest stated uncertainty" in done.err


def test_a_written_reaction(run, samples: Path, refs: Path) -> None:
    text = "CH3OCH3 + H2O -> 2 CH3OH"
    done = run("entry", samples / "CH3OCH3.out", "--references", refs, "--reaction", text, "-v")
    assert done.code == 0
    assert f"reaction: {text} (homodesmotic)" in done.err or f"reaction: {text} (isodesmic)" in done.err
    assert "+2 x enthalpy of formation of CH3OH at 0 K (ATcT 1.112)" in done.err


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("CH3OCH3 -> 2 CH3OH", "reaction-unbalanced"),
        ("CH3OCH3 -> CH3 + CH2O + H2", "reaction-unbalanced"),
        ("CH3OCH3 + H2O -> CH3OCH3 + H2O", "reaction-wrong"),
        ("CH3OCH3 + C9H8 -> CH3OH", "reaction-wrong"),
    ],
)
def test_reactions_that_are_refused(run, samples: Path, refs: Path, text: str, code: str) -> None:
    done = run("entry", samples / "CH3OCH3.out", "--references", refs, "--reaction", text, "-o", refs / "thermo.dat")
    assert done.code == 3
    assert f"[{code}]" in done.err
    assert not (refs / "thermo.dat").exists()


def test_references_of_another_kind(run, samples: Path, refs: Path) -> None:
    edited(refs / "H2O.out", "6-31g*", "6-31g**") if "6-31g*" in (refs / "H2O.out").read_text() else edited(
        refs / "H2O.out", "6-31G*", "6-31G**"
    )
    done = run("entry", samples / "CH3OH.out", "--references", refs)
    assert done.code == 3
    assert "[level-differs]" in done.err
    assert "H2O" in done.err


@pytest.mark.parametrize(
    ("options", "code"),
    [
        (("--route", "network"), 2),
        (("--route", "reaction"), 2),
        (("--route", "best"), 2),
        (("--reaction", "A -> B"), 2),
        (("--references", "nowhere"), 3),
        (("--references", "{refs}", "--reaction", "no reaction"), 2),
        (("--references", "{refs}", "--dHf298", "-200 kJ/mol"), 2),
        (("--references", "{refs}", "--reaction", "A -> B", "--route", "network"), 2),
    ],
)
def test_options_that_do_not_go_together(run, samples: Path, refs: Path, options, code: int) -> None:
    done = run("entry", samples / "CH3OH.out", *(o.format(refs=refs) for o in options))
    assert done.code == code
    assert done.out == ""
    assert done.err


def test_reactions_command(run, samples: Path, refs: Path) -> None:
    done = run("reactions", samples / "CH3OCH3.out", "--references", refs, "--zpe-scale", "0.9806")
    assert done.code == 0
    assert "CH3OCH3 + H2O -> 2 CH3OH" in done.out
    first = done.out.splitlines()[0]
    assert first.startswith("CH3OCH3: 6 C-H, 2 C-O")
    as_json = json.loads(run("reactions", samples / "CH3OCH3.out", "--references", refs, "--json", "-q").out)
    assert as_json["heatwright"] == 1
    spreads = [r["u95_kJ_mol"] for r in as_json["reactions"]]
    assert spreads == sorted(spreads)
    assert all(term["source"] for r in as_json["reactions"] for term in r["terms"])


def test_reactions_command_agrees_with_entry(run, samples: Path, refs: Path) -> None:
    text = "CH3OCH3 + H2O -> 2 CH3OH"
    judged = json.loads(
        run("reactions", samples / "CH3OCH3.out", "--references", refs, "--reaction", text, "--json", "-q").out
    )
    made = document(run, samples / "CH3OCH3.out", "--references", refs, "--reaction", text)
    assert judged["reactions"][0]["dHf298_kJ_mol"] == made["formation"]["dHf298_kJ_mol"]


def test_no_reaction_is_said(run, samples: Path, refs: Path) -> None:
    done = run("reactions", samples / "N2.out", "--references", refs)
    assert done.code == 3
    assert "[no-reaction]" in done.err


def test_units_of_the_reactions(run, samples: Path, refs: Path) -> None:
    kJ, kcal = (
        run("reactions", samples / "CH3OCH3.out", "--references", refs, "--units", unit).out.splitlines()[2].split()
        for unit in ("kJ", "kcal")
    )
    assert float(kcal[-3]) == pytest.approx(float(kJ[-3]) / 4.184, abs=0.01)


def entries_csv(path: Path, wrong: dict[str, float]) -> Path:
    # ATcT 1.112, kJ/mol at 298.15 K
    values = {
        "CH3OH": -200.70,
        "CH3OCH3": -184.02,
        "CH2O": -109.16,
        "H2O": -241.822,
        "CO2": -393.474,
        "CO": -110.525,
        "H2": 0.0,
        "HCO": 41.83,
        "CH3": 146.494,
        "OH": 37.501,
    }
    rows = [f"{name},{value + wrong.get(name, 0.0)},0.4,ATcT 1.112" for name, value in values.items()]
    path.write_text("name,dHf298_kJ_mol,u95_kJ_mol,source\n" + "\n".join(rows) + "\n")
    return path


def test_crosscheck_finds_the_entry_that_is_wrong(run, refs: Path, tmp_path: Path) -> None:
    good = run("crosscheck", entries_csv(tmp_path / "good.csv", {}), "--outputs", refs, "--zpe-scale", "0.9806")
    assert good.code == 0
    assert good.out == ""
    assert "0 disagree" in good.err
    bad = run(
        "crosscheck", entries_csv(tmp_path / "bad.csv", {"CH3OH": 60.0}), "--outputs", refs, "--zpe-scale", "0.9806"
    )
    assert bad.code == 1
    assert "CH3OCH3 + H2O -> 2 CH3OH" in bad.out or "2 CH3OH" in bad.out
    assert "CH3OH is in" in bad.err
    told = json.loads(
        run("crosscheck", tmp_path / "bad.csv", "--outputs", refs, "--zpe-scale", "0.9806", "--json", "-q").out
    )
    assert all(r["disagrees"] for r in told["relations"])
    assert all("CH3OH" in r["species"] for r in told["relations"] if r["kind"] == "reaction")


def test_crosscheck_of_a_document_with_routes(run, samples: Path, refs: Path, tmp_path: Path) -> None:
    target = tmp_path / "thermo.json"
    files = [samples / f"{n}.out" for n in ("CH3OH", "CH3OCH3", "H2O", "CH2O")]
    made = run("entry", *files, "--references", refs, "--zpe-scale", "0.9806", "--json", "-o", target)
    assert made.code == 0
    done = run("crosscheck", target, "--outputs", refs, "--zpe-scale", "0.9806", "--all", "--json", "-q")
    kinds = {r["kind"] for r in json.loads(done.out)["relations"]}
    assert {"two routes", "reaction"} <= kinds


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("name,dHf298_kJ_mol,u95_kJ_mol,source\nA,-1,0.1,x\n", "no-output"),
        ("name,dHf298_kJ_mol,u95_kJ_mol,source\nA,,0.1,x\n", "table-wrong"),
        ("name,dHf298_kJ_mol,u95_kJ_mol,source\nA,1,0.1,x\nA,2,0.1,x\n", "duplicate-name"),
        ("{}", "table-wrong"),
        ("{", "table-wrong"),
    ],
)
def test_crosscheck_refuses(run, refs: Path, tmp_path: Path, text: str, code: str) -> None:
    (tmp_path / "entries").write_text(text)
    done = run("crosscheck", tmp_path / "entries", "--outputs", refs)
    assert done.code == 3
    assert f"[{code}]" in done.err


def test_a_given_value_that_the_route_passes_over_is_named(run, samples: Path) -> None:
    done = run(
        "entry", samples / "CH3OH.out", "--atoms", samples / "atoms", "--route", "atomization", "--dHf298",
        "-200.7 kJ/mol", "-v",
    )  # fmt: skip
    (line,) = [line for line in done.err.splitlines() if "[route]" in line]
    assert done.code == 0
    assert "-200.7 kJ/mol) is not used, as the route is atomization, which gives -172.5" in line
