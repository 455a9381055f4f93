"""What every dialect offers, and the plain one: cclib's attributes taken as they are."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from itertools import pairwise
from typing import TYPE_CHECKING, ClassVar, Final

import numpy as np

from heatwright.constants import CCLIB_EV_PER_HARTREE
from heatwright.findings import Finding, refuse
from heatwright.molecule import FloatArray, IntArray, Kind, Level, MassKind, PrintedThermo

if TYPE_CHECKING:
    from heatwright.reading.fundamentals import Fundamentals
    from heatwright.reading.parsing import Parsed
    from heatwright.reading.text import Text

METHOD_RANK: Final[dict[str, int]] = {
    kind: rank
    for rank, kind in enumerate(
        [
            "SCF",
            "MP2",
            "SCS-MP2",
            "CASSCF",
            "MP3",
            "MP2.5",
            "MP4(DQ)",
            "MP4(SDQ)",
            "MP4",
            "CISD",
            "CEPA",
            "QCISD",
            "BD",
            "CCD",
            "CC2",
            "CCSD",
            "CASPT2",
            "NEVPT2",
            "MRCI",
            "QCISD(T)",
            "BD(T)",
            "CCSD[T]",
            "CCSD(T)",
            "CCSDT",
            "CCSDT(Q)",
            "double-hybrid",
            "composite",
        ]
    )
}
"""Order in which energies of one geometry count as "higher": the last one printed for a job is what the job was for."""


@dataclass(frozen=True, slots=True)
class Identity:
    """Which molecule a job is about, and what it does: enough to tell jobs of one molecule from those of another."""

    atoms: tuple[int, ...] = ()
    charge: int | None = None
    multiplicity: int | None = None
    has_modes: bool = False
    optimises: bool = False

    def same_molecule(self, other: Identity) -> bool:
        """Whether both can be one molecule; what a job does not print contradicts nothing."""
        return all(
            not mine or not theirs or mine == theirs
            for mine, theirs in (
                (sorted(self.atoms), sorted(other.atoms)),
                (self.charge is not None and (self.charge,), other.charge is not None and (other.charge,)),
                (self.multiplicity, other.multiplicity),
            )
        )


@dataclass(frozen=True, slots=True)
class Energy:
    """One printed total energy: where, which kind (a key of METHOD_RANK), hartree."""

    spot: int
    kind: str
    hartree: float


PrintedHessian = tuple[FloatArray | None, FloatArray | None]
"""Force constants (hartree/bohr²) as printed, and the coordinates (Å) they belong to where those are not the modes'."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Facts:
    """What a dialect read from the text of one job; None or empty where the text says nothing (cclib is asked then).

    hessian : reads the printed force constants when they are wanted, for that takes longer than all the rest.
    """

    version: str = ""
    charge: int | None = None
    multiplicity: int | None = None
    energies: Mapping[str, float] = field(default_factory=dict)
    energy_kind: str = ""
    level: Level | None = None
    atomic_numbers: IntArray | None = None
    coordinates_A: FloatArray | None = None
    masses_u: FloatArray | None = None
    mass_kind: MassKind = "isotopic"
    wavenumbers_cm1: FloatArray | None = None
    normal_modes: FloatArray | None = None
    hessian: Callable[[], PrintedHessian] = lambda: (None, None)
    fundamentals: Fundamentals | None = None
    printed: tuple[PrintedThermo, ...] = ()
    max_gradient_hartree_bohr: float | None = None
    kind: Kind | None = None
    findings: tuple[Finding, ...] = ()


@dataclass(frozen=True, slots=True)
class Failure:
    """A line by which a program says that it failed, and what that means."""

    anchor: str
    words: str


class Dialect:
    """The plain dialect: one job a file, everything else from cclib."""

    name: ClassVar[str] = ""
    endings: ClassVar[tuple[str, ...]] = ()
    """Lines that only a job run to its end prints."""
    failures: ClassVar[tuple[Failure, ...]] = ()
    job_starts: ClassVar[tuple[str, ...]] = ()
    """Anchors at which another job begins."""
    mode_anchors: ClassVar[tuple[str, ...]] = ()
    """Anchors that show that a job prints vibrational modes."""
    own: ClassVar[frozenset[str]] = frozenset()
    """Attributes that cclib need not find: the dialect reads them from the text, or the program never prints them."""
    cumulative: ClassVar[bool] = False
    """Whether a job needs the text of the jobs before it (programs that print atoms and version only once)."""

    def repaired(self, text: str) -> str:
        """The text with what cclib stumbles over replaced by something of the same length in lines."""
        return text

    def jobs(self, whole: Text) -> list[Text]:
        """The jobs of a file, one part for each, together covering the whole."""
        starts = sorted({spot for anchor in self.job_starts for spot in whole.spots(anchor)})
        return cut(whole, starts[1:])  # what precedes the first start is its prologue

    def prologue(self, first: Text, same_molecule: bool) -> Text:
        """The part of the first job in which the program introduces itself (and the molecule, when it is the same)."""
        return first.part(first.start, min(first.end, first.start + 16384))

    def identity(self, job: Text) -> Identity:
        """Which molecule a job is about; the plain dialect cannot tell."""
        return Identity(has_modes=any(anchor in job for anchor in self.mode_anchors))

    def identities(self, jobs: Sequence[Text]) -> list[Identity]:
        """The identity of each job of a file."""
        return [self.identity(job) for job in jobs]

    def terminated(self, job: Text) -> bool:
        """Whether the program closed the job in the way it does when all went well."""
        return any(anchor in job for anchor in self.endings)

    def read(self, job: Text, parsed: Parsed) -> Facts:
        """What the text of a job says beyond cclib, or against it."""
        energies, kind = plain_energies(parsed, self.identity(job).has_modes)
        return Facts(energies=energies, energy_kind=kind)


def cut(whole: Text, edges: Iterable[int]) -> list[Text]:
    """The parts between these positions, in order, from the start of the whole to its end."""
    inner = sorted({edge for edge in edges if whole.start < edge < whole.end})
    return [whole.part(a, b) for a, b in pairwise([whole.start, *inner, whole.end])]


def points(energies: Iterable[Energy]) -> list[dict[str, float]]:
    """Printed energies grouped by geometry: a new one starts at each SCF energy, or when a kind comes again.

    >>> points([Energy(1, "SCF", -1.0), Energy(2, "MP2", -1.1), Energy(3, "SCF", -1.2)])
    [{'SCF': -1.0, 'MP2': -1.1}, {'SCF': -1.2}]
    """
    grouped: list[dict[str, float]] = []
    for energy in sorted(energies, key=lambda e: e.spot):
        known = grouped[-1].get(energy.kind) if grouped else None
        if known is not None and abs(known - energy.hartree) < 1e-9:
            continue  # said again, as programs do in their summaries
        if not grouped or energy.kind == "SCF" or known is not None:
            grouped.append({})
        grouped[-1][energy.kind] = energy.hartree
    return grouped


def highest(point: Mapping[str, float]) -> str:
    """The kind of the highest level among the energies of one geometry."""
    return max(point, key=lambda kind: METHOD_RANK.get(kind, 0), default="")


def chosen_point(
    energies: Sequence[Energy], *, reference: float | None = None, first: bool = False, tolerance: float = 2e-6
) -> tuple[dict[str, float], str]:
    """The energies of the geometry in use and the kind in use.

    reference : the electronic energy that the program's own thermochemistry prints, when it does; the point that
        reproduces it within *tolerance* (its printed digits) is taken.
    first : without a reference, take the first geometry (a finite-difference Hessian starts at the reference point
        and ends at a displaced one) instead of the last.
    """
    grouped = points(energies)
    if reference is not None:
        for point in grouped if first else reversed(grouped):
            for kind in sorted(point, key=lambda k: -METHOD_RANK.get(k, 0)):
                if abs(point[kind] - reference) <= tolerance:
                    return point, kind
    if not grouped:
        return {}, ""
    if first:  # a displaced or restarted point may lack the correlated part: take the first of the fullest kind
        best = max((METHOD_RANK.get(highest(p), 0) for p in grouped), default=0)
        point = next(p for p in grouped if METHOD_RANK.get(highest(p), 0) == best)
    else:
        point = grouped[-1]
    return point, highest(point)


def reconciled(printed: FloatArray, fine: FloatArray, where: str) -> tuple[FloatArray, tuple[Finding, ...]]:
    """Two lists of the same wavenumbers made one: the finer digits where they agree, a refusal where they do not."""
    agree = np.abs(printed - fine) <= 0.0051
    if agree.all() or not np.isfinite(printed).all():
        return np.where(agree, fine, printed), ()
    worst = int(np.argmax(np.abs(printed - fine)))
    words = f"two lists of wavenumbers in the output disagree ({printed[worst]:.2f} and {fine[worst]:.2f} cm⁻¹)"
    finding = refuse(
        "atoms-disagree", words, where=where, action="The output was changed or is damaged; fetch it again."
    )
    return np.where(agree, fine, np.minimum(printed, fine)), (finding,)  # so that an imaginary mode is never lost


def or_plain(point: dict[str, float], kind: str, parsed: Parsed, first: bool) -> tuple[dict[str, float], str]:
    """The energies a dialect found, or cclib's when it found none (a version that words its lines differently)."""
    return (point, kind) if point else plain_energies(parsed, first)


def plain_energies(parsed: Parsed, first: bool, coupled: str = "CCSD(T)") -> tuple[dict[str, float], str]:
    """Energies and the kind in use from cclib's attributes: the first geometry of a Hessian job, else the last.

    coupled : which coupled-cluster energy the output holds, which cclib does not say.
    """
    index = 0 if first else -1
    found: dict[str, float] = {}
    scf, mp, cc = (parsed.array(name) for name in ("scfenergies", "mpenergies", "ccenergies"))
    if scf is not None and scf.size:
        found["SCF"] = float(scf.flat[index]) / CCLIB_EV_PER_HARTREE
    if mp is not None and mp.ndim == 2 and mp.size:
        for order, value in enumerate(mp[index], start=2):
            found[f"MP{order}"] = float(value) / CCLIB_EV_PER_HARTREE
    if cc is not None and cc.size:
        found[coupled] = float(cc.flat[index]) / CCLIB_EV_PER_HARTREE
    return found, highest(found)


def as_integer(value: float | None) -> int | None:
    """A printed number as an integer, None when there is none or it is no integer."""
    if value is None or not np.isfinite(value) or abs(value - round(value)) > 1e-6:
        return None
    return round(value)
