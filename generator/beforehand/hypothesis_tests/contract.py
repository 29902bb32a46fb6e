"""What a statistical test takes, gives and declares, and the decorator that enters it in the catalogue."""

import inspect
import math
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any, Generic, ParamSpec, cast

import numpy as np
from numpy.typing import NDArray

from beforehand.catalogue import Catalogue
from beforehand.hypothesis_tests.beside import BESIDE, Word, checked_beside
from beforehand.terms import Alternative, Design, OutcomeKind, Scale

Values = NDArray[np.float64]
P = ParamSpec("P")

# Every test has these keyword-only parameters; what else its signature holds is a word of BESIDE, or an option.
COMMON = ("null_value", "alternative", "confidence")

# Sums and differences of up to a hundred million values below this still fit in a double.
LARGEST = 1e300


@dataclass(frozen=True, kw_only=True)
class Outcome:
    """The result of one test.

    ``lower`` and ``upper`` are the two-sided interval at the ``confidence`` asked for; a one-sided test at level a
    reads its bound from the interval at 1 - 2a. NaN stands where a test has no such number (an exact test has no df).
    ``n`` holds the analysed units per group, first group first; for pairs, the number of pairs.
    """

    estimate: float
    lower: float
    upper: float
    statistic: float
    df: float = math.nan
    p: float
    n: tuple[int, ...]
    standard_error: float = math.nan
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True)
class NotComputed:
    """Why a test has no result; the hypothesis still counts in its family."""

    reason: str
    n: tuple[int, ...] = ()


Result = Outcome | NotComputed


@dataclass(frozen=True, kw_only=True)
class StatisticalTest(Generic[P]):
    """One entry of the catalogue: what it declares, and the computation.

    Calling the entry calls the test: ``welch_t(first, second, null_value=0.0, alternative="above", confidence=0.95)``.
    """

    title: str
    design: Design
    outcome: OutcomeKind
    scale: Scale
    estimates: str
    """What the estimate estimates, in words: "difference in means"."""
    parameter: str
    """The same as a symbol: "μ₁ − μ₂"."""
    statistic: str
    """The name of the statistic: "t"."""
    p_is: str
    """How p is obtained, in words: "exact under normality"."""
    null: str
    """The null hypothesis in words."""
    assumptions: tuple[str, ...]
    second_route: str
    """The independent second computation, and what it does not share with the first."""
    bound: float
    """Largest relative disagreement of the two computations that is accepted."""
    reference: str
    independent_units: bool
    """Whether the test assumes that every row is an independent unit."""
    interval_inverts_p: bool
    """Whether the interval holds exactly the null values that the two-sided test, as it is by default, keeps."""
    null_default: float
    """The null value when a spec names none."""
    null_between: tuple[float, float] | None
    """The null values that the test takes lie between these two, which don't belong to them; None: anywhere."""
    only_default_null: bool
    """Whether the test has no other null value than ``null_default``; it gives no result for any other one."""
    compute: Callable[P, Result] = field(repr=False)

    @property
    def name(self) -> str:
        """The word that a spec uses."""
        return self.compute.__name__

    @property
    def options(self) -> dict[str, inspect.Parameter]:
        """The test's own options: the keyword-only parameters that not every test has."""
        parameters = inspect.signature(self.compute).parameters.values()
        return {p.name: p for p in parameters if p.kind is p.KEYWORD_ONLY and p.name not in (*COMMON, *BESIDE)}

    @property
    def takes(self) -> tuple[Word, ...]:
        """What the test takes of each row beside its outcome, in the shape of the samples: see ``beside``."""
        return tuple(word for word in BESIDE if word in inspect.signature(self.compute).parameters)

    @property
    def needs(self) -> tuple[Word, ...]:
        """What of this it can't do without."""
        parameters = inspect.signature(self.compute).parameters
        return tuple(word for word in self.takes if parameters[word].default is inspect.Parameter.empty)

    @property
    def aligned(self) -> bool:
        """Whether the samples are values of the same units, in the same order."""
        return self.design in ("pairs", "association")

    def __call__(self, *samples: P.args, **settings: P.kwargs) -> Result:
        """Run the test on clean arrays: no missing values, the units of one group in one array.

        Raises
        ------
        ValueError
            When a sample is not one-dimensional, holds a missing value, or holds anything but no and yes where the
            outcome is an event, or but whole numbers from 0 on where it is a count; when the two sides of pairs differ
            in length; when what stands beside the samples isn't aligned with them; when a setting is not one of its
            words.
        """
        arrays = self._checked(samples)
        return self._too_large(arrays) or cast(Callable[..., Result], self.compute)(
            *arrays, **self._beside(arrays, settings)
        )

    def again(self, *samples: Any, **settings: Any) -> Result:
        """Run the second route, the function ``second_route`` in the entry's file, with the same call."""
        arrays = self._checked(samples)
        second: Callable[..., Result] = STATISTICAL_TESTS.module(self.name).second_route
        return self._too_large(arrays) or second(*arrays, **self._beside(arrays, settings))

    def _checked(self, samples: tuple[Any, ...]) -> tuple[Any, ...]:
        """Turn samples into arrays of the kind the test takes; what it takes from elsewhere passes as it is."""
        if self.outcome == "supplied":
            return samples
        arrays = tuple(checked(sample, self.outcome) for sample in samples)
        if self.aligned and len({array.size for array in arrays}) > 1:
            raise ValueError(f"pairs have two values each; found {' and '.join(str(a.size) for a in arrays)} values")
        return arrays

    def _beside(self, arrays: tuple[Any, ...], settings: dict[str, Any]) -> dict[str, Any]:
        """Check what stands beside the samples, and leave the other settings as they are."""
        sizes = tuple(array.size for array in arrays) if self.takes else ()
        given = [word for word in self.takes if settings.get(word) is not None]
        return {**settings, **{word: checked_beside(word, settings[word], sizes) for word in given}}

    def _too_large(self, arrays: tuple[Any, ...]) -> NotComputed | None:
        """Refuse samples with values that are infinite, or so large that sums of them are."""
        if self.outcome != "number" or all((np.abs(array) < LARGEST).all() for array in arrays):
            return None
        sizes = tuple(array.size for array in arrays)
        reason = "a value is infinite or too large to compute with"
        return NotComputed(reason, sizes[:1] if self.aligned else sizes)

    def smallest_p(
        self,
        sizes: tuple[int, ...],
        pooled: NDArray[Any] | None,
        *,
        alternative: Alternative,
        null_value: float | None = None,
        **options: Any,
    ) -> float:
        """Give the smallest p that this test could reach with groups of these sizes.

        A test whose p can come arbitrarily near to 0 has no function ``smallest_p`` in its file, and gives 0.

        Parameters
        ----------
        sizes : tuple of int
            Units per group; for pairs, the number of pairs.
        pooled : ndarray or None
            The outcomes of all groups together, unlabelled, or None when no data were read. For pairs the absolute
            differences from the null value; for pairs of events whether the two differ. For an association both
            columns, each by itself. Where the test takes strata, the outcomes of each stratum together.
        alternative : {"above", "below", "two_sided"}
            The side asked for.
        null_value : float, optional
            The null value. Where the smallest p depends on it (the function in the file takes it) and none is given,
            the answer is 0: not known.
        **options
            The test's own options, as in a call; and what it takes beside the outcome, each group in itself in any
            order. Where the smallest p depends on it and it is not given, the answer is 0 too.
        """
        smallest = getattr(STATISTICAL_TESTS.module(self.name), "smallest_p", None)
        if smallest is None:
            return 0.0
        asked = inspect.signature(smallest).parameters
        given: dict[str, Any] = {"null_value": null_value, **options}
        if any(name in asked and given.get(name) is None for name in ("null_value", *self.needs)):
            return 0.0
        known = {name: value for name, value in given.items() if name in asked or name in self.options}
        return float(smallest(sizes, pooled, alternative=alternative, **known))


def checked(sample: Any, outcome: OutcomeKind) -> NDArray[Any]:
    """Turn one sample into an array: doubles for a number or a count, booleans for an event."""
    values = np.asarray(sample, dtype=np.float64)
    if values.ndim != 1:
        raise ValueError(f"a sample is a one-dimensional array; found {values.ndim} dimensions")
    if np.isnan(values).any():
        raise ValueError("a sample holds no missing value: rows without an outcome are left out, and counted, before")
    if outcome == "number":
        return values
    if outcome == "count":
        if not ((values >= 0) & (values == np.floor(values)) & (values <= 2**53)).all():
            raise ValueError("a count is a whole number from 0 on")
        return values
    if not np.isin(values, (0, 1)).all():
        raise ValueError("an event has happened or has not: each value is True or False")
    return values.astype(np.bool_)


def statistical_test(
    *,
    title: str,
    design: Design,
    outcome: OutcomeKind,
    scale: Scale,
    estimates: str,
    parameter: str,
    statistic: str,
    p_is: str,
    null: str,
    assumptions: tuple[str, ...],
    second_route: str,
    bound: float,
    reference: str,
    independent_units: bool = True,
    interval_inverts_p: bool = True,
    null_default: float | None = None,
    null_between: tuple[float, float] | None = None,
    only_default_null: bool = False,
) -> Callable[[Callable[P, Result]], StatisticalTest[P]]:
    """Enter a function in the catalogue of statistical tests with what it declares.

    The null value is by default 1 for a ratio and 0 otherwise.
    """
    usual = 1.0 if scale == "ratio" else 0.0

    def enter(compute: Callable[P, Result]) -> StatisticalTest[P]:
        return StatisticalTest(
            title=title, design=design, outcome=outcome, scale=scale, estimates=estimates, parameter=parameter,
            statistic=statistic, p_is=p_is, null=null, assumptions=assumptions, second_route=second_route,
            bound=bound, reference=reference, independent_units=independent_units,
            interval_inverts_p=interval_inverts_p, null_default=usual if null_default is None else null_default,
            null_between=null_between, only_default_null=only_default_null, compute=compute,
        )  # fmt: skip

    return enter


STATISTICAL_TESTS: Catalogue[StatisticalTest[Any]] = Catalogue(
    "beforehand.hypothesis_tests.entries", kind="statistical test"
)
