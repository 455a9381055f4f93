"""Molecules, tables and entries as plain values: the JSON document (version 1), which is also what templates see."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from heatwright.constants import BAR_PA
from heatwright.elements import formula, symbol
from heatwright.findings import Finding, Refused
from heatwright.writing.evidence import evidence, evidence_without_entry
from heatwright.writing.numbers import significant

if TYPE_CHECKING:
    from heatwright.entry import Entry
    from heatwright.formation.formation import Formation
    from heatwright.molecule import FloatArray, Molecule
    from heatwright.partition.internal_rotation import TreatedTorsion
    from heatwright.partition.model import ThermoModel
    from heatwright.partition.table import ThermoTable
    from heatwright.partition.uncertainty import TableUncertainty
    from heatwright.polynomial.nasa7 import Nasa7
    from heatwright.polynomial.quality import FitQuality, ResidualCurve

JSON_VERSION = 1
"""The version key of every JSON document; it changes when a key changes its meaning or goes."""


def species_document(
    name: str, model: ThermoModel, table: ThermoTable, findings: Iterable[Finding] = (), entry: Entry | None = None
) -> dict[str, Any]:
    """One species as plain values; with *entry* also its formation, polynomial and residuals."""
    molecule = model.molecule
    document: dict[str, Any] = {
        "name": name,
        "formula": formula(model.composition, molecule.charge or 0),
        "composition": model.composition,
        "charge": molecule.charge,
        "multiplicity": molecule.multiplicity,
        "evidence": evidence_without_entry(model) if entry is None else evidence(entry),
        "point_group": model.symmetry.point_group or None,
        "symmetry_number": model.symmetry_number,
        "optical_isomers": model.optical_isomers,
        "geometry": geometry_document(molecule),
        "rotational_constants_cm-1": _numbers(model.inertia.rotational_constants_cm1),
        "wavenumbers_cm-1": _numbers(molecule.wavenumbers_cm1),
        "frequency_scale": model.frequency_scale,
        "zpe_scale": model.zpe_scale,
        "anharmonic": model.options.anharmonic,
        "scale_source": model.scale_source or None,
        "zpe_kJ_mol": significant(model.zpe_kJ_mol),
        "standard_pressure_bar": model.options.pressure_Pa / BAR_PA,
    }
    if model.options.anharmonic and molecule.fundamentals_cm1 is not None:
        document["fundamentals_cm-1"] = _numbers(molecule.fundamentals_cm1)
    if entry is not None:
        document["formation"] = _formation(entry.formation)
    document |= {
        "energy_hartree": molecule.energy_hartree,
        "energy_kind": molecule.energy_kind or None,
        "masses": model.mass_kind,
        "rotation": model.motion.rotation,
        "low_modes": model.motion.low_modes,
        "electronic_levels_cm-1": [[nu, g] for nu, g in model.levels],
        "torsions": [torsion_document(t) for t in model.torsions],
        "classical_limit_R": _classical_limit(model),
        "H298_minus_H0_kJ_mol": significant(table.h298_minus_h0_kJ_mol),
        "table": _table(table),
    }
    if model.conformers:
        document["conformers"] = _conformers(model, table)
    if table.uncertainty is not None:
        document["uncertainty"] = _uncertainty(table.uncertainty)
    if model.motion.shifts:
        document |= _low_modes(model)
    if entry is not None:
        document |= {
            "nasa7": nasa7_document(entry.polynomial),
            "residuals": residuals_document(entry.quality),
            "residual_curve": _residual_curve(entry.residuals),
        }
    document["source"] = source_document(molecule)
    document["findings"] = [f.as_json() for f in findings]
    return document


def geometry_document(molecule: Molecule) -> dict[str, Any] | None:
    """Elements, coordinates and bonds (atoms counted from 1) to draw a molecule by; None without a geometry.

    The order of each bond is None, and there are no bond types, where no Lewis structure can be told.
    """
    if not molecule.has_geometry:
        return None
    document: dict[str, Any] = {
        "elements": [symbol(int(z)) for z in molecule.atomic_numbers],
        "coordinates_A": [[round(float(c), 5) + 0.0 for c in atom] for atom in molecule.coordinates_A],
    }
    from heatwright.structure.bond_orders import bonding
    from heatwright.structure.bonds import bonds

    try:
        found = bonding(molecule)
    except Refused:
        near = np.argwhere(np.triu(bonds(molecule.atomic_numbers, molecule.coordinates_A)))
        return document | {"bonds": [[int(i) + 1, int(j) + 1, None] for i, j in near], "bond_types": None}
    return document | {
        "bonds": [[b.first + 1, b.second + 1, b.order] for b in found.bonds],
        "bond_types": dict(found.types),
    }


def _classical_limit(model: ThermoModel) -> float | None:
    """What Cp°/R tends to, where every motion is a rigid rotor or an oscillator to the end."""
    return None if model.torsions or model.options.low_modes.kind == "interpolate" else model.classical_limit_R


def _low_modes(model: ThermoModel) -> dict[str, Any]:
    chosen = model.options.low_modes
    document: dict[str, Any] = {"low_modes_cutoff_cm-1": chosen.cutoff_cm1}
    if chosen.kind == "interpolate":
        document["averaging_moment_kg_m2"] = chosen.averaging_moment_kg_m2
    document["low_modes_shifts"] = [
        {
            "wavenumber_cm-1": significant(s.wavenumber_cm1),
            "dH298_minus_H0_kJ_mol": significant(s.dh_kJ_mol),
            "dS298_J_mol_K": significant(s.ds_J_mol_K),
        }
        for s in model.motion.shifts
    ]
    return document


def torsion_document(torsion: TreatedTorsion) -> dict[str, Any]:
    """A treated torsion: atoms counted from 1, levels above the ground level up to a little above the barrier."""
    from heatwright.partition.torsion import HinderedRotor

    levels = torsion.rotor.levels_cm1 if isinstance(torsion.rotor, HinderedRotor) else np.empty(0)
    return {
        "atoms": [a + 1 for a in torsion.bond.atoms],
        "barrier_cm-1": significant(torsion.potential.barrier_cm1),
        "F_cm-1": significant(torsion.F_cm1),
        "symmetry": torsion.bond.symmetry,
        "overlap": significant(torsion.overlap, 4),
        "angle_deg": significant(torsion.angle_deg, 6),
        "potential": _potential(torsion),
        "levels_cm-1": _numbers(levels[levels <= max(1.5 * torsion.potential.barrier_cm1, 500.0)]),
        "zero_point_cm-1": significant(torsion.ground_cm1),
        "ground_cm-1": significant(torsion.rotor.ground_cm1),
        "source": torsion.source,
    }


def _potential(torsion: TreatedTorsion) -> dict[str, Any]:
    """V(φ) = a0 + sum of a_m cos mφ + b_m sin mφ, and the points of the scan that it was fitted to."""
    potential, fit = torsion.potential, torsion.fit
    document: dict[str, Any] = {
        "constant_cm-1": significant(potential.constant_cm1),
        "cosine_cm-1": _numbers(potential.cosine_cm1),
        "sine_cm-1": _numbers(potential.sine_cm1),
    }
    if fit is not None:
        document |= {"scan_deg": _numbers(fit.angles_deg), "scan_cm-1": _numbers(fit.energies_cm1)}
    return document


def source_document(molecule: Molecule) -> dict[str, Any]:
    """Where a molecule was read from and at which level of theory it was computed."""
    document: dict[str, Any] = {
        "file": molecule.source.file,
        "sha256": molecule.source.sha256,
        "program": molecule.source.program_version,
        "level": molecule.level.label if molecule.level else None,
    }
    if molecule.energy_source is not None:
        document |= {
            "energy_file": molecule.energy_source.file,
            "energy_sha256": molecule.energy_source.sha256,
            "energy_program": molecule.energy_source.program_version,
            "energy_level": molecule.energy_level.label if molecule.energy_level else None,
        }
    return document


def failure_document(file: str, findings: Iterable[Finding]) -> dict[str, Any]:
    """An output that could not be used, and why."""
    return {"file": file, "findings": [f.as_json() for f in findings]}


def whole_document(species: Sequence[Mapping[str, Any]], failed: Sequence[Mapping[str, Any]]) -> dict[str, Any]:
    """The JSON document of a run: what was done and what failed."""
    return {"heatwright": JSON_VERSION, "species": list(species), "failed": list(failed)}


def _numbers(values: Iterable[float]) -> list[float]:
    return [significant(float(v)) for v in values]


def _formation(formation: Formation) -> dict[str, Any]:
    def rounded(value: float | None) -> float | None:
        return None if value is None else significant(value)

    return {
        "dHf0_kJ_mol": rounded(formation.dHf0_kJ_mol),
        "dHf298_kJ_mol": significant(formation.dHf298_kJ_mol),
        "u95_kJ_mol": rounded(formation.u95_kJ_mol),
        "method": formation.method,
        "source": formation.source,
        "ledger": [
            {"what": line.what, "value_kJ_mol": significant(line.value_kJ_mol), "source": line.source}
            for line in formation.ledger
        ],
        **({"other_routes": [_formation(other) for other in formation.alternatives]} if formation.alternatives else {}),
    }


def _table(table: ThermoTable) -> dict[str, Any]:
    def column(values: FloatArray) -> list[float]:
        return _numbers(values.tolist())

    return {
        "T_K": column(table.T_K),
        "Cp_J_mol_K": column(table.cp_J_mol_K),
        "H_minus_H298_kJ_mol": column(table.h_minus_h298_kJ_mol),
        "S_J_mol_K": column(table.s_J_mol_K),
        "minus_G_minus_H298_over_T_J_mol_K": column(table.minus_g_minus_h298_over_T_J_mol_K),
        "contributions": {
            name: {
                "Cp_J_mol_K": column(share.cp_J_mol_K),
                "H_minus_H298_kJ_mol": column(share.h_minus_h298_kJ_mol),
                "S_J_mol_K": column(share.s_J_mol_K),
            }
            for name, share in table.shares.items()
        },
    }


def _conformers(model: ThermoModel, table: ThermoTable) -> list[dict[str, Any]]:
    """The conformers, lowest first; populations at the table's temperatures, mirror images together."""
    return [
        {
            "file": conformer.file,
            "relative_energy_kJ_mol": significant(conformer.relative_energy_kJ_mol),
            "degeneracy": conformer.degeneracy,
            "populations": _numbers(populations.tolist()),
        }
        for conformer, populations in zip(model.conformers, table.populations, strict=True)
    ]


def _uncertainty(uncertainty: TableUncertainty) -> dict[str, Any]:
    """Standard uncertainties at the table's temperatures and the inputs they are from."""
    return {
        "Cp_J_mol_K": _numbers(uncertainty.cp_J_mol_K.tolist()),
        "H_minus_H298_kJ_mol": _numbers(uncertainty.h_minus_h298_kJ_mol.tolist()),
        "S_J_mol_K": _numbers(uncertainty.s_J_mol_K.tolist()),
        "inputs": [
            {"what": item.what, "value": significant(item.value), "unit": item.unit, "source": item.source}
            for item in uncertainty.inputs
        ],
    }


def nasa7_document(polynomial: Nasa7) -> dict[str, Any]:
    """A polynomial: temperatures (low, common, high) and coefficients as they are printed."""
    return {
        "T_K": [polynomial.t_low_K, polynomial.t_common_K, polynomial.t_high_K],
        "low": list(polynomial.low),
        "high": list(polynomial.high),
    }


def residuals_document(quality: FitQuality) -> dict[str, float]:
    """The largest residuals and the proven lower bound, dimensionless."""
    return {
        "max_dCp_R": significant(quality.dcp_R.largest, 4),
        "max_dH_RT": significant(quality.dh_RT.largest, 4),
        "max_dS_R": significant(quality.ds_R.largest, 4),
        "minimax_dCp_R": significant(quality.minimax_dCp_R, 4),
    }


def _residual_curve(curve: ResidualCurve) -> dict[str, Any]:
    def column(values: FloatArray) -> list[float]:
        return [significant(float(v), 4) for v in values]

    return {
        "T_K": _numbers(curve.T_K),
        "dCp_R": column(curve.dcp_R),
        "dH_RT": column(curve.dh_RT),
        "dS_R": column(curve.ds_R),
    }
