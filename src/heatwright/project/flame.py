"""Adiabatic flame temperatures of a stated mixture with the entries of two sides; needs Cantera."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from importlib import import_module
from importlib.util import find_spec
from math import log
from typing import Any, Final

from heatwright.constants import ATMOSPHERE_PA, BAR_PA, STANDARD_TEMPERATURE_K
from heatwright.errors import UsageError
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.project.mechanism import Mechanism
from heatwright.project.thermo_set import Thermo, ThermoSet

EXAMPLE: Final = "fuel=CH4; oxidizer=O2:1,N2:3.76; phi=1; T=298.15 K; p=1 atm"
_KEYS: Final = ("fuel", "oxidizer", "phi", "mixture", "T", "p")
_AIR: Final = "O2:1,N2:3.76"
_PRESSURES: Final = {"atm": ATMOSPHERE_PA, "bar": BAR_PA, "kPa": 1000.0, "MPa": 1.0e6, "Pa": 1.0}
_NUMBER_UNIT = re.compile(r"(\d+\.?\d*(?:[eE][+-]?\d+)?)\s*([A-Za-z]*)")


@dataclass(frozen=True, slots=True, kw_only=True)
class Mixture:
    """What burns, at constant enthalpy and pressure: fuel, oxidizer and φ, or moles of everything (``moles``)."""

    fuel: Mapping[str, float]
    oxidizer: Mapping[str, float]
    phi: float
    moles: Mapping[str, float]
    temperature_K: float
    pressure_Pa: float

    @property
    def species(self) -> tuple[str, ...]:
        """Every species it names."""
        return tuple(dict.fromkeys((*self.fuel, *self.oxidizer, *self.moles)))

    def __str__(self) -> str:
        def listed(part: Mapping[str, float]) -> str:
            return ", ".join(f"{s}:{n:g}" for s, n in part.items())

        what = listed(self.moles) if self.moles else f"{listed(self.fuel)} in {listed(self.oxidizer)}, φ = {self.phi:g}"
        return f"{what}, {self.temperature_K:g} K, {self.pressure_Pa:g} Pa"


def parse_mixture(text: str) -> Mixture:
    """A mixture in words, parts separated by ``;``: ``fuel=CH4; oxidizer=O2:1,N2:3.76; phi=1; T=298.15 K; p=1 atm``.

    Only the fuel has to be said, or ``mixture=CH4:1,O2:2,N2:7.52`` instead of fuel, oxidizer and φ; numbers are moles.

    Raises UsageError.

    >>> parse_mixture("fuel=CH3OH; phi=0.8").phi
    0.8
    """
    parts: dict[str, str] = {}
    for part in text.split(";"):
        key, sign, value = (word.strip() for word in part.partition("="))
        if not sign or key not in _KEYS or key in parts or not value:
            raise UsageError(f"--mixture {part.strip()!r}: expected parts such as {EXAMPLE}, each once")
        parts[key] = value
    if ("fuel" in parts) == ("mixture" in parts) or ("mixture" in parts and {"oxidizer", "phi"} & parts.keys()):
        raise UsageError("--mixture: say either fuel (with oxidizer and phi) or the whole mixture")
    return Mixture(
        fuel=_moles(parts.get("fuel", "")),
        oxidizer=_moles(parts.get("oxidizer", _AIR)) if "fuel" in parts else {},
        phi=_quantity(parts.get("phi", "1"), {"": 1.0}),
        moles=_moles(parts.get("mixture", "")),
        temperature_K=_quantity(parts.get("T", f"{STANDARD_TEMPERATURE_K}"), {"": 1.0, "K": 1.0}),
        pressure_Pa=_quantity(parts.get("p", "1 atm"), _PRESSURES),
    )


def _moles(text: str) -> dict[str, float]:
    moles: dict[str, float] = {}
    for part in text.split(",") if text else ():
        name, sign, amount = (word.strip() for word in part.rpartition(":"))
        name, amount = (name, amount) if sign else (amount, "1")
        if not name or name in moles:
            raise UsageError(f"--mixture {part.strip()!r}: expected SPECIES:MOLES, each species once")
        moles[name] = _quantity(amount, {"": 1.0})
    return moles


def _quantity(text: str, units: Mapping[str, float]) -> float:
    match = _NUMBER_UNIT.fullmatch(text)
    value = float(match[1]) * units[match[2]] if match and match[2] in units else 0.0
    if not 0.0 < value < 1e300:
        named = ", ".join(u for u in units if u)
        raise UsageError(f"--mixture {text!r}: expected a positive number{f' with {named}' if named else ''}")
    return value


@dataclass(frozen=True, slots=True, kw_only=True)
class Flame:
    """Adiabatic flame temperatures with OLD's and NEW's entries in the place of the mechanism's own; K.

    replaced : how many species of the phase took their entry from OLD and from NEW.
    """

    mixture: Mixture
    phase: str
    old_K: float
    new_K: float
    replaced: tuple[int, int]
    findings: tuple[Finding, ...] = ()


def flame(mechanism: Mechanism, mixture: Mixture, old: ThermoSet, new: ThermoSet) -> Flame | Finding:
    """Flame temperatures with the entries of both sides, or the finding that says why there are none.

    The phase is the mechanism's first gas; species that a side does not have keep the mechanism's own entries.

    Raises Refused (``no-flame``, ``other-species``) when the mixture does not fit the mechanism or no equilibrium is
    found.
    """
    if find_spec("cantera") is None:
        action = "Install it (`pip install cantera`); everything else here needs no Cantera."
        return note("no-flame", "flame temperatures need Cantera, which is not installed", action=action)
    bare = [s.path for s in (old, new) if not any(t.polynomial for t in s.species.values())]
    if bare:
        action = "Give the release folder or a thermo file."
        return note("no-flame", "a flame needs polynomials, and a lock file has none", where=bare[0], action=action)
    gas = next((p for p in mechanism.phases if p.is_gas), None)
    if gas is None:
        raise _refused("the mechanism has no gas phase", mechanism.path)
    missing = [s for s in mixture.species if s not in gas.species]
    if missing:
        found = f"the mixture names {', '.join(missing)}, which phase {gas.name} does not have"
        raise _refused(found, mechanism.path, action="Names are case-sensitive.")
    ct: Any = import_module("cantera")
    ct.suppress_thermo_warnings()
    temperatures, counts, findings = [], [], []
    for side in (old, new):
        phase, replaced = _with_entries(ct, mechanism.path, gas.name, side)
        temperatures.append(_burn(ct, phase, mixture, mechanism.path))
        counts.append(len(replaced))
        findings += _beyond(temperatures[-1], replaced, side)
    return Flame(
        mixture=mixture,
        phase=gas.name,
        old_K=temperatures[0],
        new_K=temperatures[1],
        replaced=(counts[0], counts[1]),
        findings=tuple(findings),
    )


def _refused(found: str, where: str, action: str = "") -> Refused:
    return Refused([refuse("no-flame", found, where=where, action=action)])


def _with_entries(ct: Any, path: str, phase: str, side: ThermoSet) -> tuple[Any, list[Thermo]]:
    """The gas, taken as ideal, with a side's entries in the place of its own, and those entries."""
    try:
        gas = ct.ThermoPhase(path, phase)
        own, pressure_Pa = gas.species(), gas.reference_pressure
        entries = {one.name: _entry_for(one, side) for one in own}
        species = [_species(ct, one, entries[one.name], pressure_Pa) for one in own]
        return ct.ThermoPhase(thermo="ideal-gas", species=species), [e for e in entries.values() if e is not None]
    except (ct.CanteraError, ValueError, TypeError) as error:
        raise _refused(f"Cantera cannot read the mechanism: {_sentence(error)}", path) from error


def _entry_for(own: Any, side: ThermoSet) -> Thermo | None:
    """The side's entry of one of the mechanism's species; raises Refused when it is another species."""
    entry = side.species.get(own.name)
    if entry is None or entry.polynomial is None:
        return None
    theirs = {symbol.upper(): n for symbol, n in own.composition.items() if n}
    if entry.composition and {symbol.upper(): float(n) for symbol, n in entry.composition.items()} != theirs:
        found = f"{own.name} has other elements or counts than the mechanism's {own.name}"
        raise Refused([refuse("other-species", found, where=entry.where)])
    return entry


def _species(ct: Any, own: Any, entry: Thermo | None, pressure_Pa: float) -> Any:
    """The mechanism's species with an entry brought to its standard pressure, since one phase can have only one."""
    if entry is None or entry.polynomial is None:
        return own
    p = entry.polynomial
    shift = 0.0 if entry.pressure_Pa is None else -log(pressure_Pa / entry.pressure_Pa)
    coefficients = [p.t_common_K, *p.high[:6], p.high[6] + shift, *p.low[:6], p.low[6] + shift]
    made = ct.Species(own.name, own.composition, own.charge, own.size)
    made.thermo = ct.NasaPoly2(p.t_low_K, p.t_high_K, pressure_Pa, coefficients)
    return made


def _burn(ct: Any, phase: Any, mixture: Mixture, path: str) -> float:
    try:
        phase.TP = mixture.temperature_K, mixture.pressure_Pa
        if mixture.moles:
            phase.TPX = mixture.temperature_K, mixture.pressure_Pa, dict(mixture.moles)
        else:
            phase.set_equivalence_ratio(mixture.phi, dict(mixture.fuel), dict(mixture.oxidizer))
            phase.TP = mixture.temperature_K, mixture.pressure_Pa
        phase.equilibrate("HP")
        return float(phase.T)
    except ct.CanteraError as error:
        raise _refused(f"Cantera finds no equilibrium of {mixture}: {_sentence(error)}", path) from error


def _sentence(error: Exception) -> str:
    lines = [line.strip(" *") for line in str(error).splitlines()]
    return " ".join(line for line in lines if line)[:300]


def _beyond(temperature_K: float, replaced: list[Thermo], side: ThermoSet) -> list[Finding]:
    outside = [t.name for t in replaced if t.polynomial is not None and t.polynomial.t_high_K < temperature_K]
    if not outside:
        return []
    found = f"the flame, {temperature_K:.0f} K, is hotter than the range of {', '.join(outside[:8])} goes"
    return [warn("no-flame", found, where=side.path, action="Cantera extrapolates these entries.")]
