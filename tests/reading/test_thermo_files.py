"""Whole thermo files: heads, mechanisms around them, line ends, other models; replacing entries; hostile bytes."""

from __future__ import annotations

import random
from pathlib import Path

import pytest

from heatwright.findings import Refused
from heatwright.reading.entries import parse_entries, read_entries, replace_entries
from thermo_files import CH4, cantera_data, codes, parsed, record, section

OTHER = tuple(line.replace("CH4 ", "CH4B") for line in CH4)

MECHANISM = """ELEMENTS
C H O
END
SPECIES CH4 CH4B
O2 END
THERMO ALL
! defaults follow
   300.000  1000.000  5000.000
! methane
! of GRI-Mech
{0}

{1}
END
REACTIONS
CH4+O2=>CH4B 1.0 0.0 0.0   ! a reaction, and now its numbers
  1.00E+10 0.0 1.0E+03
END
THERMO
300. 1000. 5000.
{2}
END
"""


def test_sections_inside_a_mechanism() -> None:
    text = MECHANISM.format("\n".join(CH4), "\n".join(OTHER), "\n".join(line.replace("CH4 ", "CH4C") for line in CH4))
    file = parse_entries(text.encode(), "mech.inp")
    assert [e.name for e in file.entries] == ["CH4", "CH4B", "CH4C"]
    assert all(e.findings == () for e in file.entries)
    assert file.findings == ()
    assert file.defaults_K == (300.0, 1000.0, 5000.0)
    assert file.data[slice(*file.entries[0].lead)] == b"! methane\n! of GRI-Mech\n"
    assert file.entries[1].lead == (file.entries[1].span[0],) * 2


@pytest.mark.parametrize("head", [(), ("   200.000  1200.000  6000.000",), ("a preface", "of two lines, 1.0")])
def test_records_without_a_head(head: tuple[str, ...]) -> None:
    file = parse_entries("\n".join([*head, *CH4, *OTHER]).encode())
    assert [e.name for e in file.entries] == ["CH4", "CH4B"]
    assert file.findings == ()
    assert file.defaults_K == ((200.0, 1200.0, 6000.0) if len(head) == 1 else None)


def test_nine_coefficient_sections_are_named_and_passed_over() -> None:
    nine = [
        "THERMO NASA9",
        "   200.000  1000.000  6000.000 20000.000   9/09/04",
        "N2                Ref-Elm. Gurvich,1978 pt1 p280 pt2 p207.",
        " 2 tpis78 N   2.00    0.00    0.00    0.00    0.00 0   28.0134000          0.000",
        *[" 2.210371497E+04-3.818461820E+02 6.082738360E+00-8.530914410E-03 1.384646189E-05"] * 6,
        "O2                another",
        " 1 tpis89 O   2.00    0.00    0.00    0.00    0.00 0   31.9988000          0.000",
        *["-3.425563420E+04 4.847000970E+02 1.119010961E+00 4.293889240E-03-6.836300520E-07"] * 3,
        "END",
    ]
    file = parse_entries("\n".join([*nine, "THERMO", "300. 1000. 5000.", *CH4, "END"]).encode())
    assert [(s.name, s.model, s.line) for s in file.passed_over] == [("N2", "NASA9", 3), ("O2", "NASA9", 11)]
    assert [e.name for e in file.entries] == ["CH4"]
    assert [f.code for f in file.findings] == ["other-model"]


@pytest.mark.parametrize("newline", ["\n", "\r\n", "\r"])
def test_every_line_end(newline: str) -> None:
    data = section(*CH4, *OTHER, newline=newline)
    file = parse_entries(data)
    assert file.newline == newline
    assert [e.lines for e in file.entries] == [(3, 6), (7, 10)]
    start, end = file.entries[0].span
    assert data[start:end].decode().split(newline) == [*CH4, ""]
    replaced = replace_entries(file, {"CH4": "\n".join(OTHER) + "\n"})
    assert replaced == section(*OTHER, *OTHER, newline=newline)


def test_a_byte_order_mark_is_no_column() -> None:
    file = parse_entries(b"\xef\xbb\xbf" + "\n".join(CH4).encode())
    assert file.entries[0].name == "CH4"
    assert file.entries[0].span == (3, len(file.data))


def test_defaults_that_fill_their_columns() -> None:
    assert parsed(*CH4, head=("THERMO", "   300.000  1000.00010000.000")).defaults_K == (300.0, 1000.0, 10000.0)


def test_what_is_no_thermo_file(tmp_path: Path) -> None:
    def refused(data: bytes) -> str:
        with pytest.raises(Refused) as caught:
            parse_entries(data)
        return caught.value.findings[-1].code

    assert refused(b" \n") == "file-empty"
    assert refused(b"some text\nand no entry\n") == "no-entries"
    assert refused("\n".join(CH4).encode("utf-16")) == "no-entries"
    assert refused(b"species: []\n") == "no-entries"
    with pytest.raises(Refused, match="no such file"):
        read_entries(tmp_path / "missing.dat")
    with pytest.raises(Refused, match="directory"):
        read_entries(tmp_path)


def test_stray_coefficients_and_text_in_a_section_are_named() -> None:
    file = parsed(CH4[1], "some words", *CH4)
    assert [(f.code, f.severity, f.where) for f in file.findings] == [
        ("record-lines", "refuse", "line 3"),
        ("record-lines", "refuse", "line 4:10"),
    ]
    assert [e.name for e in file.entries] == ["CH4"]


# --- replacing -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["gri30.yaml", "nasa_gas.yaml", "liquidvapor.yaml", "lithium_ion_battery.yaml"])
def test_replacing_every_entry_by_itself_changes_no_byte(name: str) -> None:
    file = read_entries(cantera_data() / name)
    assert replace_entries(file, {e.span: file.text_of(e) for e in file.entries}) == file.data


def test_replacing_one_entry_leaves_every_other_byte() -> None:
    text = "! ä\n" + MECHANISM.format("\n".join(CH4), "\n".join(OTHER), "")
    file = parse_entries(text.encode(), "mech.inp")
    p = file.entries[0].polynomial
    assert p is not None
    new = record("CH4", {"C": 1, "H": 4}, p)
    changed = replace_entries(file, {"CH4": new})
    start, end = file.entries[0].span
    assert changed == file.data[:start] + new.encode() + b"\n" + file.data[end:]
    assert parse_entries(changed).entries[0].polynomial == p
    assert replace_entries(file, {"CH4": ""}) == file.data[:start] + file.data[end:]


def test_a_yaml_item_is_indented_like_the_old_one() -> None:
    item = "  - name: H\n    composition: {H: 1}\n    thermo: {model: NASA7,\n      temperature-ranges: [200, 300],"
    text = f"species:\n{item} data: [[2.5, 0, 0, 0, 0, 1, 2]]}}\n  # end\nx: 1"
    file = parse_entries(text.encode(), "a.yaml")
    changed = replace_entries(file, {"H": "- name: H\n  composition: {H: 1}\n\n  thermo: {}\n"})
    assert changed.decode() == "species:\n  - name: H\n    composition: {H: 1}\n\n    thermo: {}\n  # end\nx: 1"


def test_names_that_are_not_there_or_twice() -> None:
    file = parsed(*CH4, *CH4)
    for key, words in ((("CH4"), "2 times"), ("H2", "no entry H2"), ((0, 5), "bytes 0 to 5")):
        with pytest.raises(Refused, match=words):
            replace_entries(file, {key: "x"})
    second = file.entries[1]
    assert replace_entries(file, {second.span: "\n".join(OTHER)}) == section(*CH4, *OTHER)


def test_species_in_one_bracketed_list_can_be_read_but_not_replaced() -> None:
    thermo = "{model: NASA7, temperature-ranges: [200, 900],\n data: [[2.5, 0, 0, 0, 0, 1, 2]]}"
    file = parse_entries(f"species: [{{name: H, composition: {{H: 1}}, thermo: {thermo}}}]\n".encode())
    assert file.entries[0].polynomial is not None
    with pytest.raises(Refused, match="bracketed"):
        replace_entries(file, {"H": "- name: H"})


# --- many records ----------------------------------------------------------------------------------------------------


def test_748_records_read_back_as_they_were_written() -> None:
    file = read_entries(cantera_data() / "nasa_gas.yaml")
    chosen = [e for e in file.usable if e.ranges == "both" and len(e.name) <= 16]
    assert len(chosen) > 700
    text = "\n".join(record(e.name, e.composition, e.polynomial) for e in chosen if e.polynomial is not None)
    again = parse_entries(section(text))
    assert len(again.entries) == len(chosen)
    for was, now in zip(chosen, again.entries, strict=True):
        assert (now.name, now.composition, now.polynomial) == (was.name, was.composition, was.polynomial)
        assert codes(now) == set()
    numbers = [float(again.data[slice(*s)]) for e in again.entries for row in e.coefficient_spans for s in row]
    assert numbers == [a for e in chosen if e.polynomial for row in (e.polynomial.low, e.polynomial.high) for a in row]


@pytest.mark.parametrize("seed", range(4))
def test_damaged_bytes_never_crash_the_reader(seed: int) -> None:
    """Bytes are changed, taken out, doubled; the reader gives entries or a refusal, and the spans stay inside."""
    dice = random.Random(seed)
    record_data = section(*CH4, *OTHER, *CH4)
    yaml_data = (cantera_data() / "gri30.yaml").read_bytes()[:9000]
    for i in range(400):
        data = bytearray(record_data if i % 2 else yaml_data)
        for _ in range(dice.randint(1, 4)):
            at = dice.randrange(len(data))
            what = dice.random()
            if what < 0.5:
                data[at] = dice.choice(b" \t\n\r0123456789.-+EeDd*&!:[]{},'\"#abcXYZ\xff\x00")
            elif what < 0.8:
                del data[at : at + dice.randint(1, 90)]
            else:
                data[at:at] = data[at : at + dice.randint(1, 200)]
        try:
            file = parse_entries(bytes(data), "x.yaml" if i % 2 == 0 else "x.dat")
        except Refused:
            continue
        assert all(0 <= e.span[0] < e.span[1] <= len(data) for e in file.entries)
        assert all(str(f) for f in file.all_findings())
        untouched = {e.span: file.text_of(e) for e in file.entries if file.format == "nasa7"}
        if file.newline == "\n" and b"\r" not in data and data.isascii():
            assert replace_entries(file, untouched) == bytes(data)
