"""Words and ledger lines that the routes through references share."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Final

from heatwright.formation.formation import LedgerLine
from heatwright.formation.references import atom_reference

if TYPE_CHECKING:
    from heatwright.formation.reference_set import Reference
    from heatwright.partition.model import ThermoModel

COVERAGE: Final = 2.0
"""Standard deviations in a 95 % uncertainty."""
LOWEST_LEVEL: Final = "levels of the doublet Pi state (Hill and Van Vleck 1928)"


def sources(references: Sequence[Reference]) -> str:
    """The publications of the references' enthalpies, each once."""
    return "; ".join(sorted({r.row.source for r in references}))


def level_label(model: ThermoModel) -> str:
    """The level of theory of the model's energy, as chemists write it."""
    level = model.molecule.level_of_energy
    return level.label if level else "level of theory not printed"


def element_lines(model: ThermoModel) -> tuple[LedgerLine, ...]:
    """The enthalpy increments of the elements, taken off, one line an element."""
    lines = []
    for symbol, n in model.composition.items():
        reference = atom_reference(symbol)
        assert reference is not None  # the caller has looked
        what = f"{n} x H(298.15 K) - H(0) of {symbol}, {reference.reference_state}"
        lines.append(LedgerLine(what, -n * reference.element_H298_H0_kJ_mol, reference.increment_source))
    return tuple(lines)
