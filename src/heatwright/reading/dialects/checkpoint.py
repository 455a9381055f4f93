"""Formatted checkpoint files of Gaussian and of programs that write the same."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from typing import TYPE_CHECKING, ClassVar, Final

import numpy as np

from heatwright.findings import Finding, warn
from heatwright.molecule import FloatArray, Level
from heatwright.reading.dialects.base import plain_energies
from heatwright.reading.dialects.plain import Plain
from heatwright.reading.hessians import checkpoint_array, from_triangle
from heatwright.reading.levels import is_method, normalise_basis, normalise_method
from heatwright.reading.text import Text, number

if TYPE_CHECKING:
    from heatwright.reading.parsing import Parsed

_CORRELATED: Final = {
    **{name: name for name in ("MP2", "MP3", "MP4", "CCSD", "CCSD(T)", "QCISD", "QCISD(T)", "BD", "BD(T)", "CISD")},
    "MP4DQ": "MP4(DQ)",
    "MP4SDQ": "MP4(SDQ)",
    "MP4SDTQ": "MP4",
}
"""Methods of the second line that have an energy of their own, and its kind."""
_DOUBLE_HYBRID: Final = re.compile(r"M?P?W?B?2(?:GP-?)?PLYP|DSD|PBE0DH|PBEQIDH|B2K?PLYP")
_SAME_HARTREE: Final = 1.0e-7
_WITHOUT_HESSIAN: Final = frozenset({"sp", "opt", "fopt", "popt", "scan", "force", "ircmax", "irc"})
"""Types of jobs whose force constants, when a file holds some, are the estimate of an optimiser."""


class FChk(Plain):
    """Formatted checkpoint files: everything but temperature, pressure, symmetry number and an ending."""

    name = "FChk"
    mode_anchors: ClassVar = ("Vib-Modes", "\nFreq ")

    def version(self, job: Text) -> str:
        spot = job.find("Gaussian Version ")
        lines = list(job.part(spot, spot + 200).lines(spot)) if spot >= 0 else []
        return lines[1].strip() if len(lines) > 1 else ""

    def energies(self, job: Text, parsed: Parsed, has_modes: bool) -> tuple[dict[str, float], str]:
        """The total energy is that of the method in the second line, which the SCF energy need not be."""
        scf, total = (_value(job, f"{name} Energy") for name in ("SCF", "Total"))
        if scf is None:
            return plain_energies(parsed, has_modes)
        kind = _kind(job)
        if total is None or abs(total - scf) < _SAME_HARTREE:
            return {"SCF": scf}, "SCF"
        return ({"SCF": scf, kind: total}, kind) if kind not in ("", "SCF") else ({"SCF": scf}, "")

    def level(self, job: Text, kind: str) -> Level | None:
        fields = _second_line(job).split()
        if len(fields) < 3:
            return None
        correlated = _kind(job) in _CORRELATED.values()
        method = _kind(job) if correlated else normalise_method(fields[1])
        method = "HF" if correlated and kind == "SCF" else method
        core = {"FC": "frozen", "FU": "all"}.get(fields[1].upper().rpartition("-")[2][:2], "")
        return Level(
            method=method,
            basis=normalise_basis(fields[2]),
            functional="VWN1RPA" if method == "B3LYP" else "",
            frozen_core=core if correlated and kind != "SCF" else "",
        )

    def hessian(self, job: Text, n_atoms: int) -> FloatArray | None:
        if _job_type(job) in _WITHOUT_HESSIAN:
            return None
        values = checkpoint_array(job, "Cartesian Force Constants")
        return None if values is None else from_triangle(values, 3 * n_atoms)

    def max_gradient(self, job: Text) -> float | None:
        gradient = checkpoint_array(job, "Cartesian Gradient")
        has_modes = self.hessian(job, 0 if gradient is None else gradient.size // 3) is not None
        return float(np.abs(gradient).max()) if gradient is not None and has_modes else None

    def remarks(self, job: Text) -> Iterable[Finding]:
        words = "a formatted checkpoint file holds no temperature, pressure, symmetry number or closing line"
        action = "Nothing of the program's own thermochemistry could be checked."
        yield warn("no-normal-termination", words, action=action)
        yield from _unclear_energy(job)


def _second_line(job: Text) -> str:
    """The type of job, method and basis set."""
    return next((text for index, text in enumerate(job.lines(job.start)) if index == 1), "")


def _job_type(job: Text) -> str:
    """The first word of the second line, lower case."""
    return _second_line(job)[:10].strip().lower()


def _kind(job: Text) -> str:
    """The kind of energy that the method is, ``SCF`` for functionals and Hartree-Fock; empty for unknown methods."""
    fields = _second_line(job).split()
    name = re.sub(r"-(?:FC|FU\w*)$", "", fields[1].upper()) if len(fields) > 2 else ""
    for plain in (name, *(name.removeprefix(prefix) for prefix in ("RO", "R", "U"))):
        if plain in _CORRELATED:
            return _CORRELATED[plain]
        if _DOUBLE_HYBRID.match(plain):
            return "double-hybrid"
    return "SCF" if name and is_method(normalise_method(fields[1])) else ""


def _value(job: Text, title: str) -> float | None:
    found = re.match(rf"\n{title} +R +(\S+)", job.whole[(spot := job.find(f"\n{title} ")) : spot + 100])
    return number(found.group(1)) if spot >= 0 and found else None


def _unclear_energy(job: Text) -> Iterator[Finding]:
    """A method whose energy beyond the SCF's the file does not hold, or an energy that no method is known for."""
    scf, total, kind = _value(job, "SCF Energy"), _value(job, "Total Energy"), _kind(job)
    if scf is None:
        return
    action = "Give the output of the job instead."
    if total is not None and abs(total - scf) >= _SAME_HARTREE:
        if kind in ("", "SCF"):
            words = f"the total energy ({total:.8f} hartree) is not the SCF energy ({scf:.8f}), and no known method's"
            yield warn("parser-failed", words, action=action)
    elif kind not in ("", "SCF"):
        words = f"the file holds no {kind} energy, only that of the SCF"
        yield warn("no-energy", words, expected=f"a total energy of {kind}", action=action)
