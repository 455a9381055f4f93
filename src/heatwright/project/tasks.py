"""What a worker does: read one output, or one torsional scan, and send back bytes.  Failures are values.

A worker may be another process on another machine: it gets absolute paths, needs no state, and may do a task twice.
"""

from __future__ import annotations

import hashlib
import os
import stat
from collections.abc import Iterable
from dataclasses import dataclass, replace
from pathlib import Path
from threading import Lock
from typing import TYPE_CHECKING, Any, Final

if TYPE_CHECKING:
    from heatwright.findings import Finding
    from heatwright.molecule import FloatArray, MassKind, Molecule
    from heatwright.structure.inertia import Inertia
    from heatwright.structure.symmetry import Symmetry

_ONE_AT_A_TIME: Final = Lock()
"""Reading silences cclib by turning streams and warnings off, which is the whole process's; threads take turns."""
_PIECE: Final = 1 << 20
_MOST_BYTES: Final = 2_000_000_000


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadTask:
    """One output to be read, or (``torsion``: its atoms, possibly none) one scan.

    path : absolute.
    bodies : the masses (None as in the output) and tolerances (Å) for which rotor and symmetry are wanted.
    """

    path: str
    job: int | None = None
    charge: int | None = None
    multiplicity: int | None = None
    accept: tuple[str, ...] = ()
    accept_imaginary_cm1: float = 0.0
    with_hessian: bool = False
    torsion: str | None = None
    bodies: tuple[tuple[MassKind | None, float], ...] = ()


@dataclass(frozen=True, slots=True)
class ReadResult:
    """What came of a task: the hash of what was read, and the encoded value or the encoded findings.

    The value is a scan, or a molecule with what was asked of its bodies: masses, tolerance, and the body as
    :func:`body_values` has it.
    broken : what went wrong that should not have.
    """

    sha256: str
    value: bytes = b""
    failure: bytes = b""
    broken: str = ""


def do_task(task: ReadTask) -> ReadResult:
    """Read what the task names; never raises."""
    from heatwright.findings import Refused
    from heatwright.project.coding import encoded

    try:
        with _ONE_AT_A_TIME:
            return _scan(task) if task.torsion is not None else _output(task)
    except Refused as error:
        return ReadResult(content_hash(task.path), failure=encoded(_unnamed(error.findings, task)))
    except Exception as error:  # a bug, or a machine in trouble; it must not take other files with it
        return ReadResult(content_hash(task.path), broken=f"{type(error).__name__}: {error}")


def do_tasks(tasks: tuple[ReadTask, ...]) -> tuple[ReadResult, ...]:
    """Read what each task names; never raises."""
    return tuple(map(do_task, tasks))


def _output(task: ReadTask) -> ReadResult:
    from heatwright.project.coding import NAME, encoded
    from heatwright.reading.outputs import read_output

    molecule = read_output(
        task.path,
        job=task.job,
        charge=task.charge,
        multiplicity=task.multiplicity,
        accept=task.accept,
        accept_imaginary_cm1=task.accept_imaginary_cm1,
        with_hessian=task.with_hessian,
    )
    unnamed = replace(molecule.source, file=NAME)
    molecule = molecule.but(source=unnamed, findings=_unnamed(molecule.findings, task))
    return ReadResult(molecule.source.sha256, encoded((molecule, tuple(_bodies(molecule, task)))))


def _scan(task: ReadTask) -> ReadResult:
    from heatwright.project.coding import NAME, encoded
    from heatwright.reading.torsion_scans import TorsionScan, read_torsion

    before = content_hash(task.path)
    scan = read_torsion(f"{task.torsion} {task.path}".strip())
    assert isinstance(scan, TorsionScan)  # a path is no barrier in words
    molecules = tuple(
        m.but(source=replace(m.source, file=m.source.file.replace(task.path, NAME))) for m in scan.molecules
    )
    return ReadResult(before, encoded(replace(scan, source=NAME, molecules=molecules)))


def _unnamed(findings: Iterable[Finding], task: ReadTask) -> tuple[Finding, ...]:
    from heatwright.project.coding import NAME

    return renamed(findings, task.path, NAME)


def renamed(findings: Iterable[Finding], old: str, new: str) -> tuple[Finding, ...]:
    """The findings with another name of the file in their words."""

    def words(text: str) -> str:
        return text.replace(old, new)

    return tuple(
        replace(f, found=words(f.found), where=words(f.where), expected=words(f.expected), action=words(f.action))
        if any(old in text for text in (f.found, f.where, f.expected, f.action))
        else f
        for f in findings
    )


def _bodies(molecule: Molecule, task: ReadTask) -> Iterable[tuple[FloatArray, float, tuple[Any, ...]]]:
    """Rotor and symmetry of a molecule that can be used; others have none."""
    from heatwright.findings import refusals
    from heatwright.partition.model import chosen_masses
    from heatwright.partition.rigid import rigid_body

    if refusals(molecule.findings) or not molecule.has_thermochemistry:
        return
    for kind, tolerance in task.bodies:
        masses, _ = chosen_masses(molecule, kind)
        try:
            yield masses, tolerance, body_values(*rigid_body(molecule, masses, tolerance))
        except ValueError:
            continue  # it will be said when the model is built


def body_values(rotor: Inertia, symmetry: Symmetry) -> tuple[Any, ...]:
    """Rotor and symmetry as plain values, without the operations, which nothing asks for any more."""
    s = symmetry
    deviations = (s.tolerance_A, s.largest_accepted_deviation_A, s.smallest_rejected_deviation_A)
    arrays = (rotor.centre_of_mass_A, rotor.principal_moments_u_A2, rotor.axes, rotor.rotational_constants_cm1)
    found = (s.point_group, s.symmetry_number, s.chiral, *deviations, s.if_tighter, s.if_looser)
    return (*arrays, rotor.kind), found


def body_of(values: tuple[Any, ...]) -> tuple[Inertia, Symmetry]:
    """Rotor and symmetry from :func:`body_values`."""
    from heatwright.structure.inertia import Inertia
    from heatwright.structure.symmetry import Symmetry, stated_symmetry

    rotor, (*found, tighter, looser) = values
    operations = stated_symmetry("", 1).operations
    return Inertia(*rotor), Symmetry(*(*found, operations, tighter, looser))


def read_key(task: ReadTask, sha256: str) -> str:
    """The store's key of what a task gives for a file with this content: reader, content and every option.

    The ending of the file is one of them, as it says what some files are; which bodies are wanted is not.
    """
    from heatwright.project.fingerprint import reader_fingerprint

    options = (
        task.job, task.charge, task.multiplicity, task.accept, task.accept_imaginary_cm1, task.with_hessian,
        task.torsion,
    )  # fmt: skip
    endings = ".".join(os.path.basename(task.path).lower().split(".")[1:][-2:])
    words = f"{reader_fingerprint()} {sha256} {endings} {options!r}"
    return f"read:{hashlib.sha256(words.encode()).hexdigest()}"


_SCAN_POINTS: Final = "xtbscan.log"


def points_beside(scan: str) -> str:
    """The file with the points that is read along with the output of a scan by xTB; empty when there is none."""
    beside = os.path.join(os.path.dirname(scan), _SCAN_POINTS)
    return beside if not os.path.isdir(scan) and beside != scan and os.path.isfile(beside) else ""


def content_hash(path: str) -> str:
    """SHA-256 of a file's bytes, or of names and contents of the files in a folder; empty when it cannot be read."""
    try:
        if not os.path.isdir(path):
            return _file_hash(path)
        found = hashlib.sha256()
        for file in sorted(p for p in Path(path).iterdir() if p.is_file() and not p.name.startswith(".")):
            found.update(f"{file.name}\0{_file_hash(str(file))}\n".encode())
        return found.hexdigest()
    except OSError:
        return ""


def _file_hash(path: str) -> str:
    found = hashlib.sha256()
    status = os.stat(path)
    if not stat.S_ISREG(status.st_mode) or status.st_size > _MOST_BYTES:
        return ""  # nothing that will be read
    with open(path, "rb") as stream:
        while piece := stream.read(_PIECE):
            found.update(piece)
    return found.hexdigest()
