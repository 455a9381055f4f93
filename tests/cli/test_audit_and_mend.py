"""``heatwright audit`` and ``heatwright mend`` as they are used: exit codes, streams, JSON, and a stranger's file."""

from __future__ import annotations

import json
import re
import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any, get_args

import pytest

from heatwright.findings import Severity
from heatwright.reading.entries import read_entries
from heatwright.resources import sample_files
from thermo_files import CH4, cantera_data, record, section

Run = Callable[..., Any]
"""What the fixture of this folder gives: arguments in, exit code, output and error texts out."""


@pytest.fixture
def strange(tmp_path: Path) -> Path:
    """A thermo file from somewhere: GRI-Mech as fixed records, and three of them bad."""
    lines = ["THERMO", "   300.000  1000.000  5000.000", "! from a colleague"]
    for e in read_entries(cantera_data() / "gri30.yaml").entries:
        p = e.polynomial
        assert p is not None
        if e.name == "CH3OH":
            p = replace(p, high=(p.high[0] + 0.9, *p.high[1:]))
        if e.name == "C2H4":
            p = replace(p, high=(*p.high[:5], p.high[5] + 900.0, p.high[6]))
        if e.name == "HCN":
            p = replace(p, high=(*p.high[:6], p.high[6] + 0.2))
        lines.append(record(e.name, e.composition, p))
    file = tmp_path / "therm.dat"
    file.write_text("\n".join([*lines, "END", ""]))
    return file


def test_from_an_unknown_file_to_a_mended_one_in_two_commands(run: Run, strange: Path) -> None:
    before = strange.read_bytes()
    said = run("audit", str(strange))
    assert said.code == 1
    for name, code in (("CH3OH", "jump-cp"), ("C2H4", "jump-h"), ("HCN", "jump-s")):
        line = next(line for line in said.out.splitlines() if f": {name}: " in line and f"[{code}]" in line)
        assert line.startswith(("error: ", "warning: "))
        assert f"{strange}:" in line
    bad = {line.split(": ")[2] for line in said.out.splitlines() if "mend" in line}
    assert bad == {"CH3OH", "C2H4", "HCN"}

    new = strange.with_name("mended.dat")
    done = run("mend", str(strange), "-o", str(new))
    assert done.code == 0
    assert "3 entries mended" in done.err
    assert "no smooth polynomial has less than" in done.out
    assert strange.read_bytes() == before
    left = [line for line in run("audit", str(new)).out.splitlines() if line.startswith(("error", "warning"))]
    assert [line.split(": ")[2] for line in left] == ["NO2"]  # GRI's own, whose Cp is high at 6000 K
    changed = [(a, b) for a, b in zip(before.split(b"\n"), new.read_bytes().split(b"\n"), strict=True) if a != b]
    assert len(changed) == 9  # three lines of coefficients in each of three records


def test_thresholds_of_failing(run: Run, strange: Path, tmp_path: Path) -> None:
    clean = cantera_data() / "silicon.yaml"
    assert run("audit", str(clean)).code == 0
    assert run("audit", str(clean), "--fail-on", "none").code == 1
    warned = tmp_path / "warned.dat"
    p = read_entries(cantera_data() / "gri30.yaml").named("CH4")[0].polynomial
    assert p is not None
    shifted = replace(p, high=(*p.high[:5], p.high[5] + 2.0, p.high[6]))
    warned.write_bytes(section(record("CH4", {"C": 1, "H": 4}, shifted)))
    levels = ("none", "note", "warn", "refuse")
    assert [run("audit", str(clean), "--fail-on", t).code for t in levels] == [1, 0, 0, 0]
    assert [run("audit", str(warned), "--fail-on", t).code for t in levels] == [1, 1, 0, 0]
    assert [run("audit", str(strange), "--fail-on", t).code for t in levels] == [1, 1, 1, 0]
    assert run("audit", str(warned)).code == 1
    # what is allowed is not counted, and the words say what was not
    assert "Worse than --fail-on note: 1 warning.\n" in run("audit", str(warned)).err
    assert run("audit", str(warned), "--fail-on", "warn").err == ""
    said = run("audit", str(strange), "--fail-on", "warn")
    assert re.search(r"^Worse than --fail-on warn: \d+ errors\.$", said.err, re.MULTILINE)
    assert run("audit", str(strange), str(warned), "--fail-on", "none", "-q").err == ""


def test_levels_of_failing_are_the_severities_of_findings(run: Run) -> None:
    said = run("audit", "--help").out
    for level in ("none", *get_args(Severity)):
        assert level in said
    assert "worse than" in said
    assert run("audit", "x.dat", "--fail-on", "error").code == 2


def test_a_file_that_cannot_be_read_is_3_and_the_others_are_done(run: Run, strange: Path) -> None:
    said = run("audit", "nowhere.dat", str(strange))
    assert said.code == 3
    assert "nowhere.dat: there is no such file" in said.err
    assert "CH3OH" in said.out


def test_quiet_and_verbose(run: Run, strange: Path) -> None:
    quiet, usual, verbose = (run("audit", str(strange), *o).out for o in (["-q"], [], ["-v"]))
    assert "warning: " not in quiet
    assert "note: " not in usual
    assert "notes (all with -v):" in usual
    assert verbose.count("note: ") > 40


def test_json_of_an_audit(run: Run, strange: Path) -> None:
    done = run(
        "audit", str(strange), "--against", str(cantera_data() / "nasa_gas.yaml"), "--against-published", "--json"
    )
    document = json.loads(done.out)
    assert document["heatwright"] == 1
    assert document["failed"] == []
    (audit,) = document["audits"]
    assert (audit["file"], audit["format"], len(audit["entries"])) == (str(strange), "nasa7", 53)
    ch4 = next(e for e in audit["entries"] if e["name"] == "CH4")
    assert ch4["S298_J_mol_K"] == pytest.approx(186.3, abs=0.1)
    assert ch4["nasa7"]["T_K"] == [200.0, 1000.0, 3500.0]
    assert {row["what"] for row in ch4["published"]} == {"H°(298.15)", "S°(298.15)", "Cp°(298.15)"}
    assert abs(ch4["against"]["dH298_kJ_mol"]) < 1.0
    bad = next(e for e in audit["entries"] if e["name"] == "C2H4")
    assert bad["jumps_R"]["h"] == pytest.approx(0.9, abs=1e-5)
    assert {"jump-h"} <= {f["code"] for f in bad["findings"]}
    assert sum(audit["counts"].values()) == sum(len(e["findings"]) for e in audit["entries"]) + len(audit["findings"])


def test_residual_and_published_tables(run: Run, strange: Path) -> None:
    said = run("audit", str(strange), "--against", str(cantera_data() / "gri30.yaml"), "--against-published").out
    row = next(line for line in said.splitlines() if line.startswith("HCN ") and "-3500" not in line and " K" in line)
    assert "200-6000" in row
    assert "CH3O  " in said
    assert "ATcT 1.112" in said


def test_a_release_folder(run: Run, tmp_path: Path, strange: Path) -> None:
    folder = tmp_path / "release"
    folder.mkdir()
    empty = run("audit", str(strange), "--against", str(folder))
    assert empty.code == 3
    (folder / "thermo.dat").write_bytes(section(*CH4))
    assert "52 of the entries have no partner" in run("audit", str(strange), "--against", str(folder), "-v").out


def test_the_audit_of_our_own_sample_entries_has_notes_at_most(run: Run, tmp_path: Path) -> None:
    """Entries of all sample outputs, by atomization, in both formats."""
    for name, data in sample_files().items():
        (tmp_path / name).parent.mkdir(exist_ok=True)
        (tmp_path / name).write_bytes(data)
    outputs = sorted(str(p) for p in tmp_path.glob("*.out"))
    for ending, format_name in ((".dat", "nasa7"), (".yaml", "yaml")):
        file = tmp_path / f"pilot{ending}"
        made = run(
            "entry", *outputs, "--atoms", str(tmp_path / "atoms"), "--format", format_name, "-o", str(file), "-q"
        )
        assert made.code == 0, made.err
        said = run("audit", str(file))
        assert said.code == 0, said.out
        assert f"{len(outputs)} entries; 0 errors in 0, 0 warnings in 0" in said.out
        assert run("mend", str(file), "-o", str(tmp_path / "x"), "--force").code == 0
        assert (tmp_path / "x").read_bytes() == file.read_bytes()


# --- mend -------------------------------------------------------------------------------------------------------------


def test_mend_never_writes_over_its_input_nor_another_file_unasked(run: Run, strange: Path) -> None:
    before = strange.read_bytes()
    same = run("mend", str(strange), "-o", str(strange), "--force")
    assert same.code == 2
    link = strange.with_name("link.dat")
    link.symlink_to(strange)
    assert run("mend", str(strange), "-o", str(link), "--force").code == 2
    other = strange.with_name("other.dat")
    other.write_text("mine")
    assert run("mend", str(strange), "-o", str(other)).code == 3
    assert (strange.read_bytes(), other.read_text()) == (before, "mine")
    assert run("mend", str(strange), "-o", str(other), "--force").code == 0


def test_mend_names_what_it_cannot_mend_and_does_the_rest(run: Run, tmp_path: Path, strange: Path) -> None:
    text = strange.read_text().split("\n")
    at = next(i for i, line in enumerate(text) if line.startswith("NO2 "))
    text[at] = text[at][:-2] + "1"
    strange.write_text("\n".join(text))
    done = run("mend", str(strange), "-o", str(tmp_path / "new.dat"))
    assert done.code == 3
    assert f"{strange}:{at + 1}:79: NO2 cannot be read and stays as it is" in done.err
    assert "3 entries mended" in done.err


def test_mend_json_and_only(run: Run, tmp_path: Path, strange: Path) -> None:
    done = run("mend", str(strange), "-o", str(tmp_path / "new.dat"), "--only", "C2H4", "--json")
    document = json.loads(done.out)
    (m,) = document["mended"]
    assert (m["name"], m["anchor_K"], m["old"]["T_K"]) == ("C2H4", 298.15, [200.0, 1000.0, 3500.0])
    assert m["minimax_dCp_R"] <= m["max_dCp_R"] <= 1.05 * m["minimax_dCp_R"]
    assert run("mend", str(strange), "-o", str(tmp_path / "x.dat"), "--only", "C2H5OH").code == 3


def test_neither_command_loads_cclib_or_scipy() -> None:

    code = (
        "import sys; from heatwright.cli.main import cli;"
        f"cli(['audit', {str(cantera_data() / 'gri30.yaml')!r}, '-q'], standalone_mode=False);"
        "sys.exit(any(m in sys.modules for m in ('cclib', 'scipy', 'jinja2')))"
    )
    assert subprocess.run([sys.executable, "-c", code], capture_output=True, check=False).returncode == 0


@pytest.mark.parametrize("command", [["audit"], ["mend", "-o", "x.dat"]])
def test_an_output_is_no_thermo_file(run, samples: Path, tmp_path: Path, monkeypatch, command: list[str]) -> None:
    monkeypatch.chdir(tmp_path)
    done = run(*command, str(samples / "CH3OH.out"))
    assert done.code == 3
    (line,) = [line for line in done.err.splitlines() if line.startswith("error")]
    assert "the file is an output of NWChem; expected a thermo file. `heatwright entry` makes" in line
    assert not (tmp_path / "x.dat").exists()
