"""Lewis structures of graphs: radicals, ions and hypervalent molecules, counts of Kekulé structures, brute force."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from ase.build import molecule

from heatwright.elements import atomic_number
from heatwright.structure.bonds import bonds
from heatwright.structure.frame import Frame
from heatwright.structure.lewis import DEGENERATE, Structures, lewis_structures

# Elements, bonds as pairs of places (hexadecimal, from 0), charge, unpaired electrons, and the orders of the bonds
# between atoms that are not hydrogen, ":" where the best structures differ.  Common practice, no source.
KNOWN: dict[str, tuple[str, str, int, int, str]] = {
    "HNC": ("HNC", "01 12", 0, 0, "3"),
    "CH3NC": ("CNCHHH", "01 12 03 04 05", 0, 0, "13"),
    "CF2": ("CFF", "01 02", 0, 0, "11"),
    "HCOH": ("COHH", "01 02 13", 0, 0, "1"),
    "CH2 singlet": ("CHH", "01 02", 0, 0, ""),
    "CH2 triplet": ("CHH", "01 02", 0, 2, ""),
    "cyclopropenylidene": ("CCCHH", "01 12 02 03 14", 0, 0, "211"),
    "allyl": ("CCCHHHHH", "01 12 03 04 15 26 27", 0, 1, "::"),
    "propargyl": ("CCCHHH", "01 12 03 24 25", 0, 1, "::"),
    "vinoxy": ("CCOHHH", "01 12 03 04 15", 0, 1, "::"),
    "vinoxide": ("CCOHHH", "01 12 03 04 15", -1, 0, "21"),
    "vinyl": ("CCHHH", "01 02 03 14", 0, 1, "2"),
    "ketenyl": ("CCOH", "01 12 03", 0, 1, "::"),
    "formyl cation": ("COH", "01 02", 1, 0, "3"),
    "protonated formaldehyde": ("COHHH", "01 02 03 14", 1, 0, "2"),
    "NCO": ("NCO", "01 12", 0, 1, "::"),
    "HNCO": ("NCOH", "01 12 03", 0, 0, "22"),
    "HCNO": ("CNOH", "01 12 03", 0, 0, "31"),
    "HN3": ("NNNH", "01 12 03", 0, 0, "::"),
    "NO3": ("NOOO", "01 02 03", 0, 1, ":::"),
    "HNO3": ("NOOOH", "01 02 03 34", 0, 0, "::1"),
    "HONO": ("ONOH", "01 12 03", 0, 0, "12"),
    "N2O4": ("NNOOOO", "01 02 03 14 15", 0, 0, "1::::"),
    "NO+": ("NO", "01", 1, 0, "3"),
    "NO2+": ("NOO", "01 02", 1, 0, "22"),
    "O2-": ("OO", "01", -1, 1, "1"),
    "O2+": ("OO", "01", 1, 1, "2"),
    "CO+": ("CO", "01", 1, 1, "3"),
    "SO3": ("SOOO", "01 02 03", 0, 0, "222"),
    "sulfate": ("SOOOO", "01 02 03 04", -2, 0, "::::"),
    "SF6": ("SFFFFFF", "01 02 03 04 05 06", 0, 0, "111111"),
    "POF3": ("POFFF", "01 02 03 04", 0, 0, "2111"),
    "ClO2": ("ClOO", "01 02", 0, 1, "::"),
    "HClO4": ("ClOOOOH", "01 02 03 04 15", 0, 0, "1222"),
    "XeF2": ("XeFF", "01 02", 0, 0, "11"),
    "BH4-": ("BHHHH", "01 02 03 04", -1, 0, ""),
    "H3NBH3": ("BNHHHHHH", "01 02 03 04 15 16 17", 0, 0, "1"),
    "HBO": ("BOH", "01 02", 0, 0, "2"),
    "BF": ("BF", "01", 0, 0, "1"),
    "BO": ("BO", "01", 0, 1, "2"),
    "BeO": ("BeO", "01", 0, 0, "2"),
    "Al2Cl6": ("AlClClClClAlClCl", "01 02 03 04 35 45 56 57", 0, 0, "11111111"),
    "S2O": ("SSO", "01 12", 0, 0, "22"),
    "PN": ("PN", "01", 0, 0, "3"),
    "PbO": ("PbO", "01", 0, 0, "2"),
    "C3": ("CCC", "01 12", 0, 0, "22"),
    "CCO triplet": ("CCO", "01 12", 0, 2, "::"),
    "ethylene triplet": ("CCHHHH", "01 02 03 14 15", 0, 2, "1"),
    "phenoxy": ("CCCCCCOHHHHH", "01 12 23 34 45 05 06 17 28 39 4a 5b", 0, 1, ":::::::"),
    "phenyl": ("CCCCCCHHHHH", "01 12 23 34 45 05 16 27 38 49 5a", 0, 1, "::::::"),
    "cyclopentadienide": ("CCCCCHHHHH", "01 12 23 34 04 05 16 27 38 49", -1, 0, ":::::"),
    "imidazolylidene": ("CNCCNHHHH", "01 12 23 34 04 15 46 27 38", 0, 0, "11211"),
}  # fmt: skip


def solved(frame: Frame) -> Structures | None:
    found = lewis_structures(frame)
    return found.structures() if found else None


def split(formula: str) -> tuple[int, ...]:
    symbols: list[str] = []
    for letter in formula:
        if letter.islower():
            symbols[-1] += letter
        else:
            symbols.append(letter)
    return tuple(atomic_number(s) for s in symbols)


def written(frame: Frame, found: Structures) -> str:
    heavy = [b for b, (i, j) in enumerate(frame.bonds) if 1 not in (frame.atomic_numbers[i], frame.atomic_numbers[j])]
    return "".join(str(min(found.orders[b])) if len(found.orders[b]) == 1 else ":" for b in heavy)


@pytest.mark.parametrize("name", KNOWN)
def test_orders_of_known_molecules(name: str) -> None:
    formula, pairs, charge, unpaired, orders = KNOWN[name]
    frame = Frame(split(formula), tuple((int(p[0], 16), int(p[1], 16)) for p in pairs.split()), charge, unpaired)
    found = solved(frame)
    assert found is not None
    assert written(frame, found) == orders
    assert sum(found.charges) == pytest.approx(charge)


# --- counts from the literature -----------------------------------------------------------------------------------


def flake(centres: list[tuple[int, int]]) -> Frame:
    """The benzenoid with hexagons at these places of the triangular lattice, hydrogens at its rim."""
    corners = [(2, -1), (1, 1), (-1, 2), (-2, 1), (-1, -1), (1, -2)]  # in thirds of the lattice vectors
    carbon = sorted({(3 * a + x, 3 * b + y) for a, b in centres for x, y in corners})
    steps = {(corners[k][0] - corners[k - 1][0], corners[k][1] - corners[k - 1][1]) for k in range(6)}
    near = [
        (i, j)
        for i, p in enumerate(carbon)
        for j, q in enumerate(carbon)
        if i < j and (q[0] - p[0], q[1] - p[1]) in steps
    ]
    degree = [sum(i in pair for pair in near) for i in range(len(carbon))]
    rim = [i for i, d in enumerate(degree) if d == 2]
    hydrogens = tuple((i, len(carbon) + k) for k, i in enumerate(rim))
    return Frame((6,) * len(carbon) + (1,) * len(rim), tuple(near) + hydrogens, 0, 0)


def round_about(n: int) -> list[tuple[int, int]]:
    return [(a, b) for a in range(-n, n + 1) for b in range(-n, n + 1) if abs(a + b) <= n]


KEKULE = {
    "benzene": (round_about(0), 2),
    "naphthalene": ([(0, 0), (1, 0)], 3),
    "anthracene": ([(0, 0), (1, 0), (2, 0)], 4),
    "phenanthrene": ([(0, 0), (1, 0), (1, 1)], 5),
    "triphenylene": ([(0, 0), (1, 0), (0, -1), (-1, 1)], 9),
    "coronene": (round_about(1), 20),
    "circumcoronene": (round_about(2), 980),
}
"""S. J. Cyvin, I. Gutman, Kekulé Structures in Benzenoid Hydrocarbons, Springer 1988, from memory."""


@pytest.mark.parametrize("name", KEKULE)
def test_numbers_of_kekule_structures(name: str) -> None:
    centres, count = KEKULE[name]
    found = solved(flake(centres))
    assert found is not None
    assert found.count == count


def test_buckminsterfullerene_has_12500_kekule_structures() -> None:
    """D. J. Klein, T. G. Schmalz, G. E. Hite, W. A. Seitz, J. Am. Chem. Soc. 108, 1301 (1986), from memory."""
    ball = molecule("C60")
    pairs = np.argwhere(np.triu(bonds(ball.numbers, ball.positions)))
    found = solved(Frame((6,) * 60, tuple((int(i), int(j)) for i, j in pairs), 0, 0))
    assert found is not None
    assert found.count == 12500


# --- brute force --------------------------------------------------------------------------------------------------


def by_brute_force(frame: Frame) -> tuple[int, list[set[int]], list[float]] | None:
    """Every structure written down: all orders of all bonds, all ways to complete all atoms."""
    found: list[tuple[int, tuple[int, ...], tuple[int, ...]]] = []
    for extra in product(range(3), repeat=len(frame.open_bonds)):
        above = [0] * len(frame.atomic_numbers)
        for b, e in zip(frame.open_bonds, extra, strict=True):
            for i in frame.bonds[b]:
                above[i] += e
        if any(a > s for a, s in zip(above, frame.spare, strict=True)):
            continue
        for atoms in product(*(frame.completions(i, a) for i, a in enumerate(above))):
            q, u, cost = (tuple(part) for part in zip(*atoms, strict=True))
            if sum(q) == frame.charge and sum(u) == frame.unpaired:
                found.append((sum(cost), extra, q))
    if not found:
        return None
    best = [f for f in found if f[0] <= min(found)[0] + DEGENERATE]
    orders: list[set[int]] = [{1} for _ in frame.bonds]
    for k, b in enumerate(frame.open_bonds):
        orders[b] = {1 + extra[k] for _, extra, _ in best}
    return len(best), orders, [float(np.mean(column)) for column in zip(*(q for *_, q in best), strict=True)]


@pytest.mark.parametrize("seed", range(40))
def test_the_count_agrees_with_every_structure_written_down(seed: int) -> None:
    random = np.random.default_rng(seed)
    n = int(random.integers(3, 5))
    numbers = tuple(int(z) for z in random.choice([6, 7, 8, 14, 15, 16, 5, 9], n))
    chain = {(i, i + 1) for i in range(n - 1)}
    more = {(int(i), int(j)) for i, j in np.sort(random.integers(0, n, (1, 2))) if i < j}
    frame = Frame(numbers, tuple(sorted(chain | more)), int(random.integers(-1, 2)), int(random.integers(0, 3)))
    known, found = by_brute_force(frame), solved(frame)
    assert (known is None) == (found is None)
    if known is not None and found is not None:
        assert (found.count, [set(o) for o in found.orders]) == known[:2]
        assert found.charges == pytest.approx(known[2])
