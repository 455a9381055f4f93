"""Elements, isotopes and formulas, from ``data/isotopes.csv`` (masses AME 2020, weights CIAAW; sources in the file)."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cache, lru_cache
from typing import Any

from heatwright.resources import data_rows


@dataclass(frozen=True, slots=True)
class Element:
    """One element: atomic number, symbol, average weight (u) and its isotopes as (mass number, mass u, abundance %)."""

    number: int
    symbol: str
    average_weight_u: float
    isotopes: tuple[tuple[int, float, float], ...]

    @property
    def common_mass_u(self) -> float:
        """Mass of the most abundant isotope, u."""
        return max(self.isotopes, key=lambda isotope: isotope[2])[1]


@cache
def _elements() -> dict[int, Element]:
    grouped: dict[int, list[dict[str, str]]] = {}
    for row in data_rows("isotopes"):
        grouped.setdefault(int(row["atomic_number"]), []).append(row)
    return {
        number: Element(
            number,
            rows[0]["symbol"],
            float(rows[0]["average_weight_u"]),
            tuple((int(r["mass_number"]), float(r["mass_u"]), float(r["abundance_percent"])) for r in rows),
        )
        for number, rows in grouped.items()
    }


@cache
def _numbers() -> dict[str, int]:
    return {element.symbol: element.number for element in _elements().values()}


def element(number: int) -> Element:
    """The element with this atomic number.

    Raises KeyError when the number is outside the table (1 to 103).

    >>> element(6).symbol, element(6).common_mass_u
    ('C', 12.0)
    """
    return _elements()[int(number)]


def symbol(number: int) -> str:
    """The element's symbol.

    >>> symbol(17)
    'Cl'
    """
    return element(number).symbol


def atomic_number(sym: str) -> int:
    """The atomic number of a symbol in any case; raises KeyError for an unknown one.

    >>> atomic_number("CL")
    17
    """
    return _numbers()[sym.capitalize()]


def composition(numbers: Iterable[int], masses_u: Iterable[float] | None = None) -> dict[str, int]:
    """Atoms by element symbol in Hill order: carbon, hydrogen, then by alphabet (all by alphabet without carbon).

    With the masses (u), deuterium is counted by itself as ``D``, right after hydrogen; every other isotope counts as
    its element.

    >>> composition([8, 1, 6, 1, 1, 1])
    {'C': 1, 'H': 4, 'O': 1}
    >>> composition([8, 1, 1], [15.9949, 2.0141, 1.0078])
    {'H': 1, 'D': 1, 'O': 1}
    """
    return dict(_counted(_plain(numbers), None if masses_u is None else _plain(masses_u)))


def _plain(values: Iterable[Any]) -> tuple[Any, ...]:
    """Plain numbers, which an array does not give when it is gone through."""
    return tuple(values.tolist() if hasattr(values, "tolist") else values)


@lru_cache(maxsize=1024)
def _counted(numbers: tuple[int, ...], masses_u: tuple[float, ...] | None) -> dict[str, int]:
    if masses_u is None:
        counts = Counter(symbol(z) for z in numbers)
    else:
        counts = Counter("D" if is_deuterium(z, m) else symbol(z) for z, m in zip(numbers, masses_u, strict=True))
    return _in_hill_order(counts)


def _in_hill_order(counts: Mapping[str, int]) -> dict[str, int]:
    rank = {"C": (0, ""), "H": (1, ""), "D": (2, "")} if "C" in counts else {"D": (9, "HD")}
    order = sorted(counts, key=lambda s: rank.get(s, (9, s)))
    return {s: counts[s] for s in order}


def is_deuterium(number: int, mass_u: float) -> bool:
    """Whether an atom of this number and mass (u) is deuterium."""
    return number == 1 and abs(mass_u - 2.0141) < 0.1


def formula(atoms: Mapping[str, int], charge: int = 0) -> str:
    """The formula of a composition, with its charge as sign and number.

    >>> formula({"C": 1, "H": 4, "O": 1}), formula({"N": 1, "H": 4}, 1)
    ('CH4O', 'NH4+')
    """
    text = "".join(f"{s}{n if n > 1 else ''}" for s, n in atoms.items())
    if abs(charge) == 1:
        return text + ("+" if charge > 0 else "-")
    return f"{text}{charge:+d}" if charge else text


def parse_formula(text: str) -> dict[str, int]:
    """The composition that a formula states, in Hill order; element symbols and counts in any order, repeats added up.

    Raises ValueError for anything else; charges and parentheses are not read.

    >>> parse_formula("CH3OH"), parse_formula("D2O")
    ({'C': 1, 'H': 4, 'O': 1}, {'D': 2, 'O': 1})
    """
    counts: Counter[str] = Counter()
    rest = re.sub(r"([A-Z][a-z]?)(\d{0,4})", lambda part: counts.update({part[1]: int(part[2] or 1)}) or "", text)
    unknown = [sym for sym, count in counts.items() if count < 1 or (sym != "D" and sym not in _numbers())]
    if rest or unknown or not counts:
        raise ValueError(f"{text!r} is no formula")
    return _in_hill_order(counts)


@cache
def _ground_states() -> dict[int, int]:
    return {int(row["atomic_number"]): int(row["multiplicity"]) for row in data_rows("ground_states")}


def ground_multiplicity(number: int) -> int | None:
    """Spin multiplicity of the neutral atom's ground state, or None outside ``data/ground_states.csv``.

    >>> ground_multiplicity(6)
    3
    """
    return _ground_states().get(int(number))
