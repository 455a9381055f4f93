"""Point groups: every kind of group built from its own generators, textbook molecules, isotopologues, invariance."""

from __future__ import annotations

import math
from itertools import chain, permutations, product

import numpy as np
import pytest
from ase.build import molecule
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from heatwright.elements import atomic_number, element
from heatwright.structure.inertia import LINEAR_TOLERANCE_A, line_distances
from heatwright.structure.operations import find_operations
from heatwright.structure.pointgroup import is_group
from heatwright.structure.symmetry import Symmetry, atom_kinds, symmetry, symmetry_findings

GOLDEN = (1 + math.sqrt(5)) / 2
Atoms = list[tuple[str, np.ndarray]]


def symmetry_of(atoms: Atoms, tolerance_A: float = 0.05, heavy: tuple[int, ...] = ()) -> Symmetry:
    """Symmetry of (symbol, place) pairs; the atoms numbered in *heavy* are 1 u heavier."""
    z = [atomic_number(s) for s, _ in atoms]
    masses = [element(n).common_mass_u + (i in heavy) for i, n in enumerate(z)]
    return symmetry(z, masses, np.array([p for _, p in atoms]), tolerance_A)


def turn(axis: tuple[float, float, float], degrees: float) -> np.ndarray:
    """Rotation matrix by Rodrigues' formula."""
    n = np.array(axis) / np.linalg.norm(axis)
    k = np.array([[0, -n[2], n[1]], [n[2], 0, -n[0]], [-n[1], n[0], 0]])
    a = math.radians(degrees)
    return np.eye(3) + math.sin(a) * k + (1 - math.cos(a)) * k @ k


def mirror(normal: tuple[float, float, float]) -> np.ndarray:
    n = np.array(normal) / np.linalg.norm(normal)
    return np.eye(3) - 2 * np.outer(n, n)


def orbit(place: np.ndarray, generators: list[np.ndarray]) -> list[np.ndarray]:
    """All images of a place under what the generators generate."""
    images = [place]
    for image in images:  # grows while it is walked through
        for g in generators:
            if min(np.linalg.norm(g @ image - other) for other in images) > 1e-6:
                images.append(g @ image)
    return images


# --- every group from its generators ----------------------------------------------------------------------------------

X, Y, Z = (1, 0, 0), (0, 1, 0), (0, 0, 1)
INVERSION, SIGMA_H, SIGMA_V, TWOFOLD = -np.eye(3), mirror(Z), mirror(Y), turn(X, 180)
T_ROTATIONS = [turn((1, 1, 1), 120), turn(Z, 180)]
O_ROTATIONS = [turn((1, 1, 1), 120), turn(Z, 90)]
I_ROTATIONS = [turn((1, 1, 1), 120), turn((0, 1, GOLDEN), 72)]


def diagonal_mirror(n: int) -> np.ndarray:
    """The vertical mirror half-way between two of the n twofold axes."""
    a = math.radians(90 / n)
    return mirror((-math.sin(a), math.cos(a), 0))


def axial_groups(n: int) -> dict[str, tuple[list[np.ndarray], int, bool]]:
    """Generators, number of rotations and chirality of the groups with one main axis of order n."""
    c = turn(Z, 360 / n)
    return {
        f"C{n}": ([c], n, True),
        f"C{n}v": ([c, SIGMA_V], n, False),
        f"C{n}h": ([c, SIGMA_H], n, False),
        f"S{2 * n}": ([turn(Z, 180 / n) @ SIGMA_H], n, False),
        f"D{n}": ([c, TWOFOLD], 2 * n, True),
        f"D{n}h": ([c, TWOFOLD, SIGMA_H], 2 * n, False),
        f"D{n}d": ([c, TWOFOLD, diagonal_mirror(n)], 2 * n, False),
    }


GROUPS: dict[str, tuple[list[np.ndarray], int, bool]] = {
    "C1": ([np.eye(3)], 1, True),
    "Cs": ([SIGMA_H], 1, False),
    "Ci": ([INVERSION], 1, False),
    **{name: group for n in range(2, 9) for name, group in axial_groups(n).items()},
    "T": (T_ROTATIONS, 12, True),
    "Td": ([*T_ROTATIONS, mirror((1, 1, 0))], 12, False),
    "Th": ([*T_ROTATIONS, INVERSION], 12, False),
    "O": (O_ROTATIONS, 24, True),
    "Oh": ([*O_ROTATIONS, INVERSION], 24, False),
    "I": (I_ROTATIONS, 60, True),
    "Ih": ([*I_ROTATIONS, INVERSION], 60, False),
}


def from_generators(generators: list[np.ndarray], seeds: int) -> Atoms:
    """Places that no operation of the group leaves where they are, with all their images, far enough apart."""
    places = [np.array(p) for p in ([3.1, 0.9, 2.3], [1.3, 2.9, -0.6], [-2.2, 1.1, 4.1], [0.7, -1.6, 5.3])][:seeds]
    return [(s, 3 * image) for s, p in zip("CNOF", places, strict=False) for image in orbit(p, generators)]


@pytest.mark.parametrize("name", GROUPS)
def test_every_group_is_recognised_from_its_generators(name: str) -> None:
    generators, rotations, chiral = GROUPS[name]
    found = symmetry_of(from_generators(generators, 1 if name[0] in "OI" else 4), tolerance_A=0.01)
    assert (found.point_group, found.symmetry_number, found.chiral) == (name, rotations, chiral)
    assert len(found.operations) == rotations * (1 if chiral else 2)
    assert found.optical_isomers == (2 if chiral else 1)
    assert is_group(found.operations)


@pytest.mark.parametrize("name", ["C3v", "D2d", "S6", "Td", "O"])
def test_operations_do_what_they_say(name: str) -> None:
    atoms = from_generators(GROUPS[name][0], 2)
    found = symmetry_of(atoms, 0.01)
    place = np.array([p for _, p in atoms])
    masses = np.array([element(atomic_number(s)).common_mass_u for s, _ in atoms])
    place = place - masses @ place / masses.sum()
    ops = found.operations
    for matrix, permutation, proper in zip(ops.matrices, ops.permutations, ops.proper, strict=True):
        assert place @ matrix.T == pytest.approx(place[permutation], abs=1e-9)
        assert np.linalg.det(matrix) == pytest.approx(1.0 if proper else -1.0)


# --- textbook molecules -----------------------------------------------------------------------------------------------


def ring(symbol: str, n: int, radius: float, z: float, start: float = 0.0) -> Atoms:
    angles = np.radians(start + 360 / n * np.arange(n))
    return [(symbol, np.array([radius * math.cos(a), radius * math.sin(a), z])) for a in angles]


def ethane(twist: float) -> Atoms:
    carbons = [("C", np.array([0, 0, z])) for z in (0.765, -0.765)]
    return carbons + ring("H", 3, 1.02, 1.16) + ring("H", 3, 1.02, -1.16, twist)


def substituted_ethane(upper: str, lower: str, dihedral: float) -> Atoms:
    """C2 with three substituents at each end (anticlockwise seen from above), the first ones at the dihedral angle."""
    length = {"H": 1.09, "F": 1.38, "C": 1.78}
    ends = [("C", np.array([0, 0, 0.765])), ("C", np.array([0, 0, -0.765]))]
    for symbols, sign, start in ((upper, 1, 0.0), (lower, -1, dihedral)):
        for k, s in enumerate(symbols):
            a, r = math.radians(start + 120 * k), length[s]
            out = np.array([0.943 * r * math.cos(a), 0.943 * r * math.sin(a), sign * (0.765 + r / 3)])
            ends.append(("Cl" if s == "C" else s, out))
    return ends


def metallocene(twist: float) -> Atoms:
    rings = [ring(s, 5, r, z, t) for s, r in (("C", 1.21), ("H", 2.29)) for z, t in ((1.65, 0.0), (-1.65, twist))]
    return [("Fe", np.zeros(3)), *chain.from_iterable(rings)]


def signed(*vectors: tuple[float, float, float]) -> list[np.ndarray]:
    """The vectors with all signs of their components and all cyclic orders, each place once."""
    places = {
        tuple(round(float(s * c), 9) + 0.0 for s, c in zip(signs, np.roll(v, k), strict=True))
        for v in vectors
        for k in range(3)
        for signs in product((1, -1), repeat=3)
    }
    return [np.array(p) for p in sorted(places)]


def buckminsterfullerene() -> Atoms:
    """The truncated icosahedron of edge 1.42 Å."""
    corners = signed((0, 1, 3 * GOLDEN), (1, 2 + GOLDEN, 2 * GOLDEN), (GOLDEN, 2, 2 * GOLDEN + 1))
    return [("C", 0.71 * p) for p in corners]


def dodecaborane() -> Atoms:
    unit = signed((0, 1, GOLDEN))
    return [(s, r * p) for s, r in (("B", 0.89), ("H", 1.52)) for p in unit]


def cubane() -> Atoms:
    corners = signed((1, 1, 1))
    return [(s, r * p) for s, r in (("C", 0.785), ("H", 1.415)) for p in corners]


def tetrahedron(radius: float) -> list[np.ndarray]:
    return [radius / math.sqrt(3) * np.array(p) for p in ((1, 1, 1), (1, -1, -1), (-1, 1, -1), (-1, -1, 1))]


def chair() -> Atoms:
    rings = [(s, r, z) for s, r, z in (("C", 1.46, 0.25), ("H", 1.50, 1.35), ("H", 2.50, -0.10))]
    triples = (ring(s, 3, r, sign * z, start) for s, r, z in rings for sign, start in ((1, 0), (-1, 60)))
    return list(chain.from_iterable(triples))


def centred(half: Atoms) -> Atoms:
    """Atoms and their images in the origin."""
    return half + [(s, -p) for s, p in half]


def divinylbenzene() -> Atoms:
    """trans-1,4-divinylbenzene, planar: half of it, and the other half by inversion."""
    flat = [
        ("C", 1.42, 0.0), ("C", 0.72, 1.20), ("C", 0.68, -1.20), ("H", 1.27, 2.13), ("H", 1.21, -2.14),
        ("C", 2.88, 0.0), ("H", 3.32, 0.99), ("C", 3.70, -1.06), ("H", 3.33, -2.08), ("H", 4.78, -0.94),
    ]  # fmt: skip
    return centred([(s, np.array([x, y, 0.0])) for s, x, y in flat])


def hydrogen_peroxide(dihedral: float) -> Atoms:
    half = math.radians(dihedral / 2)
    ends = [(0.95 * math.cos(half), sign * 0.95 * math.sin(half), sign) for sign in (1, -1)]
    oxygens = [("O", np.array([0, 0, 0.73 * sign])) for sign in (1, -1)]
    return oxygens + [("H", np.array([x, y, 0.88 * sign])) for x, y, sign in ends]


def tetrakis() -> Atoms:
    """C(OH)4 with S4 symmetry: a tetrahedral carbon whose four hydroxyl groups are turned by one angle."""
    s4 = [turn(Z, 90) @ SIGMA_H]
    oxygen = np.array([1.15, 0.0, 0.81])
    return [("C", np.zeros(3)), *(("O", p) for p in orbit(oxygen, s4)),
            *(("H", p) for p in orbit(oxygen + np.array([0.35, 0.85, 0.2]), s4))]  # fmt: skip


BROMO = [("C", np.zeros(3)), *zip(("H", "F", "Cl", "Br"), (np.array(p) * r for p, r in zip(
    tetrahedron(1.0), (1.09, 1.36, 1.76, 1.93), strict=True)), strict=True)]  # fmt: skip
LINE = [np.array([0, 0, z]) for z in (-1.664, -0.602, 0.602, 1.664)]

MOLECULES: dict[str, tuple[Atoms, str, int]] = {
    "ethane staggered": (ethane(60), "D3d", 6),
    "ethane eclipsed": (ethane(0), "D3h", 6),
    "ethane twisted": (ethane(30), "D3", 6),
    "ferrocene staggered": (metallocene(36), "D5d", 10),
    "ferrocene eclipsed": (metallocene(0), "D5h", 10),
    "ferrocene twisted": (metallocene(15), "D5", 10),
    "SF6": ([("S", np.zeros(3)), *(("F", 1.56 * p) for p in signed((1, 0, 0)))], "Oh", 24),
    "SF5Cl": ([("S", np.zeros(3)), *(("Cl" if p[2] > 0 else "F", 1.56 * p) for p in signed((1, 0, 0)))], "C4v", 4),
    "PF5": ([("P", np.zeros(3)), *ring("F", 3, 1.53, 0), ("F", np.array([0, 0, 1.58])),
             ("F", np.array([0, 0, -1.58]))], "D3h", 6),
    "XeF4": ([("Xe", np.zeros(3)), *ring("F", 4, 1.95, 0)], "D4h", 8),
    "C60": (buckminsterfullerene(), "Ih", 60),
    "B12H12": (dodecaborane(), "Ih", 60),
    "cubane": (cubane(), "Oh", 24),
    "P4": ([("P", p) for p in tetrahedron(1.35)], "Td", 12),
    "cyclohexane chair": (chair(), "D3d", 6),
    "S8": (ring("S", 4, 2.35, 0.5) + ring("S", 4, 2.35, -0.5, 45), "D4d", 8),
    "C(OH)4": (tetrakis(), "S4", 2),
    "trans-divinylbenzene": (divinylbenzene(), "C2h", 2),
    "H2O2 gauche": (hydrogen_peroxide(112), "C2", 2),
    "H2O2 trans": (hydrogen_peroxide(180), "C2h", 2),
    "H2O2 cis": (hydrogen_peroxide(0), "C2v", 2),
    "CHFClBr": (BROMO, "C1", 1),
    "dichloroethane anti": (substituted_ethane("CHH", "CHH", 180), "C2h", 2),
    "dichloroethane gauche": (substituted_ethane("CHH", "CHH", 60), "C2", 2),
    "CHFCl-CHFCl meso, anti": (substituted_ethane("CFH", "CFH", 180), "Ci", 1),
    "CHFCl-CHFCl meso, eclipsed": (substituted_ethane("CFH", "CFH", 0), "Cs", 1),
    "CHFCl-CHFCl meso, gauche": (substituted_ethane("CFH", "CFH", 60), "C1", 1),
    "CHFCl-CHFCl like, anti": (substituted_ethane("CFH", "CHF", 180), "C2", 2),
    "acetylene": (list(zip("HCCH", LINE, strict=True)), "Dinfh", 2),
    "HCN": (list(zip("HCN", LINE[:3], strict=True)), "Cinfv", 1),
    "CO": (list(zip("CO", LINE[1:3], strict=True)), "Cinfv", 1),
    "N2": (list(zip("NN", LINE[1:3], strict=True)), "Dinfh", 2),
    "argon": ([("Ar", np.ones(3))], "Kh", 1),
}  # fmt: skip

CHIRAL_GROUPS = {"C1", "C2", "D3", "D5"}


@pytest.mark.parametrize("name", MOLECULES)
def test_textbook_molecules(name: str) -> None:
    """Point groups as in any textbook of group theory for chemists; geometries built here."""
    atoms, group, number = MOLECULES[name]
    found = symmetry_of(atoms)
    assert (found.point_group, found.symmetry_number) == (group, number)
    assert found.chiral == (group in CHIRAL_GROUPS)
    assert symmetry_findings(found) == ()


@pytest.mark.parametrize(
    ("name", "group"),
    [("C3H4_D2d", "D2d"), ("C6H6", "D6h"), ("C2H4", "D2h"), ("CH3", "D3h"), ("BF3", "D3h"), ("cyclobutane", "D2d"),
     ("CH4", "Td"), ("NH3", "C3v"), ("2-butyne", "D3h"), ("trans-butane", "C2h"), ("C5H8", "D2d"), ("CH3OH", "Cs"),
     ("bicyclobutane", "C2v"), ("Si2H6", "D3d"), ("OCHCHO", "C2h"), ("N2H4", "C2"), ("O2", "Dinfh"), ("NO", "Cinfv")],
)  # fmt: skip
def test_point_groups_of_published_geometries(name: str, group: str) -> None:
    """Geometries of the G2/97 set; point groups from memory."""
    atoms = molecule(name)
    assert symmetry(atoms.numbers, atoms.get_masses(), atoms.positions).point_group == group


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize("name", MOLECULES)
def test_noise_of_an_optimiser_changes_no_point_group(name: str, seed: int) -> None:
    atoms, group, _ = MOLECULES[name]
    rng = np.random.default_rng(seed)
    assert symmetry_of([(s, p + rng.normal(0, 0.002, 3)) for s, p in atoms]).point_group == group


def test_a_barely_twisted_ethane_is_in_doubt() -> None:
    """1.5° off the staggered form: some operations within the tolerance, some products of them beyond."""
    for twist in np.arange(50.0, 60.0, 0.25):
        found = symmetry_of(ethane(twist))
        assert found.point_group in {"D3", "D3d"}
        if found.point_group == "D3d" and twist < 59:
            assert found.ambiguous
            assert found.if_tighter == ("D3", 6)
    assert symmetry_of(ethane(50)).point_group == "D3"


def test_a_nearly_planar_molecule_is_in_doubt_of_its_chirality() -> None:
    found = symmetry_of(hydrogen_peroxide(176))
    (finding,) = symmetry_findings(found)
    assert "taken as C2 (symmetry number 2, chiral)" in finding.text
    assert "would make it C2h (symmetry number 2)" in finding.text


def test_a_linear_molecule_with_unequal_halves() -> None:
    """Reversal about the centre of mass misses by what the halves differ in."""
    carbon_dioxide: Atoms = [("O", np.array([0, 0, -1.20])), ("C", np.zeros(3)), ("O", np.array([0, 0, 1.12]))]
    found = symmetry_of(carbon_dioxide)
    centre = 15.99491462 * (1.12 - 1.20) / (2 * 15.99491462 + 12)
    assert found.point_group == "Cinfv"
    assert found.smallest_rejected_deviation_A == pytest.approx(abs(2 * centre))
    assert found.if_looser == ("Dinfh", 2)
    assert "would make it Dinfh (symmetry number 2)" in symmetry_findings(found)[0].text
    assert symmetry_of(carbon_dioxide, 0.1).point_group == "Dinfh"


def test_a_tight_tolerance_keeps_the_axis_of_a_linear_molecule() -> None:
    """What is linear is one rule for inertia and symmetry, so that the two cannot contradict each other."""
    hcn: Atoms = [("H", np.array([0.01, 0, -1.066])), ("C", np.zeros(3)), ("N", np.array([0, 0, 1.153]))]
    found = symmetry_of(hcn, 0.001)
    assert (found.point_group, found.chiral) == ("Cinfv", False)
    assert found.largest_accepted_deviation_A > 0.001
    assert found.ambiguous


# --- isotopes ---------------------------------------------------------------------------------------------------------

METHANE: Atoms = [("C", np.zeros(3)), *(("H", p) for p in tetrahedron(1.09))]


@pytest.mark.parametrize(
    ("heavy", "group", "number"),
    [((), "Td", 12), ((1,), "C3v", 3), ((1, 2), "C2v", 2), ((1, 2, 3), "C3v", 3), ((1, 2, 3, 4), "Td", 12),
     ((0,), "Td", 12)],
    ids=["CH4", "CH3D", "CH2D2", "CHD3", "CD4", "13CH4"],
)  # fmt: skip
def test_isotopologues_of_methane(heavy: tuple[int, ...], group: str, number: int) -> None:
    found = symmetry_of(METHANE, heavy=heavy)
    assert (found.point_group, found.symmetry_number) == (group, number)


def test_isotopes_of_linear_molecules_count() -> None:
    acetylene = MOLECULES["acetylene"][0]
    assert symmetry_of(acetylene, heavy=(0,)).point_group == "Cinfv"
    assert symmetry_of(acetylene, heavy=(0, 3)).symmetry_number == 2


def test_isotopes_make_methane_chiral() -> None:
    z, m = [6, 1, 1, 1, 1], np.array([12.0, 1.0078, 2.0141, 3.0160, 1.0078 + 4])
    found = symmetry(z, m, np.array([p for _, p in METHANE]))
    assert (found.point_group, found.optical_isomers) == ("C1", 2)


def test_isotopes_may_be_ignored() -> None:
    found = symmetry([6, 1, 1, 1, 1], [12.0, 1.0078, 2.0141, 1.0078, 2.0141], np.array([p for _, p in METHANE]),
                     distinguish_isotopes=False)  # fmt: skip
    assert found.point_group == "Td"
    assert found.largest_accepted_deviation_A < 1e-9


def test_rounding_of_masses_is_no_isotope() -> None:
    kinds = atom_kinds(np.array([17, 17, 1, 1]), np.array([34.96885, 34.969, 1.00794, 1.00783]))
    assert kinds.tolist() == [1, 1, 0, 0]


# --- invariance -------------------------------------------------------------------------------------------------------

FLEXIBLE = ["H2O2 gauche", "CHFClBr", "C(OH)4", "ethane twisted", "cyclohexane chair", "XeF4", "HCN", "acetylene",
            "dichloroethane gauche", "CHFCl-CHFCl meso, anti", "SF5Cl", "P4"]  # fmt: skip


@settings(max_examples=80, deadline=None)
@given(st.integers(0, 2**32 - 1), st.sampled_from(FLEXIBLE), st.booleans())
def test_place_order_and_handedness_change_nothing(seed: int, name: str, mirrored: bool) -> None:
    """Rotated, moved, renumbered and, half of the time, seen in a mirror: the same group, number and chirality."""
    rng = np.random.default_rng(seed)
    atoms, group, number = MOLECULES[name]
    frame, _ = np.linalg.qr(rng.normal(size=(3, 3)))
    if (np.linalg.det(frame) < 0) != mirrored:
        frame = -frame
    shift = rng.normal(size=3) * 20
    found = symmetry_of([(atoms[i][0], frame @ atoms[i][1] + shift) for i in rng.permutation(len(atoms))])
    assert (found.point_group, found.symmetry_number) == (group, number)
    assert found.chiral == (group in CHIRAL_GROUPS)


# --- against all permutations -----------------------------------------------------------------------------------------


def by_brute_force(kinds: np.ndarray, x: np.ndarray, limit_A: float) -> dict[tuple[tuple[int, ...], bool], float]:
    """Deviation of every operation within the limit, from every permutation of like atoms (Kabsch's formula)."""
    every = np.array([p for p in permutations(range(len(x))) if (kinds[list(p)] == kinds).all()])
    u, _, vt = np.linalg.svd(np.einsum("kia,ib->kab", x[every], x))
    found = {}
    for proper in (True, False):
        hand = np.sign(np.linalg.det(u @ vt)) * (1 if proper else -1)
        o = np.einsum("kab,kb,kbc->kac", u, np.column_stack([np.ones((len(u), 2)), hand]), vt)
        deviation = np.linalg.norm(np.einsum("kab,ib->kia", o, x) - x[every], axis=2).max(axis=1)
        found.update({(tuple(p.tolist()), proper): d for p, d in zip(every, deviation, strict=True) if d <= limit_A})
    return found


def heap(seed: int, n: int, noise_A: float) -> tuple[np.ndarray, np.ndarray]:
    """Atomic numbers and places of n atoms near the points of a cubic grid, centred."""
    rng = np.random.default_rng(seed)
    place = np.array(list(product((-1, 0, 1), repeat=3)))[rng.permutation(27)[:n]] + rng.normal(0, noise_A, (n, 3))
    return rng.choice([6, 6, 8], n), place


@settings(max_examples=150, deadline=None)
@given(st.integers(0, 2**32 - 1), st.integers(3, 6), st.sampled_from([0.0, 0.02, 0.05, 0.1]), st.floats(0.01, 0.1))
def test_no_operation_is_overlooked(seed: int, n: int, noise_A: float, tolerance_A: float) -> None:
    """All operations within three tolerances, found and measured as by trying every permutation."""
    kinds, x = heap(seed, n, noise_A)
    assume(line_distances(x).max() > 0.1)
    x = x - x.mean(axis=0)
    found = find_operations(kinds, x, 3 * tolerance_A).within(3 * tolerance_A)
    keys = [(tuple(p.tolist()), bool(h)) for p, h in zip(found.permutations, found.proper, strict=True)]
    expected = by_brute_force(kinds, x, 3 * tolerance_A)
    assert set(keys) == set(expected)
    assert found.deviations_A == pytest.approx([expected[key] for key in keys], abs=1e-9)


@settings(max_examples=100, deadline=None)
@given(st.integers(0, 2**32 - 1), st.integers(3, 9), st.floats(0.01, 0.3))
def test_what_is_accepted_is_a_group(seed: int, n: int, tolerance_A: float) -> None:
    """Whatever the geometry and tolerance; the product table is made here, of permutations."""
    kinds, place = heap(seed, n, 0.05)
    found = symmetry(kinds, np.full(n, 12.0), place, tolerance_A)
    ops = found.operations
    members = {(tuple(p.tolist()), bool(h)) for p, h in zip(ops.permutations, ops.proper, strict=True)}
    products = {(tuple(p[i] for i in q), g == h) for p, g in members for q, h in members}
    assert products == members
    assert len(members) == len(ops) == found.symmetry_number * (1 if found.chiral else 2)
    assert found.largest_accepted_deviation_A <= max(tolerance_A, LINEAR_TOLERANCE_A)


# --- what is refused --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("tolerance_A", [0.0, -0.1, 0.5, float("nan"), float("inf")])
def test_a_tolerance_is_positive_and_small(tolerance_A: float) -> None:
    with pytest.raises(ValueError, match="symmetry tolerance is"):
        symmetry_of(METHANE, tolerance_A)


def test_what_is_no_molecule_is_refused() -> None:
    with pytest.raises(ValueError, match="as many atomic numbers as masses"):
        symmetry([1], [1.0, 1.0], [[0, 0, 0], [0, 0, 0.74]])
    with pytest.raises(ValueError, match="atoms 1 and 2 are"):
        symmetry([1, 1], [1.0, 1.0], [[0, 0, 0], [0, 0, 0.0]])
