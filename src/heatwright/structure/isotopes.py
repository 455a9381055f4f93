"""Another isotopologue of a computed molecule: same energy and force constants, other masses and wavenumbers."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Final

import numpy as np

from heatwright.elements import atomic_number, element
from heatwright.errors import UsageError
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.molecule import FloatArray, Molecule, Stated
from heatwright.structure.modes import overall_motion, projected_modes, rebuilt_hessian

ORTHONORMAL: Final = 0.1
"""How far printed displacements may be from orthonormal; two printed decimals leave 0.03."""
COARSE: Final = 3.0e-3
"""Displacements farther than this from orthonormal are printed with two decimals.  Rounding those of divinylbenzene so
moved single wavenumbers of its fully deuterated form by up to 8 cm⁻¹ and their sum by 0.02 %."""
_NAMES: Final = {"D": "2H", "T": "3H"}


@dataclass(frozen=True, slots=True)
class Isotope:
    """One wish: an atom (counted from 1) or all atoms of the isotope's element (None) get this isotope."""

    atom: int | None
    number: int
    mass_number: int
    mass_u: float

    @property
    def name(self) -> str:
        """Mass number and symbol, ``2H``."""
        return f"{self.mass_number}{element(self.number).symbol}"


def parse_isotope(text: str) -> Isotope:
    """``2=2H`` (the second atom), ``H=D`` (all hydrogens), ``1=13C``; raises UsageError for anything else.

    >>> parse_isotope("H=D").name, parse_isotope("3=18O").mass_u
    ('2H', 17.999159612)
    """
    where, _, what = (part.strip() for part in text.partition("="))
    what = _NAMES.get(what.upper(), what)
    isotope, atom = re.fullmatch(r"(\d+)([A-Za-z]{1,2})", what), re.fullmatch(r"[1-9]\d*|[A-Za-z]{1,2}", where)
    if isotope is None or atom is None:
        raise UsageError(f"--isotope {text!r}: expected ATOM=ISOTOPE, such as 2=2H, H=D or 1=13C")
    number = _element(isotope[2], text)
    known = {mass_number: mass for mass_number, mass, _ in element(number).isotopes}
    if int(isotope[1]) not in known:
        names = ", ".join(f"{a}{element(number).symbol}" for a in known)
        raise UsageError(f"--isotope {text!r}: there is no mass of {what} in the table; known are {names}")
    if not where.isdigit() and _element(where, text) != number:
        raise UsageError(f"--isotope {text!r}: {what} is no isotope of {where}")
    return Isotope(int(where) if where.isdigit() else None, number, int(isotope[1]), known[int(isotope[1])])


def _element(symbol: str, text: str) -> int:
    try:
        return atomic_number(symbol)
    except KeyError:
        raise UsageError(f"--isotope {text!r}: {symbol} is no element") from None


def with_isotopes(molecule: Molecule, wishes: Iterable[Isotope]) -> Molecule:
    """The molecule with other isotopes: masses, wavenumbers and modes anew, the electronic energy as it was.

    The wavenumbers come from the Hessian, or where there is none from force constants rebuilt from wavenumbers and
    normal modes.  Raises Refused for an atom that is not there or is another element, and when the output has neither
    a Hessian nor complete modes.
    """
    wishes = tuple(wishes)
    if not wishes:
        return molecule
    masses, changed = _masses(molecule, wishes)
    left = tuple(f for f in molecule.findings if not (f.code == "non-default-isotope" and f.where in changed))
    stated = Stated(
        name=molecule.stated.name,
        electronic_levels=molecule.stated.electronic_levels,
        electronic_source=molecule.stated.electronic_source,
    )
    changes = molecule.but(
        masses_u=masses, printed=(), stated=stated, fundamentals_cm1=None, anharmonic_zpe_hartree=None
    )
    if molecule.is_atom:
        return changes.but(findings=(*left, _said(changed, "")))
    hessian, source, deviation = force_constants(molecule)
    wavenumbers, modes = projected_modes(hessian, masses, molecule.coordinates_A)
    if not (wavenumbers > 0.0).all():
        raise Refused([_no_minimum(float(wavenumbers[0]))])
    return changes.but(
        wavenumbers_cm1=wavenumbers,
        normal_modes=modes,
        hessian_hartree_bohr2=hessian,
        findings=(*left, _said(changed, f"; wavenumbers anew from {source}"), *_coarse(deviation)),
    )


def _masses(molecule: Molecule, wishes: tuple[Isotope, ...]) -> tuple[FloatArray, dict[str, Isotope]]:
    masses = molecule.masses_u.copy()
    changed: dict[str, Isotope] = {}
    for wish in wishes:
        atoms = np.flatnonzero(molecule.atomic_numbers == wish.number) if wish.atom is None else [wish.atom - 1]
        if not len(atoms) or atoms[-1] >= molecule.n_atoms or molecule.atomic_numbers[atoms[0]] != wish.number:
            raise Refused([_no_such_atom(molecule, wish)])
        for i in atoms:
            masses[i] = wish.mass_u
            changed[f"atom {i + 1}"] = wish
    return masses, changed


def _no_such_atom(molecule: Molecule, wish: Isotope) -> Finding:
    wanted = element(wish.number).symbol
    if wish.atom is None:
        found = f"{wish.name} was asked for, and there is no {wanted} in the molecule"
    elif wish.atom > molecule.n_atoms:
        found = f"{wish.name} was asked for at atom {wish.atom}, and the molecule has {molecule.n_atoms} atoms"
    else:
        there = element(int(molecule.atomic_numbers[wish.atom - 1])).symbol
        found = f"{wish.name} was asked for at atom {wish.atom}, which is {there}"
    return refuse("no-such-atom", found, action="Atoms are counted from 1 in the order of the output.")


def _no_minimum(wavenumber_cm1: float) -> Finding:
    found = f"the force constants give the lowest mode {wavenumber_cm1:.2f} cm⁻¹ with these masses"
    return refuse("imaginary-modes", found, expected="a minimum", action="Look at the lowest modes of the output.")


def force_constants(molecule: Molecule, what: str = "another isotope") -> tuple[FloatArray, str, float]:
    """Cartesian force constants, where they are from, and how far the modes behind them are from orthonormal.

    Raises Refused (``no-force-constants``), saying that *what* needs them.
    """
    H, x, modes = molecule.hessian_hartree_bohr2, molecule.coordinates_A, molecule.normal_modes
    if H is not None and (projected_modes(H, molecule.masses_u, x)[0] > 0.0).all():  # else wavenumbers were changed
        return H, "the printed Hessian", 0.0
    why = "it has neither a Hessian nor normal modes"
    if len(x) == molecule.n_atoms and modes is not None:
        due = 3 * molecule.n_atoms - overall_motion(molecule.masses_u, x).shape[1]
        why = f"it has {len(modes)} normal modes where {due} belong"
        if len(modes) == due:
            rebuilt, deviation = rebuilt_hessian(molecule.wavenumbers_cm1, modes, molecule.masses_u, x)
            if deviation <= ORTHONORMAL:
                return rebuilt, "force constants rebuilt from the printed wavenumbers and modes", deviation
            why = f"its normal modes overlap by {deviation:.2f}, so they are no Cartesian displacements"
    raise Refused(
        [
            refuse(
                "no-force-constants",
                f"{what} needs the force constants, and the output cannot give them: {why}",
                expected="a Hessian, or complete wavenumbers with their normal modes",
                action="Give an output that has them; for an isotope, run the frequency job with its mass.",
            )
        ]
    )


def _coarse(deviation: float) -> tuple[Finding, ...]:
    if deviation <= COARSE:
        return ()
    found = (
        f"the normal modes are printed with so few decimals that they overlap by {deviation:.3f}; single wavenumbers "
        "of the other isotopologue may be off by several cm⁻¹"
    )
    return (warn("isotopes", found, action="Let the program print more digits, or run the job with the other masses."),)


def _said(changed: dict[str, Isotope], how: str) -> Finding:
    by_isotope: dict[str, list[str]] = {}
    for where, wish in changed.items():
        by_isotope.setdefault(f"{wish.name} ({wish.mass_u:.6f} u)", []).append(where.removeprefix("atom "))
    parts = [f"{name} at atom{'s' if len(atoms) > 1 else ''} {', '.join(atoms)}" for name, atoms in by_isotope.items()]
    return note("isotopes", f"isotopes were exchanged: {'; '.join(parts)}{how}; the electronic energy stays")
