"""How roles look, on light and dark ground: one table, from which CSS and the colours of paper figures are made."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

COLOURS: Final[dict[str, tuple[str, str]]] = {
    "ground": ("#fcfbf8", "#16181b"),
    "card": ("#f4f1ea", "#1e2125"),
    "ink": ("#22262b", "#e8e5df"),
    "muted": ("#565c63", "#a9aeb4"),
    "rule": ("#d9d5cb", "#3a3e44"),
    "ember": ("#a3311a", "#f2906c"),
    "steel": ("#14557b", "#7fbfe6"),
    "moss": ("#38662a", "#9bc98a"),
    "plum": ("#6a3876", "#d3a3dd"),
    "ochre": ("#755300", "#e0b45c"),
    "teal": ("#0b6058", "#72cabd"),
    "H": ("#ffffff", "#f3f1ec"),
    "C": ("#b9bcc2", "#b9bcc2"),
    "N": ("#a9c3ee", "#a9c3ee"),
    "O": ("#f1a08f", "#f1a08f"),
    "F": ("#b4dfa6", "#b4dfa6"),
    "S": ("#f0d878", "#f0d878"),
    "P": ("#f2b27a", "#f2b27a"),
    "other": ("#d9d2ea", "#d9d2ea"),
    "letter": ("#22262b", "#22262b"),
}
"""Each colour on light and on dark ground."""

SERIES: Final = ("steel", "ember", "moss", "plum", "ochre", "teal")
"""Colours of several lines, in this order; each has its own dash as well."""
DASHES: Final = ("", "7 3", "2 3", "9 3 2 3", "4 2", "1 2")

SANS: Final = "system-ui, 'Segoe UI', Roboto, 'Helvetica Neue', Arial, sans-serif"


@dataclass(frozen=True, slots=True)
class Look:
    """Colour, width and dash of a stroke; colour and opacity of a fill; size of text."""

    stroke: str = ""
    width: float = 0.0
    dash: str = ""
    fill: str = ""
    opacity: float = 1.0
    size: float = 0.0
    bold: bool = False


LOOKS: Final[dict[str, Look]] = {
    "grid": Look(stroke="rule", width=0.8),
    "axis": Look(stroke="muted", width=1.0),
    "hair": Look(stroke="muted", width=0.8, dash="2 3"),
    "zero": Look(stroke="muted", width=0.8),
    "polynomial": Look(stroke="ember", width=1.9),
    "limit": Look(stroke="muted", width=1.1, dash="6 4"),
    "bound": Look(stroke="steel", width=1.0, dash="5 3"),
    "band": Look(fill="steel", opacity=0.13),
    "ring": Look(stroke="steel", width=6.4),
    "hole": Look(stroke="ground", width=3.6),
    "point": Look(stroke="steel", width=4.6),
    "dot": Look(stroke="ember", width=7.5),
    "bar": Look(stroke="ink", width=1.6),
    "level": Look(stroke="steel", width=1.0),
    "leader": Look(stroke="muted", width=0.7),
    "bond": Look(stroke="muted", width=3.4),
    "bonds": Look(stroke="muted", width=2.2),
    "half": Look(stroke="muted", width=2.0, dash="3 2.4"),
    "turn": Look(stroke="ember", width=4.6),
    "tick": Look(fill="muted", size=11.5),
    "name": Look(fill="ink", size=12.0),
    "label": Look(fill="ink", size=12.0),
    "quiet": Look(fill="muted", size=11.5),
    "of-polynomial": Look(fill="ember", size=12.0, bold=True),
    "of-table": Look(fill="steel", size=12.0, bold=True),
    "letter": Look(fill="letter", size=13.0, bold=True),
    "small-letter": Look(fill="letter", size=9.5, bold=True),
    **{f"line{i}": Look(stroke=c, width=1.8, dash=d) for i, (c, d) in enumerate(zip(SERIES, DASHES, strict=True))},
    **{f"area{i}": Look(fill=c, opacity=0.2) for i, c in enumerate(SERIES)},
    **{f"edge{i}": Look(stroke=c, width=1.2, dash=d) for i, (c, d) in enumerate(zip(SERIES, DASHES, strict=True))},
    **{f"of{i}": Look(fill=c, size=12.0) for i, c in enumerate(SERIES)},
    **{f"ball-{e}": Look(stroke="letter", width=1.0, fill=e) for e in ("H", "C", "N", "O", "F", "S", "P", "other")},
}
"""What each role of a mark looks like."""

_LIKE: Final = {"Cl": "F", "Br": "F", "I": "F", "D": "H", "T": "H", "Si": "P", "B": "P", "Se": "S"}


def ball_role(element: str) -> str:
    """The role of an atom's disc.

    >>> ball_role("Cl"), ball_role("Fe")
    ('ball-F', 'ball-other')
    """
    role = f"ball-{_LIKE.get(element, element)}"
    return role if role in LOOKS else "ball-other"


def series(i: int) -> int:
    """Which of the series' looks the *i*-th line has."""
    return i % len(SERIES)


def variables(dark: bool) -> str:
    """The colours as CSS variables."""
    return "".join(f"--{name}:{pair[dark]};" for name, pair in COLOURS.items())


def figure_css() -> str:
    """The rules of all roles, for colours in variables."""
    rules = [
        f".fig{{font-family:{SANS};font-variant-numeric:tabular-nums}}",
        ".fig .m{text-anchor:middle}.fig .e{text-anchor:end}",
        *(
            f"{_element(role, look)}.{role}{{{_css(look, 'round' if is_round(role) else '')}}}"
            for role, look in LOOKS.items()
        ),
        *(f".long path.area{i}{{{_stroke(LOOKS[f'edge{i}'])}}}" for i in range(len(SERIES))),
    ]
    return "\n".join(rules)


_ROUND: Final = ("ring", "hole", "point", "dot", "bond", "bonds", "turn")
"""Strokes with round ends: dots are strokes without length."""


def is_round(role: str) -> bool:
    """Whether the strokes of a role have round ends."""
    return role in _ROUND


def _element(role: str, look: Look) -> str:
    """The element that a role is a class of; no rule names an ancestor, so that it holds in copies as well."""
    return "text" if look.size else "circle" if role.startswith("ball-") else "path"


def _stroke(look: Look) -> str:
    dash = f";stroke-dasharray:{look.dash}" if look.dash else ""
    return f"stroke:var(--{look.stroke});stroke-width:{look.width:g};stroke-linejoin:round{dash}"


def _css(look: Look, cap: str) -> str:
    parts = [f"stroke-linecap:{cap}"] if cap else []
    parts += [_stroke(look)] if look.stroke else []
    parts.append(f"fill:var(--{look.fill})" if look.fill else "fill:none")
    if look.opacity < 1.0:
        parts.append(f"fill-opacity:{look.opacity:g}")
    if look.size:
        parts.append(f"font-size:{look.size:g}px")
    if look.bold:
        parts.append("font-weight:600")
    return ";".join(parts)


def contrast(one: str, other: str) -> float:
    """The contrast of two colours ``#rrggbb`` (WCAG 2.2, relative luminance), from 1 to 21.

    >>> round(contrast("#000000", "#ffffff"), 6)
    21.0
    """
    light, dark = sorted((_luminance(one), _luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def _luminance(colour: str) -> float:
    parts = [int(colour[i : i + 2], 16) / 255.0 for i in (1, 3, 5)]
    r, g, b = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts)
    return 0.2126 * r + 0.7152 * g + 0.0722 * b
