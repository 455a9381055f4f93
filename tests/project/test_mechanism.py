"""Mechanisms in Cantera's YAML: every reaction as Cantera itself reads it, wherever the sections and species are."""

from __future__ import annotations

from pathlib import Path

import cantera as ct
import pytest

from heatwright.findings import Refused
from heatwright.project.mechanism import Mechanism, read_mechanism
from releases import CANTERA_DATA, GRI

REFERENCE = [
    ("gri30.yaml", "gri30"),
    ("gri30_ion.yaml", "gas"),  # reactions and species of gri30.yaml
    ("ohn.yaml", "gas"),  # declared species out of another file, without those of undeclared elements
    ("h2o2.yaml", "ohmech"),
    ("air.yaml", "air"),
    ("nDodecane_Reitz.yaml", "nDodecane_IG"),
    ("SiF4_NH3_mec.yaml", "gas"),  # sections of its own for each phase
    ("example_data/ammonia-CO-H2-Alzueta-2023.yaml", "linear-Burke"),
    ("example_data/methane-plasma-pavan-2023.yaml", "gri30-plasma"),
]
SURFACES = [
    ("ptcombust.yaml", "Pt_surf"),
    ("methane_pox_on_pt.yaml", "Pt_surf"),
    ("diamond.yaml", "diamond_100"),
    ("SiF4_NH3_mec.yaml", "SI3N4"),
    ("sofc.yaml", "tpb"),
]


def equations(mechanism: Mechanism) -> list[tuple[dict, dict, bool]]:
    return [(dict(r.equation.reactants), dict(r.equation.products), r.equation.reversible) for r in mechanism.reactions]


@pytest.mark.parametrize(("name", "phase"), [*REFERENCE, *SURFACES])
def test_the_reactions_are_those_that_cantera_reads(name: str, phase: str) -> None:
    path = CANTERA_DATA / name
    if not path.is_file():
        pytest.skip(f"this version of Cantera does not ship {name}")
    ct.suppress_thermo_warnings()
    made = ct.Interface(str(path), phase) if (name, phase) in SURFACES else ct.Solution(str(path), phase)
    reference = [(r.reactants, r.products, r.reversible) for r in made.reactions()]
    assert equations(read_mechanism(path, phase)) == reference


def test_all_phases_together_count_each_reaction_once() -> None:
    both = read_mechanism(CANTERA_DATA / "ptcombust.yaml")
    alone = [read_mechanism(CANTERA_DATA / "ptcombust.yaml", p) for p in ("gas", "Pt_surf")]
    assert equations(both) == [e for one in alone for e in equations(one)]
    assert [r.number for r in both.reactions] == list(range(1, len(both.reactions) + 1))
    # two phases of one file that share their reactions
    assert len(read_mechanism(CANTERA_DATA / "h2o2.yaml").reactions) == 29


def test_the_place_and_kind_of_a_reaction_are_kept() -> None:
    reaction = read_mechanism(GRI).reactions[50]
    lines = GRI.read_text(encoding="utf-8").splitlines()
    assert reaction.text in lines[int(reaction.where.rsplit(":", 1)[1]) - 1]
    assert {r.kind for r in read_mechanism(GRI).reactions} == {"", "three-body", "falloff"}
    assert sum(r.duplicate for r in read_mechanism(GRI).reactions) == GRI.read_text(encoding="utf-8").count(
        "duplicate: true"
    )


SPECIES = "- {name: A, composition: {H: 1}}\n- {name: B, composition: {H: 1}}\n- {name: C, composition: {C: 1}}\n"


def written(folder: Path, text: str, name: str = "mech.yaml") -> Path:
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return path


def test_sections_in_this_and_in_other_files(tmp_path: Path) -> None:
    written(tmp_path, f"species:\n{SPECIES}more-reactions:\n- equation: A => B\n- equation: B => C\n", "other.yaml")
    path = written(
        tmp_path,
        "phases:\n- name: one\n  thermo: ideal-gas\n  kinetics: gas\n"
        "  species: [{other.yaml/species: [A, B]}]\n"
        "  reactions:\n  - own: all\n  - other.yaml/more-reactions: declared-species\n  - ignored: none\n"
        "own:\n- equation: A + A <=> B + B\n  duplicate: true\n",
    )
    mechanism = read_mechanism(path)
    assert [r.text for r in mechanism.reactions] == ["A + A <=> B + B", "A => B"]
    assert mechanism.reactions[0].duplicate
    assert not mechanism.reactions[1].duplicate
    assert mechanism.reactions[1].where.endswith("other.yaml:6")
    assert mechanism.findings == ()


def test_a_list_of_section_names(tmp_path: Path) -> None:
    path = written(
        tmp_path,
        "phases:\n- {name: one, thermo: ideal-gas, species: [A, B], kinetics: gas, reactions: [r1, r2]}\n"
        "r1:\n- equation: A => B\nr2:\n- equation: B => A\n",
    )
    assert [r.text for r in read_mechanism(path).reactions] == ["A => B", "B => A"]


def test_a_file_without_phases_gives_all_its_reactions(tmp_path: Path) -> None:
    path = written(tmp_path, "reactions:\n- equation: A => B\nfurther-reactions:\n- equation: B => A\n")
    mechanism = read_mechanism(path)
    assert [r.text for r in mechanism.reactions] == ["A => B", "B => A"]
    assert mechanism.findings == ()


def test_phases_that_name_no_reactions_are_said(tmp_path: Path) -> None:
    path = written(
        tmp_path, "phases:\n- {name: gas, thermo: ideal-gas, species: [A, B]}\nreactions:\n- equation: A => B\n"
    )
    mechanism = read_mechanism(path)
    assert [r.text for r in mechanism.reactions] == ["A => B"]
    assert [f.code for f in mechanism.findings] == ["mechanism-choice"]


def test_species_that_no_phase_has_are_a_warning(tmp_path: Path) -> None:
    text = "phases:\n- {name: g, thermo: ideal-gas, species: [A, B], kinetics: gas}\nreactions:\n- equation: A+B => B\n"
    findings = read_mechanism(written(tmp_path, text)).findings
    assert [f.code for f in findings] == ["mechanism-wrong"]
    assert "A+B" in findings[0].text
    assert findings[0].where.endswith("mech.yaml:4")


@pytest.mark.parametrize(
    ("text", "where", "words"),
    [
        ("reactions:\n- equation: A => B\n- equation: A <= B\n", "mech.yaml:3", "no arrow"),
        ("reactions:\n- equation: A => B\n- rate-constant: {A: 1}\n", "mech.yaml:3", "no equation"),
        ("reactions:\n- A => B\n", "mech.yaml:2", "no equation"),
        ("phases:\n- {name: g, kinetics: gas, reactions: [r]}\n", "mech.yaml:2", "no section r"),
        ("phases:\n- {name: g, kinetics: gas, reactions: some}\nreactions: []\n", "mech.yaml:2", "'some'"),
        ("phases:\n- {name: g, reactions: [{x.yaml/r: all}]}\n", "mech.yaml:2", "x.yaml is not to be found"),
        ("phases:\n- {name: g, species: [{mech.yaml/s: all}]}\n", "mech.yaml:2", "no section s in mech.yaml"),
        ("phases:\n- {name: g}\n", "mech.yaml", "no reactions"),
        ("a: [1\n", "mech.yaml:1", "never closed"),
        ("", "mech.yaml", "no reactions"),
    ],
)
def test_what_is_wrong_is_said_with_its_line(tmp_path: Path, text: str, where: str, words: str) -> None:
    with pytest.raises(Refused) as error:
        read_mechanism(written(tmp_path, text))
    finding = error.value.findings[0]
    assert words in finding.text
    assert f"{tmp_path}/{where}" in finding.where


def test_a_phase_that_is_not_there() -> None:
    with pytest.raises(Refused, match="one of its phases: gri30"):
        read_mechanism(GRI, "GRI")


def test_no_file(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="file-missing"):
        read_mechanism(tmp_path / "none.yaml")
    with pytest.raises(Refused, match="file-missing"):
        read_mechanism(tmp_path)
