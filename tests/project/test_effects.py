"""What changed entries do to a mechanism: ln Kc against Cantera's equilibrium constants, flames against Cantera."""

from __future__ import annotations

from dataclasses import replace
from math import exp
from pathlib import Path

import cantera as ct
import numpy as np
import pytest

from heatwright.constants import ATMOSPHERE_PA, BAR_PA
from heatwright.errors import UsageError
from heatwright.findings import Finding, Refused
from heatwright.project import flame as flame_module
from heatwright.project.changes import Comparison, compare_sets
from heatwright.project.effects import MechanismEffect, mechanism_effect
from heatwright.project.flame import Flame, flame, parse_mixture
from heatwright.project.mechanism import Mechanism, read_mechanism
from heatwright.project.splice import splice
from heatwright.project.thermo_set import Thermo, ThermoSet, read_entry_file, read_thermo_set
from releases import GRI, R, gri, moved

AT_K = (500.0, 1000.0, 1500.0, 2000.0)
CHANGES = {
    "CH3OH": {"dH_kJ_mol": 2.0, "dS_J_mol_K": -1.0, "dCp_J_mol_K": 0.5},
    "CH2(S)": {"dH_kJ_mol": -3.0},
    "H2O": {"dS_J_mol_K": 0.4},
}


@pytest.fixture(scope="module")
def mechanism() -> Mechanism:
    return read_mechanism(GRI)


@pytest.fixture(scope="module")
def old() -> ThermoSet:
    return read_thermo_set(GRI)


def altered(old: ThermoSet, *names: str) -> ThermoSet:
    """The side with these species moved."""
    new = {n: replace(t, polynomial=moved(t.polynomial, **CHANGES[n]) if n in names else t.polynomial) for n, t in
           old.species.items()}  # fmt: skip
    return replace(old, path="new", species=new)


def effect_of(old: ThermoSet, new: ThermoSet, mechanism: Mechanism) -> MechanismEffect:
    return mechanism_effect(mechanism, compare_sets(old, new))


def in_cantera(new: ThermoSet, folder: Path) -> ct.Solution:
    """The mechanism with the other side's entries, as Cantera reads the file that splice makes."""
    path = folder / "new.yaml"
    path.write_bytes(splice(new, read_entry_file(str(GRI))).data)
    return ct.Solution(str(path))


@pytest.mark.parametrize("names", [("CH3OH",), ("CH2(S)",), ("H2O",), ("CH3OH", "CH2(S)", "H2O")])
def test_ln_kc_moves_as_in_cantera(
    names: tuple[str, ...], old: ThermoSet, mechanism: Mechanism, tmp_path: Path
) -> None:
    new = altered(old, *names)
    effect = effect_of(old, new, mechanism)
    gases = [ct.Solution(str(GRI)), in_cantera(new, tmp_path)]
    shifts = []
    for T in AT_K:
        for gas in gases:
            gas.TP = T, 101325.0
        shifts.append(np.log(gases[1].equilibrium_constants) - np.log(gases[0].equilibrium_constants))
    expected = np.array(shifts).T
    found = {r.reaction.number: r.dlnKc for r in effect.reactions}
    for number, dlnKc in found.items():
        # nine printed digits of a6 are 1e-7 of H/RT
        assert dlnKc == pytest.approx(expected[number - 1], abs=2e-6)
    silent = [i for i in range(len(expected)) if i + 1 not in found]
    assert np.abs(expected[silent]).max() < 1e-12


@pytest.mark.parametrize("name", ["CH3OH", "CH2(S)", "H2O", "AR", "N2", "H"])
def test_exactly_the_reactions_it_is_in(name: str, old: ThermoSet, mechanism: Mechanism) -> None:
    """Reactant or product by Cantera's own reading of GRI-Mech 3.0; efficiencies and colliders do not count."""
    one = replace(old.species[name], polynomial=moved(old.species[name].polynomial, dH_kJ_mol=1.0))
    effect = effect_of(old, replace(old, species={**old.species, name: one}), mechanism)
    reactions = ct.Solution(str(GRI)).reactions()
    expected = [i for i, r in enumerate(reactions, 1) if name in r.reactants or name in r.products]
    assert sorted(r.reaction.number for r in effect.reactions) == expected
    assert expected
    # an inert partner stands on both sides of CH2(S) + AR <=> CH2 + AR, and Kc does not notice it
    alike = [r for r in effect.reactions if any("both sides" in words for words in r.remarks)]
    assert all(set(r.dlnKc) == {0.0} for r in alike)
    assert len(alike) == sum(r.reactants.get(name) == r.products.get(name) for r in reactions if name in r.reactants)


def test_reverse_rates_move_as_in_cantera(old: ThermoSet, mechanism: Mechanism, tmp_path: Path) -> None:
    new = altered(old, "CH3OH", "CH2(S)")
    effect = effect_of(old, new, mechanism)
    gases = [ct.Solution(str(GRI)), in_cantera(new, tmp_path)]
    for gas in gases:
        gas.TP = 1000.0, 101325.0
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = gases[1].reverse_rate_constants / gases[0].reverse_rate_constants
    for changed in effect.reactions:
        i, factor = changed.reaction.number - 1, changed.reverse_factors[1]
        if gases[0].reaction(i).reversible:
            assert factor == pytest.approx(ratio[i], rel=1e-5)
        else:
            assert factor is None
    beyond = {r.reaction.number for r in effect.beyond(1.3)}
    assert beyond == {
        r.reaction.number
        for r in effect.reactions
        if any(f is not None and max(f, 1 / f) > 1.3 for f in r.reverse_factors)
    }
    assert 0 < len(beyond) < len(effect.reactions)


def test_those_that_move_most_come_first(old: ThermoSet, mechanism: Mechanism) -> None:
    effect = effect_of(old, altered(old, "CH3OH", "CH2(S)", "H2O"), mechanism)
    sizes = [r.largest for r in effect.reactions]
    assert sizes == sorted(sizes, reverse=True)


def made(path: Path, *lines: str) -> Mechanism:
    text = "reactions:\n" + "".join(f"- equation: {line}\n" for line in lines)
    path.write_text(text, encoding="utf-8")
    return read_mechanism(path)


def simple(**changes: float) -> Comparison:
    """CH4 and CH3 with these changes of their enthalpies."""
    a = gri("CH4", "CH3", "H")
    b = {n: replace(t, polynomial=moved(t.polynomial, dH_kJ_mol=changes.get(n, 0.0))) for n, t in a.items()}
    sides = [ThermoSet(path=p, kind="nasa7", species=s) for p, s in (("a", a), ("b", b))]
    return compare_sets(*sides)


def test_kinds_of_reactions(tmp_path: Path) -> None:
    mechanism = made(
        tmp_path / "m.yaml",
        "CH4 <=> CH3 + H",
        "CH4 => CH3 + H",
        "CH4 + H <=> CH3 + H2\n  type: Blowers-Masel",
        "CH4 + X <=> CH4 + Y",
        "H + CH3 + CH4 <=> 2 CH4",
        "X + CH4 (+M) <=> 2 Y (+M)",
        "2 H + CH4 <=> H2 + CH4",
        "X + M <=> Y + M\n  efficiencies: {CH4: 3}",
    )
    effect = mechanism_effect(mechanism, simple(CH4=1.0))
    rows = {r.reaction.number: r for r in effect.reactions}
    assert sorted(rows) == [1, 2, 3, 4, 5, 6]  # in 7 and 8 it only collides
    moves = 1000.0 / (R * 500.0)
    assert [rows[n].dlnKc[0] for n in sorted(rows)] == pytest.approx(
        [moves, moves, moves, 0.0, -moves, moves], abs=1e-6
    )
    assert rows[1].reverse_factors[0] == pytest.approx(exp(-moves), rel=1e-6)
    assert rows[2].reverse_factors == rows[3].reverse_factors == (None,) * 4
    assert rows[2].remarks == ("irreversible: no rate follows from Kc",)
    assert rows[3].remarks == ("the forward rate depends on the enthalpy of reaction and moves as well",)
    assert rows[4].remarks == ("as much of CH4 on both sides",)


def test_equal_shifts_cancel(tmp_path: Path) -> None:
    effect = mechanism_effect(made(tmp_path / "m.yaml", "CH4 <=> CH3 + H"), simple(CH4=1.0, CH3=1.0))
    assert effect.reactions[0].species == ("CH4", "CH3")
    assert effect.reactions[0].dlnKc == pytest.approx([0.0] * 4, abs=1e-6)
    assert effect.beyond(1.0001) == ()


def test_a_small_shift_of_a_partner_is_counted_although_it_is_unchanged(tmp_path: Path) -> None:
    effect = mechanism_effect(made(tmp_path / "m.yaml", "CH4 <=> CH3 + H"), simple(CH4=1.0, CH3=0.009))
    assert effect.reactions[0].species == ("CH4",)
    assert effect.reactions[0].dlnKc[0] == pytest.approx(991.0 / (R * 500.0), abs=1e-6)


def test_species_that_cannot_be_compared_leave_ln_kc_open(tmp_path: Path) -> None:
    a = gri("CH4", "CH3", "H")
    b = {"CH4": a["CH4"], "methyl": replace(a["CH3"], name="methyl"), "H": replace(a["H"], composition={"O": 1})}
    comparison = compare_sets(*(ThermoSet(path="x", kind="nasa7", species=s) for s in (a, b)))
    mechanism = made(tmp_path / "m.yaml", "CH4 <=> CH3 + X", "CH4 <=> H + Y")
    remarks = {r.reaction.number: r for r in mechanism_effect(mechanism, comparison).reactions}
    assert remarks[1].remarks == ("CH3 is called methyl in NEW",)
    assert remarks[2].remarks == ("H is another species in NEW",)
    assert remarks[2].dlnKc == (None,) * 4
    gone = compare_sets(*(ThermoSet(path="x", kind="nasa7", species=s) for s in (a, {"CH4": a["CH4"]})))
    assert mechanism_effect(mechanism, gone).reactions[0].remarks == ("NEW has no entry of CH3",)


def test_temperatures_outside_a_range_stay_open(tmp_path: Path) -> None:
    a = gri("CH4", "CH3", "H")
    p = moved(a["CH4"].polynomial, dH_kJ_mol=1.0)
    b = {**a, "CH4": replace(a["CH4"], polynomial=replace(p, t_high_K=1200.0))}
    comparison = compare_sets(*(ThermoSet(path="x", kind="nasa7", species=s) for s in (a, b)))
    (changed,) = mechanism_effect(made(tmp_path / "m.yaml", "CH4 <=> CH3 + H"), comparison).reactions
    assert [x is None for x in changed.dlnKc] == [False, False, True, True]


def test_a_name_in_other_case_is_pointed_at(tmp_path: Path) -> None:
    effect = mechanism_effect(made(tmp_path / "m.yaml", "ch4 => ch3 + h"), simple(CH4=1.0))
    assert effect.reactions == ()
    assert "The mechanism has ch4" in effect.findings[0].text


# --- flames --------------------------------------------------------------------------------------------------------


def test_the_flame_is_cantera_s(old: ThermoSet, mechanism: Mechanism, tmp_path: Path) -> None:
    new = altered(old, "H2O", "CH3OH")
    found = flame(mechanism, parse_mixture("fuel=CH3OH; oxidizer=O2:1,N2:3.76; phi=0.9; T=350 K; p=2 bar"), old, new)
    assert isinstance(found, Flame)
    reference = []
    for gas in (ct.Solution(str(GRI)), in_cantera(new, tmp_path)):
        gas.set_equivalence_ratio(0.9, "CH3OH:1", "O2:1,N2:3.76")
        gas.TP = 350.0, 2e5
        gas.equilibrate("HP")
        reference.append(gas.T)
    assert (found.old_K, found.new_K) == pytest.approx(reference, abs=1e-3)
    assert abs(reference[1] - reference[0]) > 0.5
    assert found.replaced == (53, 53)


def test_entries_for_another_pressure_burn_the_same(old: ThermoSet, mechanism: Mechanism) -> None:
    """The same species said at 1 bar instead of the mechanism's 1 atm."""
    at_1bar = {
        n: replace(t, polynomial=moved(t.polynomial, dS_J_mol_K=R * np.log(ATMOSPHERE_PA / BAR_PA)), pressure_Pa=BAR_PA)
        for n, t in old.species.items()
    }
    found = flame(mechanism, parse_mixture("fuel=CH4"), old, replace(old, species=at_1bar))
    assert isinstance(found, Flame)
    assert found.new_K == pytest.approx(found.old_K, abs=2e-3)


def test_a_whole_mixture(old: ThermoSet, mechanism: Mechanism) -> None:
    parts = flame(mechanism, parse_mixture("fuel=CH4; phi=1"), old, old)
    whole = flame(mechanism, parse_mixture("mixture=CH4:1,O2:2,N2:7.52"), old, old)
    assert isinstance(parts, Flame)
    assert isinstance(whole, Flame)
    assert parts.old_K == pytest.approx(whole.old_K, abs=1e-3)


def test_why_there_is_no_flame(old: ThermoSet, mechanism: Mechanism, monkeypatch: pytest.MonkeyPatch) -> None:
    mixture = parse_mixture("fuel=CH4")
    bare = replace(old, species={n: replace(t, polynomial=None) for n, t in old.species.items()})
    found = flame(mechanism, mixture, bare, old)
    assert isinstance(found, Finding)
    assert "a lock file has none" in found.text
    with pytest.raises(Refused, match="names C8H18, which phase gri30 does not have"):
        flame(mechanism, parse_mixture("fuel=C8H18"), old, old)
    with pytest.raises(Refused, match="no gas phase"):
        flame(replace(mechanism, phases=()), mixture, old, old)
    other = {**old.species, "CH4": replace(old.species["CH4"], composition={"C": 2, "H": 4})}
    with pytest.raises(Refused, match="other elements or counts"):
        flame(mechanism, mixture, old, replace(old, species=other))
    monkeypatch.setattr(flame_module, "find_spec", lambda name: None)
    found = flame(mechanism, mixture, old, old)
    assert isinstance(found, Finding)
    assert (found.severity, found.code) == ("note", "no-flame")


def test_a_flame_beyond_the_range_is_a_warning(old: ThermoSet, mechanism: Mechanism) -> None:
    p = old.species["H2O"].polynomial
    assert p is not None
    short: dict[str, Thermo] = {
        **old.species,
        "H2O": replace(old.species["H2O"], polynomial=replace(p, t_high_K=2000.0)),
    }
    found = flame(mechanism, parse_mixture("fuel=CH4"), old, replace(old, species=short))
    assert isinstance(found, Flame)
    assert [f.severity for f in found.findings] == ["warn"]
    assert "H2O" in found.findings[0].text


def test_a_mechanism_that_cantera_cannot_read(old: ThermoSet, tmp_path: Path) -> None:
    path = tmp_path / "m.yaml"
    path.write_text(
        "phases:\n- {name: g, thermo: ideal-gas, elements: [H, C], species: [CH4], kinetics: gas}\n"
        "species:\n- {name: CH4, composition: {C: 1, H: 4}}\nreactions:\n- equation: CH4 => CH4\n",
        encoding="utf-8",
    )
    with pytest.raises(Refused, match="Cantera cannot read the mechanism"):
        flame(read_mechanism(path), parse_mixture("mixture=CH4"), old, old)


@pytest.mark.parametrize(
    "text",
    ["", "CH4", "fuel", "fuel=", "fuel=CH4; fuel=CH4", "fuel=CH4; mixture=CH4:1", "mixture=CH4:1; phi=1", "phi=1",
     "fuel=CH4; T=0", "fuel=CH4; T=25 C", "fuel=CH4; p=1 psi", "fuel=CH4:x", "fuel=CH4:-1", "fuel=CH4,CH4",
     "fuel=CH4; phi=0", "fuel=:1", "fuel=CH4; T=1e999", "fuel=CH4; temperature=300"],
)  # fmt: skip
def test_mixtures_that_cannot_be_read(text: str) -> None:
    with pytest.raises(UsageError, match="--mixture"):
        parse_mixture(text)


def test_the_reading_of_a_mixture() -> None:
    mixture = parse_mixture("fuel=CH4:0.9,C2H6:0.1; oxidizer=O2; phi=1.2;T=400 K;p=10bar")
    assert dict(mixture.fuel) == {"CH4": 0.9, "C2H6": 0.1}
    assert dict(mixture.oxidizer) == {"O2": 1.0}
    assert (mixture.phi, mixture.temperature_K, mixture.pressure_Pa) == (1.2, 400.0, 1e6)
    assert str(mixture) == "CH4:0.9, C2H6:0.1 in O2:1, φ = 1.2, 400 K, 1e+06 Pa"
