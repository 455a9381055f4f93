"""Which electronic levels a molecule gets: stated ones, those of the table, or its spin degeneracy."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

from heatwright.elements import composition, formula
from heatwright.findings import Finding, note, warn
from heatwright.partition.electronic import Levels, tabulated_levels

if TYPE_CHECKING:
    from heatwright.molecule import Molecule
    from heatwright.structure.inertia import Inertia


def chosen_levels(
    molecule: Molecule, moments: Inertia, electronic: Literal["table", "spin", "levels"] | Levels
) -> tuple[Levels, str, tuple[Finding, ...]]:
    """The electronic levels, where they are from, and what has to be said about the choice."""
    if not isinstance(electronic, str):
        said = note("user-value", f"electronic levels {_levels_text(electronic)} were given")
        return electronic, "given", (said,)
    if molecule.stated.electronic_levels and electronic != "spin":
        return molecule.stated.electronic_levels, molecule.stated.electronic_source or "given by hand", ()
    multiplicity, charge = molecule.multiplicity, molecule.charge
    if multiplicity is None or charge is None:
        raise ValueError(f"{molecule.source.file}: charge and multiplicity must be known before levels can be chosen")
    hill = formula(composition(molecule.atomic_numbers))
    row = tabulated_levels(hill, charge, multiplicity) if electronic != "spin" else None
    if row is not None:
        return row.levels, f"{row.state}, {row.source}", ()
    levels: Levels = ((0.0, multiplicity),)
    if multiplicity == 1:
        return levels, "closed shell", ()
    said = note(
        "spin-degeneracy",
        f"no electronic levels are tabulated for {hill}; its spin degeneracy {multiplicity} was taken"
        if electronic != "spin"
        else f"the spin degeneracy {multiplicity} was taken as asked for",
    )
    if moments.kind != "linear":
        return levels, "spin degeneracy", (said,)
    doubt = warn(
        "linear-radical",
        f"{hill} is linear and open-shell, and its electronic state is not tabulated, so a spatial degeneracy "
        f"(2 in a Π or Δ state) may be missing from the spin degeneracy {multiplicity}",
        action="Give the levels by --electronic, such as 0:4 for an unsplit doublet Π state.",
    )
    return levels, "spin degeneracy", (said, doubt)


def _levels_text(levels: Levels) -> str:
    return ",".join(f"{nu:g}:{g}" for nu, g in levels)
