"""The smallest largest error: two quartics joined with a continuous slope, fitted to a heat capacity.

Lawson's iteratively re-weighted least squares (C. L. Lawson, thesis, UCLA 1961, from memory): points where the error
is large gain weight, until the weighted least-squares solution is the minimax solution.

The polynomial is written in T/T_common below and T/T_high above the common temperature; powers of T itself would give
a design whose condition number exceeds the digits of a double.  The two conditions at the common temperature (value and
slope) are eliminated exactly, not weighted in, and the remaining eight unknowns have orthonormal columns.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Final

import numpy as np

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray

NODES_PER_RANGE: Final = 50
MAX_ITERATIONS: Final = 100
STOP_RATIO: Final = 1.02
"""The iteration ends when the error is within this factor of the proven lower bound."""
NOISE: Final = 1.0e-12
"""Errors below this fraction of the heat capacity are rounding."""

_WEIGHT_GAIN: Final = 1.0e-3
_LEAST_WEIGHT: Final = 1.0e-10
_SMALLEST: Final = 1.0e-300


@dataclass(frozen=True, eq=False)
class Design:
    """All pairs of quartics with continuous value and slope, seen at the nodes of one set of temperatures.

    nodes_K : (2n,) nodes, n in each range, both with the common temperature.
    Q : (2n, 8) orthonormal columns: values at the nodes.   products : (2n, 64) of all pairs of its columns.
    to_coefficients : (10, 8), from the coordinates in Q to b₁…b₅ (below) and c₁…c₅ (above), in powers of T in K.
    """

    nodes_K: FloatArray
    Q: FloatArray
    to_coefficients: FloatArray
    products: FloatArray


@dataclass(frozen=True, eq=False)
class Minimax:
    """What the iteration ended with.

    coefficients : (10,) Cp/R coefficients b₁…b₅ | c₁…c₅ in powers of T in K.
    error : largest |error| at the nodes.
    lower_bound : no pair of quartics with continuous value and slope has a smaller largest error at the nodes.
    iterations : how many weighted least-squares solutions were made.
    """

    coefficients: FloatArray
    error: float
    lower_bound: float
    iterations: int


def lobatto_nodes(start_K: float, end_K: float, n: int = NODES_PER_RANGE) -> FloatArray:
    """n Chebyshev-Lobatto points from *start_K* to *end_K*, both ends included: dense where quartics ripple most."""
    x = 0.5 - 0.5 * np.cos(np.pi * np.arange(n) / (n - 1))
    nodes = start_K + (end_K - start_K) * x
    nodes[-1] = end_K
    return nodes


@lru_cache(maxsize=256)
def design(t_low_K: float, t_common_K: float, t_high_K: float, n: int = NODES_PER_RANGE) -> Design:
    """The design of one set of temperatures (K)."""
    low, high = lobatto_nodes(t_low_K, t_common_K, n), lobatto_nodes(t_common_K, t_high_K, n)
    k = np.arange(5)
    powers = np.zeros((2 * n, 10))
    powers[:n, :5] = (low[:, None] / t_common_K) ** k
    powers[n:, 5:] = (high[:, None] / t_high_K) ** k
    at_common = (t_common_K / t_high_K) ** k
    joined = np.array([np.r_[np.ones(5), -at_common], np.r_[k, -k * at_common]])  # C x = 0: value, T_common × slope
    Z = np.linalg.qr(joined.T, mode="complete")[0][:, 2:]
    Q, R = np.linalg.qr(powers @ Z)
    per_kelvin = np.r_[1.0 / t_common_K**k, 1.0 / t_high_K**k]
    products = (Q[:, :, None] * Q[:, None, :]).reshape(2 * n, -1)
    return Design(np.r_[low, high], Q, per_kelvin[:, None] * np.linalg.solve(R.T, Z.T).T, products)


def minimax(design: Design, cp_R: FloatArray) -> Minimax:
    """Fit *cp_R* (2n,), given at the nodes, as closely as the proven bound can tell (:data:`STOP_RATIO`).

    The bound: at a weighted least-squares solution λᵢ = wᵢrᵢ is orthogonal to every fit function, so for any fit y
    Σ wᵢrᵢ² = Σ λᵢrᵢ = Σ λᵢrᵢ(y) ≤ max|r(y)| Σ wᵢ|rᵢ|.  Hence max|r(y)| ≥ Σ wr² / Σ w|r|, which is at least the
    weighted rms of the residuals; the largest one over the iterations is kept.
    """
    return minimax_of_many(design, cp_R[None, :])[0]


def minimax_of_many(design: Design, cp_R: FloatArray) -> list[Minimax]:
    """Each row of *cp_R* (p, 2n) fitted as :func:`minimax` does, all at once.

    A row's result does not depend, to the last bit, on the rows it is fitted with: every sum runs over one row alone.
    """
    # A constant is taken off first so that a constant heat capacity gives exact zeros.
    constant = cp_R[:, cp_R.shape[1] // 2]
    y, error, bound, iterations = _lawson(design, cp_R - constant[:, None], NOISE * np.abs(cp_R).max(axis=1))
    found = []
    for i, solution in enumerate(y):
        coefficients = design.to_coefficients @ solution
        coefficients[[0, 5]] += constant[i]
        found.append(Minimax(coefficients, float(error[i]), float(bound[i]), int(iterations[i])))
    return found


def _lawson(design: Design, f: FloatArray, noise: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray, IntArray]:
    """Coordinates (p, 8), errors, lower bounds and iterations (p,) of the problems in the rows of *f* (p, 2n)."""
    best: FloatArray = np.zeros((len(f), design.Q.shape[1]))
    error, bound = np.abs(f).max(axis=1), np.zeros(len(f))
    iterations = np.zeros(len(f), dtype=np.int64)
    rows = np.flatnonzero(error > noise)  # the problems still at work
    f, w = f[rows], np.full((rows.size, f.shape[1]), 1.0 / f.shape[1])
    for iteration in range(1, MAX_ITERATIONS + 1):
        if not rows.size:
            break
        y = _weighted(design, w, f)
        r: FloatArray = np.abs((y[:, None, :] @ design.Q.T)[:, 0] - f)
        largest: FloatArray = r.max(axis=1)
        better = largest < error[rows]
        best[rows[better]], error[rows[better]] = y[better], largest[better]
        wr = w * r
        now = (wr * r).sum(axis=1) / np.maximum(wr.sum(axis=1), _SMALLEST)
        bound[rows], iterations[rows] = np.maximum(bound[rows], now), iteration
        on = error[rows] > np.maximum(STOP_RATIO * bound[rows], noise[rows])
        rows, f, w = rows[on], f[on], _heavier(w[on], wr[on], largest[on, None])
    return best, error, np.minimum(bound, error), iterations


def _weighted(design: Design, w: FloatArray, f: FloatArray) -> FloatArray:
    """The weighted least-squares solutions (p, 8) for weights and values (p, 2n)."""
    n = design.Q.shape[1]
    normal = (w[:, None, :] @ design.products).reshape(-1, n, n)
    right = (w * f)[:, None, :] @ design.Q
    return np.asarray(np.linalg.solve(normal, right.transpose(0, 2, 1))[:, :, 0], dtype=np.float64)


def _heavier(w: FloatArray, wr: FloatArray, largest: FloatArray) -> FloatArray:
    """The next weights: w·|r|, with a little of the old ones so that no point is lost for good."""
    w = wr + _WEIGHT_GAIN * largest * w
    normalised: FloatArray = w / w.sum(axis=-1, keepdims=True)
    floored: FloatArray = np.maximum(normalised, _LEAST_WEIGHT / w.shape[-1])
    return floored


def minimax_errors(Q: FloatArray, f: FloatArray, iterations: int) -> FloatArray:
    """Approximate minimax errors of several problems at once: geometric mean of error and lower bound.

    Q : (p, 2n, 8) orthonormal designs; f : (p, 2n) heat capacities; returns (p,).
    """
    p, n, _ = Q.shape
    w: FloatArray = np.full((p, n), 1.0 / n)
    error, bound = np.full(p, np.inf), np.zeros(p)
    for _ in range(iterations):
        wQ = w[:, :, None] * Q
        y = np.linalg.solve(Q.transpose(0, 2, 1) @ wQ, (f[:, None, :] @ wQ)[:, 0, :, None])
        r: FloatArray = np.abs((Q @ y)[:, :, 0] - f)
        largest: FloatArray = np.maximum(r.max(axis=1), _SMALLEST)
        error = np.minimum(error, largest)
        wr: FloatArray = w * r
        bound = np.maximum(bound, (wr * r).sum(axis=1) / np.maximum(wr.sum(axis=1), _SMALLEST))
        w = _heavier(w, wr, largest[:, None])
    return np.asarray(np.sqrt(error * bound))
