"""Descriptions of a whole small study: numbers by numpy's and scipy's own summaries, and what is held back."""

from pathlib import Path

import numpy as np
import pytest
from scipy import stats
from small_study import SPEC, rows
from supportive_study import values, write

import beforehand
from beforehand.record.model import DescribedColumn, DescriptionRecord

MORE_COLUMNS = "poured: {kind: date}\n      bubbles: {kind: count}\n      cracked: {kind"
DERIVED = """\
    derive:
      strong: {is: "pick(strength > 33, 'yes', 'no')", levels: ["yes", "no"]}
    analysis_sets:
      - {id: whole, where: "cracked == 'no'"}
    exclude:"""
WITH_MORE = SPEC.replace("cracked: {kind", MORE_COLUMNS).replace("    exclude:", DERIVED)


def lines_with_more() -> list[str]:
    """Add the day of pouring and a count of bubbles, both by the number of the slab."""
    head, *body = rows()
    more = [f"{row},2032-01-{1 + number % 28:02d},{number % 4}" for number, row in enumerate(body)]
    return [f"{head},poured,bubbles", *more]


def described(folder: Path, asked: str, *, spec: str = WITH_MORE) -> DescriptionRecord:
    path = write(folder, sections=f"describe:\n  - {asked}\n", spec=spec, lines=lines_with_more())
    (one,) = beforehand.run(path).record.descriptions
    return one


def column(one: DescriptionRecord, name: str) -> DescribedColumn:
    return next(found for found in one.columns if found.column == name)


def test_numbers_are_those_of_numpy_and_scipy(tmp_path: Path) -> None:
    one = described(tmp_path, "{id: made, columns: [strength], by: mix}")
    assert one.groups == ("", "plain", "fibre", "foam")
    assert one.rows == (47, 15, 16, 16)  # the broken slab is excluded
    for mix, found in zip(one.groups[1:], column(one, "strength").groups[1:], strict=True):
        expected = values("strength", mix)
        assert (found.n, found.missing) == (len(expected), 1 if mix == "fibre" else 0)
        assert found.mean == pytest.approx(stats.tmean(expected), rel=1e-12)
        assert found.sd == pytest.approx(stats.tstd(expected), rel=1e-12)
        quartiles = np.percentile(expected, [25, 50, 75])
        assert (found.lower_quartile, found.median, found.upper_quartile) == pytest.approx(tuple(quartiles), rel=1e-12)
    whole = [value for mix in ("plain", "fibre", "foam") for value in values("strength", mix)]
    assert column(one, "strength").groups[0].mean == pytest.approx(stats.tmean(whole), rel=1e-12)
    assert column(one, "strength").unit == "MPa"


def test_categories_are_counted_in_the_order_of_their_levels(tmp_path: Path) -> None:
    one = described(tmp_path, "{id: made, columns: [cracked, strong], by: mix}")
    found = column(one, "cracked")
    assert (found.kind, found.levels) == ("category", ("yes", "no"))
    body = [row.split(",") for row in rows()[1:] if ",2.0," not in row]
    for mix, group in zip(one.groups[1:], found.groups[1:], strict=True):
        marks = [cells[4] for cells in body if cells[1] == mix]
        assert group.counts == (marks.count("yes"), marks.count("no"))
    strong = column(one, "strong").groups[2]
    assert (strong.n, strong.missing) == (15, 1)  # derived from a missing strength
    assert strong.counts[0] == sum(value > 33 for value in values("strength", "fibre"))


def test_counts_have_a_total(tmp_path: Path) -> None:
    found = column(described(tmp_path, "{id: made, columns: [bubbles]}"), "bubbles")
    assert found.kind == "count"
    # slab 6 is excluded: bubbles are the number of the slab modulo 4
    assert found.groups[0].total == sum(number % 4 for number in range(48)) - 6 % 4


def test_without_groups_all_rows_stand_together(tmp_path: Path) -> None:
    one = described(tmp_path, "{id: made, columns: [strength]}")
    assert (one.groups, one.rows, one.by) == (("",), (47,), "")


def test_sets_and_conditions_choose_the_rows(tmp_path: Path) -> None:
    one = described(tmp_path, "{id: made, columns: [shrinkage], where: strength > 33, analysis_set: whole, by: mix}")
    head = [row.split(",") for row in rows()[1:]]
    kept = [cells for cells in head if cells[4] == "no" and cells[2] and float(cells[2]) > 33]
    assert one.rows[0] == len(kept)
    assert one.undecided == 1  # the slab whose strength is missing
    assert (one.analysis_set, one.where) == ("whole", "strength > 33")


def test_a_date_has_a_range_only_where_row_values_may_be_printed(tmp_path: Path) -> None:
    asked = "{id: made, columns: [poured]}"
    (held,) = column(described(tmp_path / "a", asked), "poured").groups
    assert (held.n, held.earliest, held.latest) == (47, "", "")
    allowed = WITH_MORE.replace("    identified_by:", "    print_row_values: true\n    identified_by:")
    (shown,) = column(described(tmp_path / "b", asked, spec=allowed), "poured").groups
    assert (shown.earliest, shown.latest) == ("2032-01-01", "2032-01-28")


@pytest.mark.parametrize(("slabs", "shown"), [(5, False), (6, True)])
def test_few_values_are_held_back(tmp_path: Path, slabs: int, shown: bool) -> None:
    """Five figures of five values could give each of them back."""
    names = ", ".join(f"'S{number:02d}'" for number in range(20, 20 + slabs))
    asked = f'{{id: made, columns: [strength, cracked], where: "slab in [{names}]"}}'
    one = described(tmp_path / "a", asked)
    (found,) = column(one, "strength").groups
    assert (found.n, found.mean is not None, found.median is not None) == (slabs, shown, shown)
    assert sum(column(one, "cracked").groups[0].counts) == slabs
    allowed = WITH_MORE.replace("    identified_by:", "    print_row_values: true\n    identified_by:")
    (free,) = column(described(tmp_path / "b", asked, spec=allowed), "strength").groups
    assert free.mean is not None


def test_rows_without_a_group_stand_last(tmp_path: Path) -> None:
    lines = lines_with_more()
    lines[3] = lines[3].replace(",foam,", ",,")
    path = write(tmp_path, sections="describe:\n  - {id: made, columns: [strength], by: mix}\n", spec=WITH_MORE,
                 lines=lines)  # fmt: skip
    (one,) = beforehand.run(path).record.descriptions
    assert one.groups == ("", "plain", "fibre", "foam", "(no group)")
    assert one.rows == (47, 15, 16, 15, 1)


def test_a_description_holds_no_p() -> None:
    names = {name for kind in (DescriptionRecord, DescribedColumn) for name in kind.__dataclass_fields__}
    assert not names & {"p", "p_value", "statistic", "estimate", "test"}
