"""A comparison as the plain object that ``compare --json`` prints; numbers to nine significant digits."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.findings import Finding
from heatwright.project.changes import Change, Comparison
from heatwright.project.differences import has_298
from heatwright.project.effects import MechanismEffect, ReactionChange
from heatwright.project.flame import Flame
from heatwright.project.thermo_set import Thermo, ThermoSet
from heatwright.writing.numbers import significant

_DIGITS = 9


def comparison_document(comparison: Comparison) -> dict[str, Any]:
    """Both sides, tolerance, temperatures, and every species in the order of what matters."""
    tolerance = comparison.tolerance
    return {
        "old": _side(comparison.old),
        "new": _side(comparison.new),
        "tolerance": {
            "dHf298_kJ_mol": tolerance.H,
            "S298_J_mol_K": tolerance.S,
            "Cp_J_mol_K": tolerance.Cp,
            "G_kJ_mol": tolerance.G,
            "flame_K": tolerance.flame_K,
        },
        "temperatures_K": list(comparison.temperatures_K),
        "species": [change_document(change) for change in comparison.changes],
    }


def _side(side: ThermoSet) -> dict[str, Any]:
    return {
        "path": side.path,
        "kind": side.kind,
        "species": len(side.species),
        "standard_pressure_Pa": side.pressure_Pa,
        "unusable": sorted(side.unusable),
    }


def change_document(change: Change) -> dict[str, Any]:
    """One species: kind, values of both sides, differences, reasons, remarks."""
    d = change.difference
    return {
        "name": change.name,
        "kind": change.kind,
        "moved": change.moved,
        "old": None if change.old is None else _thermo(change.old),
        "new": None if change.new is None else _thermo(change.new),
        "ddHf298_kJ_mol": None if d is None else _number(d.ddHf298_kJ_mol),
        "dS298_J_mol_K": None if d is None else _number(d.dS298_J_mol_K),
        "dCp_J_mol_K": None if d is None else _numbers(d.dCp_J_mol_K),
        "dG_kJ_mol": None if d is None else _numbers(d.dG_kJ_mol),
        "largest_dCp_J_mol_K": None if d is None else _number(d.largest_dCp_J_mol_K),
        "largest_dCp_at_K": None if d is None else _number(d.largest_at_K),
        "compared_K": None if d is None or d.inside_K is None else list(d.inside_K),
        "reasons": list(change.reasons),
        "remarks": list(change.remarks),
    }


def _thermo(thermo: Thermo) -> dict[str, Any]:
    h, s = values_298(thermo)
    return {"name": thermo.name, "where": thermo.where, "dHf298_kJ_mol": _number(h), "S298_J_mol_K": _number(s)}


def values_298(thermo: Thermo) -> tuple[float | None, float | None]:
    """ΔfH°(298.15) in kJ/mol and S°(298.15) in J/mol/K, None where the entry does not reach there."""
    p, record = thermo.polynomial, thermo.record
    if p is not None:
        if not has_298(p):
            return None, None
        R, t = GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
        return R * p.h_R(t) / 1000.0, R * p.s_R(t)
    return (None, None) if record is None else (record.formation.dHf298_kJ_mol, record.S298_J_mol_K)


def effect_document(effect: MechanismEffect, factor: float) -> dict[str, Any]:
    """The reactions that changed species are reactants or products of, those that move most first."""
    return {
        "path": effect.mechanism.path,
        "n_reactions": len(effect.mechanism.reactions),
        "factor": factor,
        "reactions": [_reaction(r, factor) for r in effect.reactions],
    }


def _reaction(changed: ReactionChange, factor: float) -> dict[str, Any]:
    reaction = changed.reaction
    return {
        "number": reaction.number,
        "equation": reaction.text,
        "where": reaction.where,
        "type": reaction.kind,
        "reversible": reaction.equation.reversible,
        "duplicate": reaction.duplicate,
        "collider": reaction.equation.collider,
        "species": list(changed.species),
        "dlnKc": _numbers(changed.dlnKc),
        "reverse_factors": _numbers(changed.reverse_factors),
        "beyond_factor": changed.reverse_moves_by(factor),
        "remarks": list(changed.remarks),
    }


def flame_document(found: Flame | Finding) -> dict[str, Any]:
    """Mixture and temperatures, or the sentence that says why there are none."""
    if isinstance(found, Finding):
        return {"none": found.text}
    return {
        "mixture": str(found.mixture),
        "phase": found.phase,
        "old_K": _number(found.old_K, 7),
        "new_K": _number(found.new_K, 7),
        "shift_K": _number(found.new_K - found.old_K, 4),
    }


def _number(value: float | None, digits: int = _DIGITS) -> float | None:
    return None if value is None else significant(value, digits)


def _numbers(values: Iterable[float | None]) -> list[float | None]:
    return [_number(x) for x in values]
