"""How good a polynomial is: its residuals, its joint, its physics, and its distance from the best possible one.

Everything is computed from the coefficients as they are printed.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from typing import Any, Final

import numpy as np

from heatwright.findings import Finding, refuse, warn
from heatwright.molecule import FloatArray
from heatwright.polynomial.nasa7 import Nasa7, cp_of, h_of, s_of, slope_of

_Function = Callable[[FloatArray], FloatArray]
Reference = _Function | FloatArray

POINTS_PER_SPACING: Final = 100
"""Enough that the largest deviation found is within 0.1 % of that on twenty times as many points."""
TEXT_RESOLUTION_R: Final = 1.0e-5
"""Errors in Cp/R below this come from the nine digits of the text, not from the fit."""
FAR_FROM_MINIMAX: Final = 1.10
"""A fit whose error is more than this times the proven lower bound is pointed out."""
COARSE: Final = 0.02
"""An error above this part of the largest Cp is pointed out however close to the bound it is (molecules from 200 to
6000 K have half a percent at most; common practice, no source)."""


@dataclass(frozen=True, slots=True)
class Deviation:
    """The largest absolute deviation of one function and the temperature where it occurs (K)."""

    largest: float
    at_K: float


@dataclass(frozen=True, slots=True)
class Jumps:
    """High minus low range at the common temperature: Cp/R, H/R (K), S/R and d(Cp/R)/dT (1/K)."""

    cp_R: float
    h_R_K: float
    s_R: float
    dcp_R_K: float


@dataclass(frozen=True, slots=True)
class FitQuality:
    """What there is to know about a polynomial against the functions it was made from.

    dcp_R, dh_RT, ds_R : largest |ΔCp|/R, |ΔH|/RT and |ΔS|/R over the range.
    jumps : discontinuities at the common temperature.
    least_cp : smallest Cp/R, as a Deviation from zero.
    greatest_cp : largest Cp/R and where.
    minimax_dCp_R : proven lower bound of max |ΔCp|/R for any two quartics joined with continuous value and slope.
    classical_limit_R : Cp/R that the species' equipartition limit allows, or None when it has none.
    """

    dcp_R: Deviation
    dh_RT: Deviation
    ds_R: Deviation
    jumps: Jumps
    least_cp: Deviation
    greatest_cp: Deviation
    minimax_dCp_R: float
    classical_limit_R: float | None = None

    @property
    def ratio(self) -> float:
        """Largest |ΔCp| over the proven lower bound; 1 when the error is no more than the text's last digits."""
        if self.dcp_R.largest <= TEXT_RESOLUTION_R:
            return 1.0
        return self.dcp_R.largest / self.minimax_dCp_R if self.minimax_dCp_R > 0.0 else np.inf

    @property
    def exceeds_classical_limit(self) -> bool:
        """Whether Cp goes above the classical limit by more than the fit error explains."""
        limit = self.classical_limit_R
        return limit is not None and self.greatest_cp.largest > limit + self.dcp_R.largest + TEXT_RESOLUTION_R

    def findings(self) -> tuple[Finding, ...]:
        """What has to be said about the polynomial; empty when all is well."""
        candidates = (self._not_positive(), self._above_classical(), self._far_from_minimax(), self._coarse())
        return tuple(f for f in candidates if f is not None)

    def _not_positive(self) -> Finding | None:
        if self.least_cp.largest > 0.0:
            return None
        return refuse(
            "cp-not-positive",
            f"the polynomial's Cp/R is {self.least_cp.largest:.4g} at {self.least_cp.at_K:g} K",
            expected="a positive heat capacity over the whole range",
            action="Check the wavenumbers and electronic levels, or fit a shorter range.",
        )

    def _above_classical(self) -> Finding | None:
        if not self.exceeds_classical_limit:
            return None
        return warn(
            "cp-above-classical",
            f"the polynomial's Cp/R is {self.greatest_cp.largest:.4f} at {self.greatest_cp.at_K:g} K",
            expected=f"at most the classical limit of {self.classical_limit_R:.4g}",
            action="Check the number of modes, or fit a shorter range.",
        )

    def _far_from_minimax(self) -> Finding | None:
        if self.ratio <= FAR_FROM_MINIMAX:
            return None
        return warn(
            "fit-not-closest",
            f"the largest error in Cp/R is {self.dcp_R.largest:.4g}, at {self.dcp_R.at_K:g} K",
            expected=f"at most {FAR_FROM_MINIMAX:g} times {self.minimax_dCp_R:.4g}, which no such polynomial can beat",
            action="Look at the heat capacity for a step or a kink, or fit a shorter range.",
        )

    def _coarse(self) -> Finding | None:
        most = COARSE * self.greatest_cp.largest
        if self.dcp_R.largest <= most:
            return None
        return warn(
            "fit-coarse",
            f"the polynomial's Cp/R is off by {self.dcp_R.largest:.4g} at {self.dcp_R.at_K:g} K",
            expected=f"at most {most:.4g}, {COARSE:.0%} of the largest Cp/R",
            action="Two quartics cannot follow this heat capacity: fit a shorter range, or find what makes the step.",
        )


def fit_quality(
    polynomial: Nasa7,
    cp_R: Reference,
    h_RT: Reference,
    s_R: Reference,
    lower_bound: float,
    *,
    classical_limit_R: float | None = None,
) -> FitQuality:
    """Compare *polynomial* with the functions it was made from, on :func:`quality_grid`.

    cp_R, h_RT, s_R : functions of an array of temperatures (K), or their values at ``quality_grid(polynomial)``;
        the enthalpy on the polynomial's own scale (enthalpy of formation at 298.15 K included).
    lower_bound : proven lower bound of max |ΔCp|/R, as the fit gives it.
    classical_limit_R : Cp/R at which all modes are classical, for species of rigid rotation and harmonic modes only.

    >>> both = (2.5, 0.0, 0.0, 0.0, 0.0, 0.0, 4.0)
    >>> atom = Nasa7(200.0, 1000.0, 6000.0, both, both)
    >>> quality = fit_quality(atom, lambda T: 2.5 + 0.01 * (T > 5000), lambda T: 2.5 + 0 * T, atom.s_R, 0.005)
    >>> round(quality.dcp_R.largest, 9), quality.ds_R.largest, round(quality.ratio, 6), quality.findings()[0].code
    (0.01, 0.0, 2.0, 'fit-not-closest')
    """
    T = quality_grid(polynomial)
    values = (_values(cp_R, T)[None], _values(h_RT, T)[None], _values(s_R, T)[None])
    return fit_qualities([polynomial], *values, [lower_bound], [classical_limit_R])[0]


def fit_qualities(
    polynomials: Sequence[Nasa7],
    cp_R: FloatArray,
    h_RT: FloatArray,
    s_R: FloatArray,
    lower_bounds: Sequence[float],
    classical_limits_R: Sequence[float | None],
) -> list[FitQuality]:
    """:func:`fit_quality` of many polynomials on the same temperatures at once, with the same results.

    cp_R, h_RT, s_R : (p, n), each row at :func:`quality_grid` of the polynomials.
    """
    if not polynomials:
        return []
    T = quality_grid(polynomials[0])
    middle = int(np.searchsorted(T, polynomials[0].t_common_K, side="right"))
    low = np.array([p.low for p in polynomials]).T[:, :, None]
    high = np.array([p.high for p in polynomials]).T[:, :, None]

    def on_grid(of: Callable[[Any, FloatArray], FloatArray]) -> FloatArray:
        return np.concatenate([of(low, T[:middle]), of(high, T[middle:])], axis=1)

    cp = on_grid(cp_of)
    deviations = zip(
        _largest(T, cp - cp_R), _largest(T, on_grid(h_of) / T - h_RT), _largest(T, on_grid(s_of) - s_R), strict=True
    )
    lowest, highest = np.argmin(cp, axis=1), np.argmax(cp, axis=1)
    return [
        FitQuality(
            dcp_R=dcp,
            dh_RT=dh,
            ds_R=ds,
            jumps=jumps_at_common(polynomial),
            least_cp=Deviation(float(cp[i, lowest[i]]), float(T[lowest[i]])),
            greatest_cp=Deviation(float(cp[i, highest[i]]), float(T[highest[i]])),
            minimax_dCp_R=lower_bounds[i],
            classical_limit_R=classical_limits_R[i],
        )
        for i, (polynomial, (dcp, dh, ds)) in enumerate(zip(polynomials, deviations, strict=True))
    ]


@dataclass(frozen=True, eq=False, slots=True)
class ResidualCurve:
    """Polynomial less reference on a grid: T_K (n,), ΔCp/R, ΔH/RT and ΔS/R of the same shape."""

    T_K: FloatArray
    dcp_R: FloatArray
    dh_RT: FloatArray
    ds_R: FloatArray


CURVE_POINTS: Final = 41
"""Points in each range of a residual curve: a ripple of a quartic has ten of them."""


def residual_curve(
    polynomial: Nasa7, cp_R: _Function, h_RT: _Function, s_R: _Function, also_K: Sequence[float] = ()
) -> ResidualCurve:
    """The residuals to be looked at, at few enough temperatures to be written down.

    cp_R, h_RT, s_R : functions of an array of temperatures (K).   also_K : further temperatures, as of the largest
    deviations.

    >>> both = (2.5, 0.0, 0.0, 0.0, 0.0, 0.0, 4.0)
    >>> atom = Nasa7(200.0, 1000.0, 6000.0, both, both)
    >>> curve = residual_curve(atom, lambda T: 2.5 - 1e-5 * T, lambda T: 2.5 + 0 * T, atom.s_R)
    >>> len(curve.T_K), round(float(curve.dcp_R.max()), 6), float(curve.dh_RT[0])
    (81, 0.06, 0.0)
    """
    edges = (polynomial.t_low_K, polynomial.t_common_K, polynomial.t_high_K)
    phase = (1.0 - np.cos(np.linspace(0.0, np.pi, CURVE_POINTS))) / 2.0  # Chebyshev-Lobatto: dense at the ends
    spread = [low * (high / low) ** phase for low, high in pairwise(edges)]
    inside = np.concatenate([*spread, np.asarray(also_K, dtype=float)])
    T = _ascending(np.clip(np.append(inside.round(2), edges), edges[0], edges[2]))
    return ResidualCurve(T, polynomial.cp_R(T) - cp_R(T), polynomial.h_RT(T) - h_RT(T), polynomial.s_R(T) - s_R(T))


def quality_grid(polynomial: Nasa7) -> FloatArray:
    """Ascending temperatures (K) that show every ripple: uniform in T and in ln T in each range, with all ends.

    The common temperature is there twice, as itself for the low range and as the next number above for the high one.
    """
    return judged_temperatures(polynomial.t_low_K, polynomial.t_common_K, polynomial.t_high_K)


@lru_cache(maxsize=64)
def judged_temperatures(t_low_K: float, t_common_K: float, t_high_K: float) -> FloatArray:
    """The grid of :func:`quality_grid` for these temperatures, K."""
    above = float(np.nextafter(t_common_K, np.inf))
    grid = np.concatenate([_spread(t_low_K, t_common_K), _spread(above, t_high_K)])
    grid.flags.writeable = False  # it is shared
    return grid


def jumps_at_common(polynomial: Nasa7) -> Jumps:
    """Discontinuities of *polynomial* at its common temperature."""
    low, high, T = polynomial.low, polynomial.high, float(polynomial.t_common_K)
    cp, h, s = cp_of(high, T) - cp_of(low, T), h_of(high, T) - h_of(low, T), s_of(high, T) - s_of(low, T)
    return Jumps(cp, h, s, slope_of(high, T) - slope_of(low, T))


def _spread(start: float, end: float) -> FloatArray:
    inside = np.concatenate(
        [
            np.linspace(start, end, POINTS_PER_SPACING)[1:-1],
            np.geomspace(start, end, POINTS_PER_SPACING)[1:-1],
        ]
    )
    return _ascending(np.concatenate([[start], inside[(inside > start) & (inside < end)], [end]]))


def _ascending(values: FloatArray) -> FloatArray:
    """Each value once, in order: ``numpy.unique`` imports all of ``numpy.ma`` first."""
    ordered: FloatArray = np.sort(values)
    first: FloatArray = ordered[np.append(True, ordered[1:] != ordered[:-1])]
    return first


def _values(reference: Reference, T: FloatArray) -> FloatArray:
    values = np.asarray(reference(T) if callable(reference) else reference, dtype=np.float64)
    if values.shape != T.shape:
        raise ValueError(f"the reference has shape {values.shape}, the grid of temperatures {T.shape}")
    return values


def _largest(T: FloatArray, difference: FloatArray) -> list[Deviation]:
    """Of each row the largest magnitude and where it is."""
    size = np.abs(difference)
    worst = np.argmax(size, axis=1)
    return [Deviation(float(row[k]), float(T[k])) for row, k in zip(size, worst, strict=True)]
