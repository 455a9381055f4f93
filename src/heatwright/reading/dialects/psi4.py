"""Psi4 1.0 to 1.9: one banner, many calls; modes and masses are read here; the energy of the well bottom decides."""

from __future__ import annotations

import re
from bisect import bisect_left, bisect_right
from collections.abc import Iterator
from typing import TYPE_CHECKING, ClassVar, Final

import numpy as np

from heatwright.elements import atomic_number
from heatwright.molecule import FloatArray, Level, PrintedThermo
from heatwright.reading.dialects.base import Dialect, Energy, Facts, Failure, Identity, chosen_point, cut
from heatwright.reading.levels import normalise_basis, normalise_method
from heatwright.reading.text import Text, number, numbers

if TYPE_CHECKING:
    from heatwright.reading.parsing import Parsed

_ANALYSIS: Final = "==> Harmonic Vibrational Analysis <=="
_TABLE: Final = "Geometry (in Angstrom), charge = "
_MODULE: Final = "*** tstart() called on"
_ENERGIES: Final = (
    ("    Total Energy =  ", "SCF"),
    ("* MP2 total energy", "MP2"),
    ("MP2 Total Energy (a.u.)", "MP2"),
    ("* MP3 total energy", "MP3"),
    ("MP3 Total Energy (a.u.)", "MP3"),
    ("* CCSD total energy", "CCSD"),
    ("* CCSD(T) total energy", "CCSD(T)"),
    ("@Final double-hybrid DFT total energy =", "double-hybrid"),
    ("CCSD Total Energy (a.u.)", "CCSD"),
    ("CCSD(T) Total Energy (a.u.)", "CCSD(T)"),
)
_LOCAL: Final = (("VWN5_RPA", "VWN1RPA"), ("VWN_RPA", "VWN1RPA"), ("VWN5", "VWN5"), ("VWN3", "VWN3"))
_TITLE_LINES: Final = 12
"""Lines after the title of a table within which its rows start; a title may be repeated without any."""
_REVISION: Final = re.compile(r"Git: Rev \{\} zzzzzzz")


class Psi4(Dialect):
    """The dialect of Psi4."""

    name = "Psi4"
    endings: ClassVar = ("Psi4 exiting successfully",)
    failures: ClassVar = (
        Failure("Could not converge geometry optimization", "the geometry optimisation did not converge"),
        Failure("Could not converge SCF iterations", "the SCF did not converge"),
        Failure("Psi4 encountered an error", "Psi4 stopped with an error"),
    )
    mode_anchors: ClassVar = (_ANALYSIS,)
    own = frozenset({"vibfreqs", "vibdisps"})
    cumulative = True

    def repaired(self, text: str) -> str:
        """Builds without a revision print an empty name, from which cclib makes a version number that is none."""
        return _REVISION.sub("Git: Rev {none} 0000000", text) if "Rev {} zzzzzzz" in text[:4096] else text

    def jobs(self, whole: Text) -> list[Text]:
        """A job ends with a vibrational analysis, with an optimisation, or where another molecule comes."""
        modules = whole.spots(_MODULE)
        ends = sorted([*whole.spots(_ANALYSIS), *whole.spots("Final optimized geometry")])
        after = (bisect_right(modules, end) for end in ends)
        edges = {modules[i] if i < len(modules) else whole.end for i in after} | set(_changes(whole, modules))
        return cut(whole, edges)

    def prologue(self, first: Text, same_molecule: bool) -> Text:
        end = first.find(_MODULE)
        return first.part(first.start, end if end >= 0 else first.end)

    def identity(self, job: Text) -> Identity:
        spot = _first_table(job)
        charge, multiplicity = _table_head(job, spot) if spot >= 0 else (None, None)
        return Identity(
            atoms=_rows(job, spot)[0],
            charge=charge,
            multiplicity=multiplicity,
            has_modes=_ANALYSIS in job or (job.is_last and _asks_for_modes(job)),
            optimises="OPTKING" in job or "Final optimized geometry" in job,
        )

    def terminated(self, job: Text) -> bool:
        return super().terminated(job) or not job.is_last

    def read(self, job: Text, parsed: Parsed) -> Facts:
        freq = _ANALYSIS in job
        reference = job.number_after("Total E0, Electronic energy at well bottom at 0 [K]")
        energies = _energies(job)
        point, kind = chosen_point(energies, reference=reference, first=freq, tolerance=2e-8)
        spot = _table_of(job, energies, point) if freq else _last_table(job)
        atoms, coordinates, masses = _rows(job, spot)
        if not point and reference is not None:
            point, kind = {"SCF": reference}, "SCF"
        wavenumbers, modes = _modes(job, len(atoms)) if freq else (None, None)
        return Facts(
            version=_version(job),
            energies=point,
            energy_kind=kind,
            level=_level(job, kind),
            atomic_numbers=np.array(atoms, dtype=np.int64) if atoms else None,
            coordinates_A=coordinates,
            masses_u=masses,
            wavenumbers_cm1=wavenumbers,
            normal_modes=modes,
            printed=_printed(job),
            max_gradient_hartree_bohr=_max_gradient(job, coordinates) if freq else None,
        )


def _version(job: Text) -> str:
    match = re.search(r"\n +Psi4 (\S+)", job.whole[:8192])
    return match.group(1) if match else ""


def _echo(job: Text) -> str:
    """The input as the output repeats it."""
    whole = Text.of(job.whole)
    start = whole.find("==> Input File <==")
    if start < 0:
        return ""
    end = whole.find("\n---", whole.find("\n---", start) + 4)
    return whole.whole[start : end if end >= 0 else start + 20000]


def _asks_for_modes(job: Text) -> bool:
    """Whether the echoed input calls for more vibrational analyses than the output holds."""
    calls = re.findall(r"^[^#\n]*\b(?:freq|frequency|frequencies)\s*\(", _echo(job), re.MULTILINE)
    return len(calls) > job.whole.count(_ANALYSIS)


def _table_head(job: Text, spot: int) -> tuple[int | None, int | None]:
    match = re.search(r"charge = (-?\d+), multiplicity = (\d+):", job.line(spot))
    return (int(match.group(1)), int(match.group(2))) if match else (None, None)


def _tables(job: Text) -> Iterator[int]:
    """Tables of Cartesian coordinates with masses (an optimiser's table of bonds and angles looks alike above)."""
    for spot in job.spots(_TABLE):
        if "Center  " in job.whole[spot : spot + 200]:
            yield spot


def _first_table(job: Text) -> int:
    return next(_tables(job), -1)


def _table_of(job: Text, energies: list[Energy], point: dict[str, float]) -> int:
    """The table of the geometry that has these energies: displaced geometries may be printed before and after it."""
    spots = [e.spot for e in energies if point.get(e.kind) == e.hartree]
    before = max((t for t in _tables(job) if spots and t < spots[0]), default=-1)
    return before if before >= 0 else _first_table(job)


def _last_table(job: Text) -> int:
    return max(_tables(job), default=-1)


def _rows(job: Text, spot: int) -> tuple[tuple[int, ...], FloatArray | None, FloatArray | None]:
    """Atomic numbers (0 for ghosts), coordinates (Å) and masses (u) of a table."""
    atoms: list[int] = []
    rows: list[list[float]] = []
    for index, line in enumerate(job.lines(spot) if spot >= 0 else ()):
        fields = line.split()
        values = [number(f) for f in fields[1:]]
        if len(fields) in (4, 5) and all(v is not None for v in values):
            name = re.sub(r"[\d_].*", "", fields[0])
            try:
                atoms.append(0 if name.upper().startswith(("GH(", "@")) or name == "X" else atomic_number(name))
            except KeyError:
                atoms.append(0)
            rows.append([v for v in values if v is not None])
        elif rows or index > _TITLE_LINES:
            break
    else:  # no table, or one that the end of the file cuts off
        return (), None, None
    if len({len(row) for row in rows}) != 1:
        return (), None, None
    table = np.array(rows)
    return tuple(atoms), table[:, :3].copy(), table[:, 3].copy() if table.shape[1] == 4 else None


def _changes(whole: Text, modules: list[int]) -> Iterator[int]:
    """Where another molecule, charge or multiplicity comes: the call that prints it first."""
    known: tuple[tuple[int, ...], int | None, int | None] | None = None
    for spot in _tables(whole):
        atoms = _rows(whole, spot)[0]
        here = (tuple(sorted(atoms)), *_table_head(whole, spot))
        if not atoms:
            continue
        before = bisect_left(modules, spot)
        if known is not None and here != known and before:
            yield modules[before - 1]
        known = here


def _energies(job: Text) -> list[Energy]:
    found = []
    for anchor, kind in _ENERGIES:
        for spot in job.spots(anchor):
            values = numbers(job.rest(spot, anchor))
            if values and not job.whole[spot - 1].strip("\t\n *"):  # not the spin-scaled ones, SCS-MP2 and the like
                found.append(Energy(spot, kind, values[0]))
    for spot in job.spots("> DF-MP2 Energies <"):
        values = numbers(job.part(spot, spot + 2000).rest_of_first(" Total Energy"))
        if values:
            found.append(Energy(spot, "MP2", values[0]))
    return found


def _modes(job: Text, n_atoms: int) -> tuple[FloatArray, FloatArray | None]:
    """Wavenumbers of the last analysis (``i`` marks imaginary ones) and their displacements."""
    values: list[float] = []
    columns: list[list[list[float]]] = []
    width = 0
    for line in job.lines(job.rfind(_ANALYSIS)):
        if "==> Thermochemistry" in line:
            break
        if line.startswith("  Freq [cm^-1]"):
            read = _signed(line.split()[2:])
            width = len(read)
            values += read
            columns += [[] for _ in read]
        elif width and re.match(r" +\d+ +[A-Za-z]", line):
            row = [number(token) for token in line.split()[2:]]
            if len(row) == 3 * width and all(v is not None for v in row):
                for k in range(width):
                    columns[k - width].append([v for v in row[3 * k : 3 * k + 3] if v is not None])
    whole = bool(values) and all(len(column) == n_atoms for column in columns)
    return np.array(values), np.array(columns) if whole else None


def _signed(tokens: list[str]) -> list[float]:
    """Wavenumbers with imaginary ones negative; what is no number becomes NaN, to be refused by name."""
    values = [(number(token.rstrip("i")), token.endswith("i")) for token in tokens]
    return [float("nan") if v is None else -abs(v) if imaginary else v for v, imaginary in values]


def _printed(job: Text) -> tuple[PrintedThermo, ...]:
    start = job.rfind("==> Thermochemistry Components <==")
    if start < 0:
        return ()
    block = job.part(start)
    temperature = re.search(r"Total H, Enthalpy at +([\d.]+) \[K\]", str(block))
    pressure = re.search(r"P = ([\d.]+) \[Pa\]", block.rest_of_first("Translational S"))
    sigma = re.search(r"symmetry no\. = (\d+)", block.rest_of_first("Rotational S"))
    entropy = re.search(r"([\d.]+) \[J/\(mol K\)\] +([\d.]+) \[mEh/K\]", block.rest_of_first("Total S"))
    correction = re.search(r"(-?[\d.]+) \[Eh\]", block.rest_of_first("Correction H"))
    zpe = re.search(r"(-?[\d.]+) \[Eh\]", block.rest_of_first("Correction ZPE"))
    item = PrintedThermo(
        temperature_K=float(temperature.group(1)) if temperature else None,
        pressure_Pa=float(pressure.group(1)) if pressure else None,
        symmetry_number=int(sigma.group(1)) if sigma else None,
        zpe_hartree=float(zpe.group(1)) if zpe else None,
        enthalpy_correction_hartree=float(correction.group(1)) if correction else None,
        entropy_J_mol_K=_entropy(float(entropy.group(2))) if entropy else None,
    )
    return (item,)


def _entropy(millihartree_per_kelvin: float) -> float:
    from heatwright.constants import HARTREE_KJ_MOL

    return millihartree_per_kelvin * HARTREE_KJ_MOL


def _max_gradient(job: Text, coordinates: FloatArray | None) -> float | None:
    """Largest component of the gradient at the geometry of the frequencies, not at a displaced one; None without it."""
    tables = list(_tables(job))
    last, here = -1, None
    for spot in sorted([*job.spots("-Total Gradient:"), *job.spots("-Total gradient:")]):
        before = bisect_left(tables, spot)
        if before and before != last:
            last, here = before, _rows(job, tables[before - 1])[1]
        if here is None or coordinates is None or here.shape != coordinates.shape:
            continue
        if np.abs(here - coordinates).max() < 1e-6:
            return _largest(job, spot)
    return None


def _largest(job: Text, spot: int) -> float | None:
    found: list[float] = []
    for index, line in enumerate(job.lines(spot)):
        fields = line.split()
        values = [number(f) for f in fields[1:]]
        if len(fields) == 4 and fields[0].isdigit() and all(v is not None for v in values):
            found += [abs(v) for v in values if v is not None]
        elif found or index > _TITLE_LINES:
            break
    return max(found, default=None)


def _level(job: Text, kind: str) -> Level | None:
    functional = re.match(r" *(\S+)", job.rest_of_last("=> Composite Functional:"))
    name = functional.group(1) if functional else "HF" if " Reference" in job else ""
    basis = job.part(job.rfind("==> Primary Basis <==")) if "==> Primary Basis <==" in job else None
    if not name and basis is None:
        return None
    local = job.rest_of_last("Vosko, Wilk & Nusair (")
    spherical = basis.rest_of_first("Spherical Harmonics?:") if basis is not None else ""
    method = normalise_method(name if kind in ("SCF", "", "double-hybrid") else kind)
    method, dispersion = _split_dispersion(method)
    acts = abs(job.number_after("Empirical Dispersion Energy =") or 0.0) > 0.0
    return Level(
        method=method,
        basis=normalise_basis(basis.rest_of_first("Basis Set:")) if basis is not None else "",
        functional=next((short for long, short in _LOCAL if local.startswith(long)), ""),
        spherical={"true": True, "false": False}.get(spherical.lower()),
        frozen_core=_frozen(job) if kind not in ("SCF", "") else "",
        core_potential="ECP" if "Core potential:" in job or "ECP:" in job else "",
        dispersion=dispersion or ("dispersion" if acts else ""),
        solvent="PCM" if "=> PCM <=" in job or "PCMSolver" in job else "",
        program="Psi4",
    )


def _split_dispersion(method: str) -> tuple[str, str]:
    match = re.fullmatch(r"(.+)-(D3BJ|D3\(BJ\)|D3MBJ|D3M|D3ZERO|D3|D2|D4BJ|D4)", method, re.IGNORECASE)
    if not match:
        return method, ""
    return normalise_method(match.group(1)), match.group(2).upper().replace("(", "").replace(")", "").replace(
        "ZERO", ""
    )


def _frozen(job: Text) -> str:
    """From the module's own count; Psi4 correlates all electrons unless its input freezes some."""
    table = job.rfind("CLASS    FOCC")
    orbitals = re.search(r"PAIRS\s+(\d+)", job.whole[table : table + 200]) if table >= 0 else None
    if orbitals:
        return f"frozen {orbitals.group(1)}" if int(orbitals.group(1)) else "all"
    energy = job.number_after("Frozen core energy     =")
    if energy is not None:
        return "frozen" if abs(energy) > 0.0 else "all"
    echo = _echo(job).lower()
    return "all" if echo and "freeze" not in echo and "frozen" not in echo else ""
