"""The part of YAML that Cantera's files are written in, read strictly and with the place of every value.

Block and flow mappings and sequences, plain, quoted and block scalars, comments.  Anchors, aliases, tags, complex keys,
several documents and tabs as indentation are refused with their place, and so is everything that is no YAML at all: a
value is never guessed.  Scalars stay texts; whoever needs a number asks for it, so that a species called NO stays one.
"""

from __future__ import annotations

import re
from collections.abc import Callable

from heatwright.reading.yaml_flow import DEEPEST, UNREADABLE, flow_node, quoted, unreadable_start
from heatwright.reading.yaml_nodes import Mapping, Node, Scalar, Sequence, Text
from heatwright.reading.yaml_text import block_text, folded

_KEY = re.compile(r"(?:[^\s,\[\]{}#&*!|>'\"%@`\-?:]|[-?:](?=\S))(?:[^\n:#]|:(?=\S)|(?<=\S)#)*?(?=[ \t]*:(?:[ \t\n]|$))")
_QUOTED_KEY = re.compile(r"(?:'(?:[^'\n]|'')*'|\"(?:[^\"\\\n]|\\.)*\")(?=[ \t]*:(?:[ \t\n]|$))")
_PLAIN_LINE = re.compile(r"(?:[^\n#:]|:(?=[^\s])|(?<=[^\s])#)*")
_HEADER = re.compile(r"[|>](?:([1-9])([+-]?)|([+-])([1-9])?)?[ \t]*(?:(?<=[ \t])#[^\n]*)?(?=\n|$)")
_NOTHING_MORE = re.compile(r"[ \t]*(?:(?:(?<=[ \t])|(?<=^))#[^\n]*)?(?=\n|$)")

Skip = Callable[[str], bool]


def yaml_document(text: str, skip: Skip | None = None) -> Mapping:
    """The mapping that *text* (line ends ``\\n``) holds.

    skip : tells of a key at the top level whether its value is of no interest; such a value is an empty scalar.

    Raises Refused (``yaml-unreadable``) with line, column and the line itself.

    >>> document = yaml_document("species:\\n- name: NO\\n  composition: {N: 1, O: 1}\\n")
    >>> document.items["species"].items[0].items["name"].text
    'NO'
    """
    reader = _Blocks(Text.of(text), skip)
    return reader.document()


class _Blocks:
    """Recursive descent over lines; ``at`` is the offset of what is read next."""

    def __init__(self, source: Text, skip: Skip | None) -> None:
        self.source = source
        self.text = source.text
        self.skip = skip
        self.at = 0
        self.depth = 0

    def document(self) -> Mapping:
        if self.text.startswith("%YAML"):
            self.at = self._line_end(0) + 1
        self._to_content()
        if self._marker() == "---":
            self.at += 3
            self._nothing_more()
            self._to_content()
        if self.at >= len(self.text):
            return Mapping({}, {}, 0, 0)
        node = self._block(0)
        self._to_content()
        if self._marker() == "...":
            self.at = self._line_end(self.at)
            self._to_content()
        if self.at < len(self.text):
            what = "a second document starts" if self._marker() else "the indentation fits nothing above"
            self.source.refuse(UNREADABLE, self.at, f"{what} here", expected="one mapping, evenly indented")
        if not isinstance(node, Mapping):
            self.source.refuse(UNREADABLE, node.start, "the file's top level is not a mapping", expected="`key: value`")
        return node

    # --- moving on -------------------------------------------------------------------------------------------------

    def _line_end(self, at: int) -> int:
        end = self.text.find("\n", at)
        return len(self.text) if end < 0 else end

    def _marker(self) -> str:
        found = self.text[self.at : self.at + 3]
        alone = self.text[self.at + 3 : self.at + 4] in ("", "\n", " ")
        return found if found in ("---", "...") and alone and self._column() == 0 else ""

    def _column(self) -> int:
        return self.at - (self.text.rfind("\n", 0, self.at) + 1)

    def _to_content(self) -> None:
        """Moves over blank lines and comments to the first character of content."""
        while self.at < len(self.text):
            start = self.at
            while self.text[self.at : self.at + 1] == " ":
                self.at += 1
            c = self.text[self.at : self.at + 1]
            if c == "\t":
                self._tab_is_blank(start)
            elif c not in ("\n", "#", ""):
                return
            self.at = self._line_end(self.at) + 1
        self.at = len(self.text)

    def _tab_is_blank(self, start: int) -> None:
        rest = self.text[start : self._line_end(start)].strip()
        if rest and not rest.startswith("#"):
            self.source.refuse(
                UNREADABLE, self.at, "a tab is used for indentation", expected="blanks", action="Replace the tab."
            )

    def _nothing_more(self) -> None:
        """The rest of the line is blank or a comment; moves to the next line."""
        match = _NOTHING_MORE.match(self.text, self.at)
        if match is None:
            rest = self.text[self.at : self._line_end(self.at)]
            at = self.at + len(rest) - len(rest.lstrip())
            self.source.refuse(UNREADABLE, at, "there is more on the line than one value", expected="the line's end")
        self.at = min(match.end() + 1, len(self.text))

    # --- values ----------------------------------------------------------------------------------------------------

    def _block(self, least: int) -> Node:
        """The value that starts at the next content, indented by *least* columns or more; nothing gives ``""``."""
        here = self.at
        self._to_content()
        column = self._column()
        if self.at >= len(self.text) or column < least or self._marker():
            return Scalar("", False, min(here, len(self.text)), min(here, len(self.text)))
        return self._here(column, least)

    def _here(self, column: int, least: int) -> Node:
        """The block collection or scalar at the present place, which is *column*."""
        self.depth += 1
        if self.depth > DEEPEST:
            self.source.refuse(UNREADABLE, self.at, f"values are nested more than {DEEPEST} deep")
        if self._at_dash():
            node: Node = self._sequence(column)
        elif self._key() is not None:
            node = self._mapping(column)
        else:
            node = self._scalar(least)
        self.depth -= 1
        return node

    def _at_dash(self) -> bool:
        return self.text[self.at : self.at + 1] == "-" and self.text[self.at + 1 : self.at + 2] in ("", " ", "\n")

    def _key(self) -> tuple[str, int] | None:
        match = _QUOTED_KEY.match(self.text, self.at)
        if match is not None:
            return quoted(self.source, self.at).text, match.end()
        match = _KEY.match(self.text, self.at)
        return None if match is None else (match[0], match.end())

    def _sequence(self, column: int) -> Sequence:
        start = self.at
        items: list[Node] = []
        marks: list[int] = []
        while self.at < len(self.text) and self._column() == column and self._at_dash() and not self._marker():
            marks.append(self.at)
            items.append(self._after_dash(column))
            self._to_content()
        self._check_indent(column)
        return Sequence(tuple(items), start, max(items[-1].end, marks[-1] + 1), marks=tuple(marks))

    def _after_dash(self, column: int) -> Node:
        self.at += 1
        while self.text[self.at : self.at + 1] == " ":
            self.at += 1
        if self.text[self.at : self.at + 1] in ("\n", "#", ""):
            self._nothing_more()
            return self._block(column + 1)
        return self._here(self._column(), column + 1)

    def _mapping(self, column: int) -> Mapping:
        start = self.at
        items: dict[str, Node] = {}
        keys: dict[str, Scalar] = {}
        while self.at < len(self.text) and self._column() == column and not self._at_dash() and not self._marker():
            found = self._key()
            if found is None:
                unreadable_start(self.source, self.at)
                self.source.refuse(UNREADABLE, self.at, "no `key: value` stands here", expected="a key with a colon")
            name, end = found
            if name in items:
                self.source.refuse(UNREADABLE, self.at, f"the key {name!r} is there twice in one mapping")
            keys[name] = Scalar(name, False, self.at, end)
            self.at = self.text.index(":", end) + 1
            items[name] = self._skipped() if self._is_skipped(name, column) else self._after_key(column)
            self._to_content()
        self._check_indent(column)
        last = next(reversed(items))
        return Mapping(items, keys, start, max(items[last].end, keys[last].end + 1))

    def _is_skipped(self, name: str, column: int) -> bool:
        return self.skip is not None and column == 0 and self.depth == 1 and self.skip(name)

    def _skipped(self) -> Scalar:
        """Moves to the next key at the top level."""
        start = self.at
        onward = re.compile(r"^(?![ #\n-]|$)|^-(?! )", re.MULTILINE).search(self.text, self._line_end(self.at))
        self.at = onward.start() if onward else len(self.text)
        return Scalar("", False, start, self.at)

    def _after_key(self, column: int) -> Node:
        while self.text[self.at : self.at + 1] in (" ", "\t"):
            self.at += 1
        if self.text[self.at : self.at + 1] in ("\n", "#", ""):
            self._nothing_more()
            self._to_content()
            dash = self._at_dash() and self._column() == column
            return self._block(column if dash else column + 1)
        return self._scalar(column + 1)

    def _check_indent(self, column: int) -> None:
        """After a collection the next content is less indented, or it belongs to nothing."""
        if self.at < len(self.text) and self._column() > column:
            self.source.refuse(
                UNREADABLE, self.at, "the indentation fits nothing above", expected=f"{column} blanks or fewer"
            )

    def _scalar(self, least: int) -> Node:
        c = self.text[self.at]
        if c in "|>":
            return self._block_scalar(least)
        if c in "[{'\"":
            node = flow_node(self.source, self.at)
            self.at = node.end
            self._nothing_more()
            return node
        unreadable_start(self.source, self.at)
        return self._plain(least)

    def _plain(self, least: int) -> Scalar:
        """A plain scalar, over several lines when the next ones are indented enough."""
        start = self.at
        lines, end = [self._plain_line()], self._content_end(start)
        while not self._comment_follows():
            here = self.at
            self._to_content()
            if self.at >= len(self.text) or self._column() < least or self._marker():
                break
            if "#" in self.text[here : self.at]:
                break  # a comment ends the scalar
            lines.extend([""] * (self.text.count("\n", here, self.at)))
            at = self.at
            lines.append(self._plain_line())
            end = self._content_end(at)
        return Scalar(folded("\n".join(lines)), False, start, end)

    def _plain_line(self) -> str:
        """One line of a plain scalar; moves to the start of the next line, or to the comment that ends the scalar."""
        match = _PLAIN_LINE.match(self.text, self.at)
        found = match[0] if match else ""
        stop = self.at + len(found)
        if self.text[stop : stop + 1] == ":":
            self.source.refuse(
                UNREADABLE,
                stop,
                "a colon with a blank after it stands inside a value",
                expected="a value in quotation marks, or one key on a line",
            )
        self.at = stop if self.text[stop : stop + 1] == "#" else min(stop + 1, len(self.text))
        return found.rstrip(" \t")

    def _comment_follows(self) -> bool:
        if self.text[self.at : self.at + 1] != "#" or self._column() == 0:
            return False
        self.at = min(self._line_end(self.at) + 1, len(self.text))
        return True

    def _content_end(self, at: int) -> int:
        match = _PLAIN_LINE.match(self.text, at)
        return at + len(match[0].rstrip(" \t")) if match else at

    def _block_scalar(self, least: int) -> Scalar:
        start = self.at
        header = _HEADER.match(self.text, self.at)
        if header is None:
            self.source.refuse(UNREADABLE, self.at, "the head of this block scalar cannot be read", expected="| or >")
        chomp = header[2] or header[3] or ""
        self.at = min(header.end() + 1, len(self.text))
        given = header[1] or header[4]
        indent = least - 1 + int(given) if given else None
        lines: list[str] = []
        end = header.end()
        while self.at < len(self.text):
            stop = self._line_end(self.at)
            line = self.text[self.at : stop]
            own = len(line) - len(line.lstrip(" "))
            if line.strip(" "):
                indent = max(own, least) if indent is None else indent
                if own < indent:
                    break
                end = stop
            lines.append(line[indent:] if indent is not None else "")
            self.at = min(stop + 1, len(self.text))
            if stop == len(self.text):
                break
        return Scalar(block_text(lines, self.text[start] == ">", chomp), True, start, end)
