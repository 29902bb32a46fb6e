"""What is sealed: the same bytes for the same meaning, other bytes for another."""

import hashlib
import json
import struct
from pathlib import Path

import pytest
import rfc8785
import yaml

from beforehand.spec.canonical import checksum
from beforehand.spec.load import Spec, read_spec

BASE = (Path(__file__).parent / "faults" / "base.yaml").read_text(encoding="utf-8")


def load(text: str | bytes) -> Spec:
    return read_spec(text if isinstance(text, bytes) else text.encode(), Path("folder") / "buoys.yaml")


PLAN = load(BASE).plan
PARTICULARS = load(BASE).particulars


def edited(*edits: tuple[str, str]) -> str:
    text = BASE
    for there, instead in edits:
        assert there in text
        text = text.replace(there, instead, 1)
    return text


def as_json() -> str:
    """The base as JSON: flow style, every text in double quotes, keys in reverse order."""
    value = yaml.load(BASE, Loader=yaml.BaseLoader)  # BaseLoader keeps every word as text

    def turned(part: object) -> object:
        if isinstance(part, dict):
            return {key: turned(part[key]) for key in reversed(part)}
        if isinstance(part, list):
            return [turned(item) for item in part]
        return {"1": 1, "0": 0, "80": 80, "40": 40, "0.025": 0.025}.get(str(part), part)

    whole = turned(value)
    derive = whole["data"][0]["derive"]  # derived columns may only use those above them
    whole["data"][0]["derive"] = {key: derive[key] for key in reversed(derive)}
    return json.dumps(whole)


@pytest.mark.parametrize(
    "text",
    [
        BASE.replace("\n", "\r\n").encode(),
        b"\xef\xbb\xbf" + BASE.encode(),
        "# a comment\n\n" + BASE.replace("promise:", "\npromise:   # what is promised"),
        edited(("level: 0.025", "level: 0.0250")),
        edited(("level: 0.025", "level: 2.5e-2")),
        edited(("level: 0.025", "level: 1/40")),
        edited(("[0, 80]", "[0.0, 80.00]")),
        edited(("identifier: HB-7", "identifier: 'HB-7'")),
        edited(("identifier: HB-7", 'identifier: "HB\\u002d7"')),
        edited(("  title: Paints against growth on harbour buoys\n  identifier: HB-7\n",
                "  identifier: HB-7\n  title: >\n    Paints against growth\n    on harbour buoys\n")),
        edited(("where: harbour == 'north'", "where: >-\n          harbour\n          == 'north'")),
        edited(("{each_with: bare}", "\n        each_with: bare")),
        edited(("pairs: {each_with: bare}\n", "pairs: {each_with: bare}\n      null_hypothesis: {at: 0}\n")),
        edited(("procedure: holm", "procedure: holm\n    success: any")),
        edited(("test: fisher_exact\n", "test: fisher_exact\n        options: {two_sided_by: smaller_tail}\n")),
        edited(("test: one_sample_t\n", "test: one_sample_t\n        missing_values: {method: complete_cases}\n"),
               ("test: one_sample_t\n", "test: one_sample_t\n        data: buoys\n")),
        as_json(),
    ],
    ids=["crlf", "bom", "comments", "zeros", "exponent", "fraction", "decimals", "quotes", "escape", "folded",
         "folded_expression", "block", "default_null", "default_success", "default_option", "defaults", "json"],
)  # fmt: skip
def test_layout_changes_nothing(text: str | bytes) -> None:
    spec = load(text)
    assert spec.plan == PLAN
    assert spec.particulars == PARTICULARS
    assert spec.source == (text if isinstance(text, bytes) else text.encode())


@pytest.mark.parametrize(
    "edit",
    [
        ("level: 0.025", "level: 0.0251"),
        ("level_is: one_sided", "level_is: two_sided"),
        ("title: Paints", "title: Two paints"),
        ("procedure: holm", "procedure: bonferroni"),
        ("alternative: below", "alternative: above"),
        ("{at_least: 40}", "{at_least: 41}"),
        ("levels: [copper, silicone, bare]", "levels: [silicone, copper, bare]"),
        ("where: harbour == 'north'", "where: harbour == 'south'"),
        ("where: harbour == 'north'", "where: harbour  == 'north'"),  # an expression is sealed as written
        ("missing_codes: [\"\", \"NA\"]", 'missing_codes: [""]'),
        ("because: launched late", "because: launched too late"),
        ("keeps growth below", "holds growth below"),
        ("claim: Fewer buoys", "claim: Less buoys"),
        ("log(growth)", "log2(growth)"),
        ("between: [0, 80]", "between: [0, 81]"),
        ("test: fisher_exact", "test: fisher_exact\n        options: {two_sided_by: smaller_probability}"),
        ("how: randomised", "how: observed"),
        ("answers:", "assume:\n  - {id: expected, growth: {sd: 3}}\nanswers:"),
    ],
    ids=lambda edit: edit[1][:30],
)  # fmt: skip
def test_meaning_changes_the_plan(edit: tuple[str, str]) -> None:
    spec = load(edited(edit))
    assert spec.plan != PLAN
    assert spec.particulars == PARTICULARS


def test_the_order_of_hypotheses_is_meaning() -> None:
    whole = yaml.safe_load(BASE)
    whole["families"][1]["hypotheses"].reverse()
    assert load(yaml.safe_dump(whole)).plan != PLAN


@pytest.mark.parametrize(
    "edit",
    [
        ("file: data/buoys.csv", "file: data/buoys_corrected.csv"),
        ("dated: 2031-04-17", "dated: 2031-04-18"),
        ("prepared_by: [the study statistician]", "prepared_by: [somebody else]"),
        ("answer: growth is weighed once a season", "answer: once a season"),
        ("answers:", "appendix_rows: 50\nanswers:"),
        ("    missing_codes:", "    print_row_values: true\n    missing_codes:"),
        ("    missing_codes:", "    made_by_script: join.py\n    missing_codes:"),
    ],
    ids=lambda edit: edit[1][:30],
)
def test_particulars_are_no_departure(edit: tuple[str, str]) -> None:
    spec = load(edited(edit))
    assert spec.plan == PLAN
    assert spec.particulars != PARTICULARS


def test_the_plan_holds_the_expansion_and_no_particular() -> None:
    plan = json.loads(PLAN)
    assert [member["id"] for member in plan["families"][0]["members"]] == ["main/copper-bare", "main/silicone-bare"]
    assert plan["families"][0]["members"][0]["null_hypothesis"] == {"at": 0}
    assert not {"comparisons", "hypotheses", "hypotheses_from"} & set(plan["families"][0])
    for key in ("file", "print_row_values"):
        assert key not in plan["data"][0]
    assert not {"dated", "prepared_by"} & set(plan["study"])
    assert json.loads(PARTICULARS) == {
        "answers": [{"about": "further", "answer": "growth is weighed once a season", "warning": "one_of_many_times"}],
        "appendix_rows": 1000,
        "data": [{"file": "data/buoys.csv", "id": "buoys", "print_row_values": False}],
        "study": {"dated": "2031-04-17", "prepared_by": ["the study statistician"]},
    }


def test_fractions_stay_fractions() -> None:
    assert json.loads(load(edited(("level: 0.025", "level: 1/30"))).plan)["promise"]["level"] == "1/30"


def test_the_checksum_is_that_of_the_bytes() -> None:
    assert checksum(PLAN) == hashlib.sha256(PLAN).hexdigest() == load(BASE).plan_checksum


# The plan of the base, so that a changed default or a changed order of writing is seen: recorded from this program.
def test_the_plan_of_the_base_is_pinned() -> None:
    assert checksum(PLAN) == (Path(__file__).parent / "faults" / "base.plan.sha256").read_text().split()[0]


# RFC 8785, appendix B: IEEE 754 bits and the text of the number.
NUMBERS = {
    "0000000000000000": "0",
    "8000000000000000": "0",
    "0000000000000001": "5e-324",
    "8000000000000001": "-5e-324",
    "7fefffffffffffff": "1.7976931348623157e+308",
    "ffefffffffffffff": "-1.7976931348623157e+308",
    "4340000000000000": "9007199254740992",
    "c340000000000000": "-9007199254740992",
    "4430000000000000": "295147905179352830000",
    "44b52d02c7e14af5": "9.999999999999997e+22",
    "44b52d02c7e14af6": "1e+23",
    "44b52d02c7e14af7": "1.0000000000000001e+23",
    "444b1ae4d6e2ef4e": "999999999999999700000",
    "444b1ae4d6e2ef4f": "999999999999999900000",
    "444b1ae4d6e2ef50": "1e+21",
    "3eb0c6f7a0b5ed8c": "9.999999999999997e-7",
    "3eb0c6f7a0b5ed8d": "0.000001",
    "41b3de4355555553": "333333333.3333332",
    "41b3de4355555554": "333333333.33333325",
    "41b3de4355555555": "333333333.3333333",
    "41b3de4355555556": "333333333.3333334",
    "41b3de4355555557": "333333333.33333343",
    "becbf647612f3696": "-0.0000033333333333333333",
    "43143ff3c1cb0959": "1424953923781206.2",
}


@pytest.mark.parametrize(("bits", "text"), NUMBERS.items())
def test_numbers_of_rfc_8785(bits: str, text: str) -> None:
    (number,) = struct.unpack(">d", bytes.fromhex(bits))
    assert rfc8785.dumps(number).decode() == text


def test_order_of_keys_of_rfc_8785() -> None:
    # RFC 8785, section 3.2.3: by UTF-16 code units, so the smiling face comes before the Hebrew letter.
    keys = ["\u20ac", "\r", "\ufb33", "1", "\U0001f600", "\x80", "\xf6"]
    written = json.loads(rfc8785.dumps(dict.fromkeys(keys, 0)))
    assert list(written) == ["\r", "1", "\x80", "\xf6", "\u20ac", "\U0001f600", "\ufb33"]
