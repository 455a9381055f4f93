"""The comment block before each entry: what it was made from, how, and how well the polynomial holds it."""

from __future__ import annotations

import textwrap
from functools import lru_cache
from itertools import chain
from typing import TYPE_CHECKING, Final

from heatwright.constants import ATMOSPHERE_PA, BAR_PA, STANDARD_TEMPERATURE_K
from heatwright.elements import formula
from heatwright.findings import SEVERITY_WORD, Finding
from heatwright.writing.evidence import evidence
from heatwright.writing.units import UNITS, Units

if TYPE_CHECKING:
    from heatwright.entry import Entry
    from heatwright.formation.formation import Formation
    from heatwright.molecule import Molecule
    from heatwright.partition.model import ThermoModel
    from heatwright.partition.table import ThermoTable

WIDTH: Final = 76
"""Longest comment text, so that a line with its mark stays inside 80 columns."""

CAUTION: Final = (
    "Computed thermodynamic data, not validated for safety decisions: for flame, explosion",
    "and process-safety work rely on evaluated data, local codes and licensed practice.",
)
"""The usual caution, at the head of every file of entries."""


def pressure_text(pressure_Pa: float) -> str:
    """A standard pressure as people name it.

    >>> pressure_text(101325.0)
    '1 atm'
    """
    named = {BAR_PA: "1 bar", ATMOSPHERE_PA: "1 atm"}
    return named.get(pressure_Pa, f"{pressure_Pa:g} Pa")


def comment_lines(entry: Entry) -> tuple[str, ...]:
    """The block as ASCII lines without a comment mark."""
    paragraphs = (
        *_identity(entry.name, entry.model),
        f"evidence: {evidence(entry)}",
        *_treatment(entry.model),
        *_thermochemistry(entry),
        *_fit(entry),
        *(f"{SEVERITY_WORD[f.severity]}: {f.text}" for f in entry.findings if _is_recorded(f)),
        *entry.comments,
    )
    return tuple(chain.from_iterable(map(_wrapped, paragraphs)))


_RECORDED_NOTES: Final = frozenset(
    {
        "user-value",
        "published-scale",
        "given-by-hand",
        "isotopes",
        "energy-from-file",
        "anharmonic",
        "low-modes",
        "rotation",
        "level-sum",
        "conformer-merged",
        "conformer-not-lowest",
        "torsion",
        "torsion-counted-twice",
        "torsion-classical",
    }
)


def _is_recorded(finding: Finding) -> bool:
    """Whether a reader of the entry must know of it: every warning, every value the user put in, published factors."""
    return finding.severity == "warn" or finding.code in _RECORDED_NOTES


@lru_cache(maxsize=4096)
def _wrapped(text: str) -> tuple[str, ...]:
    """As :func:`wrapped`; most lines are the same for many species."""
    return tuple(wrapped(text))


def wrapped(text: str) -> list[str]:
    """Lines of at most :data:`WIDTH`, those after the first indented; as textwrap has it, in a fraction of the time."""
    rest, lines, indent = ascii_text(text), [], ""
    while len(indent) + len(rest) > WIDTH:
        cut = rest.rfind(" ", 0, WIDTH - len(indent) + 1)
        if cut < 0:  # a word longer than a line
            whole = ascii_text(text)
            return textwrap.wrap(whole, WIDTH, subsequent_indent=_INDENT, break_on_hyphens=False)
        lines.append(indent + rest[:cut])
        rest, indent = rest[cut + 1 :], _INDENT
    return [*lines, indent + rest] if rest else lines


_INDENT: Final = "  "


_ASCII: Final = str.maketrans(
    {
        "°": "",
        "Δ": "d",
        "−": "-",
        "–": "-",
        "±": "+/-",
        "Π": "Pi",
        "Σ": "Sigma",
        "²": "^2",
        "³": "^3",
        "⁻": "^-",
        "¹": "1",
        "φ": "phi",
        "Å": "A",
    }
)


def ascii_text(text: str) -> str:
    """*text* in printable ASCII on one line; what has no usual spelling there is written as its code point."""
    if text.isascii():
        return " ".join(text.split())
    one_line = " ".join(text.translate(_ASCII).split())
    return one_line.encode("ascii", "backslashreplace").decode("ascii")


def _identity(name: str, model: ThermoModel) -> tuple[str, ...]:
    molecule = model.molecule
    return (
        f"{name}: {formula(model.composition)}, charge {molecule.charge}, multiplicity {molecule.multiplicity}",
        f"from {molecule.source.file}",
        f"sha256 {molecule.source.sha256}",
        f"{molecule.source.program_version}, {molecule.level_text}",
        *_energy_source(molecule),
    )


def _energy_source(molecule: Molecule) -> tuple[str, ...]:
    source = molecule.energy_source
    return () if source is None else (f"energy from {source.file}, {source.program_version}", f"sha256 {source.sha256}")


def _treatment(model: ThermoModel) -> tuple[str, ...]:
    if model.molecule.is_atom:
        motion = "atom"
    else:
        isomers = f", {model.optical_isomers} optical isomers" if model.optical_isomers > 1 else ""
        motion = f"{model.motion_text}; {model.point_group_text}, symmetry number {model.symmetry_number}{isomers}"
    return (
        f"{motion}; {model.mass_kind} masses",
        *(() if model.molecule.is_atom else (scale_text(model),)),
        levels_text(model),
        *conformers_text(model),
    )


def conformers_text(model: ThermoModel) -> tuple[str, ...]:
    """The conformers of a mixture in words, with their populations at 298.15 K; nothing for a single one."""
    if not model.conformers:
        return ()
    each = "; ".join(
        f"{c.file} at {c.relative_energy_kJ_mol:.3f} kJ/mol"
        f"{f', {c.degeneracy} mirror images' if c.degeneracy > 1 else ''}, population {float(p):.3f}"
        for c, p in zip(model.conformers, model.populations(STANDARD_TEMPERATURE_K), strict=True)
    )
    return (f"mixture of conformers at equilibrium, populations at 298.15 K: {each}",)


def uncertainty_text(table: ThermoTable) -> tuple[str, ...]:
    """The inputs with uncertainties and their sources, in words; nothing for a table without."""
    if table.uncertainty is None:
        return ()
    inputs = "; ".join(f"{item.text} ({item.source})" for item in table.uncertainty.inputs)
    return (f"standard uncertainties from: {inputs}",)


def _uncertainty_298(table: ThermoTable) -> tuple[str, ...]:
    if table.uncertainty is None:
        return ()
    i = index_298(table)
    cp, s = table.uncertainty.cp_J_mol_K[i], table.uncertainty.s_J_mol_K[i]
    at_298 = f"standard uncertainties at 298.15 K: S {s:.2f}, Cp {cp:.2f} J/mol/K"
    return (at_298, *uncertainty_text(table))


def levels_text(model: ThermoModel) -> str:
    """The electronic levels in words, with where they are from."""
    if model.levels == ((0.0, 1),):
        return f"a single electronic level ({model.levels_source})"
    levels = ", ".join(f"{nu:g} 1/cm x {g}" for nu, g in model.levels)
    return f"electronic levels {levels} ({model.levels_source})"


def scale_text(model: ThermoModel) -> str:
    """The scale factors in words, with where they are from; that there are none in an anharmonic model."""
    if model.molecule.stated.diatomic is not None:
        return "levels and zero-point energy from spectroscopic constants: unscaled"
    if model.options.anharmonic:
        return "fundamentals and zero-point energy as printed: unscaled"
    words = f"scale factors {model.frequency_scale:g} (thermal functions) and {model.zpe_scale:g} (zero-point energy)"
    source = model.scale_source
    return f"{words}, {source}" if source else f"{words}: unscaled"


def ledger_text(formation: Formation, units: Units = UNITS["kJ"]) -> list[str]:
    """The ledger, a line each with four decimals, so that the sum can be checked by hand; empty for a single line."""
    if len(formation.ledger) < 2:
        return []
    return [
        f"{_fixed(line.value_kJ_mol * units.factor)} {units.enthalpy}  {line.what}"
        f"{f' ({line.source})' if line.source else ''}"
        for line in formation.ledger
    ]


def _fixed(value: float) -> str:
    return f"{round(value, 4) + 0.0:14.4f}"


def formation_text(formation: Formation, units: Units = UNITS["kJ"]) -> str:
    """The formation in words: value, uncertainty, route and source."""
    f, unit = units.factor, units.enthalpy
    spread = "" if formation.u95_kJ_mol is None else f" +/- {formation.u95_kJ_mol * f:.3g}"
    at_zero = "" if formation.dHf0_kJ_mol is None else f", dHf(0 K) = {formation.dHf0_kJ_mol * f:.3f}"
    value = f"dHf(298.15 K) = {formation.dHf298_kJ_mol * f:.3f}{spread}{at_zero} {unit}"
    return f"{value}, {formation.method}: {formation.source}"


def _thermochemistry(entry: Entry) -> tuple[str, ...]:
    table, at_298 = entry.table, index_298(entry.table)
    return (
        formation_text(entry.formation),
        f"S(298.15 K) = {table.s_J_mol_K[at_298]:.3f}, Cp(298.15 K) = {table.cp_J_mol_K[at_298]:.3f} J/mol/K; "
        f"H(298.15 K) - H(0) = {table.h298_minus_h0_kJ_mol:.3f} kJ/mol",
        f"standard pressure {pressure_text(entry.model.options.pressure_Pa)}",
        *_uncertainty_298(table),
    )


def index_298(table: ThermoTable) -> int:
    """Where 298.15 K is in a table that has it, as that of an entry."""
    return int(abs(table.T_K - STANDARD_TEMPERATURE_K).argmin())


def residual_text(entry: Entry) -> str:
    """The residuals of the printed text in words, with the proven bound."""
    q = entry.quality
    return (
        f"largest residuals dCp/R {q.dcp_R.largest:.2g} at {q.dcp_R.at_K:.0f} K, dH/RT {q.dh_RT.largest:.2g}, "
        f"dS/R {q.ds_R.largest:.2g}; no such polynomial has dCp/R below {q.minimax_dCp_R:.2g}"
    )


def _fit(entry: Entry) -> tuple[str, ...]:
    p = entry.polynomial
    return (f"fitted {p.t_low_K:g}-{p.t_common_K:g}-{p.t_high_K:g} K; {residual_text(entry)}",)
