"""The input uncertainties of a model: what may be stated, the defaults, and where each is from."""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite
from typing import TYPE_CHECKING, Final, Literal

from heatwright.errors import UsageError
from heatwright.scales import all_factors, published_factors

if TYPE_CHECKING:
    from heatwright.molecule import Level

LOW_MODES: Final = 0.2
"""Default relative standard uncertainty of a low mode."""
CUTOFF_CM1: Final = 400.0
"""Default wavenumber below which a mode counts as low, 1/cm: torsions, inversions, ring puckering, skeletal bends."""
BARRIER: Final = 0.1
"""Default relative standard uncertainty of a torsional barrier."""
CONFORMERS_KJ_MOL: Final = 1.0
"""Default standard uncertainty of a conformer's relative energy, kJ/mol."""
_LOW_SOURCE: Final = (
    "assumed: harmonic torsions of ethane, methanol and dimethyl ether miss S(298.15 K) of published tables by 1.1 to "
    "2.0 J/mol/K each, as 13 to 24 % of the wavenumber would"
)
_BARRIER_SOURCE: Final = "assumed, no published source"
_CONFORMERS_SOURCE: Final = (
    "assumed: gauche n-butane is measured 2.8 +/- 0.4 kJ/mol above trans (W. A. Herrebout et al. 1995, from memory), "
    "and comes out at 3.8 at B3LYP/6-31G*"
)


@dataclass(frozen=True, slots=True)
class InputUncertainties:
    """Standard uncertainties as the user states them; None means the default, 0 leaves an input out.

    scale : relative, of the scale factor on all wavenumbers.   low : relative, of each mode below ``cutoff_cm1``.
    barrier : relative, of each torsional barrier (the potential keeps its shape and symmetry).
    conformers_kJ_mol : of each conformer's energy relative to the lowest.
    """

    scale: float | None = None
    low: float | None = None
    cutoff_cm1: float = CUTOFF_CM1
    conformers_kJ_mol: float | None = None
    barrier: float | None = None

    def __post_init__(self) -> None:
        for name in ("scale", "low", "cutoff_cm1", "conformers_kJ_mol", "barrier"):
            value = getattr(self, name)
            if value is not None and not (isfinite(value) and value >= 0.0):
                raise UsageError(f"the uncertainty {name.split('_')[0]} must be a number of at least 0, not {value}")
        for name in ("scale", "low", "barrier"):
            value = getattr(self, name)
            if value is not None and value > 1.0:
                raise UsageError(f"the uncertainty {name} is relative, so {value:g} would be {value:.0%}; at most 1")


@dataclass(frozen=True, slots=True)
class StatedInput:
    """One input uncertainty in use: key as stated, words, standard uncertainty, its unit and where it is from."""

    key: Literal["scale", "low", "barrier", "conformers"]
    what: str
    value: float
    unit: Literal["relative", "kJ/mol"]
    source: str

    @property
    def text(self) -> str:
        """In words, without the source."""
        size = f"{self.value:.2g} kJ/mol" if self.unit == "kJ/mol" else f"{self.value * 100.0:.2g} %"
        return f"{self.what} +/- {size}"


_FIELDS: Final = {
    "scale": "scale",
    "low": "low",
    "cutoff": "cutoff_cm1",
    "barrier": "barrier",
    "conformers": "conformers_kJ_mol",
}


def parse_uncertainties(text: str) -> InputUncertainties:
    """``default``, or values in the place of defaults, such as ``scale=0.02,low=0.2,cutoff=300,conformers=1``.

    Raises UsageError naming the part that cannot be read.

    >>> parse_uncertainties("scale=0.02,low=0")
    InputUncertainties(scale=0.02, low=0.0, cutoff_cm1=400.0, conformers_kJ_mol=None, barrier=None)
    """
    values: dict[str, float] = {}
    for part in [] if text.strip() == "default" else text.split(","):
        key, _, number = (word.strip() for word in part.partition("="))
        if key not in _FIELDS or _FIELDS[key] in values:
            raise UsageError(
                f"--uncertainty {text!r}: {part.strip()!r} is not KEY=VALUE with one of {', '.join(_FIELDS)}, each once"
            )
        try:
            values[_FIELDS[key]] = float(number)
        except ValueError:
            raise UsageError(f"--uncertainty {text!r}: {number!r} is not a number") from None
    return InputUncertainties(**values)


def stated_inputs(
    stated: InputUncertainties, level: Level | None, *, n_conformers: int = 1, torsions: bool = False
) -> tuple[StatedInput, ...]:
    """The inputs in use, each stated or by default; barriers and relative energies only where there are such."""
    scale, source = (stated.scale, "given") if stated.scale is not None else default_scale(level)
    low = (LOW_MODES, _LOW_SOURCE) if stated.low is None else (stated.low, "given")
    energy = stated.conformers_kJ_mol
    conformers = (CONFORMERS_KJ_MOL, _CONFORMERS_SOURCE) if energy is None else (energy, "given")
    below = f"each mode below {stated.cutoff_cm1:g} 1/cm"
    found = [
        StatedInput("scale", "scale of all wavenumbers", scale, "relative", source),
        StatedInput("low", below, low[0], "relative", low[1]),
    ]
    if torsions:
        barrier = (BARRIER, _BARRIER_SOURCE) if stated.barrier is None else (stated.barrier, "given")
        found.append(StatedInput("barrier", "each torsional barrier", barrier[0], "relative", barrier[1]))
    if n_conformers > 1:
        found.append(
            StatedInput("conformers", "relative energy of each conformer", conformers[0], "kJ/mol", conformers[1])
        )
    return tuple(found)


def default_scale(level: Level | None) -> tuple[float, str]:
    """Relative standard uncertainty of the factor for fundamentals at a level, and its source.

    Where none is published for the level, the one that is published for another level stands in, and it is said.

    >>> from heatwright.molecule import Level
    >>> value, source = default_scale(Level("HF", "6-31G*"))
    >>> round(value, 4), source[:14]
    (0.0256, 'Irikura, Johns')
    """
    rows = () if level is None else published_factors(level)
    own = [row for row in rows if row.uncertainty is not None and row.fundamental is not None]
    row = next(r for r in (*own, *all_factors()) if r.uncertainty is not None and r.fundamental is not None)
    assert row.uncertainty is not None
    assert row.fundamental is not None
    value = f"{row.fundamental:.4f} +/- {row.uncertainty:.4f} for {row.label}"
    stand_in = "" if own else "; none is tabulated for this level, so it stands in"
    return row.uncertainty / row.fundamental, f"{row.source}, {value}{stand_in}"
