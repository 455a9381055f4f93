"""What the report shows of one species, as plain values; a part that is not there is None or empty and is not shown."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from heatwright.constants import STANDARD_TEMPERATURE_K
from heatwright.polynomial.nasa7 import Nasa7

Numbers = tuple[float, ...]


def is_one_set(p: Nasa7) -> bool:
    """Whether one set of coefficients serves the whole range, so that nothing meets at the common temperature."""
    return p.low == p.high


def range_text(p: Nasa7) -> str:
    """The range of a polynomial without its unit.

    >>> range_text(Nasa7(200.0, 1000.0, 6000.0, (2.5, 0, 0, 0, 0, 0, 1), (2.5, 0, 0, 0, 0, 0, 2)))
    '200–1000–6000'
    """
    middle = "" if is_one_set(p) else f"–{p.t_common_K:g}"
    return f"{p.t_low_K:g}{middle}–{p.t_high_K:g}"


@dataclass(frozen=True, slots=True)
class Geometry:
    """Elements and coordinates (Å) of the atoms; bonds as (atom, atom, order or None), atoms from 0."""

    elements: tuple[str, ...]
    coordinates_A: tuple[tuple[float, float, float], ...]
    bonds: tuple[tuple[int, int, float | None], ...]


@dataclass(frozen=True, slots=True)
class Table:
    """Functions on a temperature grid; shares of each contribution in Cp° and S°; populations of the conformers.

    u_cp, u_s : standard uncertainties, empty when none were stated.
    """

    T_K: Numbers
    cp_J_mol_K: Numbers
    h_minus_h298_kJ_mol: Numbers
    s_J_mol_K: Numbers
    shares: tuple[tuple[str, Numbers, Numbers], ...] = ()
    u_cp_J_mol_K: Numbers = ()

    def at_298(self, column: Numbers) -> float | None:
        """The value of a column at 298.15 K, None where the table does not have it."""
        if not column:
            return None
        return next((v for T, v in zip(self.T_K, column, strict=True) if abs(T - STANDARD_TEMPERATURE_K) < 0.005), None)


@dataclass(frozen=True, slots=True)
class Residuals:
    """Polynomial less table: (T, ΔCp/R, ΔH/RT, ΔS/R), and the largest of each with the proven bound for Cp."""

    T_K: Numbers
    dcp_R: Numbers
    dh_RT: Numbers
    ds_R: Numbers
    bound_dcp_R: float | None


@dataclass(frozen=True, slots=True)
class Route:
    """One route to the enthalpy of formation with its ledger of (what, kJ/mol, source)."""

    method: str
    source: str
    dHf298_kJ_mol: float
    dHf0_kJ_mol: float | None
    u95_kJ_mol: float | None
    ledger: tuple[tuple[str, float, str], ...]


@dataclass(frozen=True, slots=True)
class Torsion:
    """A torsion as it was treated: terms of its potential, ground level above its minimum, levels above that, 1/cm."""

    atoms: tuple[int, ...]
    barrier_cm1: float
    F_cm1: float
    symmetry: int
    overlap: float | None
    ground_cm1: float
    angle_deg: float
    levels_cm1: Numbers
    constant_cm1: float
    cosine_cm1: Numbers
    sine_cm1: Numbers
    scan_deg: Numbers
    scan_cm1: Numbers
    source: str


@dataclass(frozen=True, slots=True)
class Conformer:
    """One conformer with its populations at the temperatures of the table."""

    file: str
    relative_energy_kJ_mol: float
    degeneracy: int
    populations: Numbers


@dataclass(frozen=True, slots=True)
class Said:
    """One finding."""

    severity: str
    code: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Species:
    """Everything that can be shown of one species.

    facts : (what, value) pairs of conventions and provenance, in the order in which they are shown.
    dHf298_kJ_mol, s298_J_mol_K, cp298_J_mol_K : of the table and formation, else of the polynomial.
    largest_dcp_R : residual of the polynomial.   pressure_bar : standard pressure, None when unknown.
    """

    name: str
    formula: str
    composition: Mapping[str, float]
    charge: int | None = None
    multiplicity: int | None = None
    evidence: str = ""
    dHf298_kJ_mol: float | None = None
    u95_kJ_mol: float | None = None
    s298_J_mol_K: float | None = None
    cp298_J_mol_K: float | None = None
    largest_dcp_R: float | None = None
    classical_limit_R: float | None = None
    pressure_bar: float | None = None
    geometry: Geometry | None = None
    point_group: str = ""
    wavenumbers_cm1: Numbers = ()
    table: Table | None = None
    polynomial: Nasa7 | None = None
    residuals: Residuals | None = None
    routes: tuple[Route, ...] = ()
    torsions: tuple[Torsion, ...] = ()
    conformers: tuple[Conformer, ...] = ()
    facts: tuple[tuple[str, str], ...] = ()
    findings: tuple[Said, ...] = ()

    @property
    def source(self) -> str:
        """Where the numbers are from, in a few words: level and program, or the file."""
        facts = dict(self.facts)
        parts = [facts[k] for k in ("level", "program") if k in facts]
        return ", ".join(parts) or facts.get("file", "")
