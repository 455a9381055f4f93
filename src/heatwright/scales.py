"""Published scale factors for harmonic wavenumbers: what is published for a level of theory, and which to take.

The table is ``data/scale_factors.csv``; its head names the publications.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache
from typing import Final

from heatwright.findings import Refused, refuse
from heatwright.molecule import Level
from heatwright.reading.levels import normalise_basis, normalise_method, split_dispersion
from heatwright.resources import data_rows

SOURCE_ORDER: Final = ("Scott", "Merrick", "Chan", "Alecu", "NIST", "Irikura")
"""Which publication is asked first, by the start of its name.

The first three fit one factor to zero-point energies and another one to fundamentals, by one method on growing sets of
molecules; Scott and Radom (1996) stand first because most work quotes them.  Alecu et al. (2010) fit the zero-point
energy and derive the factor for fundamentals from it by a fixed ratio.  The last two have fundamentals only."""

_CORE: Final = re.compile(r"(?:\(|-|=)(fc|fu|full)\)?$", re.IGNORECASE)


def _core_mark(method: str) -> str:
    marked = _CORE.search(method)
    return "" if marked is None else "frozen" if marked[1].lower() == "fc" else "all"


@dataclass(frozen=True, slots=True)
class PublishedFactor:
    """One row of the table: factors by which one publication scales the wavenumbers of one level.

    method, basis : as the publication spells them.   zpe, fundamental, harmonic, enthalpy, entropy : factors for the
    zero-point energy, fundamentals, harmonic wavenumbers, H(298.15 K) − H(0) and S(298.15 K), None where not given.
    uncertainty : of the factor for fundamentals.
    """

    method: str
    basis: str
    zpe: float | None
    fundamental: float | None
    harmonic: float | None
    enthalpy: float | None
    entropy: float | None
    uncertainty: float | None
    source: str
    doi: str

    @property
    def label(self) -> str:
        """Method and basis as published, ``B3LYP/6-31G(d)``."""
        return f"{self.method}/{self.basis}" if self.basis else self.method

    @property
    def core(self) -> str:
        """``frozen``, ``all`` (electrons correlated) or empty when the method's name says neither."""
        return _core_mark(self.method)


@dataclass(frozen=True, slots=True)
class ScaleChoice:
    """The two factors chosen for a level, each with the row it is from; ``doubt`` is a sentence or empty."""

    thermal: PublishedFactor
    zpe: PublishedFactor
    doubt: str = ""

    @property
    def frequency_factor(self) -> float:
        """The factor for the thermal functions: that for fundamentals."""
        assert self.thermal.fundamental is not None  # chosen for having it
        return self.thermal.fundamental

    @property
    def zpe_factor(self) -> float:
        """The factor for the zero-point energy."""
        assert self.zpe.zpe is not None  # chosen for having it
        return self.zpe.zpe

    @property
    def source(self) -> str:
        """The publication, or both with what is from each."""
        if self.thermal.source == self.zpe.source:
            return f"{self.thermal.source}, {self.thermal.label}"
        return f"fundamentals: {self.thermal.source}, {self.thermal.label}; zero-point energy: {self.zpe.source}"


@cache
def all_factors() -> tuple[PublishedFactor, ...]:
    """The whole table in its order."""
    return tuple(
        PublishedFactor(
            method=row["method"],
            basis=row["basis"],
            zpe=_value(row["zpe_factor"]),
            fundamental=_value(row["fundamental_factor"]),
            harmonic=_value(row["harmonic_factor"]),
            enthalpy=_value(row["enthalpy_H_minus_H0_factor"]),
            entropy=_value(row["entropy_S_factor"]),
            uncertainty=_value(row["uncertainty"]),
            source=row["source"],
            doi=row["doi"],
        )
        for row in data_rows("scale_factors")
    )


def _value(text: str) -> float | None:
    return float(text) if text else None


def method_key(name: str) -> str:
    """What two names of one method have in common: spin restriction, core marks, hyphens and case are left out.

    >>> method_key("B3-LYP") == method_key("UB3LYP"), method_key("MP2(FC)") == method_key("MP2")
    (True, True)
    """
    return normalise_method(_CORE.sub("", name.strip())).lower().replace("-", "")


def basis_key(name: str) -> str:
    """What two names of one basis set have in common: 6-31G(d) is 6-31G*, case is left out.

    >>> basis_key("6-31G(d,p)") == basis_key("6-31g**"), basis_key("cc-pVTZ") == basis_key("6-31G*")
    (True, False)
    """
    return normalise_basis(name).lower()


def published_factors(level: Level) -> tuple[PublishedFactor, ...]:
    """What is published for a level of theory, best source first (:data:`SOURCE_ORDER`).

    A row fits when its method and its basis have the level's keys (:func:`method_key`, :func:`basis_key`) and its mark
    for frozen core or all electrons does not contradict the level.  A dispersion correction counts as part of the
    method where a row names it (B2PLYP-D3), and else is left out of account, as it hardly moves a bond's force
    constant; so are the local-correlation variant of a functional, spherical or Cartesian functions and the program.
    Nothing fits a level with a solvent: the factors were fitted to isolated molecules.

    >>> [row.zpe for row in published_factors(Level("B3LYP", "6-31G*"))]
    [0.9806, 0.9813, 0.977, None]
    """
    if level.solvent:
        return ()
    methods = [method_key(level.method)]
    if level.dispersion:
        methods.insert(0, method_key(f"{level.method}-{level.dispersion[:2]}"))
    basis, core = basis_key(level.basis), _core_of(level)
    fitting = [
        row
        for row in all_factors()
        if method_key(row.method) in methods and basis_key(row.basis) == basis and not _other_core(row.core, core)
    ]
    return tuple(sorted(fitting, key=lambda row: (methods.index(method_key(row.method)), _rank(row), row.core != core)))


def _core_of(level: Level) -> str:
    return level.frozen_core.split()[0] if level.frozen_core else ""


def _other_core(row: str, level: str) -> bool:
    return bool(row and level and row != level)


def _rank(row: PublishedFactor) -> int:
    return next((i for i, start in enumerate(SOURCE_ORDER) if row.source.startswith(start)), len(SOURCE_ORDER))


def choose_published(level: Level) -> ScaleChoice:
    """The published factors to use for a level: that for fundamentals in the thermal functions, and the zero-point one.

    The first source in :data:`SOURCE_ORDER` that gives both is taken; where no source gives both, each is from the
    first that has it.  A row for frozen core or for all electrons is taken only when the level says which it is.

    Raises Refused (``no-published-scale``) when either factor is published nowhere; the nearest levels are named.

    >>> choice = choose_published(Level("B3LYP", "6-31G*"))
    >>> choice.frequency_factor, choice.zpe_factor, choice.source[:19]
    (0.9614, 0.9806, 'Scott & Radom 1996 ')
    """
    rows = [row for row in published_factors(level) if not (row.core and not _core_of(level))]
    whole = [row for row in rows if row.fundamental is not None and row.zpe is not None]
    if whole:
        return ScaleChoice(whole[0], whole[0], _doubt(whole))
    thermal = next((row for row in rows if row.fundamental is not None), None)
    zpe = next((row for row in rows if row.zpe is not None), None)
    if thermal is None or zpe is None:
        raise _nothing_published(level, thermal, zpe)
    return ScaleChoice(thermal, zpe)


def _doubt(rows: list[PublishedFactor]) -> str:
    """A sentence when the chosen source is in the table with more than one value for the same level."""
    first = rows[0]
    twins = {(r.fundamental, r.zpe) for r in rows if (r.source, r.label) == (first.source, first.label)}
    if len(twins) < 2:
        return ""
    values = " and ".join(f"{fundamental:g}/{zpe:g}" for fundamental, zpe in sorted(twins, key=str))
    return f"{first.source} is tabulated with several values for {first.label} ({values}); the first was taken"


def _nothing_published(level: Level, thermal: PublishedFactor | None, zpe: PublishedFactor | None) -> Refused:
    label = level.label or "a level of theory that is not printed"
    if level.solvent:
        label += ", as factors are those of isolated molecules"
    if thermal is not None:
        found = f"for {label} there is a factor {thermal.fundamental:g} for fundamentals ({thermal.source}), but none "
        found += "for the zero-point energy"
    elif zpe is not None:
        found = f"for {label} there is a factor {zpe.zpe:g} for the zero-point energy ({zpe.source}), but none for "
        found += "fundamentals"
    else:
        found = f"no scale factor is published for {label}"
    near = near_levels(level.method, level.basis)
    action = f"The nearest levels with one are {', '.join(near)}. " if near else ""
    action += "State factors by --frequency-scale and --zpe-scale; `heatwright scales` lists what is published."
    return Refused([refuse("no-published-scale", found, action=action)])


def near_levels(method: str, basis: str, n: int = 5) -> tuple[str, ...]:
    """At most *n* levels in the table near to one that is not: the same method first, then like names of methods.

    >>> near_levels("M06-2X", "def2-SVP", 2)
    ('M06-2X/def2-TZVP', 'M06-2X/def2-QZVP')
    """
    mine, basis = method_key(method), basis_key(basis)
    known = {method_key(row.method): row for row in all_factors()}
    found: list[str] = []
    for key in dict.fromkeys((mine, *get_close_matches(mine, known, n, 0.6))):
        bases = dict.fromkeys(basis_key(row.basis) for row in all_factors() if method_key(row.method) == key)
        for near in get_close_matches(basis, bases, n, 0.0) if basis else list(bases):
            found.append(f"{normalise_method(known[key].method)}/{normalise_basis(near)}".rstrip("/"))
    return tuple(dict.fromkeys(found))[:n]


def factors_like(text: str) -> tuple[PublishedFactor, ...]:
    """The rows for ``METHOD/BASIS``, for a method alone or for a basis alone.

    >>> {row.method for row in factors_like("B3LYP/6-31G(d)")}, len(factors_like("6-31G*")) > 50
    ({'B3LYP'}, True)
    """
    whole = [row for row in all_factors() if method_key(row.method) == method_key(text)]
    whole = whole or [row for row in all_factors() if row.basis and basis_key(row.basis) == basis_key(text)]
    if whole or "/" not in text:
        return _sorted(whole)
    method, basis = (part.strip() for part in text.rsplit("/", 1))
    plain, dispersion = split_dispersion(_CORE.sub("", method))
    return published_factors(Level(plain, basis, dispersion=dispersion, frozen_core=_core_mark(method)))


def _sorted(rows: Iterable[PublishedFactor]) -> tuple[PublishedFactor, ...]:
    return tuple(sorted(rows, key=lambda row: (method_key(row.method), basis_key(row.basis), _rank(row))))
