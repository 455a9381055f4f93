"""Pages of many species: time to make, bytes, nodes, and what a headless Chromium needs to open them; run on demand.

    python tests/benchmarks/report.py [--species 500] [--times 5] [--keep FOLDER]

Two pages: species of the usual mixture (tests/shown.py), and as many of dimethyl ether, each with two torsions and the
ledgers of three routes.  Making is processor time, from the JSON document to the text.  Of the opening the median and
the least of several are printed (seconds since navigation, on the wall), then the processor time of the page's process
by kind, from the browser's own counters.  Without Chromium only what needs none.
"""

from __future__ import annotations

import argparse
import statistics
import sys
import tempfile
import time
from pathlib import Path
from typing import Any

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from browser import CHROMIUM, Browser  # noqa: E402
from heatwright.report.documents import shown_documents  # noqa: E402
from heatwright.report.page import Page, page_html  # noqa: E402
from shown import many  # noqa: E402

LOADED = """(() => {
  const n = performance.getEntriesByType('navigation')[0];
  const paint = performance.getEntriesByName('first-contentful-paint')[0];
  return [paint.startTime, n.domInteractive, n.loadEventEnd].map(t => t / 1000);
})()"""


NODES = """(() => {
  const walker = document.createTreeWalker(document);
  let n = 1;
  while (walker.nextNode()) n += 1;
  return n;
})()"""


def made(species: int, rich: bool) -> tuple[str, float]:
    """The page and the processor seconds it took, with everything imported before."""
    document = many(species, rich=rich)
    start = time.process_time()
    text = page_html(Page(title="Many", species=shown_documents(document).species))
    return text, time.process_time() - start


def opened(browser: Browser, file: Path, times: int) -> dict[str, Any]:
    """Seconds until first paint, parsed and loaded (each time), and the counters of the last opening."""
    found = []
    for _ in range(times):
        browser.open(Path("/dev/null"))  # away from the page, so that its counters do not add up
        before = browser.counters()
        browser.open(file)
        found.append([*browser.ask(LOADED), browser.counters(), before])
    paint, parsed, loaded, after, before = zip(*found, strict=True)
    spent = {k: statistics.median(a[k] - b[k] for a, b in zip(after, before, strict=True)) for k in SPENT}
    return {"paint": paint, "parsed": parsed, "loaded": loaded, "spent": spent, "nodes": browser.ask(NODES)}


SPENT = ("TaskDuration", "LayoutDuration", "RecalcStyleDuration", "ScriptDuration")


def shown_times(values: tuple[float, ...]) -> str:
    """Median and least."""
    return f"{statistics.median(values):.2f} s (least {min(values):.2f})"


def main() -> None:
    """Both pages."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--species", type=int, default=500)
    parser.add_argument("--times", type=int, default=5)
    parser.add_argument("--keep", type=Path, help="folder for the pages")
    options = parser.parse_args()
    browser = Browser() if CHROMIUM else None
    if browser is None:
        print("Chromium is not installed (Debian: apt-get install chromium), so nothing is opened.")
    with tempfile.TemporaryDirectory() as scratch:
        folder = options.keep or Path(scratch)
        folder.mkdir(exist_ok=True)
        for kind, rich in (("usual mixture", False), ("two torsions, three routes", True)):
            text, seconds = made(options.species, rich)
            size = len(text.encode())
            print(f"{options.species} species, {kind}: made in {seconds:.2f} s, {size / 1e6:.2f} MB")
            file = folder / f"{'rich' if rich else 'usual'}.html"
            file.write_text(text, encoding="utf-8")
            if browser is not None:
                seen = opened(browser, file, options.times)
                print(f"  {seen['nodes']:.0f} nodes; first paint {shown_times(seen['paint'])}, parsed "
                      f"{shown_times(seen['parsed'])}, loaded {shown_times(seen['loaded'])}")  # fmt: skip
                spent = (f"{k.removesuffix('Duration')} {v:.2f} s" for k, v in seen["spent"].items())
                print(f"  of it {', '.join(spent)}")
    if browser is not None:
        browser.close()


if __name__ == "__main__":
    main()
