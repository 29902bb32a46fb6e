"""What every warning rule of the catalogue has to declare; an entry is tested the moment its file exists."""

import inspect
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any, get_args

import pytest

from beforehand.snooping.contract import GRAVEST_FIRST, WARNING_RULES, Evidence, Finding, WarningRule, warning_rule
from beforehand.terms import WARNING_NAMES, EvidenceFrom, Scope, Severity

NOTHING: Any = None
TEXTS = ("title", "why", "basis", "measured_on")


@pytest.fixture(params=list(WARNING_RULES))
def name(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture
def rule(name: str) -> WarningRule:
    return WARNING_RULES[name]


def test_one_word(name: str, rule: WarningRule) -> None:
    assert rule.name == name
    assert Path(inspect.getfile(rule.find)).stem == name
    assert name in WARNING_NAMES  # the word that `answers` of a spec may use
    assert (Path(__file__).parent / "entries" / f"test_{name}.py").is_file()


def test_declares_what_it_is(rule: WarningRule) -> None:
    assert rule.severity in get_args(Severity)
    assert rule.scope in get_args(Scope)
    assert rule.evidence in get_args(EvidenceFrom)
    for text in TEXTS:
        assert getattr(rule, text).strip(), text
    assert 0 <= rule.false_alarm_rate <= 1
    text = inspect.getdoc(rule.find) or ""
    for section in ("Parameters\n", "Yields\n"):
        assert section in text


def test_basis_is_published_or_says_that_there_is_none(rule: WarningRule) -> None:
    published = any(f"({year})" in rule.basis for year in range(1900, 2032))
    assert published or "no single source" in rule.basis


def test_a_pattern_is_never_an_objection(rule: WarningRule) -> None:
    assert (rule.evidence, rule.severity) != ("pattern", "objection")
    with pytest.raises(ValueError, match="a pattern in the data alone is never an objection"):
        replace(rule, evidence="pattern", severity="objection")


def test_gravest_first_holds_every_severity() -> None:
    assert sorted(GRAVEST_FIRST) == sorted(get_args(Severity))


def invented(*findings: Finding) -> WarningRule:
    """A rule that finds these."""

    @warning_rule(
        title="Invented", severity="caution", scope="family", evidence="record", why="It is needed here.",
        basis="Common practice, no single source.", false_alarm_rate=0.0, measured_on="nothing",
    )  # fmt: skip
    def invented_rule(evidence: Evidence) -> Iterator[Finding]:
        yield from findings

    return invented_rule


def finding(about: str, severity: Severity | None = None) -> Finding:
    return Finding(
        about=about, fact="It is.", number="1.", remedy="Do it.", ordinary_explanation="So it goes.", severity=severity
    )


def test_findings_keep_their_order() -> None:
    assert [found.about for found in invented(finding("b"), finding("a"))(NOTHING)] == ["b", "a"]


def test_one_warning_for_one_cause() -> None:
    with pytest.raises(ValueError, match="invented_rule: two findings are about the same thing"):
        invented(finding("a"), finding("a"))(NOTHING)


def test_a_finding_may_weigh_less_than_its_rule_and_not_more() -> None:
    assert invented(finding("a", "note"))(NOTHING)[0].severity == "note"
    with pytest.raises(ValueError, match="invented_rule: a finding is graver than the rule declares"):
        invented(finding("a", "objection"))(NOTHING)
