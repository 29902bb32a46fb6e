"""The one expression form: its grammar, its missing values, and that nothing but its own fault ever comes out."""

import math
import string
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from beforehand.spec.expressions import Column, ExpressionFault, Known, parse

NO, YES, MISSING = False, True, None


def column(values: list[Any], kind: str = "number") -> Column:
    missing = np.array([value is None for value in values])
    if kind == "number":
        return Column(np.array([math.nan if value is None else value for value in values], dtype=float), missing, kind)
    if kind == "truth":
        return Column(np.array([bool(value) for value in values]), missing, kind)
    return Column(np.array(values, dtype=object), missing, kind)


def values(text: str, **columns: list[Any]) -> list[Any]:
    """Evaluate on columns of numbers, or of text where a value is text; None is missing."""
    given_columns = {
        name: column(of, "text" if any(isinstance(value, str) for value in of) else "number")
        for name, of in columns.items()
    }
    result = parse(text).evaluate(given_columns)
    return [None if missing else value for value, missing in zip(result.values.tolist(), result.missing, strict=True)]


def fault(text: str, **columns: list[Any]) -> str:
    with pytest.raises(ExpressionFault) as caught:
        values(text, **columns)
    return caught.value.text


# Kleene (1938), strong three-valued logic: the tables of `and` and `or`; `not` leaves missing missing.
@pytest.mark.parametrize(
    ("left", "right", "both", "either"),
    [
        (YES, YES, YES, YES),
        (YES, NO, NO, YES),
        (YES, MISSING, MISSING, YES),
        (NO, YES, NO, YES),
        (NO, NO, NO, NO),
        (NO, MISSING, NO, MISSING),
        (MISSING, YES, MISSING, YES),
        (MISSING, NO, NO, MISSING),
        (MISSING, MISSING, MISSING, MISSING),
    ],
)
def test_three_valued_logic(left: bool | None, right: bool | None, both: bool | None, either: bool | None) -> None:
    a = [None if left is None else float(left)]
    b = [None if right is None else float(right)]
    assert values("a == 1 and b == 1", a=a, b=b) == [both]
    assert values("a == 1 or b == 1", a=a, b=b) == [either]
    assert values("not a == 1", a=a) == [None if left is None else not left]


# Computed by hand.
@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("a + b * 2", [21.0, None]),
        ("(a + b) * 2", [22.0, None]),
        ("a - b - 1", [-10.0, None]),
        ("-a + b", [9.0, None]),
        ("b / a / 2", [5.0, None]),
        ("2 < b <= 10", [True, None]),
        ("a in [1, 2]", [True, False]),
        ("a not in [1, -3]", [False, False]),
        ("is_missing(b)", [False, True]),
        ("not is_missing(b) and b > 3", [True, False]),
        ("pick(is_missing(b), a, b)", [10.0, -3.0]),
        ("mean_of(a, b, at_least=1)", [5.5, -3.0]),
        ("mean_of(a, b)", [5.5, None]),
        ("abs(a)", [1.0, 3.0]),
        ("sqrt(a * a)", [1.0, 3.0]),
        ("log2(abs(a) * 8 / abs(a))", [3.0, 3.0]),
        ("column('a') == 1", [True, False]),
        ("1.5e1 > b", [True, None]),
    ],
)
def test_value(text: str, expected: list[Any]) -> None:
    assert values(text, a=[1.0, -3.0], b=[10.0, None]) == expected


def test_round_goes_by_the_decimal_that_a_reader_sees() -> None:
    # Half to even of the written decimal: 2.675 is 2.68 (its binary value lies below), 0.125 is 0.12, 2.5 is 2.
    assert values("round(a, 2)", a=[2.675, 0.125, -0.125, 1e300, None]) == [2.68, 0.12, -0.12, 1e300, None]
    assert values("round(a, 0)", a=[2.5, 3.5, -0.4]) == [2.0, 4.0, 0.0]


def test_text_and_dates() -> None:
    assert values("t == 'x' or t in ['y']", t=["x", "y", "z", None]) == [True, True, False, None]
    dates = {"d": column(["2031-01-05", "2031-01-06", None], "date")}
    result = parse("d > '2031-01-05'").evaluate(dates)
    assert result.values[:2].tolist() == [False, True]
    assert result.missing.tolist() == [False, False, True]


def test_rows_without_a_value_are_counted_and_listed() -> None:
    with pytest.raises(ExpressionFault) as caught:
        values("a / b", a=[1.0, 2.0, 3.0], b=[0.0, 1.0, 0.0])
    assert caught.value.text == "division by zero in 2 rows"
    assert caught.value.rows == (0, 2)
    assert fault("log(a)", a=[0.0, -1.0, 1.0]) == "log of zero or a negative number in 2 rows"
    assert fault("sqrt(a)", a=[-1.0]) == "sqrt of a negative number in 1 row"
    assert fault("exp(a)", a=[1000.0]) == "the result of exp is too large for a number in 1 row"


def test_only_the_rows_that_are_asked_can_fail() -> None:
    assert values("pick(b > 0, log(b), 0)", b=[1.0, -1.0, None]) == [0.0, 0.0, None]
    assert values("b > 0 and a / b > 1", a=[2.0, 2.0], b=[1.0, 0.0]) == [True, False]
    assert values("b == 0 or a / b > 1", a=[2.0, 2.0], b=[1.0, 0.0]) == [True, True]
    assert values("log(b)", b=[None, 1.0]) == [None, 0.0]


def test_inputs_are_not_touched() -> None:
    a = column([1.0, None])
    before = a.values.copy(), a.missing.copy()
    parse("pick(is_missing(a), 0, -a)").evaluate({"a": a})
    assert np.array_equal(a.values, before[0], equal_nan=True)
    assert np.array_equal(a.missing, before[1])


def test_names_come_in_the_order_of_their_first_use() -> None:
    assert parse("b > 1 and column('z z') in [2] or mean_of(a, b) > 0").names == ("b", "z z", "a")


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("a = 1", "the expression should end, or a sign should stand, where '=' stands, at character 3. "
                  "Write == to compare."),
        ("a &", "'&' at character 3 has no meaning in an expression. Write 'and'."),
        ("a ** 2", "the expression should end, or a sign should stand, where '**' stands, at character 3. "
                   "Powers are not in the grammar; write x * x, or exp and log."),
        ("a >", "a value (a column, a number, a text in quotes) is expected where it ends"),
        ("(a > 1", "')' is expected to close the parenthesis where it ends"),
        ("sqroot(a)", "there is no function 'sqroot'. The nearest is 'sqrt'."),
        ("größe > 1", "a name with other letters than a to z is written column('größe')"),
        ("ａ > 1", "a name with other letters than a to z is written column('ａ')"),
        ("2x > 1", "'2x' is not a number; a column whose name begins with a digit is written column('its name')"),
        ("a > ٣", "'٣' is not a number; a column whose name begins with a digit is written column('its name')"),
        ("a == 'x", "\"'\" at character 6 has no meaning in an expression. A quote is opened and never closed."),
        ("pick(a > 1, 2)", "pick takes 3, and 2 are given. Write pick(condition, a, b)."),
        ("round(a, b)", "the decimals of round must be a whole number between 0 and 15"),
        ("a in b", "'[' is expected after 'in', before the first of the values, where 'b' stands, at character 6."),
        ("1 < 2", "it names no column, so it says the same of every row"),
        ("", "it is empty"),
        ("a" * 501, "it has 501 characters; at most 500 are allowed"),
        ("(" * 21 + "a" + ")" * 21, "it is more than 20 levels deep; split it into derived columns"),
        ("a" + "+1" * 150, "it has 301 words and signs; at most 200 are allowed"),
        ("a > 1e999", "1e999 is too large for a number"),
    ],
)  # fmt: skip
def test_fault_of_the_grammar(text: str, expected: str) -> None:
    with pytest.raises(ExpressionFault) as caught:
        parse(text)
    assert caught.value.text == expected


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("n > 't'", "column 'n' is a number and 't' is text: they can't be compared. "
                    "Text stands in quotes, numbers don't."),
        ("t > 'a'", "text has no order that all agree on: '>' compares numbers and dates"),
        ("t + 1 > 2", "column 't' is text beside '+', where a number is needed"),
        ("c == 'hihg'", "column 'c' has no level 'hihg'. The nearest is 'high'."),
        ("d > '5.1.2031'", "'5.1.2031' stands beside a date and is none. Write a date as 2031-03-02."),
        ("d == t", "column 'd' is a date and column 't' is text: they can't be compared."),
        ("n and t == 'x'", "column 'n' is a number beside 'and', where a condition is needed"),
        ("(n > 1) == (n > 2)", "conditions are joined by 'and' and 'or'; '==' compares values"),
        ("pick(n > 1, n, t)", "pick gives a number or text; both values must be of one kind"),
        ("nn > 1", "there is no column 'nn' to use here. The nearest is 'n'."),
    ],
)  # fmt: skip
def test_fault_of_the_kinds(text: str, expected: str) -> None:
    known = {"n": Known("number"), "t": Known("text"), "c": Known("text", ("low", "high")), "d": Known("date")}
    with pytest.raises(ExpressionFault) as caught:
        parse(text).kind(known)
    assert caught.value.text == expected


# What an expression could be abused for in languages that are evaluated by their host.
@pytest.mark.parametrize(
    "text",
    [
        "__import__('os').system('true')",
        "().__class__",
        "a.values",
        "a[0]",
        "lambda: a",
        "a if a else a",
        "f'{a}'",
        "open('x')",
        "a := 1",
        "a; a",
        "a\\",
        "a # b",
        "@a > 1",
        "getattr(a, 'b')",
        "column(a)",
        "[x for x in a]",
        "{a}",
        "not",
        "a is a",
        "9**9**9 > a",
        "'a'.upper() == a",
        "column('a').real > 1",
    ],
)
def test_nothing_but_the_grammar(text: str) -> None:
    with pytest.raises(ExpressionFault):
        parse(text)


COLUMNS = {
    "a": column([1.0, 0.0, None, -2.5]),
    "b": column([0.0, 3.0, 1e300, None]),
    "t": column(["x", None, "y", ""], "text"),
    "d": column(["2031-01-05", "2030-12-31", None, "2031-02-28"], "date"),
}
WORDS = [
    "a", "b", "t", "d", "1", "0.5", "1e9", "'x'", "'2031-01-05'", "+", "-", "*", "/", "(", ")", "[", "]", ",", "==",
    "!=", "<", "<=", ">", ">=", "=", "and", "or", "not", "in", "is_missing(", "pick(", "mean_of(", "round(", "abs(",
    "exp(", "log(", "log2(", "log10(", "sqrt(", "column('a')", "at_least=1", " ", ".", "__class__", "'",
]  # fmt: skip


@settings(max_examples=400, deadline=None)
@given(st.one_of(st.text(string.printable, max_size=60), st.lists(st.sampled_from(WORDS), max_size=14).map(" ".join)))
def test_any_text_gives_a_value_or_the_fault(text: str) -> None:
    try:
        result = parse(text).evaluate({**COLUMNS, **dict.fromkeys(string.ascii_letters, COLUMNS["a"]), **COLUMNS})
    except (ExpressionFault, KeyError):  # a name that isn't in the mapping is the caller's: load checks names before
        return
    assert result.values.shape == result.missing.shape == (4,)
    if result.kind == "number":
        assert np.isfinite(result.values[~result.missing]).all()


def numbers(depth: int) -> st.SearchStrategy[str]:
    if depth == 0:
        return st.sampled_from(["x", "y", "1", "0.5", "3"])
    below = numbers(depth - 1)
    return st.one_of(below, st.tuples(below, st.sampled_from("+-*"), below).map(lambda p: f"({p[0]} {p[1]} {p[2]})"))


def conditions(depth: int) -> st.SearchStrategy[str]:
    signs = st.sampled_from(["==", "!=", "<", "<=", ">", ">="])
    plain = st.tuples(numbers(1), signs, numbers(1)).map(lambda p: f"{p[0]} {p[1]} {p[2]}")
    if depth == 0:
        return plain
    below = conditions(depth - 1)
    joined = st.tuples(below, st.sampled_from(["and", "or"]), below).map(lambda p: f"({p[0]} {p[1]} {p[2]})")
    return st.one_of(plain, joined, below.map(lambda p: f"(not {p})"))


@settings(max_examples=200, deadline=None)
@given(conditions(3), st.lists(st.tuples(st.integers(-3, 3), st.integers(-3, 3)), min_size=1, max_size=8))
def test_complete_rows_agree_with_the_host_language(text: str, rows: list[tuple[int, int]]) -> None:
    # The texts made here mean the same in Python, whose evaluator shares no code with ours.
    if "x" not in text and "y" not in text:
        return
    expected = [bool(eval(text, {"__builtins__": {}}, {"x": x, "y": y})) for x, y in rows]
    x, y = ([float(row[place]) for row in rows] for place in (0, 1))
    assert values(text, x=x, y=y) == expected
