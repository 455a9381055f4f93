"""Optical isomers beside torsions: what a potential holds must not be counted a second time."""

from __future__ import annotations

from typing import TYPE_CHECKING

from heatwright.findings import Finding, note, warn

if TYPE_CHECKING:
    from heatwright.partition.internal_rotation import InternalRotation


def isomers_with_torsions(
    given: int | None, found: int, rotors: InternalRotation | None
) -> tuple[int, tuple[Finding, ...]]:
    """The number of optical isomers to multiply by, and what has to be said of it.

    given : by the user, who has the last word.   found : from the geometry or the molecule file.
    """
    number = found if given is None else given
    if number == 1 or rotors is None or not rotors.holds_mirror_image:
        return number, ()
    code, holds = "torsion-counted-twice", "the torsional potential holds both mirror images of the molecule"
    if given is not None:
        action = "Leave out --optical-isomers."
        return number, (warn(code, f"{holds}, and {given} optical isomers were given besides", action=action),)
    return 1, (note(code, f"{holds}, so they are not counted as {found} optical isomers besides"),)
