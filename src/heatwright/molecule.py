"""Molecule: what one quantum-chemistry output says, in one set of units and free of its program's habits."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any, Literal

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from heatwright.findings import Finding

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

Kind = Literal["frequency", "energy", "optimisation", "relaxed scan", "rigid scan", "atom", "unknown"]
MassKind = Literal["isotopic", "average"]


@dataclass(frozen=True, slots=True)
class Source:
    """Where a molecule was read from: path as given, SHA-256 of the file's bytes, program and its version."""

    file: str
    sha256: str
    program: str
    version: str

    @property
    def program_version(self) -> str:
        """Program and version as one phrase, ``NWChem 7.0.2``."""
        return f"{self.program} {self.version}".rstrip()


@dataclass(frozen=True, slots=True)
class Level:
    """A level of theory as far as the output prints it; ``None`` or an empty text means "not printed".

    method : normalised name, ``HF``, ``B3LYP``, ``MP2``, ``CCSD(T)``.
    basis : normalised name, ``6-31G*``, ``cc-pVTZ``.
    functional : what tells variants of one functional name apart, for instance the correlation part ``VWN1RPA``
        (``VWN5`` in other programs) of B3LYP; for methods other than density functionals empty.
    spherical : True for pure (5d, 7f) functions, False for Cartesian ones.
    frozen_core : ``"all"`` when all electrons are correlated, ``"frozen"`` or a count such as ``"frozen 2"``.
    core_potential : name of an effective core potential.
    dispersion : ``"D3BJ"`` and the like.
    solvent : continuum model and solvent.
    program : the program's family, without version.
    atoms : atomic numbers of the molecule the level was used for (not part of the level itself, so it does not count
        when two levels are compared with ``==``); it says where a dispersion correction or a core potential cannot act.
    """

    method: str
    basis: str
    functional: str = ""
    spherical: bool | None = None
    frozen_core: str = ""
    core_potential: str = ""
    dispersion: str = ""
    solvent: str = ""
    program: str = ""
    atoms: tuple[int, ...] = field(default=(), compare=False)

    @property
    def label(self) -> str:
        """Method and basis as a chemist writes them, ``B3LYP-D3BJ/6-31G*``."""
        method = f"{self.method}-{self.dispersion}" if self.dispersion else self.method
        label = f"{method}/{self.basis}" if self.basis else method
        return f"{label} ({self.solvent})" if self.solvent else label


@dataclass(frozen=True, slots=True)
class PrintedThermo:
    """What the program itself printed of its thermochemistry at one temperature: a check, never an input.

    zpe_hartree, enthalpy_correction_hartree (H(T) − E_electronic, zero-point energy included), entropy_J_mol_K,
    temperature_K, pressure_Pa, symmetry_number; ``None`` where nothing is printed.
    """

    temperature_K: float | None = None
    pressure_Pa: float | None = None
    symmetry_number: int | None = None
    zpe_hartree: float | None = None
    enthalpy_correction_hartree: float | None = None
    entropy_J_mol_K: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class DiatomicConstants:
    """Spectroscopic constants of a diatomic molecule, all in 1/cm, in the usual notation.

    we, wexe : vibration.   Be, alphae : rotation.   D : centrifugal constant, 4Be³/we² (Kratzer) when not given.
    D0 : dissociation energy from the lowest level, or None.   A : spin-orbit constant of a doublet Π state, or None.
    """

    we_cm1: float
    wexe_cm1: float
    Be_cm1: float
    alphae_cm1: float
    D_cm1: float | None = None
    D0_cm1: float | None = None
    A_cm1: float | None = None
    source: str = ""

    @property
    def centrifugal_cm1(self) -> float:
        """D, 1/cm."""
        return 4.0 * self.Be_cm1**3 / self.we_cm1**2 if self.D_cm1 is None else self.D_cm1

    @property
    def zero_point_cm1(self) -> float:
        """G(0) = we/2 − wexe/4, 1/cm."""
        return self.we_cm1 / 2.0 - self.wexe_cm1 / 4.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Stated:
    """What a molecule given by hand says in the place of what a geometry or a table would say; empty where it does not.

    name : of the species.   rotational_constants_cm1 : one for a linear molecule, three otherwise, 1/cm.
    symmetry_number, point_group, optical_isomers : of the rigid molecule.
    electronic_levels : (1/cm above the ground level, degeneracy) pairs; ``electronic_source`` is where they are from.
    diatomic : constants whose levels are summed up instead of a rotor and an oscillator.
    """

    name: str = ""
    rotational_constants_cm1: tuple[float, ...] = ()
    symmetry_number: int | None = None
    point_group: str = ""
    optical_isomers: int | None = None
    electronic_levels: tuple[tuple[float, int], ...] = ()
    electronic_source: str = ""
    diatomic: DiatomicConstants | None = None


@dataclass(frozen=True, eq=False, kw_only=True)
class Molecule:
    """One molecule from one output.

    atomic_numbers : (n,) int.
    masses_u : (n,) atomic masses in u; ``mass_kind`` says whether isotopic or average; ``masses_printed`` whether the
        output gave them (else they come from the table of the most abundant isotopes).
    coordinates_A : (n, 3) in Å, the geometry of the frequencies; (0, 3) when only rotational constants are stated.
    wavenumbers_cm1 : (m,) in 1/cm, ascending, translations and rotations removed, imaginary ones negative;
        empty when the job has no frequencies.
    normal_modes : (m, n, 3) Cartesian displacements (not mass-weighted, each of norm 1), same order, or None.
    hessian_hartree_bohr2 : (3n, 3n) Cartesian force constants in hartree/bohr², or None.
    fundamentals_cm1 : (m,) anharmonic fundamentals in the order of the wavenumbers, 1/cm, or None;
        ``anharmonic_zpe_hartree`` is the zero-point energy that goes with them.
    energies_hartree : every total energy by name (``SCF``, ``MP2``, ``CCSD(T)``); ``energy_kind`` is the one in use.
    energy_source, energy_level : the file and level of the energy when it is from another output than the modes.
    max_gradient_hartree_bohr : largest component of the gradient at this geometry, or None.
    printed : the program's own thermochemistry, one item for each temperature.
    n_jobs : how many jobs the file holds; ``job`` counts from 1.
    stated : what a molecule given by hand says of itself.
    """

    source: Source
    kind: Kind
    atomic_numbers: IntArray
    masses_u: FloatArray
    mass_kind: MassKind
    masses_printed: bool
    coordinates_A: FloatArray
    wavenumbers_cm1: FloatArray = field(default_factory=lambda: np.empty(0))
    normal_modes: FloatArray | None = None
    hessian_hartree_bohr2: FloatArray | None = None
    fundamentals_cm1: FloatArray | None = None
    anharmonic_zpe_hartree: float | None = None
    energies_hartree: Mapping[str, float] = field(default_factory=dict)
    energy_kind: str = ""
    energy_source: Source | None = None
    energy_level: Level | None = None
    charge: int | None = None
    multiplicity: int | None = None
    level: Level | None = None
    max_gradient_hartree_bohr: float | None = None
    printed: tuple[PrintedThermo, ...] = ()
    job: int = 1
    n_jobs: int = 1
    findings: tuple[Finding, ...] = ()
    stated: Stated = Stated()

    @property
    def n_atoms(self) -> int:
        """Number of atoms."""
        return int(self.atomic_numbers.size)

    @property
    def has_geometry(self) -> bool:
        """Whether there are coordinates (else there are stated rotational constants)."""
        return len(self.coordinates_A) > 0

    @property
    def is_atom(self) -> bool:
        """Whether this is a single atom."""
        return self.n_atoms == 1

    @property
    def energy_hartree(self) -> float | None:
        """The electronic energy in use, hartree."""
        return self.energies_hartree.get(self.energy_kind)

    @property
    def level_of_energy(self) -> Level | None:
        """The level of theory of the energy in use."""
        return self.level if self.energy_source is None else self.energy_level

    @property
    def level_text(self) -> str:
        """The level as chemists write it, ``CCSD(T)/cc-pVTZ//B3LYP/6-31G*`` when energy and geometry have two."""
        unknown = "level of theory not printed"
        own = self.level.label if self.level else unknown
        if self.energy_source is None:
            return own
        return f"{self.energy_level.label if self.energy_level else unknown}//{own}"

    @property
    def n_imaginary(self) -> int:
        """Number of imaginary modes."""
        return int(np.count_nonzero(self.wavenumbers_cm1 < 0.0))

    @property
    def mass_u(self) -> float:
        """Molecular mass, u."""
        return float(self.masses_u.sum())

    @property
    def has_thermochemistry(self) -> bool:
        """Whether the output carries all that a partition function needs: modes, or a single atom."""
        return self.is_atom or self.wavenumbers_cm1.size > 0

    def but(self, **changes: Any) -> Molecule:
        """A copy with some fields changed."""
        return replace(self, **changes)
