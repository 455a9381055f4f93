"""The routes to an enthalpy of formation, and the choice among them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, get_args

from heatwright.findings import Refused, refuse
from heatwright.formation.atomization import Atoms, formation_by_atomization
from heatwright.formation.formation import Formation, GivenEnthalpy, formation_given
from heatwright.partition.model import ThermoModel

Route = Literal["given", "atomization", "reaction", "network", "best"]
ROUTES: tuple[str, ...] = get_args(Route)


@dataclass(frozen=True, eq=False, kw_only=True)
class RouteRequest:
    """What is at hand for one species' enthalpy of formation, and which way to go.

    route : None takes what is given, else the atoms.
    given : the enthalpy the user states, with its source.   atoms : atom outputs.
    trust_levels : combine energies although levels or programs differ.
    """

    route: Route | None = None
    given: tuple[GivenEnthalpy, str | None] | None = None
    atoms: Atoms | None = None
    trust_levels: bool = False


def formation_of(model: ThermoModel, request: RouteRequest) -> Formation:
    """The enthalpy of formation of a model by the route that was asked for; raises Refused."""
    if request.given is not None and request.route in (None, "given"):
        enthalpy, source = request.given
        return formation_given(enthalpy, source, model.composition, model.h298_minus_h0_kJ_mol)
    if request.atoms is None:
        raise Refused(
            [
                refuse(
                    "no-formation",
                    "there is no enthalpy of formation for the entry's H",
                    expected='--dHf298 "VALUE kJ/mol" --source TEXT, or --atoms DIR with outputs of the atoms '
                    f"{', '.join(model.composition)} at the same level",
                    action="`heatwright table` shows the functions that need none.",
                )
            ]
        )
    return formation_by_atomization(model, request.atoms, trust_levels=request.trust_levels)
