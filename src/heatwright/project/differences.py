"""What moved between two entries of one species: enthalpy of formation, entropy, heat capacity, Gibbs energy.

Polynomials are compared as their text gives them.  Where a side has only the record of a lock file, the tabulated
values are compared, and ΔG° follows from them by integrating ΔCp°, taken as linear between the tabulated temperatures.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.molecule import FloatArray
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.project.thermo_set import Thermo

COMPARED_K: Final = (500.0, 1000.0, 1500.0, 2000.0)
"""Where ΔCp° and ΔG° are shown when no temperatures are asked for, K."""
NEAR_298_K: Final = 301.0
"""A range that starts no higher still gives the values at 298.15 K."""
_GRID_POINTS: Final = 400
_R: Final = GAS_CONSTANT_J_MOL_K


@dataclass(frozen=True, slots=True, kw_only=True)
class Difference:
    """NEW minus OLD of one species; None where a side has no value.

    temperatures_K : those of ``dCp_J_mol_K`` and ``dG_kJ_mol``.
    largest_dCp_J_mol_K : the largest |ΔCp°| at any temperature that both sides have, and ``largest_at_K``.
    inside_K : the range that both sides have, None when there is none.
    """

    ddHf298_kJ_mol: float | None
    dS298_J_mol_K: float | None
    temperatures_K: tuple[float, ...]
    dCp_J_mol_K: tuple[float | None, ...]
    dG_kJ_mol: tuple[float | None, ...]
    largest_dCp_J_mol_K: float | None
    largest_at_K: float | None
    inside_K: tuple[float, float] | None

    @property
    def dG298_kJ_mol(self) -> float | None:
        """ΔG°(298.15 K), kJ/mol."""
        if self.ddHf298_kJ_mol is None or self.dS298_J_mol_K is None:
            return None
        return self.ddHf298_kJ_mol - STANDARD_TEMPERATURE_K * self.dS298_J_mol_K / 1000.0

    @property
    def dG_RT(self) -> tuple[float | None, ...]:
        """ΔG°/RT at ``temperatures_K``: what a coefficient of one takes from ln K."""
        pairs = zip(self.dG_kJ_mol, self.temperatures_K, strict=True)
        return tuple(None if g is None else g * 1000.0 / (_R * t) for g, t in pairs)

    @property
    def weight(self) -> float:
        """The largest |ΔG°/RT| at 298.15 K and ``temperatures_K``; infinite when nothing can be said."""
        at_298 = self.dG298_kJ_mol
        values = [abs(x) for x in self.dG_RT if x is not None]
        if at_298 is not None:
            values.append(abs(at_298) * 1000.0 / (_R * STANDARD_TEMPERATURE_K))
        return max(values, default=float("inf"))


def difference(old: Thermo, new: Thermo, temperatures_K: Sequence[float] = COMPARED_K) -> Difference:
    """NEW minus OLD, with NEW's entropy brought to OLD's standard pressure where both are known and differ."""
    ln_pressure = pressure_shift(old, new)
    if old.polynomial is not None and new.polynomial is not None:
        return _of_polynomials(old.polynomial, new.polynomial, ln_pressure, tuple(temperatures_K))
    return _of_tables(old, new, ln_pressure, tuple(temperatures_K))


def pressure_shift(old: Thermo, new: Thermo) -> float:
    """ln(p_new/p_old) of the standard pressures, 0 when they are the same or one of them is not known."""
    if old.pressure_Pa is None or new.pressure_Pa is None or old.pressure_Pa == new.pressure_Pa:
        return 0.0
    return float(np.log(new.pressure_Pa / old.pressure_Pa))


def has_298(polynomial: Nasa7) -> bool:
    """Whether a polynomial gives values at 298.15 K."""
    return polynomial.t_low_K <= NEAR_298_K and polynomial.t_high_K >= STANDARD_TEMPERATURE_K


# --- polynomials ---------------------------------------------------------------------------------------------------


def _of_polynomials(old: Nasa7, new: Nasa7, ln_pressure: float, temperatures_K: tuple[float, ...]) -> Difference:
    low, high = max(old.t_low_K, new.t_low_K), min(old.t_high_K, new.t_high_K)
    inside = [t for t in temperatures_K if low <= t <= high]
    t = np.array(inside)
    # S(p) = S(p°) − R ln(p/p°): what NEW says at its own pressure, said at OLD's
    d_s = new.s_R(t) + ln_pressure - old.s_R(t)
    d_g_RT = new.h_RT(t) - old.h_RT(t) - d_s
    cp = dict(zip(inside, _R * (new.cp_R(t) - old.cp_R(t)), strict=True))
    g = dict(zip(inside, _R * t * d_g_RT / 1000.0, strict=True))
    both_298 = has_298(old) and has_298(new)
    t298 = STANDARD_TEMPERATURE_K
    at, largest = _largest(old, new, low, high) if low < high else (None, None)
    return Difference(
        ddHf298_kJ_mol=_R * (new.h_R(t298) - old.h_R(t298)) / 1000.0 if both_298 else None,
        dS298_J_mol_K=_R * (new.s_R(t298) + ln_pressure - old.s_R(t298)) if both_298 else None,
        temperatures_K=temperatures_K,
        dCp_J_mol_K=tuple(_known(cp.get(x)) for x in temperatures_K),
        dG_kJ_mol=tuple(_known(g.get(x)) for x in temperatures_K),
        largest_dCp_J_mol_K=largest,
        largest_at_K=at,
        inside_K=(low, high) if low < high else None,
    )


def _known(value: float | None) -> float | None:
    return None if value is None else float(value)


def _largest(old: Nasa7, new: Nasa7, low: float, high: float) -> tuple[float, float]:
    """Where |ΔCp°| is largest inside both ranges, and how large."""
    # a jump at a common temperature lies between two points of the grid, so both of its sides are looked at
    edges = [t for p in (old, new) for t in (p.t_common_K, float(np.nextafter(p.t_common_K, np.inf)))]
    grid = np.unique([t for t in (*np.linspace(low, high, _GRID_POINTS), *edges) if low <= t <= high])
    off: FloatArray = np.abs(new.cp_R(grid) - old.cp_R(grid)) * _R
    i = int(off.argmax())
    return float(grid[i]), float(off[i])


# --- tables --------------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Table:
    """What a lock file records of one species, or else its polynomial at the temperatures of the other side's table."""

    dHf298_kJ_mol: float | None
    S298_J_mol_K: float | None
    cp_J_mol_K: dict[float, float]


def _table(thermo: Thermo, temperatures_K: tuple[float, ...]) -> _Table:
    record, p = thermo.record, thermo.polynomial
    if record is not None:
        cp = dict(zip(thermo.cp_temperatures_K, record.Cp_J_mol_K, strict=False))
        return _Table(record.formation.dHf298_kJ_mol, record.S298_J_mol_K, cp)
    if p is None:
        return _Table(None, None, {})
    t298 = STANDARD_TEMPERATURE_K
    h, s = (_R * p.h_R(t298) / 1000.0, _R * p.s_R(t298)) if has_298(p) else (None, None)
    inside = [t for t in temperatures_K if p.t_low_K <= t <= p.t_high_K]
    return _Table(h, s, {t: _R * p.cp_R(t) for t in inside})


def _of_tables(old: Thermo, new: Thermo, ln_pressure: float, temperatures_K: tuple[float, ...]) -> Difference:
    grid = tuple(sorted({*old.cp_temperatures_K, *new.cp_temperatures_K}))
    a, b = _table(old, grid), _table(new, grid)
    t = [x for x in grid if x in a.cp_J_mol_K and x in b.cp_J_mol_K]
    cp = {x: b.cp_J_mol_K[x] - a.cp_J_mol_K[x] for x in t}
    d_h = None if a.dHf298_kJ_mol is None or b.dHf298_kJ_mol is None else b.dHf298_kJ_mol - a.dHf298_kJ_mol
    d_s = None
    if a.S298_J_mol_K is not None and b.S298_J_mol_K is not None:
        d_s = b.S298_J_mol_K + _R * ln_pressure - a.S298_J_mol_K
    at = max(cp, key=lambda x: abs(cp[x]), default=None)
    return Difference(
        ddHf298_kJ_mol=d_h,
        dS298_J_mol_K=d_s,
        temperatures_K=temperatures_K,
        dCp_J_mol_K=tuple(cp.get(x) for x in temperatures_K),
        dG_kJ_mol=tuple(_gibbs(d_h, d_s, cp, x) for x in temperatures_K),
        largest_dCp_J_mol_K=None if at is None else abs(cp[at]),
        largest_at_K=at,
        inside_K=(t[0], t[-1]) if len(t) > 1 else None,
    )


def _gibbs(d_h: float | None, d_s: float | None, cp: dict[float, float], temperature_K: float) -> float | None:
    """ΔG° = ΔH° − TΔS° + ∫ΔCp° dT − T ∫ΔCp°/T dT from 298.15 K, kJ/mol; None beyond the table."""
    if d_h is None or d_s is None or not cp or not min(cp) <= temperature_K <= max(cp) or min(cp) > NEAR_298_K:
        return None
    nodes = np.array(sorted(cp))
    t = np.unique([STANDARD_TEMPERATURE_K, *nodes[nodes < temperature_K], temperature_K])
    d_cp = np.interp(t, nodes, [cp[x] for x in nodes])
    slope = np.diff(d_cp) / np.diff(t)
    intercept = d_cp[:-1] - slope * t[:-1]
    h = np.sum(0.5 * (d_cp[1:] + d_cp[:-1]) * np.diff(t))
    s = np.sum(intercept * np.diff(np.log(t)) + slope * np.diff(t))
    return float(d_h + (h - temperature_K * (d_s + s)) / 1000.0)
