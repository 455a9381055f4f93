"""The engine and a whole entry inside one process; run on demand.

    python tests/benchmarks/engine_speed.py

Prints microseconds for each step of one species (methanol), medians of many runs, and the engine's ratio to a bare
numpy.expm1 over the same array of modes and temperatures.
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


if __name__ == "__main__":
    main()
