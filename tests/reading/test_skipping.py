"""Lines are kept from cclib's parsers: what is read is the same as when they see every line."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from heatwright.reading import outputs, parsing
from heatwright.reading.detection import detect
from heatwright.reading.dialects import dialect_of
from heatwright.reading.files import read_text
from heatwright.reading.jobs import choose
from heatwright.reading.skipping import shown_lines
from heatwright.reading.text import Text
from kept_outputs import FOLDER
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


def test_missing_attributes_are_looked_for_in_all_lines(monkeypatch: pytest.MonkeyPatch) -> None:
    path = FOLDER / "qchem51_water_freq.out.gz"
    full = outputs.read_output(path)
    monkeypatch.setattr(parsing, "shown_lines", lambda parser: __import__("re").compile("nothing at all"))
    again = outputs.read_output(path)
    assert again.wavenumbers_cm1.tolist() == full.wavenumbers_cm1.tolist()
    assert again.coordinates_A.tolist() == full.coordinates_A.tolist()
