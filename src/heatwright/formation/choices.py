"""EnergyChoices: what the user decides about energies and reference values, the same for every route."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from heatwright.formation.atomization import Atoms, formation_by_atomization

if TYPE_CHECKING:
    from heatwright.formation.corrections import Correction
    from heatwright.formation.formation import Electron, Formation
    from heatwright.formation.references import AtomReference
    from heatwright.formation.zero_kelvin import ZeroKelvinEnergies
    from heatwright.partition.model import ThermoModel


@dataclass(frozen=True, eq=False, kw_only=True)
class EnergyChoices:
    """Decisions about energies and reference values.

    trust_levels : combine energies although levels or programs differ.
    spin_orbit, corrections, zero_kelvin, electron : see formation_by_atomization.
    atom_values : reference values of the atoms by symbol, the built-in ones when None.
    accept : ``energy`` (off by more than a bond) and ``bonds`` (a reaction without bond balance) are warnings then.
    """

    trust_levels: bool = False
    spin_orbit: bool = False
    corrections: tuple[Correction, ...] = ()
    zero_kelvin: ZeroKelvinEnergies | None = None
    electron: Electron = "thermal"
    atom_values: Mapping[str, AtomReference] | None = None
    accept: tuple[str, ...] = ()

    @property
    def key(self) -> tuple[object, ...]:
        """What tells choices apart that give a calculated enthalpy different values."""
        values = (
            () if self.atom_values is None else tuple(sorted((s, r.dHf0_kJ_mol) for s, r in self.atom_values.items()))
        )
        stated = None if self.zero_kelvin is None else self.zero_kelvin.path
        return self.trust_levels, self.spin_orbit, self.corrections, stated, self.electron, values, self.accept


PLAIN = EnergyChoices()


def atomized(model: ThermoModel, atoms: Atoms, choices: EnergyChoices) -> Formation:
    """The enthalpy of formation by atomization with these choices; raises Refused."""
    return formation_by_atomization(
        model,
        atoms,
        trust_levels=choices.trust_levels,
        spin_orbit=choices.spin_orbit,
        corrections=choices.corrections,
        zero_kelvin=choices.zero_kelvin,
        electron=choices.electron,
        references=choices.atom_values,
        accept=choices.accept,
    )
