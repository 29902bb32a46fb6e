"""What was found, in sentences that the state alone decides: no number is compared here."""

from collections.abc import Callable

from beforehand.report.view import schemes
from beforehand.report.view.lines import Line
from beforehand.report.view.model import Finding
from beforehand.report.view.written import comparison, has_estimate, p_of, with_interval
from beforehand.spelling import integer
from beforehand.terms import STATE_WORDS, State


def capital(text: str) -> str:
    """Begin a text with a capital letter."""
    return text[:1].upper() + text[1:]


def claim(line: Line) -> str:
    """Give the claim as the spec words it, or the alternative in words."""
    written = line.hypothesis.claim.strip().removesuffix(".")
    return written or capital(line.hypothesis.alternative_in_words or line.label)


def lead(line: Line) -> str:
    """Give the state as the first words of a finding; only a confirmatory family-wise promise lets a claim be shown."""
    confirmed = line.intent == "confirmatory" and line.family.promise.criterion == "familywise_error_rate"
    words: dict[State, str] = {
        "rejected": "Shown" if confirmed else "Indicated",
        "rejected_against_claim": "Against the claim",
        "not_rejected": "Not shown",
    }
    return f"{words.get(line.state, STATE_WORDS[line.state].capitalize())}:"


def estimate(line: Line) -> str:
    """Write the estimate with its interval: "difference in means, curtain − standard: −8.2 kWh/day (…)"."""
    if not has_estimate(line):
        return ""
    return f"{line.hypothesis.estimates}, {line.label}: {with_interval(line)}"


def _quoted(line: Line) -> str:
    return f"‘{claim(line)}’."


def _rejected(line: Line) -> str:
    return f"{claim(line)}."


def _against(line: Line) -> str:
    return (
        f"{_quoted(line)} The data speak for the opposite side. This is a finding against the claim; for gates and "
        "success it counts as not rejected."
    )


def _not_rejected(line: Line) -> str:
    if _beyond(line):
        return f"{_quoted(line)} The interval lies wholly on the other side of the null value."
    return f"{_quoted(line)} Nor is the contrary shown."


def _beyond(line: Line) -> bool:
    """Whether the unadjusted interval excludes the null value on the side that a one-sided test does not look at."""
    if len(line.hypothesis.null_values) != 1:
        return False
    (null,) = line.hypothesis.null_values
    beyond = {"above": line.number("upper") < null, "below": line.number("lower") > null}
    return beyond.get(line.hypothesis.side, False)


def _not_tested(line: Line) -> str:
    return f"{_quoted(line)} No claim is made, because {schemes.waiting(line)}; the numbers are descriptive."


def _no_result(line: Line) -> str:
    reason = line.hypothesis.no_result_because.strip().removesuffix(".") or "the reason was not recorded"
    return f"{_quoted(line)} {capital(reason)}. The hypothesis stays in its family and counts with p = 1."


def _described(line: Line) -> str:
    return f"{_quoted(line)} The plan asks for no decision."


def _continue(line: Line) -> str:
    return f"{_quoted(line)} Undecided at this look; the study goes on."


TEXTS: dict[State, Callable[[Line], str]] = {
    "rejected": _rejected,
    "rejected_against_claim": _against,
    "not_rejected": _not_rejected,
    "not_tested": _not_tested,
    "no_result": _no_result,
    "described": _described,
    "continue": _continue,
}


def numbers(line: Line) -> str:
    """Write the estimate and what was compared, or the p-value that nothing was compared with."""
    words = estimate(line)
    if line.state in ("rejected", "rejected_against_claim", "not_rejected"):
        compared = comparison(line)
    elif line.state == "no_result":
        compared = ""
    else:
        compared = f"unadjusted p {p_of(line)}, compared with nothing"
    joined = "; ".join(part for part in (words, compared) if part)
    return f"{capital(joined)}." if joined else ""


def finding(line: Line) -> Finding:
    """Say what was found about one hypothesis."""
    return Finding(
        id=line.id, label=line.label, style=line.state.replace("_", "-"), lead=lead(line),
        text=TEXTS[line.state](line), numbers=numbers(line),
    )  # fmt: skip


def family_verdict(states: dict[State, int]) -> str:
    """Count the states: "3 null hypotheses: 2 rejected; 1 not rejected."."""
    total = sum(states.values())
    if not total:
        return "No hypotheses."
    words = STATE_WORDS | {"no_result": "without a result"}
    kinds = [f"{integer(count)} {words[state]}" for state in STATE_WORDS if (count := states.get(state, 0))]
    hypotheses = "1 null hypothesis" if total == 1 else f"{integer(total)} null hypotheses"
    return f"{hypotheses}: {'; '.join(kinds)}."
