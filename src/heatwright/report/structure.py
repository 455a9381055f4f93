"""A molecule as balls and sticks, seen from where its atoms hide each other least."""

from __future__ import annotations

from functools import lru_cache
from math import hypot
from typing import Final

import numpy as np

from heatwright.molecule import FloatArray
from heatwright.report.curves import WIDTH
from heatwright.report.drawing import Ball, Drawing, Figure, Mark, Point, Words, segments
from heatwright.report.palette import ball_role
from heatwright.report.species import Geometry, Species

HEIGHT: Final = 250.0
_MARGIN: Final = 14.0
_MOST_PER_A: Final = 64.0
_VIEWS: Final = 240
_NEAR_A: Final = 0.75
"""Two atoms are meant to be at least so far apart in the picture."""
MOST_ATOMS: Final = 200
"""More atoms than these are no picture any more, and no structure of a gas."""
FORESHORTENED: Final = 0.35
"""Weight of the mean square depth of bonds against that of crowded atoms."""
_RADIUS_A: Final = {"H": 0.25, "D": 0.25, "T": 0.25}


def structure(species: Species) -> Figure | None:
    """The geometry projected; None when there is none."""
    g = species.geometry
    if g is None or len(g.elements) > MOST_ATOMS:
        return None
    seen = _turned(g)
    turning = {frozenset((t.atoms[1] - 1, t.atoms[2] - 1)) for t in species.torsions}
    x = np.array(g.coordinates_A)
    unknown = any(order is None for *_, order in g.bonds)
    kinds = f", {species.point_group}" if species.point_group else ""
    turn = "; bonds in colour are treated as torsions" if turning else ""
    return Figure(
        key="structure",
        heading="Structure",
        title=f"Structure of {species.name}",
        description=f"{len(g.elements)} atoms and {len(g.bonds)} bonds{kinds}.",
        caption=f"Geometry of {species.name}{kinds}, projected"
        f"{'; orders of bonds not known' if unknown else ''}{turn}.",
        source=species.source,
        drawing=_drawing(g, seen, turning),
        columns=("atom", "x / Å", "y / Å", "z / Å", "bonds"),
        rows=tuple(
            (f"{e}{i + 1}", *(f"{c:.4f}".replace("-", "−") for c in x[i].tolist()), _bonds_of(g, x, i))
            for i, e in enumerate(g.elements)
        ),
    )


def _bonds_of(g: Geometry, x: FloatArray, i: int) -> str:
    """The bonds of one atom with their lengths, each bond once."""
    return ", ".join(
        f"{g.elements[b]}{b + 1} {float(np.linalg.norm(x[a] - x[b])):.3f} Å" for a, b, _ in g.bonds if a == i
    )


def _radius_A(element: str) -> float:
    return _RADIUS_A.get(element, 0.36)


@lru_cache(maxsize=1)
def _directions() -> tuple[FloatArray, FloatArray, FloatArray]:
    """Points spread evenly over half a sphere, and two directions across each, (n, 3) each."""
    i = np.arange(_VIEWS)
    z = 1.0 - (i + 0.5) / _VIEWS
    angle = np.pi * (1.0 + 5.0**0.5) * i
    r = np.sqrt(1.0 - z * z)
    points: FloatArray = np.array([r * np.cos(angle), r * np.sin(angle), z]).T
    return points, *_across(points)


def _turned(g: Geometry) -> FloatArray:
    """Coordinates seen from the best direction, (n, 3): right, up, towards the eye; the widest extent is horizontal.

    Best is where atoms come least near to each other in the picture and bonds are least foreshortened.  The choice is
    made among fixed directions and rounded, so that a last digit of the coordinates does not turn the picture.
    """
    x: FloatArray = np.array(g.coordinates_A)
    x = x - x.mean(axis=0)
    if len(x) == 1:
        return x
    d, first, second = _directions()
    flat = np.stack([x @ first.T, x @ second.T], axis=-1)  # (atoms, views, 2)
    i, j = np.triu_indices(len(x), 1)
    apart = np.linalg.norm(flat[i] - flat[j], axis=-1)
    crowded = np.square(np.clip(_NEAR_A - apart, 0.0, None)).sum(axis=0)
    ends = np.array([(a, b) for a, b, _ in g.bonds] or [(0, 1)])
    short = np.square((x[ends[:, 0]] - x[ends[:, 1]]) @ d.T).mean(axis=0)
    best = int(np.argmin(np.round(crowded + FORESHORTENED * short, 3)))
    plane = flat[:, best]
    turns = np.radians(np.arange(0.0, 180.0, 5.0))
    heights = np.ptp(plane @ np.array([-np.sin(turns), np.cos(turns)]), axis=0)
    t = float(turns[int(np.argmin(np.round(heights, 2)))])
    right, up = plane @ np.array([np.cos(t), np.sin(t)]), plane @ np.array([-np.sin(t), np.cos(t)])
    seen: FloatArray = np.stack([right, up, x @ d[best]], axis=1)
    return seen


def _across(d: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Two directions across each of *d*, right-handed with it."""
    helper = np.where(np.abs(d[:, 2:]) < 0.9, np.array([[0.0, 0.0, 1.0]]), np.array([[1.0, 0.0, 0.0]]))
    first = np.cross(helper, d)
    first /= np.linalg.norm(first, axis=1, keepdims=True)
    return first, np.cross(d, first)


def _drawing(g: Geometry, seen: FloatArray, turning: set[frozenset[int]]) -> Drawing:
    radii = np.array([_radius_A(e) for e in g.elements])
    low, high = (seen[:, :2] - radii[:, None]).min(axis=0), (seen[:, :2] + radii[:, None]).max(axis=0)
    size = np.array([WIDTH - 2 * _MARGIN, HEIGHT - 2 * _MARGIN])
    scale = min(_MOST_PER_A, float((size / (high - low)).min()))
    middle = (low + high) / 2.0
    depth = max(float(np.ptp(seen[:, 2])), 2.0)
    at = [(WIDTH / 2 + scale * (p[0] - middle[0]), HEIGHT / 2 - scale * (p[1] - middle[1])) for p in seen.tolist()]
    near = [0.92 + 0.16 * (z - float(seen[:, 2].min())) / depth for z in seen[:, 2].tolist()]
    layers: list[tuple[float, int, list[Mark]]] = []
    for k, (a, b, order) in enumerate(g.bonds):
        role = "turn" if frozenset((a, b)) in turning else ""
        z = (seen[a, 2] + seen[b, 2]) / 2.0 - 0.01
        ends = _visible(at[a], at[b], seen[a, 2] <= seen[b, 2], scale * radii[a if seen[a, 2] <= seen[b, 2] else b])
        layers.append((round(float(z), 3), k, _bond(*ends, order, role)))
    hidden = _hidden(at, seen, scale * radii)
    for i, element in enumerate(g.elements):
        radius = float(scale * radii[i]) * near[i]
        layers.append((round(float(seen[i, 2]), 3), len(g.bonds) + i, _atom(element, at[i], radius, i in hidden)))
    marks = [m for *_, marks in sorted(layers, key=lambda layer: layer[:2]) for m in marks]
    return Drawing(WIDTH, HEIGHT, tuple(marks))


def _visible(a: Point, b: Point, first_is_far: bool, radius: float) -> tuple[Point, Point]:
    """The ends of a bond that is drawn over its farther atom: it ends at that atom's edge."""
    far, near = (a, b) if first_is_far else (b, a)
    length = max(hypot(near[0] - far[0], near[1] - far[1]), 1e-9)
    share = min(0.9 * radius / length, 1.0)
    start = (far[0] + share * (near[0] - far[0]), far[1] + share * (near[1] - far[1]))
    return (start, near) if first_is_far else (near, start)


def _hidden(at: list[Point], seen: FloatArray, radii: FloatArray) -> set[int]:
    """Atoms whose letter a nearer one would touch."""
    x, z = np.array(at), seen[:, 2]
    apart = np.linalg.norm(x[:, None] - x[None, :], axis=2)
    covered = (apart < radii[None, :] + 5.5) & (z[None, :] >= z[:, None])
    np.fill_diagonal(covered, False)
    covered &= (z[None, :] > z[:, None]) | np.tril(np.ones_like(covered), -1)
    return {int(i) for i in np.flatnonzero(covered.any(axis=1))}


def _atom(element: str, at: Point, radius: float, hidden: bool) -> list[Mark]:
    marks: list[Mark] = [Ball(at, radius, ball_role(element))]
    role, half = ("letter", 4.7) if radius >= 12.0 else ("small-letter", 3.4)
    if not hidden and radius >= 6.5 and (len(element) == 1 or radius >= 10.0):
        marks.append(Words((at[0], at[1] + half), element, role, "middle"))
    return marks


def _bond(a: Point, b: Point, order: float | None, role: str) -> list[Mark]:
    """One stick, or several beside each other; the second of a delocalised bond is dashed."""
    if order is None or order == 1.0:
        return [segments([(a, b)], role or "bond")]
    dx, dy = b[0] - a[0], b[1] - a[1]
    length = max((dx * dx + dy * dy) ** 0.5, 1e-9)
    nx, ny = -dy / length, dx / length

    def beside(off: float) -> tuple[Point, Point]:
        return (a[0] + off * nx, a[1] + off * ny), (b[0] + off * nx, b[1] + off * ny)

    if order == 1.5:
        return [segments([beside(-2.6)], role or "bonds"), segments([beside(2.6)], "half")]
    offsets = (-4.4, 0.0, 4.4) if order >= 3.0 else (-2.6, 2.6)
    return [segments([beside(off) for off in offsets], role or "bonds")]
