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
    for n_modes, n_T in ((12, 120), (54, 120), (54, 2000), (300, 5000)):
        compare_vibration(n_modes, n_T)
    for n_species, n_modes, n_T in ((1000, 3, 120), (1000, 12, 120), (1000, 30, 120), (1000, 90, 120)):
        compare_many(n_species, n_modes, n_T)


def cpu_us(action: Callable[[], object], times: int) -> float:
    """Processor time of some calls, microseconds: what other work on the machine takes away does not count."""
    start = time.thread_time()
    for _ in range(times):
        action()
    return (time.thread_time() - start) * 1e6


def compare(what: str, ours: tuple[Callable[[], object], int], bare: tuple[Callable[[], object], int]) -> None:
    """Our calls against those of a bare numpy.expm1 over the same array, in turn 41 times; medians, also of ratios."""
    pairs = [(cpu_us(*ours), cpu_us(*bare)) for _ in range(41)]
    a, b = (statistics.median(times) for times in zip(*pairs, strict=True))
    ratio = statistics.median(one / other for one, other in pairs)
    print(f"{what:<28} {a:10.1f} us   numpy.expm1 {b:8.1f} us   ratio {ratio:5.2f}")


def compare_vibration(n_modes: int, n_T: int) -> None:
    """Harmonic ln q, u and w of one species."""
    T, nu = np.linspace(200.0, 6000.0, n_T), np.geomspace(50.0, 3500.0, n_modes)
    modes, x = HarmonicVibration(tuple(nu)), 1.438777 * nu / T[:, None]
    calls = max(1, 20000 // x.size)
    compare(f"{calls} times {n_modes} x {n_T}", (lambda: modes.ln_q(T), calls), (lambda: np.expm1(x), calls))


def compare_many(n_species: int, n_modes: int, n_T: int) -> None:
    """Many species on one grid; the bare numpy.expm1 over as many of their modes at once as a cache holds."""
    T, species = np.linspace(200.0, 6000.0, n_T), [np.geomspace(50.0, 3500.0, n_modes)] * n_species
    at_once = next(n for n in range((1 << 14) // (n_T * n_modes), 0, -1) if n_species % n == 0)
    x = 1.438777 * np.concatenate(species[:at_once])[:, None] / T
    what = f"{n_species} species, {n_modes} x {n_T}"
    compare(what, (lambda: harmonic_sums_of_many(species, T), 1), (lambda: np.expm1(x), n_species // at_once))


if __name__ == "__main__":
    main()
