"""Entries made from hand-made molecules, and what Cantera reads from their text."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import numpy as np

from heatwright import ModelOptions, build_model
from heatwright.entry import Entry, FitOptions, make_entry
from heatwright.formation.formation import formation_given, parse_enthalpy
from heatwright.molecule import Molecule
from heatwright.writing.context import entries_context
from heatwright.writing.formats import FORMATS
from heatwright.writing.render import render_format
from molecules import molecule


def entry_of(
    molecule: Molecule,
    name: str,
    dHf298: str = "-100.0 kJ/mol",
    fit: FitOptions | None = None,
    model: ModelOptions | None = None,
) -> Entry:
    """The entry of a molecule with a stated enthalpy of formation."""
    made = build_model(molecule, model)
    formation = formation_given(parse_enthalpy(dHf298), "made for a test", made.composition, made.h298_minus_h0_kJ_mol)
    return make_entry(name, made, formation, fit)


def text_of(format_name: str, *entries: Entry) -> str:
    """The text of entries in one of the formats."""
    return render_format(FORMATS[format_name].template, entries_context(entries))


def heap(symbols: str, seed: int = 1, charge: int = 0, multiplicity: int = 1) -> Molecule:
    """Atoms at random places with as many modes as there must be: for what depends on the composition alone."""
    random = np.random.default_rng(seed)
    n = len(symbols.split())
    side = np.ceil(n ** (1 / 3))
    sites = np.stack(np.meshgrid(*[np.arange(side)] * 3), axis=-1).reshape(-1, 3)[:n]
    modes = np.geomspace(80.0, 3300.0, 3 * n - 6)
    return molecule(
        symbols,
        (1.6 * sites + random.uniform(-0.2, 0.2, (n, 3))).tolist(),
        modes.tolist(),
        charge=charge,
        multiplicity=multiplicity,
    )


READ_BACK = """
import json, sys
import cantera as ct
rows = []
for s in ct.Species.list_from_file(sys.argv[1]):
    t = s.thermo
    rows.append({"name": s.name, "composition": s.composition, "p": t.reference_pressure, "T": [t.min_temp, t.max_temp],
                 "values": [[t.cp(T), t.h(T), t.s(T)] for T in json.loads(sys.argv[2])]})
if sys.argv[3] == "phase":
    ct.Solution(sys.argv[1])
ct.Solution(thermo="ideal-gas", species=ct.Species.list_from_file(sys.argv[1]))
print(json.dumps(rows))
"""


def quiet_run(*arguments: str, cwd: Path) -> str:
    """Standard output of a Python process that must say nothing of a warning or an error and exit with 0."""
    done = subprocess.run(
        [sys.executable, "-W", "error", *arguments], cwd=cwd, capture_output=True, text=True, check=False
    )
    said = (done.stdout + done.stderr).lower()
    assert done.returncode == 0, said
    assert "warning" not in said, said
    assert "error" not in said, said
    assert done.stderr == "", done.stderr
    return done.stdout


def cantera_reads(text: str, format_name: str, folder: Path, temperatures: list[float]) -> dict[str, dict]:
    """What Cantera makes of our text, by species: composition, pressure, range and [Cp, H, S] in SI per kmol."""
    file = folder / ("entries.dat" if format_name == "nasa7" else "entries.yaml")
    file.write_text(text, encoding="utf-8")
    if format_name == "nasa7":
        quiet_run("-m", "cantera.ck2yaml", f"--thermo={file.name}", "--output=converted.yaml", cwd=folder)
        file = folder / "converted.yaml"
    kind = "phase" if format_name == "yaml" else "species"
    out = quiet_run("-c", READ_BACK, file.name, json.dumps(temperatures), kind, cwd=folder)
    return {row["name"]: row for row in json.loads(out)}
