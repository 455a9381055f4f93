"""What each rotatable bond would contribute as an oscillator and as a rotor, to see what a choice costs."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from heatwright.findings import Finding, Refused
from heatwright.partition.internal_rotation import TreatedTorsion, internal_rotation
from heatwright.partition.pitzer_gwinn import PitzerGwinnRotor
from heatwright.partition.potential import cosine_potential
from heatwright.partition.vibration import HarmonicVibration
from heatwright.structure.isotopes import force_constants
from heatwright.structure.modes import SQUARE_CM2
from heatwright.structure.torsions import (
    RotatableBond,
    reduced_moments,
    rotatable_bonds,
    rotational_constant_cm1,
    torsion_vectors,
)

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule
    from heatwright.partition.contribution import Contribution
    from heatwright.reading.torsion_scans import Torsion


@dataclass(frozen=True, eq=False, kw_only=True)
class SurveyedRotor:
    """A bond that can turn.

    moment_u_A2, F_cm1 : reduced moment and rotational constant.
    wavenumber_cm1 : √(vᵀKv) of the torsional displacement v, scaled; None without force constants.
    barrier_cm1 : of the given potential, or of the cosine with the top's fold and that wavenumber (``estimated``);
    None where the fold is not known either.   treated : the torsion with its potential, or None.
    treatments : contributions by name; None where there is nothing to compute it from.
    """

    bond: RotatableBond
    moment_u_A2: float
    F_cm1: float
    wavenumber_cm1: float | None
    barrier_cm1: float | None
    treated: TreatedTorsion | None
    treatments: dict[str, Contribution | None]

    @property
    def estimated(self) -> bool:
        """Whether the barrier is only an estimate from the curvature at the minimum."""
        return self.treated is None and self.barrier_cm1 is not None


def survey_rotors(
    molecule: Molecule, wishes: Sequence[Torsion] = (), frequency_scale: float = 1.0
) -> tuple[list[SurveyedRotor], tuple[Finding, ...]]:
    """Every rotatable bond with its treatments, and what was found about the torsions that are wished for.

    Raises Refused for a potential that cannot be used.
    """
    done = internal_rotation(molecule, wishes) if wishes else None
    treated = {t.bond.bond: t for t in (done.torsions if done else ())}
    masses, x = molecule.masses_u, molecule.coordinates_A
    found = rotatable_bonds(molecule.atomic_numbers, masses, x) if molecule.has_geometry else []
    ours = [treated[b.bond].bond if b.bond in treated else b for b in found]
    ours += [t.bond for axis, t in treated.items() if axis not in {b.bond for b in found}]
    if not ours:
        return [], ()
    moments = reduced_moments(masses, x, ours).diagonal()
    waves = _wavenumbers(molecule, torsion_vectors(masses, x, ours), frequency_scale)
    rows = [_surveyed(b, float(m), w, treated.get(b.bond)) for b, m, w in zip(ours, moments, waves, strict=True)]
    return rows, done.findings if done else ()


def _wavenumbers(molecule: Molecule, vectors: FloatArray, scale: float) -> list[float | None]:
    try:
        hessian, _, _ = force_constants(molecule, "a torsional wavenumber")
    except Refused:
        return [None] * vectors.shape[1]
    weights = np.repeat(1.0 / np.sqrt(molecule.masses_u), 3)
    v = vectors / np.linalg.norm(vectors, axis=0) * weights[:, None]
    squares = (v * (hessian @ v)).sum(axis=0) * SQUARE_CM2
    return [float(np.sqrt(s)) * scale if s > 0.0 else None for s in squares]


def _surveyed(
    bond: RotatableBond, moment: float, wavenumber: float | None, treated: TreatedTorsion | None
) -> SurveyedRotor:
    F, n = rotational_constant_cm1(moment), bond.symmetry
    barrier, check = (treated.potential.barrier_cm1, treated.check) if treated else (None, None)
    if treated is None and wavenumber is not None and n > 1:
        barrier = wavenumber**2 / (F * n**2)
        check = PitzerGwinnRotor(cosine_potential(n, barrier), F, n)
    return SurveyedRotor(
        bond=bond,
        moment_u_A2=moment,
        F_cm1=F,
        wavenumber_cm1=wavenumber,
        barrier_cm1=barrier,
        treated=treated,
        treatments={
            "harmonic": None if wavenumber is None else HarmonicVibration((wavenumber,)),
            "Pitzer-Gwinn": check,
            "hindered": treated.rotor if treated else None,
        },
    )
