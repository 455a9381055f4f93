"""How well each route reproduces evaluated enthalpies of formation, over a folder of outputs at one level.

    python tests/benchmarks/formation.py [FOLDER] [--zpe-scale X]

FOLDER holds outputs of molecules and a folder ``atoms``; without it the folder ``computed`` of the optional reference
outputs is taken (B3LYP/6-31G*; ATcT 1.112 enthalpies at 0 K; zero-point energies times 0.9806, Scott and Radom 1996).
Every figure is for enthalpies at 0 K and leaves the species itself, its conformers and mirror images out.
"""

from __future__ import annotations

import sys
import time
from dataclasses import replace
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from heatwright import ModelOptions, build_model, read_output
from heatwright.findings import Refused, refusals
from heatwright.formation.atomization import collect_atoms, formation_by_atomization
from heatwright.formation.by_network import formation_by_network
from heatwright.formation.by_reaction import formation_of_reaction
from heatwright.formation.error_model import features
from heatwright.formation.network import corrections
from heatwright.formation.reactions import find_reactions
from heatwright.formation.reference_set import ReferenceSet, collect_references
from heatwright.formation.species_references import reference_species
from heatwright.formation.usable import usable_references
from outside import SHARED


def read_folder(folder: Path) -> list:
    molecules = []
    for file in sorted(p for p in folder.iterdir() if p.is_file()):
        try:
            molecule = read_output(str(file))
        except Refused:
            continue
        if not refusals(molecule.findings) and molecule.has_thermochemistry:
            molecules.append(molecule)
    return molecules


def reference_set(folder: Path, zpe_scale: float) -> ReferenceSet:
    atoms = collect_atoms(tuple(read_folder(folder / "atoms")))
    table = [row for row in reference_species() if row.source == "ATcT 1.112"]
    return collect_references(read_folder(folder), atoms, table, ModelOptions(zpe_scale=zpe_scale))


def rms(values: list[float]) -> float:
    return float(np.sqrt(np.mean(np.square(values))))


def covered(target, references) -> bool:
    """Whether every bond type of the target is in at least two other species."""
    return all(sum(label in r.bonding.types for r in references) >= 2 for label in target.bonding.types)


def main(folder: Path, zpe_scale: float) -> None:
    whole = reference_set(folder, zpe_scale)
    lowest = usable_references(build_model(read_folder(folder / "atoms")[0]), whole).references
    rows = []
    slowest = 0.0
    for target in lowest:
        usable = usable_references(target.model, whole)
        plain = formation_by_atomization(target.model, whole.atoms)
        network = formation_by_network(target.model, whole)
        start = time.process_time()
        found = find_reactions(target.model, target.bonding, usable.references, usable.scales, name=target.row.name)
        slowest = max(slowest, time.process_time() - start)
        reaction = formation_of_reaction(target.model, found[0], usable) if found else None
        rows.append((target, usable, plain, network, reaction))
    off = [(p.dHf0_kJ_mol - t.dHf0_kJ_mol) for t, _, p, _, _ in rows]
    net = [(n.dHf0_kJ_mol - t.dHf0_kJ_mol) for t, _, _, n, _ in rows]
    z = [e / (n.u95_kJ_mol / 2.0) for e, (_, _, _, n, _) in zip(net, rows, strict=True)]
    inside = [covered(t, u.references) for t, u, _, _, _ in rows]
    rea = [(r.dHf0_kJ_mol - t.dHf0_kJ_mol, r.u95_kJ_mol / 2.0) for t, _, _, _, r in rows if r is not None]
    print(f"{'species':14s} {'atomization':>11s} {'network':>8s} {'sd':>6s} {'z':>6s}  cov  reaction")
    for (t, _, _, n, r), a, e, s, c in zip(rows, off, net, z, inside, strict=True):
        words = (
            "-"
            if r is None
            else f"{r.dHf0_kJ_mol - t.dHf0_kJ_mol:6.1f} +/- {r.u95_kJ_mol / 2:4.1f}  {r.source.split(' at ')[0]}"
        )
        print(f"{t.row.name:14s} {a:11.1f} {e:8.1f} {n.u95_kJ_mol / 2:6.1f} {s:6.2f}  {'yes' if c else '   '}  {words}")
    worst = max(off, key=abs)
    print(f"{len(rows)} species; atomization: rms {rms(off):.1f}, mean {np.mean(off):+.1f}, largest {worst:.1f} kJ/mol")
    yes = [e for e, c in zip(net, inside, strict=True) if c]
    no = [e for e, c in zip(net, inside, strict=True) if not c]
    print(
        f"network, leave-one-out: {len(yes)} covered targets rms {rms(yes):.2f}, {len(no)} others {rms(no):.2f} kJ/mol"
    )
    print(f"  z-scores: rms {rms(z):.2f}, |z| < 2 for {100 * np.mean(np.abs(z) < 2):.0f} %")
    print(
        f"reactions: {len(rea)} targets, rms {rms([e for e, _ in rea]):.2f} kJ/mol, "
        f"largest {max((e for e, _ in rea), key=abs):.1f}, "
        f"z-scores rms {rms([e / s for e, s in rea]):.2f}; slowest search {slowest:.2f} s of processor time"
    )
    errors = usable_references(build_model(read_folder(folder / "atoms")[0]), whole).errors
    print(f"  scales {errors.scales}")
    start = time.perf_counter()
    first = replace(errors, references=errors.references[:40], error_kJ_mol=errors.error_kJ_mol[:40])
    scales = first.scales
    many = features(
        [errors.references[i % len(errors.references)].bonding for i in range(1000)], errors.features.labels
    )
    corrections(
        many,
        features([r.bonding for r in first.references], errors.features.labels),
        first.error_kJ_mol,
        first.uncertainty_kJ_mol,
        scales,
    )
    print(f"network of 40 references, scales fitted, 1000 targets: {time.perf_counter() - start:.3f} s")


if __name__ == "__main__":
    arguments = [a for a in sys.argv[1:] if not a.startswith("--")]
    factor = float(sys.argv[sys.argv.index("--zpe-scale") + 1]) if "--zpe-scale" in sys.argv else 0.9806
    main(Path(arguments[0]) if arguments else SHARED / "computed", factor)
