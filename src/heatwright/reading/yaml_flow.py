"""YAML on one level of brackets or quotes: flow sequences, flow mappings, quoted and plain scalars inside them."""

from __future__ import annotations

import re
from typing import Final

from heatwright.reading.yaml_nodes import Mapping, Node, Scalar, Sequence, Text
from heatwright.reading.yaml_text import folded

UNREADABLE: Final = "yaml-unreadable"
DEEPEST: Final = 60
"""Nesting beyond this is refused; no thermo file needs a tenth of it."""

_SPACE = re.compile(r"(?:[ \t\n]+(?:#[^\n]*)?)*")
_PLAIN_LIST = re.compile(r"\[([^\[\]{}\"'#&*!|>%@`:?]*)\]")
_LIST_ITEM = re.compile(r"[^\s,](?:[^,\n]*[^\s,])?")
_PLAIN = re.compile(
    r"(?:[^\s,\[\]{}#&*!|>'\"%@`\-?:]|[-?:](?![\s,\[\]{}]))(?:[^\n,\[\]{}:#]|:(?![\s,\[\]{}])|(?<=\S)#)*"
)
_SINGLE = re.compile(r"'((?:[^']|'')*)'")
_DOUBLE = re.compile(r'"((?:[^"\\]|\\.)*)"', re.DOTALL)
_ESCAPE = re.compile(r"\\(?:x([0-9A-Fa-f]{2})|u([0-9A-Fa-f]{4})|U([0-9A-Fa-f]{8})|(.))", re.DOTALL)
_LETTERS: Final = {
    "0": "\0", "a": "\a", "b": "\b", "t": "\t", "\t": "\t", "n": "\n", "v": "\v", "f": "\f", "r": "\r", "e": "\x1b",
    " ": " ", '"': '"', "/": "/", "\\": "\\", "N": "\x85", "_": "\xa0", "L": "\u2028", "P": "\u2029",
}  # fmt: skip
_REFUSED: Final = {
    "&": "an anchor", "*": "an alias", "!": "a tag", "|": "a block scalar", ">": "a block scalar",
    "%": "a directive", "@": "a reserved character", "`": "a reserved character", "?": "a complex key",
}  # fmt: skip


def flow_node(source: Text, at: int, depth: int = 0) -> Node:
    """The bracketed or quoted value that starts at offset *at*, or the plain one inside brackets.

    Raises Refused (``yaml-unreadable``).
    """
    text = source.text
    if depth > DEEPEST:
        source.refuse(UNREADABLE, at, f"brackets are nested more than {DEEPEST} deep")
    c = text[at : at + 1]
    if c == "[":
        return _sequence(source, at, depth)
    if c == "{":
        return _mapping(source, at, depth)
    if c in ("'", '"'):
        return quoted(source, at)
    return _plain(source, at)


def quoted(source: Text, at: int) -> Scalar:
    """The scalar in single or double quotes that starts at offset *at*."""
    match = (_SINGLE if source.text[at] == "'" else _DOUBLE).match(source.text, at)
    if match is None:
        source.refuse(UNREADABLE, at, "the quotation mark is never closed")
    if source.text[at] == "'":
        return Scalar(folded(match[1].replace("''", "'")), True, at, match.end())
    return Scalar(_unescaped(source, match[1], at), True, at, match.end())


def unreadable_start(source: Text, at: int) -> None:
    """Refuses what starts like a part of YAML that is not read."""
    c = source.text[at : at + 1]
    if c in _REFUSED:
        source.refuse(
            UNREADABLE,
            at,
            f"{_REFUSED[c]} starts here with {c!r}",
            expected="plain mappings, sequences, numbers and texts, as Cantera's converters write them",
            action="Write the value out, or in quotation marks where a text is meant.",
        )


def skip_space(source: Text, at: int) -> int:
    """The offset after blanks, line ends and comments."""
    match = _SPACE.match(source.text, at)
    return match.end() if match else at


def _sequence(source: Text, at: int, depth: int) -> Sequence:
    simple = _PLAIN_LIST.match(source.text, at)
    if simple is not None and _is_simple(simple[1]):
        first = at + 1
        found = [(m[0], first + m.start(), first + m.end()) for m in _LIST_ITEM.finditer(simple[1])]
        return Sequence(tuple(Scalar(t, False, s, e) for t, s, e in found), at, simple.end(), True)
    items: list[Node] = []
    here = skip_space(source, at + 1)
    while (c := source.text[here : here + 1]) != "]":
        _check_open(source, c, at, "]")
        node = flow_node(source, here, depth + 1)
        here = skip_space(source, node.end)
        if source.text[here : here + 1] == ":":
            node, here = _pair(source, node, here, depth)
        items.append(node)
        here = _after_item(source, here, at, "]")
    return Sequence(tuple(items), at, here + 1, True)


def _is_simple(inside: str) -> bool:
    """Whether the text between brackets is a comma-separated list of plain words, each on one line."""
    items = [item.strip() for item in inside.split(",")]
    if items and not items[-1]:
        items.pop()
    return all(item and "\n" not in item and not (item[0] == "-" and item[1:2] in ("", " ")) for item in items)


def _mapping(source: Text, at: int, depth: int) -> Mapping:
    items: dict[str, Node] = {}
    keys: dict[str, Scalar] = {}
    here = skip_space(source, at + 1)
    while (c := source.text[here : here + 1]) != "}":
        _check_open(source, c, at, "}")
        key = flow_node(source, here, depth + 1)
        here = skip_space(source, key.end)
        if not isinstance(key, Scalar):
            source.refuse(UNREADABLE, key.start, "a collection is used as a key", expected="a word")
        if key.text in items:
            source.refuse(UNREADABLE, key.start, f"the key {key.text!r} is there twice")
        keys[key.text] = key
        value: Node = Scalar("", False, key.end, key.end)
        if source.text[here : here + 1] == ":":
            value, here = _value(source, here, depth)
        items[key.text] = value
        here = _after_item(source, here, at, "}")
    return Mapping(items, keys, at, here + 1, True)


def _pair(source: Text, key: Node, colon: int, depth: int) -> tuple[Mapping, int]:
    """``key: value`` inside a flow sequence."""
    if not isinstance(key, Scalar):
        source.refuse(UNREADABLE, key.start, "a collection is used as a key", expected="a word")
    value, here = _value(source, colon, depth)
    return Mapping({key.text: value}, {key.text: key}, key.start, value.end, True), here


def _value(source: Text, colon: int, depth: int) -> tuple[Node, int]:
    here = skip_space(source, colon + 1)
    if source.text[here : here + 1] in (",", "]", "}"):
        return Scalar("", False, colon + 1, colon + 1), here
    node = flow_node(source, here, depth + 1)
    return node, skip_space(source, node.end)


def _after_item(source: Text, here: int, opened: int, closing: str) -> int:
    c = source.text[here : here + 1]
    if c == ",":
        return skip_space(source, here + 1)
    if c != closing:
        _check_open(source, c, opened, closing)
        source.refuse(UNREADABLE, here, f"{c!r} stands here", expected=f"',' or '{closing}'")
    return here


def _check_open(source: Text, c: str, opened: int, closing: str) -> None:
    if not c:
        source.refuse(UNREADABLE, opened, f"the bracket {source.text[opened]!r} is never closed by '{closing}'")
    if c == ",":
        source.refuse(UNREADABLE, opened, "there is an empty item between commas in this collection")


def _plain(source: Text, at: int) -> Scalar:
    unreadable_start(source, at)
    match = _PLAIN.match(source.text, at)
    if match is None:
        source.refuse(UNREADABLE, at, f"{source.text[at : at + 1]!r} cannot start a value here")
    end = at + len(match[0].rstrip(" \t"))
    # a plain scalar goes on over the line's end until a comma or bracket
    lines = [source.text[at:end]]
    while source.text[match.end() : match.end() + 1] == "\n":
        here = re.compile(r"[ \t\n]*").match(source.text, match.end())
        onward = _PLAIN.match(source.text, here.end()) if here else None
        if here is None or onward is None:
            break
        lines.append("\n" * (here[0].count("\n") - 1) or " ")
        lines.append(onward[0].rstrip(" \t"))
        match, end = onward, onward.start() + len(lines[-1])
    return Scalar("".join(lines), False, at, end)


def _unescaped(source: Text, raw: str, at: int) -> str:
    joined = re.sub(r"(?<!\\)((?:\\\\)*)\\\n[ \t]*", r"\1\\&", raw)
    out, last = [], 0
    joined = folded(joined)
    for match in _ESCAPE.finditer(joined):
        out.append(joined[last : match.start()])
        last = match.end()
        code = match[1] or match[2] or match[3]
        if code:
            out.append(chr(int(code, 16)) if int(code, 16) < 0x110000 else "\ufffd")
        elif match[4] == "&":
            continue  # the line end that a backslash took away
        elif match[4] in _LETTERS:
            out.append(_LETTERS[match[4]])
        else:
            source.refuse(UNREADABLE, at, f"the escape '\\{match[4]}' in this text is none of YAML's")
    return "".join(out) + joined[last:]
