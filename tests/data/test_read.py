"""Strict reading: every trap that other readers fall into without a word is a fault here, with its line."""

import csv
import gzip
import io

import pytest
from hypothesis import given
from hypothesis import strategies as st

from beforehand.data import read
from beforehand.data.read import read_table
from beforehand.errors import DataFault


def message(raw: bytes, path: str = "x.csv") -> str:
    with pytest.raises(DataFault) as refused:
        read_table(raw, path=path)
    return str(refused.value)


def columns(raw: bytes, path: str = "x.csv") -> dict[str, list[str]]:
    table = read_table(raw, path=path)
    return {name: list(texts) for name, texts in zip(table.header, table.columns, strict=True)}


# A general data-frame reader takes the first column of such a file for row names, and shifts all others.
def test_one_field_more_in_every_row_shifts_nothing() -> None:
    assert message(b"a,b\n1,2,3\n4,5,6\n") == (
        "x.csv: 1 fault\n  line 2: 3 fields, where the header names 2 columns. The same on line 3. "
        "Write every field, empty ones too, and quote a field with a separator in it."
    )


def test_a_short_row_is_not_filled_up() -> None:
    assert "line 3: 1 field, where the header names 2 columns" in message(b"a,b\n1,2\n3\n")


@pytest.mark.parametrize("text", ["NA", "None", "null", "n/a", "NaN", "", "-"])
def test_no_text_becomes_missing_here(text: str) -> None:
    assert columns(f'a,b\n1,"{text}"\n'.encode())["b"] == [text]


@pytest.mark.parametrize("text", ["007", "1e3", " 1", "1,000", "TRUE", "2031-01-05", "+5"])
def test_every_field_stays_the_text_it_was(text: str) -> None:
    assert columns(f'a,b\n1,"{text}"\n'.encode())["b"] == [text]


def test_a_header_name_that_occurs_twice_is_not_renamed() -> None:
    assert (
        message(b"a,b,a\n1,2,3\n")
        == "x.csv: 1 fault\n  line 1: the header names the column 'a' twice. Names must differ."
    )


# Two stray quote signs made three general readers swallow 499 of 501 lines without a word.
def test_stray_quote_signs_swallow_no_lines() -> None:
    rows = [f"{i},{i}" for i in range(500)]
    rows[1], rows[498] = '1,"1', '498,4"98'
    told = message(("a,b\n" + "\n".join(rows) + "\n").encode())
    assert "line 3: a quoted field is not closed on its line" in told
    assert "The same on line 500." in told


def test_a_line_break_inside_a_field_is_refused_at_both_its_lines() -> None:
    assert "line 2: a quoted field is not closed on its line" in message(b'a,b\n1,"two\nlines"\n')
    assert "The same on line 3." in message(b'a,b\n1,"two\nlines"\n')


@pytest.mark.parametrize("row", ['1,x"y"', '1,"x"y', '1, "x"', '1,""x"'])
def test_quote_signs_in_the_wrong_place_are_refused(row: str) -> None:
    assert "a quote sign" in message(f"a,b\n{row}\n".encode())


@pytest.mark.parametrize(
    ("row", "fields"),
    [
        ('"1","2"', ["1", "2"]),
        ('1,"x,y"', ["1", "x,y"]),
        ('1,"12"" pipe"', ["1", '12" pipe']),
        ('1,""""', ["1", '"']),
        ('"",""', ["", ""]),
        (",", ["", ""]),
        ("1,a\tb", ["1", "a\tb"]),
    ],
)
def test_what_rfc_4180_allows_is_read(row: str, fields: list[str]) -> None:
    assert [texts[0] for texts in columns(f"a,b\n{row}\n".encode()).values()] == fields


def test_a_tab_separated_file_is_read_by_its_suffix() -> None:
    assert columns(b"a\tb\n1,5\t2\n", "x.tsv") == {"a": ["1,5"], "b": ["2"]}
    assert columns(b"a,b\n1,2\n", "X.CSV") == {"a": ["1"], "b": ["2"]}


@pytest.mark.parametrize("path", ["x.txt", "x.xlsx", "x.parquet", "x", "x.csv.zip", "x.gz", "x.pkl"])
def test_other_kinds_of_files_are_refused(path: str) -> None:
    packed = gzip.compress(b"a\n1\n")
    assert (
        message(packed, path)
        == f"{path}: only .csv, .tsv, .csv.gz and .tsv.gz files are read. Save the table as one of these."
    )


def test_line_ends_of_either_kind_a_byte_order_mark_and_a_missing_last_line_end_change_nothing() -> None:
    plain = columns(b"a,b\n1,2\n3,4\n")
    assert columns(b"a,b\r\n1,2\r\n3,4\r\n") == plain
    assert columns(b"\xef\xbb\xbfa,b\n1,2\n3,4\n") == plain
    assert columns(b"a,b\n1,2\n3,4") == plain
    assert columns(gzip.compress(b"a,b\n1,2\n3,4\n"), "x.csv.gz") == plain


def test_other_characters_that_some_programs_break_lines_at_stay_in_the_field() -> None:
    assert columns("a,b\n1,x\u2028y\x0bz\x85\n".encode())["b"] == ["x\u2028y\x0bz\x85"]


def test_an_empty_line_is_refused_and_an_empty_quoted_field_is_a_row() -> None:
    assert "line 3: an empty line stands here" in message(b"a\n1\n\n2\n")
    assert columns(b'a\n1\n""\n2\n')["a"] == ["1", "", "2"]


def test_caps_hold(monkeypatch: pytest.MonkeyPatch) -> None:
    assert "a field is longer than 100,000 characters" in message(b"a,b\n1," + b"x" * 100_001 + b"\n")
    assert "a field is longer than 100,000 characters" in message(b'a,b\n1,"' + b"x," * 60_000 + b'"\n')
    assert columns(b"a,b\n1," + b"x" * 100_000 + b"\n")["b"] == ["x" * 100_000]
    wide = ",".join(f"c{i}" for i in range(5_001)).encode()
    assert "the header names 5,001 columns; at most 5,000 are read" in message(wide + b"\n" + wide + b"\n")
    assert "longer than 200 characters" in message(b"a," + b"n" * 201 + b"\n1,2\n")
    monkeypatch.setattr(read, "MAX_ROWS", 2)
    assert "more than 2 rows" in message(b"a\n1\n2\n3\n")


def test_a_long_list_of_faults_is_cut_and_says_so() -> None:
    rows = "\n".join(",".join("1" * count) for count in range(2, 32))
    told = message(f"a\n{rows}\n".encode())
    assert told.startswith("x.csv: 20 faults\n")
    assert told.endswith("10 more faults are not listed.")


FIELDS = st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\r\n\0"), max_size=8)


@given(st.integers(1, 4).flatmap(lambda width: st.lists(st.lists(FIELDS, min_size=width, max_size=width), min_size=1)))
@pytest.mark.parametrize(("suffix", "sign"), [(".csv", ","), (".tsv", "\t")])
@pytest.mark.parametrize("quoting", [csv.QUOTE_MINIMAL, csv.QUOTE_ALL])
def test_what_a_general_writer_writes_is_read_back(suffix: str, sign: str, quoting: int, rows: list[list[str]]) -> None:
    out = io.StringIO()
    writer = csv.writer(out, delimiter=sign, quoting=quoting)  # type: ignore[arg-type]
    writer.writerow([f"c{i}" for i in range(len(rows[0]))])
    writer.writerows(rows)
    table = read_table(out.getvalue().encode(), path=f"x{suffix}")
    assert [list(row) for row in zip(*table.columns, strict=True)] == rows
