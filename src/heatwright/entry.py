"""Entry: a species name, its composition, the fitted polynomial and everything that stands behind it."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding
from heatwright.formation.formation import Formation
from heatwright.molecule import FloatArray
from heatwright.partition.model import ThermoModel
from heatwright.partition.table import ThermoTable
from heatwright.polynomial.fit import fit_nasa7
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.polynomial.quality import FitQuality, ResidualCurve, fit_quality, residual_curve

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
    """What a template writes: a named species with its polynomial, table, formation and the quality of the fit."""

    name: str
    model: ThermoModel
    formation: Formation
    polynomial: Nasa7
    quality: FitQuality
    table: ThermoTable
    phase: str = "G"
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


def make_entry(name: str, model: ThermoModel, formation: Formation, options: FitOptions | None = None) -> Entry:
    """Tabulate, fit and judge: the entry of one species.

    Raises Refused when the temperatures cannot carry a polynomial or a value is not finite.
    """
    options = options or FitOptions()
    R = GAS_CONSTANT_J_MOL_K
    h298_R = formation.dHf298_kJ_mol * 1000.0 / R
    offset = h298_R - float(model.h_minus_h0_R(STANDARD_TEMPERATURE_K))
    fit = fit_nasa7(
        model.cp_R,
        h298_R,
        float(model.s_R(STANDARD_TEMPERATURE_K)),
        t_low_K=options.t_low_K,
        t_common_K=options.t_common_K,
        t_high_K=options.t_high_K,
    )

    def h_RT(T: FloatArray) -> FloatArray:
        return (offset + model.h_minus_h0_R(T)) / T

    quality = fit_quality(
        fit.polynomial,
        model.cp_R,
        h_RT,
        model.s_R,
        fit.minimax_dCp_R,
        classical_limit_R=model.classical_limit_R,
    )
    table = model.tabulate(table_grid(options.t_low_K, options.t_high_K))
    unsure = table.uncertainty.findings if table.uncertainty else ()
    return Entry(
        name=name,
        model=model,
        formation=formation,
        polynomial=fit.polynomial,
        quality=quality,
        table=table,
        findings=(*model.molecule.findings, *model.findings, *unsure, *formation.findings, *quality.findings()),
    )


def table_grid(t_low_K: float, t_high_K: float) -> FloatArray:
    """The usual table temperatures inside a range, with its ends and 298.15 K, ascending, K."""
    inside = {t for t in TABLE_TEMPERATURES_K if t_low_K <= t <= t_high_K}
    return np.array(sorted(inside | {t_low_K, STANDARD_TEMPERATURE_K, t_high_K}))
