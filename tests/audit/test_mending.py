"""Mending: smooth, with its own H° and S°, as close to what it said as can be, and nothing else touched."""

from __future__ import annotations

import random
from functools import cache

import numpy as np
import pytest
from scipy.optimize import linprog

from heatwright.audit.mend import MendedFile, mend_entries
from heatwright.findings import Refused
from heatwright.polynomial.nasa7 import Nasa7, cp_of
from heatwright.polynomial.quality import jumps_at_common
from heatwright.reading.entries import parse_entries, read_entries
from heatwright.reading.entry_file import EntryFile, ThermoEntry
from thermo_files import CH4, cantera_data, parsed, record, section

BREAKS = {0: 0.4, 1: 2e-4, 5: 300.0, 6: 0.3}
"""By how much a₁, a₂, a₆ and a₇ of one range are moved."""


def with_numbers(file: EntryFile, edits: dict[tuple[int, int], str]) -> EntryFile:
    """The file with some numbers of its text replaced, by their places."""
    out, last = [], 0
    for (start, end), text in sorted(edits.items()):
        out += [file.data[last:start], text.encode()]
        last = end
    return parse_entries(b"".join([*out, file.data[last:]]), file.path)


@cache
def broken() -> tuple[EntryFile, tuple[str, ...]]:
    """nasa_gas.yaml with fifty entries broken in different ways, and their names."""
    file = read_entries(cantera_data() / "nasa_gas.yaml")
    dice = random.Random(20260101)
    chosen = dice.sample([e for e in file.usable if e.ranges == "both"], 50)
    edits = {}
    for i, e in enumerate(chosen):
        assert e.polynomial is not None
        which, k = i % 2, list(BREAKS)[i % len(BREAKS)]
        value = (e.polynomial.low, e.polynomial.high)[which][k] + BREAKS[k] * dice.choice((-1, 1))
        edits[e.coefficient_spans[which][k]] = f"{value:.9g}"
    return with_numbers(file, edits), tuple(e.name for e in chosen)


@cache
def mended() -> MendedFile:
    return mend_entries(broken()[0])


@cache
def again() -> EntryFile:
    return parse_entries(mended().data, "mended.yaml")


def best_smooth(p: Nasa7) -> float:
    """The smallest possible largest deviation from Cp/R of *p*, each side in its own range, of two quartics with
    continuous value and slope: a linear programme, with powers of T/1000 K."""
    n = 60
    x = 0.5 - 0.5 * np.cos(np.pi * np.arange(n) / (n - 1))
    low = p.t_low_K + (p.t_common_K - p.t_low_K) * x
    high = p.t_common_K + (p.t_high_K - p.t_common_K) * x
    k = np.arange(5)
    design = np.zeros((2 * n, 10))
    design[:n, :5] = (low[:, None] / 1000.0) ** k
    design[n:, 5:] = (high[:, None] / 1000.0) ** k
    cp = np.r_[cp_of(p.low, low), cp_of(p.high, high)]
    t = p.t_common_K / 1000.0
    value, slope = t**k, k * t ** (k - 1.0)
    done = linprog(
        np.r_[np.zeros(10), 1.0],
        A_ub=np.block([[design, -np.ones((2 * n, 1))], [-design, -np.ones((2 * n, 1))]]),
        b_ub=np.r_[cp, -cp],
        A_eq=np.block([[value, -value, 0.0], [slope, -slope, 0.0]]),
        b_eq=np.zeros(2),
        bounds=[(None, None)] * 10 + [(0, None)],
    )
    assert done.success
    return float(done.fun)


def test_all_fifty_and_no_other_are_mended() -> None:
    assert {m.entry.name for m in mended().mended} == set(broken()[1])
    assert [f.severity for f in mended().findings] == ["note"] * 50


def test_unbroken_entries_are_identical_byte_for_byte() -> None:
    file, names = broken()
    pairs = list(zip(file.entries, again().entries, strict=True))
    assert all(file.data[slice(*a.span)] == again().data[slice(*b.span)] for a, b in pairs if a.name not in names)
    ends = [(0, file.entries[0].span[0], 0, again().entries[0].span[0])]
    ends.append((file.entries[-1].span[1], None, again().entries[-1].span[1], None))  # type: ignore[arg-type]
    assert all(file.data[a:b] == again().data[c:d] for a, b, c, d in ends)


def pairs() -> list[tuple[ThermoEntry, ThermoEntry]]:
    file, names = broken()
    return [(a, b) for a, b in zip(file.entries, again().entries, strict=True) if a.name in names]


def test_the_mended_text_is_smooth() -> None:
    for _, entry in pairs():
        assert entry.polynomial is not None
        jumps = jumps_at_common(entry.polynomial)
        assert abs(jumps.cp_R) < 1e-6
        assert abs(jumps.dcp_R_K) < 1e-8
        assert abs(jumps.h_R_K) < 2e-2  # nine digits of an a6 of up to 2e7 K
        assert abs(jumps.s_R) < 1e-6


def test_the_standard_values_are_kept_to_the_printed_digits() -> None:
    for was, now in pairs():
        assert was.polynomial is not None
        assert now.polynomial is not None
        for function, last in (("h_R", 5), ("s_R", 6)):
            a, b = (float(getattr(e.polynomial, function)(298.15, extrapolate=True)) for e in (was, now))
            digit = 10.0 ** (np.floor(np.log10(abs(now.polynomial.low[last]))) - 8)
            assert abs(a - b) <= max(digit, 1e-7), was.name


@pytest.mark.parametrize("i", range(50))
def test_no_smooth_polynomial_is_much_closer(i: int) -> None:
    was, now = pairs()[i]
    assert was.polynomial is not None
    assert now.polynomial is not None
    old, new = was.polynomial, now.polynomial
    low = np.linspace(old.t_low_K, old.t_common_K, 400)
    high = np.linspace(old.t_common_K, old.t_high_K, 400)
    change = max(
        np.abs(cp_of(new.low, low) - cp_of(old.low, low)).max(),
        np.abs(cp_of(new.high, high) - cp_of(old.high, high)).max(),
    )
    best = best_smooth(old)
    assert change <= max(1.1 * best, 2e-6)  # asked for: 1.5 times
    claimed = next(m for m in mended().mended if m.entry.name == was.name)
    assert claimed.bound_R <= best * 1.001 + 1e-9


def test_mending_twice_changes_nothing() -> None:
    assert mend_entries(again()).data == mended().data


# --- fixed records ----------------------------------------------------------------------------------------------------


def methane() -> Nasa7:
    p = parsed(*CH4).entries[0].polynomial
    assert p is not None
    return p


def test_a_record_keeps_its_columns_and_its_comments() -> None:
    lines = list(CH4)
    lines[1] = f"{7.48514950e-02 + 0.5:15.8E}" + lines[1][15:]
    text = section("! with é", *lines[:2], "! inside", *lines[2:], *CH4, newline="\r\n")
    file = parse_entries(text)
    result = mend_entries(file)
    was, now = (t.decode().split("\r\n") for t in (text, result.data))
    assert len(result.mended) == 1
    changed = [i for i, (a, b) in enumerate(zip(was, now, strict=True)) if a != b]
    assert changed == [4, 6, 7]
    assert all(len(was[i]) == len(now[i]) and was[i][75:] == now[i][75:] for i in changed)
    assert parse_entries(result.data).entries[1].polynomial == methane()


def test_a_wrong_common_temperature_is_put_right() -> None:
    first = CH4[0].replace(" 1000.00", " 1400.00")
    result = mend_entries(parsed(first, *CH4[1:]))
    (m,) = result.mended
    assert "but at 1000 K" in m.why
    (entry,) = parse_entries(result.data).entries
    assert entry.stated_K == (200.0, 1000.0, 3500.0)
    assert entry.polynomial is not None
    T = np.linspace(200.0, 3500.0, 500)
    assert np.abs(entry.polynomial.cp_R(T) - methane().cp_R(T)).max() < 0.05


@pytest.mark.parametrize("missing", ["high", "low"])
@pytest.mark.parametrize("filler", [" " * 15, f"{0.0:15.8E}"])
def test_a_missing_range(missing: str, filler: str) -> None:
    lines = record("CH4", {"C": 1, "H": 4}, methane()).split("\n")
    if missing == "high":
        lines[1], lines[2] = filler * 5 + lines[1][75:], filler * 2 + lines[2][30:]
    else:
        lines[2], lines[3] = lines[2][:30] + filler * 3 + lines[2][75:], filler * 4 + lines[3][60:]
    result = mend_entries(parse_entries(section(*lines)))
    (entry,) = parse_entries(result.data).entries
    p = entry.polynomial
    assert p is not None
    assert entry.findings == ()
    expected = (200.0, 600.0, 1000.0) if missing == "high" else (1000.0, 2250.0, 3500.0)
    assert entry.stated_K == expected
    T = np.linspace(p.t_low_K, p.t_high_K, 50)
    for function in ("cp_R", "h_R", "s_R"):
        assert np.array_equal(getattr(p, function)(T)[1:], getattr(methane(), function)(T)[1:])


@pytest.mark.parametrize(
    "rows", ["[[2.5, 0, 0, 0, 0, -745.375, 4.3]]", "\n    - [2.5, 0, 0, 0, 0,\n      -745.375, 4.3]"]
)
def test_a_single_range_of_yaml_is_split_only_when_it_is_named(rows: str) -> None:
    thermo = f"    model: NASA7\n    temperature-ranges: [200.0, 6000.0]\n    data: {rows}\n"
    text = f"species:\n- name: AR\n  composition: {{Ar: 1}}\n  thermo:\n{thermo}"
    file = parse_entries(text.encode(), "a.yaml")
    assert mend_entries(file).data == file.data
    entry = parse_entries(mend_entries(file, ["AR"]).data, "a.yaml").entries[0]
    assert (entry.ranges, entry.stated_K) == ("both", (200.0, 1000.0, 6000.0))
    assert entry.polynomial is not None
    assert entry.polynomial.low == entry.polynomial.high == (2.5, 0.0, 0.0, 0.0, 0.0, -745.375, 4.3)


def test_a_kink_is_smoothed_only_when_it_is_named() -> None:
    file = parsed(*CH4)
    assert mend_entries(file).mended == ()
    (m,) = mend_entries(file, ["CH4"]).mended
    assert abs(jumps_at_common(m.new).dcp_R_K) < 1e-9
    assert abs(m.dcp_R) < 0.05


def test_an_entry_that_starts_late_keeps_the_values_at_its_start() -> None:
    p = methane()
    late = Nasa7(500.0, 1000.0, 3500.0, p.low, (p.high[0] + 0.3, *p.high[1:]))
    (m,) = mend_entries(parse_entries(section(record("CH4", {"C": 1, "H": 4}, late)))).mended
    assert m.anchor_K == 500.0
    assert m.new.h_R(500.0) == pytest.approx(late.h_R(500.0), abs=1e-3)
    assert m.new.s_R(500.0) == pytest.approx(late.s_R(500.0), abs=1e-6)


def test_what_cannot_be_mended_is_said_and_stays() -> None:
    p = methane()
    narrow = Nasa7(900.0, 950.0, 1000.0, p.low, (p.high[0] + 0.3, *p.high[1:]))
    file = parse_entries(section(record("CH4", {"C": 1, "H": 4}, narrow), CH4[0][:-1], *CH4[1:]))
    result = mend_entries(file)
    assert result.data == file.data
    assert [(f.code, f.severity, f.where) for f in result.findings] == [
        ("not-mendable", "refuse", "line 3"),
        ("not-mendable", "refuse", "line 7:73"),
    ]


def test_names_have_to_exist() -> None:
    with pytest.raises(Refused, match="Did you mean CH4"):
        mend_entries(parsed(*CH4), ["CH5"])


def test_condensed_species_may_jump_where_they_melt() -> None:
    p = methane()
    jump = Nasa7(200.0, 1000.0, 3500.0, p.low, (p.high[0] + 0.3, *p.high[1:]))
    file = parse_entries(section(record("CH4", {"C": 1, "H": 4}, jump, "S")))
    assert mend_entries(file).data == file.data
    assert len(mend_entries(file, ["CH4"]).mended) == 1
