"""What is drawn and written can be told from its ground, in both schemes, by more than colour."""

from __future__ import annotations

import itertools

import pytest

from heatwright.report.palette import COLOURS, DASHES, LOOKS, SERIES, contrast, figure_css, variables

ENOUGH = 4.5  # WCAG 2.2, success criterion 1.4.3, for text; more than 1.4.11 asks for graphics
WORDS = sorted({look.fill for look in LOOKS.values() if look.size} - {"letter"} | {"ink", "muted", "steel", "ember"})
STROKES = sorted({k.stroke for r, k in LOOKS.items() if k.stroke and r != "grid"} - {"letter", "ground"})


@pytest.mark.parametrize("scheme", [0, 1], ids=["light", "dark"])
@pytest.mark.parametrize("ground", ["ground", "card"])
@pytest.mark.parametrize("name", sorted({*WORDS, *STROKES}))
def test_words_and_lines_stand_out(name: str, ground: str, scheme: int) -> None:
    assert contrast(COLOURS[name][scheme], COLOURS[ground][scheme]) >= ENOUGH


@pytest.mark.parametrize("scheme", [0, 1], ids=["light", "dark"])
@pytest.mark.parametrize("role", [r for r in LOOKS if r.startswith("ball-")])
def test_letters_stand_out_on_their_atoms(role: str, scheme: int) -> None:
    assert contrast(COLOURS["letter"][scheme], COLOURS[LOOKS[role].fill][scheme]) >= ENOUGH


def test_contrast_of_known_pairs() -> None:
    # WCAG 2.2: #777777 on white is the usual example of 4.48, just below the limit
    assert contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.005)


def test_no_two_lines_are_told_apart_by_colour_alone() -> None:
    assert len(set(DASHES)) == len(SERIES)
    drawn = [(LOOKS[f"line{i}"].dash, LOOKS[f"edge{i}"].dash) for i in range(len(SERIES))]
    assert all(a != b for a, b in itertools.combinations(drawn, 2))


def test_every_role_has_its_rule_and_every_colour_its_value() -> None:
    css = figure_css()
    assert all(f".{role}{{" in css for role in LOOKS)
    for dark in (False, True):
        assert all(f"--{name}:#" in variables(dark) for name in COLOURS)
    used = {part.split(")")[0] for part in css.split("var(--")[1:]} - {"letters,1"}
    assert used <= set(COLOURS)
