"""Species names: the one taken when none is given, and the check that no two species share one."""

from __future__ import annotations

import os
from collections import Counter
from collections.abc import Mapping, Sequence
from pathlib import PurePath
from typing import TYPE_CHECKING, Final

from heatwright.elements import formula
from heatwright.findings import Finding, note, refuse
from heatwright.writing.formats import fits_record_name

if TYPE_CHECKING:
    from heatwright.molecule import Molecule

OUTPUT_ENDINGS: Final = frozenset(
    {".out", ".log", ".gz", ".bz2", ".xz", ".txt", ".fchk", ".fch", ".adfout", ".c4", ".qcout", ".output"}
    | {".toml", ".json"}
)
"""File endings that are not part of a species' name."""


def name_of_file(path: str) -> str:
    """The name of an output without its folder and its endings.

    >>> name_of_file("runs/CH3OH.log.gz")
    'CH3OH'
    """
    name = os.path.basename(path) or PurePath(path).name
    stem, ending = os.path.splitext(name)
    while ending.lower() in OUTPUT_ENDINGS:
        name = stem
        stem, ending = os.path.splitext(name)
    return name


def default_name(molecule: Molecule, composition: Mapping[str, int]) -> tuple[str, tuple[Finding, ...]]:
    """The name when none is given: that of the file where it can stand in a thermo record, else the formula.

    A molecule given by hand carries its name itself.

    Files are usually called after their species, and isomers have no other distinction.
    """
    name = molecule.stated.name or name_of_file(molecule.source.file)
    exchanged = any(f.code == "isotopes" for f in molecule.findings)
    if fits_record_name(name) and not exchanged:
        return name, ()
    by_formula = formula(composition, molecule.charge or 0)
    why = "is that of other isotopes" if exchanged else "does not fit the name field of a thermo record"
    said = note(
        "name-from-formula",
        f"the file name {name!r} {why}, so the species is called {by_formula}",
        action="Give a name by --name.",
    )
    return by_formula, (said,)


def duplicate_names(names: Sequence[str]) -> dict[str, Finding]:
    """A refusal for each name that occurs more than once: readers keep only one of such entries, without a word."""
    return {
        name: refuse(
            "duplicate-name",
            f"{count} of the outputs would be written as species {name}",
            expected="one entry for each name",
            action="Give each output a name of its own by --name.",
        )
        for name, count in Counter(names).items()
        if count > 1
    }
