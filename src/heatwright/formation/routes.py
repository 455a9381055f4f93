"""The routes to an enthalpy of formation, and the choice among them."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from math import hypot, inf
from typing import TYPE_CHECKING, Final, Literal, get_args

from heatwright.findings import Finding, Refused, note, refusals, refuse, warn
from heatwright.formation.choices import PLAIN, EnergyChoices, atomized
from heatwright.formation.formation import Electron, Formation, GivenEnthalpy, formation_given
from heatwright.formation.references import atom_reference

if TYPE_CHECKING:
    from heatwright.formation.atomization import Atoms
    from heatwright.formation.reference_set import ReferenceSet
    from heatwright.partition.model import ThermoModel

Route = Literal["given", "atomization", "reaction", "network", "best"]
ROUTES: Final[tuple[str, ...]] = get_args(Route)


@dataclass(frozen=True, eq=False, kw_only=True)
class RouteRequest:
    """What is at hand for one species' enthalpy of formation, and which way to go.

    route : None takes what is given, else the best of the routes through references when there are any, else the atoms.
    name : what the entry is called, by which a reaction may name it.
    given : the enthalpy the user states, with its source.   atoms : atom outputs.
    references : reference species (with atoms).   reaction : the user's reaction; one is looked for when None.
    choices : about energies and reference values, for every route the same.
    given_electron : the electron convention of an ion's given enthalpy, that of the choices unless said.
    """

    route: Route | None = None
    name: str = ""
    given: tuple[GivenEnthalpy, str | None] | None = None
    atoms: Atoms | None = None
    references: ReferenceSet | None = None
    reaction: str | None = None
    choices: EnergyChoices = PLAIN
    given_electron: Electron | None = None

    @property
    def chosen(self) -> Route | None:
        """The route that is meant; None when there is no way at all."""
        if self.route is not None:
            return self.route
        if self.given is not None:
            return "given"
        if self.reaction is not None:
            return "reaction"
        if self.references is not None:
            return "best"
        return "atomization" if self.atoms is not None else None


def formation_of(model: ThermoModel, request: RouteRequest) -> Formation:
    """The enthalpy of formation of a model by the route that was asked for; raises Refused."""
    route = request.chosen
    if route is None:
        raise Refused([_no_way(model)])
    if route == "best":
        return _best(model, request)
    made = _BY_ROUTE[route](model, request)
    if request.given is None or route == "given":
        return made
    words = f"the enthalpy of formation that is given ({request.given[0].text}) is not used, as the route is {route}"
    return replace(made, findings=(*made.findings, note("route", f"{words}, which gives {_value(made)}")))


def _no_way(model: ThermoModel) -> Finding:
    return refuse(
        "no-formation",
        "there is no enthalpy of formation for the entry's H",
        expected='--dHf298 "VALUE kJ/mol" --source TEXT, or --atoms DIR with outputs of the atoms '
        f"{', '.join(model.composition)} at the same level",
        action="`heatwright table` shows the functions that need none.",
    )


def _given(model: ThermoModel, request: RouteRequest) -> Formation:
    if request.given is None:
        raise Refused([refuse("no-formation", "no enthalpy of formation is given", expected='--dHf298 "VALUE kJ/mol"')])
    enthalpy, source = request.given
    return formation_given(
        enthalpy,
        source,
        model.composition,
        model.h298_minus_h0_kJ_mol,
        charge=model.molecule.charge or 0,
        electron=request.choices.electron,
        stated_electron=request.given_electron,
    )


def _atomization(model: ThermoModel, request: RouteRequest) -> Formation:
    atoms = request.atoms
    if atoms is None and request.references is not None:
        atoms = request.references.atoms
    if atoms is None:
        raise Refused([_no_way(model)])
    made = atomized(model, atoms, request.choices)
    if model.molecule.is_atom:
        reference = atom_reference(next(iter(model.composition)))
        return replace(made, u95_kJ_mol=reference.u95_kJ_mol if reference else None)
    return made if request.references is None else _with_expected_error(made, model, request, request.references)


def _with_expected_error(
    made: Formation, model: ThermoModel, request: RouteRequest, references: ReferenceSet
) -> Formation:
    """Atomization with the uncertainty that the references at its level let expect, where there are enough of them."""
    from heatwright.formation.error_model import features, own_variance, shared_covariance
    from heatwright.formation.phrases import COVERAGE
    from heatwright.formation.usable import usable_references
    from heatwright.structure.bond_orders import bonding

    try:
        usable = usable_references(model, references, request.choices)
        mine = features([bonding(model.molecule)])
    except Refused:
        return made
    if not usable.scales.fitted:
        return made
    variance = shared_covariance(mine, mine, usable.scales)[0, 0] + own_variance(mine, usable.scales)[0]
    kept = tuple(f for f in made.findings if f.code != "no-uncertainty")
    return replace(made, u95_kJ_mol=COVERAGE * float(variance) ** 0.5, findings=kept)


def _reaction(model: ThermoModel, request: RouteRequest) -> Formation:
    from heatwright.formation.by_reaction import formation_by_reaction

    references = _references(request)
    return formation_by_reaction(model, references, request.reaction, request.choices, name=request.name)


def _network(model: ThermoModel, request: RouteRequest) -> Formation:
    from heatwright.formation.by_network import formation_by_network

    return formation_by_network(model, _references(request), request.choices)


def _references(request: RouteRequest) -> ReferenceSet:
    if request.references is None:
        raise Refused(
            [
                refuse(
                    "no-formation",
                    f"the route {request.chosen} needs reference species",
                    expected="--references DIR with outputs of reference species at the same level",
                    action="`heatwright references` lists the species that can serve.",
                )
            ]
        )
    return request.references


_BY_ROUTE: Final[dict[str, Callable[[ThermoModel, RouteRequest], Formation]]] = {
    "given": _given,
    "atomization": _atomization,
    "reaction": _reaction,
    "network": _network,
}


_PASSABLE: Final = frozenset(
    {"references-few", "no-reaction", "bonding-unclear", "fragments", "no-geometry", "atom-missing", "no-reference"}
)
"""What keeps a species from one route and not from another."""


def _best(model: ThermoModel, request: RouteRequest) -> Formation:
    """The route of smallest stated uncertainty, with the others beside it; raises Refused when none can be gone."""
    made: list[Formation] = []
    failed: list[tuple[str, Refused]] = []
    for route in _routes_for(model, request):
        try:
            made.append(_BY_ROUTE[route](model, request))
        except Refused as error:
            if any(f.code not in _PASSABLE for f in refusals(error.findings)):
                raise  # something is wrong with what was handed in, and another route would only hide it
            failed.append((route, error))
    if not made:
        raise Refused(dict.fromkeys(f for _, error in failed for f in error.findings))
    best = min(made, key=lambda f: inf if f.u95_kJ_mol is None else f.u95_kJ_mol)
    others = tuple(f for f in made if f is not best)
    said = (_side_by_side(best, others), *_impassable(failed), *_disagreements((best, *others)))
    return replace(best, alternatives=others, findings=(*best.findings, *said))


def _routes_for(model: ThermoModel, request: RouteRequest) -> tuple[str, ...]:
    """The routes worth trying; an atom by atomization is the reference value itself."""
    given = ("given",) if request.given is not None else ()
    return (*given, "atomization") if model.molecule.is_atom else (*given, "atomization", "reaction", "network")


def _side_by_side(best: Formation, others: tuple[Formation, ...]) -> Finding:
    words = ", ".join(f"{f.method} {_value(f)}" for f in others) or "no other route could be gone"
    return note(
        "route", f"route {best.method}, {_value(best)}, has the smallest stated uncertainty; beside it: {words}"
    )


def _value(f: Formation) -> str:
    spread = (
        "without an uncertainty" if f.u95_kJ_mol is None else f"+/- {f.u95_kJ_mol:.{0 if f.u95_kJ_mol >= 10 else 1}f}"
    )
    return f"{f.dHf298_kJ_mol:.1f} {spread} kJ/mol"


def _impassable(failed: list[tuple[str, Refused]]) -> list[Finding]:
    return [note("route", f"route {route} could not be gone: {error.findings[0].found}") for route, error in failed]


def _disagreements(made: tuple[Formation, ...]) -> list[Finding]:
    """Pairs of routes that differ by more than their joint 95 % uncertainty."""
    stated = [f for f in made if f.u95_kJ_mol is not None]
    return [
        warn(
            "routes-disagree",
            f"{a.method} and {b.method} differ by {abs(a.dHf298_kJ_mol - b.dHf298_kJ_mol):.1f} kJ/mol, more than their "
            f"joint 95 % uncertainty of {hypot(a.u95_kJ_mol or 0.0, b.u95_kJ_mol or 0.0):.1f}",
            action="Look at the ledgers (-v): a reference, a state or an energy may be wrong.",
        )
        for i, a in enumerate(stated)
        for b in stated[i + 1 :]
        if abs(a.dHf298_kJ_mol - b.dHf298_kJ_mol) > hypot(a.u95_kJ_mol or 0.0, b.u95_kJ_mol or 0.0)
    ]
