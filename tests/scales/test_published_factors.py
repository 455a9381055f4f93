"""Published scale factors: spellings, the rule of choice, and what a model does with them."""

from __future__ import annotations

import numpy as np
import pytest

from heatwright import ModelOptions, build_model
from heatwright.errors import UsageError
from heatwright.findings import Refused
from heatwright.molecule import Level
from heatwright.scales import (
    SOURCE_ORDER,
    all_factors,
    basis_key,
    choose_published,
    factors_like,
    method_key,
    near_levels,
    published_factors,
)
from molecules import LEVEL, atom, water


# A. P. Scott, L. Radom, J. Phys. Chem. 100, 16502 (1996), table 1; values also known from memory.
@pytest.mark.parametrize(
    ("method", "basis", "core", "frequency", "zpe"),
    [
        ("B3LYP", "6-31G*", "", 0.9614, 0.9806),
        ("HF", "6-31G*", "", 0.8953, 0.9135),
        ("HF", "3-21G", "", 0.9085, 0.9207),
        ("MP2", "6-31G*", "frozen", 0.9434, 0.9670),
        ("MP2", "6-31G*", "all", 0.9427, 0.9661),
        ("BLYP", "6-31G*", "", 0.9945, 1.0126),
        ("B3PW91", "6-31G*", "", 0.9573, 0.9774),
    ],
)
def test_scott_and_radom(method: str, basis: str, core: str, frequency: float, zpe: float) -> None:
    choice = choose_published(Level(method, basis, frozen_core=core))
    assert (choice.frequency_factor, choice.zpe_factor) == (frequency, zpe)
    assert choice.source.startswith("Scott & Radom 1996")


# Merrick, Moran, Radom 2007 for a basis that Scott and Radom do not have; Truhlar group for a Minnesota functional.
def test_other_sources_follow() -> None:
    merrick = choose_published(Level("B3LYP", "6-311+G**"))
    assert (merrick.frequency_factor, merrick.zpe_factor) == (0.9688, 0.9887)
    assert merrick.source.startswith("Merrick")
    assert choose_published(Level("M06-2X", "def2-TZVP")).source.startswith("Alecu")


def test_every_source_of_the_table_has_a_place_in_the_order() -> None:
    assert all(row.source.startswith(SOURCE_ORDER) for row in all_factors())
    assert len(all_factors()) == 499


@pytest.mark.parametrize("names", [("B3-LYP", "B3LYP", "rb3lyp", "UB3LYP"), ("PBE1PBE", "PBE0"), ("wB97XD", "wB97X-D"),
                                   ("MP2-fc", "MP2(FC)", "MP2", "MP2=FULL", "MP2-fu"), ("B-P86", "BP86")])  # fmt: skip
def test_one_method_has_one_key(names: tuple[str, ...]) -> None:
    assert len({method_key(name) for name in names}) == 1


def test_methods_and_bases_that_differ_keep_different_keys() -> None:
    assert (
        len({method_key(n) for n in ("B3LYP", "BLYP", "CAM-B3LYP", "B3P86", "B3PW91", "M06-2X", "M06", "QCISD")}) == 8
    )
    assert len({basis_key(n) for n in ("6-31G*", "6-31G**", "6-31+G*", "6-311G*", "cc-pVTZ", "aug-cc-pVTZ")}) == 6


def test_frozen_core_must_be_known_where_the_row_names_it() -> None:
    assert choose_published(Level("MP2", "6-31G*")).thermal.core == ""
    frozen = published_factors(Level("MP2", "6-31G*", frozen_core="frozen 1"))
    assert frozen
    assert {row.core for row in frozen} == {"", "frozen"}


def test_dispersion_is_part_of_the_method_where_a_row_names_it() -> None:
    # Chan, Radom, J. Chem. Theory Comput. 12, 3774 (2016)
    assert choose_published(Level("B2PLYP", "cc-pVTZ", dispersion="D3BJ")).zpe_factor == 0.9830
    assert choose_published(Level("B3LYP", "6-31G*", dispersion="D3BJ")) == choose_published(Level("B3LYP", "6-31G*"))


def test_sources_may_differ_when_none_has_both() -> None:
    choice = choose_published(Level("QCISD", "6-31G(2df,p)"))
    assert (choice.thermal.source[:4], choice.zpe.source[:7]) == ("NIST", "Merrick")
    assert "zero-point energy: Merrick" in choice.source


def test_a_source_with_two_values_is_doubted() -> None:
    assert "0.9785" in choose_published(Level("BMK", "6-311+G**")).doubt
    assert choose_published(Level("B3LYP", "6-31G*")).doubt == ""


@pytest.mark.parametrize(
    ("level", "word"),
    [
        (Level("B3LYP", "6-31G*", solvent="water"), "isolated molecules"),
        (Level("B2PLYP", "6-31G*"), "none for the zero-point energy"),
        (Level("CCSD", "6-311+G(2df,p)"), "none for fundamentals"),
        (Level("M06-2X", "def2-SVP"), "M06-2X/def2-TZVP"),
        (Level("B3LYP", "6-31+G"), "B3LYP/6-31+G*"),
    ],
)
def test_what_is_not_published(level: Level, word: str) -> None:
    with pytest.raises(Refused, match="no-published-scale") as refused:
        choose_published(level)
    assert word in str(refused.value)


def test_near_levels_of_a_misspelt_method() -> None:
    assert near_levels("B3LPY", "6-31G*")[0] == "B3LYP/6-31G*"
    assert near_levels("zzz", "6-31G*") == ()


def test_look_up_by_text() -> None:
    assert {method_key(row.method) for row in factors_like("b3lyp")} == {"b3lyp"}
    assert {basis_key(row.basis) for row in factors_like("6-31g(d)")} == {"6-31g*"}
    assert len(factors_like("MC-QCISD/3")) == 1  # a method with a stroke in its name
    assert len(factors_like("MP2(FULL)/6-31G*")) < len(factors_like("MP2/6-31G*"))
    assert factors_like("B3LYP-D3BJ/6-31G*") == factors_like("B3LYP/6-31G*")
    assert factors_like("B2PLYP-D3/cc-pVTZ")[0].source.startswith("Chan")
    assert factors_like("nothing/here") == ()


def test_a_model_takes_the_published_factors() -> None:
    model = build_model(water(), ModelOptions(scale="published"))
    stated = build_model(water(), ModelOptions(frequency_scale=0.9614, zpe_scale=0.9806))
    assert (model.frequency_scale, model.zpe_scale) == (0.9614, 0.9806)
    assert model.zpe_kJ_mol == stated.zpe_kJ_mol
    assert float(model.s_R(298.15)) == float(stated.s_R(298.15))
    assert model.scale_source.startswith("Scott & Radom 1996")
    assert [f.code for f in model.findings if "scale" in f.code] == ["published-scale"]
    assert stated.scale_source == "given"
    assert build_model(water()).scale_source == ""


def test_the_change_in_entropy_is_said_and_right() -> None:
    low = water().but(wavenumbers_cm1=np.array([200.0, 300.0, 3700.0]))
    said = next(f for f in build_model(low, ModelOptions(scale="published")).findings if f.code == "published-scale")
    s = [
        float(build_model(low, ModelOptions(frequency_scale=x, zpe_scale=1.0)).s_R(298.15)) * 8.31446261815324
        for x in (0.9614, 0.9806, 1.0015)
    ]
    assert f"{s[1] - s[0]:+.2f} with the zero-point factor 0.9806" in said.found
    assert f"{s[2] - s[0]:+.2f} with the entropy factor 1.0015" in said.found


def test_an_atom_has_nothing_to_scale_and_a_missing_level_is_refused() -> None:
    assert build_model(atom("O", 3, -75.0, level=None), ModelOptions(scale="published")).scale_source == ""
    with pytest.raises(Refused, match="level of theory is not known"):
        build_model(water(level=None), ModelOptions(scale="published"))
    with pytest.raises(UsageError, match="exclude"):
        ModelOptions(scale="published", zpe_scale=1.0)
    assert LEVEL.label == "B3LYP/6-31G*"
