"""SMILES: the graph of a molecule (elements, hydrogens, bonds) from a line of text.

What is read is OpenSMILES (C. A. James et al., OpenSMILES specification 1.0, 2016, after D. Weininger, J. Chem. Inf.
Comput. Sci. 28, 31 (1988)): the organic subset, atoms in brackets, branches, ring closures, dots.  Of stereochemistry
the sides of double bonds are read; chirality is read over, as mirror images are one species here.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Final, NoReturn

import numpy as np
from numpy.typing import NDArray

from heatwright.elements import atomic_number, composition
from heatwright.findings import Refused, refuse

VALENCES: Final[dict[str, tuple[int, ...]]] = {
    "B": (3,), "C": (4,), "N": (3, 5), "O": (2,), "P": (3, 5), "S": (2, 4, 6),
    "F": (1,), "Cl": (1,), "Br": (1,), "I": (1,),
}  # fmt: skip
"""The valences that hydrogens fill up at an atom written without brackets."""
_RIGID: Final = {"B", "C", "N", "O", "F"}
_ORDERS: Final[dict[str, float]] = {"-": 1.0, "/": 1.0, "\\": 1.0, "=": 2.0, "#": 3.0, "$": 4.0, ":": 1.5}

_TOKEN = re.compile(
    r"(?P<bracket>\[[^\]]*\])|(?P<atom>Br|Cl|[BCNOPSFI]|[bcnops])|(?P<bond>[-=#$:/\\])|%(?P<wide>\d\d)|(?P<ring>\d)"
    r"|(?P<open>\()|(?P<close>\))|(?P<dot>\.)"
)
_BRACKET = re.compile(
    r"\[(?P<isotope>\d+)?(?P<symbol>[A-Z][a-z]?|[bcnops]|as|se)(?:@(?:@|TH[12]|AL[12]|SP[123]|TB\d\d?|OH\d\d?)?)?"
    r"(?P<hydrogens>H\d?)?(?P<charge>\++|-+|[+-]\d\d?)?(?::\d+)?\]"
)


@dataclass(frozen=True, slots=True)
class SmilesGraph:
    """The graph that a SMILES text stands for, with every hydrogen as an atom of its own.

    atomic_numbers : of the atoms in the order of the text, the hydrogens that have no letter of their own at the end.
    isotopes : mass number of each atom, 0 where none is written.
    bonds : (first, second, order) with first < second, sorted; the order is 1, 2, 3, 4, or 1.5 for aromatic bonds.
    charge : the sum over the atoms.
    sides : (a, i, j, b, cis) for each double bond i=j with marks at both ends: whether the neighbours a of i and b of j
        are on one side of it.
    """

    text: str
    atomic_numbers: tuple[int, ...]
    isotopes: tuple[int, ...]
    bonds: tuple[tuple[int, int, float], ...]
    charge: int
    sides: tuple[tuple[int, int, int, int, bool], ...] = ()

    @property
    def composition(self) -> dict[str, int]:
        """Atoms by element symbol in Hill order; deuterium (``[2H]``) is ``D``."""
        deuterium = [
            2.0141 if z == 1 and a == 2 else 0.0 for z, a in zip(self.atomic_numbers, self.isotopes, strict=True)
        ]
        return composition(self.atomic_numbers, deuterium)

    @property
    def bonded(self) -> NDArray[np.bool_]:
        """(n, n) symmetric, True where two atoms are bonded."""
        n = len(self.atomic_numbers)
        matrix = np.zeros((n, n), dtype=np.bool_)
        for i, j, _ in self.bonds:
            matrix[i, j] = matrix[j, i] = True
        return matrix


def parse_smiles(text: str) -> SmilesGraph:
    """The graph of one SMILES text.

    Raises Refused (``smiles-wrong``) with the character at which the text cannot be read on.

    >>> parse_smiles("CC=O").composition, len(parse_smiles("c1ccccc1").bonds)
    ({'C': 2, 'H': 4, 'O': 1}, 12)
    >>> parse_smiles("[NH4+]").charge
    1
    """
    reader = _Reader(text.strip())
    reader.read()
    atoms = reader.atoms
    bonds = {pair: bond.order for pair, bond in reader.bonds.items()}
    numbers = [atomic_number(atom.symbol) for atom in atoms]
    isotopes = [atom.isotope for atom in atoms]
    for i in range(len(atoms)):
        for _ in range(reader.hydrogens(i)):
            bonds[i, len(numbers)] = 1.0
            numbers.append(1)
            isotopes.append(0)
    return SmilesGraph(
        text=reader.text,
        atomic_numbers=tuple(numbers),
        isotopes=tuple(isotopes),
        bonds=tuple(sorted((i, j, order) for (i, j), order in bonds.items())),
        charge=sum(atom.charge for atom in atoms),
        sides=tuple(_sides(reader.bonds)),
    )


def _sides(bonds: Mapping[tuple[int, int], _Bond]) -> Iterator[tuple[int, int, int, int, bool]]:
    """The sides that the marks state (``F/C=C/F`` is trans): one pair of marked neighbours for each double bond."""
    above: dict[int, dict[int, bool]] = {}
    """Of each atom its marked neighbours, and whether they are drawn above it."""
    for pair, bond in bonds.items():
        if bond.symbol in ("/", "\\"):
            start, end = bond.start, pair[0] + pair[1] - bond.start
            rises = bond.symbol == "/"
            above.setdefault(start, {})[end] = rises
            above.setdefault(end, {})[start] = not rises
    for (i, j), bond in sorted(bonds.items()):
        if bond.order == 2.0 and i in above and j in above:
            (a, up), (b, also) = (next(iter(above[k].items())) for k in (i, j))
            yield a, i, j, b, up == also


@dataclass(frozen=True, slots=True)
class _Atom:
    """One atom as written; hydrogens is None when they follow from the valence."""

    symbol: str
    at: int
    aromatic: bool = False
    isotope: int = 0
    hydrogens: int | None = None
    charge: int = 0


@dataclass(frozen=True, slots=True)
class _Bond:
    """A bond: its symbol as written (empty when not), its order, and the atom after which the symbol stands."""

    symbol: str
    order: float
    start: int


@dataclass(slots=True)
class _Reader:
    """Reads one text from left to right; ``atoms`` and ``bonds`` grow."""

    text: str
    atoms: list[_Atom] = field(default_factory=list)
    bonds: dict[tuple[int, int], _Bond] = field(default_factory=dict)
    rings: dict[int, tuple[int, str, int]] = field(default_factory=dict)
    branches: list[tuple[int, int]] = field(default_factory=list)
    last: int | None = None
    """The atom that the next one is bonded to; None at the start and behind a dot."""
    pending: str = ""
    """The bond symbol just read."""
    fresh: bool = True
    """Whether an atom has to come before anything else than a bond: at the start, behind ``(`` and behind a dot."""

    def wrong(self, at: int, found: str, expected: str = "", action: str = "") -> NoReturn:
        """Raises Refused for the character *at* (from 0)."""
        shown = self.text if len(self.text) <= 60 else f"{self.text[:57]}..."
        where = f"SMILES {shown!r}, character {at + 1}" if self.text else "SMILES"
        raise Refused([refuse("smiles-wrong", found, where=where, expected=expected, action=action)])

    def read(self) -> None:
        """The whole text."""
        if not self.text:
            self.wrong(0, "the text is empty", "such as CCO for ethanol")
        for kind, word, at in self._tokens():
            if kind in ("atom", "bracket"):
                self._add(_bare(word, at) if kind == "atom" else self._bracketed(word, at))
            elif kind == "bond":
                self._bond(word, at)
            elif kind in ("ring", "wide"):
                self._ring(int(word), at)
            else:
                self._structure(kind, at)
        self._whole()

    def _tokens(self) -> Iterator[tuple[str, str, int]]:
        at = 0
        while at < len(self.text):
            match = _TOKEN.match(self.text, at)
            if match is None or match.lastgroup is None:
                self._unreadable(at)
            yield match.lastgroup, match[match.lastgroup], at
            at = match.end()

    def _unreadable(self, at: int) -> NoReturn:
        letter = self.text[at]
        if letter == "[":
            self.wrong(at, "the bracket is not closed", "]")
        if letter == "*":
            self.wrong(at, "* stands for any element, and a molecule has certain ones")
        if letter == "%":
            self.wrong(at, "% is not followed by the two digits of a ring closure")
        if letter.isspace():
            self.wrong(at, "there is a space inside the text", action="Write the name in a column of its own.")
        action = "Write other elements in brackets, such as [Si]." if letter.isalpha() else ""
        self.wrong(at, f"{letter!r} is no atom, bond, ring closure or branch", action=action)

    def _add(self, atom: _Atom) -> None:
        self.atoms.append(atom)
        if self.last is not None:
            self._connect(self.last, len(self.atoms) - 1, self.pending, atom.at)
        elif self.pending:
            self.wrong(atom.at, f"the bond {self.pending!r} has no atom before it")
        self.last = len(self.atoms) - 1
        self.pending, self.fresh = "", False

    def _bracketed(self, word: str, at: int) -> _Atom:
        match = _BRACKET.fullmatch(word)
        if match is None:
            if "*" in word:
                self.wrong(at, "* stands for any element, and a molecule has certain ones")
            self.wrong(
                at, f"the bracket {word} cannot be read", "[isotope symbol H-count charge], such as [13CH3] or [O-]"
            )
        symbol = match["symbol"].capitalize()
        try:
            atomic_number(symbol)
        except KeyError:
            self.wrong(at, f"there is no element {match['symbol']} in {word}")
        hydrogens = match["hydrogens"]
        if symbol == "H" and hydrogens:
            self.wrong(at, f"{word} gives a hydrogen hydrogens of its own", "[H][H] for the molecule")
        return _Atom(
            symbol=symbol,
            at=at,
            aromatic=match["symbol"].islower(),
            isotope=int(match["isotope"] or 0),
            hydrogens=0 if not hydrogens else int(hydrogens[1:] or 1),
            charge=_charge(match["charge"] or ""),
        )

    def _bond(self, symbol: str, at: int) -> None:
        if self.pending:
            self.wrong(at, f"two bonds, {self.pending!r} and {symbol!r}, follow each other")
        if self.last is None:
            self.wrong(at, f"the bond {symbol!r} has no atom before it")
        self.pending = symbol

    def _ring(self, number: int, at: int) -> None:
        if self.last is None or self.fresh:
            self.wrong(at, f"the ring closure {number} does not follow an atom")
        if number not in self.rings:
            self.rings[number] = (self.last, self.pending, at)
        else:
            first, symbol, _ = self.rings.pop(number)
            if first == self.last:
                self.wrong(at, f"the ring closure {number} bonds an atom to itself")
            if symbol and self.pending and _ORDERS[symbol] != _ORDERS[self.pending]:
                self.wrong(at, f"the ring closure {number} is opened as {symbol!r} and closed as {self.pending!r}")
            self._connect(*((first, self.last) if symbol else (self.last, first)), symbol or self.pending, at)
        self.pending = ""

    def _structure(self, kind: str, at: int) -> None:
        """Opening and closing of a branch, and the dot."""
        if self.pending:
            self.wrong(at, f"the bond {self.pending!r} leads nowhere")
        if kind == "open":
            if self.last is None or self.fresh:
                self.wrong(at, "a branch opens without an atom to start from")
            self.branches.append((self.last, at))
        elif kind == "close":
            if not self.branches:
                self.wrong(at, "a branch closes that was not opened")
            if self.fresh:
                self.wrong(at, "the branch ends without an atom")
            self.last = self.branches.pop()[0]
        else:
            if self.last is None:
                self.wrong(at, "the dot has no atom before it")
            self.last = None
        self.fresh = kind != "close"

    def _connect(self, i: int, j: int, symbol: str, at: int) -> None:
        pair = (min(i, j), max(i, j))
        if pair in self.bonds:
            self.wrong(at, "two atoms are bonded twice", "one bond, with its order")
        aromatic = self.atoms[i].aromatic and self.atoms[j].aromatic
        order = _ORDERS[symbol] if symbol else 1.5 if aromatic else 1.0
        self.bonds[pair] = _Bond(symbol, order, i)

    def _whole(self) -> None:
        """What has to be closed at the end, and what aromatic atoms need."""
        end = len(self.text) - 1
        if self.pending:
            self.wrong(end, f"the bond {self.pending!r} leads nowhere")
        if self.branches:
            self.wrong(self.branches[-1][1], "the branch is not closed", ")")
        if self.fresh:
            self.wrong(end, "the text ends with a dot", "an atom")
        for number, (_, _, at) in self.rings.items():
            self.wrong(at, f"the ring closure {number} is not closed")
        for i, atom in enumerate(self.atoms):
            if atom.aromatic and sum(order == 1.5 for order in self._orders(i)) < 2:
                word = "the aromatic atom " + atom.symbol.lower() + " is not in an aromatic ring"
                self.wrong(atom.at, word, action=f"Write {atom.symbol} for an atom outside of one.")

    def _orders(self, i: int) -> list[float]:
        return [bond.order for pair, bond in self.bonds.items() if i in pair]

    def hydrogens(self, i: int) -> int:
        """The hydrogens at an atom that are not written as atoms."""
        atom = self.atoms[i]
        if atom.hydrogens is not None:
            return atom.hydrogens
        orders, valences = self._orders(i), VALENCES[atom.symbol]
        if atom.aromatic:  # one electron of the atom is in the ring, beside its σ bonds
            return max(0, valences[0] - 1 - sum(1 if order == 1.5 else int(order) for order in orders))
        used = sum(int(order) if order != 1.5 else 1 for order in orders)
        free = [valence - used for valence in valences if valence >= used]
        if not free and atom.symbol in _RIGID:
            self.wrong(
                atom.at,
                f"{atom.symbol} has bonds of order {used} in all",
                f"at most {valences[-1]}",
                "An ion is written in brackets with its charge, such as [NH4+].",
            )
        return free[0] if free else 0


def _bare(word: str, at: int) -> _Atom:
    return _Atom(word.capitalize(), at, aromatic=word.islower())


def _charge(word: str) -> int:
    """The charge as written: ``+``, ``++``, ``-2``."""
    if not word:
        return 0
    size = int(word[1:]) if word[1:].isdigit() else len(word)
    return size if word[0] == "+" else -size
