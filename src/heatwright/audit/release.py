"""Against computed data: the entries of a file beside those of a release, temperature by temperature."""

from __future__ import annotations

import os
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Final

import numpy as np

from heatwright.audit.facts import Facts, facts_of
from heatwright.audit.published import CHEMICAL_ACCURACY_KJ, ENTROPY_ACCURACY
from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding, Refused, note, refuse
from heatwright.reading.entries import read_entries
from heatwright.reading.entry_file import EntryFile, ThermoEntry

RELEASE_FILES: Final = ("thermo.yaml", "thermo.dat")
"""What is looked for in a release's folder, first come first served; the YAML states its pressure."""
_POINTS: Final = 200


@dataclass(frozen=True, slots=True)
class Residual:
    """An entry minus the release's entry of the same name.

    range_K : where both are defined.   dcp_R : the difference of Cp/R that is largest, at ``dcp_at_K``.
    dh298_kJ_mol, ds298_J_mol_K : at 298.15 K.   dg_kJ_mol : the largest difference of G, at ``dg_at_K``.
    """

    name: str
    range_K: tuple[float, float]
    dcp_R: float
    dcp_at_K: float
    dh298_kJ_mol: float
    ds298_J_mol_K: float
    dg_kJ_mol: float
    dg_at_K: float

    @property
    def agrees(self) -> bool:
        """Whether H°, S° (298.15 K) and Cp° (everywhere) are within the usual accuracy."""
        return (
            abs(self.dh298_kJ_mol) <= CHEMICAL_ACCURACY_KJ
            and abs(self.ds298_J_mol_K) <= ENTROPY_ACCURACY
            and abs(self.dcp_R) * GAS_CONSTANT_J_MOL_K <= ENTROPY_ACCURACY
        )


def read_release(path: str | os.PathLike[str]) -> EntryFile:
    """The entries of a release's folder, or of an entry file.

    Raises Refused when there is none, or when one of its entries cannot be used.
    """
    place = Path(path)
    if place.is_dir():
        found = [place / name for name in RELEASE_FILES if (place / name).is_file()]
        if not found:
            expected = f"one of {', '.join(RELEASE_FILES)}"
            raise Refused([refuse("no-entries", "the folder holds no release", where=str(path), expected=expected)])
        place = found[0]
    try:
        return read_entries(place)
    except Refused as error:
        raise Refused(f.at(str(place)) for f in error.findings) from None


def compare_release(facts: Facts, release: EntryFile) -> Residual | None:
    """The residual of an entry against the release, or None when that has no such entry."""
    other = _partner(facts.entry, release)
    theirs = None if other is None else facts_of(other)
    if other is None or theirs is None:
        return None
    p, q = facts.polynomial, theirs.polynomial
    low, high = max(p.t_low_K, q.t_low_K), min(p.t_high_K, q.t_high_K)
    if low >= high:
        return None
    T = np.unique(np.r_[np.linspace(low, high, _POINTS), np.geomspace(low, high, _POINTS)].clip(low, high))
    dcp = np.asarray(p.cp_R(T)) - np.asarray(q.cp_R(T))
    ds_R = np.asarray(p.s_R(T)) - np.asarray(q.s_R(T)) + _pressure_shift_R(facts.entry, other)
    dg = (np.asarray(p.h_R(T)) - np.asarray(q.h_R(T)) - T * ds_R) * GAS_CONSTANT_J_MOL_K / 1000.0
    worst, worst_g = int(np.abs(dcp).argmax()), int(np.abs(dg).argmax())
    shift = _pressure_shift_R(facts.entry, other)
    return Residual(
        name=facts.entry.name,
        range_K=(low, high),
        dcp_R=float(dcp[worst]),
        dcp_at_K=float(T[worst]),
        dh298_kJ_mol=facts.h298_kJ_mol - theirs.h298_kJ_mol,
        ds298_J_mol_K=(facts.s298_R - theirs.s298_R + shift) * GAS_CONSTANT_J_MOL_K,
        dg_kJ_mol=float(dg[worst_g]),
        dg_at_K=float(T[worst_g]),
    )


def residual_findings(facts: Facts, residual: Residual) -> Iterator[Finding]:
    """A warning when the entry and the computed one do not agree."""
    if residual.agrees:
        return
    yield facts.say(
        "warn",
        "differs-from-release",
        f"differs from the computed entry by {residual.dh298_kJ_mol:+.2f} kJ/mol in H°({STANDARD_TEMPERATURE_K:g}), "
        f"{residual.ds298_J_mol_K:+.2f} J/mol/K in S°({STANDARD_TEMPERATURE_K:g}) and up to {residual.dcp_R:+.3f} R in "
        f"Cp° (at {residual.dcp_at_K:.0f} K)",
        expected=f"at most {CHEMICAL_ACCURACY_KJ:g} kJ/mol and {ENTROPY_ACCURACY:g} J/mol/K",
    )


def not_in_release(entries: list[ThermoEntry], release: EntryFile) -> Finding | None:
    """One note for all entries that the release does not have."""
    if not entries:
        return None
    names = ", ".join(e.name for e in entries[:8]) + (", …" if len(entries) > 8 else "")
    return note("not-in-release", f"{len(entries)} of the entries have no partner in {release.path}: {names}")


def _partner(entry: ThermoEntry, release: EntryFile) -> ThermoEntry | None:
    """The release's entry of the same name and composition; in other case when there is no other."""
    alike = [e for e in release.usable if e.composition == entry.composition]
    exact = [e for e in alike if e.name == entry.name]
    folded = [e for e in alike if e.name.casefold() == entry.name.casefold()]
    return exact[0] if exact else folded[0] if len(folded) == 1 else None


def _pressure_shift_R(entry: ThermoEntry, other: ThermoEntry) -> float:
    """What brings the entry's S/R to the other's pressure, where both state one."""
    if entry.reference_pressure_Pa is None or other.reference_pressure_Pa is None:
        return 0.0
    return float(np.log(entry.reference_pressure_Pa / other.reference_pressure_Pa))
