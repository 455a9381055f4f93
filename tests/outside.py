"""Where the optional folder of reference data is: beside the project, or where HEATWRIGHT_SHARED says."""

from __future__ import annotations

import os
from pathlib import Path

import pytest


def _shared() -> Path | None:
    folder = Path(os.environ.get("HEATWRIGHT_SHARED") or Path(__file__).resolve().parents[2] / "shared")
    return folder if folder.is_dir() else None


SHARED: Path | None = _shared()
needs_shared = pytest.mark.skipif(SHARED is None, reason="the optional folder of reference data is not here")
