"""The figures say what the numbers say: marks taken back through their scales are the values."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from heatwright.constants import CM1_KJ_MOL, GAS_CONSTANT_J_MOL_K
from heatwright.report.curves import LEFT, RIGHT, heat_capacity, residual_strips
from heatwright.report.drawing import Ball, Dots, Figure, Path, Words
from heatwright.report.figures import KINDS, figures_of, kind_of
from heatwright.report.layout import Scale
from heatwright.report.potential import torsional_potential
from heatwright.report.routes import formation_routes
from heatwright.report.shares import STACK_RIGHT, populations, stacked_shares
from heatwright.report.slopes import slope
from heatwright.report.species import Geometry, Species
from heatwright.report.structure import structure
from shown import entries, moved, places, shown

R = GAS_CONSTANT_J_MOL_K


def role(figure: Figure, name: str) -> list:
    """The marks of one role."""
    return [m for m in figure.drawing.marks if getattr(m, "role", None) == name]


def y_scale(figure: Figure, bottom: float, top: float, nth: int = 0) -> Scale:
    """The scale of y, found again from the tick labels and the places where they stand."""
    ticks = [m for m in role(figure, "tick") if m.anchor == "end" and top - 1 <= m.at[1] - 3.8 <= bottom + 1]
    (y0, t0), (y1, t1) = ((m.at[1] - 3.8, float(m.text.replace("−", "-"))) for m in (ticks[0], ticks[-1]))
    per = (t1 - t0) / (y1 - y0)
    return Scale(t0 + per * (bottom - y0), t0 + per * (top - y0), bottom, top)


def temperatures(species: Species, right: float) -> Scale:
    p = species.polynomial
    return Scale(p.t_low_K, p.t_high_K, LEFT, right, log=True)


@pytest.mark.parametrize("name", list(shown()))
def test_every_kind_is_drawn_and_every_figure_has_its_numbers(name: str) -> None:
    found = figures_of(shown()[name])
    assert {kind_of(f) for f in found} <= set(KINDS)
    assert len({f.key for f in found}) == len(found)
    for f in found:
        assert f.rows, f.key
        assert all(len(row) == len(f.columns) for row in f.rows), f.key
        assert f.title.endswith(name) or name in f.title
        assert f.description.endswith(".")
        assert f.caption.endswith(".")
        assert f.source


def test_all_kinds_occur() -> None:
    assert {kind_of(f) for s in shown().values() for f in figures_of(s)} == set(KINDS) - {"slope"}


@pytest.mark.parametrize("name", ["methanol", "CO2"])
def test_heat_capacity(name: str) -> None:
    figure, entry = heat_capacity(shown()[name]), entries()[name]
    x, y = temperatures(shown()[name], RIGHT), y_scale(figure, 238.0, 26.0)
    (dots,) = role(figure, "ring")
    T, cp = places(dots.points, x, y).T
    assert pytest.approx(entry.table.T_K, rel=1e-9) == T
    assert cp == pytest.approx(entry.table.cp_J_mol_K / R, abs=2e-3)
    (curve,) = role(figure, "polynomial")
    for points, a in zip(curve.lines, (entry.polynomial.low, entry.polynomial.high), strict=True):
        T, cp = places(points, x, y).T
        expected = a[0] + T * (a[1] + T * (a[2] + T * (a[3] + T * a[4])))
        assert cp == pytest.approx(expected, abs=2e-3)
    said = [float(row[1]) for row in figure.rows]
    assert said == pytest.approx(entry.table.cp_J_mol_K, abs=6e-4)


def test_a_jump_is_drawn_as_a_jump() -> None:
    species = shown()["CO2"]
    p = species.polynomial
    broken = replace(p, high=(p.high[0] + 0.5, *p.high[1:]))
    figure = heat_capacity(replace(species, polynomial=broken))
    low, high = role(figure, "polynomial")[0].lines
    assert low[-1][0] == pytest.approx(high[0][0])
    y = y_scale(figure, 238.0, 26.0)
    assert places([low[-1], high[0]], temperatures(species, RIGHT), y)[:, 1].tolist() == pytest.approx(
        [p.cp_R(1000.0), p.cp_R(1000.0) + 0.5], abs=2e-3
    )


@pytest.mark.parametrize("name", ["methanol", "CO2", "n-butane"])
def test_residual_strips(name: str) -> None:
    figure, entry = residual_strips(shown()[name]), entries()[name]
    x, quality = temperatures(shown()[name], RIGHT), entry.quality
    curves = role(figure, "polynomial")
    for i, (curve, largest) in enumerate(zip(curves, (quality.dcp_R, quality.dh_RT, quality.ds_R), strict=True)):
        bottom = 84.0 + 92.0 * i
        T, values = places(curve.lines[0], x, y_scale(figure, bottom, bottom - 62.0)).T
        worst = int(np.abs(values).argmax())
        assert abs(values[worst]) == pytest.approx(1000.0 * largest.largest, rel=0.01)
        assert T[worst] == pytest.approx(largest.at_K, rel=0.02)
        if i == 0:
            model = entry.model.cp_R(T)
            p = entry.polynomial
            assert values == pytest.approx(1000.0 * (p.cp_R(np.clip(T, 200, 6000)) - model), abs=20.0 * largest.largest)
    (band,) = role(figure, "band")
    edges = places(band.lines[0], x, y_scale(figure, 84.0, 22.0))[:, 1]
    assert np.abs(edges) == pytest.approx(1000.0 * quality.minimax_dCp_R, rel=2e-3)
    assert f"best possible {1000.0 * quality.minimax_dCp_R:.3g}" in [m.text.split(" · ")[-1].removesuffix(" (band)")
                                                                     for m in role(figure, "quiet")]  # fmt: skip


@pytest.mark.parametrize("name", ["methanol", "n-butane"])
@pytest.mark.parametrize("quantity", ["Cp", "S"])
def test_shares_add_up_to_the_table(name: str, quantity: str) -> None:
    species, table = shown()[name], entries()[name].table
    figure = stacked_shares(species, quantity)
    x, y = temperatures(species, STACK_RIGHT), y_scale(figure, 238.0, 26.0)
    edges = [m for m in figure.drawing.marks if isinstance(m, Path) and m.role.startswith("edge")]
    upper = places(edges[-1].lines[0], x, y)
    total = table.cp_J_mol_K if quantity == "Cp" else table.s_J_mol_K
    assert upper[:, 0] == pytest.approx(table.T_K, rel=1e-9)
    assert upper[:, 1] == pytest.approx(total, abs=0.02)
    sums = [float(row[-1].replace("−", "-")) for row in figure.rows]
    parts = [[float(v.replace("−", "-")) for v in row[1:-1]] for row in figure.rows]
    assert np.sum(parts, axis=1) == pytest.approx(sums, abs=0.01 * len(parts[0]))


def test_one_set_of_coefficients_has_no_joint() -> None:
    p = shown()["CO2"].polynomial
    alone = replace(shown()["CO2"], table=None, polynomial=replace(p, high=p.low))
    for figure in (heat_capacity(alone), slope(alone)):
        assert role(figure, "hair") == []
        assert "meet" not in " ".join(m.text for m in figure.drawing.marks if isinstance(m, Words))
        assert "meet" not in figure.description + figure.caption
        assert "common temperature" not in figure.caption
    assert role(heat_capacity(shown()["CO2"]), "hair")


def test_a_torsion_without_levels_says_so() -> None:
    """The form of Pitzer and Gwinn has no levels: none are drawn, listed or spoken of."""
    species = shown()["methanol"]
    none = replace(species.torsions[0], levels_cm1=(), ground_cm1=49.0)
    figure = torsional_potential(replace(species, torsions=(none,)), 0)
    assert role(figure, "level") == []
    assert "drawn without levels" in figure.description
    assert "horizontal lines" not in figure.caption
    assert "Pitzer and Gwinn" in figure.caption
    assert figure.columns == ("angle / °", "V / cm⁻¹")
    usual = torsional_potential(species, 0)
    assert "horizontal lines: levels; arrow" in usual.caption
    assert "levels are drawn, the lowest at" in usual.description


def test_a_kink_is_a_step_of_the_slope() -> None:
    species = replace(shown()["CO2"], table=None)
    p = species.polynomial
    kinked = replace(p, high=(p.high[0] - 1.0, p.high[1] + 1e-3, *p.high[2:]))
    figure = slope(replace(species, polynomial=kinked))
    low, high = role(figure, "polynomial")[0].lines
    step = places([low[-1], high[0]], temperatures(species, RIGHT), y_scale(figure, 238.0, 26.0))[:, 1]
    assert step[1] - step[0] == pytest.approx(1.0, abs=5e-3)
    assert "T d(Cp°/R)/dT by 1." in figure.description
    assert slope(shown()["CO2"]) is None  # where there is a table, its residuals say more


def test_negative_shares_hang_below_zero() -> None:
    species = shown()["CO2"]
    t = species.table
    n = len(t.T_K)
    shares = (("up", (10.0,) * n, (1.0,) * n), ("down", (-4.0,) * n, (1.0,) * n))
    figure = stacked_shares(replace(species, table=replace(t, shares=shares)), "Cp")
    areas = [m.lines[0] for m in figure.drawing.marks if isinstance(m, Path) and m.role.startswith("area")]
    y = y_scale(figure, 238.0, 26.0)
    x = temperatures(species, STACK_RIGHT)
    assert [sorted({round(v, 1) for v in places(a, x, y)[:, 1]}) for a in areas] == [[0.0, 10.0], [-4.0, 0.0]]


def test_torsional_potential() -> None:
    species, treated = shown()["methanol"], entries()["methanol"].model.torsions[0]
    figure = torsional_potential(species, 0)
    x, y = Scale(-180.0, 180.0, LEFT + 4.0, 404.0), y_scale(figure, 238.0, 26.0)
    (curve,) = role(figure, "polynomial")
    phi, V = places(curve.lines[0], x, y).T
    assert pytest.approx(treated.potential(np.radians(phi)) - treated.potential.minimum[1], abs=0.2) == V
    assert V.max() == pytest.approx(373.6, abs=0.5)
    (levels,) = role(figure, "level")
    energies = sorted({round(float(e), 1) for seg in levels.lines for e in places(seg, x, y)[:, 1]})
    assert energies[0] == pytest.approx(treated.rotor.ground_cm1, abs=0.2)
    for segment in levels.lines:  # a level is drawn only where it is above the potential
        (a, e), (b, _) = places(segment, x, y)
        inside = np.linspace(a, b, 50)[1:-1]
        assert (treated.potential(np.radians(inside)) - treated.potential.minimum[1] <= e + 1.5).all()
    assert f"{373.6 * CM1_KJ_MOL:.2f} kJ/mol" in figure.description


def test_populations() -> None:
    species = shown()["n-butane"]
    figure = populations(species)
    lines = [m for m in figure.drawing.marks if isinstance(m, Path) and m.role.startswith("line")]
    x, y = temperatures(species, STACK_RIGHT), Scale(0.0, 1.0, 238.0, 26.0)
    fractions = np.array([places(m.lines[0], x, y)[:, 1] for m in lines])
    assert fractions.sum(axis=0) == pytest.approx(1.0, abs=1e-9)
    expected = entries()["n-butane"].table.populations
    assert fractions == pytest.approx(np.array(expected), abs=1e-9)
    assert [sum(map(float, row[1:])) for row in figure.rows] == pytest.approx([1.0] * len(figure.rows), abs=2e-4)


def test_routes_stand_side_by_side() -> None:
    figure, made = formation_routes(shown()["CH3OCH3"]), entries()["CH3OCH3"].formation
    routes = [made, *made.alternatives]
    assert len(routes) == 3
    assert [row[0] for row in figure.rows] == [r.method for r in routes]
    ticks = [m for m in role(figure, "tick") if m.anchor == "middle"]
    (x0, t0), (x1, t1) = ((m.at[0], float(m.text.replace("−", "-"))) for m in (ticks[0], ticks[-1]))
    per = (t1 - t0) / (x1 - x0)
    for dots, bar, route in zip(role(figure, "dot"), role(figure, "bar"), routes, strict=True):
        assert t0 + per * (dots.points[0][0] - x0) == pytest.approx(route.dHf298_kJ_mol, abs=0.01)
        (first, _), (last, _) = bar.lines[0]
        assert per * (last - first) == pytest.approx(2.0 * route.u95_kJ_mol, rel=1e-6)


def test_a_bare_value_has_no_figure_of_routes() -> None:
    assert formation_routes(shown()["H"]) is None


def alone(elements: str, coordinates: list[list[float]], bonds: list[tuple[int, int, float | None]]) -> Species:
    geometry = Geometry(tuple(elements.split()), tuple(map(tuple, coordinates)), tuple(bonds))
    return Species(name="X", formula="", composition={}, geometry=geometry)


METHANE = [[0.0, 0.0, 0.0], [1, 1, 1], [1, -1, -1], [-1, 1, -1], [-1, -1, 1]]


@pytest.mark.parametrize("turn", [0.0, 0.3, 1.0, 2.2])
def test_no_atom_hides_another(turn: float) -> None:
    c, s = np.cos(turn), np.sin(turn)
    x = np.array(METHANE) * 0.629 @ np.array([[c, -s, 0], [s, c, 0], [0, 0, 1.0]])
    figure = structure(alone("C H H H H", x.tolist(), [(0, i, 1.0) for i in range(1, 5)]))
    balls = [m for m in figure.drawing.marks if isinstance(m, Ball)]
    letters = [m.text for m in figure.drawing.marks if isinstance(m, Words)]
    assert len(balls) == 5
    assert sorted(letters) == ["C", "H", "H", "H", "H"]
    assert all(m.radius <= m.at[0] <= 420 - m.radius and m.radius <= m.at[1] <= 250 - m.radius for m in balls)


def test_distances_in_the_picture_never_exceed_the_real_ones() -> None:
    for name in ("methanol", "CH3OCH3", "n-butane"):
        g = shown()[name].geometry
        x = np.array(g.coordinates_A)
        figure = structure(shown()[name])
        assert len([m for m in figure.drawing.marks if isinstance(m, Ball)]) == len(g.elements)
        lengths = [float(np.linalg.norm(x[a] - x[b])) for a, b, _ in g.bonds]
        said = [float(part.split()[1]) for row in figure.rows for part in row[4].split(", ") if part]
        assert sorted(said) == pytest.approx(sorted(lengths), abs=6e-4)


@pytest.mark.parametrize(("order", "strokes"), [(1.0, 1), (2.0, 2), (3.0, 3), (1.5, 2), (None, 1)])
def test_bonds_show_their_order(order: float | None, strokes: int) -> None:
    figure = structure(alone("C N", [[0, 0, 0], [0, 0, 1.2]], [(0, 1, order)]))
    drawn = [m for m in figure.drawing.marks if isinstance(m, Path)]
    assert sum(len(m.lines) for m in drawn) == strokes
    assert ("half" in [m.role for m in drawn]) == (order == 1.5)
    assert ("orders of bonds not known" in figure.caption) == (order is None)


def test_a_bond_that_turns_is_marked() -> None:
    assert role(structure(shown()["methanol"]), "turn")
    assert not role(structure(shown()["CH3OCH3"]), "turn")


def test_crowds_are_not_drawn() -> None:
    many = alone(" ".join(["C"] * 201), [[float(i), 0.0, 0.0] for i in range(201)], [])
    assert structure(many) is None


def test_scan_points_are_shown() -> None:
    species = shown()["methanol"]
    scan = replace(species.torsions[0], scan_deg=(-60.0, 0.0, 300.0), scan_cm1=(370.0, 1.0, 370.0))
    figure = torsional_potential(replace(species, torsions=(scan,)), 0)
    (dots,) = [m for m in figure.drawing.marks if isinstance(m, Dots) and m.role == "ring"]
    assert dots.points[0] == pytest.approx(dots.points[2])


def test_shifts_are_in_the_order_of_their_size() -> None:
    changes = moved(0.5)
    figure = changes["figure"]
    assert changes["tally"] == f"{len(shown())} changed"
    names = [m.text for m in role(figure, "label")]
    assert names == list(shown())[::-1]  # the last one moved most
    said = [float(m.text.replace("−", "-")) for m in role(figure, "quiet") if m.text[0] in "+−"]
    assert said == pytest.approx([0.5 * i for i in range(len(shown()), 0, -1)], abs=0.006)
    assert all(row[1] == row[-1] for row in figure.rows)  # a shift of H alone is the same at every temperature
    assert f"{list(shown())[-1]} moved most" in figure.description


def test_nothing_moved_has_no_figure() -> None:
    changes = moved(0.0)
    assert changes["figure"] is None
    assert changes["rows"] == []
