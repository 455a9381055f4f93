"""The written text: column by column, through Cantera's readers, and refused where it would not fit."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from entries import cantera_reads, entry_of, heap, text_of
from heatwright import ModelOptions
from heatwright.entry import FitOptions
from heatwright.findings import Refused
from heatwright.writing import numbers
from heatwright.writing.comment import ascii_text
from heatwright.writing.formats import FORMATS
from molecules import atom, molecule, water

R = 8.31446261815324
TEMPERATURES = [300.0, 1000.0, 3000.0]
PENTANE_LIKE = "C C C H H H F Cl O N"


def record_lines(text: str) -> list[str]:
    return [line for line in text.splitlines() if len(line) >= 80 and line[79:80] in "1234" and line[0] != "!"]


def read_columns(text: str) -> dict:
    """A reader of one record by the columns of the format's table (A18 A6 4(A2,I3) A1 F10 F10 F8, then 5E15.8)."""
    first, *rest = record_lines(text)
    assert [line[79] for line in (first, *rest)] == ["1", "2", "3", "4"]
    cells = [line[i : i + 15] for line in rest for i in range(0, 75, 15)]
    numbers_read = [float(cell) for cell in cells if cell.strip()]
    elements = [(first[i : i + 2].strip(), first[i + 2 : i + 5]) for i in range(24, 44, 5)]
    return {
        "name": first[:18].strip(),
        "date": first[18:24],
        "elements": {symbol: int(count) for symbol, count in elements if symbol},
        "phase": first[44],
        "T": [float(first[45:55]), float(first[65:73]), float(first[55:65])],
        "high": numbers_read[:7],
        "low": numbers_read[7:14],
    }


def test_columns_of_the_record() -> None:
    made = entry_of(water(), "H2O", "-241.822 kJ/mol")
    record = read_columns(text_of("nasa7", made))
    assert record["name"] == "H2O"
    assert record["elements"] == {"H": 2, "O": 1}
    assert record["phase"] == "G"
    assert record["T"] == [200.0, 1000.0, 6000.0]
    assert record["low"] == list(made.polynomial.low)
    assert record["high"] == list(made.polynomial.high)


def test_a_file_of_records_has_head_and_end_and_is_plain_ascii() -> None:
    text = text_of("nasa7", entry_of(water(file="Öl/wasser°.out"), "H2O"))
    lines = text.splitlines()
    assert lines[0] == "THERMO ALL"
    assert lines[1] == "   200.000  1000.000  6000.000"
    assert lines[-1] == "END"
    assert text.isascii()
    assert text.endswith("END\n")
    assert max(map(len, lines)) <= 88
    assert "explosion" in text


MOLECULES = {
    "water": (water(), "H2O", {"H": 2, "O": 1}),
    "atom": (atom("O", 3, -75.0), "O", {"O": 1}),
    "five elements": (heap(PENTANE_LIKE), "C3H3FClON", {"C": 3, "H": 3, "F": 1, "Cl": 1, "O": 1, "N": 1}),
    "two-letter symbols": (heap("Si Cl Br F"), "SiClBrF", {"Si": 1, "Cl": 1, "Br": 1, "F": 1}),
    "three digits": (heap(" ".join(["C"] * 60 + ["H"] * 122)), "C60H122", {"C": 60, "H": 122}),
    "four digits": (heap(" ".join(["H"] * 1002)), "H1002", {"H": 1002}),
    "cation": (heap("N H H H H", charge=1), "NH4+", {"N": 1, "H": 4, "E": -1}),
    "anion": (heap("O H", charge=-1).but(wavenumbers_cm1=np.array([3700.0])), "OH-", {"O": 1, "H": 1, "E": 1}),
    "name of 18 characters": (water(), "ABCDEFGHIJKLMNOPQR", {"H": 2, "O": 1}),
    "nitric oxide": (heap("N O", multiplicity=2).but(wavenumbers_cm1=np.array([1876.0])), "NO", {"N": 1, "O": 1}),
}


@pytest.mark.parametrize("format_name", ["nasa7", "yaml"])
def test_cantera_reads_it_without_a_warning(format_name: str, tmp_path: Path) -> None:
    made = {name: entry_of(m, name, "12.5 kJ/mol") for m, name, _ in MOLECULES.values()}
    read = cantera_reads(text_of(format_name, *made.values()), format_name, tmp_path, TEMPERATURES)
    assert set(read) == set(made)
    for _, name, composition in MOLECULES.values():
        row, entry = read[name], made[name]
        assert row["composition"] == composition
        assert row["T"] == [200.0, 6000.0]
        assert row["p"] == (1.0e5 if format_name == "yaml" else 101325.0)  # the record carries no pressure
        table = entry.model.tabulate(np.array(TEMPERATURES))
        for i, T in enumerate(TEMPERATURES):
            cp, h, s = (value / 1000.0 for value in row["values"][i])
            residuals = entry.quality
            assert abs(cp - table.cp_J_mol_K[i]) / R <= residuals.dcp_R.largest * 1.001 + 1e-9
            enthalpy = 12.5 + table.h_minus_h298_kJ_mol[i]
            assert abs(h / 1000.0 - enthalpy) * 1000.0 / (R * T) <= residuals.dh_RT.largest * 1.001 + 1e-9
            assert abs(s - table.s_J_mol_K[i]) / R <= residuals.ds_R.largest * 1.001 + 1e-9


@pytest.mark.parametrize("fit", [FitOptions(298.15, 900.0, 3000.0), FitOptions(300.0, 1382.25, 5000.0)])
@pytest.mark.parametrize("format_name", ["nasa7", "yaml"])
def test_other_temperatures(format_name: str, fit: FitOptions, tmp_path: Path) -> None:
    text = text_of(format_name, entry_of(water(), "H2O", "-241.822 kJ/mol", fit))
    row = cantera_reads(text, format_name, tmp_path, [300.0, 3000.0])["H2O"]
    assert row["T"] == [fit.t_low_K, fit.t_high_K]


def test_one_atmosphere_is_in_the_yaml_and_in_the_comment(tmp_path: Path) -> None:
    entry = entry_of(water(), "H2O", model=ModelOptions(pressure_Pa=101325.0))
    assert cantera_reads(text_of("yaml", entry), "yaml", tmp_path, [300.0])["H2O"]["p"] == 101325.0
    assert "! standard pressure 1 atm" in text_of("nasa7", entry).splitlines()


def test_the_comment_says_what_stands_behind_the_entry() -> None:
    entry = entry_of(water(), "H2O", "-241.822 +/- 0.03 kJ/mol", model=ModelOptions(frequency_scale=0.9614))
    comment = " ".join(line[2:].strip() for line in text_of("nasa7", entry).splitlines() if line.startswith("!"))
    for words in (
        "from H2O.out",
        "sha256 " + "0" * 64,
        "NWChem 7.0.2, B3LYP/6-31G*",
        "scale factors 0.9614 (thermal functions) and 1 (zero-point energy)",
        "C2v, symmetry number 2",
        "dHf(298.15 K) = -241.822 +/- 0.03",
        "given: made for a test",
        "standard pressure 1 bar",
        "largest residuals dCp/R",
        "no such polynomial has dCp/R below",
    ):
        assert words in comment


def test_same_inputs_same_bytes() -> None:
    for name in FORMATS:
        assert text_of(name, entry_of(water(), "H2O")) == text_of(name, entry_of(water(), "H2O"))


def test_json_is_what_the_document_says() -> None:
    document = json.loads(text_of("json", entry_of(water(), "H2O", "-241.822 kJ/mol")))
    assert document["heatwright"] == 1
    (species,) = document["species"]
    for key in (
        "name", "formula", "composition", "charge", "multiplicity", "point_group", "symmetry_number", "optical_isomers",
        "rotational_constants_cm-1", "wavenumbers_cm-1", "frequency_scale", "zpe_scale", "zpe_kJ_mol",
        "standard_pressure_bar", "formation", "energy_hartree", "energy_kind", "masses", "low_modes",
        "electronic_levels_cm-1", "torsions", "H298_minus_H0_kJ_mol", "table", "nasa7", "residuals", "source",
        "findings",
    ):  # fmt: skip
        assert key in species
    table, residuals = species["table"], species["residuals"]
    assert len(set(map(len, (table[k] for k in table if k != "contributions")))) == 1
    total = np.sum([share["S_J_mol_K"] for share in table["contributions"].values()], axis=0)
    np.testing.assert_allclose(total, table["S_J_mol_K"], rtol=1e-10)
    assert 0.0 < residuals["minimax_dCp_R"] <= residuals["max_dCp_R"]
    assert species["nasa7"]["T_K"] == [200.0, 1000.0, 6000.0]
    assert document["failed"] == []


def test_csv_has_a_row_for_each_temperature_and_an_empty_cell_for_an_absent_contribution() -> None:
    lines = text_of("csv", entry_of(atom("O", 3, -75.0), "O"), entry_of(water(), "A,B")).splitlines()
    cells = [line.count(",") for line in lines]
    assert lines[0].startswith("species,T_K,Cp_J_mol_K,")
    assert lines[1].startswith("O,200.0,")
    assert any(line.startswith('"A,B",298.15,') for line in lines)
    assert set(cells) == {cells[0], cells[0] + 1}  # one more comma inside the quoted name


@pytest.mark.parametrize(
    "name",
    [
        "ABCDEFGHIJKLMNOPQRS",
        "H2 O",
        "",
        "naïve",
        "a!b",
        "X&",
        "tab\t",
        "END",
        "end",
        "Reactions",
        "THERMO",
        "spec",
        "REAC-1",
    ],
)
def test_names_that_cannot_stand_in_the_record(name: str) -> None:
    (finding,) = FORMATS["nasa7"].name_findings(name)
    assert finding.code == "name-unfit"
    assert finding.severity == "refuse"


@pytest.mark.parametrize("name", ["CH3OH", "ENDO", "trans-C4H8", "C2H5-OH", "CH2(S)", "NH4+", "nC7H16", "a" * 18])
def test_names_that_can(name: str) -> None:
    assert FORMATS["nasa7"].name_findings(name) == ()


@given(st.floats(allow_nan=True, allow_infinity=True))
def test_a_coefficient_never_leaves_its_field(value: float) -> None:
    size = abs(value)
    assume(not 9.9e-100 < size < 1e-99)  # rounds up into the field or not
    assume(not 9.99999999e99 < size < 1e100)
    if size == 0.0 or 1e-99 <= size <= 9.99999999e99:
        text = numbers.coefficient(value)
        assert len(text) == 15
        assert float(text) == pytest.approx(value, rel=6e-9)
    else:
        with pytest.raises(Refused, match="value-unfit"):
            numbers.coefficient(value)


@given(st.floats(-1e7, 1e7), st.integers(0, 4))
def test_a_fixed_field_reads_back_or_is_refused(value: float, decimals: int) -> None:
    try:
        text = numbers.fixed(value, 10, decimals)
    except Refused:
        assert len(f"{value:.{decimals}f}") > 10 or round(value, decimals) != value
    else:
        assert len(text) == 10
        assert float(text) == value


@given(st.dictionaries(st.sampled_from(["C", "H", "O", "N", "Cl", "Si", "E"]), st.integers(-3, 1500), min_size=1))
def test_element_fields_or_the_continuation_hold_the_composition(atoms: dict[str, int]) -> None:
    field, rest = numbers.element_fields(atoms), numbers.continuation(atoms)
    assert len(field) == 20
    if rest:
        mark, line = rest.split("\n")
        words = line.split()
        assert mark == "&"
        assert not field.strip()
        read = {words[i]: int(words[i + 1]) for i in range(0, len(words), 2)}
    else:
        cells = [field[i : i + 5] for i in range(0, 20, 5)]
        read = {cell[:2].strip(): int(cell[2:]) for cell in cells if cell.strip()}
    assert read == {symbol.upper(): count for symbol, count in atoms.items()}


def test_a_common_temperature_that_would_be_rounded_is_refused() -> None:
    with pytest.raises(Refused) as caught:
        text_of("nasa7", entry_of(water(), "H2O", fit=FitOptions(200.0, 1000.123, 6000.0)))
    assert caught.value.findings[0].code == "value-unfit"


@given(st.text())
def test_comment_text_is_always_one_ascii_line(text: str) -> None:
    line = ascii_text(text)
    assert line.isascii()
    assert "\n" not in line


def test_linear_radical_outside_the_table_is_warned_about() -> None:
    oxygen = molecule("O O", [[0, 0, 0], [0, 0, 1.2]], [1580.0], multiplicity=3)
    assert "warning: O2 is linear and open-shell" in text_of("nasa7", entry_of(oxygen, "O2"))
