"""Molecules made by hand for tests that need no output file."""

from __future__ import annotations

from typing import Any

import numpy as np

from heatwright.elements import atomic_number, element
from heatwright.molecule import Level, Molecule, Source

LEVEL = Level(method="B3LYP", basis="6-31G*", functional="VWN1RPA", spherical=True, program="NWChem")


def molecule(
    symbols: str,
    coordinates_A: list[list[float]],
    wavenumbers_cm1: list[float],
    *,
    file: str = "made.out",
    **changes: Any,
) -> Molecule:
    """A molecule from blank-separated element symbols, its geometry and its modes; everything else has a default."""
    numbers = np.array([atomic_number(s) for s in symbols.split()])
    values: dict[str, Any] = {
        "source": Source(file, "0" * 64, "NWChem", "7.0.2"),
        "kind": "atom" if numbers.size == 1 else "frequency",
        "atomic_numbers": numbers,
        "masses_u": np.array([element(z).common_mass_u for z in numbers]),
        "mass_kind": "isotopic",
        "masses_printed": True,
        "coordinates_A": np.array(coordinates_A, dtype=float),
        "wavenumbers_cm1": np.array(sorted(wavenumbers_cm1), dtype=float),
        "charge": 0,
        "multiplicity": 1,
        "level": LEVEL,
        "energies_hartree": {},
        "energy_kind": "SCF",
    }
    return Molecule(**(values | changes))


def atom(symbol: str, multiplicity: int, energy_hartree: float, **changes: Any) -> Molecule:
    """A single atom with its energy."""
    return molecule(
        symbol,
        [[0.0, 0.0, 0.0]],
        [],
        multiplicity=multiplicity,
        energies_hartree={"SCF": energy_hartree},
        **{"file": f"{symbol}.out", **changes},
    )


def water(**changes: Any) -> Molecule:
    """Water with its experimental geometry and fundamentals (T. Shimanouchi, NSRDS-NBS 39, 1972)."""
    geometry = [[0.0, 0.0, 0.1173], [0.0, 0.7572, -0.4692], [0.0, -0.7572, -0.4692]]
    return molecule("O H H", geometry, [3657.0, 1595.0, 3756.0], **{"file": "H2O.out", **changes})
