"""The routes to an enthalpy of formation side by side, with their error bars."""

from __future__ import annotations

from heatwright.report.curves import WIDTH
from heatwright.report.drawing import Dots, Drawing, Figure, Mark, Words, segments
from heatwright.report.layout import Scale, frame, nice_ticks, padded
from heatwright.report.species import Species

_LEFT, _RIGHT, _TOP, _ROW = 96.0, 400.0, 18.0, 34.0


def formation_routes(species: Species) -> Figure | None:
    """A dot for each route, with a bar where its 95 % uncertainty is known; None where there is one bare value."""
    routes = species.routes
    if not routes or (len(routes) == 1 and routes[0].u95_kJ_mol is None):
        return None
    ends = [r.dHf298_kJ_mol + sign * (r.u95_kJ_mol or 0.0) for r in routes for sign in (-1.0, 1.0)]
    low, high = padded(min(ends), max(ends), 0.1, 0.5)
    bottom = _TOP + _ROW * len(routes)
    x, y = Scale(low, high, _LEFT, _RIGHT), Scale(len(routes), 0.0, bottom, _TOP)
    plot = frame(x, y, nice_ticks(low, high), (), x_name="ΔfH°(298.15 K) / kJ/mol")
    marks: list[Mark] = list(plot.marks)
    for i, r in enumerate(routes):
        middle, at = y(i + 0.62), x(r.dHf298_kJ_mol)
        u = r.u95_kJ_mol
        if u is not None:
            first, last = x(r.dHf298_kJ_mol - u), x(r.dHf298_kJ_mol + u)
            ends_of_bar = [((e, middle - 4.0), (e, middle + 4.0)) for e in (first, last)]
            marks.append(segments([((first, middle), (last, middle)), *ends_of_bar], "bar"))
        marks.append(Dots(((at, middle),), "dot"))
        marks.append(Words((_LEFT - 8.0, middle + 4.0), r.method, "label", "end"))
        spread = "" if u is None else f" ± {u:.{0 if u >= 10 else 1}f}"
        value = f"{r.dHf298_kJ_mol:.1f}{spread}".replace("-", "−")
        room = 3.6 * len(value)
        marks.append(Words((min(max(at, _LEFT + room), _RIGHT - room), middle - 9.0), value, "quiet", "middle"))
    said = "; ".join(
        f"{r.method} {r.dHf298_kJ_mol:.1f} kJ/mol"
        + (" without an uncertainty" if r.u95_kJ_mol is None else f" ± {r.u95_kJ_mol:.1f}")
        for r in routes
    )
    return Figure(
        key="formation",
        heading="Enthalpy of formation",
        title=f"Enthalpy of formation of {species.name}",
        description=f"{said}. The first is the one in the entry.",
        caption=f"ΔfH°(298.15 K) of {species.name} by each route, the first one in use; bars: 95 % uncertainty.",
        source=routes[0].source,
        drawing=Drawing(WIDTH, bottom + 36.0, tuple(marks)),
        columns=("route", "ΔfH°(298.15 K) / kJ/mol", "95 %", "from"),
        rows=tuple(
            (
                r.method,
                f"{r.dHf298_kJ_mol:.2f}".replace("-", "−"),
                "not known" if r.u95_kJ_mol is None else f"{r.u95_kJ_mol:.2f}",
                r.source,
            )
            for r in routes
        ),
    )
