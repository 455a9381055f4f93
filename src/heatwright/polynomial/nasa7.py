"""Nasa7: the two-range polynomial with seven coefficients on each side of a common temperature.

With a₁…a₇ of the range that T belongs to (S. Gordon, B. J. McBride, NASA SP-273 (1971), from memory)::

    Cp/R = a₁ + a₂T + a₃T² + a₄T³ + a₅T⁴
    H/RT = a₁ + a₂T/2 + a₃T²/3 + a₄T³/4 + a₅T⁴/5 + a₆/T
    S/R  = a₁ ln T + a₂T + a₃T²/2 + a₄T³/3 + a₅T⁴/4 + a₇

H is on the scale where H(298.15 K) is the enthalpy of formation at 298.15 K.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from math import isfinite
from typing import Final, TypeVar, overload

import numpy as np

from heatwright.constants import STANDARD_TEMPERATURE_K
from heatwright.findings import Refused, refuse
from heatwright.molecule import FloatArray

Coefficients = tuple[float, float, float, float, float, float, float]
N = TypeVar("N", float, FloatArray)

TEXT_DIGITS: Final = 9
"""Significant digits of a coefficient in a field of 15 characters, ``-1.23456789E-05``."""


def round_coefficient(value: float, digits: int = TEXT_DIGITS) -> float:
    """*value* as it will be read back from a field with *digits* significant digits and a two-digit exponent.

    Magnitudes below 1e-99, which would need a third digit in the exponent, become zero.

    Raises
    ------
    Refused
        ``not-a-number`` or ``value-unfit``, when no such field can hold the value.

    >>> round_coefficient(0.00123456789012)
    0.00123456789
    >>> round_coefficient(-3.2e-120)
    0.0
    """
    if not isfinite(value):
        raise Refused([refuse("not-a-number", f"a polynomial coefficient is {value}", expected="a finite number")])
    rounded = float(f"{value:.{digits}g}")
    if abs(rounded) < 1.0e-99:
        return 0.0
    if abs(rounded) >= 1.0e100:
        raise Refused(
            [
                refuse(
                    "value-unfit",
                    f"a polynomial coefficient is {value:.8E}",
                    expected="a magnitude below 1E+100, which a two-digit exponent can hold",
                    action="Check the heat capacity and the temperature range that were fitted.",
                )
            ]
        )
    return rounded


def cp_of(a: Sequence[float], T: N) -> N:
    """Cp/R of one set of coefficients at T (K)."""
    return a[0] + T * (a[1] + T * (a[2] + T * (a[3] + T * a[4])))


def h_of(a: Sequence[float], T: N) -> N:
    """H/R (K) of one set of coefficients at T (K)."""
    return a[5] + T * (a[0] + T * (a[1] / 2 + T * (a[2] / 3 + T * (a[3] / 4 + T * (a[4] / 5)))))


def s_of(a: Sequence[float], T: N) -> N:
    """S/R of one set of coefficients at T (K)."""
    return a[6] + a[0] * _ln(T) + T * (a[1] + T * (a[2] / 2 + T * (a[3] / 3 + T * (a[4] / 4))))


def _ln(T: N) -> N:
    return float(np.log(T)) if isinstance(T, float) else np.log(T)


def slope_of(a: Sequence[float], T: N) -> N:
    """d(Cp/R)/dT (1/K) of one set of coefficients at T (K)."""
    return a[1] + T * (2 * a[2] + T * (3 * a[3] + T * (4 * a[4])))


@dataclass(frozen=True, slots=True)
class Nasa7:
    """A two-range polynomial; ``low`` serves T ≤ ``t_common_K``, ``high`` the temperatures above.

    t_low_K, t_common_K, t_high_K : K, ascending.
    low, high : a₁…a₇ in K and powers of 1/K.

    Every function takes a temperature or an array of temperatures in K and gives a number or an array of the same
    shape.  Outside the fitted range it raises ValueError unless ``extrapolate=True``; 298.15 K is always allowed,
    because there the enthalpy of formation is read, also from a polynomial that starts at 300 K.

    >>> both = (2.5, 0.0, 0.0, 0.0, 0.0, 25473.66, -0.44668)
    >>> hydrogen_atom = Nasa7(200.0, 1000.0, 6000.0, both, both)
    >>> round(hydrogen_atom.h_R(298.15) * 8.31446261815324e-3, 2)
    218.0
    """

    t_low_K: float
    t_common_K: float
    t_high_K: float
    low: Coefficients
    high: Coefficients

    def __post_init__(self) -> None:
        if not 0.0 < self.t_low_K < self.t_common_K < self.t_high_K < np.inf:
            raise ValueError(
                "the temperatures of a polynomial have to be positive and ascending, "
                f"not {self.t_low_K}, {self.t_common_K}, {self.t_high_K} K"
            )
        if len(self.low) != 7 or len(self.high) != 7:
            raise ValueError(f"each range has 7 coefficients, not {len(self.low)} and {len(self.high)}")

    @overload
    def cp_R(self, T: float, *, extrapolate: bool = False) -> float: ...
    @overload
    def cp_R(self, T: FloatArray, *, extrapolate: bool = False) -> FloatArray: ...
    def cp_R(self, T: float | FloatArray, *, extrapolate: bool = False) -> float | FloatArray:
        """Cp/R at T (K)."""
        return self._of_range(cp_of, T, extrapolate)

    @overload
    def h_R(self, T: float, *, extrapolate: bool = False) -> float: ...
    @overload
    def h_R(self, T: FloatArray, *, extrapolate: bool = False) -> FloatArray: ...
    def h_R(self, T: float | FloatArray, *, extrapolate: bool = False) -> float | FloatArray:
        """H/R in K at T (K)."""
        return self._of_range(h_of, T, extrapolate)

    @overload
    def h_RT(self, T: float, *, extrapolate: bool = False) -> float: ...
    @overload
    def h_RT(self, T: FloatArray, *, extrapolate: bool = False) -> FloatArray: ...
    def h_RT(self, T: float | FloatArray, *, extrapolate: bool = False) -> float | FloatArray:
        """H/RT at T (K)."""
        return self._of_range(lambda a, t: h_of(a, t) / t, T, extrapolate)

    @overload
    def s_R(self, T: float, *, extrapolate: bool = False) -> float: ...
    @overload
    def s_R(self, T: FloatArray, *, extrapolate: bool = False) -> FloatArray: ...
    def s_R(self, T: float | FloatArray, *, extrapolate: bool = False) -> float | FloatArray:
        """S/R at T (K)."""
        return self._of_range(s_of, T, extrapolate)

    @overload
    def dcp_R(self, T: float, *, extrapolate: bool = False) -> float: ...
    @overload
    def dcp_R(self, T: FloatArray, *, extrapolate: bool = False) -> FloatArray: ...
    def dcp_R(self, T: float | FloatArray, *, extrapolate: bool = False) -> float | FloatArray:
        """d(Cp/R)/dT in 1/K at T (K)."""
        return self._of_range(slope_of, T, extrapolate)

    def rounded(self, digits: int = TEXT_DIGITS) -> Nasa7:
        """The polynomial with every coefficient as a text field of *digits* significant digits gives it back.

        Raises :class:`~heatwright.findings.Refused` when a coefficient does not fit.
        """
        a1, a2, a3, a4, a5, a6, a7 = (round_coefficient(a, digits) for a in self.low)
        b1, b2, b3, b4, b5, b6, b7 = (round_coefficient(b, digits) for b in self.high)
        return replace(self, low=(a1, a2, a3, a4, a5, a6, a7), high=(b1, b2, b3, b4, b5, b6, b7))

    def _of_range(
        self, formula: Callable[[Coefficients, FloatArray], FloatArray], T: float | FloatArray, extrapolate: bool
    ) -> float | FloatArray:
        t = np.asarray(T, dtype=np.float64)
        if not extrapolate:
            self._check_inside(t)
        value = np.where(t <= self.t_common_K, formula(self.low, t), formula(self.high, t))
        return value if value.ndim else float(value)

    def _check_inside(self, t: FloatArray) -> None:
        inside = (t >= self.t_low_K) & (t <= self.t_high_K) | (t == STANDARD_TEMPERATURE_K)
        if not inside.all():
            outside = float(t[~inside].flat[0])
            raise ValueError(
                f"{outside:g} K is outside the fitted range of {self.t_low_K:g} to {self.t_high_K:g} K, "
                "and a NASA polynomial is not usable there"
            )
