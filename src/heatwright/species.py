"""From outputs to the model of a species: what is read, with which choices, and what is refused on the way.

Imports are inside the functions, so that commands may name :class:`Reading` without them.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from heatwright.molecule import Molecule
    from heatwright.partition.choices import ModelOptions
    from heatwright.partition.model import ThermoModel
    from heatwright.partition.rigid import RigidBody
    from heatwright.structure.isotopes import Isotope


@dataclass(frozen=True, slots=True)
class Reading:
    """How an output is to be read: which job, values that replace its own, isotopes, and what is accepted.

    torsions : whether force constants are wanted, for torsions to be projected out of them.
    """

    job: int | None = None
    charge: int | None = None
    multiplicity: int | None = None
    isotopes: tuple[Isotope, ...] = ()
    accept: tuple[str, ...] = ()
    accept_imaginary_cm1: float = 0.0
    energy: str | None = None
    torsions: bool = False


Reader = Callable[..., "Molecule"]
"""What may take the place of :func:`heatwright.reading.outputs.read_output`, with the same arguments."""


def usable_molecule(path: str, reading: Reading, read: Reader | None = None) -> Molecule:
    """The molecule of an output that a model can be built on; raises Refused with every reason why not."""
    from heatwright.findings import Refused, refusals
    from heatwright.reading.soundness import no_thermochemistry

    if read is None:
        from heatwright.reading.outputs import read_output

        read = read_output
    molecule = read(
        path,
        job=reading.job,
        charge=reading.charge,
        multiplicity=reading.multiplicity,
        accept=reading.accept,
        accept_imaginary_cm1=reading.accept_imaginary_cm1,
        with_hessian=bool(reading.isotopes) or reading.torsions,
    )
    if refusals(molecule.findings):
        raise Refused(molecule.findings)
    missing = no_thermochemistry(molecule)
    if missing:
        raise Refused((*missing, *molecule.findings))
    if reading.energy is not None:
        from heatwright.reading.single_point import with_energy

        other = read(reading.energy, charge=reading.charge, multiplicity=reading.multiplicity, accept=reading.accept)
        molecule = with_energy(molecule, other)
    if not reading.isotopes:
        return molecule
    from heatwright.structure.isotopes import with_isotopes

    return with_isotopes(molecule, reading.isotopes)


def usable_species(
    files: Sequence[tuple[str, str | None]],
    reading: Reading,
    options: ModelOptions,
    *,
    trust_levels: bool = False,
    for_entry: bool = False,
    read: Reader | None = None,
    rigid: RigidBody | None = None,
) -> ThermoModel:
    """The model of an output and of further conformers, each a file with that of its energy or None; raises Refused.

    for_entry : refuse what an entry must not be made of as well.
    read, rigid : what reads an output and what finds its rotor and symmetry, for callers that remember both.
    """
    from dataclasses import replace

    from heatwright.findings import Refused
    from heatwright.partition.model import build_model
    from heatwright.partition.rigid import rigid_body
    from heatwright.reading.acceptance import unfit_for_entry

    models = []
    for path, energy in files:
        try:
            own = reading if energy == reading.energy else replace(reading, energy=energy)
            molecule = usable_molecule(path, own, read)
            models.append(build_model(molecule, options, rigid=rigid or rigid_body))
            if for_entry and (unfit := unfit_for_entry(molecule, reading.accept)):
                raise Refused(unfit)
        except Refused as error:
            raise Refused(f.at(path) for f in error.findings) from error
    if len(models) == 1:
        return models[0]
    from heatwright.partition.mixing import mixture_model

    return mixture_model(models, trust_levels=trust_levels)
