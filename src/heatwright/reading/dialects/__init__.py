"""Dialects: what each program prints in its own way, one class a program."""

from __future__ import annotations

from importlib import import_module

from heatwright.reading.dialects.base import Dialect, Facts, Identity

_MODULES = {"NWChem": "nwchem", "Gaussian": "gaussian", "ORCA": "orca", "Q-Chem": "qchem", "Psi4": "psi4"}
"""The main programs' modules; each is imported when an output of its program is read."""


def dialect_of(program: str) -> Dialect:
    """The dialect of a program by its name in ``detection.PROGRAMS``."""
    if program in _MODULES:
        module = import_module(f"{__name__}.{_MODULES[program]}")
        kinds = [kind for kind in vars(module).values() if _is_dialect(kind, program)]
    else:
        kinds = [kind for kind in import_module(f"{__name__}.others").OTHERS if kind.name == program]
    found: type[Dialect] = kinds[0] if kinds else Dialect
    return found()


def _is_dialect(thing: object, program: str) -> bool:
    return isinstance(thing, type) and issubclass(thing, Dialect) and thing.name == program


__all__ = ["Dialect", "Facts", "Identity", "dialect_of"]
