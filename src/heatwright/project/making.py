"""From a species of the manifest to its entry, with everything that is read coming out of the library."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from heatwright.errors import UsageError
from heatwright.findings import Finding, Refused, refuse
from heatwright.project.manifest_types import (
    FitChoice,
    FormationChoice,
    ModelChoice,
    ProjectPath,
    ReferenceFolders,
    SpeciesRequest,
)
from heatwright.project.shelf import Shelf, route_of
from heatwright.project.tasks import ReadTask

if TYPE_CHECKING:
    from heatwright.entry import Entry, EntryRequest, FitOptions
    from heatwright.formation.choices import EnergyChoices
    from heatwright.formation.formation import Formation
    from heatwright.formation.reference_set import ReferenceSet
    from heatwright.molecule import Molecule
    from heatwright.partition.choices import ModelOptions
    from heatwright.partition.model import ThermoModel
    from heatwright.project.library import Library
    from heatwright.species import Reading

Say = Callable[[Finding], None]


def tasks_of(request: SpeciesRequest) -> Iterator[ReadTask]:
    """What has to be read for one species, references apart."""
    for files in request.files:
        yield _output_task(request, files.output)
        if files.energy is not None:
            yield _energy_task(request, files.energy)
    for torsion in request.model.torsions:
        if torsion.scan is not None:
            yield ReadTask(path=torsion.scan.path, torsion=torsion.atoms)


def _output_task(request: SpeciesRequest, path: ProjectPath) -> ReadTask:
    r = request.reading
    return ReadTask(
        path=path.path,
        job=r.job,
        charge=r.charge,
        multiplicity=r.multiplicity,
        accept=r.accept,
        accept_imaginary_cm1=r.accept_imaginary_cm1,
        with_hessian=bool(r.isotopes or request.model.torsions),
        bodies=() if r.isotopes else ((request.model.masses, request.model.symmetry_tolerance_A),),
    )


def _energy_task(request: SpeciesRequest, path: ProjectPath) -> ReadTask:
    r = request.reading
    return ReadTask(path=path.path, charge=r.charge, multiplicity=r.multiplicity, accept=r.accept)


class Maker:
    """Makes entries; what many species share (options, references) is made once."""

    def __init__(self, library: Library, shelves: Mapping[ReferenceFolders, Shelf], say: Say) -> None:
        self._library = library
        self._shelves = shelves
        self._say = say
        self._options: dict[ModelChoice, ModelOptions] = {}
        self._fits: dict[FitChoice, FitOptions] = {}
        self._readings: dict[object, Reading] = {}
        self._energies: dict[object, EnergyChoices] = {}
        self._own: dict[ProjectPath, Any] = {}

    def model(self, request: SpeciesRequest) -> ThermoModel:
        """The model of one species.  Raises Refused."""
        try:
            self._fit_options(request.fit)
            return self._model(request)
        except UsageError as error:
            raise Refused([refuse("manifest-wrong", str(error), where=request.where)]) from error

    def evaluate(self, made: Iterable[tuple[SpeciesRequest, ThermoModel]]) -> None:
        """Evaluate models at the temperatures at which their entries need them, all together where that can be said."""
        from heatwright.entry import evaluation_grid
        from heatwright.partition.model import evaluate_together

        alike: dict[FitChoice, list[ThermoModel]] = {}
        for request, model in made:
            alike.setdefault(request.fit, []).append(model)
        for choice, models in alike.items():
            grid = evaluation_grid(self._fit_options(choice))
            if grid is not None:
                evaluate_together(models, grid)

    def ingredients(self, request: SpeciesRequest, model: ThermoModel) -> EntryRequest:
        """The model and the enthalpy of formation of one species, ready to be fitted.  Raises Refused."""
        from heatwright.entry import EntryRequest

        options = self._fit_options(request.fit)
        try:
            formation = self._formation(request, model)
        except UsageError as error:
            raise Refused([refuse("manifest-wrong", str(error), where=request.where)]) from error
        comments = request.comments
        if request.model.symmetry_reason:
            comments = (f"reason for the symmetry: {request.model.symmetry_reason}", *comments)
        if request.note:
            comments = (*comments, f"note: {request.note}")
        return EntryRequest(request.name, model, formation, options, request.note, comments)

    def _fit_options(self, choice: FitChoice) -> FitOptions:
        from heatwright.polynomial.fit import check_temperatures
        from heatwright.project.conversion import fit_options

        if choice not in self._fits:
            options = fit_options(choice)
            check_temperatures(options.t_low_K, options.t_common_K, options.t_high_K)
            self._fits[choice] = options
        return self._fits[choice]

    def _reading(self, request: SpeciesRequest) -> Reading:
        from heatwright.project.conversion import species_reading

        key = (request.reading, bool(request.model.torsions))
        if key not in self._readings:
            self._readings[key] = species_reading(request)
        return self._readings[key]

    def _model(self, request: SpeciesRequest) -> ThermoModel:
        from heatwright.species import usable_species

        tasks = {path.shown: task for path, task in self._readable(request)}

        def read(shown: str, **_: Any) -> Molecule:
            return self._library.molecule(tasks[shown], shown)

        return usable_species(
            [(f.output.shown, None if f.energy is None else f.energy.shown) for f in request.files],
            self._reading(request),
            self._model_options(request.model),
            trust_levels=request.formation.trust_levels,
            for_entry=True,
            read=read,
            rigid=self._library.body,
        )

    def _readable(self, request: SpeciesRequest) -> Iterator[tuple[ProjectPath, ReadTask]]:
        for files in request.files:
            yield files.output, _output_task(request, files.output)
            if files.energy is not None:
                yield files.energy, _energy_task(request, files.energy)

    def _model_options(self, choice: ModelChoice) -> ModelOptions:
        from heatwright.project.conversion import model_options

        plain = replace(choice, torsions=()) if choice.torsions else choice
        if plain not in self._options:
            self._options[plain] = model_options(plain)
        if not choice.torsions:
            return self._options[plain]
        from heatwright.reading.torsion_scans import read_torsion

        torsions = tuple(
            read_torsion(t.barrier)
            if t.scan is None
            else self._library.scan(ReadTask(path=t.scan.path, torsion=t.atoms), t.scan.shown)
            for t in choice.torsions
        )
        return replace(self._options[plain], torsions=torsions)

    def _formation(self, request: SpeciesRequest, model: ThermoModel) -> Formation:
        from heatwright.formation.routes import RouteRequest, formation_of
        from heatwright.project.conversion import stated_enthalpy

        choice, shelf = request.formation, self._shelves[request.formation.folders]
        needed = route_of(choice) != "given"
        own = self._own_references(choice)
        asked = RouteRequest(
            route=choice.route,
            name=request.name,
            given=stated_enthalpy(choice),
            atoms=shelf.atoms() if needed else None,
            references=self._references(request, own) if needed else None,
            reaction=choice.reaction,
            choices=self._energy_choices(request, own),
        )
        return formation_of(model, asked)

    def _references(self, request: SpeciesRequest, own: Any) -> ReferenceSet | None:
        shelf = self._shelves[request.formation.folders]
        if shelf.folders.references is None:
            return None
        return shelf.reference_set(own, self._model_options(request.model), self._say)

    def _own_references(self, choice: FormationChoice) -> Any:
        table = choice.folders.reference_table
        if table is None:
            return ()
        from heatwright.formation.species_references import read_references

        if table not in self._own:
            self._own[table] = read_references(_here(table).path)
        return self._own[table]

    def _energy_choices(self, request: SpeciesRequest, own: Any) -> EnergyChoices:
        from heatwright.project.conversion import energy_choices

        choice = request.formation
        key = (choice.folders, choice.trust_levels, choice.spin_orbit, choice.electron, request.reading.accept)
        if key not in self._energies:
            folders = replace(
                choice.folders,
                zero_kelvin=_here(choice.folders.zero_kelvin) if choice.folders.zero_kelvin else None,
                corrections=_here(choice.folders.corrections) if choice.folders.corrections else None,
            )
            self._energies[key] = energy_choices(replace(choice, folders=folders), own, request.reading.accept)
        return self._energies[key]


def _here(path: ProjectPath) -> ProjectPath:
    """The path as it is shown, for words that name it; the build works in the manifest's folder."""
    same = os.path.exists(path.shown) and os.path.realpath(path.shown) == os.path.realpath(path.path)
    return ProjectPath(path.shown, path.shown) if same else path


def entries_of(requests: Sequence[EntryRequest]) -> list[Entry | Refused]:
    """The entries of many species, fitted together; a bug in one of them does not stop the others."""
    from heatwright.entry import make_entries

    try:
        return make_entries(requests)
    except Exception:  # each alone shows which one it is
        return [_alone(request) for request in requests]


def _alone(request: EntryRequest) -> Entry | Refused:
    from heatwright.entry import make_entries

    try:
        return make_entries([request])[0]
    except Exception as error:
        return broken(error)


def broken(error: Exception) -> Refused:
    """An error that should not happen, as a refusal of the species it happened to."""
    words = f"making it ended in an error that should not happen ({type(error).__name__}: {error})"
    return Refused([refuse("task-broke", words, action="Please report it with the file.")])
