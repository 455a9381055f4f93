"""Time to read outputs: heatwright's molecule with all its findings against cclib's attributes alone.

``python tests/benchmarks/reading.py`` reads each file with both in turn and prints the ratio of the medians.  Files are
those kept with the tests and, when they are there, those of the optional folder; packed ones are unpacked first, so
that both read plain text.  Imports are done before.
"""

from __future__ import annotations

import gzip
import io
import logging
import statistics
import sys
import tempfile
import time
import warnings
from contextlib import redirect_stderr, redirect_stdout
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from heatwright.findings import Refused
from heatwright.reading.outputs import read_output
from kept_outputs import FOLDER
from outside import SHARED

REPEATS = 5
LARGE = 100_000


def by_cclib(path: Path) -> bool:
    """Whether cclib alone reads the file to its end."""
    import cclib

    with warnings.catch_warnings(), redirect_stdout(io.StringIO()), redirect_stderr(io.StringIO()):
        warnings.simplefilter("ignore")
        try:
            return cclib.io.ccread(str(path), loglevel=logging.CRITICAL + 1) is not None
        except Exception:
            return False


def by_heatwright(path: Path) -> bool:
    """Whether there is a molecule."""
    try:
        read_output(path)
    except Refused:
        return False
    return True


def seconds(path: Path) -> tuple[float, float] | None:
    """Medians of both in turn, or None when one of them does not read the file."""
    if not (by_cclib(path) and by_heatwright(path)):
        return None
    times: tuple[list[float], list[float]] = ([], [])
    for _ in range(REPEATS):
        for reader, taken in zip((by_heatwright, by_cclib), times, strict=True):
            start = time.perf_counter()
            reader(path)
            taken.append(time.perf_counter() - start)
    return statistics.median(times[0]), statistics.median(times[1])


def main() -> None:
    """Print the table, and the largest ratio of the large files."""
    files = sorted(FOLDER.glob("*.gz"))
    if SHARED is not None:
        files += sorted(p for p in (SHARED / "outputs").iterdir() if p.is_file() and p.stat().st_size > LARGE)
    worst, ratios = 0.0, []
    with tempfile.TemporaryDirectory() as folder:
        for file in files:
            path = Path(folder) / file.name.removesuffix(".gz")
            path.write_bytes(gzip.decompress(file.read_bytes()) if file.suffix == ".gz" else file.read_bytes())
            taken = seconds(path)
            if taken is None:
                continue
            size, ratio = path.stat().st_size, taken[0] / taken[1]
            ratios.append(ratio)
            worst = max(worst, ratio if size > LARGE else 0.0)
            print(f"{path.name:50} {size / 1000:7.0f} kB {taken[0]:8.4f} s {taken[1]:8.4f} s {ratio:6.2f}", flush=True)
    print(f"median ratio {statistics.median(ratios):.2f}, largest of files above 100 kB {worst:.2f}")


if __name__ == "__main__":
    main()
