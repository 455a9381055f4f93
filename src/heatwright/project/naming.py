"""Names for the species of a folder of outputs: the files', or the folders' where files only say what was done."""

from __future__ import annotations

import os
import re
from collections import Counter
from collections.abc import Sequence
from pathlib import PurePath
from typing import Final

from heatwright.elements import composition, formula
from heatwright.project.inventory import Found
from heatwright.writing.formats import fits_record_name
from heatwright.writing.names import name_of_file

_WORDS: Final = """freq freqs frequency frequencies hess hessian opt optfreq output out job min minimum main calc result
results thermo vib"""
_WHAT_WAS_DONE: Final = frozenset(_WORDS.split())
"""Words in file names that say what was done and not with which molecule."""


def names_of(species: Sequence[tuple[Found, Sequence[Found]]]) -> list[tuple[str, str]]:
    """A name for each species, all different, and a remark where it could not be taken from file or folder.

    species : its output, and all outputs of it.
    """
    wishes = [_wishes(main, members) for main, members in species]
    names = [""] * len(species)
    for position in range(max((len(w) for w in wishes), default=0)):
        chosen = [w[min(position, len(w) - 1)] for w in wishes]
        count = Counter(name or wish for name, wish in zip(names, chosen, strict=True))
        names = [name or (wish if count[wish] == 1 else "") for name, wish in zip(names, chosen, strict=True)]
    found: list[tuple[str, str]] = []
    for name, wish in zip(names, wishes, strict=True):
        remark = ""
        if not name:
            name = _numbered(wish[-1], {*names, *(known for known, _ in found)})
            remark = "its name is the formula with a number, as files of several species are called alike"
        found.append((name, remark))
    return found


def _numbered(base: str, taken: set[str]) -> str:
    number = 1
    while f"{base[:12]}-{number}" in taken:
        number += 1
    return f"{base[:12]}-{number}"


def _wishes(one: Found, members: Sequence[Found]) -> list[str]:
    """Names in the order in which they are tried; the formula is the last."""
    molecule = one.molecule
    by_formula = formula(composition(molecule.atomic_numbers, molecule.masses_u), molecule.charge or 0)
    tried = [molecule.stated.name, _shared_by(members), *_of_path(name_of_file(one.path), os.path.dirname(one.path))]
    return [*(name for name in dict.fromkeys(tried) if fits_record_name(name)), by_formula]


def _shared_by(members: Sequence[Found]) -> str:
    """The name of the one file whose name all others begin with, ``CH3CH2OH`` of ``CH3CH2OH_gauche``; else empty."""
    stems = sorted((name_of_file(one.path) for one in members), key=len)
    shortest = stems[0] if len(stems) > 1 else ""
    return shortest if all(re.match(rf"{re.escape(shortest)}(?![A-Za-z0-9])", stem) for stem in stems) else ""


def _of_path(stem: str, folder: str) -> list[str]:
    """Names that a file suggests.

    >>> _of_path("CH3OH_opt", ""), _of_path("freq", "runs/CH3OH"), _of_path("n-C4H10", "fuels")
    (['CH3OH', 'CH3OH_opt'], ['CH3OH', 'CH3OH_freq', 'freq'], ['n-C4H10', 'n-C4H10', 'n-C4H10_fuels'])
    """
    parent = [PurePath(folder).name] if PurePath(folder).name else []
    if all(word.lower() in _WHAT_WAS_DONE for word in re.split("[-_.]", stem)):
        return [*parent, *(f"{name}_{stem}" for name in parent), stem]
    shorter = stem
    while (parts := re.fullmatch(r"(.+)[-_.]([A-Za-z]+)", shorter)) and parts[2].lower() in _WHAT_WAS_DONE:
        shorter = parts[1]
    return [shorter, stem, *(f"{stem}_{name}" for name in parent)]
