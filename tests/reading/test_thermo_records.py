"""Every variant of the fixed record that files are known to hold: read right with a finding, or refused with its place.

The variants, and what ``cantera.ck2yaml`` 3.2.0 makes of them, were established with crafted files of one species.
"""

from __future__ import annotations

from collections.abc import Callable

import pytest

from heatwright.constants import GAS_CONSTANT_J_MOL_K
from heatwright.reading.entry_file import ThermoEntry
from thermo_files import CH4, CP300, CP1500, codes, one, parsed

L1, L2, L3, L4 = CH4
METHANE = {"C": 1, "H": 4}
Lines = tuple[str, ...]


def is_methane(entry: ThermoEntry) -> bool:
    """The right numbers, as Cantera evaluates them."""
    p = entry.polynomial
    return (
        p is not None
        and abs(p.cp_R(300.0) * GAS_CONSTANT_J_MOL_K - CP300) < 5e-5
        and abs(p.cp_R(1500.0) * GAS_CONSTANT_J_MOL_K - CP1500) < 5e-5
    )


def test_the_good_record_has_nothing_to_say() -> None:
    entry = one(*CH4)
    assert is_methane(entry)
    assert entry.findings == ()
    assert (entry.name, entry.note, entry.phase, entry.composition) == ("CH4", "L 8/88", "G", METHANE)
    assert entry.stated_K == (200.0, 1000.0, 3500.0)
    assert entry.lines == (3, 6)


REFUSED: dict[str, tuple[Lines, str, str]] = {
    # what : lines, code, place (line of the file and column)
    "digit in column 79": ((L1[:-2] + "1", L2, L3, L4), "record-lines", "3:79"),
    "digit missing": ((L1[:-1], L2, L3, L4), "record-lines", "3:73"),
    "digit of the second line missing": ((L1, L2[:-1], L3, L4), "record-lines", "4:80"),
    "lines 2 and 3 exchanged": ((L1, L3, L2, L4), "record-lines", "4:80"),
    "line 4 missing": ((L1, L2, L3), "record-lines", "3"),
    "a tab": ((L1.replace("L 8/88", "\t"), L2, L3, L4), "record-lines", "3:19"),
    "mass pushes the digit": ((L1[:65] + "  B  16.04246  1", L2, L3, L4), "record-lines", "3:80"),
    "coefficients shifted": ((L1, " " + L2[:75] + "   2", L3, L4), "coefficient-wrong", "4:1"),
    "blank coefficient": ((L1, L2[:15] + " " * 15 + L2[30:], L3, L4), "coefficient-wrong", "4:16"),
    "asterisks": ((L1, L2[:15] + "*" * 15 + L2[30:], L3, L4), "coefficient-wrong", "4:16"),
    "NaN": ((L1, L2, L3, f"{'NaN':>15}" + L4[15:]), "coefficient-wrong", "6:1"),
    "infinity": ((L1, L2, L3, f"{'Infinity':>15}" + L4[15:]), "coefficient-wrong", "6:1"),
    "sixteen columns": ((L1, L2[:60] + "-1.00000000E-101   2", L3, L4), "coefficient-wrong", "4:61"),
    "no decimal point": ((L1, f"{'12345':>15}" + L2[15:], L3, L4), "coefficient-wrong", "4:1"),
    "counts to the left": ((L1.replace("C   1H   4", "C1   H4   "), L2, L3, L4), "composition-wrong", "3:25"),
    "four-digit counts": ((L1.replace("C   1H   4", "C1000H2002"), L2, L3, L4), "composition-wrong", "3:25"),
    "unknown element": ((L1.replace("H   4", "XX  4"), L2, L3, L4), "composition-wrong", "3:30"),
    "negative count": ((L1.replace("H   4", "H  -4"), L2, L3, L4), "composition-wrong", "3:30"),
    "element twice": ((L1.replace("H   4", "C   4"), L2, L3, L4), "composition-wrong", "3:30"),
    "& and columns 25-44": ((L1 + "&", "C 1 H 4 O 1", L2, L3, L4), "composition-wrong", "3:25"),
    "name touches the date": (("ABCDEFGHIJKLMNOPQR" + L1[18:], L2, L3, L4), "name-ambiguous", "3:18"),
    "name of 25": (("ABCDEFGHIJKLMNOPQRSTUVWXY" + L1[25:], L2, L3, L4), "name-ambiguous", "3:18"),
    "lowest above common": ((L1.replace("   200.000", "  1200.000"), L2, L3, L4), "temperature-order", "3:46"),
    "common is highest": ((L1.replace(" 1000.00", " 3500.00"), L2, L3, L4), "temperature-order", "3:46"),
    "first line shifted": ((" " + L1[:-2] + "1", L2, L3, L4), "composition-wrong", "3:25"),
    "phase is a digit": ((L1[:44] + "7" + L1[45:], L2, L3, L4), "record-columns", "3:45"),
    "swapped ranges": (
        (L1, L3[30:75] + L4[:30] + "    2", L4[30:60] + L2[:45] + "    3", L2[45:75] + L3[:30] + " " * 15 + "    4"),
        "ranges-swapped",
        "3",
    ),
}


@pytest.mark.parametrize("what", REFUSED)
def test_refused_with_code_and_place(what: str) -> None:
    lines, code, place = REFUSED[what]
    entry = one(*lines)
    assert entry.polynomial is None
    refusal = next(f for f in entry.findings if f.severity == "refuse")
    assert refusal.code == code
    assert refusal.where == f"line {place}"
    if ":" in place:
        shown, carets = refusal.excerpt.split("\n")
        # the carets start at the place, under the line itself
        assert len(carets) - len(carets.lstrip()) == int(place.split(":")[1]) - 1
        assert shown.rstrip() == lines[int(place.split(":")[0]) - 3].replace("\t", "→").rstrip()


@pytest.mark.parametrize("what", REFUSED)
def test_a_broken_record_takes_no_other_with_it(what: str) -> None:
    after = parsed(*REFUSED[what][0], *(line.replace("CH4 ", "CH4B") for line in CH4)).entries
    assert [e.name for e in after][-1] == "CH4B"
    assert len(after) == 2
    assert is_methane(after[-1])


READ: dict[str, tuple[Lines, dict[str, str], Callable[[ThermoEntry], bool]]] = {
    # what : lines, code and severity of what is said, what has to be right besides the numbers
    "D exponents": ((L1, L2.replace("E", "D"), L3, L4), {}, is_methane),
    "lower-case e": ((L1, L2.replace("E", "e"), L3, L4), {}, is_methane),
    "blank for the plus sign": ((L1, L2, L3.replace("E+", "E "), L4), {}, is_methane),
    "lower-case elements": ((L1.replace("C   1H", "c   1h"), L2, L3, L4), {}, lambda e: e.composition == METHANE),
    "counts with a point": (
        (L1.replace("C   1H   4", "C  1.H  4."), L2, L3, L4),
        {},
        lambda e: e.composition == METHANE,
    ),
    "blank phase": ((L1[:44] + " " + L1[45:], L2, L3, L4), {}, lambda e: e.phase == ""),
    "zeros in unused fields": ((L1[:34] + "    0   0." + L1[44:], L2, L3, L4), {}, lambda e: e.composition == METHANE),
    "text after column 80": ((L1 + " ! methane", L2, L3, L4 + " text"), {}, lambda e: e.composition == METHANE),
    "comments and blank lines between": ((L1, "! one", L2, "", L3, "!two", L4), {}, is_methane),
    "name with a blank": (("CH4 gas" + L1[7:], L2, L3, L4), {}, lambda e: (e.name, e.note) == ("CH4", "gas L 8/88")),
    "name of 18 characters": (
        (f"{'C' * 17}1" + " " * 6 + L1[24:], L2, L3, L4),
        {"name-ambiguous": "note"},
        lambda e: len(e.name) == 18,
    ),
    "blank before the name": ((" CH4" + L1[4:], L2, L3, L4), {"name-ambiguous": "note"}, lambda e: e.name == "CH4"),
    "enthalpy after the coefficients": (
        (L1, L2, L3, L4[:60] + "-8.97226656E+03" + L4[75:]),
        {},
        lambda e: e.stated_h298_K == -8972.26656,
    ),
    "three-digit exponent in its field": (
        (L1, L2[:60] + "-1.0000000E-101" + L2[75:], L3, L4),
        {"exponent-form": "note"},
        lambda e: e.polynomial is not None and e.polynomial.high[4] == -1.0e-101,
    ),
    "exponent without E": ((L1, " 7.48514950-02 " + L2[15:], L3, L4), {"exponent-form": "warn"}, is_methane),
    "common temperature in 66-75": ((L1[:65] + "  1000.000" + L1[75:], L2, L3, L4), {}, is_methane),
    "fifth element": (
        (L1[:73] + "CL  1 1", L2, L3, L4),
        {"fifth-element": "warn"},
        lambda e: e.composition == {**METHANE, "Cl": 1} and e.stated_K[1] == 1000.0,
    ),
    "fifth element, common 1200": (
        (L1[:65] + " 1200.  CL  1 1", L2, L3, L4),
        {"fifth-element": "warn"},
        lambda e: "Cl" in e.composition and e.stated_K[1] == 1200.0,
    ),
    "five elements after &": (
        (L1[:24] + " " * 20 + L1[44:] + "&", "C 1 H 4 N 1 O 2 CL 12", L2, L3, L4),
        {},
        lambda e: e.composition == {**METHANE, "N": 1, "O": 2, "Cl": 12},
    ),
    "two lines after &": (
        (L1[:24] + " " * 20 + L1[44:] + "&", "C 1 &", "H 4", L2, L3, L4),
        {},
        lambda e: e.composition == METHANE,
    ),
    "count with a point after &": (
        (L1[:24] + " " * 20 + L1[44:] + "&", "C 1 H 4.", L2, L3, L4),
        {"composition-form": "warn"},
        lambda e: e.composition == METHANE,
    ),
    "ten-column fields after column 80": (
        (L1 + "S        1", L2, L3, L4),
        {"composition-form": "warn"},
        lambda e: e.composition == {**METHANE, "S": 1},
    ),
    "fractional count": (
        (L1.replace("H   4", "H  .5"), L2, L3, L4),
        {"fractional-count": "warn"},
        lambda e: e.composition == {"C": 1, "H": 0.5},
    ),
    "charge": ((L1[:34] + "E  -1" + L1[39:], L2, L3, L4), {}, lambda e: e.charge == 1),
    "blank common temperature": (
        (L1[:65] + " " * 14 + "1", L2, L3, L4),
        {"common-temperature-blank": "note"},
        is_methane,
    ),
    "quality letter and molar mass": (
        (L1[:65] + "  B  16.04246 1", L2, L3, L4),
        {"molar-mass-field": "warn", "common-temperature-blank": "note"},
        is_methane,
    ),
    "molar mass without a letter": (
        (L1[:65] + "     16.04246 1", L2, L3, L4),
        {"molar-mass-field": "warn", "common-temperature-blank": "note"},
        is_methane,
    ),
    "molar mass of something else": (
        (L1[:65] + "  B  44.00980 1", L2, L3, L4),
        {"molar-mass-field": "warn", "composition-mismatch": "warn", "common-temperature-blank": "note"},
        is_methane,
    ),
    "blank lowest temperature": (
        (L1.replace("   200.000", " " * 10), L2, L3, L4),
        {"temperature-default": "warn"},
        lambda e: e.stated_K[0] == 300.0,
    ),
    "letter outside ASCII": (
        (L1.replace("L 8/88", "é 8/88"), L2, L3, L4),
        {"record-ascii": "warn"},
        lambda e: e.composition == METHANE,
    ),
    "no element": (
        (L1[:24] + " " * 20 + L1[44:], L2, L3, L4),
        {"composition-wrong": "warn"},
        lambda e: not e.composition,
    ),
    "text in columns 76-79": ((L1, L2[:75] + "  x 2", L3, L4), {"record-columns": "warn"}, is_methane),
    "high range zero": (
        (L1, f"{0.0:15.8E}" * 5 + "    2", f"{0.0:15.8E}" * 2 + L3[30:], L4),
        {"range-missing": "warn"},
        lambda e: e.ranges == "low" and e.polynomial is not None and e.polynomial.t_high_K == 1000.0,
    ),
    "low range blank": (
        (L1, L2, L3[:30] + " " * 45 + L3[75:], " " * 60 + L4[60:]),
        {"range-missing": "warn"},
        lambda e: e.ranges == "high" and e.polynomial is not None and e.polynomial.t_low_K == 1000.0,
    ),
    "all zero": (
        (L1, *(f"{0.0:15.8E}" * n + " " * (75 - 15 * n) + f"    {i}" for i, n in ((2, 5), (3, 5), (4, 4)))),
        {"all-zero": "warn"},
        lambda e: e.polynomial is not None,
    ),
}


@pytest.mark.parametrize("what", READ)
def test_read_right_and_said(what: str) -> None:
    lines, said, right = READ[what]
    entry = one(*lines)
    assert {f.code: f.severity for f in entry.findings} == said
    assert entry.polynomial is not None
    assert right(entry)


def test_a_blank_common_temperature_takes_the_section_s_default_and_warns_of_an_unusual_one() -> None:
    entry = one(L1[:65] + " " * 14 + "1", L2, L3, L4, head=("THERMO", "   300.000  1400.000  5000.000"))
    assert entry.stated_K[1] == 1400.0
    assert codes(entry, "warn") == {"common-temperature-blank"}


@pytest.mark.parametrize(("head", "severity"), [("THERMO", "warn"), ("THERMO ALL", "refuse")])
def test_missing_defaults_are_named_and_the_record_is_read(head: str, severity: str) -> None:
    file = parsed(*CH4, head=(head,))
    assert [(f.code, f.severity, f.where) for f in file.findings] == [("defaults-missing", severity, "line 1")]
    assert is_methane(file.entries[0])


def test_a_latin_1_letter_is_one_column_too() -> None:
    from heatwright.reading.entries import parse_entries

    data = "\n".join([L1.replace("L 8/88", "é 8/88"), L2, L3, L4]).encode("latin-1")
    entry = parse_entries(data).entries[0]
    assert is_methane(entry)
    assert codes(entry) == {"record-ascii"}


def test_a_species_of_the_mechanism_in_another_case() -> None:
    file = parsed(
        *(line.replace("CH4 ", "ch4 ") for line in CH4), head=("SPECIES", "CH4 O2", "END", "THERMO", "300. 1000. 5000.")
    )
    assert [(f.code, f.where) for f in file.findings] == [("name-case", "line 2")]


def test_several_faults_of_one_line_are_one_finding() -> None:
    entry = one(" " + L1[:-2] + "1", L2, L3, L4)
    (refusal,) = [f for f in entry.findings if f.severity == "refuse"]
    assert "5 further fields of this line" in refusal.found
