"""How YAML joins the lines of one scalar."""

from __future__ import annotations


def folded(text: str) -> str:
    """Lines of one scalar as YAML joins them: a line end is a blank, an empty line a line end.

    >>> folded("one\\n  two\\n\\n  three")
    'one two\\nthree'
    """
    if "\n" not in text:
        return text
    first, *rest = text.split("\n")
    lines = [first.rstrip(" \t"), *(line.strip(" \t") for line in rest[:-1]), rest[-1].lstrip(" \t")]
    out, empty = lines[0], 0
    for line in lines[1:-1]:
        if not line:
            empty += 1
            continue
        out += ("\n" * empty or " ") + line
        empty = 0
    return out + ("\n" * empty or " ") + lines[-1]


def block_text(lines: list[str], fold: bool, chomp: str) -> str:
    """The text of a block scalar's lines; ``-`` drops, ``+`` keeps the line ends at its end."""
    content = len(lines)
    while content and not lines[content - 1]:
        content -= 1
    body = _folded_block(lines[:content]) if fold else "\n".join(lines[:content])
    if chomp == "-" or (not content and chomp != "+"):
        return body
    return body + "\n" * (1 + len(lines) - content if chomp == "+" else 1)


def _folded_block(lines: list[str]) -> str:
    """Lines of a ``>`` scalar: line ends become blanks, but not around empty and more indented lines."""
    out = ""
    empty = 0
    previous = ""
    for i, line in enumerate(lines):
        if not line:
            empty += 1
            continue
        if i == empty and not out:
            out = "\n" * empty + line
        elif previous[:1] in (" ", "\t") or line[:1] in (" ", "\t"):
            out += "\n" * (empty + 1) + line
        else:
            out += ("\n" * empty or " ") + line
        empty, previous = 0, line
    return out
