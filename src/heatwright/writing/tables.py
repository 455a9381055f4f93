"""The table as text for a terminal."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from heatwright.elements import formula
from heatwright.writing.comment import levels_text, pressure_text
from heatwright.writing.units import UNITS, Units

if TYPE_CHECKING:
    from heatwright.partition.model import ThermoModel
    from heatwright.partition.table import ThermoTable
    from heatwright.partition.uncertainty import TableUncertainty


def text_table(name: str, model: ThermoModel, table: ThermoTable, units: Units = UNITS["kJ"]) -> str:
    """Two blocks of columns under a heading: the totals, and the share of each contribution in Cp° and S°."""
    blocks = (
        *_heading(name, model, table, units),
        "",
        *_totals(table, units),
        "",
        *_shares(table, units),
        *_conformers(model, table, units),
    )
    return "\n".join(blocks) + "\n"


def _heading(name: str, model: ThermoModel, table: ThermoTable, units: Units) -> Iterable[str]:
    molecule = model.molecule
    constants = ", ".join(f"{b:.5g}" for b in model.inertia.rotational_constants_cm1)
    yield f"{name}   {formula(model.composition, molecule.charge or 0)}, multiplicity {molecule.multiplicity}"
    pressure = pressure_text(model.options.pressure_Pa)
    yield f"{molecule.source.program_version}, {molecule.level_text}; {model.mass_kind} masses, {pressure}"
    if not molecule.is_atom:
        n = molecule.wavenumbers_cm1.size
        isomers = f", {model.optical_isomers} optical isomers" if model.optical_isomers > 1 else ""
        yield f"{model.point_group_text}, symmetry number {model.symmetry_number}{isomers}; {constants} cm⁻¹"
        if model.motion_text != "rigid rotor, harmonic oscillators":
            yield model.motion_text
        modes = "anharmonic" if model.options.anharmonic else f"scale factor {model.frequency_scale:g}"
        zpe = model.zpe_text.replace("harmonic, scaled by", "scale factor")
        yield (
            f"{n} mode{'s' if n != 1 else ''}, {modes}; zero-point energy "
            f"{model.zpe_kJ_mol * units.factor:.3f} {units.enthalpy}, {zpe}"
        )
    yield levels_text(model).replace("1/cm x", "cm⁻¹ ×")
    yield f"H°(298.15 K) − H°(0 K) = {table.h298_minus_h0_kJ_mol * units.factor:.3f} {units.enthalpy}"
    if table.uncertainty is not None:
        yield "± are standard uncertainties, from those of the inputs:"
        yield from (f"  {item.text} ({item.source})" for item in table.uncertainty.inputs)


def _totals(table: ThermoTable, units: Units) -> Iterable[str]:
    if table.uncertainty is not None:
        yield from _totals_with_uncertainty(table, table.uncertainty, units)
        return
    yield f"{'T':>9} {'Cp°':>10} {'H°−H°(298)':>12} {'S°':>10} {'−[G°−H°(298)]/T':>17}"
    e, h_unit = units.entropy, units.enthalpy
    yield f"{'K':>9} {e:>10} {h_unit:>12} {e:>10} {e:>17}"
    gibbs = table.minus_g_minus_h298_over_T_J_mol_K
    columns = [c * units.factor for c in (table.cp_J_mol_K, table.h_minus_h298_kJ_mol, table.s_J_mol_K, gibbs)]
    for T, cp, h, s, g in zip(table.T_K, *columns, strict=True):
        yield f"{T:9.2f} {cp:10.3f} {h:z12.3f} {s:10.3f} {g:17.3f}"


def _totals_with_uncertainty(table: ThermoTable, u: TableUncertainty, units: Units) -> Iterable[str]:
    """The totals with a ± column after Cp°, H°−H°(298) and S°."""
    e, h_unit = units.entropy, units.enthalpy
    yield f"{'T':>9} {'Cp°':>10} {'±':>8} {'H°−H°(298)':>12} {'±':>8} {'S°':>10} {'±':>8} {'−[G°−H°(298)]/T':>17}"
    yield f"{'K':>9} {e:>10} {'':>8} {h_unit:>12} {'':>8} {e:>10} {'':>8} {e:>17}"
    values = (table.cp_J_mol_K, u.cp_J_mol_K, table.h_minus_h298_kJ_mol, u.h_minus_h298_kJ_mol, table.s_J_mol_K)
    columns = [c * units.factor for c in (*values, u.s_J_mol_K, table.minus_g_minus_h298_over_T_J_mol_K)]
    for T, cp, u_cp, h, u_h, s, u_s, g in zip(table.T_K, *columns, strict=True):
        yield f"{T:9.2f} {cp:10.3f} {u_cp:8.3f} {h:z12.3f} {u_h:8.3f} {s:10.3f} {u_s:8.3f} {g:17.3f}"


def _conformers(model: ThermoModel, table: ThermoTable, units: Units) -> Iterable[str]:
    """The populations of the conformers, mirror images together; nothing for a single conformer."""
    if not model.conformers:
        return
    yield ""
    for i, c in enumerate(model.conformers, start=1):
        energy = f"{c.relative_energy_kJ_mol * units.factor:.3f} {units.enthalpy}"
        yield f"conformer {i}: {c.file}, {energy}{f', {c.degeneracy} mirror images' if c.degeneracy > 1 else ''}"
    yield f"{'T':>9}   populations"
    yield f"{'K':>9}   {' '.join(f'{i:>8}' for i in range(1, len(model.conformers) + 1))}"
    for j, T in enumerate(table.T_K):
        yield f"{T:9.2f}   {' '.join(f'{p[j]:8.5f}' for p in table.populations)}"


def _shares(table: ThermoTable, units: Units) -> Iterable[str]:
    names = list(table.shares)
    widths = [max(len(name), 9) for name in names]
    labels = " ".join(f"{name:>{width}}" for name, width in zip(names, widths, strict=True))
    yield f"{'T':>9}   {f'share of Cp°, {units.entropy}':<{len(labels)}}   share of S°, {units.entropy}"
    yield f"{'K':>9}   {labels}   {labels}"
    for i, T in enumerate(table.T_K):
        cp = " ".join(
            f"{table.shares[n].cp_J_mol_K[i] * units.factor:{w}.3f}" for n, w in zip(names, widths, strict=True)
        )
        s = " ".join(
            f"{table.shares[n].s_J_mol_K[i] * units.factor:{w}.3f}" for n, w in zip(names, widths, strict=True)
        )
        yield f"{T:9.2f}   {cp}   {s}"
