"""Reaction equations: coefficients, direction, colliders, and what cannot be read."""

from __future__ import annotations

import re

import pytest

from heatwright.project.equations import parse_equation


@pytest.mark.parametrize(
    ("text", "reactants", "products", "reversible", "collider"),
    [
        ("H2 + O <=> H + OH", {"H2": 1, "O": 1}, {"H": 1, "OH": 1}, True, ""),
        ("H2 + O = H + OH", {"H2": 1, "O": 1}, {"H": 1, "OH": 1}, True, ""),
        ("CH3 + OH => products(+)", {"CH3": 1, "OH": 1}, {"products(+)": 1}, False, ""),
        ("2 O + M <=> O2 + M", {"O": 2}, {"O2": 1}, True, "M"),
        ("H + O2 (+M) <=> HO2 (+M)", {"H": 1, "O2": 1}, {"HO2": 1}, True, "M"),
        ("H + O2 (+ M) <=> HO2 (+ M)", {"H": 1, "O2": 1}, {"HO2": 1}, True, "M"),
        ("H + O2 (+AR) <=> HO2 (+AR)", {"H": 1, "O2": 1}, {"HO2": 1}, True, "AR"),
        ("O + H + H2O <=> OH + H2O", {"O": 1, "H": 1}, {"OH": 1}, True, "H2O"),
        ("CH2(S) + N2 <=> CH2 + N2", {"CH2(S)": 1, "N2": 1}, {"CH2": 1, "N2": 1}, True, ""),
        ("H + H + H <=> H2 + H", {"H": 2}, {"H2": 1}, True, "H"),
        ("2 H + 2 AR = H2 + 2 AR", {"H": 2, "AR": 2}, {"H2": 1, "AR": 2}, True, ""),
        ("1.5 A + B => C + 0.5 B", {"A": 1.5, "B": 1}, {"C": 1, "B": 0.5}, False, ""),
        ("O2- + E <=> O2-- + 0.5 A+", {"O2-": 1, "E": 1}, {"O2--": 1, "A+": 0.5}, True, ""),
    ],
)
def test_equations(text: str, reactants: dict, products: dict, reversible: bool, collider: str) -> None:
    equation = parse_equation(text)
    assert (dict(equation.reactants), dict(equation.products)) == (reactants, products)
    assert (equation.reversible, equation.collider) == (reversible, collider)


def test_the_type_or_the_efficiencies_can_name_the_collider() -> None:
    assert parse_equation("CH2(S) + N2 <=> CH2 + N2", "three-body").collider == "N2"
    assert parse_equation("H2O + N2 + A <=> H2O + N2 + B").collider == ""
    assert parse_equation("H2O + N2 + A <=> H2O + N2 + B", "", ["N2"]).collider == "N2"
    assert parse_equation("O2 + E => O2 + E", "electron-collision-plasma").collider == ""


def test_what_stands_on_both_sides_is_out_of_the_net_change() -> None:
    equation = parse_equation("CH2(S) + H2O <=> CH2 + H2O")
    assert equation.species == ("CH2(S)", "H2O", "CH2")
    assert equation.net == {"CH2(S)": -1.0, "CH2": 1.0}


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("A + B", "no arrow"),
        ("A <=> B <=> C", "2 arrows"),
        ("A + <=> B", "nothing stands"),
        ("A B C <=> D", "'A B C'"),
        ("x A <=> B", "'x' before A"),
        ("0 A <=> B", "'0' before A"),
        ("-1 A <=> B", "'-1' before A"),
        ("nan A <=> B", "'nan' before A"),
        ("A (+M) <=> B", "no (+M) on the right"),
        ("A (+M) <=> B (+N2)", "M on the left and N2 on the right"),
        ("A (+ ", "no arrow"),
        ("A (+ <=> B", "names no collider"),
        ("A + M <=> B", "M stands on one side only"),
        ("", "no arrow"),
    ],
)
def test_what_cannot_be_read_is_said(text: str, words: str) -> None:
    with pytest.raises(ValueError, match=re.escape(words)):
        parse_equation(text)
