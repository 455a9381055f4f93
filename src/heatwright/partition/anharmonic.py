"""Anharmonic fundamentals in the place of harmonic wavenumbers, when the output has them and the user asks for it.

The partition function stays one of independent oscillators; they have the spacing of the fundamentals, and the
zero-point energy is the program's anharmonic one.  Source of the check on it: R. S. Grev, C. L. Janssen,
H. F. Schaefer, J. Chem. Phys. 95, 5128 (1991) (from memory).
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import CM1_KJ_MOL, HARTREE_CM1, HARTREE_KJ_MOL
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.partition.vibration import zero_point_energy_kJ_mol

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule

_DIGITS_CM1: Final = 1.0
"""Zero-point energies printed in kcal/mol with three decimals are good to 0.2 cm⁻¹; this leaves room."""


def oscillators(molecule: Molecule, anharmonic: bool) -> tuple[FloatArray, float]:
    """Unscaled wavenumbers (m,) of the thermal functions (1/cm) and zero-point energy (kJ/mol).

    Raises Refused (``no-anharmonic``) when anharmonic values are asked for and not there, or not usable.
    """
    if not anharmonic or molecule.is_atom:
        return molecule.wavenumbers_cm1, zero_point_energy_kJ_mol(molecule.wavenumbers_cm1)
    fundamentals, zpe = molecule.fundamentals_cm1, molecule.anharmonic_zpe_hartree
    if fundamentals is None or zpe is None:
        what = "none" if fundamentals is None else "fundamentals, but no anharmonic zero-point energy"
        raise Refused([_absent(f"anharmonic values were asked for, and the output has {what}")])
    if not (np.isfinite(fundamentals).all() and (fundamentals > 0.0).all() and np.isfinite(zpe)):
        raise Refused([_absent(f"the lowest anharmonic fundamental is {fundamentals.min():.2f} cm⁻¹")])
    return np.sort(fundamentals), zpe * HARTREE_KJ_MOL


def _absent(found: str) -> Finding:
    action = "Leave out --anharmonic, or give the output of a second-order perturbation calculation."
    return refuse("no-anharmonic", found, action=action)


def anharmonic_findings(molecule: Molecule, anharmonic: bool) -> tuple[Finding, ...]:
    """That anharmonic values were used or left unused, and when the zero-point energy is not what it is called."""
    if molecule.fundamentals_cm1 is None or molecule.is_atom:
        return ()
    if not anharmonic:
        words = "the output holds anharmonic fundamentals, and the harmonic wavenumbers were used"
        return (note("anharmonic-unused", words, action="Say --anharmonic to use them."),)
    n = molecule.fundamentals_cm1.size
    words = f"{n} anharmonic fundamental{'s' if n > 1 else ''} and the anharmonic zero-point energy were used"
    return (note("anharmonic", f"{words} as printed, without a scale factor"), *_half_sum(molecule))


def _half_sum(molecule: Molecule) -> tuple[Finding, ...]:
    """Half the sum of the fundamentals is no zero-point energy: it counts the anharmonicity of the first level too."""
    if molecule.fundamentals_cm1 is None or molecule.anharmonic_zpe_hartree is None:
        return ()
    half, harmonic = (float(w.sum()) / 2.0 for w in (molecule.fundamentals_cm1, molecule.wavenumbers_cm1))
    missing = (harmonic - half) / 2.0
    if abs(molecule.anharmonic_zpe_hartree * HARTREE_CM1 - half) > _DIGITS_CM1 or abs(missing) < 2.0 * _DIGITS_CM1:
        return ()
    found = (
        "the printed anharmonic zero-point energy is half the sum of the fundamentals; the mean of that and the "
        f"harmonic one is nearer to the truth and {missing * CM1_KJ_MOL:.2f} kJ/mol higher"
    )
    return (warn("anharmonic", found, action="An enthalpy of formation by atomization is too low by about as much."),)
