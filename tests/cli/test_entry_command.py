"""``heatwright entry`` as a user meets it: the good ones done, the bad ones refused, nothing half written."""

from __future__ import annotations

import gzip
import json
import os
import re
from pathlib import Path

import pytest

GIVEN = ("--dHf298", "-200.7 kJ/mol", "--source", "ATcT 1.112")


@pytest.fixture
def methanol(samples: Path) -> Path:
    return samples / "CH3OH.out"


@pytest.fixture
def cut(methanol: Path, tmp_path: Path):
    """The methanol output changed by a function of its text, as a file of its own."""

    def make(change, name: str = "cut.out") -> Path:
        file = tmp_path / name
        file.write_text(change(methanol.read_text()))
        return file

    return make


def test_the_main_job(run, methanol: Path) -> None:
    done = run("entry", methanol, *GIVEN)
    assert done.code == 0
    record = [line for line in done.out.splitlines() if line[:1] not in "!"]
    assert record[0] == "THERMO ALL"
    assert [line[79] for line in record[2:6]] == list("1234")
    assert record[2].startswith("CH3OH                   C   1H   4O   1     G   200.000  6000.000 1000.00")
    assert "largest residuals dCp/R" in done.err
    assert "no such polynomial has dCp/R below" in done.err
    assert "[unscaled]" in done.err
    assert "residuals" in done.out  # in the comment too


def test_scale_factors_said_and_used(run, methanol: Path) -> None:
    done = run("entry", methanol, *GIVEN, "--frequency-scale", 0.9614, "--zpe-scale", 0.9806, "--json")
    plain = run("entry", methanol, *GIVEN, "--json")
    (scaled,), (unscaled,) = (json.loads(r.out)["species"] for r in (done, plain))
    assert scaled["frequency_scale"] == 0.9614
    assert scaled["zpe_kJ_mol"] == pytest.approx(unscaled["zpe_kJ_mol"] * 0.9806, rel=1e-10)
    assert scaled["wavenumbers_cm-1"] == unscaled["wavenumbers_cm-1"]
    assert scaled["H298_minus_H0_kJ_mol"] > unscaled["H298_minus_H0_kJ_mol"]
    assert "[unscaled]" not in done.err


def test_quiet_says_nothing_and_verbose_says_more(run, samples: Path) -> None:
    file, atoms = samples / "H2O.out", samples / "atoms"
    assert run("entry", file, "--atoms", atoms, "-q").err == ""
    verbose = run("entry", file, "--atoms", atoms, "-v")
    ledger = re.findall(r"^ +(-?\d+\.\d+) kJ/mol  ", verbose.err, re.MULTILINE)
    total = float(re.search(r"dHf\(298.15 K\) = (-?\d+\.\d+)", verbose.err)[1])
    assert len(ledger) == 7
    assert sum(map(float, ledger)) == pytest.approx(total, abs=0.004)


def test_all_samples_by_atomization_in_one_file(run, samples: Path, tmp_path: Path) -> None:
    files = sorted(samples.glob("*.out"))
    target = tmp_path / "thermo.dat"
    done = run("entry", *files, "--atoms", samples / "atoms", "-o", target)
    assert done.code == 0
    assert done.out == ""
    names = [line.split()[0] for line in target.read_text().splitlines() if line[79:80] == "1" and line[0] != "!"]
    assert names == [f.stem for f in files]
    assert f"{len(files)} made" in done.err
    again = tmp_path / "again.dat"
    run("entry", *files, "--atoms", samples / "atoms", "-o", again)
    assert again.read_bytes() == target.read_bytes()


def test_the_bad_ones_are_listed_and_the_good_ones_written(run, methanol: Path, samples: Path, tmp_path: Path) -> None:
    bad = tmp_path / "notes.txt"
    bad.write_text("Remember the milk.\n")
    target = tmp_path / "thermo.yaml"
    files = [methanol, bad, samples / "H2O.out"]
    done = run("entry", *files, "--atoms", samples / "atoms", "--format", "yaml", "-o", target)
    assert done.code == 3
    assert re.findall(r"- name: (\S+)\n  composition", target.read_text()) == ["CH3OH", "H2O"]
    assert f"error: {bad}: " in done.err
    assert f"2 made, 1 failed ({bad})" in done.err


def test_json_lists_what_failed(run, methanol: Path, tmp_path: Path) -> None:
    missing = tmp_path / "missing.out"
    done = run("entry", methanol, missing, "--dHf298", "-200.7 kJ/mol", "--dHf298", "1 kJ/mol", "--json")
    document = json.loads(done.out)
    assert done.code == 3
    assert [s["name"] for s in document["species"]] == ["CH3OH"]
    assert document["failed"][0]["file"] == str(missing)
    assert document["failed"][0]["findings"][0]["code"] == "file-missing"


def refused(run, *arguments: object) -> str:
    """The code of the refusal of a run that must fail with exit code 3 and give no product."""
    done = run(*arguments)
    assert done.code == 3
    assert done.out == ""
    first = done.err.splitlines()[0]
    assert first.startswith("error: ")
    return re.search(r"\[([a-z0-9-]+)\]$", first)[1]


def test_not_an_output(run, tmp_path: Path) -> None:
    file = tmp_path / "list.out"
    file.write_text("eggs\nflour\n" * 50)
    assert refused(run, "entry", file, *GIVEN) == "not-an-output"


def test_binary_rubbish(run, tmp_path: Path) -> None:
    file = tmp_path / "noise.out"
    file.write_bytes(bytes(range(256)) * 40)
    assert refused(run, "entry", file, *GIVEN) == "not-an-output"


def test_empty(run, tmp_path: Path) -> None:
    file = tmp_path / "empty.out"
    file.touch()
    assert refused(run, "entry", file, *GIVEN) == "file-empty"


def test_a_folder_and_a_missing_file(run, tmp_path: Path) -> None:
    assert refused(run, "entry", tmp_path, *GIVEN) == "file-missing"
    assert refused(run, "entry", tmp_path / "nowhere.out", *GIVEN) == "file-missing"


def test_cut_before_the_frequencies(run, cut) -> None:
    file = cut(lambda text: text[: text.index("P.Frequency")])
    assert refused(run, "entry", file, *GIVEN) in {"truncated", "no-frequencies"}


def test_cut_in_the_middle_of_the_modes(run, cut) -> None:
    file = cut(lambda text: text[: text.rindex("P.Frequency") + 200])
    assert refused(run, "entry", file, *GIVEN) in {"truncated", "mode-count", "parser-failed"}


def test_cut_after_the_frequencies_is_a_warning(run, cut, methanol: Path) -> None:
    file = cut(lambda text: text[: text.index("Total times  cpu")], "CH3OH.out")
    done = run("entry", file, *GIVEN)
    assert done.code == 0
    assert "warning: " in done.err
    assert "[no-normal-termination]" in done.err

    def coefficients(text: str) -> list[str]:
        return [line for line in text.splitlines() if line[79:80] in set("1234") and line[0] != "!"]

    assert coefficients(done.out) == coefficients(run("entry", methanol, *GIVEN).out)


def test_no_frequencies(run, samples: Path, cut) -> None:
    def single_point(text: str) -> str:
        return text[: text.index("NWChem Analytic Hessian")] + text[text.index(" Total times  cpu") :]

    code = refused(run, "entry", cut(single_point), *GIVEN)
    assert code in {"no-frequencies", "truncated"}


def test_an_imaginary_mode(run, cut) -> None:
    def turned(text: str) -> str:
        return re.sub(r"^( P.Frequency +) (\d\d\d\.\d\d)", r"\1-\2", text, count=1, flags=re.MULTILINE)

    done = run("entry", cut(turned), *GIVEN)
    assert done.code == 3
    assert done.out == ""
    assert "imaginary" in done.err


@pytest.mark.parametrize("what", ["P.Frequency", "Total DFT energy"])
def test_nan(run, cut, what: str) -> None:
    def poisoned(text: str) -> str:
        lines = text.splitlines()
        for i, line in enumerate(lines):
            if what in line:
                lines[i] = re.sub(r"-?\d+\.\d+", lambda m: "NaN".rjust(len(m[0])), line)
        return "\n".join(lines) + "\n"

    file = cut(poisoned)
    done = run("entry", file, *GIVEN)
    assert done.code == 3
    assert done.out == ""
    assert str(file) in done.err


def test_no_enthalpy_of_formation(run, methanol: Path) -> None:
    done = run("entry", methanol)
    assert done.code == 3
    assert done.out == ""
    assert "--dHf298" in done.err
    assert "--atoms DIR" in done.err


def test_atoms_of_another_level(run, methanol: Path, samples: Path, tmp_path: Path) -> None:
    for file in (samples / "atoms").glob("*.out"):
        text = file.read_text()
        (tmp_path / file.name).write_text(text.replace("6-31G*", "6-31+G").replace("6-31g*", "6-31+g"))
    assert refused(run, "entry", methanol, "--atoms", tmp_path) == "level-differs"
    trusted = run("entry", methanol, "--atoms", tmp_path, "--trust-levels")
    assert trusted.code == 0
    assert "[level-trusted]" in trusted.err
    assert "not at the molecule's level" in trusted.out


def test_an_atoms_folder_without_atoms(run, methanol: Path, tmp_path: Path) -> None:
    assert refused(run, "entry", methanol, "--atoms", tmp_path) == "atom-missing"
    assert refused(run, "entry", methanol, "--atoms", tmp_path / "none") == "file-missing"


def test_a_name_that_does_not_fit(run, methanol: Path) -> None:
    assert refused(run, "entry", methanol, *GIVEN, "--name", "methanol-from-the-pilot") == "name-unfit"
    done = run("entry", methanol, *GIVEN, "--name", "methanol-from-the-pilot", "--format", "yaml")
    assert done.code == 0


def test_two_species_of_one_name(run, methanol: Path, tmp_path: Path, samples: Path) -> None:
    twin = tmp_path / "CH3OH.out.gz"
    twin.write_bytes(gzip.compress(methanol.read_bytes()))
    done = run("entry", methanol, twin, samples / "H2O.out", "--atoms", samples / "atoms")
    assert done.code == 3
    assert done.err.count("[duplicate-name]") == 2
    assert "H2O   " in done.out
    assert "CH3OH " not in done.out


def test_an_existing_target(run, methanol: Path, tmp_path: Path) -> None:
    target = tmp_path / "thermo.dat"
    target.write_text("mine\n")
    assert refused(run, "entry", methanol, *GIVEN, "-o", target) == "target-exists"
    assert target.read_text() == "mine\n"
    assert run("entry", methanol, *GIVEN, "-o", target, "--force").code == 0
    assert target.read_text().startswith("THERMO ALL\n")
    assert os.listdir(tmp_path) == ["thermo.dat"]


def test_an_unwritable_target(run, methanol: Path, tmp_path: Path) -> None:
    assert refused(run, "entry", methanol, *GIVEN, "-o", tmp_path / "no" / "thermo.dat") == "target-unwritable"
    assert refused(run, "entry", methanol, *GIVEN, "-o", tmp_path) == "target-unwritable"


def test_a_failed_run_leaves_no_file(run, tmp_path: Path) -> None:
    empty = tmp_path / "empty.out"
    empty.touch()
    assert refused(run, "entry", empty, *GIVEN, "-o", tmp_path / "thermo.dat") == "file-empty"
    assert os.listdir(tmp_path) == ["empty.out"]


@pytest.mark.parametrize(
    "options",
    [
        ("--range", "6000,200"),
        ("--range", "500,3000"),
        ("--common", "100"),
        ("--common", "7000"),
    ],
)
def test_temperatures_that_cannot_be(run, methanol: Path, options: tuple[str, str]) -> None:
    assert refused(run, "entry", methanol, *GIVEN, *options) == "temperature-range"


@pytest.mark.parametrize(
    "options",
    [
        ("--range", "200"),
        ("--range", "a,b"),
        ("--common", "warm"),
        ("--frequency-scale", "-1"),
        ("--frequency-scale", "nan"),
        ("--zpe-scale", "0"),
        ("--electronic", "2"),
        ("--electronic", "5:2"),
        ("--symmetry-number", "0"),
        ("--name", "A", "--name", "B"),
        ("--dHf298", "-1 kJ/mol"),
        ("--atoms", "."),
        ("--nonsense",),
    ],
)
def test_wrong_usage(run, methanol: Path, options: tuple[str, ...]) -> None:
    done = run("entry", methanol, *GIVEN, *options)
    assert done.code == 2
    assert done.out == ""
    assert done.err


def test_an_enthalpy_without_unit_is_wrong_usage(run, methanol: Path) -> None:
    done = run("entry", methanol, "--dHf298", "-200.7")
    assert done.code == 2
    assert "kJ/mol" in done.err


def test_other_temperatures_and_the_best_common_one(run, methanol: Path) -> None:
    fixed = json.loads(run("entry", methanol, *GIVEN, "--json").out)["species"][0]
    done = run("entry", methanol, *GIVEN, "--json", "--common", "auto")
    best = json.loads(done.out)["species"][0]
    assert best["residuals"]["max_dCp_R"] <= fixed["residuals"]["max_dCp_R"]
    assert best["nasa7"]["T_K"][1] == round(best["nasa7"]["T_K"][1])
    short = json.loads(run("entry", methanol, *GIVEN, "--json", "--range", "298.15,3000").out)["species"][0]
    assert short["nasa7"]["T_K"] == [298.15, 1000.0, 3000.0]
    assert short["residuals"]["max_dCp_R"] < fixed["residuals"]["max_dCp_R"] / 3


def test_a_template_of_the_users_own(run, methanol: Path, tmp_path: Path) -> None:
    template = tmp_path / "list.txt"
    template.write_text("{% for s in species %}{{ s.name }} {{ '%.1f' % s.formation.dHf298_kJ_mol }}\n{% endfor %}")
    assert run("entry", methanol, *GIVEN, "--template", template).out == "CH3OH -200.7\n"


@pytest.mark.parametrize(
    ("text", "line"),
    [
        ("first\n{{ species[0].nonsense }}\n", 2),
        ("{% for %}\n", 1),
        ("one\ntwo\n{{ 1 / 0 }}\n", 3),
        ("{{ ''.__class__.__mro__ }}", 1),
        ("x\n{{ cycler.__init__.__globals__ }}", 2),
        ("{% include '/etc/hostname' %}", 1),
        ("{% include '../hidden.txt' %}", 1),
        ("{% macro a() %}{{ a() }}{% endmacro %}\n{{ a() }}", 1),
        ("{{ species.append(1) }}", 1),
        ("{{ document.update({}) }}", 1),
    ],
)
def test_a_template_with_a_fault(run, methanol: Path, tmp_path: Path, text: str, line: int) -> None:
    template = tmp_path / "bad.txt"
    template.write_text(text)
    done = run("entry", methanol, *GIVEN, "--template", template)
    assert done.code == 3
    assert done.out == ""
    assert f"{template}:{line}: " in done.err
    assert "[template-failed]" in done.err


def test_a_missing_template(run, methanol: Path, tmp_path: Path) -> None:
    assert refused(run, "entry", methanol, *GIVEN, "--template", tmp_path / "none.j2") == "template-failed"
    assert refused(run, "entry", methanol, *GIVEN, "--template", tmp_path) == "template-failed"


def test_a_users_symmetry_number_is_recorded(run, methanol: Path) -> None:
    done = run("entry", methanol, *GIVEN, "--symmetry-number", 3)
    assert "symmetry number 3 was given; the geometry says 1" in done.err
    assert "symmetry number 3 was given" in " ".join(line[2:].strip() for line in done.out.splitlines())


def test_levels_given_by_hand(run, samples: Path) -> None:
    plain = json.loads(run("entry", samples / "OH.out", *GIVEN, "--json").out)["species"][0]
    assert plain["electronic_levels_cm-1"] == [[0.0, 2], [139.21, 2]]
    spin = json.loads(run("entry", samples / "OH.out", *GIVEN, "--json", "--electronic", "spin").out)["species"][0]
    assert spin["electronic_levels_cm-1"] == [[0.0, 2]]
    hand = run("entry", samples / "OH.out", *GIVEN, "--json", "--electronic", "0:4")
    assert json.loads(hand.out)["species"][0]["electronic_levels_cm-1"] == [[0.0, 4]]
    assert "[user-value]" in hand.err


def test_a_linear_radical_outside_the_table_is_warned_about(run, samples: Path) -> None:
    assert "[linear-radical]" in run("entry", samples / "O2.out", "--dHf298", "0 kJ/mol", "--source", "element").err
    assert "[linear-radical]" not in run("entry", samples / "OH.out", *GIVEN).err
    assert "[linear-radical]" not in run("entry", samples / "HCO.out", *GIVEN).err


STEEP = "0:1,3000:100000"
"""Electronic levels whose heat capacity no two quartics follow: the closest of them is negative at 200 K."""


@pytest.mark.parametrize("style", ["nasa7", "yaml", "json", "csv"])
def test_an_entry_whose_heat_capacity_is_not_positive_is_not_written(run, samples: Path, style: str) -> None:
    done = run("entry", samples / "N2.out", "--dHf298", "0 kJ/mol", "--electronic", STEEP, "--format", style)
    assert done.code == 3
    assert "N2.out: the polynomial's Cp/R is -7.02 at 200 K" in done.err
    assert "fit a shorter range. [cp-not-positive]" in done.err
    if style == "json":
        document = json.loads(done.out)
        assert document["species"] == []
        assert [f["code"] for f in document["failed"][0]["findings"]] == ["cp-not-positive"]
    else:
        assert done.out == ""
    shorter = ("--range", "250,1000", "--common", "450")  # the advice helps
    again = run("entry", samples / "N2.out", "--dHf298", "0 kJ/mol", "--electronic", STEEP, *shorter)
    assert again.code == 0
    assert "cp-not-positive" not in again.err
