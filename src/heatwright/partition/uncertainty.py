"""Standard uncertainties of Cp°, H°−H°(298.15 K) and S° from those of their inputs, carried through ln q.

Inputs are shifts δ with the mean 0 and a standard uncertainty each, independent of one another: ν → ν e^δ for
wavenumbers and V → V e^δ for barriers (a positive quantity is as likely too large by a factor as too small by it),
ε → ε + δ for the relative energy of a conformer.  The derivatives of ln q, u and w by δ are closed forms for harmonic
oscillators and mixtures, so the law of propagation (JCGM 100:2008, section 5.1) gives columns that belong together; a
comparison with the exact change at ±δ says where it does not hold.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from functools import partial
from math import exp
from typing import TYPE_CHECKING, Any, Final, Protocol, runtime_checkable

import numpy as np
from numpy.typing import NDArray

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding, warn
from heatwright.partition.conformers import Conformer, conformer_ln_q, mixed
from heatwright.partition.contribution import Contribution, LnQ
from heatwright.partition.inputs import InputUncertainties, StatedInput, stated_inputs
from heatwright.partition.vibration import HarmonicVibration, mode_sensitivities

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Level

MaskArray = NDArray[np.bool_]

DEGENERATE_CM1: Final = 1.0
"""Modes nearer than this (1/cm) are degenerate: symmetry makes them one motion, so they are shifted together."""
LINEAR_WITHIN: Final = 0.05
"""Relative difference from linear propagation above which it is said that the result is not linear."""
_NEGLIGIBLE: Final = 0.02
"""Uncertainties below this part of a column's largest one are not judged."""
_COLUMNS: Final = ("Cp°", "H°−H°(298.15 K)", "S°")


@runtime_checkable
class HasBarrier(Protocol):
    """A contribution with a torsional potential."""

    def with_barrier_factor(self, factor: float) -> Contribution:
        """The same with its potential multiplied by *factor*: of the same symmetry, so that nothing else changes."""
        ...


@dataclass(frozen=True, eq=False, slots=True)
class Shift:
    """What δ does to one conformer: the modes multiplied by e^δ, the torsion (counted from 0) whose barrier is, and
    the energy that is added (K per δ)."""

    modes: MaskArray
    torsion: int = -1
    energy_K: float = 0.0

    @property
    def is_nothing(self) -> bool:
        """Whether the conformer stays as it is."""
        return not self.modes.any() and self.torsion < 0 and self.energy_K == 0.0


@dataclass(frozen=True, eq=False, slots=True)
class Direction:
    """One independent input with its standard uncertainty u, and what a shift of it does to each conformer."""

    what: str
    u: float
    shifts: tuple[Shift, ...]


@dataclass(frozen=True, eq=False, slots=True)
class TableUncertainty:
    """Standard uncertainties on a temperature grid, each (n,), with the inputs they are from.

    findings : where linear propagation is not good to :data:`LINEAR_WITHIN`.
    """

    cp_J_mol_K: FloatArray
    h_minus_h298_kJ_mol: FloatArray
    s_J_mol_K: FloatArray
    inputs: tuple[StatedInput, ...]
    findings: tuple[Finding, ...] = ()


def propagated(
    members: Sequence[Conformer], stated: InputUncertainties, level: Level | None, T: FloatArray
) -> TableUncertainty:
    """The standard uncertainties at the temperatures *T* (n,), K, of a species with these conformers (or this one)."""
    torsions = any(isinstance(c, HasBarrier) for m in members for c in m.contributions)
    inputs = stated_inputs(stated, level, n_conformers=len(members), torsions=torsions)
    found = directions(members, inputs, stated.cutoff_cm1)
    base = columns(partial(total, members), T)
    linear, plus, minus = np.zeros((3, max(len(found), 1), 3, T.size))
    for k, d in enumerate(found):
        linear[k] = d.u * columns(partial(sensitivity, members, d), T)
        plus[k] = columns(partial(total, shifted(members, d, d.u)), T) - base
        minus[k] = columns(partial(total, shifted(members, d, -d.u)), T) - base
    u = np.sqrt((linear**2).sum(axis=0))
    return TableUncertainty(u[0], u[1], u[2], inputs, _not_linear(u, _spread(linear, plus, minus), T))


def columns(function: Callable[[FloatArray], LnQ], T: FloatArray) -> FloatArray:
    """(3, n) Cp (J/mol/K), H − H(298.15 K) (kJ/mol) and S (J/mol/K), or their changes, from ln q or its change."""
    q, reference = function(T), function(np.array([STANDARD_TEMPERATURE_K]))
    h_R = q.u * T - reference.u[0] * STANDARD_TEMPERATURE_K
    return np.stack([q.cp_R, h_R / 1000.0, q.s_R]) * GAS_CONSTANT_J_MOL_K


def total(members: Sequence[Conformer], T: FloatArray) -> LnQ:
    """ln q of the species and its derivatives."""
    return mixed(tuple(conformer_ln_q(m, T) for m in members))[0]


def directions(members: Sequence[Conformer], inputs: Sequence[StatedInput], cutoff_cm1: float) -> tuple[Direction, ...]:
    """The independent shifts behind the inputs.

    The scale factor moves all modes of all conformers.  Each low mode moves alone, degenerate ones together, the k-th
    one of every conformer together too, as it is much the same motion; so do the barriers.  Each conformer but the
    lowest has an energy.
    """
    waves = [np.array([w for c in m.contributions for w in modes_of(c)]) for m in members]
    still = [np.zeros(w.shape, dtype=bool) for w in waves]
    low = [low_modes(w, cutoff_cm1) for w in waves]
    n_barriers = [sum(isinstance(c, HasBarrier) for c in m.contributions) for m in members]
    K_per_kJ_mol = 1000.0 / GAS_CONSTANT_J_MOL_K
    found: list[Direction] = []

    def add(item: StatedInput, what: str, shifts: Iterable[Shift]) -> None:
        found.append(Direction(what, item.value, tuple(shifts)))

    for item in inputs:
        if item.key == "scale":
            add(item, item.what, (Shift(~no) for no in still))
        elif item.key == "low":
            for k in range(max(map(len, low))):
                masks = (own[k] if k < len(own) else no for own, no in zip(low, still, strict=True))
                add(item, f"low mode {k + 1}", (Shift(mask) for mask in masks))
        elif item.key == "barrier":
            for k in range(max(n_barriers)):
                turned = (k if k < n else -1 for n in n_barriers)
                add(item, f"barrier {k + 1}", (Shift(no, torsion=t) for no, t in zip(still, turned, strict=True)))
        else:
            for i in range(1, len(members)):
                energies = (K_per_kJ_mol if j == i else 0.0 for j in range(len(members)))
                shifts = (Shift(no, energy_K=e) for no, e in zip(still, energies, strict=True))
                add(item, f"energy of {members[i].file}", shifts)
    return tuple(d for d in found if d.u > 0.0 and not all(shift.is_nothing for shift in d.shifts))


def modes_of(contribution: Contribution) -> tuple[float, ...]:
    """The wavenumbers (1/cm) that a contribution is made of, empty for one without modes."""
    return tuple(getattr(contribution, "wavenumbers_cm1", ()))


def low_modes(wavenumbers_cm1: FloatArray, cutoff_cm1: float) -> tuple[MaskArray, ...]:
    """One mask (m,) for each mode below the cut-off, lowest first; degenerate modes share one.

    >>> [mask.tolist() for mask in low_modes(np.array([900.0, 210.0, 210.2, 120.0]), 400.0)]
    [[False, False, False, True], [False, True, True, False]]
    """
    groups: list[list[int]] = []
    for i in (int(i) for i in np.argsort(wavenumbers_cm1, kind="stable") if wavenumbers_cm1[i] < cutoff_cm1):
        if groups and wavenumbers_cm1[i] - wavenumbers_cm1[groups[-1][-1]] < DEGENERATE_CM1:
            groups[-1].append(i)
        else:
            groups.append([i])
    return tuple(np.isin(np.arange(wavenumbers_cm1.size), group) for group in groups)


def shifted(members: Sequence[Conformer], direction: Direction, delta: float) -> tuple[Conformer, ...]:
    """The conformers with the input of a direction shifted by δ, exactly."""
    return tuple(
        replace(
            member,
            relative_energy_kJ_mol=member.relative_energy_kJ_mol
            + delta * shift.energy_K * GAS_CONSTANT_J_MOL_K / 1000.0,
            contributions=tuple(_moved(*each, delta) for each in _own_parts(member.contributions, shift)),
        )
        for member, shift in zip(members, direction.shifts, strict=True)
    )


def sensitivity(members: Sequence[Conformer], direction: Direction, T: FloatArray) -> LnQ:
    """Derivatives of ln q, u and w of the species by δ at δ = 0.

    For a mixture with populations p and the members' derivatives a, b, c of ln q_i, u_i and w_i:
    d ln q = Σ p a,  du = Σ p (b + A u_i),  dw = Σ p (c + A [w_i + (u_i − u)²] + 2 (u_i − u) b)  with A = a − Σ p a.
    """
    own = [conformer_ln_q(member, T) for member in members]
    whole, p = mixed(tuple(own))
    moves = [
        _member_sensitivity(member.contributions, shift, T)
        for member, shift in zip(members, direction.shifts, strict=True)
    ]
    u_each, w_each = np.stack([q.u for q in own]), np.stack([q.w for q in own])
    a, b, c = (np.stack([getattr(move, name) for move in moves]) for name in ("ln_q", "u", "w"))
    d_ln_q = (p * a).sum(axis=0)
    A, spread = a - d_ln_q, u_each - whole.u
    du = (p * (b + A * u_each)).sum(axis=0)
    dw = (p * (c + A * (w_each + spread**2) + 2.0 * spread * b)).sum(axis=0)
    return LnQ(d_ln_q, du, dw)


def _own_parts(parts: tuple[Contribution, ...], shift: Shift) -> Iterator[tuple[Contribution, MaskArray, bool]]:
    """The contributions of a conformer, each with those of its modes that are shifted and whether its barrier is."""
    start = torsion = 0
    for part in parts:
        n = len(modes_of(part))
        has_barrier = isinstance(part, HasBarrier)
        yield part, shift.modes[start : start + n], has_barrier and torsion == shift.torsion
        start += n
        torsion += has_barrier


def _moved(part: Any, own: MaskArray, turned: bool, delta: float) -> Contribution:
    """A contribution with its shifted modes and barrier multiplied by e^δ."""
    if own.any():
        part = replace(part, wavenumbers_cm1=tuple((np.asarray(part.wavenumbers_cm1) * np.exp(delta * own)).tolist()))
    if turned:
        part = part.with_barrier_factor(exp(delta))
    moved: Contribution = part
    return moved


def _member_sensitivity(parts: tuple[Contribution, ...], shift: Shift, T: FloatArray) -> LnQ:
    e = shift.energy_K / T
    change = LnQ(-e, e, -2.0 * e)
    for part, own, turned in _own_parts(parts, shift):
        if isinstance(part, HarmonicVibration) and own.any():
            each = mode_sensitivities(np.asarray(part.wavenumbers_cm1)[own], T)
            change = change + LnQ(each.ln_q.sum(axis=-1), each.u.sum(axis=-1), each.w.sum(axis=-1))
        elif own.any() or turned:
            change = change + _by_differences(partial(_moved, part, own, turned), T)
    return change


def _by_differences(moved: Callable[[float], Contribution], T: FloatArray) -> LnQ:
    """The derivative of a contribution without a closed form for it, by central differences of fourth order."""
    h = 1.0e-3
    values = {k: moved(k * h).ln_q(T) for k in (-2, -1, 1, 2)}

    def derivative(name: str) -> FloatArray:
        f = {k: getattr(q, name) for k, q in values.items()}
        return np.asarray((f[-2] - 8.0 * f[-1] + 8.0 * f[1] - f[2]) / (12.0 * h))

    return LnQ(derivative("ln_q"), derivative("u"), derivative("w"))


def _spread(linear: FloatArray, plus: FloatArray, minus: FloatArray) -> FloatArray:
    """The standard deviation (3, n) when each input is normal and each effect a polynomial of third degree in it.

    With the even part e = f''u²/2 and the cubic part c = f'''u³/6 of the change at ±u, and l the linear one, the
    variance is l² + 2e² + 6lc + 15c² (moments of the normal distribution); effects of several inputs at once are left
    out of account.
    """
    even = (plus + minus) / 2.0
    cubic = (plus - minus) / 2.0 - linear
    variance = linear**2 + 2.0 * even**2 + 6.0 * linear * cubic + 15.0 * cubic**2
    return np.asarray(np.sqrt(variance.sum(axis=0)))


def _not_linear(u: FloatArray, beyond: FloatArray, T: FloatArray) -> tuple[Finding, ...]:
    found = []
    for name, linear, spread in zip(_COLUMNS, u, beyond, strict=True):
        judged = linear > _NEGLIGIBLE * max(linear.max(), spread.max())
        judged |= spread > _NEGLIGIBLE * max(linear.max(), spread.max())
        off = np.where(judged, (spread - linear) / np.where(spread > 0.0, spread, 1.0), 0.0)
        i = int(np.abs(off).argmax())
        if abs(off[i]) > LINEAR_WITHIN:
            found.append(
                f"{name} is {abs(off[i]) * 100.0:.0f} % too {'small' if off[i] > 0.0 else 'large'} at {T[i]:g} K"
            )
    if not found:
        return ()
    words = f"the stated inputs are too uncertain for linear propagation: that of {', that of '.join(found)}"
    return (warn("uncertainty-nonlinear", words, action="Take these uncertainties as estimates of their size."),)
