"""Which radicals are summed over the levels of their doublet Π state, and with which constants."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Literal

from heatwright.elements import composition, element, formula
from heatwright.findings import Finding, note, warn
from heatwright.molecule import DiatomicConstants, Molecule
from heatwright.partition.diatomic import Levels, doublet_pi_levels, doublet_pi_rotation, level_sum, with_excited
from heatwright.partition.electronic import Levels as ElectronicPairs
from heatwright.partition.electronic import tabulated_levels
from heatwright.partition.levels import chosen_levels
from heatwright.resources import data_rows

if TYPE_CHECKING:
    from heatwright.partition.levelsum import LevelSum
    from heatwright.structure.inertia import Inertia

ElectronicOption = Literal["table", "spin", "levels"] | ElectronicPairs


@dataclass(frozen=True, slots=True)
class DoubletPi:
    """A doublet Π ground state.

    constants : with the spin-orbit constant A; ``whole`` says whether their vibrational levels are summed up as well.
    excited : (1/cm above the lowest level, degeneracy) of further electronic states, which rotate as the ground state.
    """

    constants: DiatomicConstants
    whole: bool
    excited: ElectronicPairs
    state: str

    @property
    def spin_orbit_cm1(self) -> float:
        """A, 1/cm."""
        return self.constants.A_cm1 or 0.0

    @property
    def pairs(self) -> ElectronicPairs:
        """The two components and the excited states as electronic levels, for the record only."""
        return ((0.0, 2), (abs(self.spin_orbit_cm1), 2), *self.excited)

    @property
    def _B0_cm1(self) -> float:
        return self.constants.Be_cm1 - self.constants.alphae_cm1 / 2.0

    @property
    def lowest_cm1(self) -> float:
        """The lowest real level, 1/cm from the origin without spin-orbit coupling of the lowest vibrational state.

        That of OH is known as −38.2 1/cm (B. Ruscic et al., J. Phys. Chem. A 106, 2727 (2002), from memory).
        """
        return float(self._rotation()[0].min())

    def _rotation(self) -> Levels:
        return doublet_pi_rotation(self.spin_orbit_cm1, self._B0_cm1, self.constants.centrifugal_cm1)

    def contribution(self) -> LevelSum:
        """Rotation and electronic states (of the lowest vibrational state), or vibration too."""
        levels = doublet_pi_levels(self.constants) if self.whole else self._rotation()
        name = "vibration, rotation and electronic" if self.whole else "rotation and electronic"
        return level_sum(name, with_excited(levels, self.excited, self._B0_cm1, self.constants.centrifugal_cm1))

    def finding(self) -> Finding:
        """What was summed, and where the lowest level is."""
        c = self.constants
        what = "vibration, rotation and electronic states" if self.whole else "rotation and electronic states"
        more = " (excited states rotate as the ground state)" if self.excited else ""
        return note(
            "level-sum",
            f"{what} are one sum over the levels of the doublet Π state (Hill and Van Vleck 1928){more}: A = "
            f"{self.spin_orbit_cm1:g}, B0 = {self._B0_cm1:g}, D = {c.centrifugal_cm1:.3g} 1/cm, {c.source}; H(0) is "
            f"the lowest real level, {self.lowest_cm1:+.2f} 1/cm from the origin without spin-orbit coupling, to which "
            "the electronic and zero-point energy belong; atomization adds that step",
        )


def doublet_pi(molecule: Molecule, electronic: object) -> DoubletPi | None:
    """The doublet Π state to be summed over, or None.

    electronic : the option; ``"levels"`` takes constants from the table, and A of a molecule file holds for
    ``"table"`` as well.
    """
    given = molecule.stated.diatomic
    if given is not None and given.A_cm1 is not None and electronic in ("table", "levels"):
        return DoubletPi(given, True, (), "doublet Pi")
    row = _row(molecule) if electronic == "levels" else None
    if row is None:
        return None
    keys = ("we_cm1", "wexe_cm1", "Be_cm1", "alphae_cm1", "A_cm1")
    constants = DiatomicConstants(**{key: float(row[key]) for key in keys}, source=row["source"])
    if given is not None:
        constants = replace(given, A_cm1=constants.A_cm1, source=f"{given.source}; A from {row['source']}")
    tabulated = tabulated_levels(row["species"], 0, 2)
    excited = tabulated.levels[2:] if tabulated else ()
    return DoubletPi(constants, given is not None, excited, row["state"])


def _row(molecule: Molecule) -> dict[str, str] | None:
    """The row of a radical of usual isotopes: the constants of others are not these."""
    if molecule.multiplicity != 2 or not all(
        min(abs(m - element(int(z)).common_mass_u), abs(m - element(int(z)).average_weight_u)) < 0.1
        for z, m in zip(molecule.atomic_numbers, molecule.masses_u, strict=True)
    ):
        return None
    hill = formula(composition(molecule.atomic_numbers))
    return next(
        (r for r in data_rows("doublet_pi") if r["species"] == hill and int(r["charge"]) == molecule.charge), None
    )


@dataclass(frozen=True, slots=True)
class ElectronicChoice:
    """Electronic levels, where they are from, what is said of them, and the doublet Π state they are summed up with."""

    levels: ElectronicPairs
    source: str
    findings: tuple[Finding, ...]
    radical: DoubletPi | None = None


def electronic_choice(molecule: Molecule, moments: Inertia, electronic: ElectronicOption) -> ElectronicChoice:
    """The electronic levels that go with the option; a warning when a sum was asked for and there are no constants."""
    radical = doublet_pi(molecule, electronic)
    if radical is not None:
        return ElectronicChoice(radical.pairs, f"{radical.state}, summed with rotation", (), radical)
    levels, source, findings = chosen_levels(molecule, moments, electronic)
    if electronic == "levels" and moments.kind == "linear" and molecule.multiplicity == 2:
        findings = (*findings, _no_constants(molecule))
    return ElectronicChoice(levels, source, findings)


def _no_constants(molecule: Molecule) -> Finding:
    """That a level sum was asked for, and there are no constants for it."""
    hill = formula(composition(molecule.atomic_numbers))
    return warn(
        "level-sum",
        f"a sum over doublet Π levels was asked for, and there are no constants for {hill} with these isotopes",
        action="Give the constants in a molecule file, [diatomic] with A_cm1, or the levels by --electronic.",
    )
