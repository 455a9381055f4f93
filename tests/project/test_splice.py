"""Entries put into existing files: what is theirs changes, every other byte stays, and Cantera reads the result."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import cantera as ct
import pytest

from heatwright.constants import ATMOSPHERE_PA, BAR_PA
from heatwright.findings import Refused
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.project import splice as splice_module
from heatwright.project.splice import Splice, file_pressure_Pa, splice
from heatwright.project.thermo_set import Thermo, ThermoSet, read_entry_file, read_thermo_set
from heatwright.reading.entries import parse_entries
from releases import GRI, dat_text, gri, moved, record, record_text, write_release, yaml_text

NAMES = ("H2O", "CH3OH", "CH4", "CO2", "OH")


@pytest.fixture(scope="module")
def species() -> dict[str, Thermo]:
    return gri(*NAMES)


def release(species: dict[str, Thermo], *names: str, pressure_Pa: float | None = ATMOSPHERE_PA) -> ThermoSet:
    """These species with an enthalpy 2 kJ/mol higher."""
    new = {n: replace(species[n], polynomial=moved(species[n].polynomial, dH_kJ_mol=2.0), pressure_Pa=pressure_Pa) for n
           in names}  # fmt: skip
    return ThermoSet(path="release", kind="nasa7", species=new)


def put(new: ThermoSet, data: bytes, name: str = "a.dat", **options: object) -> Splice:
    return splice(new, parse_entries(data, name), **options)  # type: ignore[arg-type]


def polynomials(data: bytes, name: str) -> dict[str, Nasa7 | None]:
    return {e.name: e.polynomial for e in parse_entries(data, name).entries}


def codes(call: Callable[[], object]) -> list[str]:
    with pytest.raises(Refused) as error:
        call()
    return [f.code for f in error.value.findings]


# --- fixed records -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("newline", ["\n", "\r\n", "\r"])
def test_only_the_lines_of_the_record_change(species: dict[str, Thermo], newline: str) -> None:
    new = release(species, "CH3OH")
    data = ("! caf\xe9\n" + dat_text(species)).replace("\n", newline).encode("latin-1")
    done = put(new, data)
    old_record = record_text("CH3OH", species["CH3OH"]).replace("\n", newline).encode()
    new_record = record_text("CH3OH", new.species["CH3OH"]).replace("\n", newline).encode()
    assert data.count(old_record) == 1
    assert done.data == data.replace(old_record, new_record)
    assert [(c.name, c.kind) for c in done.replaced] == [("CH3OH", "changed")]
    difference = done.replaced[0].difference
    assert difference is not None
    assert difference.ddHf298_kJ_mol == pytest.approx(2.0, abs=1e-5)


def test_each_line_keeps_its_own_line_end_and_what_stands_between(species: dict[str, Thermo]) -> None:
    lines = record_text("CH4", species["CH4"]).splitlines()
    text = f"{lines[0]}\r\n! between\n\n{lines[1]}\n{lines[2]}\r\n{lines[3]}"
    fresh = record_text("CH4", release(species, "CH4").species["CH4"]).splitlines()
    expected = f"{fresh[0]}\r\n! between\n\n{fresh[1]}\n{fresh[2]}\r\n{fresh[3]}"
    assert put(release(species, "CH4"), text.encode()).data == expected.encode()


def test_a_byte_order_mark_stays(species: dict[str, Thermo]) -> None:
    data = b"\xef\xbb\xbf" + record_text("CH4", species["CH4"]).encode()
    done = put(release(species, "CH4"), data)
    assert done.data.startswith(b"\xef\xbb\xbfCH4 ")
    assert len(done.data) == len(data)


def test_a_thermo_block_inside_a_mechanism(species: dict[str, Thermo]) -> None:
    before = "ELEMENTS\nH C O\nEND\nSPECIES\nCH4 CH3OH ! methanol\nH2O\nEND\n"
    after = "REACTIONS CAL/MOLE\nCH3OH=CH4+H2O  1.0E13 0.0 0.0  ! CH4 of old\nEND\n"
    some = {n: species[n] for n in ("CH4", "CH3OH", "H2O")}
    data = f"{before}{dat_text(some)}{after}".encode()
    new = release(species, "CH3OH", "CH4", "CO2")
    done = put(new, data)
    assert done.data == f"{before}{dat_text({**some, **{n: new.species[n] for n in ('CH3OH', 'CH4')}})}{after}".encode()
    assert done.left_out == ("CO2",)
    added = put(new, data, add=True)
    assert added.added == ("CO2",)
    assert added.data == f"{before}{dat_text({**some, **new.species})}{after}".encode()
    assert [f.code for f in added.findings if f.severity == "warn"] == ["not-declared"]


def test_a_record_that_needs_a_continuation(species: dict[str, Thermo]) -> None:
    """Five elements: after & on a line of their own, in the file and in the release."""
    five = replace(species["CH4"], name="X", composition={"C": 1, "H": 2, "O": 1, "N": 1, "S": 1})
    data = f"{record_text('X', five)}{record_text('OH', species['OH'])}".encode()
    assert b"&\n" in data
    new = release({"X": five}, "X")
    done = put(new, data)
    assert done.data == f"{record_text('X', new.species['X'])}{record_text('OH', species['OH'])}".encode()


def test_a_fifth_element_in_its_old_columns_moves_behind_the_ampersand(species: dict[str, Thermo]) -> None:
    five = replace(species["CH4"], name="X", composition={"C": 1, "H": 2, "O": 1, "N": 1, "S": 1})
    lines = record_text("X", replace(five, composition={"C": 1, "H": 2, "O": 1, "N": 1})).splitlines()
    lines[0] = f"{lines[0][:73]}S   1 1"
    done = put(release({"X": five}, "X"), "\n".join(lines).encode())
    assert done.data.decode().splitlines()[1].split() == ["C", "1", "H", "2", "O", "1", "N", "1", "S", "1"]
    assert parse_entries(done.data).entries[0].findings == ()


def test_what_is_the_same_already_is_not_touched(species: dict[str, Thermo]) -> None:
    odd = dat_text(species).replace("G   200.000", "G200.      ")  # readable, and not as it would be written here
    same = ThermoSet(path="r", kind="nasa7", species={"CH4": species["CH4"]})
    done = put(same, odd.encode())
    assert done.data == odd.encode()
    assert (done.same, done.replaced) == (("CH4",), ())


def test_twice_is_once(species: dict[str, Thermo]) -> None:
    new = release(species, *NAMES)
    once = put(new, dat_text(species).encode()).data
    assert put(new, once).data == once


def test_adding_behind_a_last_line_without_an_end(species: dict[str, Thermo]) -> None:
    data = record_text("CH4", species["CH4"]).removesuffix("\n").encode()
    new = release(species, "OH")
    assert put(new, data, add=True).data == data + b"\n" + record_text("OH", new.species["OH"]).encode().removesuffix(
        b"\n"
    )


# --- YAML ----------------------------------------------------------------------------------------------------------


def test_gri_mech_with_one_entry_replaced(species: dict[str, Thermo], tmp_path: Path) -> None:
    data = GRI.read_bytes()
    new = release(species, "CH3OH")
    done = splice(new, read_entry_file(str(GRI)))
    old_lines, new_lines = data.decode().splitlines(), done.data.decode().splitlines()
    start = old_lines.index("- name: CH3OH")
    assert new_lines[: start + 4] == old_lines[: start + 4]
    assert new_lines[start + 8 :] == old_lines[old_lines.index("  transport:", start) :]  # transport data stay
    path = tmp_path / "new.yaml"
    path.write_bytes(done.data)
    gas = ct.Solution(str(path))
    assert (gas.n_species, gas.n_reactions) == (53, 325)
    p = new.species["CH3OH"].polynomial
    assert p is not None
    # another R in Cantera, 8314.462618… J/kmol/K to more digits, is the same here
    assert gas.species("CH3OH").thermo.h(298.15) / ct.gas_constant == pytest.approx(p.h_R(298.15), rel=1e-9)
    assert gas.species("CH3OH").transport is not None


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_yaml_keeps_everything_around_the_thermo_data(species: dict[str, Thermo], newline: str) -> None:
    text = (
        "# caf\xe9\nspecies:\n  - name: CH4  # methane\n    composition: {C: 1, H: 4}\n    thermo:  # old\n"
        "      model: NASA7\n      temperature-ranges: [200.0, 1000.0, 3500.0]\n      data:\n"
        "        - [1, 0, 0, 0, 0, 0, 0]\n        - [2, 0, 0,\n           0, 0, 0, 0]\n      note: old data  # here\n"
        "    note: mine\n    transport: {model: gas}\n\n  - name: OH\n    composition: {O: 1, H: 1}\n"
        "    thermo: {model: NASA7, temperature-ranges: [200, 1000, 3500], data: [[1,0,0,0,0,0,0],[2,0,0,0,0,0,0]]}\n"
        "extra: {a: 1}\n"
    ).replace("\n", newline)
    new = release(species, "CH4", "OH")
    for encoding in ("utf-8", "latin-1"):
        done = put(new, text.encode(encoding), "m.yaml")
        result = done.data.decode(encoding)
        head, tail = text.index("      model"), text.index("  # here")
        assert result.startswith(text[:head])
        assert (
            f"]  # here{newline}    note: mine{newline}    transport: {{model: gas}}{newline}{newline}  - name: OH"
            in result
        )
        assert result.endswith(f"}}{newline}extra: {{a: 1}}{newline}")
        assert text[tail : text.index("    thermo: {model")] in result
        assert result.count("\n") - text.count("\n") == -2  # the second range on one line, no note
        assert result.count("\r\n") == (result.count("\n") if newline == "\r\n" else 0)
        assert polynomials(done.data, "m.yaml") == {n: new.species[n].polynomial for n in ("CH4", "OH")}


def test_a_yaml_file_that_states_its_pressure_gets_it_stated(species: dict[str, Thermo]) -> None:
    data = yaml_text(species, BAR_PA).encode()
    done = put(release(species, "CH4", pressure_Pa=BAR_PA), data, "m.yaml")
    assert done.data.count(b"reference-pressure: 100000.0 Pa") == len(species)
    unstated = put(release(species, "CH4"), yaml_text(species, None).encode(), "m.yaml")
    assert b"reference-pressure" not in unstated.data


def test_adding_to_yaml(species: dict[str, Thermo], tmp_path: Path) -> None:
    path = tmp_path / "h2o2.yaml"
    path.write_bytes((GRI.parent / "h2o2.yaml").read_bytes())
    new = release(species, "CH3OH", "OH")
    done = splice(new, read_entry_file(str(path)), add=True)
    assert (done.added, [c.name for c in done.replaced]) == (("CH3OH",), ["OH"])
    assert [f.code for f in done.findings if f.severity == "warn"] == ["not-declared"]
    path.write_bytes(done.data)
    gas = ct.Solution(str(path), "ohmech")
    assert gas.n_reactions == 29
    assert ct.Species.list_from_file(str(path))[-1].name == "CH3OH"


def test_adding_to_yaml_whose_phase_takes_all(species: dict[str, Thermo]) -> None:
    text = f"phases:\n- {{name: g, thermo: ideal-gas, species: all}}\n{yaml_text({'CH4': species['CH4']}, None)}"
    done = put(release(species, "OH"), text.removesuffix("\n").encode(), "m.yaml", add=True)
    assert done.findings == ()
    assert list(polynomials(done.data, "m.yaml")) == ["CH4", "OH"]


def test_a_bracketed_list_of_species_takes_no_lines(species: dict[str, Thermo]) -> None:
    text = (
        "species: [{name: CH4, composition: {C: 1, H: 4}, thermo: {model: NASA7, temperature-ranges: [200, 1000, 3500],"
        " data: [[1,0,0,0,0,0,0],[2,0,0,0,0,0,0]]}}]\n"
    )
    new = release(species, "CH4", "OH")
    assert codes(lambda: put(new, text.encode(), "m.yaml", add=True)) == ["no-such-entry"]
    assert polynomials(put(new, text.encode(), "m.yaml").data, "m.yaml") == {"CH4": new.species["CH4"].polynomial}


def test_the_record_of_a_release_goes_into_the_note(species: dict[str, Thermo], tmp_path: Path) -> None:
    new = release(species, "CH4").species
    folder = write_release(
        tmp_path / "release", new, {"CH4": record("CH4", new["CH4"])}, standard_pressure_Pa=ATMOSPHERE_PA
    )
    done = put(read_thermo_set(folder), yaml_text(species, None).encode(), "m.yaml")
    (entry,) = parse_entries(done.data, "m.yaml").named("CH4")
    assert entry.note == "heatwright: B3LYP/6-31G*; dHf298 atomization"


# --- standard pressures --------------------------------------------------------------------------------------------


def test_standard_pressures_are_not_mixed(species: dict[str, Thermo]) -> None:
    new = release(species, "CH4", pressure_Pa=BAR_PA)
    stated, silent = yaml_text(species, ATMOSPHERE_PA).encode(), yaml_text(species, None).encode()
    records = dat_text(species).encode()
    assert codes(lambda: put(new, stated, "m.yaml")) == ["pressure-differs"]
    assert codes(lambda: put(new, silent, "m.yaml")) == ["pressure-differs"]  # Cantera takes 1 atm
    assert codes(lambda: put(new, b"! standard pressure 1 atm\n" + records)) == ["pressure-differs"]
    assert codes(lambda: put(new, records, pressure_Pa=ATMOSPHERE_PA)) == ["pressure-differs"]
    assert codes(lambda: put(new, stated, "m.yaml", pressure_Pa=BAR_PA)) == ["pressure-differs"]
    assert put(new, silent, "m.yaml", pressure_Pa=BAR_PA).replaced
    assert put(new, records, pressure_Pa=BAR_PA).findings == ()
    assert [f.code for f in put(new, records).findings] == ["pressure-not-stated"]
    assert put(new, b"! standard pressure 1 bar\n" + records).findings == ()
    unknown = release(species, "CH4", pressure_Pa=None)
    assert [f.code for f in put(unknown, stated, "m.yaml").findings] == ["pressure-not-stated"]
    mixed = release(species, "CH4").species | release(species, "OH", pressure_Pa=BAR_PA).species
    assert codes(lambda: put(replace(new, species=mixed), records)) == ["pressure-differs"]


def test_cantera_refuses_what_is_refused_here(species: dict[str, Thermo], tmp_path: Path) -> None:
    """The reason for the rule: a phase with two standard pressures does not load."""
    both = yaml_text({"CH4": species["CH4"]}, BAR_PA) + yaml_text({"OH": species["OH"]}, ATMOSPHERE_PA).removeprefix(
        "species:\n"
    )
    path = tmp_path / "m.yaml"
    path.write_text(f"phases:\n- {{name: g, thermo: ideal-gas, elements: [C, H, O], species: all}}\n{both}")
    with pytest.raises(ct.CanteraError, match="reference pressure"):
        ct.Solution(str(path))
    with pytest.raises(Refused, match="different standard pressures"):
        file_pressure_Pa(read_entry_file(str(path)))


# --- what is refused -----------------------------------------------------------------------------------------------


def test_other_elements_under_the_same_name(species: dict[str, Thermo]) -> None:
    new = release({"CH4": replace(species["CH4"], composition={"C": 1, "D": 4})}, "CH4")
    assert codes(lambda: put(new, dat_text(species).encode())) == ["other-species"]


def test_a_name_that_is_there_twice(species: dict[str, Thermo]) -> None:
    data = (dat_text(species) * 2).encode()
    assert codes(lambda: put(release(species, "CH4"), data)) == ["duplicate-entry"]
    # other names that are there twice are nobody's business here
    one = (dat_text(species) + dat_text({"OH": species["OH"]})).encode()
    assert len(put(release(species, "CH4"), one).replaced) == 1


def test_an_entry_that_cannot_be_read(species: dict[str, Thermo]) -> None:
    lines = dat_text({"CH4": species["CH4"], "OH": species["OH"]}).splitlines(keepends=True)
    lines[3] = " " * 15 + lines[3][15:]
    data = "".join(lines).encode()
    assert codes(lambda: put(release(species, "CH4"), data)) == ["coefficient-wrong"]
    done = put(release(species, "OH"), data)  # the faulty neighbour stays as it is
    assert "".join(lines[:6]).encode() in done.data


def test_another_thermo_model(species: dict[str, Thermo]) -> None:
    text = "species:\n- name: CH4\n  composition: {C: 1, H: 4}\n  thermo: {model: constant-cp, h0: 1 J/mol}\n"
    text += yaml_text({"OH": species["OH"]}, None).removeprefix("species:\n")
    assert codes(lambda: put(release(species, "CH4"), text.encode(), "m.yaml")) == ["other-model"]


def test_names_asked_for(species: dict[str, Thermo]) -> None:
    data = dat_text({"CH4": species["CH4"], "OH": species["OH"]}).encode()
    new = release(species, "CH4", "OH", "CO2")
    assert [c.name for c in put(new, data, only=["OH"]).replaced] == ["OH"]
    assert codes(lambda: put(new, data, only=["CO2"])) == ["no-such-entry"]
    assert put(new, data, only=["CO2"], add=True).added == ("CO2",)
    assert codes(lambda: put(new, data, only=["ch4"])) == ["no-such-entry"]


def test_a_lock_file_has_nothing_to_put_in(species: dict[str, Thermo], tmp_path: Path) -> None:
    folder = write_release(tmp_path / "release", species)
    locked = read_thermo_set(folder / "thermo.lock.toml")
    assert codes(lambda: put(locked, dat_text(species).encode())) == ["no-release"]


def test_a_release_with_a_broken_entry(species: dict[str, Thermo], tmp_path: Path) -> None:
    lines = dat_text(species).splitlines(keepends=True)
    lines[3] = " " * 15 + lines[3][15:]
    path = tmp_path / "r.dat"
    path.write_text("".join(lines), encoding="utf-8")
    broken = read_thermo_set(path)
    assert codes(lambda: put(broken, dat_text(species).encode())) == ["coefficient-wrong"]
    assert put(broken, dat_text(species).encode(), only=["OH"]).same == ("OH",)


def test_a_name_too_long_for_a_record(species: dict[str, Thermo]) -> None:
    long = {"N" * 19: replace(species["CH4"], name="N" * 19)}
    assert codes(lambda: put(release(long, "N" * 19), dat_text(species).encode(), add=True)) == ["name-unfit"]


def test_a_fraction_has_no_place_in_a_record(species: dict[str, Thermo]) -> None:
    half = {"X": replace(species["CH4"], name="X", composition={"C": 0.5, "H": 4})}
    assert codes(lambda: put(release(half, "X"), dat_text(species).encode(), add=True)) == ["value-unfit"]


def test_comments_above_a_replaced_entry_are_pointed_at(species: dict[str, Thermo]) -> None:
    data = f"! J 3/61, a source\n{record_text('CH4', species['CH4'])}".encode()
    done = put(release(species, "CH4"), data, pressure_Pa=ATMOSPHERE_PA)
    assert done.data.startswith(b"! J 3/61, a source\nCH4")
    assert [f.code for f in done.findings] == ["comment-kept"]


def test_more_digits_than_a_field_has_are_said(species: dict[str, Thermo]) -> None:
    p = species["CH4"].polynomial
    assert p is not None
    long = replace(p, low=(3.141592653589793, *p.low[1:]))
    new = ThermoSet(path="r", kind="yaml", species={"CH4": replace(species["CH4"], polynomial=long)})
    done = put(new, dat_text(species).encode())
    assert [f.code for f in done.findings] == ["value-unfit"]


def test_what_does_not_read_back_is_not_given(species: dict[str, Thermo], monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(splice_module, "replaced_record", lambda file, thermo, entry: b"")
    assert codes(lambda: put(release(species, "CH4"), dat_text(species).encode())) == ["splice-failed"]


def test_a_file_of_fixed_records_is_read_by_cantera(species: dict[str, Thermo], tmp_path: Path) -> None:
    names = ("CH4", "OH", "H2O")
    new = release(species, *names)
    data = put(new, dat_text({n: species[n] for n in names}).encode(), pressure_Pa=ATMOSPHERE_PA).data
    (tmp_path / "t.dat").write_bytes(data)
    done = subprocess.run(
        [sys.executable, "-m", "cantera.ck2yaml", "--thermo=t.dat", "--output=t.yaml"],
        cwd=tmp_path, capture_output=True, text=True, check=False,
    )  # fmt: skip
    assert done.returncode == 0, done.stdout + done.stderr
    for one in ct.Species.list_from_file(str(tmp_path / "t.yaml")):
        p = new.species[one.name].polynomial
        assert p is not None
        assert one.thermo.h(1500.0) / ct.gas_constant == pytest.approx(p.h_R(1500.0), rel=1e-9)
