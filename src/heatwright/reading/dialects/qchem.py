"""Q-Chem 4 to 6: one banner a job; the first energy of a frequency job belongs to its geometry; kcal and cal."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, ClassVar, Final

import numpy as np

from heatwright.constants import ATMOSPHERE_PA, CALORIE_J, HARTREE_KJ_MOL
from heatwright.elements import atomic_number
from heatwright.molecule import FloatArray, Level, PrintedThermo
from heatwright.reading.dialects.base import (
    Dialect,
    Energy,
    Facts,
    Failure,
    Identity,
    as_integer,
    chosen_point,
    or_plain,
)
from heatwright.reading.fundamentals import qchem_fundamentals
from heatwright.reading.hessians import qchem_hessian
from heatwright.reading.levels import normalise_basis, normalise_method
from heatwright.reading.text import Text, numbers

if TYPE_CHECKING:
    from heatwright.reading.parsing import Parsed

_KCAL_HARTREE: Final = CALORIE_J / HARTREE_KJ_MOL
_ENERGIES: Final = (
    ("Total energy in the final basis set =", "SCF"),
    ("\n Total energy =", "SCF"),
    ("MP2         total energy =", "MP2"),
    ("MP2 energy                =", "MP2"),
    ("CCSD total energy", "CCSD"),
    ("CCSD(T) total energy", "CCSD(T)"),
    ("QCISD total energy", "QCISD"),
    ("QCISD(T) total energy", "QCISD(T)"),
)
_CORRELATIONS: Final = {"VWN1RPA": "VWN1RPA", "VWN5": "VWN5", "VWN": "VWN5"}


class QChem(Dialect):
    """The dialect of Q-Chem."""

    name = "Q-Chem"
    endings: ClassVar = ("Thank you very much for using Q-Chem",)
    failures: ClassVar = (
        Failure("SCF failed to converge", "the SCF did not converge"),
        Failure("MAXIMUM OPTIMIZATION CYCLES REACHED", "the geometry optimisation did not converge"),
        Failure("Q-Chem fatal error occurred", "Q-Chem stopped with an error"),
    )
    job_starts: ClassVar = ("Welcome to Q-Chem",)
    mode_anchors: ClassVar = ("VIBRATIONAL FREQUENCIES (CM**-1) AND NORMAL MODES", " Frequency: ")

    def identity(self, job: Text) -> Identity:
        atoms = _atoms(job)
        charge, multiplicity = _charge_and_multiplicity(job, atoms)
        task = _rem(job, "job_?type")
        return Identity(
            atoms=atoms,
            charge=charge,
            multiplicity=multiplicity,
            has_modes=any(anchor in job for anchor in self.mode_anchors) or task.startswith("freq"),
            optimises=task in ("opt", "optimization", "ts"),
        )

    def read(self, job: Text, parsed: Parsed) -> Facts:
        energies = []
        for anchor, kind in _ENERGIES:
            for spot in job.spots(anchor):
                values = numbers(job.rest(spot, anchor))
                if values:
                    energies.append(Energy(spot, kind, values[0]))
        point, kind = chosen_point(energies, first=any(anchor in job for anchor in self.mode_anchors))
        point, kind = or_plain(point, kind, parsed, any(anchor in job for anchor in self.mode_anchors))
        return Facts(
            version=_version(job),
            energies=point,
            energy_kind=kind,
            level=_level(job, kind),
            masses_u=_masses(job, len(_atoms(job))),
            hessian=lambda: (qchem_hessian(job, len(_atoms(job))), None),
            fundamentals=qchem_fundamentals(job),
            printed=_printed(job),
        )


def _version(job: Text) -> str:
    spot = job.find("Q-Chem, Inc., Pleasanton")
    match = re.search(r"Q-Chem (\d+\.\d+(?:\.\d+)?)", job.line(spot)) if spot >= 0 else None
    return match.group(1) if match else ""


def _input(job: Text) -> str:
    start = job.find("User input:")
    if start < 0:
        return ""
    end = job.find("Standard Nuclear Orientation", start)
    return str(job.part(start, min(end if end >= 0 else job.end, start + 50000)))


def _rem(job: Text, key: str) -> str:
    """A setting of the echoed input, lower case; empty when it is not set."""
    match = re.search(rf"^[ \t]*{key}[ \t]*[= \t][ \t]*(\S+)", _input(job), re.IGNORECASE | re.MULTILINE)
    return match.group(1).lower() if match else ""


def _atoms(job: Text) -> tuple[int, ...]:
    spot = job.find("Standard Nuclear Orientation (Angstroms)")
    found: list[int] = []
    for line in job.lines(spot) if spot >= 0 else ():
        fields = line.split()
        if len(fields) == 5 and fields[0].isdigit():
            try:
                found.append(atomic_number(fields[1]))
            except KeyError:
                found.append(0)
        elif found:
            return tuple(found)
    return ()  # no table, or one that the end of the file cuts off


def _charge_and_multiplicity(job: Text, atoms: tuple[int, ...]) -> tuple[int | None, int | None]:
    """From the echoed ``$molecule``, else from the electrons that are counted before the SCF."""
    match = re.search(r"\$molecule\s+(-?\d+)\s+(\d+)\b", _input(job), re.IGNORECASE)
    if match:
        return int(match.group(1)), int(match.group(2))
    spot = job.find(" There are ")
    counted = re.search(r"There are +(\d+) alpha and +(\d+) beta electrons", job.line(spot)) if spot >= 0 else None
    if counted is None:
        return None, None
    alpha, beta = int(counted.group(1)), int(counted.group(2))
    neutral = sum(atoms) if "ecp" not in _input(job).lower() else None
    return (None if neutral is None or not atoms else neutral - alpha - beta), alpha - beta + 1


def _masses(job: Text, n_atoms: int) -> FloatArray | None:
    """Masses of the last thermochemistry block (anharmonic jobs print it more than once)."""
    values = [numbers(job.rest(spot, "Has Mass")) for spot in job.spots("Has Mass")]
    found = [v[0] for v in values if v][-n_atoms:] if n_atoms else []
    return np.array(found) if found else None


def _printed(job: Text) -> tuple[PrintedThermo, ...]:
    spot = job.rfind("STANDARD THERMODYNAMIC QUANTITIES AT")
    if spot < 0:
        return ()
    block = job.part(spot)
    head = numbers(job.line(spot))
    zpe, enthalpy, entropy = (
        block.number_after(anchor, last=False)
        for anchor in ("Zero point vibrational energy:", "Total Enthalpy:", "Total Entropy:")
    )
    item = PrintedThermo(
        temperature_K=head[0] if head else None,
        pressure_Pa=head[1] * ATMOSPHERE_PA if len(head) > 1 else None,
        symmetry_number=as_integer(block.number_after("Rotational Symmetry Number is", last=False)),
        zpe_hartree=None if zpe is None else zpe * _KCAL_HARTREE,
        enthalpy_correction_hartree=None if enthalpy is None else enthalpy * _KCAL_HARTREE,
        entropy_J_mol_K=None if entropy is None else entropy * CALORIE_J,
    )
    return (item,)


def _level(job: Text, kind: str) -> Level | None:
    method = _rem(job, "method") or _rem(job, "exchange")
    correlation = _rem(job, "correlation")
    name = correlation if correlation not in ("", "none") and not _rem(job, "method") else method
    basis = job.rest_of_last("Requested basis set is")
    if not name and not basis:
        return None
    spot = job.rfind("\n Correlation: ")
    parts = job.line(spot + 1).split() if spot >= 0 else []
    return Level(
        method=normalise_method(name if kind in ("SCF", "", "double-hybrid") else kind),
        basis=normalise_basis(basis or _rem(job, "basis")),
        functional=next((_CORRELATIONS[p] for p in parts if p in _CORRELATIONS), ""),
        frozen_core=_frozen(job) if kind not in ("SCF", "") else "",
        core_potential=_rem(job, "ecp").upper(),
        dispersion=_rem(job, "dft_d").upper().replace("_", "").replace("EMPIRICALGRIMME", "D2").replace("FALSE", ""),
        solvent=_rem(job, "solvent_method").upper(),
        program="Q-Chem",
    )


def _frozen(job: Text) -> str:
    setting = _rem(job, "n_frozen_core")
    if setting in ("fc", "true"):
        return "frozen"
    return {"": "", "0": "all", "false": "all"}.get(setting, f"frozen {setting}")
