"""The elements of a fixed record: four fields, a fifth one, the line after ``&``, or fields after column 80."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from heatwright.findings import refuse
from heatwright.reading.compositions import count, element_symbol
from heatwright.reading.yaml_nodes import with_caret

if TYPE_CHECKING:
    from heatwright.reading.record_line import Head


def read_elements(head: Head) -> None:
    """Columns 25-44, and what stands after column 80."""
    for start in range(24, 44, 5):
        _element_field(head, head.line[start : start + 5], start + 1)
    if head.further:
        _continued(head)
    else:
        _beyond_80(head)


def read_fifth_element(head: Head, text: str) -> None:
    """Columns 74-78, an addition of CHEMKIN that many readers do not know."""
    if not text.strip() or count(text) == 0:
        return
    before = dict(head.composition)
    if _element_field(head, text, 74) and head.composition != before:
        head.say(
            "warn",
            "fifth-element",
            f"a fifth element stands in columns 74 to 78: {text.strip()!r}",
            74,
            5,
            action="It was read; readers without this extension drop the element without a word, and may take the "
            "default common temperature. Write & after column 80 and the composition on the next line.",
        )


def _element_field(head: Head, text: str, column: int) -> bool:
    """Adds one field of symbol and count; whether it held an element or tried to."""
    if not text.strip() or count(text) == 0:
        return False
    symbol, amount = element_symbol(text[:2]), count(text[2:])
    if symbol is None or amount is None:
        what = f"{text[:2].strip()!r} is no element" if symbol is None else f"{text[2:]!r} is no count"
        head.say(
            "refuse",
            "composition-wrong",
            f"{what} in the element field {text!r}",
            column,
            len(text),
            expected="a symbol in the first two columns and a count, right-justified, in the other three",
            action="For counts above 999 or more than four elements, write & after column 80 and the composition on "
            "the next line.",
        )
        return True
    _add(head, symbol, amount, column, len(text))
    return True


def _add(head: Head, symbol: str, amount: float, column: int, length: int) -> None:
    if amount != int(amount):
        head.say(
            "warn",
            "fractional-count",
            f"the count of {symbol} is {amount:g}",
            column,
            length,
            action="It was read as it stands; other readers cut the fraction off.",
        )
    if amount < 0 and symbol != "E":
        head.say("refuse", "composition-wrong", f"the count of {symbol} is {amount:g}", column, length)
    elif symbol in head.composition:
        head.say("refuse", "composition-wrong", f"the element {symbol} is there twice", column, length)
    elif amount:
        head.composition[symbol] = amount


def _continued(head: Head) -> None:
    """The composition on the lines after ``&``: pairs of symbol and count."""
    if head.composition:
        head.composition.clear()
        head.say(
            "refuse",
            "composition-wrong",
            "elements stand both in columns 25 to 44 and on the line after &",
            25,
            20,
            expected="all of them on one of the two",
            action="Some readers add them up, others take only those after &.",
        )
        return
    for offset, line in enumerate(head.further, 1):
        words = line.replace("&", " ").split("!")[0].split()
        for symbol, amount in _pairs(words):
            known, counted = element_symbol(symbol), count(amount)
            if known is None or counted is None:
                found = f"{symbol} {amount}".strip()
                finding = refuse(
                    "composition-wrong",
                    f"{found!r} on the line after & is no element with its count",
                    where=f"line {head.number + offset}",
                    expected="blank-separated pairs of symbol and count",
                )
                head.findings.append(finding.shown(with_caret(line, line.find(symbol) + 1, len(symbol))))
                return
            if "." in amount and counted == int(counted):
                words_point = f"the count {amount} of {known} is written with a point"
                head.say("warn", "composition-form", words_point, 81, action="Some readers stop at it after &.")
            _add(head, known, counted, 81, 1)


def _pairs(words: list[str]) -> Iterator[tuple[str, str]]:
    yield from zip(words[::2], [*words[1::2], ""][: (len(words) + 1) // 2], strict=True)


def _beyond_80(head: Head) -> None:
    """Elements in fields of ten columns after column 80, an extension; any other text there is a comment."""
    rest = head.line[80:].rstrip()
    chunks = [rest[i : i + 10] for i in range(0, len(rest), 10)]
    pairs = [(element_symbol(c[:2]), count(c[2:])) for c in chunks]
    if not rest or not rest[0].isalpha() or any(symbol is None or n is None for symbol, n in pairs):
        return
    for symbol, n in pairs:
        _add(head, symbol or "", n or 0, 81, len(rest))
    words = f"elements stand in ten-column fields after column 80: {rest.strip()!r}"
    head.say("warn", "composition-form", words, 81, len(rest), action="They were added; most readers leave them out.")
