"""From the outputs of a species to its model: what has to be right about them, conformers, energies of other files."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace

from heatwright.findings import Refused, refusals
from heatwright.molecule import Molecule
from heatwright.partition.choices import ModelOptions
from heatwright.partition.model import ThermoModel, build_model
from heatwright.partition.rigid import RigidBody, rigid_body
from heatwright.reading.acceptance import unfit_for_entry
from heatwright.reading.outputs import read_output
from heatwright.reading.request import Reading
from heatwright.reading.single_point import with_energy
from heatwright.reading.soundness import no_thermochemistry
from heatwright.structure.isotopes import with_isotopes

Reader = Callable[..., Molecule]
"""What takes the place of :func:`heatwright.reading.outputs.read_output`, with the same arguments."""


def usable_molecule(path: str, reading: Reading, read: Reader = read_output) -> Molecule:
    """The molecule of an output that a model can be built on; raises Refused with every reason why not."""
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
        other = read(reading.energy, charge=reading.charge, multiplicity=reading.multiplicity, accept=reading.accept)
        molecule = with_energy(molecule, other)
    return with_isotopes(molecule, reading.isotopes)


def usable_species(
    files: Sequence[tuple[str, str | None]],
    reading: Reading,
    options: ModelOptions,
    *,
    trust_levels: bool = False,
    for_entry: bool = False,
    read: Reader = read_output,
    rigid: RigidBody = rigid_body,
) -> ThermoModel:
    """The model of an output and of further conformers, each a file with that of its energy or None; raises Refused.

    for_entry : refuse what an entry must not be made of as well.
    read, rigid : the functions that read an output and find its rotor and symmetry, for callers that remember them.
    """
    models = []
    for path, energy in files:
        try:
            molecule = usable_molecule(path, replace(reading, energy=energy), read)
            models.append(build_model(molecule, options, rigid=rigid))
            if for_entry and (unfit := unfit_for_entry(molecule, reading.accept)):
                raise Refused(unfit)
        except Refused as error:
            raise Refused(f.at(path) for f in error.findings) from error
    if len(models) == 1:
        return models[0]
    from heatwright.partition.mixing import mixture_model

    return mixture_model(models, trust_levels=trust_levels)
