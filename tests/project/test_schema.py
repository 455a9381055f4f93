"""The JSON Schema of a manifest against the reader, and the README's list of keys against the definition."""

from __future__ import annotations

import json
import tomllib
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bad_manifests import BAD
from heatwright.cli.main import main
from heatwright.project.keys import KEYS, TABLES, keys_of
from heatwright.project.kinds import Wrong
from heatwright.project.schema import keys_table, manifest_schema
from heatwright.resources import sample_outputs

jsonschema = pytest.importorskip("jsonschema")  # of the test extra

ROOT = Path(__file__).resolve().parents[2]
SCHEMA = manifest_schema()


def errors(document: Any) -> list[Any]:
    return list(jsonschema.Draft202012Validator(SCHEMA).iter_errors(document))


def test_the_schema_is_one() -> None:
    jsonschema.Draft202012Validator.check_schema(SCHEMA)
    assert set(SCHEMA["properties"]) == set(TABLES)


def test_every_key_is_described() -> None:
    for key in KEYS:
        assert key.meaning[0].isupper(), key.name
        assert key.meaning.endswith("."), key.name
    species = SCHEMA["properties"]["species"]["additionalProperties"]
    assert species["properties"]["cutoff"]["description"] == "Of low-modes floor or interpolate, 1/cm. Default: 100."


def test_the_sample_project_is_valid() -> None:
    assert errors(tomllib.loads((Path(str(sample_outputs())) / "heatwright.toml").read_text())) == []


OF_SHAPE = (
    "key", "no near key", "key of the mechanism", "key of a species", "key of a level", "key of outputs", "table",
    "top key", "dotted name", "species no table", "mechanism no table", "outputs single", "enthalpy no text", "item",
    "imaginary", "conformer key", "conformer without", "no output", "no glob",
)  # fmt: skip


@pytest.mark.parametrize("case", OF_SHAPE)
def test_an_editor_sees_what_is_wrong_in_shape(case: str) -> None:
    assert errors(tomllib.loads(BAD[case][0]))


VALUES = st.recursive(
    st.none() | st.booleans() | st.integers(-3, 60) | st.floats(-2.0, 60.0) | st.text(max_size=3)
    | st.sampled_from(["published", "1bar", "auto", "harmonic", "-1 kJ/mol", "H=D", "default", "A -> B", "a.out"]),
    lambda inner: st.lists(inner, max_size=3)
    | st.dictionaries(st.sampled_from(["output", "energy", "x"]), inner, max_size=2),
    max_leaves=4,
)  # fmt: skip


@settings(max_examples=400, deadline=None)
@given(st.sampled_from([(place, name) for place in sorted(TABLES) for name in keys_of(place)]), VALUES)
def test_what_is_read_is_valid(where: tuple[str, str], value: object) -> None:
    """The reader refuses more than a schema can (units, names of isotopes, order of two temperatures), never less."""
    key = keys_of(where[0])[where[1]]  # type: ignore[index]
    try:
        key.kind.read(value)
    except Wrong:
        return
    jsonschema.Draft202012Validator(dict(key.kind.schema)).validate(value)


def test_the_command_prints_it(capfd: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as stopped:
        main(["start", "--schema"])
    assert stopped.value.code == 0
    assert json.loads(capfd.readouterr().out) == SCHEMA


def test_the_readme_lists_the_keys() -> None:
    assert keys_table() in (ROOT / "README.md").read_text(encoding="utf-8")
