"""Reference enthalpies of formation of species: the built-in table, the user's own, and which one a molecule is."""

from __future__ import annotations

import os
from collections.abc import Iterable
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.elements import atomic_number, formula, ground_multiplicity, parse_formula
from heatwright.findings import Finding, Refused, note
from heatwright.formation.formation import element_increment_kJ_mol
from heatwright.formation.references import AtomReference, atom_references
from heatwright.reading.tables import Row, read_table
from heatwright.resources import data_rows
from heatwright.structure.cis_trans import has_sides, stated_sides
from heatwright.structure.identity import Identity, identity_of, identity_of_smiles

if TYPE_CHECKING:
    from heatwright.molecule import Molecule


@dataclass(frozen=True, slots=True, kw_only=True)
class SpeciesReference:
    """The enthalpy of formation of one gaseous species, kJ/mol, with its 95 % uncertainty and its source.

    name : as in a reaction, ``CH3OH``.   words : its name in words.   formula : Hill formula.
    dHf0_kJ_mol, dHf298_kJ_mol : at 0 K and 298.15 K; one of the two may be None.   own : whether it is the user's.
    element_H298_H0_kJ_mol : of an atom only, H°(298.15) − H°(0) of its element in the reference state, where stated.
    """

    name: str
    formula: str
    smiles: str
    charge: int
    multiplicity: int
    dHf0_kJ_mol: float | None
    dHf298_kJ_mol: float | None
    u95_kJ_mol: float
    source: str
    cas: str = ""
    own: bool = False
    words: str = ""
    element_H298_H0_kJ_mol: float | None = None

    @property
    def identity(self) -> Identity:
        """Composition and graph, by the SMILES."""
        return identity_of_smiles(self.smiles)

    @property
    def composition(self) -> dict[str, int]:
        """Atoms by element symbol, Hill order."""
        return dict(self.identity.composition)


@cache
def reference_species() -> tuple[SpeciesReference, ...]:
    """The built-in species, in the order of ``data/species_formation.csv``, which names the sources.

    >>> next(s for s in reference_species() if s.name == "CH3OH").dHf298_kJ_mol
    -200.7
    """
    return tuple(
        SpeciesReference(
            name=row["name"],
            formula=row["formula"],
            smiles=row["smiles"],
            charge=int(row["charge"]),
            multiplicity=int(row["multiplicity"]),
            dHf0_kJ_mol=float(row["dHf0_kJ_mol"]) if row["dHf0_kJ_mol"] else None,
            dHf298_kJ_mol=float(row["dHf298_kJ_mol"]) if row["dHf298_kJ_mol"] else None,
            u95_kJ_mol=float(row["u95_kJ_mol"]),
            source=row["source"],
            cas=row["cas"],
            words=row["words"],
        )
        for row in data_rows("species_formation")
    )


REQUIRED = ("name", "formula", "smiles", "multiplicity", "u95_kJ_mol", "source")
OPTIONAL = ("charge", "dHf0_kJ_mol", "dHf298_kJ_mol", "cas", "words", "element_H298_H0_kJ_mol")
"""The columns of a user's table of references."""


def read_references(path: str | os.PathLike[str]) -> tuple[SpeciesReference, ...]:
    """The reference species of a user's CSV file with the columns :data:`REQUIRED` and any of :data:`OPTIONAL`.

    The enthalpy is given at 0 K, at 298.15 K, or both.  Of an ion the one at 0 K is needed, as that at 298.15 K depends
    on the convention for the electron, and of an atom too, which may bring the increment of its element as well.

    Raises Refused (``table-wrong``, ``smiles-wrong``) with FILE:LINE.
    """
    found: dict[object, tuple[SpeciesReference, Row]] = {}
    for row in read_table(path, "table-wrong", REQUIRED, OPTIONAL):
        reference = _reference_of(row)
        key = _key(reference)
        if key in found:
            other = found[key][1].place.rpartition(":")[2]
            row.wrong(f"{reference.name} is the same species as that on line {other}", "each species once")
        found[key] = (reference, row)
    return tuple(reference for reference, _ in found.values())


def _key(reference: SpeciesReference) -> object:
    """Equal for two references of one species."""
    return reference.identity, reference.multiplicity, stated_sides(reference.smiles)


def _reference_of(row: Row) -> SpeciesReference:
    charge = row.whole("charge", 0)
    u95 = row.number("u95_kJ_mol")
    if u95 is None or u95 < 0.0:
        row.wrong("u95_kJ_mol is empty" if u95 is None else f"u95_kJ_mol is {u95:g}", "the 95 % uncertainty, kJ/mol")
    smiles = row.text("smiles")
    identity = _identity_in(row, smiles, charge)
    multiplicity = row.whole("multiplicity")
    electrons = sum(n * _protons(symbol) for symbol, n in identity.composition) - charge
    if multiplicity < 1 or multiplicity > electrons + 1 or (electrons - multiplicity) % 2 == 0:
        row.wrong(f"the multiplicity is {multiplicity}, and the species has {electrons} electrons")
    dHf0, dHf298 = row.number("dHf0_kJ_mol"), row.number("dHf298_kJ_mol")
    _check_enthalpies(row, dHf0, dHf298, identity)
    return SpeciesReference(
        name=row.text("name"),
        formula=formula(dict(identity.composition), charge),
        smiles=smiles,
        charge=charge,
        multiplicity=multiplicity,
        dHf0_kJ_mol=dHf0,
        dHf298_kJ_mol=dHf298,
        u95_kJ_mol=u95,
        source=row.text("source"),
        cas=row.values.get("cas", ""),
        own=True,
        words=row.values.get("words", ""),
        element_H298_H0_kJ_mol=_increment(row, identity),
    )


def _increment(row: Row, identity: Identity) -> float | None:
    value = row.number("element_H298_H0_kJ_mol")
    if value is not None and len(identity.graph) > 1:
        row.wrong("element_H298_H0_kJ_mol is given for a molecule", "it for atoms only")
    if value is not None and value <= 0.0:
        row.wrong(f"element_H298_H0_kJ_mol is {value:g}", "a positive number")
    return value


def _protons(symbol: str) -> int:
    return 1 if symbol == "D" else atomic_number(symbol)


def _identity_in(row: Row, smiles: str, charge: int) -> Identity:
    """The identity by the SMILES, which has to agree with formula and charge of the row."""
    try:
        identity = identity_of_smiles(smiles)
    except Refused as refused:
        raise Refused([finding.at(row.place) for finding in refused.findings]) from None
    text = row.text("formula")
    try:
        stated = parse_formula(text.rstrip("+-0123456789") if text[-1] in "+-" else text)
    except ValueError:
        row.wrong(f"the formula is {text!r}", "element symbols and counts, such as C2H6O")
    counts = dict(identity.composition)
    if stated != counts:
        row.wrong(f"the formula is {text}, and the SMILES {smiles!r} holds {formula(counts)}", "the same atoms")
    if identity.charge != charge:
        row.wrong(f"the charge is {charge}, and that of the SMILES {smiles!r} is {identity.charge}", "the same charge")
    return identity


def _check_enthalpies(row: Row, dHf0: float | None, dHf298: float | None, identity: Identity) -> None:
    if dHf0 is None and dHf298 is None:
        row.wrong("there is neither dHf0_kJ_mol nor dHf298_kJ_mol", "one of the two or both")
    if identity.charge and dHf0 is None:
        action = "At 298.15 K the value depends on the convention for the electron, at 0 K it does not."
        row.wrong("the species is an ion without dHf0_kJ_mol", "its enthalpy of formation at 0 K", action)
    if len(identity.graph) == 1 and dHf0 is None:
        row.wrong("the species is an atom without dHf0_kJ_mol", "its enthalpy of formation at 0 K")
    increment = element_increment_kJ_mol(dict(identity.composition))
    if dHf0 is None or dHf298 is None or increment is None or identity.charge:
        return
    content = dHf298 - dHf0 + increment
    n = sum(count for _, count in identity.composition)
    most = (4.0 + 3.0 * n) * GAS_CONSTANT_J_MOL_K * STANDARD_TEMPERATURE_K / 1000.0
    if not 6.0 < content < most:
        row.wrong(
            f"from dHf0_kJ_mol and dHf298_kJ_mol follows an H(298.15) - H(0) of {content:.3f} kJ/mol",
            f"between 6.2 (translation alone) and {most:.1f}",
        )


def merged_references(own: Iterable[SpeciesReference]) -> tuple[tuple[SpeciesReference, ...], tuple[Finding, ...]]:
    """The user's references and those built-in ones that he does not give himself; each replacement is a note."""
    mine = tuple(own)
    keys = {_key(reference): reference for reference in mine}
    kept, said = [], []
    for built_in in reference_species():
        other = keys.get(_key(built_in))
        if other is None:
            kept.append(built_in)
        else:
            said.append(_replaced(built_in, other))
    return (*mine, *kept), tuple(said)


def _replaced(built_in: SpeciesReference, own: SpeciesReference) -> Finding:
    return note(
        "reference-replaced",
        f"for {own.name} your enthalpy of formation is used, {_value(own)} ({own.source}), "
        f"and not {_value(built_in)} ({built_in.source})",
    )


def _value(reference: SpeciesReference) -> str:
    if reference.dHf0_kJ_mol is not None:
        return f"{reference.dHf0_kJ_mol:.3f} kJ/mol at 0 K"
    return f"{reference.dHf298_kJ_mol:.3f} kJ/mol at 298.15 K"


def own_atom_references(own: Iterable[SpeciesReference]) -> dict[str, AtomReference]:
    """The values of the atoms for atomization: the built-in ones, with the user's atoms in their places.

    An element without built-in increment counts when its atom brings one.
    """
    merged = atom_references()
    for reference in own:
        if len(reference.identity.graph) > 1 or reference.charge or reference.dHf0_kJ_mol is None:
            continue
        symbol = next(iter(reference.composition))
        before = merged.get(symbol)
        stated = reference.element_H298_H0_kJ_mol
        increment = stated if stated is not None else before.element_H298_H0_kJ_mol if before else None
        if reference.multiplicity != ground_multiplicity(_protons(symbol)) or increment is None or symbol == "D":
            continue
        merged[symbol] = AtomReference(
            symbol=symbol,
            reference_state=before.reference_state if before else "its reference state",
            dHf0_kJ_mol=reference.dHf0_kJ_mol,
            u95_kJ_mol=reference.u95_kJ_mol,
            source=reference.source,
            element_H298_H0_kJ_mol=increment,
            increment_source=before.increment_source if before and stated is None else reference.source,
        )
    return merged


def reference_for(molecule: Molecule, references: Iterable[SpeciesReference]) -> SpeciesReference | None:
    """The reference species that a molecule is, or None.

    The same are composition, charge, multiplicity and the graph of bonds, so that isomers are told apart and
    conformers and mirror images are not; another isotope is another species.  Where the SMILES states the sides of a
    double bond, they have to be those of the geometry.  The first that fits is taken, those with stated sides before
    those without.
    """
    identity = identity_of(molecule)
    if identity is None:
        return None
    fits = [r for r in references if r.multiplicity == molecule.multiplicity and r.identity == identity]
    fits = [r for r in fits if has_sides(molecule, stated_sides(r.smiles))]
    return next(iter(sorted(fits, key=lambda r: not stated_sides(r.smiles))), None)
