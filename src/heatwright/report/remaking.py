"""The species of a release made again by the project beside it, where that gives the released entry."""

from __future__ import annotations

import os
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any, Final

import numpy as np

from heatwright.findings import Finding, Refused, note, refusals, warn
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.project.beside import manifest_of_release
from heatwright.project.lockfile import Lock
from heatwright.project.manifest_types import Manifest
from heatwright.project.plan import Reason
from heatwright.project.release import read_release
from heatwright.project.showing import remade_release
from heatwright.project.texts import FILES, plain_text
from heatwright.project.watch import Watch
from heatwright.report.documents import document_of_entry

LONE: Final = (
    "This release stands alone: structures, contributions, residual curves, torsions, conformers and ledgers come with "
    "the manifest and the outputs that it was made from, which are not beside it. `heatwright report` where these are "
    "shows them."
)
"""What a page of a release without its project says."""
_ONLY: Final = "Only what the release holds is shown"
_FROM_OTHERS: Final = ("output changed", "options changed", "reference changed")
_LAST_DIGIT: Final = 1.5e-8
"""Coefficients have nine digits in the text of an entry."""
_SAME: Final = 1e-6
"""By how much Cp/R, H/RT and S/R may differ when other machines' last bits moved coefficients that belong together."""


@dataclass(frozen=True, slots=True)
class Released:
    """A release: its folder, lock file, and the polynomials in its text by name."""

    folder: str
    lock: Lock
    polynomials: Mapping[str, Nasa7]


@dataclass(frozen=True, slots=True)
class Again:
    """What came of it.

    documents : of the species that come out as released, as objects of a JSON document.   findings : of each species.
    remarks : sentences about the whole release.
    """

    documents: Mapping[str, dict[str, Any]] = field(default_factory=dict)
    findings: Mapping[str, tuple[Finding, ...]] = field(default_factory=dict)
    remarks: tuple[str, ...] = ()


def made_again(released: Released, watch_of: Callable[[Manifest], Watch]) -> Again:
    """The species of a release from the manifest and store beside it; nothing of theirs is changed.

    watch_of : what hears of the reading of a manifest's outputs.
    """
    try:
        manifest = manifest_of_release(released.folder, released.lock)
        if manifest is None:
            return Again(remarks=(LONE,))
        texts = {name: plain_text(data) for name, data in read_release(released.folder, FILES).items()}
        remade = remade_release(manifest, released.lock, texts, watch_of(manifest))
    except Refused as error:
        return _nothing(released, (refusals(error.findings) or error.findings)[0])
    name = os.path.basename(manifest.path)
    documents: dict[str, dict[str, Any]] = {}
    findings: dict[str, tuple[Finding, ...]] = {}
    for species in released.polynomials.keys() & released.lock.species.keys():
        entry, reasons = remade.entries.get(species), remade.changed.get(species, ())
        if entry is None:
            findings[species] = (_gone(name),)
        elif isinstance(entry, Refused):
            findings[species] = (_impossible(name, (refusals(entry.findings) or entry.findings)[0]),)
        elif same_entry(released.polynomials[species], entry.polynomial):
            documents[species] = document_of_entry(entry)
            findings[species] = _although(reasons)
        else:
            findings[species] = (_another(name, reasons, released.polynomials[species], entry.polynomial),)
    return Again(documents, findings, (_tally(len(documents), len(released.polynomials), name),))


def same_entry(released: Nasa7, made: Nasa7) -> bool:
    """Whether a polynomial is the one that was written: the same to its last digit, or to nothing that can be noticed.

    >>> a = Nasa7(200.0, 1000.0, 6000.0, (2.5, 0, 0, 0, 0, -745.375, 4.36), (2.5, 0, 0, 0, 0, -745.375, 4.36))
    >>> same_entry(a, a), same_entry(a, Nasa7(200.0, 1000.0, 6000.0, a.low, (2.50001, *a.high[1:])))
    (True, False)
    """
    ends, others = ((p.t_low_K, p.t_common_K, p.t_high_K) for p in (released, made))
    if any(abs(a - b) > 0.005 for a, b in zip(ends, others, strict=True)):
        return False
    pairs = zip((*released.low, *released.high), (*made.low, *made.high), strict=True)
    if all(abs(a - b) <= _LAST_DIGIT * max(abs(a), abs(b)) for a, b in pairs):
        return True
    return max(_differences(released, made)) < _SAME


def _differences(one: Nasa7, other: Nasa7) -> tuple[float, float, float]:
    """The largest differences in Cp/R, H/RT and S/R."""
    low, high = max(one.t_low_K, other.t_low_K), min(one.t_high_K, other.t_high_K)
    T = np.geomspace(low, high, 60)
    pairs = ((p.cp_R(T), p.h_R(T) / T, p.s_R(T)) for p in (one, other))
    cp, h, s = (float(np.abs(np.asarray(a) - np.asarray(b)).max()) for a, b in zip(*pairs, strict=True))
    return cp, h, s


def _words(reasons: tuple[Reason, ...]) -> str:
    return ", ".join(reason.text for reason in reasons)


def _although(reasons: tuple[Reason, ...]) -> tuple[Finding, ...]:
    """Of a species that comes out as released, what is nevertheless not as it was."""
    others = tuple(reason for reason in reasons if reason.kind in _FROM_OTHERS)
    edited = tuple(reason for reason in reasons if reason.kind == "missing")
    found = []
    if others:
        found.append(
            note(
                "made-from-others",
                f"it comes out as released, though what it is made from is another ({_words(others)})",
            )
        )
    if edited:
        words = f"the text of the release is not the one that the lock file records ({edited[0].detail})"
        found.append(warn("entry-edited", words, action="Run `heatwright build`, which writes it again."))
    return tuple(found)


def _another(name: str, reasons: tuple[Reason, ...], released: Nasa7, made: Nasa7) -> Finding:
    cp, h, s = _differences(released, made)
    why = _words(reasons) or f"up to {cp:.2g} in Cp°/R, {h:.2g} in H°/RT, {s:.2g} in S°/R"
    action = f"{_ONLY}; run `heatwright build` and report again."
    return warn("not-remade", f"what {name} gives now is not the released entry ({why})", action=action)


def _impossible(name: str, why: Finding) -> Finding:
    action = f"{_ONLY}; put that right and report again."
    return note("not-remade", f"it cannot be made again from {name} ({why.text.rstrip('.')})", action=action)


def _gone(name: str) -> Finding:
    return note("not-remade", f"{name} does not have this species any more", action=f"{_ONLY}.")


def _nothing(released: Released, why: Finding) -> Again:
    """No species can be made again, for one reason."""
    said = note(
        "not-remade", f"the project beside the release cannot be read ({why.text.rstrip('.')})", action=f"{_ONLY}."
    )
    return Again(findings=dict.fromkeys(released.polynomials, (said,)), remarks=(said.text[0].upper() + said.text[1:],))


def _tally(same: int, of: int, name: str) -> str:
    if same == of:
        return f"All {of} species were made again from {name} and come out as released."
    return (
        f"{same} of {of} species were made again from {name} and come out as released; the others are shown from the "
        "release alone, and their findings say why."
    )
