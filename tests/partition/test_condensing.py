"""Many levels as few weighted ones: the sums stay what they are, and an entry of a heavy diatomic is quick."""

from __future__ import annotations

import time
from dataclasses import replace
from math import factorial
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from heatwright.cli.main import main
from heatwright.constants import SECOND_RADIATION_CM_K
from heatwright.molecule import DiatomicConstants, FloatArray
from heatwright.partition.condensing import NODES, WIDTH, condensed
from heatwright.partition.diatomic import doublet_pi_levels, vibration_rotation_levels
from heatwright.partition.levelsum import MANY, LevelSum

T = np.array([5.0, 20.0, 100.0, 298.15, 1000.0, 3000.0, 6000.0, 12000.0])

# K. P. Huber, G. Herzberg, Constants of Diatomic Molecules (1979), in 1/cm, from memory; that the sums agree does not
# hang on them.
BR2 = DiatomicConstants(
    we_cm1=325.321, wexe_cm1=1.0774, Be_cm1=0.082107, alphae_cm1=3.1873e-4, D0_cm1=15894.5, source="H & H 1979"
)
CLO = DiatomicConstants(
    we_cm1=853.8, wexe_cm1=5.5, Be_cm1=0.62345, alphae_cm1=0.0058, A_cm1=-318.0, source="H & H 1979"
)


def direct(energies: FloatArray, weights: FloatArray) -> tuple[list[float], list[float], list[float]]:
    """ln q, u and w at every temperature, level by level."""
    sums: tuple[list[float], list[float], list[float]] = ([], [], [])
    for t in T:
        x = SECOND_RADIATION_CM_K * (energies - energies.min()) / t
        g = weights * np.exp(-x)
        q = g.sum()
        mean = (g * x).sum() / q
        for part, value in zip(sums, (np.log(q), mean, (g * (x - mean) ** 2).sum() / q - 2.0 * mean), strict=True):
            part.append(float(value))
    return sums


@pytest.mark.parametrize(
    "levels",
    [
        vibration_rotation_levels(BR2),
        vibration_rotation_levels(replace(BR2, D0_cm1=None)),
        vibration_rotation_levels(BR2, 0.375, 0.625),
        doublet_pi_levels(CLO),
    ],
    ids=["Br2", "Br2 without D0", "Br2 with nuclear-spin weights", "ClO"],
)
def test_sums_are_those_of_all_levels(levels: tuple[FloatArray, FloatArray]) -> None:
    energies, weights = levels
    assert energies.size > MANY
    few, few_weights = condensed(energies, weights)
    assert few.size < 1000
    assert few_weights.min() > 0.0
    got = LevelSum("vibration and rotation", energies, weights).ln_q(T)
    for values, expected in zip((got.ln_q, got.u, got.w), direct(energies, weights), strict=True):
        np.testing.assert_allclose(values, expected, rtol=1e-12, atol=1e-12)


@settings(max_examples=40, deadline=None)
@given(
    st.lists(st.tuples(st.floats(0.0, 3.0e5), st.floats(0.1, 50.0)), min_size=1, max_size=40),
    st.integers(1, 400),
    st.floats(0.0, 400.0),
)
def test_any_levels(levels: list[tuple[float, float]], copies: int, apart: float) -> None:
    # Ladders of equally spaced levels on top of each other, equal ones among them.
    e, g = np.array(levels).T
    energies = (e[:, None] + apart * np.arange(copies)).ravel()
    weights = np.repeat(g, copies)
    few, few_weights = condensed(energies, weights)
    assert few.size <= energies.size
    assert float(few_weights.sum()) == pytest.approx(float(weights.sum()), rel=1e-12)
    for values, expected in zip(direct(few, few_weights), direct(energies, weights), strict=True):
        np.testing.assert_allclose(values, expected, rtol=1e-11, atol=1e-11)


def test_the_bound_on_what_is_lost() -> None:
    # The docstring's figures, and one bin against them: what is lost is positive and below the bound.
    def bound(x: float) -> float:
        return 4.0 / factorial(2 * NODES) * (x * WIDTH / 4.0) ** (2 * NODES) * np.exp(x * WIDTH)

    assert bound(10.0) < 1e-16
    assert bound(30.0) < 1e-11
    energies = np.concatenate([[0.0], np.linspace(1.001, 1.05, 500)])
    few, few_weights = condensed(energies, np.ones(501))
    assert few.size == 1 + NODES
    for s in (100.0, 200.0):
        whole, lost = (np.exp(-s * (e - 1.0)) for e in (energies[1:], few[1:]))
        assert 0.0 < 1.0 - float(few_weights[1:] @ lost) / float(whole.sum()) < bound(s)


def test_an_entry_of_bromine_is_quick(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    # 176,606 levels: 20 s when they were summed one by one.
    file = tmp_path / "Br2.toml"
    file.write_text(
        """
[molecule]
name = "Br2"
formula = "Br2"
multiplicity = 1
[diatomic]
we_cm1 = 325.321
wexe_cm1 = 1.0774
Be_cm1 = 0.082107
alphae_cm1 = 3.1873e-4
source = "Huber and Herzberg 1979"
[symmetry]
number = 2
"""
    )
    start = time.process_time()
    with pytest.raises(SystemExit) as done:
        main(["entry", str(file), "--dHf298", "30.88 kJ/mol", "--source", "x", "-q"])
    assert time.process_time() - start < 2.0
    assert not done.value.code
    assert "Br2" in capsys.readouterr().out
