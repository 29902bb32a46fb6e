"""From bytes to plain values with their places."""

import contextlib
import json

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from beforehand.spec import places


def faults(text: str) -> list[str]:
    try:
        return [str(fault) for fault in places.read(text.encode()).faults]
    except places.NotYaml as stopped:
        return [str(fault) for fault in stopped.faults]


# What each word means follows from section 1 of the evidence page on the spec: YAML 1.1 and 1.2 agree on it, or a
# spec has one meaning for it (1e-3, a date).
@pytest.mark.parametrize(
    ("word", "value"),
    [
        ("y", "y"),
        ("1e-3", 0.001),
        ("5E-2", 0.05),
        (".5", 0.5),
        ("1.", 1.0),
        ("-7", -7),
        ("+7", 7),
        ("0", 0),
        ("true", True),
        ("'no'", "no"),
        ('"010"', "010"),
        ("2024-01-02", "2024-01-02"),
        ("2024-13-45", "2024-13-45"),
        ("1/3", "1/3"),
        ("5 %", "5 %"),
        ("1.2.3", "1.2.3"),
        ("a: b", None),
        ('"😀"', "😀"),
        ("٣", "٣"),  # a digit of another script is text, never the number 3
    ],
)
def test_word(word: str, value: object) -> None:
    if value is None:
        assert faults(f"key: {word}\n")
        return
    read = places.read(f"key: {word}\n".encode())
    assert read.value == {"key": value}
    assert type(read.value["key"]) is type(value)
    assert read.faults == ()


@pytest.mark.parametrize(
    "word",
    [
        "no", "No", "NO", "yes", "on", "Off", "True", "FALSE", "010", "00", "0x1F", "0o17", "0b1", "1_000", "1_0.5",
               "12:30:45", "-1:20.5", ".inf", "-.inf", ".nan", "null", "~", "1e999", "9007199254740992",
        "0.30000000000000000001", "12:30",        "-010", "08",
    ],
)  # fmt: skip
def test_trap(word: str) -> None:
    read = places.read(f"key: [{word}]\n".encode())
    assert [(fault.line, fault.column) for fault in read.faults] == [(1, 7)]
    assert read.trapped == {("key", 0)}


def test_places_of_keys_and_values() -> None:
    read = places.read(b'\xef\xbb\xbf# comment\r\na: 1\r\nlist:\r\n  - {id: x, "\xc3\xa4": [1, 2]}\r\n')
    assert read.value == {"a": 1, "list": ({"id": "x", "ä": (1, 2)},)}
    assert read.places.values[("a",)] == (2, 4)
    assert read.places.keys[("a",)] == (2, 1)
    assert read.places.keys[("list", 0, "ä")] == (4, 13)
    assert read.places.values[("list", 0, "ä", 1)] == (4, 22)


def test_a_fault_finds_the_nearest_place() -> None:
    read = places.read(b"a:\n  b: 1\n")
    assert str(read.places.fault(("a", "b", "c", 3), "x")) == "line 2, column 6: x"
    assert str(read.places.fault(("a", "b"), "x", at_key=True)) == "line 2, column 3: x"
    assert str(read.places.fault((), "x")) == "line 1, column 1: x"


def test_a_bomb_of_references_stays_small() -> None:
    lines = ["a0: &a0 [x, x, x, x, x, x, x, x, x]"]
    lines += [f"a{i}: &a{i} [{', '.join([f'*a{i - 1}'] * 9)}]" for i in range(1, 9)]
    read = places.read("\n".join(lines).encode())
    assert len(json.dumps(read.value)) < 1000
    assert len(read.faults) == 9 + 8 * 9


def test_depth_needs_no_recursion() -> None:
    assert faults("[" * 100_000) == ["line 1, column 1001: this is more than 32 levels deep"]
    assert faults("[" * 100 + "]" * 100) == ["line 1, column 33: this is more than 32 levels deep"]


def test_size_is_bounded() -> None:
    with pytest.raises(places.NotYaml) as stopped:
        places.read(b"a" * (places.LARGEST_FILE + 1))
    assert "a spec has at most" in str(stopped.value.faults[0])


def test_a_repeated_key_keeps_the_first_value_and_the_faults_of_both() -> None:
    read = places.read(b"a: 1\na: {b: no}\n")
    assert read.value == {"a": 1}
    assert [fault.line for fault in read.faults] == [2, 2]


# JSON is YAML: what the standard library writes must come back, lists as tuples.
json_values = st.recursive(
    st.one_of(
        st.booleans(),
        st.integers(-(2**53) + 1, 2**53 - 1),
        st.floats(allow_nan=False, allow_infinity=False),
        st.text(st.characters(codec="ascii", min_codepoint=32, max_codepoint=126), max_size=8),
    ),
    lambda below: st.one_of(
        st.lists(below, max_size=4),
        st.dictionaries(st.text("abcdefgh", min_size=1, max_size=4), below, max_size=4),
    ),
    max_leaves=20,
)


def as_tuples(value: object) -> object:
    if isinstance(value, list):
        return tuple(as_tuples(item) for item in value)
    if isinstance(value, dict):
        return {key: as_tuples(item) for key, item in value.items()}
    return value


@settings(max_examples=200, deadline=None)
@given(st.dictionaries(st.text("abcdefgh", min_size=1, max_size=4), json_values, max_size=5))
def test_json_comes_back(value: dict) -> None:
    read = places.read(json.dumps(value).encode())
    assert read.faults == ()
    assert read.value == as_tuples(value)


@settings(max_examples=300, deadline=None)
@given(st.text(st.sampled_from(list("ab:- \n\t{}[],'\"#&*!|>%@`?~<=1.0e\\")), max_size=40))
def test_any_text_is_read_or_refused(text: str) -> None:
    with contextlib.suppress(places.NotYaml):
        places.read(text.encode())
