"""Is a molecule usable, and is it a minimum?  Every check gives findings; none changes the molecule."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from typing import TYPE_CHECKING, Final

import numpy as np

from heatwright.constants import HARTREE_CM1
from heatwright.elements import element, symbol
from heatwright.findings import Finding, refuse, warn
from heatwright.resources import data_rows
from heatwright.structure.inertia import LINEAR_TOLERANCE_A

if TYPE_CHECKING:
    from heatwright.molecule import FloatArray, Molecule, PrintedThermo

NEARLY_LINEAR_A: Final = 0.06
"""A molecule whose atoms are all nearer than this to one line, yet not on it, is said to be nearly linear, Å: a bond
angle of about 170° between bonds of 1.1 Å (common practice, no source)."""
STATIONARY_HARTREE_BOHR: Final = 4.5e-4
"""Largest gradient component of a stationary point: the usual criterion of optimisers (common practice, no source)."""
HIGH_CM1: Final = 5000.0
"""No fundamental is higher; the highest is that of H2, 4161 1/cm (Huber and Herzberg 1979, from memory)."""
TINY_CM1: Final = 10.0
"""Wavenumbers below this are hardly a vibration: the harmonic entropy runs away (common practice, no source)."""
_ZPE_TOLERANCE: Final = 1.5e-6
"""Largest difference between own and printed zero-point energy that digits explain, hartree."""
_OWN_SUMS: Final = frozenset({"ADF"})
"""Programs whose printed sum is of another list of modes than the one read (ADF leaves low ones out)."""
_NWCHEM_LOW: Final = 6.0e-4
"""NWChem's older constants make its printed values 0.048 % low (found by comparing 43 outputs)."""


def soundness(molecule: Molecule) -> tuple[Finding, ...]:
    """Everything that speaks against using the molecule, the grave findings first."""
    found = [finding for check in _CHECKS for finding in check(molecule)]
    return tuple(sorted(found, key=lambda f: ("refuse", "warn", "note").index(f.severity)))


def no_thermochemistry(molecule: Molecule) -> tuple[Finding, ...]:
    """The refusal of a molecule that has no modes and is no atom, for whoever needs a partition function."""
    if molecule.has_thermochemistry:
        return ()
    words = f"this is {_a_kind(molecule)} without vibrational modes, so there is no thermochemistry to compute"
    return (
        refuse("no-frequencies", words, expected="a frequency job", action="Give the output of the frequency job."),
    )


def expected_modes(molecule: Molecule) -> int:
    """3n−6, 3n−5 for a linear molecule, 0 for an atom."""
    n = molecule.n_atoms
    if n < 2:
        return 0
    if not molecule.has_geometry:
        return 3 * n - (5 if len(molecule.stated.rotational_constants_cm1) == 1 else 6)
    return 3 * n - (5 if is_linear(molecule.coordinates_A) else 6)


def is_linear(coordinates_A: FloatArray) -> bool:
    """Whether all atoms lie on one line, as near as :mod:`heatwright.structure.inertia` asks.

    >>> is_linear(np.array([[0.0, 0.0, 0.0], [0.0, 0.0, 1.16], [0.0, 0.0, -1.16]]))
    True
    """
    return farthest_from_line_A(coordinates_A) < LINEAR_TOLERANCE_A


def farthest_from_line_A(coordinates_A: FloatArray) -> float:
    """Distance of the farthest atom from the best line through all of them, Å; infinite when it cannot be told."""
    if not np.isfinite(coordinates_A).all():
        return float("inf")
    centred = coordinates_A - coordinates_A.mean(axis=0)
    axis = np.linalg.svd(centred, full_matrices=False)[2][0]
    away = centred - np.outer(centred @ axis, axis)
    return float(np.linalg.norm(away, axis=1).max())


def _a_kind(molecule: Molecule) -> str:
    names = {"energy": "a single point", "optimisation": "an optimisation", "unknown": "a job"}
    return names.get(molecule.kind, f"a {molecule.kind}")


def _not_numbers(m: Molecule) -> list[Finding]:
    found = []
    for index, row in enumerate(m.coordinates_A, start=1):
        if not np.isfinite(row).all():
            found.append(_nan(f"atom {index}", "a coordinate"))
    for index, mass in enumerate(m.masses_u, start=1):
        if not np.isfinite(mass):
            found.append(_nan(f"atom {index}", "the mass"))
    for index, value in enumerate(m.wavenumbers_cm1, start=1):
        if not np.isfinite(value):
            found.append(_nan(f"mode {index}", "the wavenumber"))
    if m.normal_modes is not None:
        bad = np.flatnonzero(~np.isfinite(m.normal_modes).all(axis=(1, 2)))
        found += [_nan(f"mode {index + 1}", "a displacement") for index in bad]
    if m.max_gradient_hartree_bohr is not None and not np.isfinite(m.max_gradient_hartree_bohr):
        found.append(_nan("", "the gradient"))
    for item in m.printed:
        for name in ("temperature_K", "pressure_Pa", "zpe_hartree", "enthalpy_correction_hartree", "entropy_J_mol_K"):
            value = getattr(item, name)
            if value is not None and not np.isfinite(value):
                found.append(_nan("", f"the printed {name.rsplit('_', 1)[0].replace('_', ' ')}"))
    return found


def _nan(where: str, what: str) -> Finding:
    action = "The output is damaged; fetch it again or run the job again."
    return refuse("not-a-number", f"{what} is not a finite number", where=where, action=action)


def _atoms(m: Molecule) -> list[Finding]:
    found = []
    if not m.has_geometry and m.stated.rotational_constants_cm1:
        return _masses(m)
    if len(m.masses_u) != m.n_atoms or m.coordinates_A.shape != (m.n_atoms, 3):
        words = f"{m.n_atoms} atoms, {len(m.masses_u)} masses and {len(m.coordinates_A)} positions"
        found.append(refuse("atoms-disagree", words, expected="the same number of each"))
        return found
    return found + _distances(m) + _masses(m)


def _distances(m: Molecule) -> list[Finding]:
    x = m.coordinates_A
    if m.kind == "rigid scan" or m.n_atoms < 2 or m.n_atoms > 400 or not np.isfinite(x).all():
        return []
    d = np.linalg.norm(x[:, None] - x[None, :], axis=2)
    i, j = np.unravel_index(np.argmin(d + 1e9 * np.eye(len(d))), d.shape)
    if d[i, j] > 0.3:
        return []
    words = f"atoms {i + 1} and {j + 1} are {d[i, j]:.3f} Å apart"
    return [refuse("atoms-disagree", words, expected="more than 0.3 Å", where=f"atom {i + 1}")]


def _masses(m: Molecule) -> list[Finding]:
    found = []
    for index, (z, mass) in enumerate(zip(m.atomic_numbers, m.masses_u, strict=True), start=1):
        if not 0 < z <= 103 or not np.isfinite(mass):
            continue
        known = element(int(z))
        default = known.average_weight_u if m.mass_kind == "average" else known.common_mass_u
        if abs(mass - default) < max(0.02, 2e-3 * default) or abs(mass - known.average_weight_u) < 0.02:
            continue
        near = min(known.isotopes, key=lambda iso: abs(iso[1] - mass))
        if abs(near[1] - mass) > 0.05:
            words = f"{known.symbol} has the mass {mass:g} u, which is no isotope's"
            found.append(
                refuse("atoms-disagree", words, where=f"atom {index}", expected=f"{known.common_mass_u:.5f} u")
            )
            continue
        if m.source.program == "by hand":
            continue
        action = "The symmetry number the program prints may be that of the common isotopes."
        words = f"the mass {mass:g} u is that of {near[0]}-{known.symbol}"
        found.append(
            warn("non-default-isotope", words, where=f"atom {index}", expected=f"{default:.5f} u", action=action)
        )
    return found


def _spin(m: Molecule) -> list[Finding]:
    if m.charge is None or m.multiplicity is None or (m.atomic_numbers < 1).any():
        return []
    electrons = int(m.atomic_numbers.sum()) - m.charge
    if m.multiplicity < 1 or electrons < 0 or m.multiplicity > electrons + 1 or (electrons + m.multiplicity) % 2 == 0:
        words = f"multiplicity {m.multiplicity} with charge {m.charge} is impossible for {electrons} electrons"
        right = "an odd multiplicity" if electrons % 2 == 0 else "an even multiplicity"
        return [refuse("multiplicity-impossible", words, expected=right, action="Check charge and multiplicity.")]
    ground = _ground_multiplicities().get(int(m.atomic_numbers[0])) if m.is_atom and m.charge == 0 else None
    if ground is not None and ground != m.multiplicity:
        words = f"the {symbol(int(m.atomic_numbers[0]))} atom was computed with multiplicity {m.multiplicity}"
        action = "Its energy is not that of the ground state."
        return [warn("atom-not-ground-state", words, expected=f"{ground}, the ground state", action=action)]
    return []


@cache
def _ground_multiplicities() -> dict[int, int]:
    return {int(row["atomic_number"]): int(row["multiplicity"]) for row in data_rows("ground_states")}


def _modes(m: Molecule) -> list[Finding]:
    if not m.wavenumbers_cm1.size:
        return []
    found = _imaginary(m) + _mode_count(m) + _tiny(m) + _nearly_linear(m)
    if m.normal_modes is not None and m.normal_modes.shape != (m.wavenumbers_cm1.size, m.n_atoms, 3):
        words = f"{len(m.normal_modes)} sets of displacements for {m.wavenumbers_cm1.size} wavenumbers"
        found.append(refuse("atoms-disagree", words, expected="one for each"))
    return found


def _imaginary(m: Molecule) -> list[Finding]:
    values = [float(w) for w in m.wavenumbers_cm1 if w < 0.0]
    if not values:
        return []
    shown = ", ".join(f"{abs(w):.2f}i" for w in values[:6]) + (" …" if len(values) > 6 else "")
    if len(values) == 1:
        words = f"1 imaginary mode ({shown} cm⁻¹): this is a first-order saddle point (a transition state), no minimum"
        action = "A transition state has no thermo entry; follow the mode downhill to a minimum and compute that."
    else:
        words = f"{len(values)} imaginary modes ({shown} cm⁻¹): this is a higher-order saddle point, no minimum"
        action = "Distort the structure along these modes, optimise again and repeat the frequency job."
    return [refuse("imaginary-modes", words, expected="none", action=action)]


def _mode_count(m: Molecule) -> list[Finding]:
    n, due = m.wavenumbers_cm1.size, expected_modes(m)
    if n == due:
        return []
    rule = "3N−5, linear" if due == 3 * m.n_atoms - 5 else "3N−6"
    words = f"{n} vibrational mode{'s' if n != 1 else ''} for {m.n_atoms} atoms"
    action = "The list is incomplete, belongs to a partial Hessian or to another molecule."
    return [refuse("mode-count", words, expected=f"{due} ({rule})", action=action)]


def _tiny(m: Molecule) -> list[Finding]:
    found = []
    for index, w in enumerate(m.wavenumbers_cm1, start=1):
        if 0.0 <= w < TINY_CM1:
            action = "Look at the mode: it is a free rotation, or noise of the Hessian."
            words = f"the wavenumber is {w:.2f} cm⁻¹"
            due = f"more than {TINY_CM1:g} cm⁻¹"
            found.append(warn("zero-wavenumber", words, where=f"mode {index}", expected=due, action=action))
        if w > HIGH_CM1:
            words, due = f"the wavenumber is {w:.2f} cm⁻¹", f"at most {HIGH_CM1:g} cm⁻¹"
            action = "Look at the level of theory and the geometry."
            found.append(warn("high-wavenumber", words, where=f"mode {index}", expected=due, action=action))
    return found


def _nearly_linear(m: Molecule) -> list[Finding]:
    """A bent molecule that is hardly bent: its quick rotation about the line and its bend are one motion."""
    if m.n_atoms < 3 or not m.has_geometry:
        return []
    away = farthest_from_line_A(m.coordinates_A)
    if not LINEAR_TOLERANCE_A <= away < NEARLY_LINEAR_A:
        return []
    words = f"the molecule is nearly linear: no atom is farther than {away:.3f} Å from one line"
    action = "Rotation about that line and the bend are one motion, which a rigid rotor with harmonic modes misses."
    return [warn("nearly-linear", words, action=action)]


def _gradient(m: Molecule) -> list[Finding]:
    g = m.max_gradient_hartree_bohr
    if g is None or m.is_atom or not m.wavenumbers_cm1.size or not g > STATIONARY_HARTREE_BOHR:
        return []
    words = f"the largest gradient component at the geometry of the frequencies is {g:.2e} hartree/bohr"
    action = "Optimise at the level of the frequencies first: wavenumbers away from a stationary point mean little."
    return [warn("not-stationary", words, expected=f"at most {STATIONARY_HARTREE_BOHR:.1e}", action=action)]


def _energy(m: Molecule) -> list[Finding]:
    found = []
    if m.energy_hartree is None and m.kind not in ("relaxed scan", "rigid scan", "unknown"):
        action = "Heat capacity, enthalpy increment and entropy do not need it; an enthalpy of formation does."
        found.append(warn("no-energy", "there is no total energy in the output", action=action))
    return found


def _scan(m: Molecule) -> list[Finding]:
    if m.kind != "rigid scan":
        return []
    words = "the scan turns one part of the molecule and keeps the rest rigid"
    action = "Scan again and optimise all other coordinates at each angle."
    return [refuse("rigid-scan", words, expected="a relaxed scan", action=action)]


def _printed(m: Molecule) -> list[Finding]:
    if m.is_atom or not m.wavenumbers_cm1.size or not np.isfinite(m.wavenumbers_cm1).all():
        return []
    for item in m.printed:
        finding = _zpe_differs(m, item)
        if finding is not None:
            return [finding]
    return []


def _zpe_differs(m: Molecule, item: PrintedThermo) -> Finding | None:
    if item.zpe_hartree is None or m.source.program in _OWN_SUMS:
        return None
    real = m.wavenumbers_cm1[m.wavenumbers_cm1 > 0.0]
    own = float(real.sum()) / 2.0 / HARTREE_CM1
    allowed = _ZPE_TOLERANCE + 3.0e-8 * real.size + (_NWCHEM_LOW * own if m.source.program == "NWChem" else 0.0)
    if not abs(own - item.zpe_hartree) > allowed:  # NaN was refused before
        return None
    words = f"the zero-point energy of the modes is {own:.6f} hartree, the output prints {item.zpe_hartree:.6f}"
    action = "The program scaled, raised or left out modes, or the list is incomplete."
    return warn("printed-values-differ", words, expected=f"agreement within {allowed:.1e}", action=action)


def _parts(m: Molecule) -> list[Finding]:
    from heatwright.reading.structures import unbonded

    return list(unbonded(m)) if m.kind != "rigid scan" else []


_CHECKS: Final[tuple[Callable[[Molecule], list[Finding]], ...]] = (
    _not_numbers,
    _atoms,
    _spin,
    _parts,
    _modes,
    _gradient,
    _energy,
    _scan,
    _printed,
)
