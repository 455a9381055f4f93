"""Lines are kept from cclib's parsers: what is read is the same as when they see every line."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest

from heatwright.reading import outputs, parsing
from heatwright.reading.detection import detect
from heatwright.reading.dialects import dialect_of
from heatwright.reading.files import read_text
from heatwright.reading.jobs import choose
from heatwright.reading.lines import Lines
from heatwright.reading.skipping import _MARKS, shown_lines
from heatwright.reading.text import Text
from kept_outputs import FOLDER, text_of
from outside import SHARED

USED = ("atomnos", "atomcoords", "atommasses", "vibfreqs", "vibdisps", "scfenergies", "mpenergies", "ccenergies",
        "scannames", "charge", "mult")  # fmt: skip
FILES = sorted(FOLDER.glob("*.gz"))
if SHARED is not None:
    FILES += sorted(p for p in (SHARED / "outputs").iterdir() if p.is_file() and p.suffix not in (".csv", ".md"))
    FILES += sorted((SHARED / "computed").glob("*.gz"))[::10]


def same(a: object, b: object) -> bool:
    if a is None or b is None:
        return a is b
    try:
        return np.array_equal(np.asarray(a, dtype=float), np.asarray(b, dtype=float), equal_nan=True)
    except (TypeError, ValueError):
        return a == b


@pytest.mark.parametrize("path", FILES, ids=lambda p: p.name)
def test_skipping_changes_nothing(path: Path) -> None:
    stored = read_text(path)
    program = detect(stored.text).program
    if program is None or shown_lines(program.parser) is None:
        return
    dialect = dialect_of(program.name)
    text = Text.of(dialect.repaired(stored.text))
    for job in range(1, len(dialect.jobs(text)) + 1):
        pieces = choose(dialect, text, job).pieces
        some, every = (parsing.parse(program.parser, pieces, skip=skip) for skip in (True, False))
        different = [n for n in USED if not same(some.values.get(n), every.values.get(n))]
        assert different == [], (job, different)
        assert ("optstatus" in some.values) == ("optstatus" in every.values)


def test_marks_begin_with_what_is_rare() -> None:
    """The search through the text stops where a mark may begin; numbers and the blanks between them are most of it."""
    begins = [mark for marks in _MARKS.values() for mark in marks if mark[0] in " .-0123456789"]
    assert begins == ["1 entries found in Z-matrix"]


def test_each_line_is_given_to_blocks_and_marked_ones_to_the_main_loop() -> None:
    text = "title\n one\nMARK a\nblock\n two\nMARK b\nend"
    lines = Lines([Text(text, 0, 18), Text(text, 18, len(text))], re.compile("MARK"))
    seen = []
    for line in lines:
        seen.append(line)
        if line.startswith("MARK a"):
            assert (next(lines), lines.pos, lines.last_lines[-2:]) == ("block\n", 24, ["", "block\n"])
    assert seen == ["title\n", "MARK a\n", "MARK b\n"]
    assert next(lines, "over") == "over"
    lines.reset()
    assert [next(lines), *lines] == text.splitlines(keepends=True)
    assert lines.last_lines[-2:] == ["MARK b\n", "end"]


def test_a_parser_is_not_asked_about_lines_that_do_not_matter(monkeypatch: pytest.MonkeyPatch) -> None:
    from cclib.parser.gaussianparser import Gaussian

    asked: list[str] = []
    whole = Gaussian.extract
    monkeypatch.setattr(Gaussian, "extract", lambda self, file, line: (asked.append(line), whole(self, file, line))[1])
    text = text_of("gaussian16_dvb_freq.out")
    parsing.parse("Gaussian", [Text.of(text)], due=("vibfreqs", "vibdisps", "atomcoords", "charge", "mult"))
    assert 5 < len(asked) < 0.03 * text.count("\n")


def test_missing_attributes_are_looked_for_in_all_lines(monkeypatch: pytest.MonkeyPatch) -> None:
    path = FOLDER / "qchem51_water_freq.out.gz"
    full = outputs.read_output(path)
    monkeypatch.setattr(parsing, "shown_lines", lambda parser: __import__("re").compile("nothing at all"))
    again = outputs.read_output(path)
    assert again.wavenumbers_cm1.tolist() == full.wavenumbers_cm1.tolist()
    assert again.coordinates_A.tolist() == full.coordinates_A.tolist()
