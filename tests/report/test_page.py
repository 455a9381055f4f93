"""The page: one file without requests and script, the same bytes for the same values, whole and accessible."""

from __future__ import annotations

import re
import time
from html.parser import HTMLParser

import pytest

from heatwright.report.documents import shown_documents
from heatwright.report.figures import figures_of
from heatwright.report.long import LEGEND, common_facts, facts_line
from heatwright.report.page import POLICY, Page, anchors_of, formula_markup, natural, page_html, shown_number
from heatwright.report.species import Said, Species
from heatwright.report.taking import species_of
from heatwright.writing.comment import CAUTION
from shown import document_of, many, rich_entry, shown


def page(*species: Species, **changes) -> str:
    return page_html(Page(**{"title": "Test", "species": species or tuple(shown().values()), **changes}))


class Elements(HTMLParser):
    """Start tags with attributes, and the text of each element of interest."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.words: list[str] = []
        self.feed(text)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs)))

    handle_startendtag = handle_starttag

    def handle_data(self, data: str) -> None:
        self.words.append(data)

    def having(self, *names: str) -> list[dict[str, str | None]]:
        return [a for tag, a in self.tags if tag in names]


def test_nothing_is_asked_for_and_nothing_runs() -> None:
    text = page()
    assert (
        re.findall(r"\bsrc\s*=|url\(|<script|<link|<iframe|<object|<embed|@import|\bon\w+\s*=\s*\"|javascript:", text)
        == []
    )
    targets = [a["href"] for a in Elements(text).having("a", "use", "image") if "href" in a]
    assert targets
    assert all(t.startswith("#") for t in targets)
    (policy,) = [a["content"] for a in Elements(text).having("meta") if a.get("http-equiv")]
    assert policy == POLICY
    assert policy.startswith("default-src 'none'")
    assert "http:" not in text
    assert "https:" not in text


def test_the_same_values_give_the_same_bytes() -> None:
    assert page() == page()
    assert not re.search(r"\b20[2-9]\d-\d\d-\d\d\b", page())


def test_ids_are_unique_and_names_of_plots_resolve() -> None:
    found = Elements(page())
    ids = [a["id"] for _, a in found.tags if "id" in a]
    assert len(set(ids)) == len(ids)
    images = [a for a in found.having("svg") if a.get("role") == "img"]
    assert len(images) >= 30
    assert all(set(a["aria-labelledby"].split()) <= set(ids) and len(a["aria-labelledby"].split()) == 2 for a in images)
    assert {a["href"].removeprefix("#") for a in found.having("a", "use")} <= set(ids)
    assert all(a.get("aria-hidden") == "true" for a in found.having("svg") if a.get("role") != "img")


def test_every_plot_has_its_numbers_beside_it() -> None:
    for figure in re.findall(r"<figure>.*?</figure>", page(), re.DOTALL):
        assert "<desc" in figure
        assert re.search(r"<details><summary>numbers</summary>.*<th scope=\"col\">.*<td>", figure, re.DOTALL)


def test_caution_and_evidence_are_there() -> None:
    text = page()
    footer = text[text.index("<footer>") :]
    assert " ".join(CAUTION) in footer
    for species in shown().values():
        assert text.count(species.evidence.replace("'", "&#39;")) == 2  # index and section


HOSTILE = "\"><script>alert(1)</script><img src=x onerror=alert(1)>&'{{7*7}}"


def test_hostile_words_stay_words() -> None:
    made = Species(
        name=HOSTILE,
        formula=HOSTILE,
        composition={},
        evidence=HOSTILE,
        facts=(("file", HOSTILE),),
        findings=(Said("warn", "x", HOSTILE),),
        polynomial=shown()["CO2"].polynomial,
    )
    text = page(made, shown()["methanol"], title=HOSTILE, subtitle=HOSTILE, failed=((HOSTILE, (HOSTILE,)),))
    found = Elements(text)
    assert found.having("script", "img") == []
    assert all(not name.startswith("on") for _, a in found.tags for name in a)
    assert "49" not in "".join(w for w in found.words if "{{" in w)


def test_a_page_of_bare_species_is_whole() -> None:
    text = page(Species(name="X", formula="X", composition={}))
    assert "–" in text
    assert "<figure>" not in text


def test_anchors_and_formulas() -> None:
    assert anchors_of(["a b", "a-b", "", "ü", "a-b-2"]) == ["a-b", "a-b-2", "species", "-", "a-b-2-2"]
    assert str(formula_markup("C6H5O2-")) == "C<sub>6</sub>H<sub>5</sub>O<sub>2</sub><sup>-</sup>"
    assert str(formula_markup("H")) == "H"
    assert sorted(["CH10", "CH2", "c"], key=natural) == ["c", "CH2", "CH10"]


def test_orders_of_the_index() -> None:
    text = page()
    rows = re.findall(r'<div class="row(?: w)?" role="row" style="([^"]*)".*?<a href="#s-([^"]*)"', text)
    places = {name: dict(p.split(":") for p in style.split(";")) for style, name in rows}
    species = shown()
    by_h = sorted(species, key=lambda n: species[n].dHf298_kJ_mol)
    assert sorted(places, key=lambda n: int(places[n]["--h"])) == anchors_of(by_h)
    by_s = sorted(species, key=lambda n: species[n].s298_J_mol_K)
    assert sorted(places, key=lambda n: int(places[n]["--s"])) == anchors_of(by_s)


@pytest.mark.parametrize(("rich", "most_MB", "most_elements"), [(False, 9.0, 350), (True, 15.0, 520)])
def test_five_hundred_species(rich: bool, most_MB: float, most_elements: int) -> None:
    n = 500 if not rich else 101
    document = many(n, rich=rich)
    start = time.process_time()
    text = page(*shown_documents(document).species)
    spent = time.process_time() - start
    assert spent < 20.0 * n / 500
    assert len(text.encode()) < most_MB * 1e6 * n / 500
    assert text.count("<article") == n
    assert len(Elements(text).tags) < most_elements * n  # what opening costs


@pytest.fixture
def long_page(monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.setattr("heatwright.report.page.MOST_IN_FULL", 3)
    return page(*shown().values(), species_of(document_of(rich_entry())))


def test_a_long_page_says_that_it_is_in_brief(long_page: str) -> None:
    assert "How to read what follows" in long_page
    assert "few telling rows" in long_page
    assert "in a report of fewer of them" in long_page
    for kind in ("structure", "cp", "residuals", "cp-shares", "formation"):
        assert long_page.count(LEGEND[kind]) == 1
    assert LEGEND["slope"].replace("'", "&#39;") not in long_page


def test_a_page_of_few_is_not_in_brief() -> None:
    assert "How to read what follows" not in page()


def test_a_long_page_has_every_plot_with_name_description_and_table(long_page: str) -> None:
    figures = re.findall(r"<figure>.*?</figure>", long_page, re.DOTALL)
    species = [*shown().values(), species_of(document_of(rich_entry()))]
    assert len(figures) == sum(len(figures_of(s)) for s in species)
    for figure in figures:
        assert re.search(r"role=\"img\"[^>]*><title>[^<]+</title><desc>[^<]+</desc>", figure)
        assert re.search(r"<details><summary>numbers</summary><table><tr><th>.*<tr><td>", figure, re.DOTALL)
    ids = [a["id"] for _, a in Elements(long_page).tags if "id" in a]
    assert len(set(ids)) == len(ids)


def test_a_long_page_leaves_out_no_fact_ledger_or_finding(long_page: str) -> None:
    words = " ".join(Elements(long_page).words)
    for s in (*shown().values(), species_of(document_of(rich_entry()))):
        for what, value in s.facts:
            assert f"{what}: {value}" in words or (what in words and value in words)
        assert all(f.text in words for f in s.findings)
        for route in s.routes:
            assert all(what in words.replace("−", "-") for what, _, _ in route.ledger)
            assert shown_number(route.dHf298_kJ_mol, 1) in words


def test_facts_in_common() -> None:
    one, two = shown()["CO2"], shown()["methanol"]
    common = common_facts((one, two))
    assert dict(common)["program"] == dict(one.facts)["program"]
    assert "file" not in dict(common)
    assert common_facts((one,)) == ()
    own = [fact for fact in one.facts if fact not in common]
    assert own
    assert all(": ".join(fact) in facts_line(one, common) for fact in own)


@pytest.mark.parametrize("name", list(shown()))
def test_what_was_not_there_is_not_invented(name: str) -> None:
    species = shown()[name]
    text = page(species)
    assert ("ΔfH°(0 K)" in text) == bool(species.routes)
    assert ("Conformers" in text) == bool(species.conformers)
    assert ("Torsion " in text) == bool(species.torsions)
