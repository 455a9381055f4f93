"""SMILES texts: published examples by formula, other spellings of one molecule, a general library, and faults."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright.elements import formula
from heatwright.findings import Refused
from heatwright.structure.cis_trans import has_sides, stated_sides
from heatwright.structure.identity import identity_of, identity_of_smiles
from heatwright.structure.smiles import parse_smiles
from molecules import molecule

# Examples of D. Weininger, J. Chem. Inf. Comput. Sci. 28, 31 (1988), the OpenSMILES specification (2016) and the common
# collections of SMILES (cephalostatin 1, oenanthotoxin, thiamine, ...), from memory; formulas are the substances' own.
PUBLISHED = {
    "C": "CH4",
    "N#N": "N2",
    "CN=C=O": "C2H3NO",
    "[Cu+2].[O-]S(=O)(=O)[O-]": "CuO4S",
    "O=Cc1ccc(O)c(OC)c1": "C8H8O3",
    "CC(=O)NCCC1=CNc2c1cc(OC)cc2": "C13H16N2O2",
    "CCc1c[n+]2ccc3c4ccccc4[nH]c3c2cc1": "C17H15N2+",
    "CN1CCC[C@H]1c2cccnc2": "C10H14N2",
    "CCC[C@@H](O)CC\\C=C\\C=C\\C#CC#C\\C=C\\CO": "C17H22O2",
    "OC[C@@H](O1)[C@@H](O)[C@H](O)[C@@H](O)[C@H](O)1": "C6H12O6",
    "OC[C@@H](O1)[C@@H](O)[C@H](O)[C@@H]2[C@@H]1c3c(O)c(OC)c(O)cc3C(=O)O2": "C14H16O9",
    "OCCc1c(C)[n+](cs1)Cc2cnc(C)nc2N": "C12H17N4OS+",
    "CC(C)[C@@]12C[C@@H]1[C@@H](C)C(=O)C2": "C10H16O",
    "CC(C)(O1)C[C@@H](O)[C@@]1(O2)[C@@H](C)[C@@H]3CC=C4[C@]3(C2)C(=O)C[C@H]5[C@H]4CC[C@@H](C6)[C@]5(C)Cc(n7)c6nc("
    "C[C@@]89(C))c7C[C@@H]8CC[C@@H]%10[C@@H]9C[C@@H](O)[C@@]%11(C)C%10=C[C@H](O%12)[C@]%11(O)[C@H](C)[C@]%12(O%13)"
    "[C@H](O)C[C@@]%13(C)CO": "C54H74N2O10",
    "[2H]O[2H]": "D2O",
    "[13CH4]": "CH4",
    "F/C=C/F": "C2H2F2",
    "c1ccc2ccccc2c1": "C10H8",
    "c1ccccc1-c1ccccc1": "C12H10",
    "n1ccccc1": "C5H5N",
    "[nH]1cccc1": "C4H5N",
    "Cn1cccc1": "C5H7N",
    "o1cccc1": "C4H4O",
    "s1cccc1": "C4H4S",
    "[se]1cccc1": "C4H4Se",
    "O=c1cc[nH]cc1": "C5H5NO",
    "CN(=O)=O": "CH3NO2",
    "C[N+](=O)[O-]": "CH3NO2",
    "OP(=O)(O)O": "H3O4P",
    "CS(C)(=O)=O": "C2H6O2S",
    "OCl(=O)(=O)=O": "ClHO4",
    "FS(F)(F)(F)(F)F": "F6S",
    "[NH4+]": "H4N+",
    "[OH3+]": "H3O+",
    "[Fe+++]": "Fe+3",
    "[Fe+3]": "Fe+3",
    "[O--]": "O-2",
    "[OH-:7]": "HO-",
    "B(O)(O)O": "BH3O3",
    "Br[C@TH1H](F)Cl": "CHBrClF",
    "C12C3C4C1C5C2C3C45": "C8H8",
}


@pytest.mark.parametrize("text", PUBLISHED, ids=lambda t: t[:24])
def test_published_examples(text: str) -> None:
    graph = parse_smiles(text)
    assert formula(graph.composition, graph.charge) == PUBLISHED[text]
    assert len(graph.isotopes) == len(graph.atomic_numbers)


# The specification's own pairs of equal texts, and orders of atoms.
@pytest.mark.parametrize(
    ("one", "other"),
    [
        ("C1.C1", "CC"),
        ("C%25CCCCC%25", "C1CCCCC1"),
        ("C=1CCCCC=1", "C=1CCCCC1"),
        ("C=1CCCCC1", "C1CCCCC=1"),
        ("C0CCCCC0", "C1CCCCC1"),
        ("C(CO)C", "OCCC"),
        ("c1ccccc1", "C1=CC=CC=C1"),
        ("C1=CC=CC=C1", "[CH]1:[CH]:[CH]:[CH]:[CH]:[CH]1"),
        ("[CH3][CH2][OH]", "CCO"),
        ("[H]C([H])([H])[H]", "C"),
        ("C-C", "CC"),
        ("C(O)C", "CCO"),
        ("N[C@](Br)(O)C", "N[C@@](Br)(O)C"),
        ("[12CH3][H]", "C"),
        ("C(C.O)C", "CCC.O"),
    ],
)
def test_two_texts_for_one_molecule(one: str, other: str) -> None:
    assert identity_of_smiles(one) == identity_of_smiles(other)


@pytest.mark.parametrize(
    ("one", "other"),
    [("CCO", "COC"), ("C#N", "[C-]#[NH+]"), ("CC=C", "C1CC1"), ("CC=O", "C1CO1"), ("[2H]OC", "OC[2H]"),
     ("C", "[13CH4]"), ("CC(C)C", "CCCC"), ("c1ccccc1C", "C1=CCC=CC1=C")],
)  # fmt: skip
def test_two_molecules_of_one_formula(one: str, other: str) -> None:
    assert identity_of_smiles(one).graph != identity_of_smiles(other).graph


def test_bonds_with_orders() -> None:
    graph = parse_smiles("O=CC#N")
    assert [b for b in graph.bonds if b[1] < 4] == [(0, 1, 2.0), (1, 2, 1.0), (2, 3, 3.0)]
    assert np.array_equal(graph.bonded, graph.bonded.T)
    assert [order for *_, order in parse_smiles("c1ccccc1").bonds].count(1.5) == 6


@pytest.mark.parametrize(
    ("text", "character", "word"),
    [
        ("", 0, "empty"),
        ("C1CC", 2, "ring closure 1 is not closed"),
        ("C(C", 2, "not closed"),
        ("C)C", 2, "closes that was not opened"),
        ("(C)C", 1, "without an atom"),
        ("C()C", 3, "ends without an atom"),
        ("C==C", 3, "follow each other"),
        ("=CC", 1, "no atom before it"),
        ("CC=", 3, "leads nowhere"),
        ("C(=)C", 4, "leads nowhere"),
        ("C11", 3, "to itself"),
        ("C1C1", 4, "bonded twice"),
        ("C12CC12", 7, "bonded twice"),
        ("C=1CC-1", 7, "opened as '=' and closed as '-'"),
        ("C%1CC", 2, "two digits"),
        ("C(1CC1)", 3, "does not follow an atom"),
        ("1CC1", 1, "does not follow an atom"),
        ("C.", 2, "ends with a dot"),
        (".C", 1, "no atom before it"),
        ("C..C", 3, "no atom before it"),
        ("[CH3", 1, "not closed"),
        ("[]", 1, "cannot be read"),
        ("[Xx]", 1, "no element Xx"),
        ("[HH]", 1, "hydrogens of its own"),
        ("[C+-]", 1, "cannot be read"),
        ("C*", 2, "any element"),
        ("[*]", 1, "any element"),
        ("CSi", 3, "in brackets, such as [Si]"),
        ("C C", 2, "space"),
        ("ccO", 1, "not in an aromatic ring"),
        ("C(C)(C)(C)(C)C", 1, "at most 4"),
        ("CN(C)(C)(C)(C)C", 2, "at most 5"),
        ("F=C", 1, "at most 1"),
        ("C!C", 2, "no atom, bond, ring closure or branch"),
    ],
)
def test_faults_name_the_character(text: str, character: int, word: str) -> None:
    with pytest.raises(Refused) as caught:
        parse_smiles(text)
    (finding,) = caught.value.findings
    assert finding.code == "smiles-wrong"
    assert word in finding.text
    assert not character or finding.where.endswith(f"character {character}")


# F/C=C/F is trans, F\C=C/F is cis (OpenSMILES specification), and every other spelling of the two.
TRANS = ["F/C=C/F", "F\\C=C\\F", "C(\\F)=C/F", "[H]/C(F)=C(/[H])F", "F/C=C(/F)[H]", "F/C([H])=C/F", "F/C=C1.F\\1"]
CIS = ["F\\C=C/F", "F/C=C\\F", "C(/F)=C/F", "[H]/C(F)=C(\\[H])F", "F/C=C1.F/1", "C/1=C/F.F1"]


def test_sides_of_a_double_bond() -> None:
    (trans,), (cis,) = ({stated_sides(t) for t in texts} for texts in (TRANS, CIS))
    assert trans != cis
    assert len(trans) == len(cis) == 1
    assert stated_sides("FC=CF") == stated_sides("C/C=C") == ()


@pytest.mark.parametrize("is_cis", [True, False])
def test_sides_of_a_geometry(is_cis: bool) -> None:
    side = 1.0 if is_cis else -1.0
    xyz = [[0.0, 0.0, 0.0], [1.32, 0.0, 0.0], [-0.68, 1.15, 0.0], [2.0, side * 1.15, 0.0], [-0.55, -0.93, 0.0],
           [1.87, -side * 0.93, 0.0]]  # fmt: skip
    made = molecule("C C F F H H", xyz, [])
    assert identity_of(made) == identity_of_smiles("FC=CF")
    assert has_sides(made, stated_sides(CIS[0])) is is_cis
    assert has_sides(made, stated_sides(TRANS[0])) is not is_cis
    assert has_sides(made, ())


SPELT = [
    *(t for t in PUBLISHED if t != "[Fe+++]"),
    "C1CC2CCC1C2",
    "CC(=O)Oc1ccccc1C(=O)O",
    "N[C@@H](C)C(=O)O",
    "C/C=C/C=O",
    "[O-][n+]1ccccc1",
    "[CH2]C=C",
]


@pytest.mark.parametrize("text", TRANS + CIS)
def test_a_general_library_sees_the_same_sides(text: str) -> None:
    chem = pytest.importorskip("rdkit.Chem", reason="RDKit is not installed")
    assert stated_sides(chem.MolToSmiles(chem.MolFromSmiles(text))) == stated_sides(text)


@pytest.mark.parametrize("text", SPELT, ids=lambda t: t[:24])
def test_a_general_library_sees_the_same_graph(text: str) -> None:
    """RDKit (G. Landrum et al., BSD licence) reads the text and writes it anew, from any atom, Kekulé or aromatic."""
    chem = pytest.importorskip("rdkit.Chem", reason="RDKit is not installed")
    parameters = chem.SmilesParserParams()
    parameters.sanitize = False
    theirs = chem.MolFromSmiles(text, parameters)
    if chem.SanitizeMol(theirs, catchErrors=True):
        pytest.skip("RDKit takes no valence of that kind")
    mine = identity_of_smiles(text)
    theirs = chem.AddHs(theirs)
    assert sorted(a.GetAtomicNum() for a in theirs.GetAtoms()) == sorted(parse_smiles(text).atomic_numbers)
    assert theirs.GetNumBonds() == len(parse_smiles(text).bonds)
    for start in (0, theirs.GetNumAtoms() // 2, theirs.GetNumAtoms() - 1):
        for flags in ({}, {"kekuleSmiles": True}, {"allBondsExplicit": True}, {"doRandom": True}):
            copy = chem.Mol(theirs)
            if "kekuleSmiles" in flags:
                chem.Kekulize(copy, clearAromaticFlags=True)
            chosen = {} if "doRandom" in flags else {"rootedAtAtom": start}
            assert identity_of_smiles(chem.MolToSmiles(copy, **flags, **chosen)) == mine
            assert identity_of_smiles(chem.MolToSmiles(chem.RemoveHs(copy), **flags)) == mine
