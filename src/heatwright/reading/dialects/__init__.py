"""Dialects: what each program prints in its own way, one class a program."""

from __future__ import annotations

from heatwright.reading.dialects.base import Dialect, Facts, Identity
from heatwright.reading.dialects.gaussian import Gaussian
from heatwright.reading.dialects.nwchem import NWChem
from heatwright.reading.dialects.orca import ORCA
from heatwright.reading.dialects.others import OTHERS
from heatwright.reading.dialects.psi4 import Psi4
from heatwright.reading.dialects.qchem import QChem

_KINDS: tuple[type[Dialect], ...] = (NWChem, Gaussian, ORCA, QChem, Psi4, *OTHERS)
_DIALECTS = {kind.name: kind for kind in _KINDS}


def dialect_of(program: str) -> Dialect:
    """The dialect of a program by its name in ``detection.PROGRAMS``."""
    return _DIALECTS.get(program, Dialect)()


__all__ = ["Dialect", "Facts", "Identity", "dialect_of"]
