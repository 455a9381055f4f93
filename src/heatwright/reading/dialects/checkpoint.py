"""Formatted checkpoint files of Gaussian and of programs that write the same."""

from __future__ import annotations

from collections.abc import Iterable
from typing import ClassVar, Final

import numpy as np

from heatwright.findings import Finding, warn
from heatwright.molecule import FloatArray, Level
from heatwright.reading.dialects.plain import Plain
from heatwright.reading.hessians import checkpoint_array, from_triangle
from heatwright.reading.levels import normalise_basis, normalise_method
from heatwright.reading.text import Text

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

    def level(self, job: Text, kind: str) -> Level | None:
        line = next((text for index, text in enumerate(job.lines(job.start)) if index == 1), "")
        fields = line.split()
        if len(fields) < 3:
            return None
        method = normalise_method(fields[1])
        return Level(method=method, basis=normalise_basis(fields[2]), functional="VWN1RPA" if method == "B3LYP" else "")

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


def _job_type(job: Text) -> str:
    """The first word of the second line, lower case."""
    line = next((text for index, text in enumerate(job.lines(job.start)) if index == 1), "")
    return line[:10].strip().lower()
