"""Scale factors of a model: the published choice for its level of theory, and what has to be said about scaling."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.partition.vibration import HarmonicVibration
from heatwright.scales import ScaleChoice, choose_published

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule


def published_choice(molecule: Molecule) -> ScaleChoice | None:
    """The published factors for a molecule's level of theory; None for an atom, which has nothing to scale.

    Raises Refused (``no-published-scale``).
    """
    if molecule.is_atom:
        return None
    if molecule.level is None:
        words = "the level of theory is not known, so no factor can be looked up"
        action = "State factors by --frequency-scale and --zpe-scale."
        raise Refused([refuse("no-published-scale", words, action=action)])
    return choose_published(molecule.level)


def scale_findings(
    molecule: Molecule, frequency_scale: float | None, zpe_scale: float | None, choice: ScaleChoice | None
) -> tuple[Finding, ...]:
    """What was scaled and by whose factor, or that nothing was."""
    if molecule.is_atom:
        return ()
    if choice is not None:
        doubt = (warn("published-scale", choice.doubt),) if choice.doubt else ()
        return (note("published-scale", _choice_text(molecule.wavenumbers_cm1, choice)), *doubt)
    if frequency_scale is not None and zpe_scale is not None:
        return ()
    if frequency_scale is None and zpe_scale is None:
        what = "wavenumbers and zero-point energy were used as computed"
    elif frequency_scale is None:
        what = "the wavenumbers of the thermal functions were used as computed"
    else:
        what = "the zero-point energy was used as computed"
    return (note("unscaled", f"{what}, without a scale factor"),)


def _choice_text(wavenumbers_cm1: FloatArray, choice: ScaleChoice) -> str:
    text = (
        f"scale factors {choice.frequency_factor:g} (thermal functions, fitted to fundamentals) and "
        f"{choice.zpe_factor:g} (zero-point energy) from {choice.source}"
    )
    used = choice.frequency_factor
    others = [("zero-point", choice.zpe_factor), ("entropy", choice.thermal.entropy)]
    changes = [
        f"{entropy_change_J_mol_K(wavenumbers_cm1, used, other):+.2f} with the {what} factor {other:g}"
        for what, other in others
        if other is not None
    ]
    return f"{text}; S(298.15 K) in J/mol/K would change by {' or '.join(changes)}"


def entropy_change_J_mol_K(wavenumbers_cm1: FloatArray, used: float, other: float) -> float:
    """S(298.15 K) of harmonic oscillators scaled by *other* less that of the same ones scaled by *used*, J/mol/K.

    >>> round(entropy_change_J_mol_K(np.array([640.0, 640.0, 1372.0, 2436.0]), 0.9614, 0.9806), 2)  # bends of CO2
    -0.17
    """
    T = np.array([STANDARD_TEMPERATURE_K])
    s = [float(HarmonicVibration(tuple((wavenumbers_cm1 * f).tolist())).ln_q(T).s_R[0]) for f in (used, other)]
    return (s[1] - s[0]) * GAS_CONSTANT_J_MOL_K
