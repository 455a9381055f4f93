"""Species to be shown, made from the sample outputs, with every kind of figure among them."""

from __future__ import annotations

import json
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np

from heatwright import (
    ModelOptions,
    RouteRequest,
    build_model,
    collect_references,
    formation_of,
    mixture_model,
    parse_uncertainties,
    read_output,
    read_torsion,
    reference_species,
)
from heatwright.constants import GAS_CONSTANT_J_MOL_K
from heatwright.entry import Entry, make_entry
from heatwright.formation.atomization import collect_atoms
from heatwright.formation.formation import parse_enthalpy
from heatwright.report.changes import changes_of, set_of
from heatwright.report.species import Species
from heatwright.report.taking import species_of
from heatwright.resources import sample_outputs
from heatwright.writing.document import species_document, whole_document

SAMPLES = Path(str(sample_outputs()))
CONFORMERS = Path(__file__).parent / "data" / "conformers"
SCALES = {"frequency_scale": 0.9614, "zpe_scale": 0.9806}


def _given(value: str = "-200.7 +/- 0.2 kJ/mol") -> RouteRequest:
    return RouteRequest(given=(parse_enthalpy(value), "ATcT 1.112"))


@cache
def _outputs() -> tuple[list[Any], list[Any]]:
    """Molecules and atoms of the sample outputs."""
    molecules = [read_output(str(f), with_hessian=True) for f in sorted(SAMPLES.glob("*.out"))]
    return molecules, [read_output(str(f)) for f in sorted((SAMPLES / "atoms").iterdir()) if f.suffix == ".out"]


@cache
def _references() -> Any:
    molecules, atoms = _outputs()
    return collect_references(molecules, collect_atoms(tuple(atoms)), reference_species(), ModelOptions(**SCALES))


@cache
def entries() -> dict[str, Entry]:
    """A hindered rotor, a scan, conformers with uncertainties, routes through references, an atom, a small molecule."""
    molecules, atoms = _outputs()
    plain, references = ModelOptions(**SCALES), _references()
    by_name = {Path(m.source.file).stem: m for m in molecules}
    made: dict[str, Entry] = {}

    def add(name: str, model: Any, request: RouteRequest) -> None:
        made[name] = make_entry(name, model, formation_of(model, request))

    rotor = ModelOptions(**SCALES, torsions=(read_torsion("3-1-2-4 n=3 V=373.6 cm-1"),))
    add("methanol", build_model(by_name["CH3OH"], rotor), _given())
    add("CH3OCH3", build_model(by_name["CH3OCH3"], plain), RouteRequest(route="best", references=references))
    add("CO2", build_model(by_name["CO2"], plain), RouteRequest(route="atomization", references=references))
    add("H", build_model(atoms[[m.source.file.endswith("H.out") for m in atoms].index(True)]), _given("217.998 kJ/mol"))
    unsure = ModelOptions(frequency_scale=0.9614, uncertainty=parse_uncertainties("default"))
    butane = [build_model(read_output(str(CONFORMERS / f"butane_{k}.toml")), unsure) for k in ("trans", "gauche")]
    add("n-butane", mixture_model(butane), _given("-125.7 kJ/mol"))
    return made


def document_of(entry: Entry) -> dict[str, Any]:
    """The entry's object of the JSON document, as it comes back from a file."""
    made = species_document(entry.name, entry.model, entry.table, entry.findings, entry)
    back: dict[str, Any] = json.loads(json.dumps(made))
    return back


@cache
def shown() -> dict[str, Species]:
    """The same as species to be shown."""
    return {name: species_of(document_of(e), name) for name, e in entries().items()}


def moved(kJ_mol: float) -> dict[str, Any]:
    """What the page shows of a comparison with an older side whose species were all lower by their place times this."""
    old = []
    for i, s in enumerate(shown().values(), start=1):
        step = i * kJ_mol * 1000.0 / GAS_CONSTANT_J_MOL_K
        p = s.polynomial
        assert p is not None
        low, high = ((*a[:5], a[5] - step, a[6]) for a in (p.low, p.high))
        old.append(replace(s, polynomial=replace(p, low=low, high=high)))
    return changes_of(set_of(old, "old"), set_of(list(shown().values()), "new"))


def many(n: int, *, rich: bool = False) -> dict[str, Any]:
    """A document of *n* species of the usual size: those of :func:`entries` over and over, under other names.

    rich : all of them with two torsions and the ledgers of three routes, see :func:`rich_entry`.
    """
    documents = [document_of(e) for e in ([rich_entry()] if rich else entries().values())]
    return whole_document([documents[i % len(documents)] | {"name": f"S{i}"} for i in range(n)], [])


@cache
def rich_entry() -> Entry:
    """Dimethyl ether with two hindered rotors, and reactions, a network and atomization for its ΔfH°."""
    texts = ("4-1-2-3 n=3 V=900 cm-1", "1-2-3-7 n=3 V=900 cm-1")
    rotors = ModelOptions(**SCALES, torsions=tuple(map(read_torsion, texts)))
    model = build_model(read_output(str(SAMPLES / "CH3OCH3.out"), with_hessian=True), rotors)
    return make_entry("CH3OCH3", model, formation_of(model, RouteRequest(route="best", references=_references())))


def places(mark_lines: Any, x: Any, y: Any) -> np.ndarray:
    """Points on a canvas back to the numbers they stand for, linear or logarithmic scales."""

    def back(scale: Any, v: float) -> float:
        share = (v - scale.start) / (scale.end - scale.start)
        if scale.log:
            return float(scale.low * (scale.high / scale.low) ** share)
        return float(scale.low + share * (scale.high - scale.low))

    return np.array([(back(x, a), back(y, b)) for a, b in mark_lines])
