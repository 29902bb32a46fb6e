"""The content checksum: by hand, against another writer of RFC 8785, and what it does and doesn't see."""

import hashlib
import math
import struct
from collections.abc import Mapping, Sequence

import numpy as np
import pytest
import rfc8785
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from beforehand.data import digests
from beforehand.data.digests import TableChecksums, of_bytes
from beforehand.spec.expressions import Column

Values = Sequence[str | None] | NDArray[np.float64]


def of_table(table: Mapping[str, Values]) -> TableChecksums:
    return digests.of_table({name: column(values) for name, values in table.items()})


def column(values: Values) -> Column:
    if isinstance(values, np.ndarray):
        return Column(values, np.isnan(values), "number")
    missing = np.array([value is None for value in values])
    return Column(np.array([value or "" for value in values], dtype=object), missing, "text")


STORES: dict[str, Values] = {
    "store": ["B", "A"],
    "energy": np.array([100.0, 1e-7]),
    "alarms": np.array([math.nan, 3.0]),
    "note": [None, 'said "no"'],
}


def test_a_content_checksum_by_hand() -> None:
    # Written by hand from the definition in digests.py: the members of an object by name, a number as short as it
    # can be, a line feed after each row. `printf '%s\n' LINE LINE | sha256sum` gives the same.
    lines = (
        '{"alarms":null,"energy":100,"note":null,"store":"B"}\n'
        '{"alarms":3,"energy":1e-7,"note":"said \\"no\\"","store":"A"}\n'
    )
    found = of_table(STORES)
    assert found.content == hashlib.sha256(lines.encode()).hexdigest()
    assert found.content == "2d40d9fe0cc0f7d4f176c25a344232040810e7cc19eeac9e565a0d48a25e51eb"
    assert found.columns == {
        "alarms": hashlib.sha256(b"[null,3]").hexdigest(),
        "energy": hashlib.sha256(b"[100,1e-7]").hexdigest(),
        "note": hashlib.sha256(b'[null,"said \\"no\\""]').hexdigest(),
        "store": hashlib.sha256(b'["B","A"]').hexdigest(),
    }


def test_the_checksum_of_bytes_is_that_of_sha256sum() -> None:
    # FIPS 180-2, appendix B.1: the message "abc"
    assert of_bytes(b"abc") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"


@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=1, max_size=20))
def test_numbers_are_written_as_rfc_8785_does(values: list[float]) -> None:
    expected = hashlib.sha256(rfc8785.dumps(values)).hexdigest()
    assert of_table({"x": np.array(values)}).columns["x"] == expected


def test_numbers_at_the_ends_of_the_quick_form_are_written_as_rfc_8785_does() -> None:
    # random bit patterns, and the neighbours of every power of ten around which a writer changes its form
    patterns = np.frombuffer(np.random.default_rng(20310302).bytes(8 * 20_000), dtype=np.float64)
    powers = np.array([10.0**k for k in range(-9, 24)])
    values = np.concatenate([patterns[np.isfinite(patterns)], powers, np.nextafter(powers, 0), -powers, [0.0, -0.0]])
    assert of_table({"x": values}).columns["x"] == hashlib.sha256(rfc8785.dumps(values.tolist())).hexdigest()


@given(st.dictionaries(st.text(max_size=5), st.text(), min_size=1, max_size=4))
def test_names_and_texts_are_written_as_rfc_8785_does(row: dict[str, str]) -> None:
    expected = hashlib.sha256(rfc8785.dumps(row) + b"\n").hexdigest()
    assert of_table({name: [text] for name, text in row.items()}).content == expected


def test_names_sort_by_utf_16_code_units() -> None:
    # RFC 8785 3.2.3: U+1F600 begins with the unit D83D and so comes before U+FB33
    row = {"\ufb33": "late", "\U0001f600": "early"}
    lines = '{"\U0001f600":"early","\ufb33":"late"}\n'
    assert of_table({name: [text] for name, text in row.items()}).content == hashlib.sha256(lines.encode()).hexdigest()


def test_the_order_of_columns_does_not_matter_and_the_order_of_rows_does() -> None:
    backwards = {name: STORES[name] for name in reversed(STORES)}
    assert of_table(backwards) == of_table(STORES)
    turned = {name: values[::-1] for name, values in STORES.items()}
    assert of_table(turned).content != of_table(STORES).content


def test_one_changed_cell_names_its_column_and_no_other() -> None:
    changed = dict(STORES) | {"energy": np.array([100.0, np.nextafter(1e-7, 1)])}
    before, after = of_table(STORES), of_table(changed)
    assert before.content != after.content
    assert [name for name in STORES if before.columns[name] != after.columns[name]] == ["energy"]


def test_swapped_headers_are_seen() -> None:
    swapped = dict(STORES) | {"store": STORES["note"], "note": STORES["store"]}
    assert of_table(swapped).content != of_table(STORES).content


@pytest.mark.parametrize(("one", "other"), [(["1"], np.array([1.0])), ([None], ["null"]), ([""], [None])])
def test_text_number_missing_and_empty_are_told_apart(one: Values, other: Values) -> None:
    assert of_table({"x": one}) != of_table({"x": other})


def test_a_float_of_one_bit_more_is_another_table() -> None:
    bits = struct.unpack("<Q", struct.pack("<d", 0.1))[0]
    neighbour = struct.unpack("<d", struct.pack("<Q", bits + 1))[0]
    assert of_table({"x": np.array([0.1])}) != of_table({"x": np.array([neighbour])})
