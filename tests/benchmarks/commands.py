"""Start-up and main job as whole processes, interleaved with what they are compared to; run on demand.

    python tests/benchmarks/commands.py [--runs 10]

Prints the medians (wall seconds) and their ratios: `heatwright --help` against `import click`, and
`heatwright entry FILE --dHf298 …` against cclib reading the same file.
"""

from __future__ import annotations

import argparse
import shutil
import statistics
import subprocess
import sys
import time

from heatwright.resources import sample_outputs


def seconds(command: list[str]) -> float:
    """Wall time of one run, s."""
    start = time.perf_counter()
    subprocess.run(command, check=True, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    return time.perf_counter() - start


def compare(name: str, ours: list[str], other: list[str], runs: int) -> None:
    """Interleaved medians of two commands after one warm-up each, and their ratio."""
    pairs = [(seconds(ours), seconds(other)) for _ in range(runs + 1)][1:]
    a, b = (statistics.median(column) for column in zip(*pairs, strict=True))
    print(f"{name:<28} {a:7.3f} s   against {b:7.3f} s   ratio {a / b:5.2f}")


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--runs", type=int, default=10)
    runs = parser.parse_args().runs
    heatwright = shutil.which("heatwright", path=f"{sys.prefix}/bin") or "heatwright"
    python = sys.executable
    compare("--help / import click", [heatwright, "--help"], [python, "-c", "import click"], runs)
    for name in ("CH3OH.out", "OH.out", "CH3OCH3.out"):
        file = str(sample_outputs() / name)
        entry = [heatwright, "entry", file, "--dHf298", "-200.7 kJ/mol", "--source", "benchmark"]
        read = [python, "-c", f"import cclib; cclib.io.ccread({file!r})"]
        compare(f"entry / ccread {name}", entry, read, runs)


if __name__ == "__main__":
    main()
