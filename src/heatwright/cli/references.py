"""``heatwright references``: the enthalpies of formation of atoms and species that calculations are set against."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from heatwright.findings import Refused
    from heatwright.formation.references import AtomReference
    from heatwright.formation.species_references import SpeciesReference


@click.command(short_help="Reference enthalpies of formation of atoms and species.")
@click.argument("formula", required=False, metavar="[FORMULA]")
@click.option("--table", metavar="FILE", type=click.Path(), help="A CSV of your own; its values stand before ours.")
@click.option("--json", "as_json", is_flag=True, help="The same for scripts.")
@click.option("-q", "--quiet", is_flag=True, help="Say only what failed.")
def references(formula: str | None, table: str | None, as_json: bool, quiet: bool) -> None:
    """List the reference enthalpies of formation, with their 95 % uncertainties and sources.

    FORMULA (C2H6O or CH3CH2OH, in any order; or a name, such as ethanol) shows its isomers; without it all atoms and
    species are listed.

    \b
    FILE has the columns name, formula, smiles, multiplicity, u95_kJ_mol, source, one or both of dHf0_kJ_mol and
    dHf298_kJ_mol, and if need be charge, cas, words, element_H298_H0_kJ_mol (of an atom: the increment of its element).

    \b
    Examples:
      heatwright references C2H4O
      heatwright references --table mine.csv --json
    """
    from heatwright.cli.reporter import Reporter
    from heatwright.formation.species_references import merged_references, own_atom_references, read_references
    from heatwright.writing.document import JSON_VERSION
    from heatwright.writing.numbers import json_text

    own = read_references(table) if table is not None else ()
    species, findings = merged_references(own)
    atoms = tuple(own_atom_references(own).values())
    if formula is not None:
        species, atoms = _matching(formula, species), tuple(a for a in atoms if a.symbol == formula)
        if not species and not atoms:
            raise _unknown(formula, merged_references(own)[0])
    Reporter(quiet=quiet).findings(table or "", findings)
    if as_json:
        document = {
            "heatwright": JSON_VERSION,
            "atoms": [_atom(a) for a in atoms],
            "species": [_one(s) for s in species],
        }
        click.echo(json_text(document | {"sources": _sources(atoms, species)}))
    else:
        click.echo("\n\n".join(_text(atoms, species)))


def _matching(text: str, species: Sequence[SpeciesReference]) -> tuple[SpeciesReference, ...]:
    """The species of a formula (charge as a sign at its end), else those of that name."""
    wanted = _composition(text)
    by_formula = tuple(s for s in species if wanted == (s.composition, s.charge))
    name = text.lower()
    return by_formula or tuple(s for s in species if name in (s.name.lower(), s.words.lower(), s.cas))


def _composition(text: str) -> tuple[dict[str, int], int] | None:
    from heatwright.elements import parse_formula

    bare = text.rstrip("+-")
    try:
        return parse_formula(bare), text.count("+") - text[len(bare) :].count("-")
    except ValueError:
        return None


def _unknown(text: str, species: Sequence[SpeciesReference]) -> Refused:
    from difflib import get_close_matches

    from heatwright.findings import Refused, refuse

    wanted = _composition(text)
    if wanted is None:
        names = [word for s in species for word in (s.name, s.words) if word]
        near = get_close_matches(text, names, 5, 0.5)
    else:
        formulas = {s.formula: s.composition for s in species}
        near = sorted(formulas, key=lambda f: (_distance(wanted[0], formulas[f]), f))[:5]
    action = f"Near to it are {', '.join(near)}." if near else "`heatwright references` lists all."
    return Refused([refuse("no-reference", f"there is no reference enthalpy of {text!r}", action=action)])


def _distance(one: dict[str, int], other: dict[str, int]) -> int:
    """How many atoms two compositions differ by; a hydrogen counts less than another atom."""
    differences = {e: abs(one.get(e, 0) - other.get(e, 0)) for e in one | other}
    return sum(n if e == "H" else 3 * n for e, n in differences.items())


def _atom(atom: AtomReference) -> dict[str, Any]:
    from heatwright.formation.references import spin_orbit_lowering_kJ_mol

    return {
        "symbol": atom.symbol,
        "dHf0_kJ_mol": atom.dHf0_kJ_mol,
        "u95_kJ_mol": atom.u95_kJ_mol,
        "source": atom.source,
        "reference_state": atom.reference_state,
        "element_H298_minus_H0_kJ_mol": atom.element_H298_H0_kJ_mol,
        "increment_source": atom.increment_source,
        "spin_orbit_lowering_kJ_mol": spin_orbit_lowering_kJ_mol(atom.symbol),
    }


def _one(species: SpeciesReference) -> dict[str, Any]:
    return {
        "name": species.name,
        "words": species.words or None,
        "formula": species.formula,
        "smiles": species.smiles,
        "charge": species.charge,
        "multiplicity": species.multiplicity,
        "dHf0_kJ_mol": species.dHf0_kJ_mol,
        "dHf298_kJ_mol": species.dHf298_kJ_mol,
        "u95_kJ_mol": species.u95_kJ_mol,
        "source": species.source,
        "cas": species.cas or None,
        "own": species.own,
    }


def _sources(atoms: Sequence[AtomReference], species: Sequence[SpeciesReference]) -> dict[str, str]:
    """The publications behind the short names of the built-in sources that occur."""
    from heatwright.resources import data_sources

    known = data_sources("species_formation") | data_sources("atomic_formation")
    labels = dict.fromkeys([*(a.source for a in atoms), *(s.source for s in species)])
    return {label: known[label] for label in labels if label in known}


def _text(atoms: Sequence[AtomReference], species: Sequence[SpeciesReference]) -> list[str]:
    tables = []
    if atoms:
        tables.append(_atoms_text(atoms))
    if species:
        tables.append(_species_text(species))
    sources = _sources(atoms, species)
    return [*tables, "\n".join(f"{label}: {text}" for label, text in sources.items())] if sources else tables


def _atoms_text(atoms: Sequence[AtomReference]) -> str:
    from heatwright.formation.references import spin_orbit_lowering_kJ_mol

    lines = [
        "Atoms, kJ/mol (H298-H0 of the element in its reference state; spin-orbit: lowest level below the term's mean)",
        f"{'atom':<4}  {'dHf(0 K)':>10}  {'u95':>6}  {'H298-H0':>8}  {'spin-orbit':>10}  source, reference state",
    ]
    for a in atoms:
        lowering = _cell(spin_orbit_lowering_kJ_mol(a.symbol), 2)
        values = f"{a.dHf0_kJ_mol:10.3f}  {a.u95_kJ_mol:6.3f}  {a.element_H298_H0_kJ_mol:8.3f}  {lowering:>10}"
        lines.append(f"{a.symbol:<4}  {values}  {a.source}, {a.reference_state}")
    return "\n".join(lines)


def _species_text(species: Sequence[SpeciesReference]) -> str:
    name, formula = (
        max(len(text) for text in texts) for texts in zip(*((s.name, s.formula) for s in species), strict=True)
    )
    name, formula = max(name, 7), max(formula, 7)
    heads = f"{'dHf(0 K)':>10}  {'dHf(298)':>9}  {'u95':>6}"
    lines = [
        "Species, kJ/mol",
        f"{'species':<{name}}  {'formula':<{formula}}  2S+1  {heads}  source, name, SMILES",
    ]
    for s in species:
        values = f"{s.multiplicity:4d}  {_cell(s.dHf0_kJ_mol):>10}  {_cell(s.dHf298_kJ_mol):>9}  {s.u95_kJ_mol:6.3f}"
        tail = ", ".join(part for part in (s.source + (" (yours)" if s.own else ""), s.words, s.smiles) if part)
        lines.append(f"{s.name:<{name}}  {s.formula:<{formula}}  {values}  {tail}")
    return "\n".join(lines)


def _cell(value: float | None, digits: int = 3) -> str:
    return "-" if value is None else f"{value:.{digits}f}"
