"""Many species fitted at once: every digit as for each alone, whatever the others are."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from heatwright.entry import EntryRequest, FitOptions, make_entries, make_entry
from heatwright.findings import Refused
from heatwright.formation.formation import formation_given, parse_enthalpy
from heatwright.partition.model import ThermoModel, build_model
from heatwright.polynomial.fit import common_temperature, fit_many, fit_nasa7
from heatwright.polynomial.minimax import design, minimax, minimax_of_many
from heatwright.reading.outputs import read_output
from heatwright.resources import sample_outputs

TEMPERATURES = (200.0, 1000.0, 6000.0)


def heat_capacities(n: int) -> list[tuple[float, ...]]:
    """Wavenumbers of *n* made-up molecules from one mode to sixty."""
    random = np.random.default_rng(20240229)
    return [tuple(random.uniform(40.0, 4000.0, int(random.integers(1, 60)))) for _ in range(n)]


def cp(modes: tuple[float, ...], T: np.ndarray) -> np.ndarray:
    x = 1.438777 * np.array(modes)[:, None] / T
    return 4.0 + (x**2 * np.exp(-x) / np.expm1(-x) ** 2).sum(axis=0)


@pytest.mark.parametrize("together", [1, 2, 7, 40])
def test_a_fit_does_not_depend_on_its_company(together: int) -> None:
    d = design(*TEMPERATURES)
    rows = np.array([cp(modes, d.nodes_K) for modes in heat_capacities(40)])
    alone = [minimax(d, row) for row in rows]
    for start in range(0, 40, together):
        for one, other in zip(alone[start:], minimax_of_many(d, rows[start : start + together]), strict=False):
            assert (one.coefficients == other.coefficients).all()
            assert (one.error, one.lower_bound, one.iterations) == (other.error, other.lower_bound, other.iterations)


def test_fits_of_many_are_those_of_each_and_a_bad_one_harms_nobody() -> None:
    d = design(*TEMPERATURES)
    species = heat_capacities(6)
    rows = np.array([cp(modes, d.nodes_K) for modes in species])
    rows[2, 17] = np.nan
    h, s = [100.0 * i for i in range(6)], [20.0 + i for i in range(6)]
    h[4] = float("inf")
    made = fit_many(rows, h, s, TEMPERATURES)
    for i, modes in enumerate(species):
        if i in (2, 4):
            fault = made[i]
            assert isinstance(fault, Refused)
            assert [f.code for f in fault.findings] == ["not-a-number"]
        else:
            assert made[i] == fit_nasa7(lambda T, modes=modes: cp(modes, T), h[i], s[i])


def models() -> list[ThermoModel]:
    files = sorted(str(p) for p in sample_outputs().iterdir() if p.name.endswith(".out"))  # type: ignore[attr-defined]
    return [build_model(read_output(file)) for file in files[:7]]


def test_entries_of_many_are_those_of_each() -> None:
    given = parse_enthalpy("-100 kJ/mol")
    options = [FitOptions(), FitOptions(t_common_K="auto"), FitOptions(t_low_K=298.15, t_high_K=3000.0)]
    requests = [
        EntryRequest(
            f"X{i}", m, formation_given(given, "me", m.composition, m.h298_minus_h0_kJ_mol), options[i % len(options)]
        )
        for i, m in enumerate(models())
    ]
    bad = replace(requests[0], options=FitOptions(t_low_K=500.0))
    made = make_entries([*requests, bad])
    assert isinstance(made.pop(), Refused)
    for request, entry in zip(requests, made, strict=True):
        alone = make_entry(request.name, request.model, request.formation, request.options)
        assert not isinstance(entry, Refused)
        assert (entry.polynomial, entry.quality, entry.findings) == (alone.polynomial, alone.quality, alone.findings)
        assert (entry.table.cp_J_mol_K == alone.table.cp_J_mol_K).all()
        fitted = fit_nasa7(
            request.model.cp_R,
            request.formation.dHf298_kJ_mol * 1000.0 / 8.31446261815324,
            float(request.model.s_R(298.15)),
            t_low_K=request.options.t_low_K,
            t_common_K=request.options.t_common_K,
            t_high_K=request.options.t_high_K,
        )
        assert entry.polynomial.low == pytest.approx(fitted.polynomial.low, rel=1e-8)


def test_the_common_temperature_that_auto_stands_for() -> None:
    modes = heat_capacities(1)[0]
    fit = fit_nasa7(lambda T: cp(modes, T), 0.0, 20.0, t_common_K="auto")
    assert common_temperature(lambda T: cp(modes, T), 200.0, 6000.0) == fit.polynomial.t_common_K
