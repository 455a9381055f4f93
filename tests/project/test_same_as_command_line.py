"""A choice in a manifest gives the bytes that the same choice gives on the command line, for every key that is one."""

from __future__ import annotations

import math
import re
import shlex
import shutil
from pathlib import Path

import pytest

from heatwright.cli.main import main
from heatwright.project.keys import KEYS
from heatwright.project.manifest import load_manifest
from heatwright.project.toml_text import toml_value
from heatwright.resources import sample_outputs
from kept_outputs import kept
from manifest_entries import record
from projects import built

SAMPLES = Path(str(sample_outputs()))
GIVEN = 'dHf298 = "-200.7 +/- 0.2 kJ/mol"\nsource = "ATcT 1.112"'
CONFORMERS = Path(__file__).parents[1] / "data" / "conformers"

# output, lines of the manifest, the command line's words; files are found in the folder that the fixture makes
CASES = {
    "nothing": ("CH3OH.out", "", ""),
    "pressure": ("CH3OH.out", 'MECHANISM\npressure = "1atm"', "--pressure 1atm"),
    "scale": ("CH3OH.out", 'scale = "published"', "--scale published"),
    "frequency-scale zpe-scale": (
        "CH3OH.out",
        'frequency-scale = 0.96\nzpe-scale = 0.98\nroute = "atomization"\natoms = "atoms"',
        "--frequency-scale 0.96 --zpe-scale 0.98 --atoms atoms --route atomization",
    ),
    "anharmonic": ("vpt2.out", "anharmonic = true", "--anharmonic"),
    "low-modes cutoff": ("CH3OCH3.out", 'low-modes = "floor"\ncutoff = 250', "--low-modes floor --cutoff 250"),
    "averaging-moment": (
        "CH3OCH3.out",
        'low-modes = "interpolate"\naveraging-moment = 5e-45\ncutoff = 120.5',
        "--low-modes interpolate --averaging-moment 5e-45 --cutoff 120.5",
    ),
    "rotation": ("CH3OH.out", 'rotation = "corrected"', "--rotation corrected"),
    "rotation of H2": ("H2.out", 'rotation = "sum"', "--rotation sum"),
    "torsions torsion-coupling": (
        "CH3OCH3.out",
        'torsions = ["4-1-2-3 n=3 V=900 cm-1", "1-2-3-7 n=3 V=900 cm-1"]\ntorsion-coupling = true',
        '--torsion "4-1-2-3 n=3 V=900 cm-1" --torsion "1-2-3-7 n=3 V=900 cm-1" --torsion-coupling',
    ),
    "torsions": ("CH3OH.out", 'torsions = ["3-1-2-4 n=3 V=373.6 cm-1"]', '--torsion "3-1-2-4 n=3 V=373.6 cm-1"'),
    "torsions by file": ("CH3OH.out", 'torsions = "scan.csv"', "--torsion scan.csv"),
    "symmetry-number": ("CH3OH.out", 'symmetry-number = 3\nsymmetry-reason = "try"', "--symmetry-number 3"),
    "optical-isomers": ("CH3OH.out", "optical-isomers = 2", "--optical-isomers 2"),
    "symmetry-tolerance": ("bent.toml", "symmetry-tolerance = 0.001", "--symmetry-tolerance 0.001"),
    "electronic": ("OH.out", 'electronic = "0:2,139.21:2"', "--electronic 0:2,139.21:2"),
    "electronic by word": ("OH.out", 'electronic = "levels"', "--electronic levels"),
    "masses": ("CH3OH.out", 'masses = "average"', "--masses average"),
    "isotopes": ("CH3OH.out", 'isotopes = ["H=D"]', "--isotope H=D"),
    "uncertainty": ("CH3OH.out", 'uncertainty = "scale=0.02"', "--uncertainty scale=0.02"),
    "job": ("two.out", "job = 2", "--job 2"),
    "charge multiplicity": ("OH.out", "charge = 1\nmultiplicity = 3", "--charge 1 --multiplicity 3"),
    "accept": ("cosmo.out", 'accept = ["solvent"]', "--accept solvent"),
    "accept-imaginary": ("butyne.out", "accept-imaginary = 15", "--accept-imaginary 15"),
    "range common": ("CH3OH.out", "range = [250, 4000.5]\ncommon = 1200", "--range 250,4000.5 --common 1200"),
    "common": ("CH3OH.out", 'common = "auto"', "--common auto"),
    "dHf298 source": ("CH3OH.out", 'dHf298 = "-48 kcal/mol"\nsource = "a b"', '--dHf298 "-48 kcal/mol" --source "a b"'),
    "route atoms": ("CH3OH.out", 'route = "atomization"\natoms = "atoms"', "--route atomization --atoms atoms"),
    "references": ("CH3OH.out", 'references = "refs"\nroute = "network"', "--references refs --route network"),
    "route": (
        "CH3OCH3.out",
        'references = "refs"\nroute = "best"\nDHF',
        '--references refs --route best --dHf298 "-200.7 +/- 0.2 kJ/mol" --source "ATcT 1.112"',
    ),
    "reaction": (
        "CH3OCH3.out",
        'references = "refs"\nreaction = "CH3OCH3 + H2O -> 2 CH3OH"',
        '--references refs --reaction "CH3OCH3 + H2O -> 2 CH3OH"',
    ),
    "reference-table": (
        "CH3OH.out",
        'references = "refs"\nroute = "network"\nreference-table = "own.csv"',
        "--references refs --route network --reference-table own.csv",
    ),
    "trust-levels": (
        "opt.out",
        'route = "atomization"\natoms = "atoms"\ntrust-levels = true\naccept = ["energy", "gradient"]',
        "--route atomization --atoms atoms --trust-levels --accept energy --accept gradient",
    ),
    "spin-orbit corrections": (
        "CH3OH.out",
        'route = "atomization"\natoms = "atoms"\nspin-orbit = true\ncorrections = "corrections.csv"',
        "--route atomization --atoms atoms --spin-orbit --corrections corrections.csv",
    ),
    "zero-kelvin": (
        "H2O.out",
        'route = "atomization"\natoms = "atoms"\nzero-kelvin = "e0.csv"',
        "--route atomization --atoms atoms --zero-kelvin e0.csv",
    ),
    "electron": ("OH.out", 'charge = 1\nmultiplicity = 3\nelectron = "stationary"', "--charge 1 --multiplicity 3 "
                 "--electron stationary"),
    "energy": ("water.out", 'energy = "mp2.out"', "--energy mp2.out"),
    "conformers": ("trans.toml", 'conformers = ["gauche.toml"]', "--conformer gauche.toml"),
}  # fmt: skip
NOT_IN_ENTRY = {"note", "comments", "symmetry-reason"}
"""What a release adds to the entry, and the command line has no option for."""


BENT = """
[molecule]
multiplicity = 1
[geometry]
atoms = [["O", 0.0, 0.0, 0.12], ["H", 0.0, 0.77, -0.47], ["H", 0.0, -0.76, -0.47]]
source = "water with one bond 0.01 Å too long"
[vibrations]
wavenumbers_cm1 = [1595, 3657, 3756]
source = "T. Shimanouchi, NSRDS-NBS 39 (1972)"
"""


@pytest.fixture(scope="module")
def project(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with all that the cases name."""
    folder = tmp_path_factory.mktemp("project")
    shutil.copytree(SAMPLES / "atoms", folder / "atoms")
    (folder / "refs").mkdir()
    for file in SAMPLES.glob("*.out"):
        shutil.copyfile(file, folder / file.name)
        shutil.copyfile(file, folder / "refs" / file.name)
    for file in (SAMPLES / "atoms").glob("*.out"):
        shutil.copyfile(file, folder / "refs" / file.name)
    copies = {
        "vpt2.out": kept("qchem54_water_vpt2.out"),
        "two.out": kept("nwchem702_water_and_n2.out"),
        "cosmo.out": kept("nwchem702_water_cosmo_freq.out"),
        "butyne.out": kept("nwchem702_butyne_staggered_freq.out"),
        "opt.out": kept("nwchem702_water_mp2_opt_freq.out"),
        "water.out": kept("nwchem702_h2o_freq.out"),
        "mp2.out": kept("nwchem702_water_mp2_energy.out"),
        "trans.toml": CONFORMERS / "butane_trans.toml",
        "gauche.toml": CONFORMERS / "butane_gauche.toml",
    }
    for name, source in copies.items():
        shutil.copyfile(source, folder / name)
    points = "".join(f"{angle},{0.5 * (1.0 + math.cos(math.radians(3 * angle))):.6f}\n" for angle in range(0, 360, 15))
    (folder / "scan.csv").write_text(f"# atoms 3-1-2-4\nangle_deg,energy_kcal/mol\n{points}")
    (folder / "bent.toml").write_text(BENT)
    (folder / "corrections.csv").write_text("kind,label,value,unit,source\nbond,C-H,-0.1,kcal/mol,own fit\n")
    (folder / "own.csv").write_text(
        "name,formula,smiles,charge,multiplicity,dHf0_kJ_mol,dHf298_kJ_mol,u95_kJ_mol,source\n"
        "CO2,CO2,O=C=O,0,1,,-393.0,0.1,own\n"
    )
    energies = ("H2O.out,-76.35", "atoms/H.out,-0.5", "atoms/O.out,-75.0")
    rows = "\n".join(f"{row},G4,own" for row in energies)
    (folder / "e0.csv").write_text(f"file,energy0_hartree,level,source\n{rows}\n")
    return folder


def by_manifest(folder: Path, output: str, lines: str, name: str) -> str:
    head, _, rest = lines.partition("MECHANISM\n")
    text = f"[mechanism]\n{rest}\n[species.{name}]\noutput = {toml_value(output)}\n{head}\n"
    if "dHf298" not in text and "atoms" not in text and "references" not in text:
        text += GIVEN
    (folder / "heatwright.toml").write_text(text.replace("DHF", GIVEN))
    (species,) = load_manifest(folder).species
    return record(species)


def by_command(folder: Path, output: str, words: str, name: str, capfd: pytest.CaptureFixture[str]) -> str:
    files = {p.relative_to(folder).as_posix() for p in folder.rglob("*")}
    options = [str(folder / word) if word in files else word for word in shlex.split(words)]
    if not {"--dHf298", "--atoms", "--references"} & set(options):
        options += ["--dHf298", "-200.7 +/- 0.2 kJ/mol", "--source", "ATcT 1.112"]
    capfd.readouterr()
    with pytest.raises(SystemExit) as stopped:
        main(["entry", str(folder / output), "--name", name, *options])
    captured = capfd.readouterr()
    assert stopped.value.code == 0, captured.err
    return captured.out


@pytest.mark.parametrize("case", CASES)
def test_the_same_choice_gives_the_same_bytes(project: Path, case: str, capfd: pytest.CaptureFixture[str]) -> None:
    output, lines, words = CASES[case]
    theirs = by_command(project, output, words, "X", capfd)
    assert by_manifest(project, output, lines, "X") == theirs
    plain = by_command(project, output, "", "X", capfd) if case in PLAIN_WORKS else ""
    assert theirs != plain, "the choice changed nothing, so this says nothing"


@pytest.mark.parametrize("case", CASES)
def test_a_build_gives_the_same_bytes(
    project: Path, case: str, capfd: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    output, lines, words = CASES[case]
    monkeypatch.chdir(project)
    theirs = by_command(Path(), output, words, "X", capfd)
    by_manifest(project, output, lines, "X")
    outcome, told = built(project)
    assert outcome.made == ("X",), told.failures
    text = (project / "release" / "thermo.dat").read_text(encoding="utf-8")
    assert text.replace("! reason for the symmetry: try\n", "") == theirs
    assert str(project) not in text


PLAIN_WORKS = [case for case in CASES if case not in ("nothing", "job", "accept", "accept-imaginary", "trust-levels")]
"""Cases whose output makes an entry without the choice too."""


def test_no_key_is_forgotten() -> None:
    fields = ("model.", "reading.", "fit.", "formation.", "folders.")
    choices = {key.name for key in KEYS if key.field.startswith(fields)} - NOT_IN_ENTRY
    tried = {word for _, lines, _ in CASES.values() for word in re.findall(r"^([A-Za-z0-9-]+) =", lines, re.MULTILINE)}
    assert choices - tried == set()
    assert tried - choices <= {"energy", "conformers"} | NOT_IN_ENTRY
