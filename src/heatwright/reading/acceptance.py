"""What the user takes upon himself: refusals turned into warnings, small imaginary modes taken as real ones."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import replace
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.errors import UsageError
from heatwright.findings import Finding, refuse, warn

if TYPE_CHECKING:
    from heatwright.molecule import Molecule

ACCEPTABLE: Final = {
    "solvent": "solvent",
    "field": "external-field",
    "constraints": "constraints",
    "excited-state": "excited-state",
    "gradient": "not-stationary",
    "energy": "energy-implausible",
    "bonds": "reaction-unbalanced",
}
"""The words of ``--accept`` and the code of the finding that each of them accepts."""
LARGEST_IMAGINARY_CM1: Final = 50.0
"""No imaginary mode above this can be noise of a Hessian (common practice, no source)."""
STEEP_HARTREE_BOHR: Final = 1.0e-2
"""A gradient above this is no stationary point by any criterion in use; an entry needs it accepted by name."""


def check_accepted(accept: Collection[str], imaginary_cm1: float) -> None:
    """Raises UsageError for a word that is none of :data:`ACCEPTABLE` or a limit outside 0 to 50 1/cm."""
    for word in accept:
        if word not in ACCEPTABLE:
            raise UsageError(f"{word!r} cannot be accepted; expected one of {', '.join(ACCEPTABLE)}")
    if not 0.0 <= imaginary_cm1 <= LARGEST_IMAGINARY_CM1:
        raise UsageError(
            f"imaginary modes up to {imaginary_cm1:g} cm⁻¹ cannot be accepted; expected at most "
            f"{LARGEST_IMAGINARY_CM1:g}, above which a mode is no noise of the Hessian"
        )


def with_accepted(molecule: Molecule, accept: Collection[str], imaginary_cm1: float) -> Molecule:
    """The molecule with what was accepted: such findings are warnings that say so, whatever their severity was."""
    codes = {ACCEPTABLE[word]: word for word in accept}
    findings = tuple(_accepted(f, codes[f.code]) if f.code in codes else f for f in molecule.findings)
    return _without_small_imaginary(molecule.but(findings=findings), imaginary_cm1)


def _accepted(finding: Finding, word: str) -> Finding:
    return replace(finding, severity="warn", action=f"The user accepted it (--accept {word}).")


def _without_small_imaginary(m: Molecule, limit_cm1: float) -> Molecule:
    """Small imaginary modes as real ones of the same magnitude, when all of them are small; else the same molecule."""
    nu = m.wavenumbers_cm1
    small = (nu < 0.0) & (nu >= -limit_cm1)
    if not small.any() or np.count_nonzero(small) != m.n_imaginary:
        return m
    order = np.argsort(np.abs(nu), kind="stable")
    shown = ", ".join(f"{-w:.2f}i" for w in nu[small])
    words = f"imaginary modes up to {limit_cm1:g} cm⁻¹ ({shown}) were taken as real wavenumbers of the same magnitude"
    said = warn("user-value", words, action="The user said so (--accept-imaginary).")
    return m.but(
        wavenumbers_cm1=np.abs(nu)[order],
        normal_modes=None if m.normal_modes is None else m.normal_modes[order],
        findings=(*(f for f in m.findings if f.code != "imaginary-modes"), said),
    )


def unfit_for_entry(molecule: Molecule, accept: Collection[str]) -> tuple[Finding, ...]:
    """The refusal of an entry for a geometry on a slope; empty when it is none or ``gradient`` was accepted."""
    g = molecule.max_gradient_hartree_bohr
    if g is None or "gradient" in accept or molecule.is_atom or not g > STEEP_HARTREE_BOHR:
        return ()
    words = f"the largest gradient component at the geometry of the frequencies is {g:.2e} hartree/bohr"
    action = "Optimise at the level of the frequencies first, or say --accept gradient."
    return (refuse("not-stationary", words, expected=f"at most {STEEP_HARTREE_BOHR:g} for an entry", action=action),)
