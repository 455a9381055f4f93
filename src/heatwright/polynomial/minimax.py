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
from typing import Final

import numpy as np

from heatwright.molecule import FloatArray

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
    Q : (2n, 8) orthonormal columns: values at the nodes.
    to_coefficients : (10, 8), from the coordinates in Q to b₁…b₅ (below) and c₁…c₅ (above), in powers of T in K.
    """

    nodes_K: FloatArray
    Q: FloatArray
    to_coefficients: FloatArray


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
    return Design(np.r_[low, high], Q, per_kelvin[:, None] * np.linalg.solve(R.T, Z.T).T)


def minimax(design: Design, cp_R: FloatArray) -> Minimax:
    """Fit *cp_R* (2n,), given at the nodes, as closely as the proven bound can tell (:data:`STOP_RATIO`).

    The bound: at a weighted least-squares solution λᵢ = wᵢrᵢ is orthogonal to every fit function, so for any fit y
    Σ wᵢrᵢ² = Σ λᵢrᵢ = Σ λᵢrᵢ(y) ≤ max|r(y)| Σ wᵢ|rᵢ|.  Hence max|r(y)| ≥ Σ wr² / Σ w|r|, which is at least the
    weighted rms of the residuals; the largest one over the iterations is kept.
    """
    # A constant is taken off first so that a constant heat capacity gives exact zeros.
    constant = float(cp_R[cp_R.size // 2])
    f = cp_R - constant
    noise = NOISE * float(np.abs(cp_R).max())
    y, error, bound, iterations = _lawson(design.Q, f, noise)
    coefficients = design.to_coefficients @ y
    coefficients[[0, 5]] += constant
    return Minimax(coefficients, error, bound, iterations)


def _lawson(Q: FloatArray, f: FloatArray, noise: float) -> tuple[FloatArray, float, float, int]:
    n, m = Q.shape
    best: FloatArray = np.zeros(m)
    error, bound = float(np.abs(f).max()), 0.0
    if error <= noise:
        return best, error, 0.0, 0
    w: FloatArray = np.full(n, 1.0 / n)
    for iteration in range(1, MAX_ITERATIONS + 1):
        wQ = w[:, None] * Q
        y = np.asarray(np.linalg.solve(Q.T @ wQ, wQ.T @ f), dtype=np.float64)
        r: FloatArray = np.abs(Q @ y - f)
        largest = float(r.max())
        if largest < error:
            best, error = y, largest
        wr = w * r
        bound = max(bound, float(wr @ r) / max(float(wr.sum()), _SMALLEST))
        if error <= max(STOP_RATIO * bound, noise) or iteration == MAX_ITERATIONS:
            break
        w = _heavier(w, wr, np.array(largest))
    return best, error, min(bound, error), iteration


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
