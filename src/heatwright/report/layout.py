"""From numbers to places on a canvas: scales, ticks, frames, and words that keep out of each other's way."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from itertools import pairwise
from math import ceil, floor, log10

from heatwright.report.drawing import Anchor, Mark, Path, Point, Words, line, segments
from heatwright.report.palette import LOOKS

CHARACTER = 0.64
"""Mean width of a character in units of the font size, that of a wide sans-serif face."""
ASCENT, DESCENT = 0.8, 0.25
Box = tuple[float, float, float, float]


@dataclass(frozen=True, slots=True)
class Scale:
    """Maps low…high to start…end, linearly or by the logarithm."""

    low: float
    high: float
    start: float
    end: float
    log: bool = False

    def __call__(self, value: float) -> float:
        """The place of a value.

        >>> Scale(100.0, 10000.0, 0.0, 300.0, log=True)(1000.0)
        150.0
        """
        return self.places((value,))[0]

    def places(self, values: Sequence[float]) -> list[float]:
        """The places of several values."""
        start, low, high = self.start, self.low, self.high
        if self.log:
            low, per_unit = log10(low), (self.end - start) / (log10(high) - log10(low))
            return [start + per_unit * (log10(v) - low) for v in values]
        per_unit = (self.end - start) / (high - low)
        return [start + per_unit * (v - low) for v in values]


def curve(x: Scale, y: Scale, across: Sequence[float], up: Sequence[float]) -> list[Point]:
    """The points of a curve."""
    return list(zip(x.places(across), y.places(up), strict=True))


def nice_ticks(low: float, high: float, about: int = 5) -> list[float]:
    """Round numbers from *low* to *high*, in steps of 1, 2 or 5 times a power of ten.

    >>> nice_ticks(3.9, 9.2, 4)
    [4.0, 6.0, 8.0]
    """
    rough = (high - low) / max(about, 1)
    power = 10.0 ** floor(log10(rough))
    step = next(m * power for m in (1.0, 2.0, 5.0, 10.0) if m * power >= rough * (1 - 1e-9))
    first, last = ceil(low / step - 1e-9), floor(high / step + 1e-9)
    return [_clean(i * step) for i in range(first, last + 1)]


def _clean(value: float) -> float:
    return float(f"{value:.10g}") + 0.0


def round_below(value: float) -> float:
    """The largest of 1, 2 or 5 times a power of ten that is not above a positive *value*.

    >>> round_below(0.0708), round_below(1.0)
    (0.05, 1.0)
    """
    power = 10.0 ** floor(log10(value) + 1e-12)
    return _clean(max(m * power for m in (1.0, 2.0, 5.0) if m * power <= value * (1.0 + 1e-9)))


def temperature_ticks(low: float, high: float) -> list[float]:
    """Temperatures to be named on a logarithmic axis, at most seven.

    >>> temperature_ticks(200.0, 6000.0)
    [200.0, 500.0, 1000.0, 2000.0, 5000.0]
    """
    powers = range(floor(log10(low)), ceil(log10(high)) + 1)
    ticks = [m * 10.0**p for p in powers for m in (1.0, 2.0, 5.0) if low * 0.999 <= m * 10.0**p <= high * 1.001]
    return ticks if len(ticks) >= 3 else nice_ticks(low, high, 4)


TELLING_K = (200.0, 298.15, 400.0, 500.0, 800.0, 1000.0, 1500.0, 2000.0, 3000.0, 4000.0, 5000.0, 6000.0)
"""Temperatures that a short table shows, K."""


def telling_rows(T: Sequence[float]) -> list[int]:
    """Which rows of a table to show where all would be many: those at :data:`TELLING_K`, and both ends.

    >>> telling_rows([200.0, 250.0, 298.15, 300.0, 400.0, 450.0])
    [0, 2, 4, 5]
    """
    last = len(T) - 1
    return [i for i, t in enumerate(T) if i in (0, last) or any(abs(t - usual) < 0.005 for usual in TELLING_K)]


FEW_K = (298.15, 1000.0)
"""Temperatures that stay where even a short table is too long."""


def fewest_rows(T: Sequence[float]) -> tuple[int, ...]:
    """Places of :data:`FEW_K` and of the last; of the first as well where 298.15 K is not there.

    >>> fewest_rows([200.0, 298.15, 500.0, 1000.0, 2000.0]), fewest_rows([300.0, 1000.0, 5000.0])
    ((1, 3, 4), (0, 1, 2))
    """
    found = [i for i, t in enumerate(T) if any(abs(t - few) < 0.005 for few in FEW_K)]
    ends = [len(T) - 1] if any(abs(T[i] - FEW_K[0]) < 0.005 for i in found) else [0, len(T) - 1]
    return tuple(sorted({*found, *ends}))


def padded(low: float, high: float, share: float = 0.08, least: float = 1e-9) -> tuple[float, float]:
    """An interval with room at both ends; at least *least* wide."""
    room = max(share * (high - low), (least - (high - low)) / 2.0, 0.0)
    return low - room, high + room


def number(value: float) -> str:
    """A tick's number with a true minus sign.

    >>> number(-0.05), number(2000.0), number(1e-05)
    ('−0.05', '2000', '1e−5')
    """
    text = f"{_clean(value):.6g}"
    mantissa, e, power = text.partition("e")
    return (f"{mantissa}e{int(power)}" if e else text).replace("-", "−")


def size_of(role: str) -> float:
    """Font size of a role of words."""
    return LOOKS[role].size


def box_of(words: Words) -> Box:
    """The place that words take, estimated: left, top, right, bottom."""
    size = size_of(words.role)
    width = CHARACTER * size * len(words.text)
    x, y = words.at
    left = x - {"start": 0.0, "middle": width / 2.0, "end": width}[words.anchor]
    return left, y - ASCENT * size, left + width, y + DESCENT * size


def meets(a: Box, b: Box, apart: float = 1.5) -> bool:
    """Whether two boxes overlap or are nearer than *apart*."""
    return a[0] < b[2] + apart and b[0] < a[2] + apart and a[1] < b[3] + apart and b[1] < a[3] + apart


@dataclass(slots=True)
class Room:
    """What is taken already on a canvas, and the frame that words have to stay in."""

    frame: Box
    boxes: list[Box] = field(default_factory=list)
    points: list[Point] = field(default_factory=list)

    def curve(self, points: Sequence[Point]) -> None:
        """Takes the places along a line."""
        for (x0, y0), (x1, y1) in pairwise(points):
            n = max(int(max(abs(x1 - x0), abs(y1 - y0)) / 4.0), 1)
            self.points += [(x0 + (x1 - x0) * k / n, y0 + (y1 - y0) * k / n) for k in range(n)]
        self.points.append(points[-1])

    def place(self, text: str, role: str, candidates: Iterable[tuple[Point, Anchor]]) -> Words | None:
        """The words at the first candidate that is free, or None; the place is then taken."""
        for at, anchor in candidates:
            words = Words(at, text, role, anchor)
            box = box_of(words)
            if self._free(box):
                self.boxes.append(box)
                return words
        return None

    def _free(self, box: Box) -> bool:
        left, top, right, bottom = self.frame
        if box[0] < left or box[2] > right or box[1] < top or box[3] > bottom:
            return False
        if any(meets(box, other) for other in self.boxes):
            return False
        x0, y0, x1, y1 = box[0] - 2, box[1] - 2, box[2] + 2, box[3] + 2
        return not [1 for x, y in self.points if x0 < x < x1 and y0 < y < y1]


def along(points: Sequence[Point], above: bool, first: float, offset: float = 7.0) -> list[tuple[Point, Anchor]]:
    """Places beside a line, from a share *first* of its length on and back, for :meth:`Room.place`."""
    n = len(points)
    order = sorted(range(n), key=lambda i: (abs(i / max(n - 1, 1) - first), i))
    out: list[tuple[Point, Anchor]] = []
    for far in (0.0, 8.0, 18.0, 30.0):
        for i in order[:: max(n // 24, 1)]:
            x, y = points[i]
            anchors: tuple[Anchor, ...] = ("end", "middle", "start") if above else ("start", "middle", "end")
            shift = -(offset + far) if above else offset + far + 9.0
            out += [((x, y + shift), a) for a in anchors]
    return out


def spread(wanted: Sequence[float], gap: float, low: float, high: float) -> list[float]:
    """Places as near to the wanted ones as can be in the same order, *gap* apart, from *low* to *high*.

    >>> spread([10.0, 12.0, 50.0], 10.0, 0.0, 100.0)
    [6.0, 16.0, 50.0]
    """
    order = sorted(range(len(wanted)), key=lambda i: (wanted[i], i))
    groups: list[tuple[float, int]] = []  # (mean of what the members want their first to be at, members)
    for i in order:
        groups.append((wanted[i], 1))
        while len(groups) > 1 and groups[-1][0] < groups[-2][0] + groups[-2][1] * gap:
            (b, m), (a, n) = groups.pop(), groups.pop()
            groups.append(((a * n + (b - n * gap) * m) / (n + m), n + m))
    placed = [start + k * gap for start, n in groups for k in range(n)]
    for k in range(len(placed)):
        placed[k] = max(placed[k], low + k * gap)
    for k in reversed(range(len(placed))):
        placed[k] = min(placed[k], high - (len(placed) - 1 - k) * gap)
    out = [0.0] * len(wanted)
    for k, i in enumerate(order):
        out[i] = placed[k]
    return out


@dataclass(frozen=True, slots=True)
class Frame:
    """A plot's two scales and what stands around it."""

    x: Scale
    y: Scale
    marks: tuple[Mark, ...]

    @property
    def box(self) -> Box:
        """Left, top, right, bottom."""
        return self.x.start, self.y.end, self.x.end, self.y.start


def frame(
    x: Scale,
    y: Scale,
    x_ticks: Sequence[float],
    y_ticks: Sequence[float],
    *,
    x_name: str = "",
    y_name: str = "",
    x_words: Sequence[str] | None = None,
) -> Frame:
    """Axes, light lines at the ticks of y, and the numbers; without *x_name* the x axis has no numbers."""
    left, right, bottom, top = x.start, x.end, y.start, y.end
    marks: list[Mark] = [
        segments([((left, y(v)), (right, y(v))) for v in y_ticks], "grid") if y_ticks else Path((), "grid"),
        line([(left, bottom), (right, bottom)], "axis"),
        segments([((x(v), bottom), (x(v), bottom + 3.5)) for v in x_ticks], "axis"),
    ]
    marks += [Words((left - 5.0, y(v) + 3.8), number(v), "tick", "end") for v in y_ticks]
    if x_name:
        named = [number(v) for v in x_ticks] if x_words is None else x_words
        marks += [Words((x(v), bottom + 15.5), t, "tick", "middle") for v, t in zip(x_ticks, named, strict=True)]
        marks.append(Words(((left + right) / 2.0, bottom + 30.0), x_name, "name", "middle"))
    if y_name:
        marks.append(Words((left - 26.0, top - 9.0), y_name, "name"))
    return Frame(x, y, tuple(m for m in marks if not (isinstance(m, Path) and not m.lines)))
