"""Drawings as SVG text, rounded to a tenth: inside a page, or as a file of its own."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from html import escape
from math import hypot
from typing import Final

from heatwright.report.drawing import Ball, Dots, Figure, Mark, Path, Point, Words
from heatwright.report.palette import figure_css, variables

_ANCHOR: Final = {"start": "", "middle": " m", "end": " e"}
NEAR: Final = 0.15
"""How far a point may lie from the line that leaves it out, in canvas units."""


def inline_svg(figure: Figure, prefix: str) -> str:
    """The figure as an element of a page that holds the rules of :func:`palette.figure_css`.

    prefix : of its ids, unique in the page.
    """
    d, title, words = figure.drawing, f"{prefix}-t", f"{prefix}-d"
    return (
        f'<svg class="fig" role="img" viewBox="0 0 {_n(d.width)} {_n(d.height)}" aria-labelledby="{title} {words}">'
        f'<title id="{title}">{escape(figure.title)}</title><desc id="{words}">{escape(figure.description)}</desc>'
        f"{marks_svg(d.marks)}</svg>"
    )


def standalone_svg(figure: Figure) -> str:
    """The figure as a file: its own rules, light ground, dark where the reader's scheme is dark."""
    d = figure.drawing
    style = (
        f"svg{{{variables(False)}}}"
        f"@media (prefers-color-scheme:dark){{svg{{{variables(True)}}}}}\n{figure_css()}\n.back{{fill:var(--ground)}}"
    )
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" class="fig" role="img" aria-labelledby="t d" '
        f'width="{_n(d.width)}" height="{_n(d.height)}" viewBox="0 0 {_n(d.width)} {_n(d.height)}">\n'
        f'<title id="t">{escape(figure.title)}</title>\n<desc id="d">{escape(figure.description)}</desc>\n'
        f"<style>{escape(style, quote=False)}</style>\n"
        f'<rect class="back" width="{_n(d.width)}" height="{_n(d.height)}"/>\n{marks_svg(d.marks)}\n</svg>\n'
    )


def marks_svg(marks: Iterable[Mark]) -> str:
    """The marks one after another."""
    return "".join(_mark(m) for m in marks)


def _mark(mark: Mark) -> str:
    if isinstance(mark, Path):
        d = "".join(_line(points, mark.closed) for points in mark.lines)
        return f'<path class="{mark.role}" d="{d}"/>'
    if isinstance(mark, Dots):
        d = "".join(f"M{_n(x)} {_n(y)}h0" for x, y in mark.points)
        return f'<path class="{mark.role}" d="{d}"/>'
    if isinstance(mark, Ball):
        (x, y), r = mark.at, mark.radius
        return f'<circle class="{mark.fill}" cx="{_n(x)}" cy="{_n(y)}" r="{_n(r)}"/>'
    return _words(mark)


def _words(mark: Words) -> str:
    x, y = mark.at
    return f'<text class="{mark.role}{_ANCHOR[mark.anchor]}" x="{_n(x)}" y="{_n(y)}">{escape(mark.text)}</text>'


def _line(points: Sequence[Point], closed: bool) -> str:
    """A path through the points in steps of whole tenths, so that rounding does not add up."""
    tenths = [(round(10 * x), round(10 * y)) for x, y in simplified(points)]
    (x, y), *rest = tenths
    out = [f"M{_t(x)} {_t(y)}l" if rest else f"M{_t(x)} {_t(y)}"]
    for i, (a, b) in enumerate(rest):
        dx, dy = _t(a - x), _t(b - y)
        out.append(f"{'' if i == 0 or dx.startswith('-') else ' '}{dx}{'' if dy.startswith('-') else ' '}{dy}")
        x, y = a, b
    return "".join(out) + ("z" if closed else "")


def simplified(points: Sequence[Point], near: float = NEAR) -> list[Point]:
    """Those points without which the line would move by more than *near* (Ramer 1972, Douglas and Peucker 1973).

    >>> simplified([(0.0, 0.0), (1.0, 0.05), (2.0, 0.0), (3.0, 5.0)])
    [(0.0, 0.0), (2.0, 0.0), (3.0, 5.0)]
    """
    keep = [False] * len(points)
    keep[0] = keep[-1] = True
    spans = [(0, len(points) - 1)]
    while spans:
        first, last = spans.pop()
        (x0, y0), (x1, y1) = points[first], points[last]
        length = hypot(x1 - x0, y1 - y0)
        far, worst = near, 0
        for i in range(first + 1, last):
            x, y = points[i]
            away = hypot(x - x0, y - y0)
            off = abs((x1 - x0) * (y0 - y) - (x0 - x) * (y1 - y0)) / length if length > near else away
            if off > far:
                far, worst = off, i
        if worst:
            keep[worst] = True
            spans += [(first, worst), (worst, last)]
    return [p for p, kept in zip(points, keep, strict=True) if kept]


def _n(value: float) -> str:
    """A number with at most one decimal."""
    return _t(round(10 * value))


def _t(tenths: int) -> str:
    """A number of tenths as text, without a needless zero.

    >>> _t(125), _t(-5), _t(30)
    ('12.5', '-.5', '3')
    """
    whole, part = divmod(abs(tenths), 10)
    sign = "-" if tenths < 0 else ""
    if not part:
        return f"{sign}{whole}"
    return f"{sign}{whole or ''}.{part}"
