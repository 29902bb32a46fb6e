"""The whole view, for the kinds of study that there are, and the pages the templates make of it."""

import itertools
import math
import re
from collections.abc import Callable
from dataclasses import replace
from html.parser import HTMLParser
from typing import Any

import pytest

from beforehand.record.model import InputRecord, OverlapRecord, Record
from beforehand.report.figures import draw_figures
from beforehand.report.fonts import register_in_matplotlib
from beforehand.report.html import page
from beforehand.report.view import View, view
from beforehand.report.view.checklist import NOT_STATED
from beforehand.spelling import NO_BREAK, THIN

Make = Callable[..., Record]

VARIANTS: dict[str, Callable[[Make, Any], Record]] = {
    "all rejected": lambda make, plan: make(plan(id="one", p=[0.0001, 0.002, 0.02])),
    "two gates": lambda make, plan: make(
        plan(id="one", p=[0.001, 0.3]), plan(id="two", p=[0.01], procedure="bonferroni")
    ),
    "separate": lambda make, plan: make(
        plan(id="one", p=[0.003, 0.2], under_study_promise=False),
        plan(id="two", p=[0.01, 0.4], criterion="per_comparison_error_rate", procedure="unadjusted", level=0.05,
             level_is="two_sided", entered_as="doubled", under_study_promise=False),
        scheme="separate",
    ),
    "screen": lambda make, plan: make(
        plan(id="channels", p=[(at + 1) ** 2 / 1e6 for at in range(600)], procedure="benjamini_hochberg", level=0.1,
             criterion="false_discovery_rate", level_is=None, side="two_sided", under_study_promise=False, claim=""),
        intent="exploratory", scheme="separate", appendix_rows=50,
    ),
    "no result": lambda make, plan: make(plan(id="one", p=[None, 0.01, None])),
    "nothing but missing": lambda make, plan: make(plan(id="one", p=[None])),
    "ratios": lambda make, plan: make(
        plan(id="one", p=[0.001, 0.3], scale="ratio", side="above",
             changes={"lower": [0.2, 0.9], "upper": [math.inf, 1.4], "estimate": [1.5, 1.1]})
    ),
    "one end only": lambda make, plan: make(plan(id="one", p=[0.001], changes={"lower": [-math.inf]})),
    "smallest p": lambda make, plan: make(plan(id="one", p=[0.0, 1.0])),
    "against the claim": lambda make, plan: make(
        plan(id="one", p=[0.001], changes={"state": ["rejected_against_claim"]})
    ),
    "hostile": lambda make, plan: make(
        plan(id="one", p=[0.001, 0.9], claim='<script>alert("x")</script> {label} & $x_1$ 漢字 😀',
             labels=["<b>a name that is much too long for any table or figure that a person could want</b>", "Ω ≥ 5"])
    ),
}  # fmt: skip


@pytest.fixture(params=VARIANTS)
def name(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture
def record(name: str, make: Make, plan: Any) -> Record:
    return VARIANTS[name](make, plan)


@pytest.fixture(scope="session", autouse=True)
def fonts() -> None:
    register_in_matplotlib()


class Reader(HTMLParser):
    """Collects what a page is made of."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.text = ""
        self._silent = False
        self.feed(text)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs)))
        self._silent = tag in ("style", "script")

    def handle_endtag(self, tag: str) -> None:
        self._silent = False

    def handle_data(self, data: str) -> None:
        self.text += "" if self._silent else data

    def all(self, *names: str) -> list[dict[str, str | None]]:
        return [attributes for name, attributes in self.tags if name in names]


DRAWN: dict[str, Reader] = {}
"""Every page is drawn once: figures take their time."""


def drawn(name: str, record: Record) -> Reader:
    if name not in DRAWN:
        figures = draw_figures(record)
        DRAWN[name] = Reader(page(view(record, figures), figures).decode())
    return DRAWN[name]


def test_every_kind_of_study_makes_a_page(name: str, record: Record) -> None:
    found = drawn(name, record)
    levels = [int(tag[1]) for tag, _ in found.tags if re.fullmatch("h[1-6]", tag)]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(deeper - upper <= 1 for upper, deeper in itertools.pairwise(levels))
    assert all(image["alt"] for image in found.all("img"))
    assert all(cell["scope"] in ("col", "colgroup", "row") for cell in found.all("th"))
    assert not any("style" in attributes for _, attributes in found.tags)
    assert len(found.all("script")) == 1
    assert found.all("html")[0]["lang"] == "en-GB"
    anchors = {attributes["id"] for _, attributes in found.tags if "id" in attributes}
    assert {link["href"] for link in found.all("a")} <= {f"#{anchor}" for anchor in anchors}
    assert "nan" not in re.findall(r"[a-z]+", found.text.lower())
    assert not re.search(r"\bNone\b(?! of| can)", found.text)


def test_every_hypothesis_is_in_the_appendix(record: Record) -> None:
    chunks = view(record, ()).appendix["screen"].chunks
    assert sum(len(chunk.rows) for chunk in chunks) == len(record.hypotheses)


def test_abbreviations_are_spelled_out_first(name: str, record: Record) -> None:
    text = drawn(name, record).text
    body = text[text.index("null hypothes") :]
    for words, short in (("family-wise error rate", "FWER"), ("false discovery rate", "FDR")):
        if short in body:
            assert body[: body.index(short)].endswith(f"{words} (")
    assert "number of hypotheses (m)" in body.lower()


def test_user_text_stays_text(make: Make, plan: Any) -> None:
    found = drawn("hostile", VARIANTS["hostile"](make, plan))
    assert '<script>alert("x")</script>' in found.text
    assert "U+6F22" in found.text
    assert not found.all("b")


def test_the_number_of_the_report_ends_in_the_results_checksum(make: Make, plan: Any) -> None:
    found = view(make(plan(id="one", p=[0.01])), ())
    results = {one.name: one for one in found.front.checksums}["Results"]
    assert found.number == f"SD-2032-04.{results.digits.replace(' ', '')[:8]}"
    assert results.of_file == "record.json"


def front_text(found: View) -> str:
    return " ".join([found.front.reading, *found.front.promises, *found.front.alarms]).replace(THIN, " ")


def test_page_one_gives_both_readings_of_the_level(make: Make, plan: Any) -> None:
    assert "2.5 % one-sided = 5 % two-sided" in front_text(view(make(plan(id="one", p=[0.01])), ()))


def test_unadjusted_is_said_loudly_on_page_one(make: Make, plan: Any) -> None:
    text = front_text(view(VARIANTS["separate"](make, plan), ()))
    # two hypotheses at 5 %: at most 10 %
    assert "Family two: nothing is adjusted in this family." in text
    assert "can reach 10 %" in text


def test_findings_against_the_claim_come_first(make: Make, plan: Any) -> None:
    record = VARIANTS["against the claim"](make, plan)
    assert [finding.id for finding in view(record, ()).front.against] == ["one_1"]
    text = drawn("against the claim", record).text
    assert text.index("Found against the claim") < text.index("Decisions by family")


def test_not_sealed_is_said_plainly(make: Make, plan: Any) -> None:
    found = view(make(plan(id="one", p=[0.01])), ())
    assert found.front.standing[0].text.startswith("Not sealed")
    assert found.departures.sentences[0].startswith("None can be listed")


def test_a_study_objection_takes_the_label_on_page_one(make: Make, plan: Any) -> None:
    record = make(plan(id="one", p=[0.01]))
    objection = replace(record.warnings[0], severity="objection")
    assert "1 objection" in view(replace(record, warnings=(objection,)), ()).front.reading


def test_print_holds_as_many_rows_as_the_spec_allows(make: Make, plan: Any) -> None:
    found = view(VARIANTS["screen"](make, plan), ()).appendix
    printed = [row for chunk in found["print"].chunks for row in chunk.rows]
    assert len(printed) == 50
    assert "tests.csv, SHA-256" in found["print"].sentences[0]
    assert [len(chunk.rows) for chunk in found["screen"].chunks] == [200, 200, 200]


def test_long_families_show_rejections_first(make: Make, plan: Any) -> None:
    record = make(plan(id="one", p=[0.5] * 40 + [1e-6]))
    found = view(record, ()).results.families[0]
    assert found.findings[0].id == "one_41"
    assert "20 of the 41" in found.shown_part


def test_the_checklist_follows_the_record(make: Make, plan: Any) -> None:
    record = make(plan(id="one", p=[0.01]))
    named = replace(record, study=replace(record.study, protocol="Plan of the station, section 2"))

    def where(found: View, item: str) -> str:
        return next(row.cells[1].text for row in found.checklist.tables[0].rows if row.head.text == item)

    assert where(view(record, ()), "Where the protocol can be read") == NOT_STATED
    assert where(view(named, ()), "Where the protocol can be read") == "section 1"


def test_undeclared_columns_and_missing_codes_are_listed(make: Make, plan: Any) -> None:
    file = InputRecord(id="plots", file="plots.csv", bytes=9, sha256="ab" * 32, rows=3, columns=2,
                       extra_columns=("hail",), missing_codes=("", "-99"))  # fmt: skip
    facts = {
        fact.label: fact.text for fact in view(make(plan(id="one", p=[0.01]), inputs=(file,)), ()).inputs.files[0].facts
    }
    assert facts["Columns not declared"] == "hail"
    assert facts["Missing codes"] == "(empty), -99"


def test_rows_that_conditions_could_not_judge_are_listed(make: Make, plan: Any) -> None:
    record = make(plan(id="one", p=[0.01]))
    undecided = replace(record.rows[0].analysis_sets[0], undecided=2, undecided_lines=(7, 9))
    overlap = OverlapRecord(first="full", second="dry", both=40, only_first=8, only_second=0)
    rows = replace(record.rows[0], analysis_sets=(undecided,), overlaps=(overlap,))
    flow, shared = view(replace(record, rows=(rows,)), ()).analysed.data[0].tables[:2]
    assert "2 left out because the condition met a missing value (file lines 7, 9)" in flow.rows[-1].head.note
    assert [cell.text for cell in shared.rows[0].cells] == ["40", "8", "0"]


def test_weights_of_the_plan_are_printed(make: Make, plan: Any) -> None:
    record = make(plan(id="one", p=[0.01, 0.02]))
    family = replace(record.families[0], given={"weights": [0.75, 0.25]})
    claims = view(replace(record, families=(family,)), ()).promised.families[0].hypotheses.rows
    assert [row.cells[0].note for row in claims] == ["Weight: 0.75.", "Weight: 0.25."]


def test_numbers_of_a_column_stand_under_each_other(make: Make, plan: Any) -> None:
    table = view(VARIANTS["ratios"](make, plan), ()).results.families[0].estimates
    estimates = [row.cells[2] for row in table.rows]
    assert [cell.text for cell in estimates] == ["1.50", "1.10"]
    upper = [row.cells[4] for row in table.rows]
    assert [cell.text for cell in upper] == ["∞", "1.40"]
    assert "short-2-point" in upper[0].style


def test_no_plain_space_breaks_a_number(make: Make, plan: Any) -> None:
    found = view(make(plan(id="one", p=[0.00001])), ())
    assert f"1.0{NO_BREAK}×{NO_BREAK}10⁻⁵" in found.front.shown[0].numbers
