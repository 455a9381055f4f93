"""A torsional potential with its levels and the points of the scan."""

from __future__ import annotations

from typing import Final

import numpy as np

from heatwright.constants import CM1_KJ_MOL, SECOND_RADIATION_CM_K, STANDARD_TEMPERATURE_K
from heatwright.partition.potential import Potential
from heatwright.report.curves import LEFT, WIDTH
from heatwright.report.drawing import Dots, Drawing, Figure, Mark, Point, Words, line, segments
from heatwright.report.layout import Frame, Room, Scale, curve, frame, nice_ticks
from heatwright.report.species import Species, Torsion

_RIGHT: Final = 404.0
_MOST_LEVELS: Final = 60
_POINTS: Final = 121


def torsional_potential(species: Species, index: int) -> Figure:
    """V(φ) of the *index*-th torsion."""
    t = species.torsions[index]
    potential = Potential(t.constant_cm1, t.cosine_cm1, t.sine_cm1)
    phi = np.linspace(-180.0, 180.0, _POINTS)
    lowest = potential.minimum[1]
    V = potential(np.radians(phi)) - lowest
    kT = STANDARD_TEMPERATURE_K / SECOND_RADIATION_CM_K
    top = 1.14 * max(t.barrier_cm1, 1.15 * kT, *t.scan_cm1, 1.0)
    x, y = Scale(-180.0, 180.0, LEFT + 4.0, _RIGHT), Scale(0.0, top, 238.0, 26.0)
    plot = frame(x, y, list(range(-180, 181, 60)), nice_ticks(0.0, top), x_name="dihedral angle / °", y_name="V / cm⁻¹")
    well = curve(x, y, phi.tolist(), V.tolist())
    ground = t.ground_cm1
    levels = [ground + e for e in t.levels_cm1 if ground + e < top][:_MOST_LEVELS]
    marks = [*plot.marks, *_marks(t, plot, well, levels, kT, lowest)]
    name = "-".join(str(a) for a in t.atoms)
    return Figure(
        key=f"torsion-{index + 1}",
        heading=f"Torsion {name}",
        title=f"Torsion {name} of {species.name}",
        description=f"The potential has a barrier of {t.barrier_cm1:.0f} cm⁻¹ ({t.barrier_cm1 * CM1_KJ_MOL:.2f} "
        f"kJ/mol), {t.symmetry} equivalent orientations in a turn and {len(potential.minima)} minima; "
        f"{_levels_text(levels)}.",
        caption=f"Potential of the torsion {name} of {species.name} ({t.source}): barrier {t.barrier_cm1:.0f} cm⁻¹, "
        f"F = {t.F_cm1:.3g} cm⁻¹, symmetry {t.symmetry}{_overlap(t)}; {_legend(t, levels)}.",
        source=t.source or species.source,
        drawing=Drawing(WIDTH, 274.0, tuple(marks)),
        columns=("angle / °", "V / cm⁻¹", *(("level", "energy / cm⁻¹") if levels else ())),
        rows=_rows(phi, V, levels),
        telling=tuple(range(0, 24, 4)),
    )


def _overlap(t: Torsion) -> str:
    return "" if t.overlap is None else f", overlap with the low modes {t.overlap:.2f}"


def _levels_text(levels: list[float]) -> str:
    """What the description says of the levels; the form of Pitzer and Gwinn has none."""
    if not levels:
        return "it is drawn without levels"
    return f"{len(levels)} level{'s are' if len(levels) > 1 else ' is'} drawn, the lowest at {levels[0]:.0f} cm⁻¹"


def _legend(t: Torsion, levels: list[float]) -> str:
    """What is drawn beside the potential."""
    drawn = ["horizontal lines: levels"] if levels else []
    drawn += [] if t.levels_cm1 else ["treated in the form of Pitzer and Gwinn, without levels"]
    drawn += ["dots: scan"] if t.scan_deg else []
    return "; ".join([*drawn, "arrow: geometry of the frequencies"])


def _rows(phi: np.ndarray, V: np.ndarray, levels: list[float]) -> tuple[tuple[str, ...], ...]:
    """Every 15° with its potential, and beside it the levels."""
    angles = [(f"{a:.0f}".replace("-", "−"), f"{v:.1f}") for a, v in zip(phi.tolist(), V.tolist(), strict=True)]
    left = [row for row, a in zip(angles, phi.tolist(), strict=True) if abs(a / 15.0 - round(a / 15.0)) < 0.01]
    right = [(str(i), f"{e:.1f}") for i, e in enumerate(levels)]
    if not right:
        return tuple(left)
    n = max(len(left), len(right))
    blank = [("", "")]
    return tuple(
        (*a, *b) for a, b in zip(left + blank * (n - len(left)), right + blank * (n - len(right)), strict=True)
    )


def _marks(t: Torsion, plot: Frame, curve: list[Point], levels: list[float], kT: float, lowest: float) -> list[Mark]:
    x, y, (left, top, right, bottom) = plot.x, plot.y, plot.box
    points = np.array(curve)
    apart = {round(10.0 * y(e)): e for e in levels}.values()  # levels split by less than the eye sees are one line
    between = [s for e in apart for s in _inside(e, points, y)]
    marks: list[Mark] = [segments(between, "level")] if levels else []
    marks += [segments([((left, y(kT)), (right, y(kT)))], "hair"), line(curve, "polynomial")]
    room = Room((left + 2.0, top - 14.0, right, bottom - 2.0))
    room.curve(curve)
    room.boxes += [(a, height, b, height) for (a, height), (b, _) in between]
    if t.scan_deg:
        turned = [((a + 180.0) % 360.0 - 180.0, v - lowest) for a, v in zip(t.scan_deg, t.scan_cm1, strict=True)]
        dots = tuple((x(a), y(v)) for a, v in turned if v <= y.high)
        marks += [Dots(dots, "ring"), Dots(dots, "hole")]
        room.points += dots
    at = x((t.angle_deg + 180.0) % 360.0 - 180.0)
    point = (at, bottom + 0.5)
    marks.append(segments([((at - 3.5, bottom + 5.0), point), (point, (at + 3.5, bottom + 5.0))], "bar"))
    marks.append(Words((right, top - 9.0), f"barrier {t.barrier_cm1:.0f} cm⁻¹", "quiet", "end"))
    free = [((px, y(kT) - 4.0), anchor) for px in np.linspace(left + 5.0, right - 5.0, 25).tolist()
            for anchor in ("start", "end")]  # fmt: skip
    words = room.place("kT, 298 K", "quiet", free)  # type: ignore[arg-type]
    return [*marks, *([words] if words else [])]


def _inside(energy: float, curve: np.ndarray, y: Scale) -> list[tuple[Point, Point]]:
    """Where a level is above the potential, whose points are rows of *curve*: between its turning points."""
    height = y(energy)
    above = curve[:, 1] >= height
    at = np.flatnonzero(above[1:] != above[:-1])
    (x0, y0), (x1, y1) = curve[at].T, curve[at + 1].T
    ends = (x0 + (x1 - x0) * (height - y0) / (y1 - y0)).tolist()
    ends = [*([float(curve[0, 0])] if above[0] else []), *ends, *([float(curve[-1, 0])] if above[-1] else [])]
    return [((a, height), (b, height)) for a, b in zip(ends[::2], ends[1::2], strict=True)]
