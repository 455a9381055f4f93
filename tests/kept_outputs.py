"""The outputs that are kept with the tests (``data/reading``; their README says what each is)."""

from __future__ import annotations

import gzip
from pathlib import Path
from typing import Any

from heatwright.findings import Refused
from heatwright.molecule import Molecule
from heatwright.reading.outputs import read_output

FOLDER = Path(__file__).parent / "data" / "reading"


def kept(name: str) -> Path:
    """The path of a kept output by its name without ``.gz``."""
    return FOLDER / f"{name}.gz"


def text_of(name: str) -> str:
    """Its text."""
    return gzip.decompress(kept(name).read_bytes()).decode("utf-8", errors="replace")


def codes(molecule: Molecule, severity: str | None = None) -> set[str]:
    """Codes of the findings, of one severity or all."""
    return {f.code for f in molecule.findings if severity in (None, f.severity)}


def read_text(folder: Path, text: str | bytes, **options: Any) -> Molecule:
    """The molecule of a text that is written to a file first."""
    path = folder / "made.out"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return read_output(path, **options)


def outcome(path: Path) -> tuple[str, set[str], Molecule | None]:
    """``refuse``, ``warn`` or ``ok``, with the codes of that severity, and the molecule when there is one."""
    try:
        molecule = read_output(path)
        findings = molecule.findings
    except Refused as error:
        molecule, findings = None, error.findings
    for severity in ("refuse", "warn"):
        found = {f.code for f in findings if f.severity == severity}
        if found:
            return severity, found, molecule
    return "ok", set(), molecule
