"""The lines that are named in errors about TOML files."""

from __future__ import annotations

import json
import tomllib

from hypothesis import given
from hypothesis import strategies as st

from heatwright.reading.toml_lines import key_lines, set_twice

BLANKS = st.sampled_from(["", "\n", "# [not.a.table]\n", "  \n# x = 1\n"])
KEYS = st.sampled_from(["a", "b", "x-1", "CH2(S)", "a.b", "é", ""]) | st.text(max_size=4)
TEXTS = st.text(max_size=8) | st.sampled_from(["[a]", "x = 1", "#", '"', "'", "\\", "]"])


def quoted(text: str) -> str:
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


@st.composite
def values(draw: st.DrawFn, depth: int = 2) -> str:
    kinds = ["text", "literal", "long", "number", "date", *(["list", "table"] if depth else [])]
    kind = draw(st.sampled_from(kinds))
    if kind == "text":
        return quoted(draw(TEXTS))
    if kind == "literal":
        return "'[a] = \"1\" # no comment'"
    if kind == "long":
        inside = draw(st.sampled_from(["\n[z]\ny = 1\n", ' "" ', "\n\n", '\\"""']))
        return draw(st.sampled_from([f'"""{inside}"""', "'''\n[z]\nq = 2'''"]))
    if kind == "number":
        return draw(st.sampled_from(["1", "-2.5e3", "true", "inf", "0x1F"]))
    if kind == "date":
        return draw(st.sampled_from(["1979-05-27 07:32:00", "1979-05-27", "07:32:00.5"]))
    if kind == "list":
        items = draw(st.lists(values(depth - 1), max_size=3))
        return "[" + "".join(f"{draw(BLANKS)}{item}, " for item in items) + draw(BLANKS) + "]"
    items = draw(st.lists(values(0).filter(lambda v: "\n" not in v), max_size=2))
    return "{" + ", ".join(f"k{i} = {item}" for i, item in enumerate(items)) + "}"


@given(st.lists(st.tuples(KEYS, st.lists(st.tuples(KEYS, values(), BLANKS), max_size=3)), max_size=4), st.booleans())
def test_every_key_is_found_on_its_line(tables: list, crlf: bool) -> None:
    """A file is written key by key, and the line of each key is counted while it is written."""
    text, due = "", {}
    for number, (_, pairs) in enumerate(tables):
        text += f"[[t{number % 2}]] # head\n"
        path = (f"t{number % 2}", number // 2)
        due[path] = text.count("\n")
        seen = set()
        for key, value, blank in pairs:
            if key in seen:
                continue
            seen.add(key)
            text += blank
            due[(*path, key)] = text.count("\n") + 1
            text += f"{quoted(key)} = {value}\n"
    text = text.replace("\n", "\r\n") if crlf else text
    document = tomllib.loads(text)
    assert {k: len(v) for k, v in document.items()} == {
        name: len([p for p in due if p[:1] == (name,) and len(p) == 2]) for name in document
    }
    found = key_lines(text)
    assert {path: found.get(path) for path in due} == due


def test_dotted_and_inline_keys_and_items() -> None:
    text = 'a.b.c = 1\n[x."y.z"]\nlist = [\n  "p",\n  { q = 1 },\n]\n[x]\nk = { m = { n = 2 } }\n'
    tomllib.loads(text)
    lines = key_lines(text)
    assert lines["a", "b", "c"] == 1
    assert lines["x", "y.z", "list", 0] == 4
    assert lines["x", "y.z", "list", 1, "q"] == 5
    assert lines["x", "k", "m", "n"] == 8
    assert lines["x",] == 7


def test_what_stands_there_twice_is_found_with_both_lines() -> None:
    assert set_twice("[s.A]\nx = 1\n\n[s.A]\n") == {("s", "A"): (1, 4)}
    assert set_twice("x = 1\ny = 2\nx = 3\n") == {("x",): (1, 3)}
    assert set_twice("[a]\n[a.b]\n[[c]]\n[[c]]\n") == {}


@given(st.text(max_size=60))
def test_text_that_is_no_toml_breaks_nothing(text: str) -> None:
    assert all(1 <= line <= text.count("\n") + 1 for line in key_lines(text).values())
