"""Documents from elsewhere: whole parts may be missing, wrong ones are refused with their key."""

from __future__ import annotations

import copy
import json
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from heatwright import Refused
from heatwright.report.documents import is_document, read_documents, shown_documents
from heatwright.report.figures import figures_of
from heatwright.report.page import Page, page_html
from heatwright.report.taking import species_of
from shown import document_of, entries, many

METHANOL = document_of(entries()["methanol"])
BUTANE = document_of(entries()["n-butane"])


def changed(document: dict[str, Any], change: Callable[[dict[str, Any]], Any]) -> dict[str, Any]:
    """A copy with something changed."""
    other = copy.deepcopy(document)
    change(other)
    return other


WRONG = {
    "name": (lambda d: d.pop("name"), "name is missing; expected a text"),
    "column": (lambda d: d["table"]["Cp_J_mol_K"].pop(), "table: Cp_J_mol_K has 28 numbers; expected 29"),
    "nan": (lambda d: d["table"]["S_J_mol_K"].__setitem__(2, float("nan")), "S_J_mol_K[2] is nan"),
    "huge": (lambda d: d["table"]["S_J_mol_K"].__setitem__(2, 10**400), "S_J_mol_K[2] is 1000"),
    "text": (lambda d: d["nasa7"]["low"].__setitem__(0, "3.5"), "nasa7: low[0] is '3.5'; expected a finite number"),
    "six": (lambda d: d["nasa7"]["high"].pop(), "high has 6 numbers; expected 7"),
    "order": (lambda d: d["nasa7"].update(T_K=[200, 100, 6000]), "T_K is 200, 100, 6000"),
    "grid": (lambda d: d["table"]["T_K"].reverse(), "T_K is not a list of ascending temperatures"),
    "bond": (lambda d: d["geometry"]["bonds"].append([1, 99, 1.0]), "bonds[5] is [1, 99, 1.0]; expected two of the 6"),
    "atoms": (lambda d: d["geometry"]["elements"].pop(), "5 elements and 6 coordinates"),
    "true": (lambda d: d.update(charge=True), "charge is True; expected a finite number"),
    "half": (lambda d: d.update(multiplicity=1.5), "multiplicity is 1.5; expected a whole number"),
    "list": (lambda d: d.update(table=[]), "table: this is a list; expected an object"),
    "finding": (lambda d: d.update(findings=["x"]), "findings[0]: this is 'x'; expected an object"),
    "torsion": (lambda d: d["torsions"][0].pop("barrier_cm-1"), "barrier_cm-1 is missing"),
    "curve": (lambda d: d["residual_curve"]["dS_R"].pop(), "residual_curve: dS_R has"),
}


@pytest.mark.parametrize("what", list(WRONG))
def test_a_wrong_value_is_refused_with_its_key(what: str) -> None:
    change, words = WRONG[what]
    with pytest.raises(Refused) as refused:
        species_of(changed(METHANOL, change), "entries.json: species 3")
    (finding,) = refused.value.findings
    assert finding.code == "document-wrong"
    assert words in finding.text
    assert finding.where.startswith("entries.json: species 3")


@pytest.mark.parametrize("document", [METHANOL, BUTANE], ids=["methanol", "butane"])
def test_whole_parts_may_be_missing(document: dict[str, Any]) -> None:
    for key in set(document) - {"name", "formula", "composition"}:
        if key == "table" and document.get("conformers"):
            continue
        less = {k: v for k, v in document.items() if k != key}
        species = species_of(less, key)
        assert page_html(Page(title=key, species=(species,))).endswith("</html>\n")


JSON = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=True) | st.text(max_size=5),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=5), inner, max_size=4),
    max_leaves=6,
)


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(st.data())
def test_no_document_breaks_the_page(data: st.DataObject) -> None:
    """Any value in the place of any other: a page, or a sentence."""
    document = copy.deepcopy(data.draw(st.sampled_from([METHANOL, BUTANE])))
    place: Any = document
    while isinstance(place, dict | list) and place:
        key = data.draw(st.sampled_from(sorted(place) if isinstance(place, dict) else range(len(place))))
        if not isinstance(place[key], dict | list) or not place[key] or data.draw(st.booleans()):
            place[key] = data.draw(JSON)
            break
        place = place[key]
    species = None
    with suppress(Refused):
        species = species_of(document, "d")
    if species is None:
        with pytest.raises(Refused) as refused:
            species_of(document, "d")
        assert all(f.code == "document-wrong" and f.where for f in refused.value.findings)
    else:
        assert page_html(Page(title="", species=(species,)))


def test_a_file_is_read_with_its_failures(tmp_path: Path) -> None:
    document = many(2) | {
        "failed": [{"file": "bad.out", "findings": [{"severity": "refuse", "code": "c", "text": "No."}]}]
    }
    file = tmp_path / "entries.json"
    file.write_text(json.dumps(document), encoding="utf-8")
    shown = read_documents(str(file))
    assert [s.name for s in shown.species] == ["S0", "S1"]
    assert shown.failed == (("bad.out", ("No.",)),)
    assert is_document(file.read_text(encoding="utf-8"))


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("{", "this is no JSON"),
        ("[" * 100_000, "this is no JSON"),
        ("[]", "this is a list; expected an object"),
        ('{"species": []}', "it has no key heatwright"),
        ('{"heatwright": 2, "species": []}', "its version is 2; expected a document of version 1"),
        ('{"heatwright": 1}', "species is missing"),
    ],
)
def test_other_files_are_refused(text: str, words: str, tmp_path: Path) -> None:
    file = tmp_path / "x.json"
    file.write_text(text, encoding="utf-8")
    with pytest.raises(Refused, match=r"document-wrong") as refused:
        read_documents(str(file))
    assert words in refused.value.findings[0].text


def test_a_table_without_entry_is_shown_without_polynomial() -> None:
    plain = {k: v for k, v in METHANOL.items() if k not in ("nasa7", "residuals", "residual_curve", "formation")}
    species = species_of(plain)
    assert species.polynomial is None
    assert [f.key for f in figures_of(species)] == ["structure", "cp", "cp-shares", "s-shares", "torsion-1"]
    assert shown_documents({"heatwright": 1, "species": [plain]}).species == (species,)
