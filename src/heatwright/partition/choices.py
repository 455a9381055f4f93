"""ModelOptions: every choice behind a model that is not the default."""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite
from typing import TYPE_CHECKING, Final, Literal, get_args

from heatwright.constants import BAR_PA
from heatwright.errors import UsageError
from heatwright.partition.lowmodes import LowModes
from heatwright.partition.motion import RotationKind

if TYPE_CHECKING:
    from heatwright.molecule import MassKind
    from heatwright.partition.inputs import InputUncertainties
    from heatwright.partition.radicals import ElectronicOption
    from heatwright.reading.torsion_scans import Torsion

LARGEST_SYMMETRY_TOLERANCE_A: Final = 0.35
"""As in :mod:`heatwright.structure.symmetry`, which looks for no symmetry beyond it."""
HARMONIC: Final = LowModes()
"""Low modes as they come: the default."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ModelOptions:
    """The choices behind a model; ``None`` means "as the output or the geometry says" (unscaled for scale factors).

    pressure_Pa : standard pressure.   frequency_scale, zpe_scale : factors on the wavenumbers for the thermal
    functions and for the zero-point energy.   scale : ``"published"`` takes both of them from the table of published
    factors (:func:`heatwright.scales.choose_published`) for the molecule's level of theory.   symmetry_number,
    optical_isomers : override the geometry.   electronic : ``"table"``, ``"spin"``, explicit levels, or ``"levels"``:
    the table, with a sum over the rotational and electronic levels together for doublet Π radicals.
    masses : isotopic or average atomic masses.   symmetry_tolerance_A : how far an atom may be from its image, Å.
    anharmonic : the output's anharmonic fundamentals and zero-point energy instead of the harmonic ones.
    uncertainty : standard uncertainties of the inputs that a table propagates, None for a table without.
    low_modes : treatment of low modes.   rotation : ``"classical"``, ``"corrected"`` or ``"sum"`` (linear molecules).
    torsions : what :func:`heatwright.reading.torsion_scans.read_torsion` gave, each treated as a hindered rotor;
    torsion_coupling : with the coupled determinant of their reduced moments.
    """

    pressure_Pa: float = BAR_PA
    frequency_scale: float | None = None
    zpe_scale: float | None = None
    scale: Literal["published"] | None = None
    symmetry_number: int | None = None
    optical_isomers: int | None = None
    electronic: ElectronicOption = "table"
    masses: MassKind | None = None
    symmetry_tolerance_A: float = 0.05
    anharmonic: bool = False
    uncertainty: InputUncertainties | None = None
    low_modes: LowModes = HARMONIC
    rotation: RotationKind = "classical"
    torsions: tuple[Torsion, ...] = ()
    torsion_coupling: bool = False

    def __post_init__(self) -> None:
        for name in ("pressure_Pa", "frequency_scale", "zpe_scale", "symmetry_tolerance_A"):
            value = getattr(self, name)
            if value is not None and not (isfinite(value) and value > 0.0):
                raise UsageError(f"{name} must be a positive number, not {value}")
        if self.symmetry_tolerance_A > LARGEST_SYMMETRY_TOLERANCE_A:
            words = (
                f"the symmetry tolerance is at most {LARGEST_SYMMETRY_TOLERANCE_A} Å, not {self.symmetry_tolerance_A:g}"
            )
            raise UsageError(words)
        for name in ("symmetry_number", "optical_isomers"):
            value = getattr(self, name)
            if value is not None and value < 1:
                raise UsageError(f"{name} must be at least 1, not {value}")
        if self.rotation not in get_args(RotationKind):
            raise UsageError(f"rotation is one of {', '.join(get_args(RotationKind))}, not {self.rotation!r}")
        if self.anharmonic and any(x is not None for x in (self.scale, self.frequency_scale, self.zpe_scale)):
            raise UsageError("scale factors are for harmonic wavenumbers; leave them out together with --anharmonic")
        if self.anharmonic and self.torsions:
            raise UsageError("a torsion is projected out of harmonic modes; leave out --anharmonic")
        if self.scale is not None and (self.frequency_scale is not None or self.zpe_scale is not None):
            raise UsageError("published scale factors and stated ones (frequency_scale, zpe_scale) exclude each other")
