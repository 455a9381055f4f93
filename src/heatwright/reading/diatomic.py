"""The table ``[diatomic]`` of a molecule file: spectroscopic constants whose levels are summed up."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Final

from heatwright.molecule import DiatomicConstants, FloatArray, IntArray, Stated

if TYPE_CHECKING:
    from heatwright.reading.strict import Block

DIATOMIC_KEYS: Final = ("we_cm1", "wexe_cm1", "Be_cm1", "alphae_cm1", "D_cm1", "D0_cm1", "A_cm1", "source")
"""Its keys; the first four and the source are needed."""

_INSTEAD: Final = ("geometry", "rotation", "vibrations")


def diatomic_constants(file: Block, block: Block, numbers: IntArray, multiplicity: int | None) -> DiatomicConstants:
    """The constants of a diatomic molecule; raises Refused with the line for what is missing or not positive."""
    if numbers.size != 2:
        block.wrong("source", f"[diatomic] is given for a molecule of {numbers.size} atoms", "two atoms")
    for name in _INSTEAD:
        if name in file:
            file.block(name).wrong("source", f"there is a [{name}] beside [diatomic]", "only one of them")
    block.needs(*DIATOMIC_KEYS[:4])
    we, wexe, Be = (_positive(block, key) for key in ("we_cm1", "wexe_cm1", "Be_cm1"))
    alphae = block.number("alphae_cm1", block.values["alphae_cm1"])
    D, D0 = (_positive(block, key) if key in block else None for key in ("D_cm1", "D0_cm1"))
    A = block.number("A_cm1", block.values["A_cm1"]) if "A_cm1" in block else None
    if alphae < 0.0 or alphae >= 2.0 * Be:
        block.wrong("alphae_cm1", f"alphae_cm1 is {alphae:g}", "a number that is not negative and leaves B positive")
    if 2.0 * wexe >= we:
        block.wrong("wexe_cm1", f"wexe_cm1 is {wexe:g}, which leaves no fundamental", "less than half of we_cm1")
    if A is not None and (A == 0.0 or multiplicity != 2 or "electronic" in file):
        found = "is 0" if A == 0.0 else f"is given with multiplicity {multiplicity}" if multiplicity != 2 else ""
        found = found or "is given together with [electronic]"
        block.wrong("A_cm1", f"A_cm1 {found}", "the spin-orbit constant of a doublet Π state and no other levels")
    return DiatomicConstants(
        we_cm1=we, wexe_cm1=wexe, Be_cm1=Be, alphae_cm1=alphae, D_cm1=D, D0_cm1=D0, A_cm1=A, source=block.word("source")
    )


def with_diatomic(stated: Stated, constants: DiatomicConstants, numbers: IntArray, masses_u: FloatArray) -> Stated:
    """With the constants, B0 as the rotor and the symmetry number of the two atoms where none is given."""
    alike = bool(numbers[0] == numbers[1] and abs(masses_u[0] - masses_u[1]) < 0.1)
    return replace(
        stated,
        diatomic=constants,
        rotational_constants_cm1=(constants.Be_cm1 - constants.alphae_cm1 / 2.0,),
        symmetry_number=stated.symmetry_number or (2 if alike else 1),
        point_group=stated.point_group or ("Dinfh" if alike else "Cinfv"),
    )


def _positive(block: Block, key: str) -> float:
    value = block.number(key, block.values[key])
    if value <= 0.0:
        block.wrong(key, f"{key} is {value:g}", "a positive number")
    return value
