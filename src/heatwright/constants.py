"""Physical constants and unit conversions: one dated set, written out, so that results never move with a library.

Source: E. Tiesinga, P. J. Mohr, D. B. Newell, B. N. Taylor, "CODATA recommended values of the fundamental physical
constants: 2018", Rev. Mod. Phys. 93, 025010 (2021).  Values marked exact are exact in the SI of 2019.
This is the one place where a unit changes: every conversion factor of the project is defined here.
"""

from __future__ import annotations

from typing import Final

CODATA_YEAR: Final = 2018

PLANCK_J_S: Final = 6.62607015e-34
"""Planck constant h, J s (exact)."""
BOLTZMANN_J_K: Final = 1.380649e-23
"""Boltzmann constant k, J/K (exact)."""
AVOGADRO_MOL: Final = 6.02214076e23
"""Avogadro constant, 1/mol (exact)."""
LIGHT_SPEED_M_S: Final = 299792458.0
"""Speed of light in vacuum c, m/s (exact)."""
ATOMIC_MASS_KG: Final = 1.66053906660e-27
"""Unified atomic mass unit u, kg."""
HARTREE_J: Final = 4.3597447222071e-18
"""Hartree energy, J."""
BOHR_M: Final = 5.29177210903e-11
"""Bohr radius, m."""
ELEMENTARY_CHARGE_C: Final = 1.602176634e-19
"""Elementary charge, C (exact); one electronvolt in J."""

GAS_CONSTANT_J_MOL_K: Final = BOLTZMANN_J_K * AVOGADRO_MOL
"""Molar gas constant R = k N_A, J/mol/K (exact, 8.31446261815324)."""
SECOND_RADIATION_CM_K: Final = PLANCK_J_S * LIGHT_SPEED_M_S * 100.0 / BOLTZMANN_J_K
"""hc/k in cm K: multiplies a wavenumber in 1/cm to give its temperature in K."""

STANDARD_TEMPERATURE_K: Final = 298.15
"""Reference temperature of enthalpies of formation, K."""
BAR_PA: Final = 1.0e5
"""One bar, Pa."""
ATMOSPHERE_PA: Final = 101325.0
"""One standard atmosphere, Pa."""

BOHR_ANGSTROM: Final = BOHR_M * 1.0e10
"""One bohr in Å."""
HARTREE_KJ_MOL: Final = HARTREE_J * AVOGADRO_MOL / 1000.0
"""One hartree in kJ/mol."""
HARTREE_CM1: Final = HARTREE_J / (PLANCK_J_S * LIGHT_SPEED_M_S * 100.0)
"""One hartree in 1/cm."""
CM1_KJ_MOL: Final = PLANCK_J_S * LIGHT_SPEED_M_S * 100.0 * AVOGADRO_MOL / 1000.0
"""One 1/cm in kJ/mol."""
CALORIE_J: Final = 4.184
"""Thermochemical calorie, J (exact by definition)."""
EV_KJ_MOL: Final = ELEMENTARY_CHARGE_C * AVOGADRO_MOL / 1000.0
"""One electronvolt in kJ/mol."""

INERTIA_CM1_U_A2: Final = (
    PLANCK_J_S / (8.0 * 3.141592653589793**2 * LIGHT_SPEED_M_S * 100.0) / (ATOMIC_MASS_KG * 1.0e-20)
)
"""h/(8 pi^2 c) in u Å^2 cm^-1: divided by a moment of inertia in u Å^2 it gives the rotational constant in 1/cm."""

CCLIB_EV_PER_HARTREE: Final = 27.21138505
"""The factor cclib multiplies printed hartree energies by (its own, older electronvolt); dividing by the same number
gives the printed hartree back without loss.  Not a physical constant of this project."""
