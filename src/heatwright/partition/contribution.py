"""The protocol of the engine: every factor of the molecular partition function is a ln q with two derivatives.

With q taken per molecule at constant standard pressure,

    u = T dlnq/dT,   w = T² d²lnq/dT²
    (H − H₀)/RT = Σ u,   Cp/R = Σ (2u + w),   S/R = Σ (ln q + u),   −(G − H₀)/RT = Σ ln q

so Cp = dH/dT and dS/dT = Cp/T hold for any sum of contributions.  Only the translational factor depends on pressure:
there ln q stands for ln(q/N) and its derivatives are taken at constant pressure, which is what turns U into H and Cv
into Cp without further terms.  (Statistical mechanics of the ideal gas; common practice, no source.)
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import reduce
from operator import add
from typing import TYPE_CHECKING, Protocol

import numpy as np

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray


@dataclass(frozen=True, eq=False, slots=True)
class LnQ:
    """ln q, u = T·dlnq/dT and w = T²·d²lnq/dT², each of the shape of the temperatures; dimensionless."""

    ln_q: FloatArray
    u: FloatArray
    w: FloatArray

    def __add__(self, other: LnQ) -> LnQ:
        return LnQ(self.ln_q + other.ln_q, self.u + other.u, self.w + other.w)

    def __getitem__(self, where: slice) -> LnQ:
        return LnQ(self.ln_q[where], self.u[where], self.w[where])

    @property
    def h_RT(self) -> FloatArray:
        """(H − H₀)/RT, dimensionless."""
        return self.u

    @property
    def cp_R(self) -> FloatArray:
        """Cp/R, dimensionless."""
        return 2.0 * self.u + self.w

    @property
    def s_R(self) -> FloatArray:
        """S/R, dimensionless."""
        return self.ln_q + self.u


class Contribution(Protocol):
    """One factor of the partition function."""

    @property
    def name(self) -> str:
        """How the factor is called in tables: ``translation``, ``rotation``, …"""
        ...

    def ln_q(self, T: FloatArray) -> LnQ:
        """ln q and its derivatives at the temperatures *T*, K, all positive."""
        ...


@dataclass(frozen=True, slots=True)
class ConstantFactor:
    """A factor that does not depend on temperature, such as the number of optical isomers.

    Only the entropy feels it, by R ln(factor).
    """

    name: str
    factor: float

    def ln_q(self, T: FloatArray) -> LnQ:
        """ln(factor) at each temperature, with zero derivatives."""
        zero = np.zeros(T.shape)
        return LnQ(np.full(T.shape, np.log(self.factor)), zero, zero)


def total_ln_q(contributions: Iterable[Contribution], T: FloatArray) -> LnQ:
    """The sum over the contributions: ln q of the whole molecule and its derivatives at *T*, K."""
    return reduce(add, (contribution.ln_q(T) for contribution in contributions))
