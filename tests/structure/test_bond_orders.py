"""Bond orders from geometries: the G2/97 set, invariances, computed outputs, additive counts, and what is refused."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from ase import Atoms
from ase.build import molecule as ase_molecule
from ase.collections import g2

from heatwright.elements import atomic_number
from heatwright.findings import Refused
from heatwright.molecule import Molecule, Stated
from heatwright.reading.outputs import read_output
from heatwright.structure import lewis
from heatwright.structure.bond_orders import Bonding, bonding
from molecules import molecule
from outside import SHARED, needs_shared

TABLE = Path(__file__).parents[1] / "data" / "structure" / "g2_bonds.csv"
ROWS = list(csv.DictReader(line for line in TABLE.read_text().splitlines() if not line.startswith("#")))


def types(text: str) -> dict[str, int]:
    """``2*C-C C=O`` as counts."""
    parts = [word.rpartition("*") for word in text.split()]
    return {label: int(n or 1) for n, _, label in parts}


G2 = {row["g2_name"]: types(row["bonds"]) for row in ROWS}
UNPAIRED = {row["g2_name"]: int(row["unpaired"]) for row in ROWS}


def made(atoms: Atoms, unpaired: int = 0, charge: int = 0) -> Molecule:
    symbols = " ".join(atoms.get_chemical_symbols())
    return molecule(symbols, atoms.positions.tolist(), [], multiplicity=unpaired + 1, charge=charge)


def placed(symbols: str, xyz: list[list[float]], charge: int = 0, unpaired: int = 0) -> Molecule:
    return molecule(symbols, xyz, [], charge=charge, multiplicity=unpaired + 1)


def of_g2(name: str) -> Bonding:
    return bonding(made(ase_molecule(name), UNPAIRED[name]))


# --- the G2/97 set ------------------------------------------------------------------------------------------------


def test_the_table_is_whole() -> None:
    assert set(G2) == {name for name in g2.names if len(ase_molecule(name)) > 1}
    assert len(G2) == 148


@pytest.mark.parametrize("name", G2)
def test_g2_molecules_have_their_bonds(name: str) -> None:
    found = of_g2(name)
    assert found.types == G2[name]
    assert found.unpaired == UNPAIRED[name]
    assert sum(found.formal_charges) == pytest.approx(0.0)


@pytest.mark.parametrize("seed", range(3))
def test_order_of_atoms_rotation_and_noise_do_not_matter(seed: int) -> None:
    random = np.random.default_rng(seed)
    for name, known in G2.items():
        atoms = ase_molecule(name)[random.permutation(len(ase_molecule(name)))]
        atoms.rotate(float(random.uniform(10, 350)), random.normal(size=3))
        atoms.positions += random.uniform(-0.02, 0.02, atoms.positions.shape)
        assert bonding(made(atoms, UNPAIRED[name])).types == known, name


@needs_shared
def test_computed_outputs_have_the_same_bonds() -> None:
    assert SHARED is not None
    others = {
        "HNO": "H-N N=O", "HO2": "H-O O-O", "CH3OO": "3*C-H C-O O-O",
        "CH3CH2OH_gauche": "C-C 5*C-H C-O H-O", "CH3CH2OH_gauche_mirror": "C-C 5*C-H C-O H-O",
        "gauche_butane": "3*C-C 10*C-H", "trans_butane": "3*C-C 10*C-H",
    }  # fmt: skip
    known = G2 | {name: types(text) for name, text in others.items()}
    files = sorted((SHARED / "computed").glob("*.out.gz"))
    if not files:
        pytest.skip("the folder of reference data holds no computed outputs")
    found = {f.name.removesuffix(".out.gz"): bonding(read_output(str(f))).types for f in files}
    assert found == {name: known[name] for name in found}


# --- counts -------------------------------------------------------------------------------------------------------


def alkane(n: int) -> Atoms:
    """The zigzag chain CnH2n+2, n ≥ 2, with tetrahedral angles."""
    carbon = np.array([[1.257 * i, 0.445 * (-1) ** i, 0.0] for i in range(n)])
    hydrogen = [c + np.array([0.0, 0.63 * (-1) ** i, z]) for i, c in enumerate(carbon) for z in (0.89, -0.89)]
    ends = [carbon[0] + [-0.89, -0.63, 0.0], carbon[-1] + [0.89, -0.63 * (-1) ** (n - 1), 0.0]]
    return Atoms(f"C{n}H{2 * n + 2}", np.vstack([carbon, hydrogen, ends]))


@pytest.mark.parametrize("n", [3, 4, 7, 20])
def test_counts_of_a_homologous_series_are_additive(n: int) -> None:
    found = bonding(made(alkane(n)))
    assert found.types == {"C-C": n - 1, "C-H": 2 * n + 2}
    assert found.environments == {"C(2H,--)": n - 2, "C(3H,-)": 2}


def test_environments_tell_apart_what_a_homodesmotic_reaction_keeps() -> None:
    assert of_g2("C2H6").environments == {"C(3H,-)": 2}
    assert of_g2("CH4").environments == {"C(4H)": 1}
    assert of_g2("CH3").environments == {"C(3H)": 1}
    assert of_g2("H2").environments == {"H(1H)": 2}
    assert of_g2("C3H6_Cs").environments == {"C(1H,-=)": 1, "C(2H,=)": 1, "C(3H,-)": 1}
    assert of_g2("CH3CONH2").environments == {"C(0H,--=)": 1, "C(3H,-)": 1, "N(2H,-)": 1, "O(0H,=)": 1}
    assert of_g2("C6H6").environments == {"C(1H,::)": 6}
    ammonium = placed("N H H H H", [[0, 0, 0], *(0.59 * np.array(TETRAHEDRON)).tolist()], charge=1)
    assert bonding(ammonium).environments == {"N(4H,+1)": 1}


def test_atoms_have_no_bonds() -> None:
    found = bonding(placed("O", [[0.0, 0.0, 0.0]], unpaired=2))
    assert (found.bonds, found.unpaired, found.types) == ((), 2, {})
    assert found.environments == {"O(0H)": 1}


# --- ions, radicals and geometry ----------------------------------------------------------------------------------

TETRAHEDRON = [[1, 1, 1], [1, -1, -1], [-1, 1, -1], [-1, -1, 1]]
PLANAR = [[0, 0, 0], [1.09, 0, 0], [-0.545, 0.944, 0], [-0.545, -0.944, 0]]
FORMATE = [[0, 0, 0], [0, 0, 1.13], [1.13, 0, -0.55], [-1.13, 0, -0.55]]


def test_ions() -> None:
    assert bonding(placed("C H H H", PLANAR, charge=1)).formal_charges == (1.0, 0.0, 0.0, 0.0)
    assert bonding(placed("O H H H", PLANAR, charge=1)).types == {"H-O": 3}
    formate = bonding(placed("C H O O", FORMATE, charge=-1))
    assert formate.types == {"C-H": 1, "C:O": 2}
    assert formate.formal_charges == (0.0, 0.0, -0.5, -0.5)
    assert formate.environments == {"C(1H,::)": 1, "O(0H,:,-0.5)": 2}


def rectangle(single: float, double: float) -> Molecule:
    x, y = single / 2, double / 2
    carbon = [[x, y, 0], [x, -y, 0], [-x, -y, 0], [-x, y, 0]]
    hydrogen = [[np.sign(a) * (x + 0.77), np.sign(b) * (y + 0.77), 0] for a, b, _ in carbon]
    return placed("C C C C H H H H", carbon + hydrogen)


def test_lengths_decide_where_counting_cannot() -> None:
    """Cyclobutadiene is a rectangle (1.35 and 1.56 Å in textbooks); in the square the bonds are delocalised."""
    assert bonding(rectangle(1.56, 1.35)).types == {"C-C": 2, "C-H": 4, "C=C": 2}
    assert bonding(rectangle(1.44, 1.44)).types == {"C-H": 4, "C:C": 4}


def test_atoms_across_a_small_ring_are_no_bond() -> None:
    """Bicyclo[1.1.1]pentane: the bridgeheads are 1.87 Å apart, nearer than 1.3 times two radii, and not bonded."""
    head = [[0, 0, 0.935], [0, 0, -0.935]]
    turns = [0.0, 2 * np.pi / 3, 4 * np.pi / 3]
    bridge = [[1.24 * np.cos(a), 1.24 * np.sin(a), 0.0] for a in turns]
    hydrogen = [[1.86 * np.cos(a), 1.86 * np.sin(a), z] for a in turns for z in (0.9, -0.9)]
    cage = placed("C C C C C " + "H " * 8, head + bridge + hydrogen + [[0, 0, 2.03], [0, 0, -2.03]])
    assert bonding(cage).types == {"C-C": 6, "C-H": 8}
    hydroxide = placed("Cs O H", [[0, 0, 0], [0, 0, 2.40], [0, 0, 3.36]])
    assert bonding(hydroxide).types == {"Cs-O": 1, "H-O": 1}


def test_a_diatomic_molecule_needs_no_geometry() -> None:
    stated = Stated(name="NO", rotational_constants_cm1=(1.70,))
    m = placed("N O", [[0, 0, 0], [0, 0, 1.15]], unpaired=1).but(coordinates_A=np.empty((0, 3)), stated=stated)
    assert bonding(m).types == {"N=O": 1}


# --- large molecules ----------------------------------------------------------------------------------------------


def test_buckminsterfullerene_is_delocalised_all_over() -> None:
    found = bonding(made(ase_molecule("C60")))
    assert found.types == {"C:C": 90}
    assert found.environments == {"C(0H,:::)": 60}


def test_too_large_a_search_is_refused_with_a_sentence(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(lewis, "MOST_MOVES", 1000)
    moved = ase_molecule("C60")
    moved.positions += 0.001
    with pytest.raises(Refused, match=r"60 atoms allow too many Lewis structures .*\[bonding-unclear\]"):
        bonding(made(moved))


# --- refusals -----------------------------------------------------------------------------------------------------

DIBORANE = [
    [0, 0, 0.885], [0, 0, -0.885], [0, 0.975, 0], [0, -0.975, 0],
    [1.04, 0, 1.46], [-1.04, 0, 1.46], [1.04, 0, -1.46], [-1.04, 0, -1.46],
]  # fmt: skip
TRIANGLE = [[0.0, 0.0, 0.0], [0.87, 0.0, 0.0], [0.435, 0.753, 0.0]]
OCTAHEDRON = [[2.0 * s * (k == a) for k in range(3)] for a in range(3) for s in (1, -1)]
CLUSTER = [[1.9 * x for x in row] for row in ([0, 0, 0], [1, 1, 0], [1, 0, 1], [0, 1, 1])]
REFUSED = {
    "bridging hydrogen": (placed("B B H H H H H H", DIBORANE), r"H3: .* 2 others: B1 \(1\.32 Å\), B2 \(1\.32 Å\)"),
    "H3+": (placed("H H H", TRIANGLE, charge=1), "H1: .* 2 others: H2"),
    "CH5+": (
        placed("C H H H H H", [[0, 0, 0], *[[*row] for row in np.array(TETRAHEDRON) * 0.63], [1.2, 0, 0]], charge=1),
        "C1: .* 5 others",
    ),
    "alkali cluster": (placed("Li Li Li Li", CLUSTER), "Li1: .* 3 others"),
    "transition metal": (placed("Fe O", [[0, 0, 0], [0, 0, 1.62]], unpaired=4), "Fe1: Fe has no fixed valence"),
    "one-electron bond": (placed("H H", [[0, 0, 0], [0, 0, 0.79]], charge=1, unpaired=1), "no Lewis structure"),
    "three-electron bond of F2-": (
        placed("F F", [[0, 0, 0], [0, 0, 1.48]], charge=-1, unpaired=1), "no Lewis structure with charge -1 and mult",
    ),
    "hydrogen half-way from C to O": (
        placed("C H H H H O H", [[0, 0, 0], [-0.4, 1.02, 0], [-0.4, -0.51, 0.88], [-0.4, -0.51, -0.88], [1.2, 0, 0],
                                 [2.5, 0, 0], [2.7, 0.93, 0]], unpaired=1),
        r"H5: .* C1 \(1\.20 Å\), O6 \(1\.30 Å\)",
    ),
    "hydrogen half-way from C to N": (
        placed("C N H", [[0, 0, 0], [1.19, 0, 0], [0.29, 1.14, 0]]), r"H3: .* C1 \(1\.18 Å\), N2 \(1\.45 Å\)",
    ),
    "double bond too long": (
        placed("C C H H H H", [[0, 0, 0], [1.9, 0, 0], [-0.55, 0.9, 0], [-0.55, -0.9, 0], [2.45, 0.9, 0],
                               [2.45, -0.9, 0]]),
        r"C1-C2: .* order 2 here, but it is 1\.90 Å long",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", REFUSED)
def test_what_has_no_lewis_structure_is_refused_with_its_atoms(name: str) -> None:
    m, words = REFUSED[name]
    with pytest.raises(Refused, match=words) as caught:
        bonding(m)
    assert [f.code for f in caught.value.findings] == ["bonding-unclear"]


def test_other_refusals_keep_their_own_codes() -> None:
    water = ase_molecule("H2O")
    pair = water.copy()
    pair.positions += [0.0, 0.0, 4.0]
    with pytest.raises(Refused, match=r"2 parts .*: O1 H2 H3; O4 H5 H6.*\[fragments\]"):
        bonding(made(water + pair))
    with pytest.raises(Refused, match=r"10 electrons cannot have multiplicity 2.*\[multiplicity-impossible\]"):
        bonding(made(water, unpaired=1))
    with pytest.raises(Refused, match=r"\[no-charge\]"):
        bonding(made(water).but(charge=None))
    with pytest.raises(Refused, match=r"\[no-multiplicity\]"):
        bonding(made(water).but(multiplicity=None))
    with pytest.raises(Refused, match=r"\[no-geometry\]"):
        bonding(made(water).but(coordinates_A=np.empty((0, 3))))


def test_symbols_of_the_table_are_elements() -> None:
    for known in G2.values():
        for label in known:
            a, b = (part for part in label.replace("=", "-").replace("#", "-").replace(":", "-").split("-"))
            assert atomic_number(a)
            assert a <= b
