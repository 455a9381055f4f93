"""Two sides compared: what moved, by how much and why; removed, renamed, added; thresholds; pressures."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from heatwright.constants import ATMOSPHERE_PA, BAR_PA
from heatwright.errors import UsageError
from heatwright.findings import Refused
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.project.changes import Change, Comparison, Tolerance, compare_sets, parse_tolerance
from heatwright.project.differences import difference
from heatwright.project.lockfile import CP_TEMPERATURES_K, LockedFile, LockedFormation, LockedReference, lock_text
from heatwright.project.reasons import recorded_reasons
from heatwright.project.thermo_set import Thermo, ThermoSet, read_thermo_set
from releases import GRI, R, dat_text, gri, lock, moved, record, write_release, yaml_text

NAMES = ("H2O", "CH3OH", "CH4", "CO2", "OH")


@pytest.fixture(scope="module")
def species() -> dict[str, Thermo]:
    return gri(*NAMES)


def side(species: dict[str, Thermo], path: str = "side") -> ThermoSet:
    return ThermoSet(path=path, kind="nasa7", species=species)


def with_moved(species: dict[str, Thermo], name: str, **amounts: float) -> dict[str, Thermo]:
    one = species[name]
    assert one.polynomial is not None
    return {**species, name: replace(one, polynomial=moved(one.polynomial, **amounts))}


def the(comparison: Comparison, name: str) -> Change:
    (found,) = [c for c in comparison.changes if c.name == name]
    return found


# --- numbers -------------------------------------------------------------------------------------------------------


def test_the_difference_is_what_was_put_in(species: dict[str, Thermo]) -> None:
    new = with_moved(species, "CH3OH", dH_kJ_mol=2.0, dS_J_mol_K=-1.0, dCp_J_mol_K=0.5)
    d = the(compare_sets(side(species), side(new)), "CH3OH").difference
    assert d is not None
    assert d.ddHf298_kJ_mol == pytest.approx(2.0, abs=1e-5)
    assert d.dS298_J_mol_K == pytest.approx(-1.0, abs=1e-5)
    assert d.dCp_J_mol_K == pytest.approx([0.5] * 4, abs=1e-5)
    # ΔG = ΔH + ΔCp (T − T₀) − T [ΔS + ΔCp ln(T/T₀)]
    T, T0 = np.array([500.0, 1000.0, 1500.0, 2000.0]), 298.15
    expected = 2.0 + (0.5 * (T - T0) - T * (-1.0 + 0.5 * np.log(T / T0))) / 1000.0
    assert d.dG_kJ_mol == pytest.approx(expected, abs=1e-5)
    assert d.dG_RT == pytest.approx(1000.0 * expected / (R * T), abs=1e-5)


def test_a_peak_between_the_shown_temperatures_is_seen(species: dict[str, Thermo]) -> None:
    p = species["CH4"].polynomial
    assert p is not None
    # the common temperature moved by 150 K with the same coefficients changes Cp in between only
    new = {**species, "CH4": replace(species["CH4"], polynomial=replace(p, t_common_K=1150.0))}
    change = the(compare_sets(side(species), side(new)), "CH4")
    assert change.kind == "changed"
    assert change.difference is not None
    assert change.difference.dCp_J_mol_K == (0.0, 0.0, 0.0, 0.0)
    assert change.difference.largest_dCp_J_mol_K == pytest.approx(R * abs(p.cp_R(1150.0) - replace(
        p, t_common_K=1150.0).cp_R(1150.0)), rel=1e-9)  # fmt: skip
    assert 1000.0 < (change.difference.largest_at_K or 0.0) <= 1150.0
    assert any("common temperature: 1000 → 1150 K" in words for words in change.reasons)


def test_ranges_are_compared_only_where_both_reach(species: dict[str, Thermo]) -> None:
    p = species["CH4"].polynomial
    assert p is not None
    new = {**species, "CH4": replace(species["CH4"], polynomial=replace(p, t_low_K=300.0, t_high_K=1600.0))}
    change = the(compare_sets(side(species), side(new)), "CH4")
    assert change.kind == "unchanged"
    assert change.difference is not None
    assert change.difference.inside_K == (300.0, 1600.0)
    assert change.difference.dG_kJ_mol == (0.0, 0.0, 0.0, None)
    assert "200 to 3500 K and 300 to 1600 K; compared inside both, 300 to 1600 K" in change.remarks[0]


def test_a_range_without_298_gives_no_values_there(species: dict[str, Thermo]) -> None:
    p = species["CH4"].polynomial
    assert p is not None
    hot = Nasa7(1200.0, 2000.0, 5000.0, p.high, p.high)
    change = the(compare_sets(side(species), side({"CH4": replace(species["CH4"], polynomial=hot)})), "CH4")
    assert change.difference is not None
    assert change.difference.ddHf298_kJ_mol is None
    assert change.difference.dG_kJ_mol[:2] == (None, None)
    assert any("no values at 298.15 K" in words for words in change.remarks)


def test_ranges_that_do_not_meet_leave_nothing_to_compare(species: dict[str, Thermo]) -> None:
    p = species["CH4"].polynomial
    assert p is not None
    cold = {"CH4": replace(species["CH4"], polynomial=replace(p, t_low_K=200.0, t_common_K=250.0, t_high_K=290.0))}
    hot = {"CH4": replace(species["CH4"], polynomial=Nasa7(1200.0, 2000.0, 5000.0, p.high, p.high))}
    change = compare_sets(side(cold), side(hot)).changes[0]
    assert change.kind == "changed"
    assert change.weight == float("inf")
    assert "no temperature in common" in change.remarks[0]


# --- kinds and order -----------------------------------------------------------------------------------------------


def test_the_same_text_is_identical_and_rounding_is_unchanged(species: dict[str, Thermo]) -> None:
    assert {c.kind for c in compare_sets(side(species), side(species)).changes} == {"identical"}
    p = species["H2O"].polynomial
    assert p is not None
    rounded = {**species, "H2O": replace(species["H2O"], polynomial=p.rounded(8))}
    assert the(compare_sets(side(species), side(rounded)), "H2O").kind == "unchanged"


@pytest.mark.parametrize(
    ("amounts", "key"),
    [
        ({"dH_kJ_mol": 0.3}, "H"),
        ({"dS_J_mol_K": 0.3}, "S"),
        ({"dCp_J_mol_K": 0.3}, "Cp"),
        ({"dCp_J_mol_K": -0.3}, "Cp"),
    ],
)
def test_every_tolerance_holds_its_own_quantity(species: dict[str, Thermo], amounts: dict, key: str) -> None:
    new = side(with_moved(species, "CO2", **amounts))
    wide = replace(Tolerance(), H=10.0, S=10.0, Cp=10.0, G=10.0)
    assert the(compare_sets(side(species), new, tolerance=wide), "CO2").kind == "unchanged"
    assert the(compare_sets(side(species), new, tolerance=replace(wide, **{key: 0.2})), "CO2").kind == "changed"
    assert the(compare_sets(side(species), new, tolerance=replace(wide, **{key: 0.4})), "CO2").kind == "unchanged"


def test_gibbs_energy_has_a_tolerance_of_its_own(species: dict[str, Thermo]) -> None:
    new = side(with_moved(species, "CO2", dS_J_mol_K=0.5))  # 1 kJ/mol at 2000 K
    wide = replace(Tolerance(), H=10.0, S=10.0, Cp=10.0)
    assert the(compare_sets(side(species), new, tolerance=replace(wide, G=1.1)), "CO2").kind == "unchanged"
    assert the(compare_sets(side(species), new, tolerance=replace(wide, G=0.9)), "CO2").kind == "changed"


def test_what_matters_most_comes_first(species: dict[str, Thermo]) -> None:
    new = with_moved(species, "CH4", dH_kJ_mol=0.5)
    new = with_moved(new, "OH", dH_kJ_mol=3.0)
    new = with_moved(new, "CO2", dS_J_mol_K=2.0)
    del new["H2O"]
    new["N2"] = gri("N2")["N2"]
    order = [(c.name, c.kind) for c in compare_sets(side(species), side(new)).changes]
    assert order == [
        ("H2O", "removed"), ("OH", "changed"), ("CO2", "changed"), ("CH4", "changed"), ("N2", "added"),
        ("CH3OH", "identical"),
    ]  # fmt: skip


def test_the_same_polynomial_under_another_name_is_a_renaming(species: dict[str, Thermo]) -> None:
    new = {("methanol" if n == "CH3OH" else n): replace(t, name="methanol" if n == "CH3OH" else n) for n, t in
           species.items()}  # fmt: skip
    changes = compare_sets(side(species), side(new)).changes
    assert [(c.name, c.kind) for c in changes if c.kind != "identical"] == [("methanol", "renamed")]
    assert changes[0].reasons == ("renamed: CH3OH → methanol, the same numbers",)


def test_two_candidates_for_a_name_are_no_renaming(species: dict[str, Thermo]) -> None:
    one = species["CH3OH"]
    new = {"a": replace(one, name="a"), "b": replace(one, name="b")}
    kinds = sorted(c.kind for c in compare_sets(side({"CH3OH": one}), side(new)).changes)
    assert kinds == ["added", "added", "removed"]


def test_a_name_in_other_case_is_pointed_at(species: dict[str, Thermo]) -> None:
    new = {"ch4": replace(with_moved(species, "CH4", dH_kJ_mol=1.0)["CH4"], name="ch4")}
    removed = the(compare_sets(side({"CH4": species["CH4"]}), side(new)), "CH4")
    assert removed.kind == "removed"
    assert removed.remarks == ("NEW has ch4: names are case-sensitive",)


def test_other_elements_make_another_species(species: dict[str, Thermo]) -> None:
    new = {**species, "CO2": replace(species["CO2"], composition={"C": 1, "O": 1})}
    change = the(compare_sets(side(species), side(new)), "CO2")
    assert (change.kind, change.moved) == ("other species", True)
    assert change.reasons[0] == "composition changed: C1 O2 → C1 O1"


def test_only_what_both_have(species: dict[str, Thermo]) -> None:
    new = {"CH4": species["CH4"], "N2": gri("N2")["N2"]}
    assert [c.name for c in compare_sets(side(species), side(new), only_common=True).changes] == ["CH4"]


# --- reasons -------------------------------------------------------------------------------------------------------


def test_numbers_alone_tell_what_moved(species: dict[str, Thermo]) -> None:
    def reasons(**amounts: float) -> tuple[str, ...]:
        return the(compare_sets(side(species), side(with_moved(species, "CH4", **amounts))), "CH4").reasons

    assert reasons(dH_kJ_mol=1.5) == ("enthalpy: by the same +1.500 kJ/mol at every temperature",)
    assert "R ln 2 less" in reasons(dS_J_mol_K=-R * np.log(2.0))[0]
    assert "1 bar on one side, 1 atm on the other" in reasons(dS_J_mol_K=-R * np.log(1.01325))[0]
    assert reasons(dCp_J_mol_K=0.5)[0].startswith("heat capacity: by up to 0.50 J/mol/K")


def test_records_name_the_reasons(species: dict[str, Thermo], tmp_path: Path) -> None:
    new = with_moved(species, "CH3OH", dH_kJ_mol=2.0)
    old_records = {n: record(n, t) for n, t in species.items()}
    changed = record(
        "CH3OH",
        new["CH3OH"],
        files=(
            LockedFile("output", "CH3OH.out", "cd" * 32),
            LockedFile("conformer", "CH3OH_b.out", "11" * 32),
        ),
        choices={"frequency_scale": 0.9614},
        conventions={"frequency_scale": 0.9614, "symmetry_number": 3},
        formation=LockedFormation(route="given", source="ATcT 1.112", dHf298_kJ_mol=-198.9),
        references="34" * 32,
    )
    references = tuple(LockedReference(f"atoms/{a}.out", "aa" * 32, f"{a} atom") for a in ("C", "N", "O"))
    other = tuple(replace(r, sha256="bb" * 32) if r.species in ("C atom", "N atom") else r for r in references)
    a = write_release(tmp_path / "old", species, old_records, references=references)
    b = write_release(tmp_path / "new", new, {**old_records, "CH3OH": changed}, references=other, tool="0.2.0")
    comparison = compare_sets(read_thermo_set(a), read_thermo_set(b))
    assert [c.name for c in comparison.changes if c.moved] == ["CH3OH"]
    assert comparison.changes[0].reasons == (
        "output changed: CH3OH.out",
        "conformer added: CH3OH_b.out",
        "options changed: frequency_scale default → 0.9614",
        "symmetry_number changed: 1 → 3",
        "formation changed: by atomization → by given",
        "formation changed: no source → ATcT 1.112",
        "reference changed: atoms/C.out",
        "tool changed: heatwright 0.1.0 → 0.2.0",
    )
    assert comparison.findings == ()


def test_moved_and_exchanged_files_are_told_apart(species: dict[str, Thermo]) -> None:
    old = record("CH4", species["CH4"])
    elsewhere = replace(old, files=(LockedFile("output", "runs/CH4.out", "ab" * 32),))
    another = replace(old, files=(LockedFile("output", "CH4_new.out", "cd" * 32),))
    assert recorded_reasons(old, elsewhere) == ("output moved: CH4.out → runs/CH4.out, the same file",)
    assert recorded_reasons(old, another) == ("output changed: CH4.out → CH4_new.out",)
    assert recorded_reasons(old, replace(old, files=())) == ("output removed: CH4.out",)
    assert recorded_reasons(old, replace(old, level="HF/6-31G*")) == ("level changed: B3LYP/6-31G* → HF/6-31G*",)
    assert recorded_reasons(old, replace(old, temperatures_K=(200.0, 1200.0, 6000.0))) == (
        "range changed: 200-1000-3500 → 200-1200-6000 K",
    )
    assert recorded_reasons(old, replace(old, kept="its output is cut off")) == (
        "kept from an earlier release: its output is cut off",
    )


def test_an_entry_edited_by_hand_has_no_recorded_reason(species: dict[str, Thermo], tmp_path: Path) -> None:
    records = {n: record(n, t) for n, t in species.items()}
    a = write_release(tmp_path / "old", species, records)
    b = write_release(tmp_path / "new", with_moved(species, "CH4", dH_kJ_mol=1.0), records)
    change = compare_sets(read_thermo_set(a), read_thermo_set(b)).changes[0]
    assert (change.name, change.kind) == ("CH4", "changed")
    assert change.reasons[0].startswith("no recorded reason")


# --- lock files ----------------------------------------------------------------------------------------------------


def test_lock_files_are_compared_by_their_tables(species: dict[str, Thermo], tmp_path: Path) -> None:
    new = with_moved(species, "CH3OH", dH_kJ_mol=2.0, dS_J_mol_K=-1.0, dCp_J_mol_K=0.5)
    paths = []
    for name, those in (("a", species), ("b", new)):
        path = tmp_path / f"{name}.lock.toml"
        path.write_text(lock_text(lock({n: record(n, t) for n, t in those.items()})), encoding="utf-8")
        paths.append(path)
    comparison = compare_sets(read_thermo_set(paths[0]), read_thermo_set(paths[1]))
    assert {c.kind for c in comparison.changes if c.name != "CH3OH"} == {"identical"}
    table, exact = the(comparison, "CH3OH").difference, difference(species["CH3OH"], new["CH3OH"])
    assert table is not None
    assert table.ddHf298_kJ_mol == pytest.approx(2.0, abs=1e-4)
    assert table.dCp_J_mol_K[:3] == pytest.approx([0.5] * 3, abs=1e-4)
    assert table.dG_kJ_mol[:3] == pytest.approx(exact.dG_kJ_mol[:3], abs=1e-3)
    assert table.dG_kJ_mol[3] is None  # the table ends at 1500 K


def test_interpolation_in_the_table_is_good_enough_for_a_real_change() -> None:
    """Two real polynomials whose Cp differ in shape: methanol of GRI-Mech 3.0 against one with ethane's Cp curve."""
    a, b = gri("CH3OH")["CH3OH"], gri("C2H6")["C2H6"]
    exact = difference(a, b)
    tables = [
        replace(one, polynomial=None, record=record("x", one), cp_temperatures_K=CP_TEMPERATURES_K) for one in (a, b)
    ]
    table = difference(*tables)
    # ΔCp goes from 8 to 50 J/mol/K here, far more than between two treatments of one molecule
    for x, y in zip(table.dG_kJ_mol[:3], exact.dG_kJ_mol[:3], strict=True):
        assert x == pytest.approx(y, abs=0.15)


def test_a_lock_file_against_a_thermo_file_says_what_the_difference_holds(
    species: dict[str, Thermo], tmp_path: Path
) -> None:
    (tmp_path / "a.lock.toml").write_text(lock_text(lock({"CH4": record("CH4", species["CH4"])})), encoding="utf-8")
    (tmp_path / "b.dat").write_text(dat_text({"CH4": species["CH4"]}), encoding="utf-8")
    change = compare_sets(read_thermo_set(tmp_path / "a.lock.toml"), read_thermo_set(tmp_path / "b.dat")).changes[0]
    assert change.kind == "unchanged"
    assert any("the fit's own error" in words for words in change.remarks)


# --- sides ---------------------------------------------------------------------------------------------------------


def test_both_formats_of_a_release_are_the_same(species: dict[str, Thermo], tmp_path: Path) -> None:
    folder = write_release(tmp_path / "release", species)
    both = compare_sets(read_thermo_set(folder / "thermo.dat"), read_thermo_set(folder / "thermo.yaml"))
    assert {c.kind for c in both.changes} == {"identical"}
    release = read_thermo_set(folder)
    assert (release.kind, release.pressure_Pa, sorted(release.species)) == ("release", BAR_PA, sorted(NAMES))
    assert release.findings == ()


def test_a_release_whose_files_differ_is_a_warning(species: dict[str, Thermo], tmp_path: Path) -> None:
    folder = write_release(tmp_path / "release", species)
    (folder / "thermo.dat").write_text(dat_text(with_moved(species, "OH", dH_kJ_mol=1.0)), encoding="utf-8")
    findings = read_thermo_set(folder).findings
    assert [(f.severity, f.code) for f in findings] == [("warn", "entry-edited")]
    assert "differ in OH" in findings[0].text
    (folder / "thermo.dat").unlink()
    (folder / "thermo.yaml").write_text(yaml_text(gri("OH")), encoding="utf-8")
    assert [f.code for f in read_thermo_set(folder).findings] == ["entry-edited"]


def test_a_release_without_thermo_files_or_without_a_lock_file(species: dict[str, Thermo], tmp_path: Path) -> None:
    folder = write_release(tmp_path / "release", species)
    (folder / "thermo.yaml").unlink()
    assert read_thermo_set(folder).pressure_Pa == BAR_PA  # from the lock file
    (folder / "thermo.lock.toml").unlink()
    assert read_thermo_set(folder).pressure_Pa is None
    (folder / "thermo.dat").unlink()
    with pytest.raises(Refused, match="no-release"):
        read_thermo_set(folder)


def test_a_second_entry_of_a_name_is_a_warning(species: dict[str, Thermo], tmp_path: Path) -> None:
    records = dat_text({"CH4": species["CH4"]}) + dat_text(with_moved(species, "CH4", dH_kJ_mol=1.0))
    path = tmp_path / "a.dat"
    path.write_text(records, encoding="utf-8")
    found = read_thermo_set(path)
    assert [f.code for f in found.findings] == ["duplicate-entry"]
    assert "with other coefficients" in found.findings[0].text


def test_an_entry_that_cannot_be_read_is_neither_removed_nor_added(species: dict[str, Thermo], tmp_path: Path) -> None:
    good, bad = tmp_path / "a.dat", tmp_path / "b.dat"
    good.write_text(dat_text(species), encoding="utf-8")
    lines = dat_text(species).splitlines(keepends=True)
    lines[3] = " " * 15 + lines[3][15:]  # a1 of the high range of H2O
    bad.write_text("".join(lines), encoding="utf-8")
    comparison = compare_sets(read_thermo_set(good), read_thermo_set(bad))
    assert comparison.new.unusable == {"H2O"}
    assert [c.name for c in comparison.changes if c.kind != "identical"] == []
    assert [f.code for f in comparison.findings if f.severity == "refuse"] == ["coefficient-wrong"]


def test_other_standard_pressures_are_taken_out_and_said(species: dict[str, Thermo], tmp_path: Path) -> None:
    at_1atm = {n: replace(t, polynomial=moved(t.polynomial, dS_J_mol_K=-R * np.log(1.01325))) for n, t in
               species.items()}  # fmt: skip
    (tmp_path / "a.yaml").write_text(yaml_text(species, BAR_PA), encoding="utf-8")
    (tmp_path / "b.yaml").write_text(yaml_text(at_1atm, ATMOSPHERE_PA), encoding="utf-8")
    comparison = compare_sets(read_thermo_set(tmp_path / "a.yaml"), read_thermo_set(tmp_path / "b.yaml"))
    assert {c.kind for c in comparison.changes} == {"unchanged"}
    assert [f.code for f in comparison.findings] == ["pressure-differs"]
    (tmp_path / "c.dat").write_text(dat_text(at_1atm), encoding="utf-8")
    silent = compare_sets(read_thermo_set(tmp_path / "a.yaml"), read_thermo_set(tmp_path / "c.dat"))
    assert [f.code for f in silent.findings] == ["pressure-not-stated"]
    assert {c.kind for c in silent.changes} == {"changed"}
    (tmp_path / "c.dat").write_text(f"! standard pressure 1 atm\n{dat_text(at_1atm)}", encoding="utf-8")
    said = compare_sets(read_thermo_set(tmp_path / "a.yaml"), read_thermo_set(tmp_path / "c.dat"))
    assert [f.code for f in said.findings] == ["pressure-differs"]


def test_other_zeros_of_the_elements_are_recognised() -> None:
    species = gri("H2", "O2", "H2O", "OH", "CH4", "CO2", "CO", "CH3OH")
    zeros = {"C": 1.05, "H": 4.234, "O": 4.34}  # H(298.15) − H(0) of the elements for each atom (ATcT), kJ/mol
    new = {
        n: replace(t, polynomial=moved(t.polynomial, dH_kJ_mol=sum(zeros[s] * k for s, k in t.composition.items())))
        for n, t in species.items()
    }
    findings = compare_sets(side(species), side(new)).findings
    assert [f.code for f in findings] == ["enthalpy-scale"]
    assert "C +1.050, H +4.234, O +4.340" in findings[0].text
    spoiled = with_moved(new, "CO2", dH_kJ_mol=1.0)
    assert compare_sets(side(species), side(spoiled)).findings == ()


def test_the_reading_of_a_tolerance() -> None:
    assert parse_tolerance("H=0.5, S=0.1,Cp=0.2,G=1,flame=3") == Tolerance(0.5, 0.1, 0.2, 1.0, 3.0)
    for text in ("", "H", "H=", "H=-1", "H=nan", "X=1", "H=1,H=2", "h=1", "H=inf"):
        with pytest.raises(UsageError, match="--tolerance"):
            parse_tolerance(text)


def test_gri_mech_against_itself_is_the_same() -> None:
    same = compare_sets(read_thermo_set(GRI), read_thermo_set(GRI))
    assert {c.kind for c in same.changes} == {"identical"}
    assert len(same.changes) == 53
