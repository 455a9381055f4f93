"""Drawings as SVG text, rounded to a tenth: inside a page, or as a file of its own."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from functools import lru_cache
from html import escape
from itertools import pairwise
from math import inf
from typing import Final

from heatwright.report.drawing import Ball, Dots, Figure, Mark, Path, Point, Words
from heatwright.report.palette import LOOKS, figure_css, variables

_ANCHOR: Final = {"start": "", "middle": " m", "end": " e"}
NEAR: Final = 0.2
"""How far a point may lie from the line that leaves it out, in canvas units."""


def inline_svg(figure: Figure, prefix: str, group: str = "", *, brief: bool = False) -> str:
    """The figure as an element of a page that holds the rules of :func:`palette.figure_css`.

    prefix : of its ids, unique in the page.   group : id of the marks together, where they are to be shown elsewhere.
    brief : with few elements, see :func:`joined_ticks`; name and description are those of SVG alone (SVG-AAM 1.0).
    """
    d, title, words = figure.drawing, f"{prefix}-t", f"{prefix}-d"
    if brief:
        return (
            f'<svg class="fig" role="img" viewBox="0 0 {_n(d.width)} {_n(d.height)}">'
            f"<title>{escape(figure.title)}</title><desc>{escape(figure.description)}</desc>"
            f"{_grouped(_brief_svg(d.marks), group)}</svg>"
        )
    drawn = _grouped(marks_svg(together(d.marks)), group)
    return (
        f'<svg class="fig" role="img" viewBox="0 0 {_n(d.width)} {_n(d.height)}" aria-labelledby="{title} {words}">'
        f'<title id="{title}">{escape(figure.title)}</title><desc id="{words}">{escape(figure.description)}</desc>'
        f"{drawn}</svg>"
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


_TOGETHER: Final = frozenset(
    ("grid", "axis", "zero", "hair", "bound", "leader", "polynomial", "bar", "ring", "hole", "dot")
)
"""Roles of which a drawing has several marks whose order among others does not matter."""


def together(marks: Sequence[Mark]) -> list[Mark]:
    """The marks with those of one such role as one, where the last of them was: elements are what a page costs."""
    lines: dict[str, list[tuple[Point, ...]]] = {}
    dots: dict[str, list[Point]] = {}
    out: list[Mark] = []
    for mark in reversed(marks):
        if isinstance(mark, Path) and mark.role in _TOGETHER and not mark.closed:
            if mark.role not in lines:
                out.append(mark)
            lines.setdefault(mark.role, [])[:0] = mark.lines
        elif isinstance(mark, Dots) and mark.role in _TOGETHER:
            if mark.role not in dots:
                out.append(mark)
            dots.setdefault(mark.role, [])[:0] = mark.points
        else:
            out.append(mark)
    return [_whole(mark, lines, dots) for mark in reversed(out)]


def _whole(mark: Mark, lines: dict[str, list[tuple[Point, ...]]], dots: dict[str, list[Point]]) -> Mark:
    if isinstance(mark, Path) and mark.role in lines and not mark.closed:
        return Path(tuple(lines[mark.role]), mark.role)
    if isinstance(mark, Dots) and mark.role in dots:
        return Dots(tuple(dots[mark.role]), mark.role)
    return mark


def _grouped(marks: str, group: str) -> str:
    return f'<g id="{group}">{marks}</g>' if group else marks


def _brief_svg(marks: Sequence[Mark]) -> str:
    """Fewer elements: areas are outlined by their own class, the numbers of an axis and the letters of atoms are one.

    The letters come last: those that a nearer atom would touch are not among the marks.
    """
    words: dict[str, list[Words]] = {"tick": [], "letter": [], "small-letter": []}
    rest: list[Mark] = []
    for m in marks:
        if isinstance(m, Words) and m.role in words and (m.role == "tick" or len(m.text) == 1):
            words[m.role].append(m)
        elif not (isinstance(m, Path) and m.role.startswith("edge")):
            rest.append(m)
    letters = (_letters(words[role], role) for role in ("letter", "small-letter"))
    return marks_svg(together(rest)) + joined_ticks(words["tick"]) + "".join(letters)


def _letters(words: Sequence[Words], role: str) -> str:
    """The letters of one size, each at its place."""
    if not words:
        return ""
    x, y = (" ".join(_n(w.at[i]) for w in words) for i in (0, 1))
    return f'<text class="{role} m" x="{x}" y="{y}">{escape("".join(w.text for w in words))}</text>'


def joined_ticks(ticks: Sequence[Words]) -> str:
    """The numbers along each axis as one text, every character at its place: elements are what a long page costs.

    Numbers centred at one height are an axis of x, those that end at one place an axis of y.
    """
    axes: dict[tuple[str, float], list[Words]] = {}
    for t in ticks:
        axes.setdefault((t.anchor, t.at[1] if t.anchor == "middle" else t.at[0]), []).append(t)
    return "".join(_axis_numbers(tuple(words)) for words in axes.values())


_PITCH: Final = {"−": 0.72, ".": 0.32, "e": 0.6}
"""Widths of characters in units of the font size; figures all take 0.58, about what sans-serif faces have."""


@lru_cache(maxsize=1 << 10)
def _axis_numbers(words: tuple[Words, ...]) -> str:
    size = LOOKS["tick"].size
    x: list[str] = []
    down: list[str] = []
    height = words[0].at[1]
    for w in words:
        widths = [size * _PITCH.get(c, 0.58) for c in w.text]
        at = w.at[0] - sum(widths) / (2.0 if w.anchor == "middle" else 1.0)
        if x:  # the blank before it
            x.append(x[-1])
            down.append("0")
        for i, width in enumerate(widths):
            x.append(_n(at))
            down.append(_n(w.at[1] - height) if i == 0 else "0")
            at += width
        height = w.at[1]
    dy = f' dy="{" ".join(down)}"' if set(down) != {"0"} else ""
    text = " ".join(w.text for w in words)
    return f'<text class="tick" x="{" ".join(x)}" y="{_n(words[0].at[1])}"{dy}>{escape(text)}</text>'


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
    tenths = [(round(10 * x), round(10 * y)) for x, y in (simplified(points) if len(points) > 2 else points)]
    x, y = tenths[0]
    start = f"M{_t(x)} {_t(y)}"
    if len(tenths) == 2 and not closed:
        a, b = tenths[1]
        if b == y:
            return f"{start}h{_t(a - x)}"
        if a == x:
            return f"{start}v{_t(b - y)}"
    steps = "".join(_step(b[0] - a[0], b[1] - a[1]) for a, b in pairwise(tenths)).removeprefix(" ")
    return f"{start}{'l' if steps else ''}{steps}{'z' if closed else ''}"


@lru_cache(maxsize=1 << 16)
def _step(dx: int, dy: int) -> str:
    """One step in tenths, with blanks where a number does not begin with a sign.

    >>> _step(15, -20), _step(-3, 4)
    (' 1.5-2', '-.3 .4')
    """
    x, y = _t(dx), _t(dy)
    return f"{'' if dx < 0 else ' '}{x}{'' if dy < 0 else ' '}{y}"


def simplified(points: Sequence[Point], near: float = NEAR) -> Sequence[Point]:
    """Those points between which no other leaves the straight line by more than *near*, up or down.

    From each point that is kept the slopes that pass all points so far stay in a narrowing wedge (after J. Sklansky and
    V. Gonzalez, Pattern Recognition 12, 327 (1980), from memory); a line that turns back in x is kept at its turn.

    >>> simplified([(0.0, 0.0), (1.0, 0.05), (2.0, 0.0), (3.0, 5.0)])
    [(0.0, 0.0), (2.0, 0.0), (3.0, 5.0)]
    """
    if len(points) < 3:
        return points
    kept = [points[0]]
    (x0, y0), last = points[0], points[0]
    low, high = -inf, inf
    for x, y in points[1:]:
        dx, before = x - x0, last[0] - x0
        ahead = dx >= before >= 0.0 < dx or dx <= before <= 0.0 > dx
        slope = (y - y0) / dx if ahead else 0.0
        if last is not kept[-1] and not (ahead and low <= slope <= high):
            kept.append(last)
            (x0, y0), low, high = last, -inf, inf
            dx = x - x0
            slope = (y - y0) / dx if dx else 0.0
        if dx:
            room = near / abs(dx)
            if slope - room > low:
                low = slope - room
            if slope + room < high:
                high = slope + room
        else:
            low, high = inf, -inf
        last = (x, y)
    return [*kept, last]


def _n(value: float) -> str:
    """A number with at most one decimal."""
    return _t(round(10 * value))


@lru_cache(maxsize=1 << 15)
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
