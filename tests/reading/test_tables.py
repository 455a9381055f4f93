"""CSV tables of the user: what is passed over, what is refused, and the line that is named."""

from __future__ import annotations

from pathlib import Path

import pytest

from heatwright.findings import Refused
from heatwright.reading.tables import Row, read_table


def rows(folder: Path, text: str | bytes) -> tuple[Row, ...]:
    path = folder / "t.csv"
    path.write_bytes(text.encode() if isinstance(text, str) else text)
    return read_table(path, "table-wrong", ("name", "value"), ("note",))


def test_comments_blank_lines_quotes_and_line_ends(tmp_path: Path) -> None:
    text = '# first\r\n\r\nname, value ,note\r\n"a, b",1.5,"two\r\nlines"\r\n# between\r\n c ,−2e3,\r\n'
    first, second = rows(tmp_path, "\ufeff" + text)
    assert first.values == {"name": "a, b", "value": "1.5", "note": "two lines"}
    assert (first.place, second.place) == (f"{tmp_path / 't.csv'}:4", f"{tmp_path / 't.csv'}:7")
    assert (first.number("value"), second.number("value"), second.number("note")) == (1.5, -2000.0, None)


@pytest.mark.parametrize(
    ("text", "line", "word"),
    [
        ("name,value\na,1,2\n", 2, "3 fields"),
        ("name,value\na\n", 2, "1 fields"),
        ("name,vlue\na,1\n", 1, "Did you mean value?"),
        ("name\na\n", 1, "the column value is missing"),
        ("name\tvalue\na\t1\n", 1, "not separated by commas"),
        ('name,value\n"a,1\n', 2, "no CSV"),
        ("name,value,note,note\n", 1, "there twice"),
    ],
)
def test_what_is_refused(tmp_path: Path, text: str, line: int, word: str) -> None:
    with pytest.raises(Refused) as caught:
        rows(tmp_path, text)
    (finding,) = caught.value.findings
    assert finding.where == f"{tmp_path / 't.csv'}:{line}"
    assert word in finding.text


@pytest.mark.parametrize("value", ["inf", "nan", "1,5", "1_000", "0x10", "one"])
def test_numbers_are_numbers(tmp_path: Path, value: str) -> None:
    (row,) = rows(tmp_path, f'name,value\na,"{value}"\n')
    with pytest.raises(Refused, match="expected a number"):
        row.number("value")
    with pytest.raises(Refused, match="whole number"):
        row.whole("value")


def test_an_empty_table(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="no rows"):
        rows(tmp_path, "name,value\n")
    with pytest.raises(Refused, match="nothing to read"):
        rows(tmp_path, "")
    with pytest.raises(Refused, match="directory"):
        read_table(tmp_path, "table-wrong", ("name",))
