"""Atomization with spin-orbit lowering, corrections, stated 0 K energies, ions and the check of the energy."""

from __future__ import annotations

import csv
from math import fsum
from pathlib import Path

import pytest

from heatwright import ModelOptions, build_model, read_output
from heatwright.constants import HARTREE_KJ_MOL
from heatwright.findings import Refused, refusals
from heatwright.formation.atomization import collect_atoms, formation_by_atomization
from heatwright.formation.corrections import Correction, read_corrections
from heatwright.formation.formation import (
    Formation,
    dHf298_from_dHf0,
    electron_term_kJ_mol,
    element_increment_kJ_mol,
    formation_given,
    parse_enthalpy,
)
from heatwright.formation.plausibility import bond_sum_kJ_mol, bound_kJ_mol, energy_findings, mean_bond_enthalpies
from heatwright.formation.references import atom_references, spin_orbit_lowering_kJ_mol
from heatwright.formation.zero_kelvin import read_zero_kelvin_energies
from heatwright.molecule import Molecule, Source
from heatwright.structure.bond_orders import bonding
from molecules import atom, molecule, water
from outside import SHARED, needs_shared

ATOMS = {"H": atom("H", 2, -0.5), "C": atom("C", 3, -37.8), "O": atom("O", 3, -75.0)}
METHANOL = [[-0.047, 0.665, 0.0], [-0.047, -0.758, 0.0], [-1.093, 0.97, 0.0], [0.878, -1.046, 0.0],
            [0.437, 1.08, 0.891], [0.437, 1.08, -0.891]]  # fmt: skip
METHANOL_MODES = [3681, 3000, 2960, 2844, 1477, 1477, 1455, 1345, 1165, 1060, 1033, 295]  # NSRDS-NBS 39 (1972)


def bound(made: Molecule, d0_kJ_mol: float, atoms=ATOMS) -> Molecule:
    """A molecule whose energy makes its dissociation energy at 0 K what is asked for."""
    model = build_model(made)
    energy = fsum(n * atoms[e].energy_hartree for e, n in model.composition.items())
    return made.but(energies_hartree={"SCF": energy - (d0_kJ_mol + model.zpe_kJ_mol) / HARTREE_KJ_MOL})


def methanol(d0_kJ_mol: float = 2012.188, **changes) -> Molecule:
    """With the dissociation energy of ATcT 1.112: 711.388 + 4 x 216.034 + 246.844 + 189.820 kJ/mol."""
    return bound(molecule("C O H H H H", METHANOL, METHANOL_MODES, file="CH3OH.out", **changes), d0_kJ_mol)


def atomized(made: Molecule, *atoms: Molecule, **options) -> Formation:
    return formation_by_atomization(build_model(made), collect_atoms(atoms or ATOMS.values()), **options)


def refusal(made: Molecule, *atoms: Molecule, **options) -> tuple:
    with pytest.raises(Refused) as caught:
        atomized(made, *atoms, **options)
    return refusals(caught.value.findings)


def adds_up(formation: Formation) -> bool:
    return fsum(line.value_kJ_mol for line in formation.ledger) == formation.dHf298_kJ_mol


# --- spin-orbit ---------------------------------------------------------------------------------------------------


# L. A. Curtiss, K. Raghavachari, P. C. Redfern, V. Rassolov, J. A. Pople, J. Chem. Phys. 109, 7764 (1998), from memory:
# millihartree, printed to two digits.
@pytest.mark.parametrize(
    ("symbol", "lowering"),
    [("H", 0.0), ("N", 0.0), ("B", 0.05), ("C", 0.14), ("O", 0.36), ("F", 0.61), ("Si", 0.68), ("P", 0.0), ("S", 0.89),
     ("Cl", 1.34), ("Br", 5.60)],
)  # fmt: skip
def test_lowering_of_atoms(symbol: str, lowering: float) -> None:
    value = spin_orbit_lowering_kJ_mol(symbol)
    assert value is not None
    assert value / HARTREE_KJ_MOL * 1000.0 == pytest.approx(lowering, abs=0.0075)
    assert spin_orbit_lowering_kJ_mol("Na") is None


def test_spin_orbit_has_lines_of_its_own() -> None:
    """C 0.354, O 0.933 kJ/mol by hand from the levels of the NIST Atomic Spectra Database."""
    plain, corrected = (atomized(methanol(), spin_orbit=choice) for choice in (False, True))
    by_hand = (3 * 16.4167 + 5 * 43.4135) / 9 * 0.0119627 + (3 * 158.265 + 226.977) / 9 * 0.0119627
    assert corrected.dHf0_kJ_mol - plain.dHf0_kJ_mol == pytest.approx(by_hand, abs=1e-4)
    assert corrected.dHf298_kJ_mol - plain.dHf298_kJ_mol == pytest.approx(by_hand, abs=1e-4)
    lines = [line for line in corrected.ledger if "spin-orbit" in line.what]
    assert [line.what[:3] for line in lines] == ["1 x", "1 x"]
    assert all("NIST" in line.source for line in lines)
    assert adds_up(corrected)


def test_an_atom_against_itself_has_no_spin_orbit_correction() -> None:
    formation = atomized(ATOMS["O"], spin_orbit=True)
    assert formation.dHf0_kJ_mol == pytest.approx(246.844, abs=1e-9)  # ATcT 1.112
    assert formation.dHf298_kJ_mol == pytest.approx(249.229, abs=0.002)
    assert formation.findings == ()


# --- corrections of the user -----------------------------------------------------------------------------------------


def table(folder: Path, *rows: str, head: str = "kind,label,value,unit,source") -> Path:
    path = folder / "corrections.csv"
    path.write_text("\n".join([head, *rows]) + "\n", encoding="utf-8")
    return path


def test_corrections_with_their_counts(tmp_path: Path) -> None:
    rows = ("bond,H-C,-0.1,kcal/mol,own fit", "bond,C-O,2.0,kJ/mol,own fit", "bond,C=O,99,kJ/mol,own fit",
            "atom,O,-1500,J/mol,own fit", "bond,C#N,7,kJ/mol,own fit")  # fmt: skip
    corrections = read_corrections(table(tmp_path, *rows))
    assert corrections[0] == Correction("bond", "C-H", pytest.approx(-0.4184), "own fit")
    plain, corrected = atomized(methanol()), atomized(methanol(), corrections=corrections)
    shift = 3 * -0.4184 + 2.0 - 1.5
    assert corrected.dHf0_kJ_mol - plain.dHf0_kJ_mol == pytest.approx(shift)
    assert corrected.dHf298_kJ_mol - plain.dHf298_kJ_mol == pytest.approx(shift)
    added = [line.what for line in corrected.ledger if "correction" in line.what]
    assert added == ["3 x correction of the bond C-H", "1 x correction of the bond C-O", "1 x correction of the atom O"]
    assert adds_up(corrected)


@pytest.mark.parametrize(
    ("row", "word"),
    [
        ("bond,C~H,1,kJ/mol,x", "'C~H' is no bond"),
        ("bond,CH,1,kJ/mol,x", "is no bond"),
        ("bond,C-Xx,1,kJ/mol,x", "is no bond"),
        ("bond,c-h,1,kJ/mol,x", "is no bond"),
        ("atom,C-H,1,kJ/mol,x", "'C-H' is no atom"),
        ("atom,Xx,1,kJ/mol,x", "'Xx' is no atom"),
        ("angle,C,1,kJ/mol,x", "kind is 'angle'"),
        ("atom,C,1,furlong,x", "unit is 'furlong'"),
        ("atom,C,,kJ/mol,x", "value is empty"),
        ("atom,C,one,kJ/mol,x", "value is 'one'"),
        ("atom,C,1,kJ/mol,", "source is empty"),
        ("atom,C,1,,x", "unit is empty"),
        ("bond,C-H,1,kJ/mol,x\nbond,H-C,2,kJ/mol,x", "C-H has a correction already"),
    ],
)
def test_corrections_that_are_refused(tmp_path: Path, row: str, word: str) -> None:
    path = table(tmp_path, row)
    with pytest.raises(Refused) as caught:
        read_corrections(path)
    (finding,) = caught.value.findings
    assert (finding.code, finding.where) == ("table-wrong", f"{path}:{2 + row.count(chr(10))}")
    assert word in finding.found


def test_atom_corrections_need_no_bonds() -> None:
    """Two parts that are not bonded have no bonds to count, and atoms all the same."""
    far = molecule("H H O", [[0, 0, 0], [0, 0, 0.74], [0, 0, 5.0]], [4000.0, 100.0, 100.0, 100.0])
    made = bound(far, 440.0)
    assert adds_up(atomized(made, corrections=[Correction("atom", "O", 1.0, "x")]))
    assert refusal(made, corrections=[Correction("bond", "H-H", 1.0, "x")])[0].code == "fragments"


# --- final energies at 0 K -------------------------------------------------------------------------------------------


def composite(folder: Path, *rows: str) -> Path:
    path = folder / "energies.csv"
    path.write_text("\n".join(["file,energy0_hartree,level,source", *rows]) + "\n", encoding="utf-8")
    return path


def in_folder(made: Molecule, folder: Path) -> Molecule:
    return made.but(source=Source(str(folder / made.source.file), "0" * 64, "NWChem", "7.0.2"))


ROWS = ("CH3OH.out,-115.56,G4,own", "C.out,-37.83,G4,own", "O.out,-75.05,g4,own", "H.out,-0.5,G4,own")


def test_a_stated_energy_replaces_energy_and_zero_point(tmp_path: Path) -> None:
    energies = read_zero_kelvin_energies(composite(tmp_path, *ROWS))
    atoms = [in_folder(a, tmp_path).but(level=None) for a in ATOMS.values()]
    target = in_folder(methanol(), tmp_path).but(energies_hartree={})
    formation = atomized(target, *atoms, zero_kelvin=energies)
    d0 = (-37.83 - 75.05 - 4 * 0.5 + 115.56) * HARTREE_KJ_MOL
    assert formation.dHf0_kJ_mol == pytest.approx(711.388 + 246.844 + 4 * 216.034 - d0)
    whats = [line.what for line in formation.ledger]
    assert "atomization energy at 0 K, as stated" in whats
    assert "zero-point energy" not in whats
    assert "atoms at G4" in formation.source
    assert any("G4" in f.found for f in formation.findings if f.code == "no-uncertainty")
    assert adds_up(formation)


def test_a_table_that_is_for_others_changes_nothing(tmp_path: Path) -> None:
    energies = read_zero_kelvin_energies(composite(tmp_path, "CH4.out,-40.5,G4,own"))
    assert atomized(methanol(), zero_kelvin=energies) == atomized(methanol())


@pytest.mark.parametrize(
    ("rows", "word"),
    [
        (ROWS[1:], "for the atoms C, H, O and none for"),
        (ROWS[:3], "none for an output of the H atom"),
        ((*ROWS[:3], "H.out,-0.5,G3,own"), "the H atom is of G3, that of the molecule of G4"),
    ],
)
def test_all_or_none_and_one_level(tmp_path: Path, rows: tuple[str, ...], word: str) -> None:
    energies = read_zero_kelvin_energies(composite(tmp_path, *rows))
    atoms = [in_folder(a, tmp_path) for a in ATOMS.values()]
    (finding,) = refusal(in_folder(methanol(), tmp_path), *atoms, zero_kelvin=energies)
    assert finding.code == "energy0-incomplete"
    assert word in finding.found


def test_a_stated_energy_does_not_excuse_an_excited_atom(tmp_path: Path) -> None:
    energies = read_zero_kelvin_energies(composite(tmp_path, *ROWS))
    atoms = [in_folder(a, tmp_path) for a in (ATOMS["H"], ATOMS["C"], ATOMS["O"].but(multiplicity=1))]
    assert [f.code for f in refusal(in_folder(methanol(), tmp_path), *atoms, zero_kelvin=energies)] == [
        "atom-not-ground-state"
    ]


@pytest.mark.parametrize(
    ("row", "word"),
    [
        ("CH3OH.out,,G4,own", "energy0_hartree is empty"),
        ("CH3OH.out,115.56,G4,own", "negative"),
        ("CH3OH.out,-115.5x,G4,own", "a number"),
        ("CH3OH.out,-115.56,,own", "level is empty"),
        ("CH3OH.out,-115.56,G4,", "source is empty"),
        (",-115.56,G4,own", "file is empty"),
        ("CH3OH.out,-115.56,G4,own\n./CH3OH.out,-115.57,G4,own", "has an energy already"),
    ],
)
def test_energies_that_are_refused(tmp_path: Path, row: str, word: str) -> None:
    with pytest.raises(Refused) as caught:
        read_zero_kelvin_energies(composite(tmp_path, row))
    (finding,) = caught.value.findings
    assert finding.code == "table-wrong"
    assert word in finding.text


# --- ions ---------------------------------------------------------------------------------------------------------


# ΔfH° at 0 K and 298.15 K of NIST-JANAF (thermal electron; ids of its tables) and of ATcT 1.112 (stationary electron),
# out of the packages janaf and chemicals.  Left out: ions whose H(298.15) − H(0) differs between the two (O2+, N2O+,
# HCO+, CN+) and CH+, whose JANAF table is without the electron.
@pytest.mark.parametrize(
    ("ion", "table", "charge"),
    [("H+", "H-002", 1), ("H-", "H-003", -1), ("[H2]+", "H-051", 1), ("[OH]+", "H-039", 1), ("[OH]-", "H-040", -1),
     ("[H3O]+", "H-084", 1), ("[NO]+", "N-006", 1), ("[ONO]-", "N-008", -1), ("[N2]+", "N-024", 1), ("O+", "O-002", 1),
     ("O-", "O-003", -1), ("C+", "C-004", 1), ("[CN]-", "C-082", -1), ("N+", "N-003", 1)],
)  # fmt: skip
def test_the_two_conventions_of_evaluated_tables(ion: str, table: str, charge: int) -> None:
    import chemicals
    import janaf

    lines = (Path(janaf.__file__).parent / "data" / f"{table}.txt").read_text(encoding="utf-8").splitlines()
    rows = {fields[0]: fields for fields in (line.split("\t") for line in lines)}
    path = Path(chemicals.__file__).parent / "Reactions" / "ATcT 1.112 (g).tsv"
    with path.open(encoding="utf-8") as file:
        (atct,) = [row for row in csv.DictReader(file, delimiter="\t") if row["Formula"] == f"{ion} (g)"]
    thermal = float(rows["298.15"][5]) - float(rows["0"][5])
    stationary = (float(atct["Hfg"]) - float(atct["Hfg_0K"])) / 1000.0
    expected = electron_term_kJ_mol(charge, "thermal") - electron_term_kJ_mol(charge, "stationary")
    assert thermal - stationary == pytest.approx(expected, abs=0.05)


# NIST-JANAF: ΔfH°(0 K), H°(298.15) − H°(0), ΔfH°(298.15 K), kJ/mol; element increments of JANAF (O 4.3415).
@pytest.mark.parametrize(
    ("atoms", "charge", "dHf0", "content", "dHf298"),
    [
        ({"H": 1}, 1, 1528.085, 6.197, 1536.246),
        ({"H": 1, "O": 1}, -1, -137.429, 8.606, -143.595),
        ({"H": 3, "O": 1}, 1, 581.986, 10.016, 581.158),
        ({"N": 1, "O": 1}, 1, 983.995, 8.670, 990.185),
    ],
)
def test_ions_of_janaf(atoms: dict[str, int], charge: int, dHf0: float, content: float, dHf298: float) -> None:
    increment = element_increment_kJ_mol(atoms)
    value = dHf298_from_dHf0(dHf0, content, increment) + electron_term_kJ_mol(charge, "thermal")
    assert value == pytest.approx(dHf298, abs=0.004)
    given = formation_given(parse_enthalpy(f"{dHf298} kJ/mol"), "JANAF", atoms, content, charge=charge)
    assert given.dHf0_kJ_mol == pytest.approx(dHf0, abs=0.004)
    assert given.source == "JANAF; thermal electron (Boltzmann statistics)"


HYDROXIDE = [[0.0, 0.0, 0.0], [0.0, 0.0, 0.964]]


def hydroxide() -> Molecule:
    """OH⁻ with the 0 K enthalpy of ATcT 1.112, −139.080 kJ/mol."""
    return bound(molecule("O H", HYDROXIDE, [3555.6], charge=-1), 216.034 + 246.844 + 139.080)


def test_an_ion_by_both_conventions() -> None:
    thermal, stationary = atomized(hydroxide()), atomized(hydroxide(), electron="stationary")
    assert thermal.dHf0_kJ_mol == stationary.dHf0_kJ_mol == pytest.approx(-139.080, abs=1e-6)
    assert stationary.dHf298_kJ_mol == pytest.approx(-139.047, abs=0.08)  # ATcT; classical rotor 0.07 too high
    assert stationary.dHf298_kJ_mol - thermal.dHf298_kJ_mol == pytest.approx(6.197, abs=5e-4)
    assert "thermal electron" in thermal.source
    assert "stationary electron" in stationary.source
    assert [line.source for line in thermal.ledger if "electron" in line.what][-1].startswith("thermal electron")
    assert adds_up(thermal)
    assert adds_up(stationary)


def test_a_given_ion_is_taken_from_one_convention_to_the_other() -> None:
    atct = parse_enthalpy("-139.047 +/- 0.027 kJ/mol")
    same = formation_given(atct, "ATcT 1.112", {"H": 1, "O": 1}, 8.606, charge=-1, electron="stationary")
    moved = formation_given(atct, "ATcT 1.112", {"H": 1, "O": 1}, 8.606, charge=-1, stated_electron="stationary")
    assert same.dHf298_kJ_mol == -139.047
    assert moved.dHf298_kJ_mol == pytest.approx(-145.244, abs=5e-4)
    assert same.dHf0_kJ_mol == pytest.approx(moved.dHf0_kJ_mol) == pytest.approx(-139.080, abs=0.002)
    assert adds_up(moved)
    neutral = formation_given(parse_enthalpy("1 kJ/mol"), "x", {"H": 2}, 8.467, electron="stationary")
    assert (neutral.source, neutral.dHf298_kJ_mol) == ("x", 1.0)


def test_an_atomic_ion_is_not_an_atom_against_itself() -> None:
    """The proton: ΔfH°(0) = 216.034 + 1312.050 (ionization energy of H) = 1528.084 kJ/mol (ATcT 1.112)."""
    proton = molecule("H", [[0.0, 0.0, 0.0]], [], charge=1, energies_hartree={"SCF": 0.0}, file="proton.out")
    hydrogen = atom("H", 2, -1312.050 / HARTREE_KJ_MOL)
    formation = atomized(proton, hydrogen)
    assert formation.dHf0_kJ_mol == pytest.approx(1528.084, abs=1e-6)
    assert formation.dHf298_kJ_mol == pytest.approx(1536.246, abs=0.002)  # JANAF
    assert [f.code for f in formation.findings] == ["no-uncertainty"]


# --- is the energy off by more than a bond ----------------------------------------------------------------------


@pytest.mark.parametrize("off", [-0.15, 0.15])
def test_an_energy_off_by_a_bond_is_refused(off: float) -> None:
    target = methanol(2012.188 + off * HARTREE_KJ_MOL)
    (finding,) = refusal(target)
    assert (finding.code, finding.where) == ("energy-implausible", "CH3OH.out")
    accepted = atomized(target, accept=("energy",))
    assert [f.code for f in accepted.findings if f.severity == "warn"] == ["energy-implausible"]
    assert adds_up(accepted)


def test_an_atom_in_a_wrong_state_shows() -> None:
    assert refusal(water_at(917.8), ATOMS["H"], atom("O", 3, -74.8))[0].code == "energy-implausible"


def water_at(d0_kJ_mol: float) -> Molecule:
    return bound(water(), d0_kJ_mol)


def test_atoms_ions_and_unknown_bonds_are_not_judged() -> None:
    assert energy_findings(ATOMS["C"], 5000.0) == ()
    assert energy_findings(hydroxide(), 5000.0) == ()
    assert energy_findings(molecule("Na Cl", [[0, 0, 0], [0, 0, 2.36]], [366.0]), 5000.0) == ()
    assert energy_findings(molecule("H H O", [[0, 0, 0], [0, 0, 0.74], [0, 0, 5.0]], []), 5000.0) == ()


def g2_molecules() -> list[tuple[str, Molecule, float]]:
    """The molecules of G2/97 with their experimental atomization enthalpies at 0 K, kJ/mol, as ase ships them."""
    from ase.data.g2 import data, molecule_names
    from ase.symbols import string2symbols

    found = []
    for name in molecule_names:
        entry = data[name]
        symbols = string2symbols(entry["symbols"])
        if len(symbols) < 2 or entry.get("enthalpy") is None:
            continue
        unpaired = round(abs(sum(entry["magmoms"]))) if entry["magmoms"] else 0
        kcal = entry["thermal correction"] - entry["enthalpy"]
        kcal += sum(data[s]["enthalpy"] - data[s]["thermal correction"] for s in symbols)
        made = molecule(" ".join(symbols), entry["positions"], [], multiplicity=unpaired + 1, file=name)
        found.append((name, made, kcal * 4.184))
    return found


def test_no_molecule_of_g2_comes_near_the_bound() -> None:
    """L. A. Curtiss et al., J. Chem. Phys. 106, 1063 (1997); the bound keeps a quarter of itself for the level."""
    judged = 0
    for name, made, atomization in g2_molecules():
        try:
            expected = bond_sum_kJ_mol(bonding(made).types)
        except Refused:
            continue
        if expected is not None:
            assert abs(atomization - expected) < 0.76 * bound_kJ_mol(made), name
            judged += 1
    assert judged > 120


@needs_shared
def test_no_computed_molecule_comes_near_the_bound() -> None:
    """B3LYP/6-31G*; atoms of the same level."""
    atoms = collect_atoms([read_output(p) for p in sorted((SHARED / "computed" / "atoms").glob("*.out.gz"))])
    for path in sorted((SHARED / "computed").glob("*.out.gz")):
        made = read_output(path)
        if refusals(made.findings):
            continue
        formation = formation_by_atomization(build_model(made, ModelOptions(zpe_scale=0.9806)), atoms)
        expected = bond_sum_kJ_mol(bonding(made).types)
        if expected is None:
            continue
        apart = sum(n * atom_references()[e].dHf0_kJ_mol for e, n in build_model(made).composition.items())
        assert abs(apart - formation.dHf0_kJ_mol - expected) < 0.76 * bound_kJ_mol(made), path.name


def test_labels_of_the_bond_table_are_those_of_the_bonds() -> None:
    from heatwright.formation.corrections import bond_label

    assert all(bond_label(label) == label for label in mean_bond_enthalpies())


# --- the ledger ---------------------------------------------------------------------------------------------------


def test_everything_at_once_adds_up() -> None:
    corrections = [Correction("bond", "C-H", -0.7, "x"), Correction("atom", "O", 1.1, "y")]
    formation = atomized(methanol(), spin_orbit=True, corrections=corrections)
    assert adds_up(formation)
    assert all(line.source for line in formation.ledger)
    assert formation.source.endswith(
        "ATcT 1.112; spin-orbit lowering of the atoms; corrections from x; corrections from y"
    )
    assert formation.ledger[3].what == "electronic atomization energy, SCF"


def test_atoms_of_the_user_are_used() -> None:
    from dataclasses import replace

    mine = atom_references() | {"C": replace(atom_references()["C"], dHf0_kJ_mol=712.0, source="mine")}
    formation = atomized(methanol(), references=mine)
    assert formation.dHf0_kJ_mol == pytest.approx(-189.82 + 0.612, abs=1e-6)
    assert "mine" in formation.source
