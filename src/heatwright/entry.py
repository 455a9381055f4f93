"""Entry: a species name, its composition, the fitted polynomial and everything that stands behind it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache, reduce
from operator import add
from typing import TYPE_CHECKING, Final, Literal

import numpy as np

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding, Refused, refusals
from heatwright.polynomial.fit import Fit, check_temperatures, common_temperature, fit_many
from heatwright.polynomial.minimax import design
from heatwright.polynomial.quality import (
    FitQuality,
    ResidualCurve,
    fit_qualities,
    judged_temperatures,
    residual_curve,
)

if TYPE_CHECKING:
    from heatwright.formation.formation import Formation
    from heatwright.molecule import FloatArray
    from heatwright.partition.model import ThermoModel
    from heatwright.partition.table import ThermoTable
    from heatwright.polynomial.nasa7 import Nasa7

TABLE_TEMPERATURES_K = (
    100.0, 150.0, 200.0, 250.0, 298.15, 300.0, 350.0, 400.0, 500.0, 600.0, 700.0, 800.0, 900.0, 1000.0, 1100.0, 1200.0,
    1300.0, 1400.0, 1500.0, 1750.0, 2000.0, 2250.0, 2500.0, 2750.0, 3000.0, 3500.0, 4000.0, 4500.0, 5000.0, 5500.0,
    6000.0,
)  # fmt: skip
"""The temperatures of a table when none are asked for, K (an entry shows those inside its range)."""


@dataclass(frozen=True, slots=True)
class FitOptions:
    """The temperatures of the polynomial, K: ends of the range and where its two halves meet (or ``"auto"``)."""

    t_low_K: float = 200.0
    t_common_K: float | Literal["auto"] = 1000.0
    t_high_K: float = 6000.0


@dataclass(frozen=True, eq=False, kw_only=True)
class Entry:
    """What a template writes: a named species with its polynomial, table, formation and the quality of the fit.

    note : a short text of the user's in the entry itself, where the format has a place.   comments : lines of his.
    """

    name: str
    model: ThermoModel
    formation: Formation
    polynomial: Nasa7
    quality: FitQuality
    table: ThermoTable
    phase: str = "G"
    note: str = ""
    comments: tuple[str, ...] = ()
    findings: tuple[Finding, ...] = ()

    @property
    def composition(self) -> dict[str, int]:
        """Atoms by element symbol, Hill order."""
        return self.model.composition

    @property
    def charged_composition(self) -> dict[str, int]:
        """The composition with the electrons of an ion as the element ``E`` (one less for each positive charge)."""
        charge = self.model.molecule.charge or 0
        return {**self.composition, "E": -charge} if charge else self.composition

    @cached_property
    def residuals(self) -> ResidualCurve:
        """What the polynomial differs by from the model, with the temperatures of the largest deviations among them."""
        model, q = self.model, self.quality
        at_298 = float(model.h_minus_h0_R(STANDARD_TEMPERATURE_K))
        offset = self.formation.dHf298_kJ_mol * 1000.0 / GAS_CONSTANT_J_MOL_K - at_298

        def h_RT(T: FloatArray) -> FloatArray:
            return (offset + model.h_minus_h0_R(T)) / T

        worst = (q.dcp_R.at_K, q.dh_RT.at_K, q.ds_R.at_K)
        return residual_curve(self.polynomial, model.cp_R, h_RT, model.s_R, worst)


@dataclass(frozen=True, eq=False)
class EntryRequest:
    """What an entry is made of."""

    name: str
    model: ThermoModel
    formation: Formation
    options: FitOptions = FitOptions()
    note: str = ""
    comments: tuple[str, ...] = ()


def make_entry(name: str, model: ThermoModel, formation: Formation, options: FitOptions | None = None) -> Entry:
    """Tabulate, fit and judge: the entry of one species.

    Raises Refused when the temperatures cannot carry a polynomial, a value is not finite, the fitted heat capacity is
    not positive (``cp-not-positive``), or something that was found before is a reason to refuse.
    """
    made = make_entries([EntryRequest(name, model, formation, options or FitOptions())])[0]
    if isinstance(made, Refused):
        raise made
    return made


def make_entries(requests: Sequence[EntryRequest]) -> list[Entry | Refused]:
    """The entries of many species, fitted together where they share their temperatures.

    Each is the same, to the last bit, as :func:`make_entry` gives for it alone; what that would raise takes its place.
    """
    made: dict[int, Entry | Refused] = {}
    groups: dict[tuple[float, float, float], list[int]] = {}
    for i, request in enumerate(requests):
        try:
            groups.setdefault(_temperatures(request), []).append(i)
        except Refused as error:
            made[i] = error
    for temperatures, members in groups.items():
        for start in range(0, len(members), _TOGETHER):
            few = members[start : start + _TOGETHER]
            made.update(zip(few, _made_together([requests[i] for i in few], temperatures), strict=True))
    return [made[i] for i in range(len(requests))]


_TOGETHER: Final = 128
"""Species fitted at once: enough to make calls cheap, few enough for their arrays to stay in a cache."""


def _temperatures(request: EntryRequest) -> tuple[float, float, float]:
    o = request.options
    check_temperatures(o.t_low_K, o.t_common_K, o.t_high_K)
    common = o.t_common_K
    if common == "auto":
        common = common_temperature(request.model.cp_R, o.t_low_K, o.t_high_K)
    return float(o.t_low_K), float(common), float(o.t_high_K)


@dataclass(frozen=True, eq=False)
class _Grids:
    """All temperatures at which a species is evaluated, in one array, and which of them are for what."""

    T_K: FloatArray
    fitted: slice
    judged: slice
    shown: slice


def evaluation_grid(options: FitOptions) -> FloatArray | None:
    """All temperatures at which an entry needs its model, 298.15 K first; None when they have to be looked for."""
    if options.t_common_K == "auto":
        return None
    return _grids((float(options.t_low_K), float(options.t_common_K), float(options.t_high_K))).T_K


@lru_cache(maxsize=64)
def _grids(temperatures_K: tuple[float, float, float]) -> _Grids:
    fitted, judged = design(*temperatures_K).nodes_K, judged_temperatures(*temperatures_K)
    shown = table_grid(temperatures_K[0], temperatures_K[2])
    ends = np.cumsum([1, fitted.size, judged.size, shown.size])
    T = np.concatenate([[STANDARD_TEMPERATURE_K], fitted, judged, shown])
    T.flags.writeable = False  # it is shared
    return _Grids(T, slice(1, ends[1]), slice(ends[1], ends[2]), slice(ends[2], ends[3]))


def _made_together(
    requests: Sequence[EntryRequest], temperatures_K: tuple[float, float, float]
) -> list[Entry | Refused]:
    """The entries of a few species with the same temperatures: every function is evaluated once."""
    grids = _grids(temperatures_K)
    parts = [request.model.parts(grids.T_K) for request in requests]
    totals = [reduce(add, each) for each in parts]
    cp_R, s_R = np.array([t.cp_R for t in totals]), np.array([t.s_R for t in totals])
    h298_R = [r.formation.dHf298_kJ_mol * 1000.0 / GAS_CONSTANT_J_MOL_K for r in requests]
    fits = fit_many(cp_R[:, grids.fitted], h298_R, s_R[:, 0].tolist(), temperatures_K)
    good = [i for i, fit in enumerate(fits) if isinstance(fit, Fit)]
    h_R = np.array([t.h_RT for t in totals]) * grids.T_K
    h_R += np.array(h298_R)[:, None] - h_R[:, :1]
    found = [fit for fit in fits if isinstance(fit, Fit)]
    qualities = fit_qualities(
        [fit.polynomial for fit in found],
        cp_R[good, grids.judged],
        h_R[good, grids.judged] / grids.T_K[grids.judged],
        s_R[good, grids.judged],
        [fit.minimax_dCp_R for fit in found],
        [requests[i].model.classical_limit_R for i in good],
    )
    made: dict[int, Entry | Refused] = {i: fit for i, fit in enumerate(fits) if isinstance(fit, Refused)}
    for i, fit, quality in zip(good, found, qualities, strict=True):
        table = requests[i].model.table_from(parts[i], totals[i], grids.shown, grids.T_K[grids.shown])
        made[i] = _entry(requests[i], fit.polynomial, quality, table)
    return [made[i] for i in range(len(requests))]


def _entry(request: EntryRequest, polynomial: Nasa7, quality: FitQuality, table: ThermoTable) -> Entry | Refused:
    model, formation = request.model, request.formation
    unsure = table.uncertainty.findings if table.uncertainty else ()
    findings = (*model.molecule.findings, *model.findings, *unsure, *formation.findings, *quality.findings())
    if refusals(findings):
        return Refused(refusals(findings))
    return Entry(
        name=request.name,
        model=model,
        formation=formation,
        polynomial=polynomial,
        quality=quality,
        table=table,
        note=request.note,
        comments=request.comments,
        findings=findings,
    )


def table_grid(t_low_K: float, t_high_K: float) -> FloatArray:
    """The usual table temperatures inside a range, with its ends and 298.15 K, ascending, K."""
    inside = {t for t in TABLE_TEMPERATURES_K if t_low_K <= t <= t_high_K}
    return np.array(sorted(inside | {t_low_K, STANDARD_TEMPERATURE_K, t_high_K}))
