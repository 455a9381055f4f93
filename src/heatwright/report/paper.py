"""Figures as PNG or PDF by matplotlib, from the same drawings as the SVG; matplotlib is an extra of the package."""

from __future__ import annotations

import io
from typing import TYPE_CHECKING, Any, Final

from heatwright.findings import Refused, refuse
from heatwright.report.drawing import Ball, Dots, Drawing, Figure, Mark, Path, Words
from heatwright.report.palette import COLOURS, LOOKS, Look, is_round

if TYPE_CHECKING:
    from matplotlib.axes import Axes

PT_PER_UNIT: Final = 0.6
"""Size of a canvas unit: 420 of them are 89 mm, one column of a journal."""
DOTS_PER_INCH: Final = 600
_ANCHOR: Final = {"start": "left", "middle": "center", "end": "right"}


def check_matplotlib() -> None:
    """Raises Refused (``no-matplotlib``) when matplotlib is not installed."""
    try:
        import matplotlib.figure  # noqa: F401
    except ImportError as error:
        raise Refused(
            [
                refuse(
                    "no-matplotlib",
                    f"PNG and PDF figures need matplotlib, which cannot be imported ({error})",
                    action="Install it by `pip install 'heatwright[plots]'`, or say --format svg.",
                )
            ]
        ) from error


def paper_bytes(figure: Figure, kind: str) -> bytes:
    """The figure as ``"png"`` or ``"pdf"``, on white ground, the same bytes each time with the same matplotlib.

    Raises Refused when matplotlib is missing.
    """
    check_matplotlib()
    import matplotlib
    from matplotlib.figure import Figure as Canvas

    d = figure.drawing
    with matplotlib.rc_context({"pdf.fonttype": 42, "font.family": "DejaVu Sans", "svg.hashsalt": "heatwright"}):
        canvas = Canvas(figsize=(d.width * PT_PER_UNIT / 72.0, d.height * PT_PER_UNIT / 72.0), dpi=DOTS_PER_INCH)
        axes = canvas.add_axes((0.0, 0.0, 1.0, 1.0))
        axes.set_xlim(0.0, d.width)
        axes.set_ylim(d.height, 0.0)
        axes.set_axis_off()
        _draw(axes, d)
        stream = io.BytesIO()
        canvas.savefig(stream, format=kind, metadata=_metadata(figure, kind))
    return stream.getvalue()


def _metadata(figure: Figure, kind: str) -> dict[str, Any]:
    if kind == "pdf":
        words = {"Title": figure.title, "Subject": figure.caption, "Creator": "heatwright"}
        return {**words, "CreationDate": None, "ModDate": None}
    return {"Title": figure.title, "Description": figure.caption, "Software": None}


def _draw(axes: Axes, drawing: Drawing) -> None:
    for depth, mark in enumerate(drawing.marks):
        _DRAWN[type(mark)](axes, mark, depth)


def _colour(name: str) -> str:
    return "#ffffff" if name == "ground" else COLOURS[name][0]


def _stroke(look: Look, role: str) -> dict[str, Any]:
    """Line of a role; dashes are in units of the width, as matplotlib has them."""
    width = look.width * PT_PER_UNIT
    dashes = tuple(float(part) * PT_PER_UNIT / width for part in look.dash.split())
    cap = "round" if is_round(role) else "butt"
    return {
        "edgecolor": _colour(look.stroke),
        "linewidth": width,
        "linestyle": (0.0, dashes) if dashes else "solid",
        "capstyle": cap,
        "joinstyle": "round",
    }


def _path(axes: Axes, mark: Path, depth: int) -> None:
    from matplotlib.patches import PathPatch
    from matplotlib.path import Path as Outline

    look = LOOKS[mark.role]
    points = [p for points in mark.lines for p in points]
    codes = [Outline.MOVETO if i == 0 else Outline.LINETO for points in mark.lines for i in range(len(points))]
    filled = {"facecolor": _colour(look.fill), "alpha": look.opacity, "edgecolor": "none"} if look.fill else {}
    drawn = filled if mark.closed else {"facecolor": "none", **_stroke(look, mark.role)}
    axes.add_patch(PathPatch(Outline(points, codes), zorder=depth, clip_on=False, **drawn))


def _dots(axes: Axes, mark: Dots, depth: int) -> None:
    look = LOOKS[mark.role]
    across, up = zip(*mark.points, strict=True) if mark.points else ((), ())
    size = look.width * PT_PER_UNIT
    axes.plot(
        across,
        up,
        linestyle="none",
        marker="o",
        markersize=size,
        markeredgewidth=0.0,
        color=_colour(look.stroke),
        zorder=depth,
        clip_on=False,
    )


def _ball(axes: Axes, mark: Ball, depth: int) -> None:
    from matplotlib.patches import Circle

    look = LOOKS[mark.fill]
    axes.add_patch(
        Circle(
            mark.at,
            mark.radius,
            facecolor=_colour(look.fill),
            edgecolor=_colour(look.stroke),
            linewidth=look.width * PT_PER_UNIT,
            zorder=depth,
            clip_on=False,
        )
    )


def _words(axes: Axes, mark: Words, depth: int) -> None:
    look = LOOKS[mark.role]
    axes.text(
        *mark.at,
        mark.text,
        fontsize=look.size * PT_PER_UNIT,
        color=_colour(look.fill),
        horizontalalignment=_ANCHOR[mark.anchor],
        verticalalignment="baseline",
        fontweight="bold" if look.bold else "normal",
        parse_math=False,
        zorder=depth,
    )


_DRAWN: Final[dict[type[Mark], Any]] = {Path: _path, Dots: _dots, Ball: _ball, Words: _words}
