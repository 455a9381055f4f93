"""The audit of files that everybody knows: what is true of them is found, and what is not true is not said."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from heatwright.audit.audit import Audit, audit_entries
from heatwright.audit.facts import sackur_tetrode_R
from heatwright.audit.published import compare_published
from heatwright.audit.release import compare_release
from heatwright.polynomial.plausibility import ranges_swapped
from heatwright.reading.entries import parse_entries, read_entries
from heatwright.resources import data_rows
from thermo_files import cantera_data

MECHANISMS = (
    "gri30.yaml",
    "nasa_gas.yaml",
    "nDodecane_Reitz.yaml",
    "example_data/n-hexane-NUIG-2015.yaml",
    "example_data/ammonia-CO-H2-Alzueta-2023.yaml",
)


@cache
def audit_of(name: str) -> Audit:
    return audit_entries(read_entries(cantera_data() / name))


def counts(audit: Audit) -> Counter[str]:
    return Counter(f.code for f in audit.all_findings())


def named(audit: Audit, code: str) -> set[str]:
    return {e.entry.name for e in audit.entries if any(f.code == code for f in e.findings)}


def test_gri_mech() -> None:
    audit = audit_of("gri30.yaml")
    assert len(audit.entries) == 53
    assert {"AR", "N2"} <= named(audit, "one-atmosphere")
    assert len(named(audit, "range-start")) == 13
    # real discontinuities, beyond the rounding of the fields, and kinks in nearly all
    assert len(named(audit, "jump-cp")) >= 5
    assert len(named(audit, "jump-slope")) > 40
    assert not any(f.severity == "refuse" for f in audit.all_findings())


def test_nasa_gas() -> None:
    audit = audit_of("nasa_gas.yaml")
    assert len(audit.entries) == 748
    assert counts(audit)["range-start"] == 427  # all of them at 300 K
    assert {e.entry.stated_K[0] for e in audit.entries if e.entry.name in named(audit, "range-start")} == {300.0}
    assert len(named(audit, "jump-cp")) > 10
    # a composition without its charge, and an entropy of Cu+ that no ion has
    assert named(audit, "composition-mismatch") == {"Zn+"}
    assert "Cu+" in named(audit, "entropy-implausible")
    assert not any(f.severity == "refuse" for f in audit.all_findings())


def test_faults_of_a_large_mechanism() -> None:
    audit = audit_of("example_data/n-hexane-NUIG-2015.yaml")
    assert {"C5H9B-A,COOH", "C5H9B-C,DOOH"} <= named(audit, "meets-elsewhere")
    assert {"CHV", "OHV"} <= named(audit, "jump-h")
    assert {"IC4H8O", "CC4H8O"} <= named(audit, "entropy-implausible")
    assert named(audit, "composition-mismatch") == set()


@pytest.mark.parametrize("name", MECHANISMS)
def test_few_entries_of_evaluated_files_are_warned_about(name: str) -> None:
    audit = audit_of(name)
    doubtful = [e for e in audit.entries if e.worst in ("warn", "refuse")]
    assert len(doubtful) <= max(0.06 * len(audit.entries), 7)
    assert named(audit, "unit-mistake") == set()
    assert named(audit, "enthalpy-implausible") == set()


@pytest.mark.parametrize("name", MECHANISMS)
def test_swapped_ranges_are_always_noticed_and_nothing_else_is_taken_for_them(name: str) -> None:
    molecules = [e for e in read_entries(cantera_data() / name).usable if e.ranges == "both" and e.atoms > 1]
    assert len(molecules) > 30
    for e in molecules:
        p = e.polynomial
        assert p is not None
        assert not ranges_swapped(p, e.atoms)
        assert ranges_swapped(replace(p, low=p.high, high=p.low), e.atoms), e.name


def test_condensed_species_are_no_gases() -> None:
    audit = audit_of("nasa_condensed.yaml")
    gases = {e.entry.name for e in audit.entries if e.facts is not None and e.facts.gas}
    assert gases == set()


def test_translational_entropies_of_noble_gases() -> None:
    # JANAF 1998, J/mol/K at 298.15 K and 1 bar
    for mass, entropy in ((4.002602, 126.152), (20.1797, 146.327), (39.948, 154.845)):
        assert sackur_tetrode_R(mass) * 8.31446261815324 == pytest.approx(entropy, abs=0.003)


def test_published_values_of_the_tables_agree_with_tm4513() -> None:
    """The values compared with are not our own: NASA TM-4513 has nearly the same for nearly all species."""
    audit = audit_of("nasa_gas.yaml")
    compared = {e.entry.name: compare_published(e.facts) for e in audit.entries if e.facts is not None}
    found = {name: c for name, c in compared.items() if c}
    assert len(found) > 90
    entropies = [c.difference for cs in found.values() for c in cs if c.what.startswith("S")]
    assert np.median(np.abs(entropies)) < 0.01
    assert np.mean(np.abs(entropies) < 0.5) > 0.9


def test_every_standard_value_has_its_source_and_a_plausible_entropy() -> None:
    for row in data_rows("standard_values"):
        assert row["source"].startswith(("JANAF ", "CEA ")), row
        assert 100.0 < float(row["S298_J_mol_K"]) < 350.0
        assert float(row["Cp298_J_mol_K"]) > 20.7


def test_a_file_against_itself_has_no_residual() -> None:
    file = read_entries(cantera_data() / "gri30.yaml")
    audit = audit_entries(file, against=file)
    residuals = [e.residual for e in audit.entries if e.residual is not None]
    assert len(residuals) == 53
    assert all(r.dcp_R == r.dh298_kJ_mol == r.ds298_J_mol_K == r.dg_kJ_mol == 0.0 for r in residuals)


def test_residuals_are_the_differences_of_the_functions() -> None:
    gri, nasa = (read_entries(cantera_data() / name) for name in ("gri30.yaml", "nasa_gas.yaml"))
    facts = next(e.facts for e in audit_entries(gri).entries if e.entry.name == "OH")
    assert facts is not None
    residual = compare_release(facts, nasa)
    other = nasa.named("OH")[0].polynomial
    assert residual is not None
    assert other is not None
    p = facts.polynomial
    assert residual.range_K == (200.0, 3500.0)
    T = np.arange(200.0, 3501.0, 1.0)
    assert abs(residual.dcp_R) == pytest.approx(np.abs(p.cp_R(T) - other.cp_R(T)).max(), rel=0.01)
    R = 8.31446261815324
    assert residual.dh298_kJ_mol == pytest.approx((p.h_R(298.15) - other.h_R(298.15)) * R / 1000.0)
    g = (p.h_R(T) - other.h_R(T) - T * (p.s_R(T) - other.s_R(T))) * R / 1000.0
    assert abs(residual.dg_kJ_mol) == pytest.approx(np.abs(g).max(), rel=0.01)


def test_entries_pair_by_name_and_composition() -> None:
    gri = read_entries(cantera_data() / "gri30.yaml")
    text = gri.text_of(gri.named("CH4")[0]).replace("C: 1, H: 4", "C: 1, D: 4")
    audit = audit_entries(parse_entries(f"species:\n{text}".encode()), against=gri)
    assert audit.entries[0].residual is None
    assert "not-in-release" in counts(audit)
