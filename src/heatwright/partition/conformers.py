r"""Conformers of one species as one ln q: a Boltzmann sum of their own partition functions, differentiated exactly.

.. math:: \ln q = \ln \sum_i q_i e^{-\epsilon_i/T}

with ε the energy above the lowest conformer's lowest level (electronic and zero-point energy), in K.  Each q_i holds
what belongs to the conformer alone: its symmetry number, and its mirror image as two optical isomers.
(Statistical mechanics of a mixture at equilibrium; common practice, no source.)
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar

import numpy as np

from heatwright.constants import GAS_CONSTANT_J_MOL_K
from heatwright.partition.contribution import Contribution, LnQ, total_ln_q

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray


@dataclass(frozen=True, eq=False, slots=True)
class Conformer:
    """One conformer: its file, its energy above the lowest one (electronic and zero-point, kJ/mol), its own factors.

    degeneracy : how many mirror images it stands for; its contributions count them already.
    """

    file: str
    relative_energy_kJ_mol: float
    degeneracy: int
    contributions: tuple[Contribution, ...]

    @property
    def energy_K(self) -> float:
        """The relative energy divided by the gas constant, K."""
        return self.relative_energy_kJ_mol * 1000.0 / GAS_CONSTANT_J_MOL_K


@dataclass(frozen=True, eq=False, slots=True)
class ConformerMixture:
    """What a mixture of conformers adds to the ln q of its first, lowest one: the shares of the two add up to it.

    Two like conformers of one energy add R ln 2 to the entropy and nothing else:

    >>> from heatwright.partition.translation import Translation
    >>> one = (Translation(44.0),)
    >>> both = ConformerMixture((Conformer("a", 0.0, 1, one), Conformer("b", 0.0, 1, one)))
    >>> both.ln_q(np.array([298.15])).s_R.round(6).tolist()
    [0.693147]
    """

    name: ClassVar[str] = "conformers"
    members: tuple[Conformer, ...]

    def __post_init__(self) -> None:
        if not self.members or self.members[0].relative_energy_kJ_mol != 0.0:
            raise ValueError("a mixture of conformers starts with the lowest one, at the relative energy 0")

    def ln_q(self, T: FloatArray) -> LnQ:
        """ln q of the mixture less that of the lowest conformer, with its derivatives, at *T*, K."""
        return mixed(self._beyond_lowest(T))[0]

    def populations(self, T: FloatArray) -> FloatArray:
        """The fraction of each conformer, mirror images together; the conformers first, then the shape of *T*."""
        return mixed(self._beyond_lowest(T))[1]

    def _beyond_lowest(self, T: FloatArray) -> tuple[LnQ, ...]:
        own = [conformer_ln_q(member, T) for member in self.members]
        low = own[0]
        return tuple(LnQ(q.ln_q - low.ln_q, q.u - low.u, q.w - low.w) for q in own)


def conformer_ln_q(conformer: Conformer, T: FloatArray) -> LnQ:
    """ln(q e^{−ε/T}) and its derivatives: a conformer's own ln q, counted from the lowest conformer's lowest level."""
    boltzmann = conformer.energy_K / T
    return total_ln_q(conformer.contributions, T) + LnQ(-boltzmann, boltzmann, -2.0 * boltzmann)


def mixed(terms: tuple[LnQ, ...]) -> tuple[LnQ, FloatArray]:
    """ln Σ exp(ln q) with its derivatives, and the fraction p of each term.

    u = Σ p u_i,  w = Σ p w_i + Σ p (u_i − u)²: the variance is what conversion of one conformer into another adds to
    the heat capacity.
    """
    ln_q = np.stack([term.ln_q for term in terms])
    u_each = np.stack([term.u for term in terms])
    w_each = np.stack([term.w for term in terms])
    largest = ln_q.max(axis=0)
    weights = np.exp(ln_q - largest)
    total = weights.sum(axis=0)
    p = weights / total
    u = (p * u_each).sum(axis=0)
    w = (p * (w_each + (u_each - u) ** 2)).sum(axis=0)
    return LnQ(largest + np.log(total), u, w), p
