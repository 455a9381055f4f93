"""From what tables state to one species: defaults below its own values, and what contradicts itself."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Any, Final

from heatwright.findings import Finding, Refused, refuse
from heatwright.project.keys import KEYS
from heatwright.project.manifest_types import (
    FitChoice,
    FormationChoice,
    ModelChoice,
    OutputFiles,
    ReadingChoice,
    ReferenceFolders,
    SpeciesRequest,
)
from heatwright.project.tables import CODE, Given, Stated

FOLDERS: Final = tuple(key.name for key in KEYS if key.field.startswith("folders."))
"""The keys that say where atoms and references are."""
_FACTORS: Final = ("frequency-scale", "zpe-scale")


def with_level(stated: Stated, levels: Mapping[str, tuple[str, Stated]], faults: list[Finding]) -> Stated:
    """A table with the folders of the level that it names in the place of the name."""
    named = stated.get("level")
    if named is None:
        return stated
    rest = {name: given for name, given in stated.items() if name != "level"}
    beside = next((stated[name] for name in FOLDERS if name in stated), None)
    if beside is not None:
        words = f"level {named.value} says where atoms and references are, and this table says it as well"
        faults.append(refuse(CODE, words, where=beside.where, expected="one of them"))
    if named.value not in levels:
        known = f"one of {', '.join(levels)}" if levels else f"a table [levels.{named.value}]"
        faults.append(refuse(CODE, f"there is no level {named.value!r}", where=named.where, expected=known))
        return rest
    of_level = levels[named.value][1]
    return {**rest, **{name: of_level.get(name, Given(None, named.where)) for name in FOLDERS}}


def over(own: Stated, inherited: Stated) -> Stated:
    """What holds for a table below another one: its own values, and those others that its own leave standing."""
    return {**{name: given for name, given in inherited.items() if name not in _displaced(own, inherited)}, **own}


def _displaced(own: Stated, inherited: Stated) -> set[str]:
    """The inherited keys that make no sense beside a table's own."""
    gone: set[str] = set()
    if "scale" in own or _on(own, "anharmonic"):
        gone |= {"scale", "anharmonic", *_FACTORS}
    if any(name in own for name in _FACTORS):
        gone |= {"scale", "anharmonic"}
    if "low-modes" in own:
        kind = own["low-modes"].value
        gone |= {"cutoff"} if kind == "harmonic" else set()
        gone |= {"averaging-moment"} if kind != "interpolate" else set()
    route = inherited.get("route")
    if route is not None and "route" not in own:
        kept = {"dHf298": ("given", "best"), "reaction": ("reaction", "best")}
        gone |= {"route" for name, routes in kept.items() if name in own and route.value not in routes}
    return gone


def _on(stated: Stated, name: str) -> bool:
    return name in stated and stated[name].value is True


@dataclass(frozen=True, slots=True)
class Draft:
    """A species before its choices are made: name, place, what its table states, and what holds beside that."""

    name: str
    where: str
    own: Stated
    inherited: Stated


def species_request(draft: Draft) -> SpeciesRequest:
    """The species with every choice; raises Refused with every contradiction."""
    stated = over(draft.own, draft.inherited)
    faults = [*contradictions(stated), *_of_species(draft, stated)]
    if faults:
        raise Refused(dict.fromkeys(faults))
    fields: dict[str, dict[str, Any]] = {}
    for key in KEYS:
        if key.field and key.name in stated and stated[key.name].value is not None:
            part, _, name = key.field.rpartition(".")
            fields.setdefault(part, {})[name] = stated[key.name].value
    formation = FormationChoice(**fields.get("formation", {}), folders=ReferenceFolders(**fields.get("folders", {})))
    return SpeciesRequest(
        name=draft.name,
        files=_files(stated),
        reading=ReadingChoice(**fields.get("reading", {})),
        model=ModelChoice(**fields.get("model", {})),
        fit=_fit(fields.get("fit", {})),
        formation=formation,
        where=draft.where,
        **fields.get("", {}),
    )


def alike(first: SpeciesRequest, draft: Draft) -> SpeciesRequest:
    """The species of a draft that differs from that of *first* in its name and its output alone."""
    return replace(first, name=draft.name, files=_files(over(draft.own, draft.inherited)), where=draft.where)


def _files(stated: Stated) -> tuple[OutputFiles, ...]:
    output = stated["output"].value
    energy = stated["energy"].value if "energy" in stated else None
    further = stated["conformers"].value if "conformers" in stated else ()
    own = {output.path} | ({energy.path} if energy else set())
    own |= {c.files.output.path for c in further if not c.globbed}
    kept = tuple(c.files for c in further if not (c.globbed and c.files.output.path in own))
    return (OutputFiles(output, energy), *kept)


def _fit(fields: Mapping[str, Any]) -> FitChoice:
    rest = {name: value for name, value in fields.items() if name != "range"}
    if "range" in fields:
        rest["t_low_K"], rest["t_high_K"] = fields["range"]
    return FitChoice(**rest)


def contradictions(stated: Stated) -> Iterator[Finding]:
    """What cannot hold together in a table with its defaults."""
    yield from _scaling(stated)
    yield from _low_modes(stated)
    if "range" in stated or "common" in stated:
        yield from _temperatures(stated)


def _scaling(stated: Stated) -> Iterator[Finding]:
    factors = [stated[name] for name in _FACTORS if name in stated]
    if "scale" in stated and factors:
        words = 'scale = "published" chooses both factors, and factors are stated as well'
        yield refuse(CODE, words, where=factors[0].where, expected="one of the two")
    scaled = [*factors, *([stated["scale"]] if "scale" in stated else [])]
    if _on(stated, "anharmonic") and scaled:
        words = "scale factors are for harmonic wavenumbers, and anharmonic is true"
        yield refuse(CODE, words, where=stated["anharmonic"].where, expected="one of the two")


def _low_modes(stated: Stated) -> Iterator[Finding]:
    kind = stated["low-modes"].value if "low-modes" in stated else "harmonic"
    for name, needed in (("cutoff", ("floor", "interpolate")), ("averaging-moment", ("interpolate",))):
        if name in stated and kind not in needed:
            words = f"{name} is for low-modes {' or '.join(needed)}, and low-modes is {kind}"
            yield refuse(CODE, words, where=stated[name].where)


def _temperatures(stated: Stated) -> Iterator[Finding]:
    from heatwright.polynomial.fit import check_temperatures

    fit = _fit({"t_common_K" if n == "common" else n: stated[n].value for n in ("range", "common") if n in stated})
    try:
        check_temperatures(fit.t_low_K, fit.t_common_K, fit.t_high_K)
    except Refused as error:
        first = stated["range"] if "range" in stated else stated["common"]
        yield from (f.at(first.where) for f in error.findings)


def _of_species(draft: Draft, stated: Stated) -> Iterator[Finding]:
    own, where = draft.own, draft.where
    if "output" not in own:
        yield refuse(CODE, f"species {draft.name} has no output", where=where, expected='output = "FILE"')
    alone = [name for name in _FACTORS if name in own]
    other = [n for n in ("scale", "anharmonic") if n in draft.inherited and draft.inherited[n].value]
    if len(alone) == 1 and other:
        missing = next(name for name in _FACTORS if name not in own)
        words = f"{alone[0]} takes the place of {other[0]} in [mechanism], and {missing} is not stated"
        yield refuse(CODE, words, where=own[alone[0]].where, expected=f"both factors ({missing} = 1 for none)")
    overruled = [name for name in ("symmetry-number", "optical-isomers") if name in own]
    if "symmetry-reason" in own and not overruled:
        words = "symmetry-reason is given without symmetry-number or optical-isomers"
        yield refuse(CODE, words, where=own["symmetry-reason"].where)
    if "symmetry-number" in own and "conformers" in own:
        words = "symmetry-number cannot be said for several conformers at once; each has its own"
        yield refuse(CODE, words, where=own["symmetry-number"].where)
    if _on(stated, "anharmonic") and "torsions" in own:
        words = "a torsion is projected out of harmonic modes, and anharmonic is true"
        yield refuse(CODE, words, where=own["torsions"].where, expected="one of the two")
    yield from _ways(draft, stated)


def _ways(draft: Draft, stated: Stated) -> Iterator[Finding]:
    """What is missing on the way to the enthalpy of formation, or too much."""
    own, route = draft.own, stated.get("route")
    references = _value(stated, "references")
    if "source" in own and "dHf298" not in own:
        words = "source is where dHf298 is from, and there is no dHf298"
        yield refuse(CODE, words, where=own["source"].where)
    if "reaction" in own and references is None:
        words = "the reaction needs outputs of its reference species"
        yield refuse(CODE, words, where=own["reaction"].where, expected='references = "FOLDER"')
    if route is None:
        if "reaction" in own and "dHf298" in own:
            words = "dHf298 and reaction are two ways to one value"
            yield refuse(CODE, words, where=own["reaction"].where, action="Choose by route.")
        return
    if "reaction" in own and route.value not in ("reaction", "best"):
        words = f"a reaction is for route reaction or best, and route is {route.value}"
        yield refuse(CODE, words, where=own["reaction"].where)
    if route.value == "given" and "dHf298" not in own:
        words = f"species {draft.name} has no dHf298, and its route is given ({route.where})"
        yield refuse(CODE, words, where=draft.where, expected='dHf298 = "VALUE kJ/mol"')
    if route.value == "atomization" and references is None and _value(stated, "atoms") is None:
        yield refuse(CODE, "route atomization needs the atoms' outputs", where=route.where, expected='atoms = "FOLDER"')
    if route.value in ("reaction", "network", "best") and references is None:
        words = f"route {route.value} needs outputs of reference species"
        yield refuse(CODE, words, where=route.where, expected='references = "FOLDER"')


def _value(stated: Stated, name: str) -> Any:
    return stated[name].value if name in stated else None
