r"""Very many energy levels as a few weighted ones, by Gauss quadrature over their own distribution.

Levels are collected in bins whose width δ is a fixed part of their energy above the lowest level, and those of a bin
are replaced by the n nodes and weights that reproduce the first 2n moments of their energies.  The sum over e^{−sE} so
loses, of what the bin contributes,

.. math:: \frac{s^{2n}}{(2n)!} \left\langle \pi_n^2 e^{-s\xi} \right\rangle \le
          \frac{4}{(2n)!} \left(\frac{s\delta}{4}\right)^{2n} e^{s\delta}

because no monic polynomial of degree n has a smaller mean square over the bin than π_n, and Chebyshev's is 2(δ/4)ⁿ at
most.  With the bins and nodes used here that is below 10⁻¹⁶ for levels at 10 kT, where a Boltzmann sum has its weight,
and below 10⁻¹¹ at 30 kT.  Nodes and weights do not depend on temperature, so derivatives stay derivatives.
Source: G. H. Golub, J. H. Welsch, Math. Comput. 23, 221 (1969) (from memory).
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, IntArray

NODES: Final = 6
WIDTH: Final = 1.0 / 16.0
"""Width of a bin as a part of its lower edge, which is counted from the lowest level."""


def condensed(energies: FloatArray, weights: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Energies (counted from the lowest level) and weights of fewer levels with the same Boltzmann sums.

    Bins with no more than NODES levels are kept as they are.

    >>> J = np.arange(3000.0)
    >>> few, g = condensed(J * (J + 1.0), 2.0 * J + 1.0)
    >>> few.size < 1500, bool(np.isclose(g.sum(), 3000.0**2, rtol=1e-13))
    (True, True)
    """
    order = np.argsort(energies, kind="stable")
    t, g = energies[order] - energies[order[0]], weights[order]
    logarithms = np.log(t, out=np.full(t.size, -1.0e3), where=t > 0.0)  # below that of any positive number
    starts = np.flatnonzero(np.diff(np.floor(logarithms / np.log1p(WIDTH)), prepend=np.inf))
    counts = np.diff(starts, append=t.size)
    full = np.repeat(counts > NODES, counts)
    if not full.any():
        return t, g
    nodes, node_weights = _gauss(t[full], g[full], counts[counts > NODES])
    return np.concatenate([t[~full], nodes]), np.concatenate([g[~full], node_weights])


def _gauss(t: FloatArray, g: FloatArray, counts: IntArray) -> tuple[FloatArray, FloatArray]:
    """Nodes and weights of consecutive bins of *counts* levels, by the recursion of their orthogonal polynomials."""
    starts = np.concatenate([[0], np.cumsum(counts)[:-1]])
    bin_of = np.repeat(np.arange(counts.size), counts)
    low, width = t[starts], t[starts + counts - 1] - t[starts]
    y = (t - low[bin_of]) / np.where(width > 0.0, width, 1.0)[bin_of]
    mass = np.add.reduceat(g, starts)
    jacobi = np.zeros((counts.size, NODES, NODES))
    before, p = np.zeros(t.size), 1.0 / np.sqrt(mass)[bin_of]
    side = np.zeros(counts.size)
    for k in range(NODES):
        middle = np.add.reduceat(g * y * p**2, starts)
        jacobi[:, k, k] = middle
        before, p = p, (y - middle[bin_of]) * p - side[bin_of] * before
        side = np.sqrt(np.add.reduceat(g * p**2, starts))
        side = np.where(side > 1.0e-10, side, 0.0)  # fewer different levels than nodes: the recursion ends there
        p *= np.divide(1.0, side, out=np.zeros_like(side), where=side > 0.0)[bin_of]
        if k + 1 < NODES:
            jacobi[:, k + 1, k] = side
    nodes, vectors = np.linalg.eigh(jacobi)
    node_weights = (mass[:, None] * vectors[:, 0, :] ** 2).ravel()
    used = node_weights > 0.0
    return (low[:, None] + width[:, None] * nodes).ravel()[used], node_weights[used]
