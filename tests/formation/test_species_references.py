"""The reference species: values against the published tables, which molecule is which species, the user's own table."""

from __future__ import annotations

import csv
import re
from pathlib import Path

import numpy as np
import pytest
from ase.build import molecule as ase_molecule

from heatwright import read_output
from heatwright.elements import atomic_number, formula
from heatwright.findings import Refused
from heatwright.formation.formation import element_increment_kJ_mol
from heatwright.formation.references import atom_reference, elements_with_reference
from heatwright.formation.species_references import (
    merged_references,
    own_atom_references,
    read_references,
    reference_for,
    reference_species,
)
from heatwright.resources import data_sources
from molecules import molecule, water
from outside import SHARED, needs_shared

SPECIES = {reference.name: reference for reference in reference_species()}


@pytest.mark.parametrize("name", SPECIES)
def test_a_row_agrees_with_its_smiles(name: str) -> None:
    row = SPECIES[name]
    assert formula(row.composition, row.charge) == row.formula
    assert row.identity.charge == row.charge == 0
    electrons = sum(n * atomic_number(element) for element, n in row.composition.items())
    assert (electrons - row.multiplicity) % 2 == 1
    assert row.source in data_sources("species_formation")
    assert row.u95_kJ_mol >= 0.0
    assert not row.own


def test_no_species_is_there_twice() -> None:
    assert len({(r.identity, r.multiplicity) for r in reference_species()}) == len(SPECIES) == len(reference_species())


@pytest.mark.parametrize("name", SPECIES)
def test_the_enthalpy_content_that_follows_is_one(name: str) -> None:
    """H(298.15) − H(0) is 5/2 RT for translation, 7/2 or 4 RT with rotation, and not more than every mode excited."""
    row = SPECIES[name]
    if row.dHf0_kJ_mol is None or set(row.composition) & {"He", "Ne", "Ar"}:
        return
    content = row.dHf298_kJ_mol - row.dHf0_kJ_mol + element_increment_kJ_mol(row.composition)
    n = sum(row.composition.values())
    least = {1: 6.19, 2: 8.46}.get(n, 8.9)  # kJ/mol
    assert least < content < 7.6 if n == 1 else least < content < 9.0 + 2.2 * (n - 1)


# ATcT 1.112 as the package chemicals ships it (B. Ruscic et al., Argonne National Laboratory), J/mol, by CAS number.
def test_values_of_atct() -> None:
    import chemicals

    path = Path(chemicals.__file__).parent / "Reactions" / "ATcT 1.112 (g).tsv"
    with path.open(encoding="utf-8") as file:
        table = {row["CAS"]: row for row in csv.DictReader(file, delimiter="\t")}
    checked = 0
    for row in reference_species():
        theirs = table.get(row.cas) if row.source == "ATcT 1.112" else None
        if theirs is None or "," in theirs["Formula"] or re.search(r"\][+-]|singlet", theirs["Formula"]):
            continue
        values = [float(theirs[column]) / 1000.0 for column in ("Hfg_0K", "Hfg", "uncertainty")]
        assert [row.dHf0_kJ_mol, row.dHf298_kJ_mol, row.u95_kJ_mol] == pytest.approx(values, abs=5e-4), row.name
        checked += 1
    assert checked > 80


@needs_shared
def test_every_atct_value_at_hand_is_in_the_table() -> None:
    with (SHARED / "reference" / "gas_standard_thermo.csv").open(encoding="utf-8") as file:
        rows = [row for row in csv.DictReader(file) if row["atct_dHf0K_kJ_mol"]]
    mine = {(r.dHf0_kJ_mol, r.dHf298_kJ_mol, r.u95_kJ_mol) for r in reference_species() if r.source == "ATcT 1.112"}
    theirs = {tuple(float(row[f"atct_{c}_kJ_mol"]) for c in ("dHf0K", "dHf298", "unc95")) for row in rows}
    assert mine == theirs
    assert len(rows) == sum(r.source == "ATcT 1.112" for r in reference_species())


@needs_shared
@pytest.mark.parametrize("name", [r.name for r in reference_species() if r.source != "ATcT 1.112"])
def test_other_values_agree_with_a_second_source(name: str) -> None:
    """NIST-JANAF (1998), NASA Glenn (2002) and the CRC Handbook (2014): one of them within the stated uncertainty."""
    row = SPECIES[name]
    with (SHARED / "reference" / "gas_standard_thermo.csv").open(encoding="utf-8") as file:
        found = [r for r in csv.DictReader(file) if r["CAS"] == row.cas and row.cas]
        file.seek(0)
        found = found or [r for r in csv.DictReader(file) if r["species"] in (name, row.formula)]
    if not found:
        assert name in ("P2", "P4", "SiF4", "SF6")  # against the package janaf below
        return
    others = [found[0][f"{source}_dHf298_kJ_mol"] for source in ("janaf", "cea9", "crc")]
    distances = sorted(abs(float(value) - row.dHf298_kJ_mol) for value in others if value)
    assert distances[0] <= row.u95_kJ_mol + 0.1, distances


# NIST-JANAF tables (M. W. Chase, 4th ed. 1998) in the package janaf: ids and values at 298.15 K and 0 K.
@pytest.mark.parametrize(
    ("name", "table"),
    [("P2", "P-012"), ("P4", "P-013"), ("SiF4", "F-141"), ("SF6", "F-154"), ("S2", "S-012"), ("SO2", "O-034"),
     ("BF3", "B-040"), ("SO3", "O-058"), ("SO", "O-010"), ("CS2", "C-099"), ("SiH4", "H-093"), ("H2S", "H-080"),
     ("S", "S-006"), ("Si", "Si-005"), ("P", "P-008"), ("B", "B-005")],
)  # fmt: skip
def test_values_of_janaf(name: str, table: str) -> None:
    at_0, at_298 = janaf_enthalpies(table)
    row = SPECIES[name]
    allowed = row.u95_kJ_mol + 0.11
    assert row.dHf298_kJ_mol == pytest.approx(at_298, abs=allowed)
    assert row.dHf0_kJ_mol == pytest.approx(at_0, abs=allowed)


def janaf_enthalpies(table: str) -> tuple[float, float]:
    """ΔfH° at 0 K and 298.15 K, kJ/mol."""
    import janaf

    lines = (Path(janaf.__file__).parent / "data" / f"{table}.txt").read_text(encoding="utf-8").splitlines()
    rows = {fields[0]: fields for fields in (line.split("\t") for line in lines)}
    return float(rows["0"][5]), float(rows["298.15"][5])


@pytest.mark.parametrize("symbol", elements_with_reference())
def test_atoms_are_the_same_in_both_tables(symbol: str) -> None:
    atom, species = atom_reference(symbol), SPECIES[symbol]
    assert (atom.dHf0_kJ_mol, atom.u95_kJ_mol) == (species.dHf0_kJ_mol, species.u95_kJ_mol)


@needs_shared
def test_every_element_of_the_atomic_reference() -> None:
    """atomic_reference.csv: ATcT 1.112 where there is a value, else CODATA Key Values; increments of JANAF, CODATA."""
    with (SHARED / "reference" / "atomic_reference.csv").open(encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    assert {row["element"] for row in rows} == set(elements_with_reference())
    for row in rows:
        mine = atom_reference(row["element"])
        value = row["atct112_dHf0K_kJ_mol"] or row["codata89_dHf0K_derived_kJ_mol"]
        unc = row["atct112_unc95_kJ_mol"] or row["codata89_unc_kJ_mol"]
        h = row["atct112_element_H298_H0_per_atom_kJ_mol"] or row["codata89_element_H298_H0_per_atom_kJ_mol"]
        assert mine.reference_state == row["reference_state"]
        assert mine.dHf0_kJ_mol == pytest.approx(float(value), abs=1e-3), row["element"]
        assert mine.u95_kJ_mol == pytest.approx(float(unc), abs=1e-3)
        assert mine.element_H298_H0_kJ_mol == pytest.approx(float(h), abs=1e-3)


# --- which species a molecule is ------------------------------------------------------------------------------------


def from_ase(name: str, multiplicity: int = 1, **changes):
    """A molecule of the G2/97 set (geometries of the package ase)."""
    atoms = ase_molecule(name)
    symbols = " ".join(atoms.get_chemical_symbols())
    return molecule(symbols, atoms.get_positions().tolist(), [], multiplicity=multiplicity, **changes)


@pytest.mark.parametrize(
    ("geometry", "multiplicity", "name"),
    [
        ("HCN", 1, "HCN"), ("CH3CH2OH", 1, "C2H5OH"), ("CH3OCH3", 1, "CH3OCH3"), ("C3H6_Cs", 1, "CH3CHCH2"),
        ("C3H6_D3h", 1, "cyclo-C3H6"), ("CH3CHO", 1, "CH3CHO"), ("CH2OCH2", 1, "cyclo-C2H4O"),
        ("C3H4_D2d", 1, "CH2CCH2"), ("C3H4_C3v", 1, "CH3CCH"), ("isobutane", 1, "i-C4H10"),
        ("trans-butane", 1, "n-C4H10"), ("isobutene", 1, "(CH3)2CCH2"), ("butadiene", 1, "CH2CHCHCH2"),
        ("C6H6", 1, "C6H6"), ("H2COH", 2, "CH2OH"), ("CH3O", 2, "CH3O"), ("CH2_s3B1d", 3, "CH2"), ("O2", 3, "O2"),
        ("CO", 1, "CO"), ("OCS", 1, "COS"), ("SO2", 1, "SO2"), ("BF3", 1, "BF3"), ("SiF4", 1, "SiF4"),
        ("PH3", 1, "PH3"), ("CCl4", 1, "CCl4"), ("CF4", 1, "CF4"), ("NO2", 2, "NO2"), ("N2O", 1, "N2O"),
        ("O3", 1, "O3"), ("CH3SH", 1, "CH3SH"), ("CH3CN", 1, "CH3CN"), ("HCOOCH3", 1, "HCOOCH3"),
        ("CH3COOH", 1, "CH3COOH"), ("CH3COCH3", 1, "CH3COCH3"),
        ("H2O2", 1, "H2O2"), ("Cl2", 1, "Cl2"), ("HOCl", 1, "HOCl"), ("CCH", 2, "C2H"),
    ],
)  # fmt: skip
def test_species_by_geometry(geometry: str, multiplicity: int, name: str) -> None:
    found = reference_for(from_ase(geometry, multiplicity), reference_species())
    assert found is SPECIES[name]


@pytest.mark.parametrize(
    ("geometry", "multiplicity", "changes"),
    [
        ("CH2_s1A1d", 1, {}),  # the table has the triplet
        ("O2", 1, {}),
        ("C3H4_C2v", 1, {}),  # cyclopropene, beside allene and propyne
        ("bicyclobutane", 1, {}),
        ("CH3CH2NH2", 1, {}),
        ("CH4", 2, {"charge": 1}),
        ("CH4", 1, {"multiplicity": None}),
    ],
)
def test_what_is_not_in_the_table(geometry: str, multiplicity: int, changes: dict) -> None:
    made = from_ase(geometry, **({"multiplicity": multiplicity} | changes))
    assert reference_for(made, reference_species()) is None


def test_isonitrile_is_not_the_nitrile() -> None:
    hnc = molecule("H N C", [[0, 0, 0], [0, 0, 0.994], [0, 0, 2.163]], [])
    assert reference_for(hnc, reference_species()) is SPECIES["HNC"]


def test_another_isotope_is_another_species(tmp_path: Path) -> None:
    heavy = water(masses_u=np.array([15.9949, 2.0141, 2.0141]))
    half = water(masses_u=np.array([15.9949, 2.0141, 1.0078]))
    oxygen18 = water(masses_u=np.array([17.9992, 1.0078, 1.0078]))
    average = water(masses_u=np.array([15.999, 1.008, 1.008]))
    assert [reference_for(m, reference_species()) for m in (heavy, half, oxygen18)] == [None] * 3
    assert reference_for(average, reference_species()) is reference_for(water(), reference_species()) is SPECIES["H2O"]
    own = read_references(written(tmp_path, "D2O,D2O,[2H]O[2H],1,-246.253,,0.03,ATcT"))
    assert [reference_for(m, own) is not None for m in (heavy, half, water())] == [True, False, False]


def test_rotational_constants_alone_do_not_tell_isomers_apart() -> None:
    assert reference_for(water().but(coordinates_A=np.empty((0, 3))), reference_species()) is None
    nitrogen = from_ase("N2").but(coordinates_A=np.empty((0, 3)))
    assert reference_for(nitrogen, reference_species()) is SPECIES["N2"]


@needs_shared
def test_the_computed_species() -> None:
    with (SHARED / "computed" / "INDEX.csv").open(encoding="utf-8") as file:
        rows = [row for row in csv.DictReader(file) if row["dHf_source"] == "atct"]
    found = [reference_for(read_output(SHARED / "computed" / row["file"]), reference_species()) for row in rows]
    assert [r and r.dHf0_kJ_mol for r in found] == [float(row["dHf0K_kJ_mol"]) for row in rows]


# --- the user's table -----------------------------------------------------------------------------------------------

HEAD = "name,formula,smiles,multiplicity,dHf0_kJ_mol,dHf298_kJ_mol,u95_kJ_mol,source"


def written(folder: Path, *rows: str, head: str = HEAD) -> Path:
    path = folder / "mine.csv"
    path.write_text("\n".join([head, *rows]) + "\n", encoding="utf-8")
    return path


METHANOL = "CH3OH,CH3OH,CO,1,-190.1,-200.98,0.4,our flow calorimeter"


def test_a_table_of_ones_own(tmp_path: Path) -> None:
    rows = ("# measured in house", "", METHANOL, 'CH3OO,CH3O2,CO[O],2,,12.3,0.9,"J. Doe, Thesis (2020)"')
    methanol, peroxy = read_references(written(tmp_path, *rows))
    assert (methanol.formula, methanol.dHf0_kJ_mol, methanol.u95_kJ_mol, methanol.own) == ("CH4O", -190.1, 0.4, True)
    assert (peroxy.dHf0_kJ_mol, peroxy.dHf298_kJ_mol, peroxy.source) == (None, 12.3, "J. Doe, Thesis (2020)")


def test_the_users_value_wins_and_it_is_said(tmp_path: Path) -> None:
    merged, findings = merged_references(read_references(written(tmp_path, METHANOL)))
    (note,) = findings
    assert (note.severity, note.code) == ("note", "reference-replaced")
    assert all(word in note.text for word in ("-190.100", "our flow calorimeter", "-189.820", "ATcT 1.112"))
    assert reference_for(from_ase("CH3OH"), merged).dHf0_kJ_mol == -190.1
    assert len(merged) == len(SPECIES)
    assert merged_references(()) == (reference_species(), ())


def test_isomers_at_a_double_bond_are_two_species(tmp_path: Path) -> None:
    rows = ("E,C4H8,C/C=C/C,1,9.3,,0.5,ATcT", "Z,C4H8,C/C=C\\C,1,14.0,,0.5,ATcT")
    trans, cis = read_references(written(tmp_path, *rows))
    xyz = [[0.67, 0, 0], [-0.67, 0, 0], [1.4, 1.3, 0], [-1.4, -1.3, 0], [1.2, -0.95, 0], [-1.2, 0.95, 0]]
    butene = molecule("C C F F H H", xyz, [])
    own = read_references(written(tmp_path, "E,C2H2F2,F/C=C/F,1,-300,,1,x", "Z,C2H2F2,F/C=C\\F,1,-301,,1,x"))
    assert trans != cis
    assert reference_for(butene, own).name == "E"
    assert reference_for(butene, own[1:]) is None
    either = read_references(written(tmp_path, "mixture,C2H2F2,FC=CF,1,-300.5,,1,x", "E,C2H2F2,F/C=C/F,1,-300,,1,x"))
    assert reference_for(butene, either).name == "E"


@pytest.mark.parametrize(
    ("row", "word"),
    [
        ("CH3OH,C2H6O,CO,1,-190,,1,x", "the formula is C2H6O, and the SMILES 'CO' holds CH4O"),
        ("CH3OH,methanol,CO,1,-190,,1,x", "element symbols and counts"),
        ("CH3OH,CH4O,C(O,1,-190,,1,x", "not closed"),
        ("CH3OH,CH4O,CO,2,-190,,1,x", "18 electrons"),
        ("CH3OH,CH4O,CO,singlet,-190,,1,x", "a whole number"),
        ("CH3OH,CH4O,CO,,-190,,1,x", "multiplicity is empty"),
        ("CH3OH,CH4O,CO,0,-190,,1,x", "multiplicity is 0"),
        ("CH3OH,CH4O,CO,1,,,1,x", "neither dHf0_kJ_mol nor dHf298_kJ_mol"),
        ("CH3OH,CH4O,CO,1,-19o,,1,x", "dHf0_kJ_mol is '-19o'"),
        ("CH3OH,CH4O,CO,1,nan,,1,x", "a number"),
        ("CH3OH,CH4O,CO,1,-190,,,x", "u95_kJ_mol is empty"),
        ("CH3OH,CH4O,CO,1,-190,,-1,x", "u95_kJ_mol is -1"),
        ("CH3OH,CH4O,CO,1,-190,,1,", "source is empty"),
        (",CH4O,CO,1,-190,,1,x", "name is empty"),
        ("CH3OH,CH4O,,1,-190,,1,x", "smiles is empty"),
        ("CH3OH,CH4O,CO,1,-190,-230,1,x", "H(298.15) - H(0) of -17.6"),
        ("CH3OH,CH4O,CO,1,-190,-45.4,1,x", "H(298.15) - H(0) of 166.9"),
        ("CH3OH,CH4O,CO,1,-190,1,x", "7 fields"),
        ("CH3OH,CH4O,CO,1,-190,,1,x,y", "9 fields"),
        ("CH3OH,CH4O,C[OH2+],1,-190,,1,x", "the same atoms"),
        ("H3O,H3O+,[OH3+],1,600,,1,x", "that of the SMILES '[OH3+]' is 1"),
        ("C,C,[C],3,,716.9,1,x", "atom without dHf0_kJ_mol"),
        (f"{METHANOL}\nmethanol,CH4O,OC,1,-190,,1,x", "the same species as that on line 2"),
    ],
)
def test_rows_that_are_refused(tmp_path: Path, row: str, word: str) -> None:
    path = written(tmp_path, row)
    with pytest.raises(Refused) as caught:
        read_references(path)
    (finding,) = caught.value.findings
    assert word in finding.text
    assert finding.where.startswith(f"{path}:{2 + row.count(chr(10))}")
    assert finding.code in ("table-wrong", "smiles-wrong")


@pytest.mark.parametrize(
    ("head", "word"),
    [
        (HEAD.replace("u95", "u96"), "Did you mean u95_kJ_mol?"),
        (HEAD + ",colour", "there is no column 'colour'"),
        (HEAD.replace(",source", ""), "the column source is missing"),
        (HEAD.replace(",source", "").replace("name,", ""), "the columns name, source are missing"),
        (HEAD + ",source", "'source' is there twice"),
        (HEAD.replace(",", ";"), "not separated by commas"),
    ],
)
def test_headers_that_are_refused(tmp_path: Path, head: str, word: str) -> None:
    with pytest.raises(Refused) as caught:
        read_references(written(tmp_path, METHANOL, head=head))
    assert word in str(caught.value)
    assert caught.value.findings[0].where == f"{tmp_path / 'mine.csv'}:1"


def test_a_table_without_rows_or_file(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="no rows"):
        read_references(written(tmp_path))
    with pytest.raises(Refused, match="no such file"):
        read_references(tmp_path / "none.csv")


IONS = f"{HEAD},charge"


def test_ions_are_given_at_0_k(tmp_path: Path) -> None:
    (ion,) = read_references(written(tmp_path, "H3O+,H3O+,[OH3+],1,600,,1,x,1", head=IONS))
    assert (ion.charge, ion.formula) == (1, "H3O+")
    with pytest.raises(Refused, match="convention for the electron"):
        read_references(written(tmp_path, "H3O+,H3O+,[OH3+],1,,600,1,x,1", head=IONS))


def test_atoms_of_ones_own(tmp_path: Path) -> None:
    """A new element needs the increment of its reference state; sodium: CODATA Key Values (1989), from memory."""
    head = f"{HEAD},element_H298_H0_kJ_mol"
    rows = ("C,C,[C],3,711.5,,0.1,mine,", "Na,Na,[Na],2,107.76,107.5,0.7,CODATA,6.460", "Li,Li,[Li],2,157.7,,1,x,")
    atoms = own_atom_references(read_references(written(tmp_path, *rows, head=head)))
    assert (atoms["C"].dHf0_kJ_mol, atoms["C"].element_H298_H0_kJ_mol, atoms["C"].source) == (711.5, 1.051, "mine")
    assert (atoms["Na"].dHf0_kJ_mol, atoms["Na"].element_H298_H0_kJ_mol) == (107.76, 6.46)
    assert "Li" not in atoms
    assert atoms["H"] == atom_reference("H")
    with pytest.raises(Refused, match="for atoms only"):
        read_references(written(tmp_path, f"{METHANOL},1.0", head=head))
