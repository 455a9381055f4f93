"""Putting a molecule together from what a dialect read and what cclib read, in the units and order of Molecule."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from heatwright.elements import element
from heatwright.findings import Finding, note, refuse
from heatwright.molecule import FloatArray, IntArray, Kind, Level, MassKind, Molecule, Source
from heatwright.reading.fundamentals import Fundamentals
from heatwright.structure.modes import unit_displacements

if TYPE_CHECKING:
    from heatwright.reading.dialects.base import Facts, Identity
    from heatwright.reading.parsing import Parsed

ZERO_CM1 = 0.005
"""Wavenumbers below this are the translations and rotations that a program projected out and prints as 0.00."""


@dataclass(frozen=True, slots=True)
class Vibrations:
    """Wavenumbers (m,), modes (m, n, 3) or None, and how many values were printed before the zeros were taken out."""

    wavenumbers_cm1: FloatArray = field(default_factory=lambda: np.empty(0))
    modes: FloatArray | None = None
    n_printed: int = 0


def assemble(
    source: Source, identity: Identity, parsed: Parsed, facts: Facts, user: tuple[int | None, int | None]
) -> tuple[Molecule | None, tuple[Finding, ...]]:
    """The molecule, and what had to be said on the way; None when there are no atoms with coordinates."""
    atoms = _atoms(identity, parsed, facts)
    coordinates = _coordinates(parsed, facts, atoms)
    if atoms is None or coordinates is None or len(coordinates) != len(atoms):
        return None, ()
    findings: list[Finding] = [*facts.findings]
    vibrations = _vibrations(parsed, facts, len(atoms))
    masses, mass_kind, printed = _masses(parsed, facts, atoms, findings)
    real = _real(atoms, findings)
    if not real.any():
        return None, tuple(findings)
    if not real.all():  # the atoms without a nucleus go, so that nothing later trips over them
        atoms, coordinates, masses = atoms[real], coordinates[real], masses[real]
        kept = None if vibrations.modes is None else vibrations.modes[:, real]
        vibrations = replace(vibrations, modes=kept)
    fundamentals, anharmonic_zpe = (facts.fundamentals or Fundamentals()).of(vibrations.wavenumbers_cm1)
    charge = _said(user[0], facts.charge, identity.charge, parsed.integer("charge"), "charge", findings)
    multiplicity = _said(
        user[1], facts.multiplicity, identity.multiplicity, parsed.integer("mult"), "multiplicity", findings
    )
    energies = {name: value for name, value in facts.energies.items() if np.isfinite(value)}
    for name in facts.energies.keys() - energies.keys():
        findings.append(
            refuse("not-a-number", f"the {name} energy is not a finite number", action="Look at the output.")
        )
    return (
        Molecule(
            source=source,
            kind=_kind(parsed, facts, identity, len(atoms), vibrations, bool(energies)),
            atomic_numbers=atoms,
            masses_u=masses,
            mass_kind=mass_kind,
            masses_printed=printed,
            coordinates_A=coordinates,
            wavenumbers_cm1=vibrations.wavenumbers_cm1,
            normal_modes=vibrations.modes,
            fundamentals_cm1=fundamentals,
            anharmonic_zpe_hartree=anharmonic_zpe,
            energies_hartree=energies,
            energy_kind=facts.energy_kind if facts.energy_kind in energies else "",
            charge=charge,
            multiplicity=multiplicity,
            level=_level(facts.level, source, atoms),
            max_gradient_hartree_bohr=facts.max_gradient_hartree_bohr,
            printed=facts.printed,
        ),
        tuple(findings),
    )


def _level(level: Level | None, source: Source, atoms: IntArray) -> Level | None:
    if level is None:
        return None
    return replace(level, atoms=tuple(int(z) for z in atoms), program=level.program or source.program)


def _atoms(identity: Identity, parsed: Parsed, facts: Facts) -> IntArray | None:
    for candidate in (facts.atomic_numbers, identity.atoms or None, parsed.array("atomnos")):
        if candidate is not None and np.size(candidate):
            atoms = np.asarray(candidate, dtype=np.int64)
            return atoms if atoms.ndim == 1 else None
    return None


def _coordinates(parsed: Parsed, facts: Facts, atoms: IntArray | None) -> FloatArray | None:
    """The dialect's geometry, else the last one cclib read that fits the atoms."""
    if facts.coordinates_A is not None:
        return np.asarray(facts.coordinates_A, dtype=float)
    read = parsed.array("atomcoords")
    if read is None or read.ndim != 3 or not len(read) or atoms is None or read.shape[1:] != (len(atoms), 3):
        return None
    return np.array(read[-1], dtype=float)


def _real(atoms: IntArray, findings: list[Finding]) -> NDArray[np.bool_]:
    """Which atoms carry a nucleus; the others are ghosts or dummies and a reason to refuse."""
    real = (atoms > 0) & (atoms <= 103)
    ghosts = np.flatnonzero(~real) + 1
    if ghosts.size:
        words = f"{ghosts.size} of {atoms.size} atoms carry no nucleus (ghost or dummy atoms)"
        action = "Run the molecule without them: they have no mass and no place in a partition function."
        findings.append(refuse("ghost-atoms", words, where=f"atom {ghosts[0]}", action=action))
    return real


def _vibrations(parsed: Parsed, facts: Facts, n_atoms: int) -> Vibrations:
    """Zeros removed by value, ascending, modes in the same order and of norm 1."""
    if facts.wavenumbers_cm1 is not None:
        values, modes = np.asarray(facts.wavenumbers_cm1, dtype=float), facts.normal_modes
    else:
        read = parsed.array("vibfreqs")
        values, modes = (np.empty(0) if read is None else read.ravel()), parsed.array("vibdisps")
    if not values.size:
        return Vibrations()
    if modes is not None and modes.shape != (values.size, n_atoms, 3):
        modes = None
    keep = np.flatnonzero(~(np.abs(values) < ZERO_CM1))  # NaN stays, to be refused by name
    order = keep[np.argsort(values[keep], kind="stable")]
    kept = None if modes is None else unit_displacements(modes[order])
    return Vibrations(values[order].copy(), kept, int(values.size))


def _masses(
    parsed: Parsed, facts: Facts, atoms: IntArray, findings: list[Finding]
) -> tuple[FloatArray, MassKind, bool]:
    read = facts.masses_u
    if read is None:
        given = parsed.array("atommasses")  # linked jobs repeat them
        read = given[-len(atoms) :] if given is not None and given.ndim == 1 and len(given) >= len(atoms) else None
    if facts.masses_u is not None and len(facts.masses_u) != len(atoms):
        words = f"the output prints {len(facts.masses_u)} masses for {len(atoms)} atoms"
        findings.append(refuse("atoms-disagree", words, expected="one for each"))
    if read is not None and len(read) == len(atoms):
        if facts.mass_kind == "average":
            words = "the program worked with average atomic weights; rotation, translation and wavenumbers contain them"
            findings.append(
                note("average-masses", words, action="Ask the program for isotopic masses to compare with tables.")
            )
        return np.array(read, dtype=float), facts.mass_kind, True
    findings.append(
        note("masses-from-table", "the output prints no atomic masses; the most abundant isotopes were taken")
    )
    return np.array([element(int(z)).common_mass_u if 0 < z < 104 else 0.0 for z in atoms]), "isotopic", False


def _said(
    user: int | None, dialect: int | None, identity: int | None, cclib: int | None, name: str, findings: list[Finding]
) -> int | None:
    """The user's value before the output's; a note when it was given, a refusal when nobody says it."""
    read = next((value for value in (dialect, identity, cclib) if value is not None), None)
    if user is not None:
        said = "does not state it" if read is None else "says the same" if read == user else f"says {read}"
        findings.append(note("user-value", f"{name} {user} was given by the user; the output {said}"))
        return user
    if read is None:
        code = "no-charge" if name == "charge" else "no-multiplicity"
        findings.append(refuse(code, f"the output does not state the {name}", action=f"Give it with --{name}."))
    return read


def _kind(
    parsed: Parsed, facts: Facts, identity: Identity, n_atoms: int, vibrations: Vibrations, has_energy: bool
) -> Kind:
    if n_atoms == 1:
        return "atom"
    if vibrations.wavenumbers_cm1.size:
        return "frequency"
    if facts.kind is not None:
        return facts.kind
    if parsed.values.get("scannames"):
        return "relaxed scan" if _optimised(parsed) else "rigid scan"
    if identity.has_modes:
        return "frequency"
    if identity.optimises or _optimised(parsed):
        return "optimisation"
    return "energy" if has_energy else "unknown"


def _optimised(parsed: Parsed) -> bool:
    status: Any = parsed.values.get("optstatus")
    return status is not None and np.size(status) > 0
