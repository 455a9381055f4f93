"""How long a fit takes, on demand: ``python tests/benchmarks/fit_speed.py [REPEATS]``.

Prints, for the test species and three ranges, milliseconds for each species with a fixed and with a searched common
temperature, and the same for two unjoined plain least-squares fits at the same temperatures, whose error is given too.
"""

from __future__ import annotations

import sys
from pathlib import Path
from time import perf_counter

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from heatwright.polynomial.fit import fit_nasa7
from heatwright.polynomial.minimax import design
from polynomial.harmonic import everything

RANGES = [(200.0, 1000.0, 6000.0), (298.15, 1000.0, 3000.0), (300.0, 1000.0, 5000.0)]


def plain_least_squares(species, low, common, high):
    """Largest error of one unweighted quartic in T/T_end for each range, not joined."""
    T = design(low, common, high).nodes_K
    half = T.size // 2
    worst = 0.0
    for part in (T[:half], T[half:]):
        A = (part[:, None] / part[-1]) ** np.arange(5)
        cp = species.cp_R(part)
        x = np.linalg.lstsq(A, cp, rcond=None)[0]
        worst = max(worst, float(np.abs(A @ x - cp).max()))
    return worst


def minimax_fit(species, low, common, high):
    """Largest error of the joined minimax fit."""
    return fit_nasa7(species.cp_R, 0.0, 0.0, t_low_K=low, t_common_K=common, t_high_K=high).max_dCp_R


def timed(function, repeats, low, common, high):
    """Best milliseconds per species over *repeats* rounds, and the errors."""
    rounds = []
    for _ in range(repeats):
        start = perf_counter()
        errors = [function(s, low, common, high) for s in everything()]
        rounds.append((perf_counter() - start) / len(errors) * 1000.0)
    return min(rounds), np.array(errors)


def main(repeats):
    print(f"{len(everything())} species, best of {repeats} rounds, ms for each species; errors over the fixed fit's")
    heads = ("fixed", "auto", "plain", "fixed/plain", "error plain", "error auto")
    print(f"{'range / K':>16}" + "".join(f"{head:>13}" for head in heads))
    for low, common, high in RANGES:
        fixed, errors = timed(minimax_fit, repeats, low, common, high)
        auto, searched = timed(minimax_fit, repeats, low, "auto", high)
        plain, unjoined = timed(plain_least_squares, repeats, low, common, high)
        real = errors > 1e-9
        numbers = (
            fixed,
            auto,
            plain,
            fixed / plain,
            *(np.median(e[real] / errors[real]) for e in (unjoined, searched)),
        )
        print(f"{f'{low:g}-{common:g}-{high:g}':>16}" + "".join(f"{number:13.2f}" for number in numbers))


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 3)
