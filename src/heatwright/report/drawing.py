"""What a figure is made of: lines, dots and words in canvas units, before it becomes SVG, PNG or PDF.

The origin is the upper left corner, y grows downwards.  A *role* says what a mark is for; :mod:`palette` knows how it
looks.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

Point = tuple[float, float]
Anchor = Literal["start", "middle", "end"]


@dataclass(frozen=True, slots=True)
class Path:
    """One line through points, or several; closed ones are filled."""

    lines: tuple[tuple[Point, ...], ...]
    role: str
    closed: bool = False


@dataclass(frozen=True, slots=True)
class Dots:
    """Dots at points; the role says how large."""

    points: tuple[Point, ...]
    role: str


@dataclass(frozen=True, slots=True)
class Ball:
    """A disc with a thin outline; *fill* is the role of its inside."""

    at: Point
    radius: float
    fill: str


@dataclass(frozen=True, slots=True)
class Words:
    """One line of text; its baseline starts, ends or is centred at a point."""

    at: Point
    text: str
    role: str = "label"
    anchor: Anchor = "start"


Mark = Path | Dots | Ball | Words


@dataclass(frozen=True, slots=True)
class Drawing:
    """Marks on a canvas, those behind first."""

    width: float
    height: float
    marks: tuple[Mark, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Figure:
    """A drawing with all that goes with it.

    key : for file names and anchors, ``cp``.   heading : a few words beside others of the same species.
    title : the same alone.   description : what there is to see, in sentences, for those who do not see it.
    caption : for a paper, with conventions.   source : where the numbers are from.
    columns, rows : the same numbers as a table.   telling : which of the rows say most, for a page of very many
    species; None for all of them.
    """

    key: str
    heading: str
    title: str
    description: str
    caption: str
    source: str
    drawing: Drawing
    columns: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    telling: tuple[int, ...] | None = None


def line(points: Sequence[Point], role: str) -> Path:
    """One open line."""
    return Path((tuple(points),), role)


def segments(pairs: Sequence[tuple[Point, Point]], role: str) -> Path:
    """Straight lines between pairs of points, all of one role."""
    return Path(tuple(pairs), role)


def area(points: Sequence[Point], role: str) -> Path:
    """A filled outline."""
    return Path((tuple(points),), role, closed=True)
