"""Graphs of SMILES strings written with all double bonds (no aromatic atoms), for tests against a bank of compounds."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass

VALENCES = {
    "B": (3,), "C": (4,), "N": (3, 5), "O": (2,), "P": (3, 5), "S": (2, 4, 6),
    "F": (1,), "Cl": (1,), "Br": (1,), "I": (1,),
}  # fmt: skip
TOKEN = re.compile(
    r"\[\d*(?P<bracket>[A-Z][a-z]?)@*(?:H(?P<hydrogens>\d*))?(?P<charge>[+-]\d*)?\]"
    r"|(?P<organic>Cl|Br|[BCNOFPSI])|(?P<order>[-=#])|(?P<slope>[/\\])|(?P<ring>%\d\d|\d)|(?P<branch>[()])"
)
ORDERS = {"": 1, "-": 1, "=": 2, "#": 3}
SYMBOLS = {1: "-", 2: "=", 3: "#"}


@dataclass
class Graph:
    """Elements, hydrogens last; bonds as (first, second, order); charges of the atoms."""

    symbols: list[str]
    bonds: list[tuple[int, int, int]]
    charges: list[int]

    def types(self) -> dict[str, int]:
        """Bonds counted by type, ``C-H``, ``C=O``."""
        names = self.symbols
        return dict(sorted(Counter(SYMBOLS[o].join(sorted((names[i], names[j]))) for i, j, o in self.bonds).items()))


def graph(smiles: str) -> Graph | None:
    """The graph, or None for what this does not read (several parts, aromatic atoms, isotopes of hydrogen)."""
    found = Graph([], [], [])
    hydrogens: list[int | None] = []
    stack: list[int] = []
    rings: dict[str, tuple[int, str]] = {}
    last, order, position = -1, "", 0
    for token in TOKEN.finditer(smiles):
        if token.start() != position:
            return None
        position = token.end()
        g = token.groupdict()
        if g["bracket"] or g["organic"]:
            found.symbols.append(g["bracket"] or g["organic"])
            found.charges.append(_charge(g["charge"]))
            hydrogens.append(None if g["organic"] else 0 if g["hydrogens"] is None else int(g["hydrogens"] or 1))
            if last >= 0:
                found.bonds.append((last, len(hydrogens) - 1, ORDERS[order]))
            last, order = len(hydrogens) - 1, ""
        elif g["order"]:
            order = g["order"]
        elif g["ring"] in rings:
            first, earlier = rings.pop(g["ring"])
            found.bonds.append((first, last, ORDERS[order or earlier]))
            order = ""
        elif g["ring"]:
            rings[g["ring"]], order = (last, order), ""
        elif g["branch"] == "(":
            stack.append(last)
        elif g["branch"] == ")":
            last = stack.pop()
    return _with_hydrogens(found, hydrogens) if position == len(smiles) and found.symbols else None


def _charge(text: str | None) -> int:
    return 0 if not text else int(text if len(text) > 1 else text + "1")


def _with_hydrogens(found: Graph, hydrogens: list[int | None]) -> Graph:
    for k, n in enumerate(hydrogens):
        used = sum(o for i, j, o in found.bonds if k in (i, j))
        if n is None:
            n = next((v - used for v in VALENCES[found.symbols[k]] if v >= used), 0)
        for _ in range(n):
            found.symbols.append("H")
            found.charges.append(0)
            found.bonds.append((k, len(found.symbols) - 1, 1))
    return found
