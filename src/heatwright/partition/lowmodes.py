"""Low modes, where the harmonic oscillator overstates the entropy: two treatments that keep Cp, H and S consistent.

Both act on ln q, so that all three functions follow; the zero-point energy keeps the wavenumbers as they are.

- raised floor: R. F. Ribeiro, A. V. Marenich, C. J. Cramer, D. G. Truhlar, J. Phys. Chem. B 115, 14556 (2011)
  (from memory), here in every function;
- interpolation between harmonic oscillator and free rotor with the weights of S. Grimme, Chem. Eur. J. 18, 9955 (2012)
  (from memory).  The entropy is the published one; because the weights do not depend on temperature, ln q can be
  interpolated, and heat capacity and enthalpy follow (they are left harmonic in the publication).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import isfinite
from typing import TYPE_CHECKING, ClassVar, Literal, get_args

import numpy as np

from heatwright.constants import (
    BOLTZMANN_J_K,
    GAS_CONSTANT_J_MOL_K,
    LIGHT_SPEED_M_S,
    PLANCK_J_S,
    STANDARD_TEMPERATURE_K,
)
from heatwright.errors import UsageError
from heatwright.findings import Finding, note
from heatwright.partition.contribution import Contribution, LnQ
from heatwright.partition.vibration import HarmonicVibration, check_wavenumbers, harmonic_sums

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray

LowModesKind = Literal["harmonic", "floor", "interpolate"]


@dataclass(frozen=True, slots=True)
class LowModes:
    """How low modes are treated.

    cutoff_cm1 : the floor, or where oscillator and rotor weigh the same, 1/cm.
    averaging_moment_kg_m2 : B_av of the interpolation, which bounds the rotor's moment of inertia, kg m².
    Raises UsageError for an unknown kind and for numbers that are not positive.
    """

    kind: LowModesKind = "harmonic"
    cutoff_cm1: float = 100.0
    averaging_moment_kg_m2: float = 1.0e-44

    def __post_init__(self) -> None:
        if self.kind not in get_args(LowModesKind):
            raise UsageError(f"low modes are treated as {', '.join(get_args(LowModesKind))}, not {self.kind!r}")
        for words, value, unit in (
            ("the cut-off of low modes", self.cutoff_cm1, "1/cm"),
            ("the averaging moment", self.averaging_moment_kg_m2, "kg m²"),
        ):
            if not (isfinite(value) and value > 0.0):
                raise UsageError(f"{words} must be a positive number of {unit}, not {value}")

    @property
    def text(self) -> str:
        """The treatment in words, empty for harmonic oscillators."""
        if self.kind == "floor":
            return f"wavenumbers below {self.cutoff_cm1:g} 1/cm raised to it (Ribeiro et al. 2011)"
        if self.kind == "interpolate":
            return (
                f"ln q interpolated between harmonic oscillator and free rotor around {self.cutoff_cm1:g} 1/cm with "
                f"the averaging moment {self.averaging_moment_kg_m2:g} kg m² (entropy of Grimme 2012)"
            )
        return ""

    def contribution(self, wavenumbers_cm1: Sequence[float]) -> Contribution:
        """The vibration of modes with these (scaled) wavenumbers, 1/cm."""
        modes = tuple(float(nu) for nu in wavenumbers_cm1)
        if self.kind == "interpolate":
            return InterpolatedVibration(modes, self.cutoff_cm1, self.averaging_moment_kg_m2)
        if self.kind == "floor":
            check_wavenumbers(modes)
            modes = tuple(max(nu, self.cutoff_cm1) for nu in modes)
        return HarmonicVibration(modes)


@dataclass(frozen=True, slots=True)
class InterpolatedVibration:
    r"""Every mode between a harmonic oscillator and a free rotor of the same wavenumber.

    .. math:: \ln q = \sum_i w_i \ln q^{HO}_i + (1 - w_i) \ln q^{FR}_i, \quad w = \frac{1}{1 + (\nu_0/\nu)^4}, \quad
              q^{FR} = \sqrt{8\pi^3 \mu' k T/h^2}, \quad \frac1{\mu'} = \frac{8\pi^2\nu}{h} + \frac1{B_{av}}

    wavenumbers_cm1 : (m,) scaled, all positive.   cutoff_cm1 : ν₀.   averaging_moment_kg_m2 : B_av.

    >>> soft = InterpolatedVibration((20.0,)).ln_q(np.array([298.15]))
    >>> round(float(soft.cp_R[0]), 3)  # nearly the free rotor's 1/2
    0.501
    """

    name: ClassVar[str] = "vibration"
    wavenumbers_cm1: tuple[float, ...]
    cutoff_cm1: float = 100.0
    averaging_moment_kg_m2: float = 1.0e-44

    def __post_init__(self) -> None:
        check_wavenumbers(self.wavenumbers_cm1)

    def ln_q(self, T: FloatArray) -> LnQ:
        """Sums over the modes of ln q, u and w."""
        nu = np.asarray(self.wavenumbers_cm1, dtype=float)
        weight = oscillator_weight(nu, self.cutoff_cm1)
        inverse_moment = 8.0 * np.pi**2 * LIGHT_SPEED_M_S * 100.0 * nu / PLANCK_J_S + 1.0 / self.averaging_moment_kg_m2
        at_1K = 0.5 * np.log(8.0 * np.pi**3 * BOLTZMANN_J_K / PLANCK_J_S**2 / inverse_moment)
        half = 0.5 * float((1.0 - weight).sum())
        rotors = LnQ(float((1.0 - weight) @ at_1K) + half * np.log(T), np.full(T.shape, half), np.full(T.shape, -half))
        return harmonic_sums(nu, T, weight) + rotors


def oscillator_weight(wavenumbers_cm1: FloatArray, cutoff_cm1: float) -> FloatArray:
    """Share of the harmonic oscillator, 1/(1 + (ν₀/ν)⁴).

    >>> oscillator_weight(np.array([50.0, 100.0, 200.0]), 100.0).round(3).tolist()
    [0.059, 0.5, 0.941]
    """
    return np.asarray(1.0 / (1.0 + (cutoff_cm1 / wavenumbers_cm1) ** 4))


@dataclass(frozen=True, slots=True)
class ModeShift:
    """What the treatment changes in one mode against the harmonic oscillator.

    number : counts from 1 in ascending order.   wavenumber_cm1 : scaled.
    dh_kJ_mol, ds_J_mol_K : change of H(298.15 K) − H(0) and of S(298.15 K).
    """

    number: int
    wavenumber_cm1: float
    dh_kJ_mol: float
    ds_J_mol_K: float

    @property
    def text(self) -> str:
        """The shift in words."""
        return (
            f"mode {self.number} ({self.wavenumber_cm1:.1f} 1/cm) {self.dh_kJ_mol:+.3f} kJ/mol, "
            f"{self.ds_J_mol_K:+.3f} J/mol/K"
        )


def mode_shifts(wavenumbers_cm1: Sequence[float], low_modes: LowModes) -> tuple[ModeShift, ...]:
    """The shift of each mode at 298.15 K; empty for harmonic oscillators."""
    if low_modes.kind == "harmonic":
        return ()
    T = np.array([STANDARD_TEMPERATURE_K])
    shifts = []
    for number, nu in enumerate(wavenumbers_cm1, start=1):
        treated, harmonic = low_modes.contribution((nu,)).ln_q(T), HarmonicVibration((float(nu),)).ln_q(T)
        dh_R = float((treated.h_RT - harmonic.h_RT)[0]) * STANDARD_TEMPERATURE_K
        ds_R = float((treated.s_R - harmonic.s_R)[0])
        R = GAS_CONSTANT_J_MOL_K
        shifts.append(ModeShift(number, float(nu), dh_R * R / 1000.0, ds_R * R))
    return tuple(shifts)


_WORTH_SAYING_J_MOL_K = 0.05


def low_mode_findings(shifts: Sequence[ModeShift], low_modes: LowModes) -> tuple[Finding, ...]:
    """The treatment, what it moves in all, and mode by mode where it moves S by more than 0.05 J/mol/K or H as much."""
    if low_modes.kind == "harmonic" or not shifts:
        return ()
    dh, ds = sum(s.dh_kJ_mol for s in shifts), sum(s.ds_J_mol_K for s in shifts)
    told = [
        s
        for s in shifts
        if max(abs(s.ds_J_mol_K), abs(s.dh_kJ_mol) * 1000.0 / STANDARD_TEMPERATURE_K) > _WORTH_SAYING_J_MOL_K
    ]
    modes = "; ".join(s.text for s in told) if told else "no mode moves by more than 0.05 J/mol/K"
    words = (
        f"{low_modes.text}: against harmonic oscillators H(298.15 K) - H(0) moves by {dh:+.3f} kJ/mol and S(298.15 K) "
        f"by {ds:+.3f} J/mol/K ({modes}); the zero-point energy is left as it is"
    )
    return (note("low-modes", words),)
