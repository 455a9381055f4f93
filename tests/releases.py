"""Releases made by hand from entries, and where Cantera's own mechanisms are."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path

import cantera

from heatwright.constants import BAR_PA, GAS_CONSTANT_J_MOL_K
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.project.lockfile import (
    CP_TEMPERATURES_K,
    Lock,
    LockedFile,
    LockedFormation,
    LockedSpecies,
    lock_text,
)
from heatwright.project.thermo_set import Thermo
from heatwright.reading.entries import read_entries
from heatwright.writing.record import record_lines, yaml_thermo_lines

CANTERA_DATA = Path(cantera.__file__).parent / "data"
GRI = CANTERA_DATA / "gri30.yaml"
"""GRI-Mech 3.0 (G. P. Smith et al., 1999) as Cantera ships it."""
R = GAS_CONSTANT_J_MOL_K


def gri(*names: str) -> dict[str, Thermo]:
    """Entries of GRI-Mech 3.0 by name."""
    entries = {e.name: e for e in read_entries(GRI).usable}
    return {
        n: Thermo(
            name=n,
            composition=entries[n].composition,
            polynomial=entries[n].polynomial,
            record=None,
            pressure_Pa=None,
            where=f"{GRI}:{entries[n].lines[0]}",
        )
        for n in names
    }


def moved(polynomial: Nasa7, dH_kJ_mol: float = 0.0, dS_J_mol_K: float = 0.0, dCp_J_mol_K: float = 0.0) -> Nasa7:
    """The polynomial with enthalpy and entropy at 298.15 K and Cp at every temperature raised by these amounts."""
    from math import log

    a1, T = dCp_J_mol_K / R, 298.15
    a6, a7 = dH_kJ_mol * 1000.0 / R - a1 * T, dS_J_mol_K / R - a1 * log(T)
    rows = [(r[0] + a1, *r[1:5], r[5] + a6, r[6] + a7) for r in (polynomial.low, polynomial.high)]
    return replace(polynomial, low=rows[0], high=rows[1]).rounded()  # type: ignore[arg-type]


def record_text(name: str, thermo: Thermo) -> str:
    """The lines of a fixed record."""
    first, *rest = record_lines(name, thermo.composition, thermo.polynomial)
    return "\n".join([*first, *rest]) + "\n"


def dat_text(species: Mapping[str, Thermo]) -> str:
    """A thermo file of fixed records."""
    records = "".join(record_text(n, t) for n, t in species.items())
    return f"THERMO ALL\n   200.000  1000.000  6000.000\n{records}END\n"


def yaml_text(species: Mapping[str, Thermo], pressure_Pa: float | None = BAR_PA) -> str:
    """The species of a Cantera YAML file."""
    lines = ["species:"]
    for name, t in species.items():
        atoms = ", ".join(f"{s}: {n:g}" for s, n in t.composition.items())
        lines += [f"- name: {name}", f"  composition: {{{atoms}}}", "  thermo:"]
        lines += [f"    {line}" for line in yaml_thermo_lines(t.polynomial, pressure_Pa=pressure_Pa)]
    return "\n".join(lines) + "\n"


def record(name: str, thermo: Thermo, **changes: object) -> LockedSpecies:
    """The record of an entry in a lock file."""
    p = thermo.polynomial
    made = LockedSpecies(
        name=name,
        formula=name,
        composition={s: int(n) for s, n in thermo.composition.items()},
        charge=0,
        multiplicity=1,
        files=(LockedFile("output", f"{name}.out", "ab" * 32),),
        references="12" * 32,
        level="B3LYP/6-31G*",
        program="NWChem 7.0.2",
        choices={},
        conventions={"frequency_scale": 1.0, "symmetry_number": 1},
        formation=LockedFormation(route="atomization", source="", dHf298_kJ_mol=R * p.h_R(298.15) / 1000.0),
        S298_J_mol_K=R * p.s_R(298.15),
        H298_minus_H0_kJ_mol=10.0,
        Cp_J_mol_K=tuple(R * p.cp_R(t) for t in CP_TEMPERATURES_K),
        temperatures_K=(p.t_low_K, p.t_common_K, p.t_high_K),
        residuals={"max_dCp_R": 0.01},
        findings=(),
        key="ef" * 32,
        texts={},
    )
    return replace(made, **changes)  # type: ignore[arg-type]


def lock(species: Mapping[str, LockedSpecies], **changes: object) -> Lock:
    """A lock file with these records."""
    made = Lock(
        mechanism="made for a test",
        tool="0.1.0",
        fingerprint="77" * 8,
        standard_pressure_Pa=BAR_PA,
        species=dict(species),
    )
    return replace(made, **changes)  # type: ignore[arg-type]


def write_release(
    folder: Path, species: Mapping[str, Thermo], records: Mapping[str, LockedSpecies] | None = None, **of_lock: object
) -> Path:
    """A release folder: both thermo files and the lock file."""
    folder.mkdir()
    made = lock(records or {n: record(n, t) for n, t in species.items()}, **of_lock)
    (folder / "thermo.dat").write_text(dat_text(species), encoding="utf-8")
    (folder / "thermo.yaml").write_text(yaml_text(species, made.standard_pressure_Pa), encoding="utf-8")
    (folder / "thermo.lock.toml").write_text(lock_text(made), encoding="utf-8")
    return folder
