"""Places on the canvas, words that keep apart, and the text of an SVG."""

from __future__ import annotations

import re
from itertools import pairwise
from math import hypot
from xml.etree import ElementTree

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from heatwright.report.drawing import Ball, Dots, Drawing, Figure, Path, Words, area, line
from heatwright.report.layout import Room, box_of, meets, nice_ticks, round_below, spread, temperature_ticks
from heatwright.report.svg import NEAR, inline_svg, marks_svg, simplified, standalone_svg

numbers = st.floats(-1e4, 1e4)


@given(st.lists(numbers, min_size=1, max_size=12), st.floats(1.0, 20.0))
def test_spread_keeps_order_and_distance(wanted: list[float], gap: float) -> None:
    low, high = -2e4, 2e4
    placed = spread(wanted, gap, low, high)
    order = sorted(range(len(wanted)), key=lambda i: (wanted[i], i))
    ordered = [placed[i] for i in order]
    assert all(b - a >= gap - 1e-6 for a, b in pairwise(ordered))
    apart = np.diff(sorted(wanted))
    if len(wanted) == 1 or apart.min() >= gap:
        assert placed == pytest.approx(wanted)


@given(st.floats(-1e3, 1e3), st.floats(1e-3, 1e6), st.integers(2, 8))
def test_ticks_are_round_and_inside(low: float, width: float, about: int) -> None:
    high = low + width
    ticks = nice_ticks(low, high, about)
    assert len(ticks) <= 2 * about + 2
    assert all(low - 1e-6 * width <= t <= high + 1e-6 * width for t in ticks)
    steps = np.diff(ticks)
    assert steps == pytest.approx(np.full(len(steps), steps[0] if len(steps) else 0.0), rel=1e-6)


@given(st.floats(1e-12, 1e12))
def test_round_below(value: float) -> None:
    found = round_below(value)
    assert found <= value * (1 + 1e-8)
    assert found > value / 2.6
    assert f"{found:.0e}"[0] in "125"


@pytest.mark.parametrize("ends", [(200, 6000), (300, 5000), (298.15, 3000), (300, 1000), (10, 200), (290, 310)])
def test_temperatures_are_named_on_every_range(ends: tuple[float, float]) -> None:
    ticks = temperature_ticks(*ends)
    assert 2 <= len(ticks) <= 8
    assert ticks == sorted(ticks)


@settings(deadline=None)
@given(st.lists(numbers, min_size=2, max_size=80))
def test_left_out_points_are_near_the_line(values: list[float]) -> None:
    points = [(float(i), v) for i, v in enumerate(values)]
    kept = simplified(points)
    assert kept[0] == points[0]
    assert kept[-1] == points[-1]
    assert set(kept) <= set(points)
    drawn = np.interp([x for x, _ in points], [x for x, _ in kept], [y for _, y in kept])
    assert np.abs(drawn - values).max() <= NEAR + 1e-6 * (1.0 + np.abs(values).max())


def test_a_line_that_turns_back_keeps_its_turn() -> None:
    there_and_back = [(0.0, 0.0), (5.0, 0.0), (10.0, 0.0), (10.0, 5.0), (5.0, 5.0), (0.0, 5.0)]
    assert {(0.0, 0.0), (10.0, 0.0), (10.0, 5.0), (0.0, 5.0)} <= set(simplified(there_and_back))


def points_of(d: str) -> list[tuple[float, float]]:
    """The points of a path of M, l, h, v with one start."""
    x = y = 0.0
    found = []
    for command, text in re.findall(r"([Mlhvz])([^Mlhvz]*)", d):
        values = [float(v) for v in re.findall(r"-?(?:\d+\.?\d*|\.\d+)", text)]
        if command == "M":
            x, y = values
            found.append((x, y))
        elif command == "h":
            x += values[0]
            found.append((x, y))
        elif command == "v":
            y += values[0]
            found.append((x, y))
        else:
            for dx, dy in zip(values[::2], values[1::2], strict=True):
                x, y = x + dx, y + dy
                found.append((x, y))
    return found


@given(st.lists(st.tuples(st.floats(0, 500), st.floats(-500, 500)), min_size=2, max_size=40))
def test_rounding_does_not_add_up(points: list[tuple[float, float]]) -> None:
    d = re.search(r'd="([^"]*)"', marks_svg([line(points, "axis")]))
    assert d is not None
    back = points_of(d[1])
    assert all(min(hypot(a - x, b - y) for x, y in points) <= 0.0708 for a, b in back)
    assert hypot(back[-1][0] - points[-1][0], back[-1][1] - points[-1][1]) <= 0.0708


def figure(text: str = 'a < b & "c"') -> Figure:
    marks = (
        line([(0.0, 0.0), (10.0, 5.0)], "axis"),
        area([(0.0, 0.0), (10.0, 5.0), (10.0, 9.0)], "band"),
        Path((((1.0, 2.0), (1.0, 3.0)), ((2.0, 2.0), (4.0, 2.0))), "grid"),
        Dots(((3.0, 3.0), (4.04, 4.06)), "ring"),
        Ball((5.0, 5.0), 2.0, "ball-C"),
        Words((1.0, 1.0), text, "label", "end"),
    )
    drawing = Drawing(20.0, 10.0, marks)
    return Figure(key="k", heading="h", title=text, description=text, caption=text, source="", drawing=drawing,
                  columns=(), rows=())  # fmt: skip


def test_both_texts_are_well_formed_whatever_the_words() -> None:
    hostile = "</title><script>alert(1)</script>\"'&"
    for svg in (inline_svg(figure(hostile), "p"), standalone_svg(figure(hostile))):
        root = ElementTree.fromstring(svg.replace(' xmlns="http://www.w3.org/2000/svg"', ""))
        assert [e.tag for e in root.iter("script")] == []
        assert root.find("title").text == hostile
        assert root.find(".//text").text == hostile
        assert root.attrib["aria-labelledby"].split() == [
            root.find("title").attrib["id"],
            root.find("desc").attrib["id"],
        ]


def test_the_file_stands_alone_and_knows_both_schemes() -> None:
    svg = standalone_svg(figure())
    assert "prefers-color-scheme:dark" in svg
    assert "http" not in svg.replace("http://www.w3.org/2000/svg", "")
    assert standalone_svg(figure()) == svg


def test_numbers_have_one_decimal_at_most() -> None:
    assert re.findall(r"\d\.\d\d", marks_svg(figure().drawing.marks)) == []


def test_words_find_a_free_place_or_none() -> None:
    room = Room((0.0, 0.0, 100.0, 40.0))
    first = room.place("first", "label", [((5.0, 20.0), "start")])
    second = room.place("second", "label", [((5.0, 20.0), "start"), ((5.0, 36.0), "start")])
    assert first is not None
    assert second is not None
    assert second.at == (5.0, 36.0)
    assert not meets(box_of(first), box_of(second))
    room.curve([(0.0, 5.0), (100.0, 5.0)])
    assert room.place("third", "label", [((50.0, 8.0), "start")]) is None  # on the line
    assert room.place("fourth", "label", [((90.0, 30.0), "start")]) is None  # out of the frame
