"""The other programs cclib recognises: its attributes as they are, with version, closing line and failures."""
from __future__ import annotations

from heatwright.reading.dialects.base import Dialect

OTHERS: tuple[type[Dialect], ...] = ()
