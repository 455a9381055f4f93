"""The evidence statement: in one sentence what stands behind an entry, always the same four things in the same order.

1. the data: level of theory and program of the modes (and of the energy, where that is from elsewhere);
2. the treatment of the motions: oscillators with their scale factor and lowest wavenumber, torsions, low modes,
   conformers, or sums over levels;
3. the route to the enthalpy of formation and its 95 % uncertainty, or that none is known;
4. the largest residual of Cp° over the range that was fitted.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from heatwright.entry import Entry
    from heatwright.formation.formation import Formation
    from heatwright.molecule import Molecule
    from heatwright.partition.model import ThermoModel
    from heatwright.polynomial.nasa7 import Nasa7


def evidence(entry: Entry) -> str:
    """What stands behind *entry*, as one sentence."""
    parts = (
        data_text(entry.model.molecule),
        treatment_text(entry.model),
        route_text(entry.formation),
        fit_text(entry.polynomial, entry.quality.dcp_R.largest),
    )
    return _sentence(parts)


def evidence_without_entry(model: ThermoModel) -> str:
    """The first two parts, for a table without enthalpy of formation and polynomial."""
    return _sentence((data_text(model.molecule), treatment_text(model)))


def evidence_of_record(file: str, note: str, polynomial: Nasa7 | None) -> str:
    """For an entry that was read from a thermo file, of which nothing else is known.

    >>> evidence_of_record("old.dat", "L 8/88", None)
    "Read from old.dat (note 'L 8/88'); nothing is known of the data and the model behind it."
    """
    said = f" (note {note!r})" if note else ""
    parts = [f"read from {file}{said}", "nothing is known of the data and the model behind it"]
    if polynomial is not None:
        parts.append(f"polynomial for {polynomial.t_low_K:g}–{polynomial.t_high_K:g} K")
    return _sentence(parts)


def _sentence(parts: Sequence[str]) -> str:
    text = "; ".join(part for part in parts if part)
    return f"{text[0].upper()}{text[1:]}."


def data_text(molecule: Molecule) -> str:
    """Level and program, or that the molecule was written down by hand."""
    if molecule.source.program == "by hand":
        what = "spectroscopic constants" if molecule.stated.diatomic is not None else "molecule"
        level = f" ({molecule.level.label})" if molecule.level else ""
        return f"{what} given by hand{level}"
    programs = [molecule.source.program_version]
    if molecule.energy_source is not None:
        programs.insert(0, molecule.energy_source.program_version)
    return f"{molecule.level_text}, {' and '.join(dict.fromkeys(programs))}"


def treatment_text(model: ThermoModel) -> str:
    """How the motions were treated."""
    if model.molecule.is_atom:
        return "atom: translation and electronic levels"
    parts = [*_levels(model), *_oscillators(model), *_rotors(model)]
    if model.conformers:
        parts.append(f"mixture of {len(model.conformers)} conformers")
    return ", ".join(parts)


def _levels(model: ThermoModel) -> list[str]:
    """Sums over levels in the place of the rigid rotor; a classical or corrected one needs no words."""
    if model.motion.rotation == "sum":
        return ["rotational levels summed"]
    return [model.motion.rotation_text.split(" (")[0]] if model.motion.rotation == "level sum" else []


def _oscillators(model: ThermoModel) -> list[str]:
    modes = [nu for c in model.contributions for nu in getattr(c, "wavenumbers_cm1", ())]
    if not modes:
        return []
    factor = model.frequency_scale
    scale = f"scaled by {factor:g}" if factor != 1.0 else "unscaled"
    kind = "anharmonic fundamentals" if model.options.anharmonic else f"harmonic oscillators {scale}"
    low = model.options.low_modes
    treated = {
        "floor": f", those below {low.cutoff_cm1:g} cm⁻¹ raised to it",
        "interpolate": f", towards free rotors below {low.cutoff_cm1:g} cm⁻¹",
    }
    return [f"{kind} (lowest {min(modes):.0f} cm⁻¹{treated.get(low.kind, '')})"]


def _rotors(model: ThermoModel) -> list[str]:
    """The hindered rotors, by where their potentials are from."""
    scans = sum(t.fit is not None for t in model.torsions)
    kinds = ((scans, "from a scan", "from scans"), (len(model.torsions) - scans, "from a barrier", "from barriers"))
    return [f"{n} hindered rotor{'s' if n > 1 else ''} {many if n > 1 else one}" for n, one, many in kinds if n]


def route_text(formation: Formation) -> str:
    """The route to the enthalpy of formation, with its uncertainty."""
    how = {
        "given": f"ΔfH° given ({formation.source})",
        "atomization": "ΔfH° by atomization",
        "reaction": "ΔfH° by a balanced reaction",
        "network": f"ΔfH° by a network of {formation.source.split(' (')[0]}",
    }
    return f"{how.get(formation.method, f'ΔfH° by {formation.method}')}, {uncertainty_text(formation.u95_kJ_mol)}"


def uncertainty_text(u95_kJ_mol: float | None) -> str:
    """A 95 % uncertainty in words.

    >>> uncertainty_text(0.2), uncertainty_text(None)
    ('±0.20 kJ/mol', 'uncertainty not known')
    """
    if u95_kJ_mol is None:
        return "uncertainty not known"
    return f"±{u95_kJ_mol:.{0 if u95_kJ_mol >= 10.0 else 1 if u95_kJ_mol >= 0.95 else 2}f} kJ/mol"


def fit_text(polynomial: Nasa7, largest_dcp_R: float) -> str:
    """The largest residual of Cp°/R and the range it belongs to."""
    where = f"{polynomial.t_low_K:g}–{polynomial.t_high_K:g} K"
    if largest_dcp_R < 5e-6:
        return f"polynomial exact in Cp°, {where}"
    return f"polynomial within {largest_dcp_R:.2g} R in Cp°, {where}"
