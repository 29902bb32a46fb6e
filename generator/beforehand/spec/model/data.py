"""The keys of a data set: its file, its columns, what is derived, excluded and analysed."""

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from beforehand.spec.model.words import (
    PARTICULAR,
    Codes,
    Condition,
    FilePath,
    Formula,
    Id,
    Keys,
    Levels,
    Name,
    Names,
    Prose,
    Range,
    refused,
)  # fmt: skip
from beforehand.terms import ColumnKind, ColumnRole


class ColumnSpec(Keys):
    """One column of a file."""

    kind: ColumnKind
    """What its values are: number, count, category, text or date."""
    unit: Name | None = None
    """The unit of a number, as it is to be printed."""
    levels: Levels | None = None
    """The levels of a category, in the order in which they are printed and paired; another value stops the run."""
    between: Range | None = None
    """The lowest and the highest possible value; a value outside stops the run."""
    role: ColumnRole | None = None
    """What the column is to the study; only printed, and used by the warnings."""

    @model_validator(mode="after")
    def _fits_its_kind(self) -> Self:
        if self.levels and self.kind != "category":
            raise refused("has 'levels', which only a category has. Write kind: category.")
        if self.kind not in ("number", "count") and (self.between or self.unit):
            raise refused("has 'unit' or 'between', which only a number or a count has")
        return self


class Derived(Keys):
    """A column computed from the columns of the file and from derived columns written above it."""

    is_: Formula = Field(alias="is")
    """The expression that gives its value in each row."""
    unit: Name | None = None
    """The unit of the value, as it is to be printed."""
    levels: Levels | None = None
    """Makes a text a category with these levels, in this order."""
    role: ColumnRole | None = None
    """What the column is to the study; only printed, and used by the warnings."""


class Exclusion(Keys):
    """One reason for which rows are left out."""

    where: Condition
    """The rows to leave out: those where this is true, not those where it is missing."""
    because: Prose
    """Why they are left out."""
    known_at: Literal["before_allocation", "after_allocation"]
    """Whether the reason was known before the groups were allocated; afterwards costs a caution."""


class AnalysisSet(Keys):
    """Rows that are analysed together, under a name."""

    id: Id
    """The name by which hypotheses choose the set."""
    where: Condition
    """The rows that belong to the set: those where this is true."""
    principle: Literal["intention_to_treat", "per_protocol", "safety", "other"] | None = None
    """The principle that the set follows."""


class Allocated(Keys):
    """How the groups came about."""

    by: Name
    """The column that holds the group."""
    how: Literal["randomised", "observed", "matched"]
    """Whether chance, nature or matching decided the group."""
    strata: Names | None = None
    """The columns within which groups were allocated."""
    clusters: Name | None = None
    """The column of the units that were allocated as a whole."""
    pairs: Name | None = None
    """The column of the pairs or blocks within which groups were allocated."""
    blinded: Prose | None = None
    """Who did not know the group, in words."""


class Samples(Keys):
    """The sheet that describes the samples, when the rows of the data are features."""

    file: Annotated[FilePath, PARTICULAR]
    """The file of the sample sheet, relative to the spec."""
    identified_by: Names
    """The columns that name a sample; the data have a column of that name for each."""
    columns: dict[Name, ColumnSpec] = Field(min_length=1)
    """The columns of the sample sheet."""
    missing_codes: Codes = ("",)
    """The texts that stand for a missing value."""


class DataSet(Keys):
    """One data file, and what its rows and columns are."""

    id: Id
    """The name of the data set."""
    file: Annotated[FilePath, PARTICULAR]
    """The file, relative to the spec: .csv or .tsv, each also as .gz."""
    rows_are: Literal["observations", "features"] = "observations"
    """Whether a row is one observation, or one of many features measured on samples."""
    one_row_is: Prose | None = None
    """What one row stands for, in words."""
    identified_by: Names | None = None
    """The columns that together name a row; rows are sorted by them, and a repeated name stops the run."""
    independent_unit: Names | None = None
    """The columns that name the experimental unit; what identifies the row when not given."""
    allocated: Allocated | None = None
    """How the groups came about."""
    missing_codes: Codes = ("",)
    """The texts that stand for a missing value, in every column."""
    columns: dict[Name, ColumnSpec] = Field(default_factory=dict)
    """The columns of the file that the study uses."""
    derive: dict[Name, Derived] = Field(default_factory=dict)
    """Columns computed from them, after the exclusions."""
    exclude: tuple[Exclusion, ...] = ()
    """Rows to leave out, in this order, before any column is derived."""
    analysis_sets: tuple[AnalysisSet, ...] = ()
    """The sets of rows that hypotheses may be about."""
    feature: Name | None = None
    """The column that names the feature, when rows are features."""
    samples: Samples | None = None
    """The sample sheet, when rows are features."""
    made_by_script: Annotated[FilePath | None, PARTICULAR] = None
    """The script that made the file; its checksum is printed, it is never run."""
    print_row_values: Annotated[bool, PARTICULAR] = False
    """Whether the report may show the values and names of single rows."""

    @model_validator(mode="after")
    def _fits_its_rows(self) -> Self:
        if self.rows_are == "observations" and not self.columns:
            raise refused("needs 'columns': the columns of the file that the study uses, each with its kind")
        if self.rows_are == "observations" and (self.feature or self.samples):
            raise refused("has 'feature' or 'samples', which need rows_are: features")
        if self.rows_are == "features" and not (self.feature and self.samples):
            raise refused("needs 'feature' and 'samples', because its rows are features")
        return self

    @property
    def unit_columns(self) -> tuple[str, ...]:
        """The columns that name the independent unit; empty where a row is one."""
        return self.independent_unit or self.identified_by or ()
