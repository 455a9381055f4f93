"""The YAML reader against ruamel.yaml (which Cantera brings along), and what it refuses; Cantera species."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from ruamel.yaml import YAML

from heatwright.findings import Refused
from heatwright.reading.entries import parse_entries, read_entries
from heatwright.reading.yaml_nodes import Mapping, Node, Scalar
from heatwright.reading.yaml_subset import yaml_document
from thermo_files import cantera_data, codes

SHIPPED = sorted(cantera_data().rglob("*.yaml"))
SLOW = {"n-hexane-NUIG-2015.yaml"}
"""ruamel.yaml takes half a minute for this one of 1.6 MB."""


def plain(node: Node) -> Any:
    if isinstance(node, Scalar):
        return node.text
    if isinstance(node, Mapping):
        return {key: plain(value) for key, value in node.items.items()}
    return [plain(item) for item in node.items]


def outside(text: str) -> Any:
    """What ruamel.yaml reads, with every scalar as its text."""

    def texts(value: Any) -> Any:
        if isinstance(value, dict):
            return {str(k): texts(v) for k, v in value.items()}
        return [texts(v) for v in value] if isinstance(value, list) else "" if value is None else str(value)

    return texts(YAML(typ="base", pure=True).load(text))


@pytest.mark.parametrize("path", SHIPPED, ids=lambda p: p.name)
def test_every_file_that_cantera_ships_reads_as_ruamel_reads_it(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    document = yaml_document(text)
    if path.name in SLOW:
        assert len(document.items["species"].items) == 1268
        return
    assert plain(document) == outside(text)


TRICKY = """%YAML 1.1
---
# a comment
plain: some words # and a comment
'quoted key': "double \\"quoted\\" \\u00e9 \\
  joined"
single: 'it''s
  folded

  twice'
multi: one
  two

  three
url: http://example.org/a#b
nothing:
also nothing:   # really
empty flow: {}
literal: |
  two
    indented

  lines
folded: >-
  one
  line

  and
    kept
  more
keep: |+
  end

indented: |2
    two more
flow: {a: [1, 2.5e-3, -x, 'q, [r]'], b: {c: , d: "x: y"}, "e":1, f: http://x,
  g: over
  two lines}
pairs: [a: 1, b]
list:
- - nested
  - seq
-
  after: dash
- key: value
  other:
  - same indent
- -1.5
- "quoted item"
- [flow, item,
   over lines]   # comment
deep:
    more: 1
    least:
      - x
...
"""


def test_all_kinds_of_values() -> None:
    assert plain(yaml_document(TRICKY)) == outside(TRICKY)


@pytest.mark.parametrize(
    ("text", "place", "word"),
    [
        ("a: 1\nb: &x 2\n", "line 2:4", "anchor"),
        ("a: 1\nb: *x\n", "line 2:4", "alias"),
        ("a: !!str 1\n", "line 1:4", "tag"),
        ("? a\n: b\n", "line 1:1", "complex key"),
        ("a: 1\n---\nb: 2\n", "line 2:1", "second document"),
        ("a:\n\tb: 1\n", "line 2:1", "tab"),
        ("a: [1, 2\nb: 3\n", "line 1:4", "never closed"),
        ("a: 'open\n", "line 1:4", "never closed"),
        ("a: [1, , 2]\n", "line 1:4", "empty item"),
        ("a: 1\na: 2\n", "line 2:1", "twice"),
        ("a: {b: 1, b: 2}\n", "line 1:11", "twice"),
        ("a: b: c\n", "line 1:5", "colon"),
        ("a: 1\n  b: 2\n", "line 2:4", "colon"),
        ("a:\n    b: 1\n  c: 2\n", "line 3:3", "indentation"),
        ("a: [1] x\n", "line 1:8", "more on the line"),
        ("- a\n- b\n", "line 1:1", "not a mapping"),
        ('a: "\\q"\n', "line 1:4", "escape"),
        ("a: @b\n", "line 1:4", "reserved"),
        ("a: " + "[" * 100 + "]" * 100 + "\n", "line 1:65", "nested"),
    ],
)
def test_what_cannot_be_read_is_refused_with_its_place(text: str, place: str, word: str) -> None:
    with pytest.raises(Refused) as caught:
        yaml_document(text)
    (finding,) = caught.value.findings
    assert finding.code == "yaml-unreadable"
    assert finding.where == place
    assert word in finding.found
    assert finding.excerpt.endswith("^")


SPECIES = """units: {length: cm}   # é
phases:
- {name: gas, thermo: ideal-gas, species: [NO]}
- name: solid
  thermo: fixed-stoichiometry
  species:
  - other: [X(s)]
species:
# nitric oxide,
# from a table
- name: NO
  composition: {N: 1, O: 1}
  thermo:
    model: NASA7
    reference-pressure: 1 bar
    temperature-ranges: [200.0, 1000.0 K, 6000.0]
    data:
    - [4.21859896, -4.63988124e-03, 1.10443049e-05, -9.34055507e-09, 2.80554874e-12,
      9845.0996, 2.28061001]
    - [3.26071234, 1.19101135e-03, -4.29122646e-07, 6.94481463e-11, -4.03295681e-15,
      9921.43132, 6.36900469]
    note: RUS 89   # é
  transport: {model: gas}

- name: 'Y'
  composition: {Y: 1.5}
  thermo: {model: NASA7, temperature-ranges: [300, 2000], data: [[2.5, 0, 0, 0, 0, 1, 2]]}
- {name: N9, composition: {N: 9}, thermo: {model: NASA9}}
other:
- name: X(s)
  composition: {Si: 1}
  thermo:
    model: NASA7
    temperature-ranges: [200.0, 1000.0, 1690.0]
    data: [[1.0, 0, 0, 0, 0, 0, 0], [0, 0, 0, 0, 0, 0, 0]]
reactions:
- equation: this is & not * looked : at
"""


def test_species_of_a_cantera_file() -> None:
    file = parse_entries(SPECIES.encode(), "mech.yaml")
    no, y, x = file.entries
    assert (no.name, no.phase, no.composition, no.note) == ("NO", "G", {"N": 1, "O": 1}, "RUS 89")
    assert no.reference_pressure_Pa == 1.0e5
    assert no.polynomial is not None
    assert (no.polynomial.low[0], no.polynomial.high[6], no.stated_K) == (
        4.21859896,
        6.36900469,
        (200.0, 1000.0, 6000.0),
    )
    assert no.lines == (11, 23)
    assert file.data[slice(*no.lead)].decode() == "# nitric oxide,\n# from a table\n"
    assert file.text_of(no).startswith("- name: NO\n")
    assert file.text_of(no).endswith("transport: {model: gas}\n")
    assert (y.ranges, codes(y), y.composition) == ("one", {"one-range", "fractional-count"}, {"Y": 1.5})
    assert (x.ranges, x.phase, codes(x)) == ("low", "S", {"range-missing"})
    assert [(s.name, s.model, s.line) for s in file.passed_over] == [("N9", "NASA9", 28)]


def test_the_places_of_numbers_are_theirs_in_the_bytes() -> None:
    for newline in ("\n", "\r\n"):
        file = parse_entries(SPECIES.replace("\n", newline).encode(), "mech.yaml")
        p = file.entries[0].polynomial
        assert p is not None
        spans = file.entries[0].coefficient_spans
        assert tuple(float(file.data[slice(*s)]) for s in spans[0]) == p.low
        assert tuple(float(file.data[slice(*s)]) for s in spans[1]) == p.high


@pytest.mark.parametrize(
    ("old", "new", "place", "code"),
    [
        ("[200.0, 1000.0 K, 6000.0]", "[200.0, 6000.0]", "line 16:25", "yaml-entry-wrong"),
        ("[200.0, 1000.0 K, 6000.0]", "[200.0, 200.0, 6000.0]", "line 16:25", "temperature-order"),
        ("4.21859896", "4.2185x", "line 18:8", "yaml-entry-wrong"),
        ("4.21859896", ".nan", "line 18:8", "yaml-entry-wrong"),
        ("4.21859896, ", "", "line 18:7", "yaml-entry-wrong"),
        ("{N: 1, O: 1}", "{Nx: 1, O: 1}", "line 12:17", "yaml-entry-wrong"),
        ("{N: 1, O: 1}", "{N: 1, O: -1}", "line 12:26", "yaml-entry-wrong"),
        ("{N: 1, O: 1}", "[N, O]", "line 12:16", "yaml-entry-wrong"),
        ("    temperature-ranges: [200.0, 1000.0 K, 6000.0]\n", "", "line 14:5", "yaml-entry-wrong"),
        ("    model: NASA7\n    reference", "    reference", "line 14:5", "yaml-entry-wrong"),
    ],
)
def test_a_species_that_cannot_be_used(old: str, new: str, place: str, code: str) -> None:
    assert old in SPECIES
    file = parse_entries(SPECIES.replace(old, new, 1).encode(), "mech.yaml")
    entry = file.entries[0]
    assert entry.polynomial is None
    refusal = next(f for f in entry.findings if f.severity == "refuse")
    assert (refusal.code, refusal.where) == (code, place)
    assert file.entries[1].polynomial is not None


def test_every_species_of_the_shipped_files_has_a_polynomial_or_another_model() -> None:
    counts = {}
    for name in ("gri30.yaml", "nasa_gas.yaml", "nasa_condensed.yaml", "airNASA9.yaml", "silicon.yaml"):
        file = read_entries(cantera_data() / name)
        counts[name] = (len(file.usable), len(file.entries), len(file.passed_over))
    assert counts == {
        "gri30.yaml": (53, 53, 0),
        "nasa_gas.yaml": (748, 748, 0),
        "nasa_condensed.yaml": (378, 378, 4),
        "airNASA9.yaml": (0, 0, 11),
        "silicon.yaml": (1, 1, 0),
    }


def test_cantera_evaluates_the_same() -> None:
    import cantera as ct

    file = read_entries(cantera_data() / "gri30.yaml")
    for species in ct.Species.list_from_file("gri30.yaml"):
        (entry,) = file.named(species.name)
        assert entry.polynomial is not None
        assert species.composition == entry.composition
        for T in (300.0, 999.0, 1500.0):
            assert species.thermo.cp(T) / ct.gas_constant == pytest.approx(entry.polynomial.cp_R(T), rel=1e-12)
            assert species.thermo.s(T) / ct.gas_constant == pytest.approx(entry.polynomial.s_R(T), rel=1e-12)
