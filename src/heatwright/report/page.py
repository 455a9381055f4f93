"""One self-contained HTML page of species: no request leaves it, no script is in it, same values same bytes."""

from __future__ import annotations

import re
from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from typing import Any, Final

from jinja2 import Environment, FileSystemLoader, StrictUndefined
from markupsafe import Markup, escape

from heatwright import __version__
from heatwright.findings import SEVERITY_WORD
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.report.changes import values_of
from heatwright.report.drawing import Ball, Drawing, Figure
from heatwright.report.figures import figures_of, kind_of
from heatwright.report.long import (
    HOW_TO_SEE_ALL,
    MOST_IN_FULL,
    OWN_CAPTIONS,
    common_facts,
    facts_line,
    ledger_line,
    ledger_text,
    legend,
    telling,
)
from heatwright.report.palette import figure_css, variables
from heatwright.report.species import Route, Species, range_text
from heatwright.report.svg import inline_svg
from heatwright.resources import templates
from heatwright.writing.comment import CAUTION

POLICY: Final = "default-src 'none'; style-src 'unsafe-inline'; img-src data:; base-uri 'none'; form-action 'none'"
"""The page may use its own style and nothing from elsewhere."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Page:
    """What a page is made of.

    title : of the page.   subtitle : where it is from, one line.   species : in their order.
    failed : (file, sentences) of inputs that could not be shown.   remarks : sentences about all of them.
    changes : what a comparison found, see :mod:`heatwright.report.changes`; None without one.
    """

    title: str
    species: Sequence[Species]
    subtitle: str = ""
    failed: Sequence[tuple[str, Sequence[str]]] = ()
    remarks: Sequence[str] = ()
    changes: Mapping[str, Any] | None = None


def page_html(page: Page) -> str:
    """The page as text."""
    anchors = [f"s-{anchor}" for anchor in anchors_of([s.name for s in page.species])]
    orders = _orders(page.species)
    long = len(page.species) > MOST_IN_FULL
    common = common_facts(page.species) if long else ()
    shown = [
        _shown(i, s, anchor, order, common if long else None)
        for i, (s, anchor, order) in enumerate(zip(page.species, anchors, orders, strict=True))
    ]
    text: str = _template().render(
        policy=POLICY,
        light=Markup(variables(False)),
        dark=Markup(variables(True)),
        figure_css=Markup(figure_css()),
        title=page.title,
        subtitle=page.subtitle,
        species=shown,
        orders=_ORDERS,
        pictured=any(s["picture"] for s in shown),
        warned=sum(s["warnings"] > 0 for s in shown),
        failed=page.failed,
        remarks=page.remarks,
        long=long,
        common=common,
        legend=legend({kind for s in shown for kind in s["kinds"]}) if long else [],
        how_to_see_all=HOW_TO_SEE_ALL,
        changes=None if page.changes is None else _changes(page.changes),
        caution=" ".join(CAUTION),
        version=__version__,
    )
    return text


@cache
def _template() -> Any:
    environment = Environment(
        loader=FileSystemLoader(str(templates())),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.filters["number"] = shown_number
    return environment.get_template("report.html.j2")


def shown_number(value: float | None, decimals: int = 2) -> str:
    """A number with a true minus sign, a dash where there is none.

    >>> shown_number(-200.7, 1), shown_number(None)
    ('−200.7', '–')
    """
    return "–" if value is None else f"{value:z.{decimals}f}".replace("-", "−")


def anchors_of(names: Sequence[str]) -> list[str]:
    """An anchor for each name: letters and digits, unique.

    >>> anchors_of(["CH3OH", "CH2(S)", "CH2-S-"])
    ['CH3OH', 'CH2-S-', 'CH2-S--2']
    """
    taken: set[str] = set()
    out = []
    for name in names:
        plain = re.sub(r"[^A-Za-z0-9_-]", "-", name) or "species"
        n = 1
        while (anchor := plain if n == 1 else f"{plain}-{n}") in taken:
            n += 1
        taken.add(anchor)
        out.append(anchor)
    return out


def formula_markup(formula: str) -> Markup:
    """A formula with lowered counts and raised charge.

    >>> formula_markup("CH4O"), formula_markup("H3O+")
    (Markup('CH<sub>4</sub>O'), Markup('H<sub>3</sub>O<sup>+</sup>'))
    """
    plain, charge = re.fullmatch(r"(.*?)([+-]\d*)?", formula, re.DOTALL).groups()  # type: ignore[union-attr]
    body = re.sub(r"(\d+)", r"<sub>\1</sub>", str(escape(plain)))
    return Markup(body + (f"<sup>{escape(charge)}</sup>" if charge else ""))


_SPECIAL: Final = re.compile("[&<>\"']")
_ORDERS: Final = (
    ("g", "as given"),
    ("n", "name"),
    ("h", "ΔfH°"),
    ("s", "S°"),
    ("c", "Cp°"),
    ("r", "residual"),
    ("f", "findings"),
)
"""The orders of the index: their letter, by which CSS tells them, and their words."""
_KEYS: Final[dict[str, Callable[[Species], Any]]] = {
    "n": lambda s: natural(s.name),
    "h": lambda s: s.dHf298_kJ_mol,
    "s": lambda s: s.s298_J_mol_K,
    "c": lambda s: s.cp298_J_mol_K,
    "r": lambda s: s.largest_dcp_R,
    "f": lambda s: sum(1 + 1000 * (f.severity != "note") for f in s.findings),
}


def natural(text: str) -> tuple[tuple[int, int | str], ...]:
    """A key under which numbers in names count as numbers.

    >>> sorted(["C10H8", "C2H4"], key=natural)
    ['C2H4', 'C10H8']
    """
    parts = re.findall(r"\d+|\D+", text)
    return tuple((0, int(p)) if p.isdigit() and p.isascii() else (1, p.lower()) for p in parts)


def _orders(species: Sequence[Species]) -> list[str]:
    """For each species its place in every order, as CSS variables; what has no value comes last."""
    places: list[dict[str, int]] = [{"g": i} for i in range(len(species))]
    for letter, key in _KEYS.items():
        values = [key(s) for s in species]
        known = sorted((i for i, v in enumerate(values) if v is not None), key=lambda i: (values[i], i))
        for place, i in enumerate([*known, *(i for i, v in enumerate(values) if v is None)]):
            places[i][letter] = place
    return [";".join(f"--{letter}:{place}" for letter, place in p.items()) for p in places]


def _shown(i: int, s: Species, anchor: str, order: str, common: Collection[tuple[str, str]] | None) -> dict[str, Any]:
    """What the template needs of one species; *common* are the facts said elsewhere, on a long page."""
    long = common is not None
    drawn = figures_of(s, brief=long)
    pictured = bool(drawn) and drawn[0].key == "structure"
    return {
        "anchor": anchor,
        "order": Markup(order),
        "name": s.name,
        "formula": formula_markup(s.formula),
        "state": _state(s),
        "evidence": s.evidence,
        "h": s.dHf298_kJ_mol,
        "u": s.u95_kJ_mol,
        "s": s.s298_J_mol_K,
        "cp": s.cp298_J_mol_K,
        "residual": s.largest_dcp_R,
        "pressure": s.pressure_bar,
        "h0": s.routes[0].dHf0_kJ_mol if s.routes else None,
        "warnings": sum(f.severity != "note" for f in s.findings),
        "notes": sum(f.severity == "note" for f in s.findings),
        "picture": f"g{i}" if pictured else "",
        "picture_box": _ball_box(drawn[0].drawing) if pictured else "",
        "figures": [_figure(f, i, long) for f in drawn],
        "kinds": [kind_of(f) for f in drawn] if long else [],
        "polynomial": s.polynomial,
        "range": "" if s.polynomial is None else range_text(s.polynomial),
        "coefficients": _coefficients(s.polynomial, long),
        "routes": [_route(r, long) for r in s.routes],
        "facts": s.facts,
        "facts_line": facts_line(s, common) if common is not None else "",
        "wavenumbers": ", ".join(f"{nu:.0f}".replace("-", "−") for nu in s.wavenumbers_cm1),
        "findings": [(SEVERITY_WORD.get(f.severity, f.severity), f.text, f.code) for f in s.findings],
    }


def _ball_box(drawing: Drawing) -> str:
    """The part of a structure's drawing that the atoms take, not much smaller than that of a small molecule."""
    balls = [m for m in drawing.marks if isinstance(m, Ball)]
    left, right = min(b.at[0] - b.radius for b in balls), max(b.at[0] + b.radius for b in balls)
    top, bottom = min(b.at[1] - b.radius for b in balls), max(b.at[1] + b.radius for b in balls)
    width, height = max(right - left + 6.0, 170.0), max(bottom - top + 6.0, 104.0)
    return f"{(left + right - width) / 2:.0f} {(top + bottom - height) / 2:.0f} {width:.0f} {height:.0f}"


def _state(s: Species) -> str:
    words = []
    if s.charge:
        words.append(f"charge {s.charge:+d}".replace("-", "−"))
    if s.multiplicity and s.multiplicity > 1:
        words.append({2: "doublet", 3: "triplet", 4: "quartet"}.get(s.multiplicity, f"multiplicity {s.multiplicity}"))
    return ", ".join(words)


def _changes(changes: Mapping[str, Any]) -> dict[str, Any]:
    figure = changes["figure"]
    rows = [{**row, "values": values_of(row)} for row in changes["rows"]]
    return {**changes, "rows": rows, "figure": None if figure is None else _figure(figure, 0, False)}


def _figure(f: Figure, i: int, long: bool) -> dict[str, Any]:
    f = telling(f) if long else f
    return {
        "key": f.key,
        "title": f.title,
        "heading": f.heading,
        "caption": f.caption if not long or kind_of(f) in OWN_CAPTIONS else "",
        "svg": Markup(inline_svg(f, f"f{i}{f.key}", f"g{i}" if f.key == "structure" else "", brief=long)),
        "columns": f.columns,
        "body": _body(f.rows),
    }


def _body(rows: Iterable[Sequence[str]]) -> Markup:
    """Rows of a table; HTML lets row and cell ends be left out, which halves the page."""
    return Markup("\n".join("<tr><td>" + "<td>".join(_escaped(row)) for row in rows))


def _escaped(row: Sequence[str]) -> Sequence[str]:
    """Texts for HTML; most are numbers and stay as they are."""
    return [str(escape(c)) for c in row] if _SPECIAL.search("".join(row)) else row


def _route(r: Route, long: bool) -> dict[str, Any]:
    return {
        "method": r.method,
        "source": r.source,
        "h": r.dHf298_kJ_mol,
        "u": r.u95_kJ_mol,
        "ledger": _body((what, shown_number(value, 3), source) for what, value, source in r.ledger),
        "lines": len(r.ledger),
        "line": ledger_line(r) if long else "",
        "text": ledger_text(r) if long else "",
    }


def _coefficients(p: Nasa7 | None, long: bool) -> Markup | None:
    """The coefficients of both ranges as rows; on a long page as lines of text."""
    if p is None:
        return None
    pairs = enumerate(zip(p.low, p.high, strict=True), start=1)
    if long:
        return Markup("\n".join(f"a{i} {low:15.8E} {high:15.8E}" for i, (low, high) in pairs))
    return _body((f"a{i}", *(f"{a:.8E}" for a in pair)) for i, pair in pairs)
