"""The engine and a whole entry inside one process; run on demand.

    python tests/benchmarks/engine_speed.py

Prints microseconds for each step of one species (methanol), medians of many runs, and the ratio of harmonic
vibration to a bare numpy.expm1 over the same array of modes and temperatures.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable

import numpy as np

from heatwright import (
    build_model,
    entries_context,
    formation_given,
    make_entry,
    parse_enthalpy,
    read_output,
    render_format,
)
from heatwright.partition.vibration import HarmonicVibration, harmonic_sums_of_many
from heatwright.resources import sample_outputs


def median_us(action: Callable[[], object], runs: int) -> float:
    """Median wall time of *action*, microseconds."""
    times = []
    for _ in range(runs):
        start = time.perf_counter()
        action()
        times.append(time.perf_counter() - start)
    return statistics.median(times) * 1e6


def main() -> None:
    file = str(sample_outputs() / "CH3OH.out")
    molecule = read_output(file)
    model = build_model(molecule)
    formation = formation_given(parse_enthalpy("-200.7 kJ/mol"), "x", model.composition, model.h298_minus_h0_kJ_mol)
    entry = make_entry("CH3OH", model, formation)
    grid = np.linspace(200.0, 6000.0, 120)
    x = np.random.default_rng(0).uniform(0.1, 20.0, (grid.size, molecule.wavenumbers_cm1.size))
    steps: dict[str, tuple[Callable[[], object], int]] = {
        "read the output": (lambda: read_output(file), 15),
        "symmetry, moments, model": (lambda: build_model(molecule), 50),
        "ln q at 120 temperatures": (lambda: model.ln_q(grid), 300),
        "numpy.expm1 alone": (lambda: np.expm1(x), 300),
        "fit, table, residuals": (lambda: make_entry("CH3OH", model, formation), 50),
        "render the record": (lambda: render_format("nasa7.j2", entries_context([entry])), 50),
    }
    for name, (action, runs) in steps.items():
        print(f"{name:<28} {median_us(action, runs):10.1f} us")
    for n_modes, n_T, runs in ((12, 120, 300), (54, 120, 200), (54, 2000, 30), (300, 5000, 10)):
        compare_vibration(n_modes, n_T, runs)
    for n_species, n_modes, n_T in ((1000, 12, 120), (1000, 30, 120)):
        compare_many(n_species, n_modes, n_T)


def compare_vibration(n_modes: int, n_T: int, runs: int) -> None:
    """Harmonic ln q, u and w against a bare numpy.expm1 over the same array, one after the other, medians."""
    T, nu = np.linspace(200.0, 6000.0, n_T), np.geomspace(50.0, 3500.0, n_modes)
    modes, x = HarmonicVibration(tuple(nu)), 1.438777 * nu / T[:, None]
    ours, bare = zip(
        *((median_us(lambda: modes.ln_q(T), 3), median_us(lambda: np.expm1(x), 3)) for _ in range(runs)), strict=True
    )
    a, b = statistics.median(ours), statistics.median(bare)
    print(f"vibration {n_modes:4} x {n_T:<5}         {a:10.1f} us   numpy.expm1 {b:8.1f} us   ratio {a / b:5.2f}")


def compare_many(n_species: int, n_modes: int, n_T: int) -> None:
    """Many species on one grid against a bare numpy.expm1 over their modes, chunk by chunk alike, medians."""
    T, species = np.linspace(200.0, 6000.0, n_T), [np.geomspace(50.0, 3500.0, n_modes)] * n_species
    at_once = max(1, (1 << 15) // (n_T * n_modes))
    x = 1.438777 * np.concatenate(species[:at_once])[:, None] / T
    ours = median_us(lambda: harmonic_sums_of_many(species, T), 9)
    bare = median_us(lambda: np.expm1(x), 200) * n_species / at_once
    what = f"{n_species} species, {n_modes} x {n_T}"
    print(f"{what:<28} {ours:10.1f} us   numpy.expm1 {bare:8.1f} us   ratio {ours / bare:5.2f}")


if __name__ == "__main__":
    main()
