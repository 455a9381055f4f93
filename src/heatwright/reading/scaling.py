"""A scale factor that the program itself applied is undone, so that none is ever applied twice."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from heatwright.constants import HARTREE_CM1
from heatwright.findings import Finding, refuse, warn

if TYPE_CHECKING:
    from heatwright.molecule import Molecule

_APPLIED_TO_LIST: Final = frozenset({"ORCA"})
"""Programs that say of the printed wavenumbers themselves that the factor is already in them."""
_DIGITS: Final = 1.0e-3
"""Largest relative difference of zero-point energies that digits and old constants explain."""


def unscaled(m: Molecule, factor: float | None) -> tuple[Molecule, tuple[Finding, ...]]:
    """The molecule with unscaled wavenumbers, and what is said when the program stated a factor other than 1.

    All but ORCA scale in the thermochemistry only, which the printed zero-point energy has to confirm.  The printed
    values go: they are of scaled modes and can check nothing.
    """
    if factor is None or not m.wavenumbers_cm1.size or abs(factor - 1.0) < 1e-6:
        return m, ()
    if not 0.5 < factor < 1.5:
        words = f"the program states a frequency scale factor of {factor:g}"
        return m, (refuse("program-scale", words, expected="a factor near 1", action="Look at the output."),)
    where = _where(m, factor)
    if where == "list":
        words = f"the program multiplied its wavenumbers by {factor:g}; they were divided by it again"
        return m.but(wavenumbers_cm1=m.wavenumbers_cm1 / factor, printed=()), (_said(words),)
    if where == "thermochemistry":
        words = f"the program's thermochemistry is of wavenumbers multiplied by {factor:g}; its list has them unscaled"
        return m.but(printed=()), (_said(words),)
    words = f"the program states a frequency scale factor of {factor:g}, which its zero-point energy does not show"
    action = "Run the job again without a scale factor and give it here with --frequency-scale."
    return m, (refuse("program-scale", words, action=action),)


def _said(words: str) -> Finding:
    return warn("program-scale", words, action="Scale factors are chosen here: --frequency-scale and --zpe-scale.")


def _where(m: Molecule, factor: float) -> str:
    """``list``, ``thermochemistry``, or nothing when the printed zero-point energy does not confirm it."""
    printed = next((item.zpe_hartree for item in m.printed if item.zpe_hartree), None)
    real = m.wavenumbers_cm1[m.wavenumbers_cm1 > 0.0]
    own = float(real.sum()) / 2.0 / HARTREE_CM1
    if m.source.program in _APPLIED_TO_LIST:
        return "list"
    if printed is None or own <= 0.0:
        return ""
    return "thermochemistry" if abs(factor * own / printed - 1.0) < _DIGITS else ""
