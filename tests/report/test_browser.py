"""The page in headless Chromium: silent, drawn, no words over others, in both schemes, on both widths, in print."""

from __future__ import annotations

import re
import zlib
from collections.abc import Iterator
from pathlib import Path

import pytest

from browser import LOOK, Browser, needs_chromium
from heatwright.report.documents import shown_documents
from heatwright.report.drawing import Words
from heatwright.report.figures import figures_of
from heatwright.report.page import Page, page_html
from heatwright.report.palette import figure_css
from heatwright.report.svg import joined_ticks, marks_svg, standalone_svg
from shown import many, moved, shown

pytestmark = needs_chromium
WIDTHS = {"phone": 390, "desktop": 1280}


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    started = Browser()
    yield started
    started.close()


@pytest.fixture(scope="module")
def page(tmp_path_factory: pytest.TempPathFactory) -> Path:
    file = tmp_path_factory.mktemp("page") / "report.html"
    failed = (("bad.out", ("The file is empty.",)),)
    made = Page(title="Test", species=tuple(shown().values()), failed=failed, changes=moved(0.5))
    file.write_text(page_html(made), encoding="utf-8")
    return file


def heard(browser: Browser, page: Path) -> list[str]:
    """Console messages, errors, and requests other than that of the page itself."""
    methods = ("Log.entryAdded", "Runtime.consoleAPICalled", "Runtime.exceptionThrown", "Network.requestWillBeSent")
    own = page.resolve().as_uri()
    return [
        str(e["params"])
        for e in browser.events
        if e["method"] in methods and e["params"].get("request", {}).get("url") != own
    ]


@pytest.mark.parametrize("width", list(WIDTHS))
@pytest.mark.parametrize("dark", [False, True], ids=["light", "dark"])
def test_every_plot_is_drawn_and_words_do_not_overlap(browser: Browser, page: Path, width: str, dark: bool) -> None:
    browser.open(page, width=WIDTHS[width], dark=dark)
    seen = browser.ask(LOOK)
    assert seen["figures"] == 1 + sum(len(figures_of(s)) for s in shown().values())
    assert seen["faults"] == []
    assert seen["wide"] <= 0  # nothing is wider than the window
    assert seen["cut"] == []
    assert seen["small"] >= 9.0  # the smallest words of a plot, in px
    assert heard(browser, page) == []


@pytest.mark.parametrize("width", list(WIDTHS))
def test_a_long_page_is_drawn_as_well(
    browser: Browser, tmp_path: Path, width: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("heatwright.report.page.MOST_IN_FULL", 3)
    species = (*shown().values(), shown_documents(many(1, rich=True)).species[0])
    file = tmp_path / "long.html"
    file.write_text(page_html(Page(title="Long", species=species)), encoding="utf-8")
    browser.open(file, width=WIDTHS[width])
    seen = browser.ask(LOOK)
    assert seen["figures"] == sum(len(figures_of(s)) for s in species)
    assert (seen["faults"], seen["cut"]) == ([], [])
    browser.ask("document.querySelectorAll('details').forEach(d => d.open = true)")
    assert browser.ask("document.documentElement.scrollWidth - document.documentElement.clientWidth") <= 0
    assert heard(browser, file) == []
    assert browser.printed().startswith(b"%PDF")


def test_joined_numbers_stand_where_single_ones_stand(browser: Browser, tmp_path: Path) -> None:
    """The middle of "1000" on a joined axis of x, the end of "200" on one of y, within 1.5 units."""
    ticks = [Words((100.0, 50.0), "1000", "tick", "middle"), Words((200.0, 50.0), "−5", "tick", "middle"),
             Words((40.0, 20.0), "200", "tick", "end"), Words((40.0, 90.0), "0.5", "tick", "end")]  # fmt: skip
    svg = f'<svg class="fig" viewBox="0 0 300 100">{marks_svg(ticks)}{joined_ticks(ticks)}</svg>'
    file = tmp_path / "ticks.html"
    file.write_text(f"<!DOCTYPE html><meta charset='utf-8'><style>{figure_css()}</style>{svg}", encoding="utf-8")
    browser.open(file)
    boxes = browser.ask(
        "[...document.querySelectorAll('text')].map(t => [...t.textContent].map((c, i) => {"
        "const b = t.getExtentOfChar(i); return [c, b.x, b.x + b.width, b.y]}))"
    )
    single, joined = boxes[:4], [c for axis in boxes[4:] for c in axis if c[0] != " "]
    assert [c[0] for word in single for c in word] == [c[0] for c in joined]
    at = 0
    for tick, word in zip(ticks, single, strict=True):
        mine = joined[at : at + len(word)]
        at += len(word)
        assert mine[0][3] == pytest.approx(word[0][3], abs=0.2)
        middle = [(w[0][1] + w[-1][2]) / 2.0 for w in (word, mine)]
        end = [w[-1][2] for w in (word, mine)]
        assert (middle if tick.anchor == "middle" else end)[1] == pytest.approx(
            (middle if tick.anchor == "middle" else end)[0], abs=1.5
        )


def test_the_look_finds_faults(browser: Browser, tmp_path: Path) -> None:
    """Words over each other, a line out of the frame and one that cannot be seen are found where they are."""
    text = page_html(Page(title="T", species=(shown()["CO2"],)))
    broken = re.sub(r'(<text class="tick m" x=")[^"]*', r"\g<1>100", text, count=3)
    broken = broken.replace('<path class="polynomial" d="M46', '<path class="polynomial" d="M-46', 1)
    broken = broken.replace('<path class="hair"', '<path style="stroke:none" class="hair"', 1)
    file = tmp_path / "broken.html"
    file.write_text(broken, encoding="utf-8")
    browser.open(file)
    faults = " ".join(browser.ask(LOOK)["faults"])
    assert "overlap" in faults
    assert "leaves the frame" in faults
    assert "hair cannot be seen" in faults


def test_a_request_would_be_heard_and_stopped(browser: Browser, page: Path, tmp_path: Path) -> None:
    file = tmp_path / "asking.html"
    asking = '<img src="file:///nowhere.png"><script>console.log("x")</script></main>'
    file.write_text(page.read_text(encoding="utf-8").replace("</main>", asking), encoding="utf-8")
    browser.open(file)
    assert heard(browser, file) != []


def test_the_scheme_is_the_readers(browser: Browser, page: Path) -> None:
    grounds = []
    for dark in (False, True):
        browser.open(page, dark=dark)
        grounds.append(browser.ask("getComputedStyle(document.body).backgroundColor"))
    assert grounds == ["rgb(252, 251, 248)", "rgb(22, 24, 27)"]


ROWS = """
[...document.querySelectorAll('.rows .row:not(.head)')].filter(r => r.getClientRects().length)
  .map(r => [r.getBoundingClientRect().top, r.querySelector('a').textContent])
  .sort((a, b) => a[0] - b[0]).map(r => r[1])
"""


def test_the_index_is_sorted_without_script(browser: Browser, page: Path) -> None:
    species = shown()
    browser.open(page)
    assert browser.ask(ROWS) == list(species)
    browser.ask("document.querySelector('#o-s').click()")
    by_s = sorted(species, key=lambda n: species[n].s298_J_mol_K)
    assert browser.ask(ROWS) == by_s
    browser.ask("document.querySelector('#o-down').click()")
    assert browser.ask(ROWS) == by_s[::-1]
    head = "document.querySelector('.row.head').getBoundingClientRect().top"
    assert browser.ask(f"{head} < document.querySelector('.rows .row:not(.head)').getBoundingClientRect().top")
    browser.ask("document.querySelector('#o-warned')?.click()")
    warned = [n for n in by_s[::-1] if any(f.severity == "warn" for f in species[n].findings)]
    assert browser.ask(ROWS) == (warned or by_s[::-1])


def test_small_pictures_are_drawn_in_the_index(browser: Browser, page: Path) -> None:
    browser.open(page)
    boxes = browser.ask(
        "[...document.querySelectorAll('.row .pic use')].map(u => {const b = u.getBBox(); return [b.width, b.height]})"
    )
    assert len(boxes) == len(shown())
    assert all(w > 5 and h > 5 for w, h in boxes)


def test_numbers_can_be_opened(browser: Browser, page: Path) -> None:
    browser.open(page, width=390)
    browser.ask("document.querySelectorAll('details').forEach(d => d.open = true)")
    assert browser.ask("document.documentElement.scrollWidth - document.documentElement.clientWidth") <= 0
    rows = browser.ask(
        "[...document.querySelectorAll('details tr')].filter(r => r.getBoundingClientRect().height > 5).length"
    )
    assert rows > 200


def test_it_prints(browser: Browser, page: Path) -> None:
    browser.open(page, dark=True)
    pdf = browser.printed()
    assert pdf.startswith(b"%PDF")
    assert len(re.findall(rb"/Type\s*/Page\b", pdf)) >= len(shown())
    streams = [zlib.decompress(s) for s in re.findall(rb"stream\r?\n(\x78.*?)endstream", pdf, re.DOTALL) if _whole(s)]
    assert sum(s.count(b" c\n") + s.count(b" l\n") for s in streams) > 2000  # lines and curves, not pictures
    browser.open(page, dark=True, media="print")
    assert browser.ask("getComputedStyle(document.body).backgroundColor") == "rgb(255, 255, 255)"
    assert browser.ask("getComputedStyle(document.querySelector('h1')).color") == "rgb(34, 38, 43)"
    assert browser.ask(LOOK)["faults"] == []


def _whole(stream: bytes) -> bool:
    try:
        zlib.decompress(stream)
    except zlib.error:
        return False
    return True


def test_figures_stand_alone(browser: Browser, tmp_path: Path) -> None:
    for figure in figures_of(shown()["methanol"]):
        file = tmp_path / f"{figure.key}.svg"
        file.write_text(standalone_svg(figure), encoding="utf-8")
        browser.open(file)
        assert browser.ask("document.documentElement.tagName") == "svg"
        assert browser.ask("[...document.querySelectorAll('path, circle')].some(p => p.getBBox().width > 20)")
        assert heard(browser, file) == []


def test_five_hundred_species_are_there_at_once(browser: Browser, tmp_path: Path) -> None:
    file = tmp_path / "many.html"
    file.write_text(page_html(Page(title="Many", species=shown_documents(many(500)).species)), encoding="utf-8")
    first, loaded = [], []
    for _ in range(3):
        browser.open(file)
        first.append(browser.ask("performance.getEntriesByName('first-contentful-paint')[0].startTime"))
        assert heard(browser, file) == []
        loaded.append(browser.ask("performance.getEntriesByType('navigation')[0].loadEventEnd"))
    assert min(first) < 1000.0
    assert min(loaded) < 4000.0  # 0.8 s alone on the machine; the tests share it
    assert browser.ask("document.querySelectorAll('article').length") == 500
