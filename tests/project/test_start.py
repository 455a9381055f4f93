"""A first manifest from a folder of outputs: what is put together, what is said, and that it loads and can be made."""

from __future__ import annotations

import os
import re
import shutil
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from heatwright.cli.main import main
from heatwright.elements import symbol
from heatwright.findings import Refused
from heatwright.molecule import Molecule
from heatwright.project.manifest import load_manifest
from heatwright.project.manifest_types import Manifest
from heatwright.project.start import first_manifest
from heatwright.project.toml_text import toml_value
from heatwright.reading.outputs import read_output
from heatwright.resources import sample_outputs
from heatwright.structure.torsions import rotatable_bonds, turned
from kept_outputs import kept
from manifest_entries import entry_of
from outside import SHARED, needs_shared

SAMPLES = Path(str(sample_outputs()))
CONFORMERS = Path(__file__).parents[1] / "data" / "conformers"
Copy = Callable[..., Path]


@pytest.fixture
def copies(tmp_path: Path) -> Copy:
    """A folder of copies: ``copies({"CH3OH/freq.out": path, "note.txt": "text"})``."""

    def copy(files: dict[str, Path | str]) -> Path:
        folder = tmp_path / "runs"
        for name, source in files.items():
            (folder / name).parent.mkdir(parents=True, exist_ok=True)
            if isinstance(source, Path):
                shutil.copyfile(source, folder / name)
            else:
                (folder / name).write_text(source, encoding="utf-8")
        return folder

    return copy


def started(folder: Path) -> tuple[Manifest, str]:
    """The manifest that is written for a folder, loaded, and its text."""
    text = first_manifest(str(folder)).text
    (folder / "heatwright.toml").write_text(text, encoding="utf-8")
    return load_manifest(folder, confine=True), text


def shown(manifest: Manifest) -> dict[str, list[str]]:
    return {s.name: [p.shown for p in s.outputs] for s in manifest.species}


def atoms(*symbols: str) -> dict[str, Path | str]:
    return {f"atoms/{s}.out": SAMPLES / "atoms" / f"{s}.out" for s in symbols}


def sample(name: str) -> Path:
    return SAMPLES / f"{name}.out"


def by_hand(m: Molecule, **tables: str) -> str:
    """A molecule file with the geometry of a molecule."""
    rows = [[symbol(int(z)), *map(float, x)] for z, x in zip(m.atomic_numbers, m.coordinates_A, strict=True)]
    lines = [f"[molecule]\nmultiplicity = {m.multiplicity}\n[geometry]\natoms = {toml_value(rows)}\nsource = 'test'\n"]
    return "\n".join([*lines, *(f"[{name}]\n{text}\nsource = 'test'\n" for name, text in tables.items())])


# --- the shipped and the optional folders ----------------------------------------------------------------------------


def all_made(manifest: Manifest) -> None:
    for species in manifest.species:
        entry_of(species)  # raises Refused when it cannot be made


def test_the_samples(tmp_path: Path) -> None:
    folder = tmp_path / "burner"
    shutil.copytree(SAMPLES, folder)
    (folder / "heatwright.toml").unlink()
    manifest, text = started(folder)
    assert {n: f[0] for n, f in shown(manifest).items()} == {p.stem: p.name for p in SAMPLES.glob("*.out")}
    assert manifest.mechanism.name == "burner"
    assert {(s.model.scale, s.formation.route) for s in manifest.species} == {("published", "atomization")}
    assert "# C.out, H.out, N.out, O.out at B3LYP/6-31G*" in text
    assert '# [species.N]\n# output = "atoms/N.out"' in text
    all_made(manifest)
    assert first_manifest(str(folder)).text == text  # the same folder, the same bytes


@needs_shared
def test_computed_outputs_with_scans_and_conformers(tmp_path: Path) -> None:
    assert SHARED is not None
    folder = tmp_path / "computed"
    shutil.copytree(SHARED / "computed", folder)
    manifest, text = started(folder)
    scans = {s.name: [t.scan.shown for t in s.model.torsions if t.scan] for s in manifest.species if s.model.torsions}
    assert scans == {
        "CH3OH": ["scans/CH3OH"],
        "CH3OCH3": ["scans/CH3OCH3"],
        "H2O2": ["scans/H2O2"],
        "CH3CH2OH": ["scans/CH3CH2OH_CH3", "scans/CH3CH2OH_OH"],
    }
    assert shown(manifest)["trans_butane"] == ["trans_butane.out.gz", "gauche_butane.out.gz"]
    assert "the mirror image of CH3CH2OH_gauche.out.gz, which optical isomers count already" in text
    assert '"CH3CH2OH.out.gz", on the path of a scan' in text
    assert re.search(r"#   CH3OO\.out\.gz: 1 imaginary mode", text)
    assert len(manifest.species) == 50
    for name in ("CH3OH", "CH3CH2OH", "trans_butane", "O3"):
        entry_of(next(s for s in manifest.species if s.name == name))


@needs_shared
def test_outputs_of_many_programs_that_do_not_belong_together(tmp_path: Path) -> None:
    assert SHARED is not None
    shutil.copytree(SHARED / "outputs", tmp_path / "outputs")
    manifest, text = started(tmp_path / "outputs")
    assert manifest.species
    assert "# No species has all its atoms at its level" in text
    unusable = [line for line in text.splitlines() if line.startswith("#   ")]
    assert any("truncated_gaussian16_dvb_freq_60pct.out: line" in line for line in unusable)


# --- what belongs to one molecule ------------------------------------------------------------------------------------


def test_a_single_point_at_the_geometry_of_the_frequencies(copies: Copy) -> None:
    """With the atoms at its level it gives the energy."""
    files = {
        "H2O.out": kept("nwchem702_h2o_freq.out"),
        "H2O_mp2.out": kept("nwchem702_water_mp2_energy.out"),
        "atoms/O.out": kept("nwchem702_o_atom_mp2.out"),
        "atoms/H.out": kept("nwchem702_h_atom_mp2.out"),
        "far.out": kept("nwchem702_water_stretched_mp2_energy.out"),
        "cation.out": kept("nwchem702_water_cation_energy.out"),
    }
    manifest, text = started(copies(files))
    assert shown(manifest) == {"H2O": ["H2O.out", "H2O_mp2.out"]}
    assert re.search(
        r"# H2O_mp2\.out is a single point at the geometry of H2O\.out, at MP2.*, where the atoms are", text
    )
    assert re.search(r"#   far\.out: a single point, 0\.0\d+ Å from the geometry of H2O\.out; at most 0\.01 Å", text)
    assert "#   cation.out: a single point of H2O+, of which there is no frequency job" in text
    all_made(manifest)


def test_without_atoms_at_its_level_the_single_point_is_left_out(copies: Copy) -> None:
    files = {"H2O.out": sample("H2O"), **atoms("H", "O")}
    water = read_output(str(sample("H2O")))
    files["H2O_sp.toml"] = by_hand(
        water, energies="hartree = { MP2 = -76.2 }", level="method = 'MP2'\nbasis = 'cc-pVTZ'"
    )
    manifest, text = started(copies(files))
    assert shown(manifest) == {"H2O": ["H2O.out"]}
    assert '# not used: energy "H2O_sp.toml", MP2/cc-pVTZ: the atoms are not there at its level' in text
    all_made(manifest)


def test_atoms_of_several_levels_are_levels(copies: Copy) -> None:
    files = {
        **{f"{name}.out": sample(name) for name in ("H2", "O2", "CO")},
        **atoms("H", "O", "C"),
        "water.out": kept("nwchem702_h2o_freq.out"),
        "water_mp2.out": kept("nwchem702_water_mp2_energy.out"),
        "mp2/O.out": kept("nwchem702_o_atom_mp2.out"),
        "mp2/H.out": kept("nwchem702_h_atom_mp2.out"),
    }
    manifest, text = started(copies(files))
    folders = {s.name: s.formation.folders.atoms.shown for s in manifest.species if s.formation.folders.atoms}
    assert folders == {"H2": "atoms", "O2": "atoms", "CO": "atoms", "water": "mp2"}
    assert re.search(r'^\[levels\."MP2/[^"]+"\]\natoms = "mp2"', text, re.MULTILINE)
    all_made(manifest)


def test_conformers_mirror_images_and_doubles(copies: Copy) -> None:
    files = {p.name: p for p in CONFORMERS.glob("*.toml")}
    files["again.toml"] = CONFORMERS / "butane_gauche.toml"
    manifest, text = started(copies(files))
    assert sorted(map(sorted, shown(manifest).values())) == [
        ["again.toml", "butane_trans.toml"],
        ["ethanol_gauche.toml", "ethanol_trans.toml"],
    ]
    assert '"ethanol_gauche_mirror.toml", the mirror image of ethanol_gauche.toml' in text
    assert "#   butane_gauche.toml: the same bytes as again.toml" in text
    assert "# There are no outputs of atoms: every species needs its dHf298" in text
    assert text.count('# dHf298 = "VALUE kJ/mol"') == 2


FLUORIDE = """
[molecule]
multiplicity = 1
[geometry]
atoms = [["C", -0.665, 0, 0], ["C", 0.665, 0, 0], ["F", -1.4, 1.13, 0], ["H", -1.2, -0.94, 0],
  ["F", 1.4, {f}, 0], ["H", 1.2, {h}, 0]]
source = "drawn"
[vibrations]
wavenumbers_cm1 = [200, 500, 700, 750, 800, 1000, 1100, 1250, 1370, 1710, 3120, 3140]
source = "drawn"
[energies]
hartree = {{ SCF = -277.0{f} }}
source = "drawn"
"""


def test_e_and_z_isomers_are_two_species(copies: Copy) -> None:
    files: dict[str, Path | str] = {
        "Z.toml": FLUORIDE.format(f="1.13", h="-0.94").replace("-277.01.13", "-277.0"),
        "E.toml": FLUORIDE.format(f="-1.13", h="0.94").replace("-277.0-1.13", "-277.001"),
    }
    manifest, _ = started(copies(files))
    assert shown(manifest) == {"E": ["E.toml"], "Z": ["Z.toml"]}


@pytest.fixture
def scan() -> dict[str, Path | str]:
    """Points of a turn of methanol's OH with the energies of a cosine, at the level of the frequencies."""
    m = read_output(str(sample("CH3OH")))
    assert m.level is not None
    assert m.energy_hartree is not None
    (bond,) = rotatable_bonds(m.atomic_numbers, m.masses_u, m.coordinates_A)
    level = (
        f"method = 'B3LYP'\nbasis = '6-31G*'\nfunctional = '{m.level.functional}'\nspherical = true\nprogram = 'NWChem'"
    )
    files: dict[str, Path | str] = {}
    for angle in range(0, 360, 15):
        height = 1.0 - np.cos(np.radians(3 * angle))
        x = turned(m.coordinates_A, bond, float(angle)) * (1.0 + 0.002 * height)  # something else gives way
        energy = m.energy_hartree + 0.0009 * height
        point = by_hand(m.but(coordinates_A=x), energies=f"hartree = {{ SCF = {energy:.9f} }}", level=level)
        files[f"scans/OH/p{angle:03d}.toml"] = point
    return files


def test_a_scan_goes_to_its_species(copies: Copy, scan: dict[str, Path | str]) -> None:
    files = {"CH3OH.out": sample("CH3OH"), "CO.out": sample("CO"), **scan, **atoms("C", "H", "O")}
    manifest, text = started(copies(files))
    torsions = {s.name: [t.scan.shown for t in s.model.torsions if t.scan] for s in manifest.species}
    assert torsions == {"CH3OH": ["scans/OH"], "CO": []}
    assert "# scans/OH (24 outputs) is a scan of one of its torsions" in text
    all_made(manifest)


def test_a_scan_that_cannot_be_used_is_said_and_left_out(copies: Copy, scan: dict[str, Path | str]) -> None:
    few = dict(list(scan.items())[:5])
    manifest, text = started(copies({"CH3OH.out": sample("CH3OH"), **few, **atoms("C", "H", "O")}))
    assert manifest.species[0].model.torsions == ()
    assert re.search(r'# not used: torsion "scans/OH", .*', text)
    all_made(manifest)


def test_points_of_a_scan_beside_other_outputs_need_a_folder(copies: Copy, scan: dict[str, Path | str]) -> None:
    files = {f"me/{name.rpartition('/')[2]}": text for name, text in scan.items()}
    _, text = started(copies({"me/CH3OH.out": sample("CH3OH"), **files, **atoms("C", "H", "O")}))
    assert "#   me/p000.toml to p345.toml (24 files): the points of a scan, it seems; torsions needs them in a" in text


def test_a_scan_of_no_species_here(copies: Copy, scan: dict[str, Path | str]) -> None:
    _, text = started(copies({"CO.out": sample("CO"), **scan, **atoms("C", "O")}))
    assert "#   scans/OH: a scan of CH4O, of which there is no frequency job" in text


def test_a_folder_of_references(copies: Copy) -> None:
    names = ("H2", "H2O", "CO", "CO2", "CH2O", "CH3OH")
    files: dict[str, Path | str] = {f"refs/{name}.out": sample(name) for name in names}
    files |= {f"refs/{s}.out": SAMPLES / "atoms" / f"{s}.out" for s in ("C", "H", "O")}
    manifest, text = started(copies({"DME.out": sample("CH3OCH3"), **files}))
    (one,) = manifest.species
    assert one.formation.route == "best"
    assert one.formation.folders.references is not None
    assert one.formation.folders.references.shown == "refs"
    assert 'references = "refs"' in text
    all_made(manifest)


# --- names -----------------------------------------------------------------------------------------------------------


def test_files_called_after_what_was_done(copies: Copy) -> None:
    files = {"CO/freq.out": sample("CO"), "CO2/freq.out": sample("CO2"), "H2O_opt_freq.log": sample("H2O")}
    assert shown(started(copies(files))[0]) == {
        "CO": ["CO/freq.out"],
        "CO2": ["CO2/freq.out"],
        "H2O": ["H2O_opt_freq.log"],
    }


def test_files_of_one_name_and_names_that_fit_no_record(copies: Copy) -> None:
    files = {
        "a/x.out": sample("CO"),
        "b/x.out": sample("CO2"),
        "a very long name with blanks.out": sample("H2O"),
        'odd "name" \\ é.out': sample("H2"),
        "same/OH.out": sample("OH"),
    }
    manifest, _ = started(copies(files))
    assert {s.name: s.files[0].output.shown for s in manifest.species} == {
        "x_a": "a/x.out",
        "x_b": "b/x.out",
        "H2O": "a very long name with blanks.out",
        "H2": 'odd "name" \\ é.out',
        "OH": "same/OH.out",
    }


def test_a_file_name_with_a_line_break_cannot_break_the_manifest(copies: Copy) -> None:
    manifest, text = started(copies({"CO.out": sample("CO"), 'x\n[species.evil]\noutput = "y.out': sample("H2")}))
    assert shown(manifest) == {"CO": ["CO.out"]}
    assert r'#   x\n[species.evil]\noutput = "y.out: the name holds a character that no manifest can; rename' in text


# --- what cannot be made ---------------------------------------------------------------------------------------------


def test_what_cannot_be_made_is_commented_out_with_the_reason(copies: Copy) -> None:
    manifest, text = started(copies({"H2.out": sample("H2"), "CO.out": sample("CO"), **atoms("H")}))
    assert shown(manifest) == {"H2": ["H2.out"]}
    assert "# CO.out is left out: there is no atom output for C, O.\n# [species.CO]\n# output =" in text


def test_levels_without_published_factors(copies: Copy) -> None:
    files = {"CO.out": sample("CO"), "X.toml": FLUORIDE.format(f="1.13", h="-0.94").replace("-277.01.13", "-277.0")}
    manifest, text = started(copies(files))
    models = {s.name: (s.model.scale, s.model.frequency_scale, s.model.zpe_scale) for s in manifest.species}
    assert models == {"CO": ("published", None, None), "X": (None, 1.0, 1.0)}
    assert "none are published for level not printed" in text


# --- the command -----------------------------------------------------------------------------------------------------


def run(capfd: pytest.CaptureFixture[str], *words: object) -> tuple[int, str, str]:
    capfd.readouterr()
    with pytest.raises(SystemExit) as stopped:
        main(["start", *map(str, words)])
    captured = capfd.readouterr()
    return int(stopped.value.code or 0), captured.out, captured.err


def test_the_command_writes_and_never_overwrites(copies: Copy, capfd: pytest.CaptureFixture[str]) -> None:
    folder = copies({"CO.out": sample("CO"), "ts.out": kept("nwchem702_nh3_planar_ts.out"), **atoms("C", "O")})
    code, out, err = run(capfd, folder)
    assert (code, out) == (0, "")
    assert (
        err.splitlines()[-1] == f"1 species from 4 outputs written to {folder}/heatwright.toml; look over its comments."
    )
    assert "not used: ts.out: 1 imaginary mode" in err
    (folder / "heatwright.toml").write_text("# mine")
    code, _, err = run(capfd, folder)
    assert (code, "[target-exists]" in err) == (3, True)
    assert (folder / "heatwright.toml").read_text() == "# mine"
    assert run(capfd, folder, "--force", "-q") == (0, "", "")
    assert len(load_manifest(folder).species) == 1


def test_a_manifest_elsewhere_names_the_files_from_there(copies: Copy, capfd: pytest.CaptureFixture[str]) -> None:
    folder = copies({"CO.out": sample("CO"), **atoms("C", "O")})
    target = folder.parent / "project" / "first.toml"
    target.parent.mkdir()
    assert run(capfd, folder, "-o", target)[0] == 0
    (one,) = load_manifest(target).species
    assert one.files[0].output.shown == "../runs/CO.out"
    entry_of(one)


def test_folders_without_species(copies: Copy, capfd: pytest.CaptureFixture[str]) -> None:
    folder = copies({"note.txt": "nothing", **atoms("C")})
    code, _, err = run(capfd, folder)
    assert code == 3
    assert f"error: {folder}: none of 1 outputs in the folder can be a species" in err
    assert not (folder / "heatwright.toml").exists()
    assert "there is no such folder" in run(capfd, folder / "nowhere")[2]


def test_what_is_no_folder_and_what_may_not_be_read(
    copies: Copy, capfd: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    folder = copies({"CO.out": sample("CO"), "closed/H2.out": sample("H2")})
    for place, words in ((folder / "CO.out", "this is a file"), (folder / "nix", "there is no such folder")):
        with pytest.raises(SystemExit) as stopped:
            main(["start", str(place)])
        assert stopped.value.code == 3
        assert f"{place}: {words}; expected a folder of outputs." in capfd.readouterr().err
    scan = os.scandir

    def closed(path: str) -> object:
        if Path(path).name == "closed":
            raise PermissionError(13, "Permission denied", path)
        return scan(path)

    monkeypatch.setattr(os, "scandir", closed)
    with pytest.raises(Refused, match=r"closed: the folder may not be read \(Permission denied\)"):
        first_manifest(str(folder))
