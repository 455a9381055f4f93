"""Each check of an entry, provoked by one fault in an entry that is otherwise sound.

The sound ones are methane, argon, water and nitrogen dioxide of GRI-Mech 3.0 and NASA TM-4513 as shipped with Cantera.
"""

from __future__ import annotations

import subprocess
import sys
from dataclasses import replace
from functools import cache
from math import log

import numpy as np
import pytest

from heatwright.audit.audit import Audit, audit_entries
from heatwright.audit.published import ATMOSPHERE_SHIFT
from heatwright.constants import ATMOSPHERE_PA, BAR_PA, GAS_CONSTANT_J_MOL_K
from heatwright.findings import Finding
from heatwright.polynomial.fit import fit_nasa7
from heatwright.polynomial.nasa7 import Coefficients, Nasa7
from heatwright.reading.entries import parse_entries, read_entries
from thermo_files import cantera_data, record, section, species

R = GAS_CONSTANT_J_MOL_K
COMPOSITIONS: dict[str, dict[str, float]] = {
    "CH4": {"C": 1, "H": 4}, "AR": {"Ar": 1}, "N2": {"N": 2}, "H2O": {"H": 2, "O": 1}, "NH3": {"N": 1, "H": 3},
}  # fmt: skip


@cache
def smooth(name: str) -> Nasa7:
    """The polynomial of GRI-Mech 3.0, refitted without its kink on 200 to 3000 K and with S at 1 bar."""
    p = read_entries(cantera_data() / "gri30.yaml").named(name)[0].polynomial
    assert p is not None
    s298 = {"AR": 154.845, "N2": 191.609}.get(name, p.s_R(298.15, extrapolate=True) * R) / R
    h298 = {"N2": 0.0}.get(name, p.h_R(298.15, extrapolate=True))
    fit = fit_nasa7(lambda T: p.cp_R(T, extrapolate=True), h298, s298, t_low_K=200.0, t_high_K=3000.0)
    return fit.polynomial


def shifted(p: Nasa7, which: str, **changes: float) -> Nasa7:
    """*p* with a₁…a₇ of one or both ranges (``low``, ``high``, ``both``) moved."""
    moved = {}
    for name in ("low", "high") if which == "both" else (which,):
        row = list(getattr(p, name))
        for key, value in changes.items():
            row[int(key[1]) - 1] += value
        moved[name] = tuple(row)
    return replace(p, **moved)  # type: ignore[arg-type]


def times(p: Nasa7, factor: float) -> Nasa7:
    def row(a: Coefficients) -> Coefficients:
        a1, a2, a3, a4, a5, a6, a7 = (factor * x for x in a)
        return a1, a2, a3, a4, a5, a6, a7

    return replace(p, low=row(p.low), high=row(p.high))


def audited(*entries: tuple[str, Nasa7], phase: str = "G", **compositions: dict[str, float]) -> Audit:
    """The audit of a file of fixed records."""
    known = COMPOSITIONS | compositions
    text = "\n".join(record(name, known[name.split("_")[0]], p, phase) for name, p in entries)
    return audit_entries(parse_entries(section(text), "therm.dat"), published=False)


def said(audit: Audit) -> dict[str, str]:
    return {f.code: f.severity for f in audit.all_findings()}


def only(audit: Audit, code: str) -> Finding:
    (finding,) = [f for f in audit.all_findings() if f.code == code]
    return finding


def test_sound_entries_have_no_finding() -> None:
    assert said(audited(*((name, smooth(name)) for name in COMPOSITIONS))) == {}


# --- the joint -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("change", "code", "severity"),
    [
        ({"a1": 1e-3}, "jump-cp", "note"),  # 1e-4 of Cp
        ({"a1": 0.02}, "jump-cp", "warn"),  # 0.2 %: more than flow solvers like
        ({"a1": 0.2}, "jump-cp", "warn"),  # 2 %: combustion codes complain
        ({"a1": 2.0}, "jump-cp", "refuse"),  # 20 %
        ({"a6": 0.1}, "jump-h", "note"),
        ({"a6": 2.0}, "jump-h", "warn"),  # 0.2 K of Cp
        ({"a6": 20.0}, "jump-h", "warn"),
        ({"a6": 200.0}, "jump-h", "refuse"),  # 20 K of Cp
        ({"a7": 1e-3}, "jump-s", "note"),
        ({"a7": 0.02}, "jump-s", "warn"),
        ({"a7": 0.5}, "jump-s", "refuse"),
    ],
)
def test_jumps_by_size(change: dict[str, float], code: str, severity: str) -> None:
    p = smooth("CH4")
    broken = shifted(p, "high", **change)
    if "a1" in change:
        # a step in Cp alone: H and S keep meeting
        step, T = change["a1"], p.t_common_K
        broken = shifted(broken, "high", a6=-step * T, a7=-step * log(T))
    assert said(audited(("CH4", broken)))[code] == severity


def test_words_name_the_threshold() -> None:
    p = smooth("CH4")
    assert "Combustion codes complain" in only(audited(("CH4", shifted(p, "high", a6=20.0))), "jump-h").action
    finding = only(audited(("CH4", shifted(p, "high", a6=2.0))), "jump-h")
    assert "Flow solvers" in finding.action
    assert "CH4: H jumps by +0.0166 kJ/mol (worth 0.23 K of Cp) at 1000 K" in finding.found


def test_cantera_complains_at_load_where_the_audit_says_so() -> None:
    """The thresholds are Cantera's own: just below none, just above a warning at load (run in its own process)."""
    p, T = smooth("CH4"), 1000.0
    cp = p.cp_R(T)
    for step, complains in ((0.008 * cp, False), (0.012 * cp, True)):
        q = shifted(p, "high", a1=step, a6=-step * T, a7=-step * log(T))
        text = "species:\n" + species("CH4", COMPOSITIONS["CH4"], q) + "\n"
        code = (
            "import cantera as ct, sys;"
            "ct.Solution(thermo='ideal-gas', species=ct.Species.list_from_yaml(sys.argv[1], 'species'))"
        )
        done = subprocess.run([sys.executable, "-c", code, text], capture_output=True, text=True, check=True)
        assert ("discontinuity" in done.stderr.lower()) == complains
        words = only(audited(("CH4", q)), "jump-cp").action
        assert ("Combustion codes complain" in words) == complains


def test_a_kink_is_a_note_and_a_large_one_a_warning() -> None:
    p = smooth("CH4")

    def bent(slope: float) -> Nasa7:
        T = p.t_common_K
        return shifted(p, "high", a2=slope, a1=-slope * T, a6=slope * T * T / 2, a7=slope * (T * log(T) - T))

    assert said(audited(("CH4", bent(1e-4)))) == {"jump-slope": "note"}
    assert said(audited(("CH4", bent(6e-3))))["jump-slope"] == "warn"


def test_a_wrong_common_temperature_is_recognised() -> None:
    p = replace(smooth("CH4"), t_common_K=1400.0)
    audit = audited(("CH4", p))
    assert {"jump-cp", "meets-elsewhere"} <= set(said(audit))
    assert "meet at 1000 K, not at the common temperature, 1400 K" in only(audit, "meets-elsewhere").found


# --- values ----------------------------------------------------------------------------------------------------------


def test_heat_capacity_bounds() -> None:
    p = smooth("CH4")
    assert said(audited(("CH4", shifted(p, "both", a1=-4.5))))["cp-not-positive"] == "refuse"
    assert said(audited(("CH4", shifted(p, "both", a1=-1.2))))["cp-below-least"] == "warn"
    assert said(audited(("CH4", shifted(p, "both", a1=4.0))))["cp-above-classical"] == "warn"
    high = only(audited(("CH4", shifted(p, "both", a1=25.0))), "cp-above-classical")
    assert high.severity == "refuse"
    assert "1.1 times the classical limit of its atoms, 13.5" in high.expected


def test_a_falling_heat_capacity() -> None:
    p = smooth("CH4")
    bend = shifted(p, "high", a2=-3.2e-3, a1=3.2, a6=-1600.0, a7=3.2e-3 * 1000 - 3.2 * log(1000.0))
    assert said(audited(("CH4", bend)))["cp-falls"] == "warn"


@pytest.mark.parametrize("a7", [-5.0, +15.0])
def test_entropy_for_the_atom_count(a7: float) -> None:
    assert said(audited(("CH4", shifted(smooth("CH4"), "both", a7=a7)))) == {"entropy-implausible": "warn"}


def test_heat_capacity_for_the_atom_count() -> None:
    audit = audited(("CH4", smooth("CH4")), CH4={"C": 6, "H": 14})
    assert said(audit)["cp-implausible"] == "warn"


def test_the_range() -> None:
    p = smooth("CH4")
    assert said(audited(("CH4", replace(p, t_low_K=300.0)))) == {"range-start": "note"}
    assert said(audited(("CH4", replace(p, t_low_K=400.0)))) == {"range-start": "warn"}
    assert said(audited(("CH4", replace(p, t_high_K=2000.0)))) == {"range-end": "note"}


@pytest.mark.parametrize(("h", "severity"), [(0.05, "note"), (2.0, "warn")])
def test_an_element_with_an_enthalpy_of_formation(h: float, severity: str) -> None:
    audit = audited(("N2", shifted(smooth("N2"), "both", a6=h * 1000.0 / R)))
    assert said(audit) == {"element-enthalpy": severity}


def test_an_element_whose_comment_says_that_it_is_computed() -> None:
    p = shifted(smooth("N2"), "both", a6=2000.0 / R)
    value = p.h_R(298.15) * R / 1000.0
    comment = f"! N2: computed\n! dHf(298.15 K) = {value:.3f}, dHf(0 K) = 2.0 kJ/mol, atomization\n"
    audit = audit_entries(parse_entries(section(comment + record("N2", {"N": 2}, p))))
    assert said(audit) == {"element-enthalpy": "note"}


def test_an_excited_state_is_no_element_in_its_reference_state() -> None:
    p = shifted(smooth("N2"), "both", a6=1000.0)
    assert "element-enthalpy" not in said(audited(("N2_star", p)))


def test_enthalpies_that_no_molecule_has() -> None:
    p = smooth("CH4")
    assert said(audited(("CH4", shifted(p, "both", a6=3e5)))) == {"enthalpy-implausible": "warn"}


def test_the_enthalpy_after_the_coefficients() -> None:
    lines = record("CH4", COMPOSITIONS["CH4"], smooth("CH4")).split("\n")
    lines[3] = lines[3][:60] + "-9.10000000E+03" + lines[3][75:]
    audit = audit_entries(parse_entries(section(*lines)))
    assert said(audit) == {"stated-enthalpy": "warn"}
    lines[3] = lines[3][:60] + f"{smooth('CH4').h_R(298.15):15.8E}" + lines[3][75:]
    assert said(audit_entries(parse_entries(section(*lines)))) == {}


# --- units and pressure ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", list(COMPOSITIONS))
@pytest.mark.parametrize("factor", [R, R / 4.184, 1.0 / R, 4.184 / R])
def test_coefficients_in_other_units(name: str, factor: float) -> None:
    audit = audited((name, times(smooth(name), factor)))
    finding = only(audit, "unit-mistake")
    assert finding.severity == "refuse"
    assert f"{factor:.4g}" in finding.found


@pytest.mark.parametrize("factor", [4.184, 1.0 / 4.184, R, 1.0 / R])
def test_the_enthalpy_alone_in_other_units(factor: float) -> None:
    p = smooth("H2O")
    h = p.h_R(298.15)
    audit = audited(("H2O", shifted(p, "both", a6=h * (factor - 1.0))))
    assert only(audit, "unit-mistake").severity == "refuse"


def test_entropies_at_one_atmosphere() -> None:
    shift = -log(ATMOSPHERE_PA / BAR_PA)
    assert said(audited(("AR", shifted(smooth("AR"), "both", a7=shift)))) == {"one-atmosphere": "note"}
    # stated as 1 atm it is right, and the value at 1 bar is not
    for a7, expected in ((shift, set()), (0.0, set()), (2.0 * shift, {"one-atmosphere"})):
        text = species("AR", {"Ar": 1}, shifted(smooth("AR"), "both", a7=a7), "reference-pressure: 1 atm")
        found = said(audit_entries(parse_entries(f"species:\n{text}\n".encode())))
        assert set(found) == expected
    assert pytest.approx(0.1094, abs=5e-5) == ATMOSPHERE_SHIFT


def test_pressures_of_a_yaml_file() -> None:
    ar, n2 = (species(n, COMPOSITIONS[n], smooth(n)) for n in ("AR", "N2"))
    silent = audit_entries(parse_entries(f"species:\n{ar}\n{n2}\n".encode()))
    assert said(silent) == {"pressure-not-stated": "note"}
    stated = [
        species(n, COMPOSITIONS[n], smooth(n), f"reference-pressure: {p}")
        for n, p in (("CH4", "1 bar"), ("H2O", "101325 Pa"))
    ]
    mixed = audit_entries(parse_entries("\n".join(["species:", *stated, ""]).encode()))
    assert said(mixed)["pressure-not-stated"] == "warn"


# --- names and doubles -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "composition", "wrong"),
    [
        ("CH3OH", {"C": 1, "H": 3, "O": 1}, True),
        ("CH3OH", {"C": 1, "H": 4, "O": 1}, False),
        ("C2H5", {"C": 2, "H": 6}, True),
        ("NC7H16", {"C": 7, "H": 16}, False),
        ("CC4H8O", {"C": 4, "H": 8, "O": 1}, False),
        ("CH2(S)", {"C": 1, "H": 2}, False),
        ("CH3C(CH3)2CH3", {"C": 5, "H": 12}, False),
        ("CH3C(CH3)2CH3", {"C": 5, "H": 11}, True),
        ("C6H101", {"C": 6, "H": 10}, False),
        ("CO", {"Co": 1}, False),
        ("PROPANE", {"C": 3, "H": 8}, False),
        ("NO+", {"N": 1, "O": 1}, True),
        ("NO+", {"N": 1, "O": 1, "E": -1}, False),
        ("A1-", {"C": 6, "H": 5}, False),
    ],
)
def test_names_that_are_formulas(name: str, composition: dict[str, float], wrong: bool) -> None:
    audit = audit_entries(parse_entries(section(record(name, composition, smooth("CH4")))))
    assert ("composition-mismatch" in said(audit)) == wrong


def test_doubles() -> None:
    p = smooth("CH4")
    other = shifted(p, "both", a6=10.0)
    assert said(audited(("CH4", p), ("CH4", p))) == {"duplicate-entry": "warn"}
    assert said(audited(("CH4", p), ("CH4", other))) == {"duplicate-entry": "refuse"}
    assert said(audited(("CH4", p), ("ch4", other), ch4=COMPOSITIONS["CH4"])) == {"duplicate-entry": "note"}


def test_the_same_coefficients_under_two_names() -> None:
    p = smooth("CH4")
    assert said(audited(("CH4", p), ("CH4_b", p))) == {"same-coefficients": "note"}
    two = audited(("CH4", p), ("SiH4", p), SiH4={"Si": 1, "H": 4})
    assert only(two, "same-coefficients").severity == "warn"
    assert "which is CH4" in only(two, "same-coefficients").found


def test_condensed_species_are_not_measured_as_gases() -> None:
    water = Nasa7(
        200.0, 273.15, 300.0, (5.0, 0.0, 0.0, 0.0, 0.0, -3.6e4, -17.9), (5.1, 0.0, 0.0, 0.0, 0.0, -3.6e4, -18.0)
    )
    assert set(said(audited(("H2O_s", water), phase="S"))) <= {"jump-cp", "jump-s", "jump-h"}


def test_every_finding_is_at_its_line() -> None:
    p = shifted(smooth("CH4"), "high", a6=20.0)
    audit = audited(("N2", smooth("N2")), ("CH4", p))
    assert only(audit, "jump-h").where == "therm.dat:7"


def test_the_grid_sees_the_ends_of_both_ranges() -> None:
    p = smooth("CH4")
    facts = audited(("CH4", p)).entries[0].facts
    assert facts is not None
    assert facts.T_K[0] == p.t_low_K
    assert facts.T_K[-1] == p.t_high_K
    assert np.count_nonzero(p.t_common_K == facts.T_K) == 2


def test_values_that_are_wrong_in_another_way_are_not_blamed_on_units() -> None:
    atom: Coefficients = (2.5, 0.0, 0.0, 0.0, 0.0, -745.0, 4.4)
    found = said(audited(("CH3Cl", Nasa7(200.0, 1000.0, 6000.0, atom, atom)), CH3Cl={"C": 1, "H": 3, "Cl": 1}))
    assert "unit-mistake" not in found
    assert {"cp-below-least", "entropy-implausible", "cp-implausible"} <= set(found)
