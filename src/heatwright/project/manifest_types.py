"""What a manifest says, as plain frozen values: no heavy import, hashable, picklable, with a canonical text for keys.

Values are kept as the manifest writes them (texts, numbers, flags); what they mean is decided where they are used.
"""

from __future__ import annotations

import hashlib
import json
from dataclasses import dataclass, fields, is_dataclass
from functools import cache, lru_cache
from json.encoder import encode_basestring
from typing import Literal


@dataclass(frozen=True, slots=True, order=True)
class ProjectPath:
    """A file or folder that a manifest names.

    shown : relative to the folder of the (outermost) manifest with ``/`` between its parts, or as written when it lies
        outside; this is what texts, hashes and releases hold, so that they are the same on any machine.
    path : absolute, for work.
    """

    shown: str
    path: str


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadingChoice:
    """How outputs are read: the options of the command line of the same names."""

    job: int | None = None
    charge: int | None = None
    multiplicity: int | None = None
    isotopes: tuple[str, ...] = ()
    accept: tuple[str, ...] = ()
    accept_imaginary_cm1: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class TorsionChoice:
    """A torsion treated as a hindered rotor: a barrier in words, or a scan (file or folder) with its atoms or without.

    barrier : ``3-1-2-4 n=3 V=373 cm-1``; empty for a scan.   atoms : ``3-1-2-4`` or empty.   scan : None for a barrier.
    """

    barrier: str = ""
    atoms: str = ""
    scan: ProjectPath | None = None

    @property
    def text(self) -> str:
        """What :func:`heatwright.reading.torsion_scans.read_torsion` takes."""
        return self.barrier if self.scan is None else f"{self.atoms} {self.scan.path}".strip()


@dataclass(frozen=True, slots=True, kw_only=True)
class ModelChoice:
    """How a molecule becomes a model: the options of the command line of the same names, as plain values.

    None means "as the output or the geometry says" (no factor for scale factors, the default for the others).
    """

    pressure: Literal["1bar", "1atm"] = "1bar"
    scale: Literal["published"] | None = None
    frequency_scale: float | None = None
    zpe_scale: float | None = None
    anharmonic: bool = False
    low_modes: Literal["harmonic", "floor", "interpolate"] = "harmonic"
    cutoff_cm1: float | None = None
    averaging_moment_kg_m2: float | None = None
    rotation: Literal["classical", "corrected", "sum"] = "classical"
    torsions: tuple[TorsionChoice, ...] = ()
    torsion_coupling: bool = False
    symmetry_number: int | None = None
    symmetry_reason: str = ""
    optical_isomers: int | None = None
    symmetry_tolerance_A: float = 0.05
    electronic: str = "table"
    masses: Literal["isotopic", "average"] | None = None
    uncertainty: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class FitChoice:
    """The temperatures of the polynomial, K."""

    t_low_K: float = 200.0
    t_common_K: float | Literal["auto"] = 1000.0
    t_high_K: float = 6000.0


@dataclass(frozen=True, slots=True, kw_only=True)
class ReferenceFolders:
    """Where the outputs of atoms and reference species of one level of theory are, and the user's own tables.

    atoms, references : folders of outputs.   reference_table : CSV of reference enthalpies.
    zero_kelvin : CSV of final 0 K energies of a composite scheme.   corrections : CSV for atoms and bonds.
    """

    atoms: ProjectPath | None = None
    references: ProjectPath | None = None
    reference_table: ProjectPath | None = None
    zero_kelvin: ProjectPath | None = None
    corrections: ProjectPath | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class FormationChoice:
    """The way to the enthalpy of formation; route None goes by what is there, as on the command line."""

    route: Literal["given", "atomization", "reaction", "network", "best"] | None = None
    dHf298: str | None = None
    source: str | None = None
    reaction: str | None = None
    trust_levels: bool = False
    spin_orbit: bool = False
    electron: Literal["thermal", "stationary"] = "thermal"
    folders: ReferenceFolders = ReferenceFolders()


@dataclass(frozen=True, slots=True, order=True)
class OutputFiles:
    """One output and, when the energy is from another one, that."""

    output: ProjectPath
    energy: ProjectPath | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class SpeciesRequest:
    """One species of the mechanism with everything that decides about its entry.

    files : the output first, then further conformers.   where : ``heatwright.toml:12``, for messages only.
    note : a short text that goes into the entry itself; comments : lines before it.
    """

    name: str
    files: tuple[OutputFiles, ...]
    reading: ReadingChoice = ReadingChoice()
    model: ModelChoice = ModelChoice()
    fit: FitChoice = FitChoice()
    formation: FormationChoice = FormationChoice()
    note: str = ""
    comments: tuple[str, ...] = ()
    where: str = ""

    @property
    def outputs(self) -> tuple[ProjectPath, ...]:
        """Every single file that is read as an output of this species, energies included (scans are in the model)."""
        return tuple(p for f in self.files for p in (f.output, f.energy) if p is not None)


@dataclass(frozen=True, slots=True, kw_only=True)
class Mechanism:
    """What holds for the whole mechanism; the options of species stand, merged, in each of them.

    release : folder of thermo.dat, thermo.yaml and thermo.lock.toml.   store : file of the store.
    units : for words on the terminal only.
    """

    name: str
    release: ProjectPath
    store: ProjectPath
    units: Literal["kJ", "kcal"] = "kJ"


@dataclass(frozen=True, slots=True, kw_only=True)
class Manifest:
    """A whole manifest with its includes: species sorted by name."""

    path: str
    root: str
    mechanism: Mechanism
    species: tuple[SpeciesRequest, ...]
    includes: tuple[str, ...] = ()


def canonical(value: object) -> str:
    """A text that is the same for equal values on any machine: JSON, without absolute paths and without ``where``.

    >>> canonical(FitChoice(t_low_K=298.15))
    '{"t_common_K":1000.0,"t_high_K":6000.0,"t_low_K":298.15}'
    >>> canonical(OutputFiles(ProjectPath("a.out", "/home/me/a.out")))
    '{"energy":null,"output":"a.out"}'
    """
    if isinstance(value, str):
        return encode_basestring(value)
    if isinstance(value, _SHARED):
        return _canonical_once(value)
    if isinstance(value, ProjectPath):
        return encode_basestring(value.shown)
    if is_dataclass(value) and not isinstance(value, type):
        return _canonical_fields(value)
    if isinstance(value, tuple | list):
        return f"[{','.join(map(canonical, value))}]"
    if value is None or isinstance(value, bool | int | float):
        return json.dumps(value, allow_nan=False)
    raise TypeError(f"{type(value).__name__} has no canonical text")


def canonical_hash(value: object) -> str:
    """SHA-256 of :func:`canonical`, in hexadecimal digits."""
    return hashlib.sha256(canonical(value).encode()).hexdigest()


_SHARED = (ReadingChoice, ModelChoice, FitChoice, FormationChoice, ReferenceFolders)
"""Parts that many species have in common, so that their text is worth remembering."""


@lru_cache(maxsize=1024)
def _canonical_once(value: object) -> str:
    return _canonical_fields(value)


def _canonical_fields(value: object) -> str:
    kind: type = type(value)
    return f"{{{','.join([f'{words}:{canonical(getattr(value, name))}' for name, words in _field_names(kind)])}}}"


@cache
def _field_names(kind: type) -> tuple[tuple[str, str], ...]:
    return tuple((name, f'"{name}"') for name in sorted(f.name for f in fields(kind)) if name != "where")
