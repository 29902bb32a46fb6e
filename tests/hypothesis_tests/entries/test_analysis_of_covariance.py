"""Analysis of covariance against printed values, base R, statsmodels, and the regression of residuals on residuals."""

import csv
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from statsmodels.regression.linear_model import OLS

from beforehand.hypothesis_tests.contract import NotComputed
from beforehand.hypothesis_tests.entries.analysis_of_covariance import analysis_of_covariance
from beforehand.hypothesis_tests.entries.student_t import student_t

Doubles = NDArray[np.float64]
R = Path(__file__).parents[2] / "references" / "data_based" / "covariance.csv"


def base_r(case: str) -> dict[str, float]:
    lines = [line for line in R.read_text("utf-8").splitlines() if not line.startswith("#")]
    return {row["quantity"]: float(row["value"]) for row in csv.DictReader(lines) if row["case"] == case}


def split(outcome: Doubles, group: NDArray[np.bool_], **covariates: Any) -> dict[str, Any]:
    """Split columns into the two groups, the first where ``group`` is true."""
    sides = (group, ~group)
    return {
        "samples": tuple(outcome[side] for side in sides),
        "covariates": tuple({name: np.asarray(column)[side] for name, column in covariates.items()} for side in sides),
    }


def ask(case: dict[str, Any], **settings: Any) -> Any:
    return analysis_of_covariance(*case["samples"], covariates=case["covariates"], **settings)


@pytest.mark.parametrize(("drug", "place"), [("A", 1), ("D", 2)])
def test_leprosy(drug: str, place: int, reference: Any, outcome: Any) -> None:
    # three groups of 10: with the third one told by a category, the coefficient is that of the printed model
    leprosy = reference("ancova-leprosy")
    drugs = np.repeat(["A", "D", "F"], 10)
    other = np.where(drugs == {"A": "D", "D": "A"}[drug], "yes", "no")
    found = outcome(ask(split(leprosy.data("post"), drugs == drug, pre=leprosy.data("pre"), other=other)))
    for name, value in {"coef_int_A_D_pre": found.estimate, "se": found.standard_error, "t": found.statistic}.items():
        assert leprosy.agrees(name, value, place), name
    assert leprosy.agrees("coef_p", found.p, place)
    assert found.df == 26


def swiss(reference: Any) -> dict[str, Any]:
    data = reference("lm-swiss").data
    school = np.select([data("Examination") <= 12, data("Examination") <= 20], ["few", "many"], "most")
    covariates = {"Agriculture": data("Agriculture"), "Infant.Mortality": data("Infant.Mortality"), "school": school}
    return split(data("Fertility"), data("Catholic") > 50, **covariates)


@pytest.mark.parametrize("case", ["leprosy", "swiss"])
def test_base_r(case: str, reference: Any, outcome: Any) -> None:
    columns, theirs = swiss(reference), base_r(case)
    if case == "leprosy":
        leprosy, keep = reference("ancova-leprosy"), np.r_[0:10, 20:30]
        columns = split(leprosy.data("post")[keep], np.arange(20) < 10, pre=leprosy.data("pre")[keep])
    found = outcome(ask(columns, confidence=0.9))
    ours = {
        "estimate": found.estimate, "error": found.standard_error, "t": found.statistic, "df": found.df, "p": found.p,
        "lower": found.lower, "upper": found.upper, "hc3_error": outcome(ask(columns, errors="hc3")).standard_error,
    }  # fmt: skip
    for name, value in theirs.items():
        assert ours[name] == pytest.approx(value, rel=1e-11), name


@pytest.mark.parametrize(
    ("ours", "share"), [("above", lambda both, t: both / 2 if t > 0 else 1 - both / 2), ("two_sided", lambda p, _: p)]
)
def test_statsmodels(ours: Any, share: Any, reference: Any, outcome: Any) -> None:
    case = swiss(reference)
    y, sizes = np.concatenate(case["samples"]), [sample.size for sample in case["samples"]]
    names = case["covariates"][0]
    columns = {name: np.concatenate([side[name] for side in case["covariates"]]) for name in names}
    school = [columns["school"] == level for level in ("many", "most")]
    x = np.column_stack([np.ones(y.size), np.repeat([1, 0], sizes), columns["Agriculture"],
                         columns["Infant.Mortality"], *school]).astype(float)  # fmt: skip
    for errors, theirs in (("classical", "nonrobust"), ("hc3", "HC3")):
        for null_value in (0.0, -4.0):
            again = OLS(y, x).fit(cov_type=theirs, use_t=True).t_test(([0, 1, 0, 0, 0, 0], null_value))
            found = outcome(ask(case, errors=errors, null_value=null_value, alternative=ours))
            assert found.statistic == pytest.approx(float(again.tvalue.squeeze()), rel=1e-9)
            assert found.p == pytest.approx(share(float(again.pvalue.squeeze()), found.statistic), rel=1e-9)


def test_residuals_on_residuals(reference: Any, outcome: Any) -> None:
    # Frisch and Waugh (1933), Lovell (1963): the coefficient is that of what the covariates leave
    case = swiss(reference)
    y, group = np.concatenate(case["samples"]), np.repeat([1.0, 0.0], [sample.size for sample in case["samples"]])
    numbers = [np.concatenate([side[name] for side in case["covariates"]]) for name in ("Agriculture", "school")]
    x = np.column_stack([np.ones(y.size), numbers[0], numbers[1] == "many", numbers[1] == "most"]).astype(float)
    left = [column - x @ np.linalg.lstsq(x, column)[0] for column in (y, group)]
    less = {"samples": case["samples"], "covariates": tuple(
        {name: side[name] for name in ("Agriculture", "school")} for side in case["covariates"])}  # fmt: skip
    assert outcome(ask(less)).estimate == pytest.approx(left[0] @ left[1] / (left[1] @ left[1]), rel=1e-10)


def test_a_balanced_covariate_changes_no_estimate(outcome: Any) -> None:
    first, second = np.array([4.0, 6, 5, 9, 7, 8]), np.array([3.0, 5, 4, 6, 2, 7])
    covariates = tuple({"half": np.tile(["left", "right"], 3)} for _ in range(2))
    found = outcome(analysis_of_covariance(first, second, covariates=covariates))
    plain = outcome(student_t(first, second))
    assert found.estimate == pytest.approx(plain.estimate, rel=1e-13)
    assert found.df == plain.df - 1


def test_units_and_offsets_change_nothing_else(reference: Any, outcome: Any) -> None:
    case = swiss(reference)
    others = tuple({**side, "Agriculture": side["Agriculture"] * 2.0**90 + 2.0**120} for side in case["covariates"])
    cases = [
        ({**case, "samples": tuple(sample * 2.0**-700 for sample in case["samples"])}, 2.0**-700),
        ({**case, "samples": tuple(sample + 2.0**30 for sample in case["samples"])}, 1.0),
        ({**case, "covariates": others}, 1.0),
    ]
    for errors in ("classical", "hc3"):
        here = outcome(ask(case, errors=errors))
        for other, unit in cases:
            there = outcome(ask(other, errors=errors))
            # an offset of 2^30 costs a number some 24 of its 53 bits
            assert (there.p, there.estimate) == pytest.approx((here.p, here.estimate * unit), rel=1e-6)


def test_nearly_determined_covariates_keep_their_digits(outcome: Any) -> None:
    random = np.random.default_rng(5)
    x = random.normal(0, 1, 40)
    covariates = {"x": x, "nearly": x + 1e-5 * random.normal(0, 1, 40)}
    case = split(x + random.normal(0, 1, 40), np.arange(40) % 2 == 0, **covariates)
    first = outcome(ask(case))
    again = outcome(analysis_of_covariance.again(*case["samples"], covariates=case["covariates"]))
    for number in ("estimate", "lower", "upper", "p", "statistic", "standard_error"):
        assert getattr(first, number) == pytest.approx(getattr(again, number), rel=1e-9)


LEVELS = np.tile(["a", "b"], 6)


@pytest.mark.parametrize(
    ("covariates", "errors", "reason"),
    [
        ({"x": np.full(12, 3.0)}, "classical", "the covariate 'x' has the same value in all rows"),
        ({"kind": np.full(12, "old")}, "classical", "the covariate 'kind' has the same value in all rows"),
        (
            {"x": np.arange(12.0), "twice": 2 * np.arange(12.0) + 7},
            "classical",
            "the covariate 'twice' follows from the groups and the covariates named before it: its effect can't be "
            "told from theirs",
        ),
        (
            {"kind": LEVELS, "side": np.repeat(["new", "old"], 6)},
            "classical",
            "the covariate 'side' follows from the groups and the covariates named before it: its effect can't be "
            "told from theirs",
        ),
        (
            {"row": np.array([str(i) for i in range(12)])},
            "classical",
            "at least 14 rows are needed; there are 12 rows (the model has 13 coefficients)",
        ),
        ({"y": np.r_[0:6, 2:8] ** 1.0}, "classical", "groups and covariates explain the outcome exactly, so that no "
         "scatter is left to compare with"),
        ({"x": np.full(12, 1e301)}, "classical", "the covariate 'x' has a value that is too large to compute with"),
        (
            {"kind": np.array(["odd", *["even"] * 11])},
            "hc3",
            "1 row decides a coefficient alone, and then errors of this kind don't exist. Use errors: classical",
        ),
    ],
)  # fmt: skip
def test_no_result(covariates: dict[str, Any], errors: Any, reason: str) -> None:
    outcome = np.r_[0:6, 2:8] ** 1.0 if "y" in covariates else np.arange(12.0) % 5
    case = split(outcome, np.arange(12) < 6, **covariates)
    assert ask(case, errors=errors) == NotComputed(reason, (6, 6))
    again = analysis_of_covariance.again(*case["samples"], covariates=case["covariates"], errors=errors)
    assert again == NotComputed(reason, (6, 6))


def test_refused_calls() -> None:
    case = split(np.arange(12.0), np.arange(12) < 6, x=np.arange(12.0) ** 2)
    with pytest.raises(ValueError, match="errors is classical or hc3; found 'robust'"):
        ask(case, errors="robust")
    with pytest.raises(ValueError, match="every group has the same covariates"):
        analysis_of_covariance(*case["samples"], covariates=(case["covariates"][0], {}))
