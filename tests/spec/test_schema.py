"""The JSON Schema and the key reference: made from the models, and never out of date."""

import json
from pathlib import Path

import pytest

from beforehand.spec.schema import REFERENCE_FILE, SCHEMA_FILE, json_schema, key_reference, write

SPECS = Path(__file__).parents[2] / "specs"


def test_the_committed_files_are_current(tmp_path: Path) -> None:
    write(tmp_path)
    for name in (SCHEMA_FILE, REFERENCE_FILE):
        assert (SPECS / name).read_bytes() == (tmp_path / name).read_bytes(), (
            "run `python -m beforehand.spec.schema specs`"
        )


def test_the_schema_names_the_tests_and_refuses_unknown_keys() -> None:
    schema = json_schema()
    assert schema["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    assert schema["additionalProperties"] is False
    hypothesis = schema["$defs"]["WrittenHypothesis"]
    assert "welch_t" in hypothesis["properties"]["test"]["enum"]
    assert hypothesis["properties"]["cluster"]["description"].endswith("Not available yet.")
    assert "holm" in schema["$defs"]["Family"]["properties"]["procedure"]["enum"]


def test_no_null_in_the_schema() -> None:
    assert '"null"' not in json.dumps(json_schema())


@pytest.mark.parametrize("key", ["matched_by", "across_families", "missing_codes", "is", "from", "n_per_group"])
def test_the_reference_explains_every_key(key: str) -> None:
    assert f"| {key} |" in key_reference() or f"| **{key}** |" in key_reference()
