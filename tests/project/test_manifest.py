"""Reading manifests: what they say, and a sentence with file and line for everything that they cannot say."""

from __future__ import annotations

import os
import re
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from bad_manifests import BAD, A
from heatwright.findings import Refused
from heatwright.project.keys import KEYS, TABLES, keys_of
from heatwright.project.manifest import load_manifest
from heatwright.project.manifest_types import (
    FitChoice,
    FormationChoice,
    Manifest,
    ModelChoice,
    ReadingChoice,
    TorsionChoice,
    canonical_hash,
)
from heatwright.project.toml_text import toml_key, toml_value
from heatwright.resources import sample_outputs

Write = Callable[..., Path]


@pytest.fixture
def write(tmp_path: Path) -> Write:
    """Writes files below a folder of the test: ``write({"a.toml": text, "x.out": ""})`` or just the manifest's text."""

    def writer(files: dict[str, str] | str, **more: str) -> Path:
        files = {"heatwright.toml": files} if isinstance(files, str) else files
        for name, text in {**files, **more}.items():
            (tmp_path / name).parent.mkdir(parents=True, exist_ok=True)
            (tmp_path / name).write_text(text, encoding="utf-8")
        return tmp_path

    return writer


def faults(folder: Path, **options: bool) -> list[str]:
    with pytest.raises(Refused) as refused:
        load_manifest(folder / "heatwright.toml", **options)
    return [str(f) for f in refused.value.findings]


def fault(folder: Path, **options: bool) -> str:
    (one,) = faults(folder, **options)
    return one


WHOLE = """
[mechanism]
name = "pilot burner"
release = "out/release"
store = "cache.sqlite"
units = "kcal"
pressure = "1atm"
range = [300, 5000]
common = "auto"
frequency-scale = 0.96
zpe-scale = 0.98
low-modes = "floor"
cutoff = 50
route = "atomization"
atoms = "atoms"
accept = ["solvent"]
electron = "stationary"

[levels.high]
atoms = "high/atoms"
references = "high/references"
zero-kelvin = "high/e0.csv"

[species.CH3OH]
output = "CH3OH.out"
energy = "CH3OH_sp.out"
level = "high"
job = 2
charge = 0
multiplicity = 1
isotopes = ["H=D"]
accept-imaginary = 20
torsions = ["scan", "3-1-2-4 n=3 V=373 cm-1", "1-2-3-4 other scan.csv"]
torsion-coupling = true
optical-isomers = 2
symmetry-reason = "as drawn"
symmetry-tolerance = 0.02
electronic = "0:1"
masses = "average"
rotation = "corrected"
uncertainty = "scale=0.02"
note = "a  note"
comments = ["one", "two"]

["species"."CH2(S)"]
output = "./x/../CH2.out"
conformers = ["c1.out", { output = "c2.out", energy = "c2e.out" }]
low-modes = "interpolate"
averaging-moment = 2e-44
dHf298 = "-10 kcal/mol"
source = "here"
spin-orbit = true
trust-levels = true
"""


def test_everything_that_can_be_said(write: Write) -> None:
    folder = write(WHOLE)
    m = load_manifest(folder)
    assert (m.mechanism.name, m.mechanism.units) == ("pilot burner", "kcal")
    assert (m.mechanism.release.shown, m.mechanism.store.shown) == ("out/release", "cache.sqlite")
    second, first = m.species  # sorted by name
    assert (first.name, second.name) == ("CH3OH", "CH2(S)")
    assert [p.shown for p in first.outputs] == ["CH3OH.out", "CH3OH_sp.out"]
    assert first.files[0].output.path == str(folder / "CH3OH.out")
    assert first.reading == ReadingChoice(
        job=2, charge=0, multiplicity=1, isotopes=("H=D",), accept=("solvent",), accept_imaginary_cm1=20.0
    )
    scans = [t for t in first.model.torsions if t.scan is not None]
    assert [(t.atoms, t.scan.shown) for t in scans if t.scan] == [("", "scan"), ("1-2-3-4", "other scan.csv")]
    assert first.model.torsions[1] == TorsionChoice(barrier="3-1-2-4 n=3 V=373 cm-1")
    assert first.model == ModelChoice(
        pressure="1atm", frequency_scale=0.96, zpe_scale=0.98, low_modes="floor", cutoff_cm1=50.0,
        rotation="corrected", torsions=first.model.torsions, torsion_coupling=True, symmetry_reason="as drawn",
        optical_isomers=2, symmetry_tolerance_A=0.02, electronic="0:1", masses="average", uncertainty="scale=0.02",
    )  # fmt: skip
    assert first.fit == FitChoice(t_low_K=300.0, t_common_K="auto", t_high_K=5000.0)
    assert first.formation.folders.atoms is not None
    assert first.formation.folders.atoms.shown == "high/atoms"
    assert first.formation.folders.reference_table is None
    assert (first.note, first.comments, first.where) == ("a note", ("one", "two"), "heatwright.toml:24")
    assert second.files[0].output.shown == "CH2.out"
    assert [p.shown for p in second.outputs] == ["CH2.out", "c1.out", "c2.out", "c2e.out"]
    assert second.model.low_modes == "interpolate"
    assert second.model.cutoff_cm1 == 50.0
    assert second.model.averaging_moment_kg_m2 == 2e-44
    expected = FormationChoice(
        route=None, dHf298="-10 kcal/mol", source="here", trust_levels=True, spin_orbit=True, electron="stationary",
        folders=second.formation.folders,
    )  # fmt: skip
    assert second.formation == expected
    line = WHOLE.splitlines().index('["species"."CH2(S)"]') + 1
    assert second.where == f"heatwright.toml:{line}"


def test_an_empty_manifest_has_defaults(write: Write) -> None:
    m = load_manifest(write(""))
    assert m.species == ()
    assert (m.mechanism.name, m.mechanism.release.shown, m.mechanism.units) == ("mechanism", "release", "kJ")


def test_a_table_that_says_nothing_has_the_defaults_of_the_command_line(write: Write) -> None:
    (one,) = load_manifest(write('[species.A]\noutput = "a.out"\n')).species
    assert (one.reading, one.model, one.fit) == (ReadingChoice(), ModelChoice(), FitChoice())
    assert one.formation == FormationChoice()


def test_the_sample_project() -> None:
    m = load_manifest(str(sample_outputs()))
    assert len(m.species) == 12
    assert m.mechanism.name == "pilot burner"
    given = {s.name: s.formation.dHf298 for s in m.species if s.formation.dHf298}
    fuels = {"CH3OH": "-200.70 +/- 0.18 kJ/mol", "CH3OCH3": "-184.02 +/- 0.44 kJ/mol"}  # ATcT 1.112
    assert given == {**fuels, "H2": "0 kJ/mol", "N2": "0 kJ/mol", "O2": "0 kJ/mol"}
    assert all(Path(p.path).is_file() for s in m.species for p in s.outputs)


def test_the_same_manifest_elsewhere_says_the_same(tmp_path: Path) -> None:
    for name in ("here", "there"):
        (tmp_path / name).mkdir()
        (tmp_path / name / "heatwright.toml").write_text(WHOLE)
    one, two = (load_manifest(tmp_path / name) for name in ("here", "there"))
    assert [canonical_hash(s) for s in one.species] == [canonical_hash(s) for s in two.species]


# --- defaults below own values ---------------------------------------------------------------------------------------


def only(m: Manifest, name: str = "A"):  # noqa: ANN201
    return next(s for s in m.species if s.name == name)


@pytest.mark.parametrize(
    ("above", "own", "due"),
    [
        ('scale = "published"', "frequency-scale = 1\nzpe-scale = 0.9", (None, 1.0, 0.9, False)),
        ('scale = "published"', "anharmonic = true", (None, None, None, True)),
        ("frequency-scale = 0.9\nzpe-scale = 0.8", 'scale = "published"', ("published", None, None, False)),
        ("frequency-scale = 0.9\nzpe-scale = 0.8", "zpe-scale = 1", (None, 0.9, 1.0, False)),
        ("frequency-scale = 0.9", "anharmonic = true", (None, None, None, True)),
        ("anharmonic = true", "anharmonic = false", (None, None, None, False)),
        ("anharmonic = true", 'scale = "published"', ("published", None, None, False)),
    ],
)
def test_an_own_scale_factor_takes_the_place_of_others(write: Write, above: str, own: str, due: tuple) -> None:
    model = only(load_manifest(write(f'[mechanism]\n{above}\n[species.A]\noutput = "a"\n{own}\n'))).model
    assert (model.scale, model.frequency_scale, model.zpe_scale, model.anharmonic) == due


@pytest.mark.parametrize(
    ("above", "own", "due"),
    [
        ('low-modes = "floor"\ncutoff = 50', "", ("floor", 50.0, None)),
        ('low-modes = "floor"\ncutoff = 50', "cutoff = 80", ("floor", 80.0, None)),
        ('low-modes = "floor"\ncutoff = 50', 'low-modes = "harmonic"', ("harmonic", None, None)),
        ('low-modes = "interpolate"\naveraging-moment = 1e-44', 'low-modes = "floor"', ("floor", None, None)),
    ],
)
def test_an_own_treatment_of_low_modes(write: Write, above: str, own: str, due: tuple) -> None:
    model = only(load_manifest(write(f'[mechanism]\n{above}\n[species.A]\noutput = "a"\n{own}\n'))).model
    assert (model.low_modes, model.cutoff_cm1, model.averaging_moment_kg_m2) == due


@pytest.mark.parametrize(
    ("above", "own", "route"),
    [
        ('route = "atomization"', 'dHf298 = "1 kJ/mol"', None),
        ('route = "best"', 'dHf298 = "1 kJ/mol"', "best"),
        ('route = "atomization"', 'dHf298 = "1 kJ/mol"\nroute = "atomization"', "atomization"),
        ('route = "network"', 'reaction = "A + B -> C"', None),
        ('route = "reaction"', 'reaction = "A + B -> C"', "reaction"),
        ('route = "network"', 'route = "atomization"', "atomization"),
    ],
)
def test_an_own_way_to_the_enthalpy_of_formation(write: Write, above: str, own: str, route: str | None) -> None:
    text = f'[mechanism]\natoms = "a"\nreferences = "r"\n{above}\n[species.A]\noutput = "a"\n{own}\n'
    assert only(load_manifest(write(text))).formation.route == route


def test_levels(write: Write) -> None:
    text = """
    [mechanism]
    level = "low"
    [levels.low]
    atoms = "atoms"
    references = "refs"
    [levels."CCSD(T)"]
    atoms = "high"
    [species.A]
    output = "a"
    [species.B]
    output = "b"
    level = "CCSD(T)"
    [species.C]
    output = "c"
    atoms = "other"
    """
    m = load_manifest(write(text))
    shown = {
        s.name: [p and p.shown for p in (s.formation.folders.atoms, s.formation.folders.references)] for s in m.species
    }
    assert shown == {"A": ["atoms", "refs"], "B": ["high", None], "C": ["other", "refs"]}


# --- includes and globs ----------------------------------------------------------------------------------------------


def test_includes_inherit_and_count_paths_from_their_own_folder(write: Write) -> None:
    folder = write(
        {
            "heatwright.toml": '[mechanism]\ninclude = ["more/*.toml", "last.toml"]\nrotation = "corrected"\n'
            'common = 1100\n[levels.x]\natoms = "atoms"\n',
            "more/b.toml": '[species.B]\noutput = "B.out"\nlevel = "x"\n',
            "more/a.toml": '[mechanism]\ncommon = 1200\ninclude = "deep/c.toml"\n[species.A]\noutput = "../A.out"\n',
            "more/deep/c.toml": '[species.C]\noutput = "C.out"\n',
            "last.toml": '[[outputs]]\nglob = "more/*.log"\n',
            "more/D.log": "",
        }
    )
    m = load_manifest(folder)
    assert m.includes == ("last.toml", "more/a.toml", "more/b.toml", "more/deep/c.toml")
    seen = {s.name: (s.files[0].output.shown, s.fit.t_common_K, s.where) for s in m.species}
    assert seen == {
        "A": ("A.out", 1200.0, "more/a.toml:4"),
        "B": ("more/B.out", 1100.0, "more/b.toml:1"),
        "C": ("more/deep/C.out", 1200.0, "more/deep/c.toml:1"),
        "D": ("more/D.log", 1100.0, "last.toml:2"),
    }
    assert {s.model.rotation for s in m.species} == {"corrected"}
    assert only(m, "B").formation.folders.atoms.shown == "atoms"
    assert only(m, "A").files[0].output.path == str(folder / "A.out")


def test_a_glob_makes_species_and_leaves_what_tables_name(write: Write) -> None:
    names = ("CH4.out", "H2O.log.gz", "N2.out", "N2_sp.out", "c1.out", "sub/O2.out", ".hidden.out")
    text = """
    [[outputs]]
    glob = ["*.out", "*.gz", "**/O2.out"]
    except = ["*_sp.out"]
    rotation = "corrected"
    note = "found"
    [species.water]
    output = "H2O.log.gz"
    conformers = ["c?.out"]
    """
    m = load_manifest(write(text, **dict.fromkeys(names, "")))
    assert [s.name for s in m.species] == ["CH4", "N2", "O2", "water"]
    assert next((s.model.rotation, s.note) for s in m.species) == ("corrected", "found")
    assert [p.shown for p in only(m, "water").outputs] == ["H2O.log.gz", "c1.out"]


def test_a_glob_never_means_manifests_the_store_or_the_release(write: Write) -> None:
    folder = write(
        '[mechanism]\ninclude = "more/m.toml"\n[[outputs]]\nglob = "**"\n',
        **{
            "more/m.toml": '[species.B]\noutput = "b.out"\n',
            "more/b.out": "",
            "a.out": "",
            "kept": "",
            "release/thermo.dat": "",
            "release/thermo.yaml": "",
            "store.sqlite": "",
        },
    )
    text = (folder / "heatwright.toml").read_text()
    (folder / "heatwright.toml").write_text(text.replace("[mechanism]", '[mechanism]\nstore = "store.sqlite"'))
    assert [s.name for s in load_manifest(folder).species] == ["B", "a", "kept"]


def test_a_glob_of_conformers_leaves_out_the_output_itself(write: Write) -> None:
    text = '[species.A]\noutput = "a1.out"\nconformers = "a*.out"\n'
    m = load_manifest(write(text, **dict.fromkeys(("a3.out", "a1.out", "a2.out"), "")))
    assert [p.shown for p in only(m).outputs] == ["a1.out", "a2.out", "a3.out"]


def test_globs_do_not_depend_on_the_order_of_the_file_system(write: Write, monkeypatch: pytest.MonkeyPatch) -> None:
    folder = write('[[outputs]]\nglob = "**/*.out"\n', **{f"d{i}/S{9 - i}.out": "" for i in range(9)})
    before = load_manifest(folder)
    scandir = os.scandir

    class Reversed:
        def __init__(self, path: str) -> None:
            self.inner = scandir(path)

        def __enter__(self):  # noqa: ANN204
            return iter(list(self.inner.__enter__())[::-1])

        def __exit__(self, *error: object) -> None:
            self.inner.__exit__(*error)

    monkeypatch.setattr(os, "scandir", lambda path=".": Reversed(path))
    assert load_manifest(folder) == before


# --- bad input -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("case", BAD)
def test_bad_input_gets_a_sentence_with_file_and_line(write: Write, case: str) -> None:
    text, due = BAD[case]
    said = fault(write(text))
    assert said.startswith(f"error: {due}")
    assert re.search(r"\[[a-z-]+\]$", said)


def test_all_faults_are_told_at_once_in_the_order_of_lines(write: Write) -> None:
    text = f'[species.B]\noutput = 1\njob = 0\n{A}charge = 1.5\n[[outputs]]\nglob = "q*"\n[mechanism]\nunits = "eV"\n'
    lines = [re.match(r"error: heatwright.toml:(\d+):", said)[1] for said in faults(write(text))]  # type: ignore[index]
    assert lines == ["2", "3", "6", "10"]


def test_a_fault_in_one_key_brings_no_others_in_its_train(write: Write) -> None:
    assert len(faults(write(f'{A}dHf298 = "x"\nsource = "s"\n'))) == 1
    assert len(faults(write(f'[mechanism]\natoms = 3\nroute = "atomization"\n{A}'))) == 1


@pytest.mark.parametrize("chain", [("heatwright.toml",), ("a.toml", "heatwright.toml"), ("a.toml", "b.toml", "a.toml")])
def test_a_circle_of_includes_is_told_link_by_link(write: Write, chain: tuple[str, ...]) -> None:
    links = list(zip(("heatwright.toml", *chain), chain, strict=False))
    said = fault(write({here: f'[mechanism]\n\ninclude = "{there}"\n' for here, there in links}))
    circle = ("heatwright.toml", *chain)
    circle = circle[circle.index(chain[-1]) :]
    assert f"{links[-1][0]}:3: manifests include each other in a circle: {' includes '.join(circle)}." in said
    assert said.endswith("[include-cycle]")


def test_a_circle_through_a_symbolic_link(write: Write) -> None:
    folder = write('[mechanism]\ninclude = "link.toml"\n')
    (folder / "link.toml").symlink_to(folder / "heatwright.toml")
    assert "heatwright.toml includes link.toml" in fault(folder)


def test_a_manifest_included_twice(write: Write) -> None:
    files = {"heatwright.toml": '[mechanism]\ninclude = ["a.toml",\n "?.toml"]\n', "a.toml": A}
    assert fault(write(files)).startswith("error: heatwright.toml:3: a.toml is included twice")


def test_what_an_included_manifest_cannot_say(write: Write) -> None:
    inner = '[mechanism]\nname = "x"\npressure = "1atm"\n[levels.l]\natoms = "a"\n'
    outer = '[mechanism]\ninclude = "a.toml"\n[levels.l]\natoms = "a"\n'
    said = faults(write({"heatwright.toml": outer, "a.toml": inner}))
    assert [s.removeprefix("error: ").split(" [")[0] for s in said] == [
        "a.toml:2: name is for the outermost manifest, heatwright.toml, and this one is included (heatwright.toml:2). "
        "Leave it out here.",
        "a.toml:3: the standard pressure is 1atm here and 1bar in heatwright.toml, by default; expected one for the "
        "whole mechanism.",
        "a.toml:4: the level 'l' is there already (heatwright.toml:3). Give it another name.",
    ]


def test_one_name_in_two_files(write: Write) -> None:
    files = {
        "heatwright.toml": f'{A}[mechanism]\ninclude = "more.toml"\n',
        "more.toml": '\n[species.A]\noutput = "b"\n',
    }
    said = fault(write(files))
    assert said == (
        "error: more.toml:2: there is a species A already (heatwright.toml:1: a.out), and this one is b. Give one of "
        "them another name, in a table [species.NAME] of its own. [duplicate-name]"
    )


def test_one_name_from_two_folders_of_a_glob(write: Write) -> None:
    said = fault(write('[[outputs]]\nglob = "*/A.out"\n', **{"x/A.out": "", "y/A.out": ""}))
    assert said.startswith(
        "error: heatwright.toml:2: there is a species A already (heatwright.toml:2: x/A.out), and this"
    )


def test_two_globs_that_find_one_file(write: Write) -> None:
    text = '[[outputs]]\nglob = "*.out"\n[[outputs]]\nglob = "a*"\n'
    assert [s[-16:] for s in faults(write(text, **{"a.out": ""}))] == ["[duplicate-name]", ". [file-twice]"[-16:]][
        :1
    ] + [s[-16:] for s in faults(write(text, **{"a.out": ""}))[1:]]
    assert faults(write(text, **{"a.out": ""}))[1].startswith(
        "error: heatwright.toml:4: a.out is used for a and for a (h"
    )


def test_a_file_under_two_names_is_one_file(write: Write) -> None:
    folder = write(f'{A}[species.B]\noutput = "b.out"\n', **{"a.out": "x"})
    (folder / "b.out").symlink_to("a.out")
    assert "b.out is used for B and for A" in fault(folder)


def test_another_job_or_other_isotopes_of_one_file_are_another_species(write: Write) -> None:
    text = f'{A}[species.B]\noutput = "a.out"\njob = 2\n[species.D]\noutput = "a.out"\nisotopes = "H=D"\n'
    assert len(load_manifest(write(text)).species) == 3


def test_manifests_that_cannot_be_read(tmp_path: Path) -> None:
    assert "`heatwright start DIR` writes a first one." in fault(tmp_path)
    (tmp_path / "heatwright.toml").write_bytes(b"[mechanism]\nname = '\xff'\n")
    assert "byte 20 is no UTF-8" in fault(tmp_path)
    (tmp_path / "heatwright.toml").write_bytes(b"\xef\xbb\xbf" + A.encode())
    assert len(load_manifest(tmp_path).species) == 1


# --- staying in the project ------------------------------------------------------------------------------------------

LEAVING = {
    "output": '[species.A]\noutput = "../a.out"\n',
    "absolute": '[species.A]\noutput = "/etc/passwd"\n',
    "energy": f'{A}energy = "../e.out"\n',
    "conformer": f'{A}conformers = ["../c.out"]\n',
    "conformer's energy": f'{A}conformers = [{{ output = "c", energy = "../e" }}]\n',
    "scan": f'{A}torsions = ["1-2-3-4 ../scan"]\n',
    "atoms": '[mechanism]\natoms = "../atoms"\n',
    "references": f'{A}references = "x/../../r"\n',
    "table": '[levels.l]\nzero-kelvin = "../e0.csv"\n',
    "include": '[mechanism]\ninclude = "../other/*.toml"\n',
    "glob": '[[outputs]]\nglob = "../*/o.out"\n',
    "release": '[mechanism]\nrelease = "../release"\n',
    "store": '[mechanism]\nstore = "../store"\n',
    "link": '[species.A]\noutput = "link.out"\n',
    "linked folder": '[species.A]\noutput = "folder/x.out"\n',
    "link in a folder": '[mechanism]\natoms = "atoms"\n',
}


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """A project with ways out of it."""
    inside, other = tmp_path / "project", tmp_path / "other"
    for folder in (inside, other, inside / "atoms"):
        folder.mkdir()
    for file in (other / "x.out", other / "m.toml", other / "o.out"):
        file.write_text("")
    (inside / "link.out").symlink_to(other / "x.out")
    (inside / "folder").symlink_to(other)
    (inside / "atoms" / "H.out").symlink_to(other / "x.out")
    return inside


@pytest.mark.parametrize("case", LEAVING)
def test_a_path_that_leaves_a_confined_project(project: Path, case: str) -> None:
    (project / "heatwright.toml").write_text(LEAVING[case])
    said = fault(project, confine=True)
    assert re.match(r"error: heatwright.toml:\d: '.*' leads to /.*, outside of the project; expected inside /", said)
    assert said.endswith("[outside-project]")
    load_manifest(project)  # without confinement it is the user's business


def test_what_stays_in_the_project_is_confined(project: Path) -> None:
    (project / "atoms" / "H.out").unlink()
    (project / "heatwright.toml").write_text(f'{A}energy = "x/../e.out"\n[mechanism]\natoms = "atoms"\n')
    assert load_manifest(project, confine=True) == load_manifest(project)


# --- wrong kinds, for every key --------------------------------------------------------------------------------------

SCALARS = (
    st.text(max_size=5)
    | st.integers()
    | st.floats(allow_nan=True)
    | st.booleans()
    | st.lists(st.integers(), max_size=2)
)


def good(kind_schema: dict) -> st.SearchStrategy:
    """Values that a kind's own schema allows and examples."""
    if "enum" in kind_schema:
        return st.sampled_from(kind_schema["enum"])
    if "examples" in kind_schema:
        return st.sampled_from(kind_schema["examples"])
    if "anyOf" in kind_schema:
        return st.one_of([good(part) for part in kind_schema["anyOf"] if "const" not in part])
    if kind_schema["type"] == "array":
        return st.lists(good(kind_schema["items"]), min_size=1, max_size=2)
    return {
        "boolean": st.booleans(),
        "integer": st.integers(1, 5),
        "number": st.floats(0.5, 5.0),
        "string": st.sampled_from(["a", "b.out"]),
        "object": st.just({"output": "c.out"}),
    }[kind_schema["type"]]


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=150, deadline=None)
@given(st.data())
def test_any_value_for_any_key_is_read_or_refused_with_its_line(tmp_path: Path, data: st.DataObject) -> None:
    place = data.draw(st.sampled_from(sorted(TABLES)))
    key = data.draw(st.sampled_from(sorted(keys_of(place))))
    value = data.draw(SCALARS | good(dict(keys_of(place)[key].kind.schema)))
    try:
        written = toml_value(value)
        written.encode()
    except (ValueError, UnicodeEncodeError):
        return
    head = {"mechanism": "[mechanism]", "levels": "[levels.l]", "species": "[species.A]", "outputs": "[[outputs]]"}[
        place
    ]
    (tmp_path / "heatwright.toml").write_text(f"{head}\n{key} = {written}\n", encoding="utf-8")
    try:
        load_manifest(tmp_path)
    except Refused as error:
        for f in error.findings:
            assert re.match(r"heatwright\.toml:[12]: ", f.text), f.text


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    st.dictionaries(
        st.text(st.characters(min_codepoint=34, max_codepoint=126, exclude_characters="&!"), min_size=1, max_size=18),
        st.fixed_dictionaries(
            {},
            optional={
                "job": st.integers(1, 9),
                "charge": st.integers(-3, 3),
                "symmetry-number": st.integers(1, 60),
                "note": st.text(min_size=1).map(lambda t: " ".join(t.split())).filter(str.strip),
                "frequency-scale": st.floats(1e-3, 2.0),
                "torsion-coupling": st.booleans(),
            },
        ),
        max_size=5,
    )
)
def test_what_is_written_is_what_is_read(tmp_path: Path, tables: dict[str, dict[str, object]]) -> None:
    text = ""
    for index, (name, values) in enumerate(tables.items()):
        try:
            text += f"[species.{toml_key(name)}]\noutput = 'f{index}.out'\n"
            text += "".join(f"{key} = {toml_value(value)}\n" for key, value in values.items())
            text.encode()
        except UnicodeEncodeError:
            return
    (tmp_path / "heatwright.toml").write_text(text, encoding="utf-8", newline="\n")
    read = {s.name: s for s in load_manifest(tmp_path).species}
    assert list(read) == sorted(tables)
    for name, values in tables.items():
        s = read[name]
        assert (s.reading.job, s.reading.charge, s.model.symmetry_number) == tuple(
            values.get(key) for key in ("job", "charge", "symmetry-number")
        )
        assert s.note == values.get("note", "")
        assert s.model.frequency_scale == values.get("frequency-scale")
        assert s.model.torsion_coupling == values.get("torsion-coupling", False)


def test_every_key_fills_a_field_that_exists_or_is_used_by_name() -> None:
    by_name = {
        "name",
        "release",
        "store",
        "units",
        "include",
        "output",
        "energy",
        "conformers",
        "glob",
        "except",
        "level",
    }
    assert {key.name for key in KEYS if not key.field} == by_name
    assert len({key.name for key in KEYS}) == len(KEYS)
