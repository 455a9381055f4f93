"""Small projects to be built, and what a build of them tells."""

from __future__ import annotations

import shutil
from collections.abc import Mapping, Sequence
from pathlib import Path

from heatwright.findings import Finding
from heatwright.project.build import Outcome, build
from heatwright.project.executors import Engine
from heatwright.project.manifest import load_manifest
from heatwright.project.plan import Decision, Plan
from heatwright.project.record import Record
from heatwright.project.watch import Watch
from heatwright.resources import sample_outputs

SAMPLES = Path(str(sample_outputs()))
MECHANISM = '[mechanism]\nname = "test"\natoms = "atoms"\nfrequency-scale = 0.96\nzpe-scale = 0.98\n'


class Told(Watch):
    """Remembers what a build tells."""

    def __init__(self) -> None:
        self.plan: Plan | None = None
        self.read: list[str] = []
        self.made_names: list[str] = []
        self.failures: dict[str, tuple[Finding, ...]] = {}
        self.findings: list[Finding] = []
        self.waited = 0

    def waiting(self) -> None:
        self.waited += 1

    def planned(self, plan: Plan) -> None:
        self.plan = plan

    def reading(self, done: int, total: int, path: str) -> None:
        if done:
            self.read.append(Path(path).name)

    def made(self, decision: Decision, record: Record) -> None:
        self.made_names.append(decision.name)

    def failed(self, decision: Decision, findings: Sequence[Finding]) -> None:
        self.failures[decision.name] = tuple(findings)

    def said(self, finding: Finding) -> None:
        self.findings.append(finding)

    @property
    def reasons(self) -> dict[str, list[str]]:
        """The kinds of reasons for each species that had to be made."""
        assert self.plan is not None
        return {d.name: [r.kind for r in d.reasons] for d in self.plan.stale}

    @property
    def reason_texts(self) -> dict[str, str]:
        """The reasons in words."""
        assert self.plan is not None
        return {d.name: ", ".join(r.text for r in d.reasons) for d in self.plan.stale}


def project(folder: Path, *names: str, more: str = "", head: str = MECHANISM) -> Path:
    """A folder with sample outputs, the atoms, and a manifest of one species each."""
    folder.mkdir(parents=True, exist_ok=True)
    shutil.copytree(SAMPLES / "atoms", folder / "atoms", dirs_exist_ok=True)
    tables = []
    for name in names:
        shutil.copyfile(SAMPLES / f"{name}.out", folder / f"{name}.out")
        tables.append(f'[species.{name}]\noutput = "{name}.out"\n')
    (folder / "heatwright.toml").write_text("\n".join([head, *tables, more]), encoding="utf-8")
    return folder


def built(
    folder: Path, *, engine: Engine | None = None, keep_previous: bool = False, told: Told | None = None
) -> tuple[Outcome, Told]:
    """The outcome of a build and what it told."""
    told = told or Told()
    return build(load_manifest(folder), told, engine=engine, keep_previous=keep_previous), told


def release(folder: Path) -> dict[str, bytes]:
    """The files of the release by name."""
    return {path.name: path.read_bytes() for path in sorted((folder / "release").iterdir())}


def edit(path: Path, changes: Mapping[str, str]) -> None:
    """Replace parts of a text file, each of which has to be there."""
    text = path.read_text(encoding="utf-8")
    for old, new in changes.items():
        assert old in text, old
        text = text.replace(old, new)
    path.write_text(text, encoding="utf-8")


HAND = """
[molecule]
name = "{name}"
formula = "CO2"
multiplicity = 1
[rotation]
constants_cm1 = [0.39022]
linear = true
source = "test"
[symmetry]
number = 2
point_group = "Dinfh"
[vibrations]
wavenumbers_cm1 = [{nu}, [667, 2], 2349]
source = "test"
"""


def add_by_hand(folder: Path, count: int) -> None:
    """Molecule files, which are read in a moment, as further species."""
    (folder / "hand").mkdir(exist_ok=True)
    tables = []
    for i in range(count):
        (folder / "hand" / f"M{i:03d}.toml").write_text(HAND.format(name=f"M{i:03d}", nu=1300 + i), encoding="utf-8")
        tables.append(
            f'[species.M{i:03d}]\noutput = "hand/M{i:03d}.toml"\ndHf298 = "-{300 + i} kJ/mol"\nsource = "test"\n'
        )
    manifest = folder / "heatwright.toml"
    manifest.write_text(manifest.read_text(encoding="utf-8") + "\n" + "\n".join(tables), encoding="utf-8")
