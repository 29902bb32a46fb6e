"""Words of supportive analyses and descriptions, drawn from a whole small study."""

from dataclasses import replace

import pytest
from supportive_study import write

import beforehand
from beforehand.record.model import DescribedGroup, Record
from beforehand.report.html import page
from beforehand.report.view import view
from beforehand.report.view.checklist import NOT_STATED
from beforehand.report.view.model import Table
from beforehand.report.view.supportive import agreement, supports_of
from beforehand.spelling import NO_BREAK, THIN, p_value


@pytest.fixture(scope="module")
def record(tmp_path_factory: pytest.TempPathFactory) -> Record:
    return beforehand.run(write(tmp_path_factory.mktemp("screed"))).record


def texts(table: Table) -> list[list[str]]:
    return [[row.head.text, *(cell.text for cell in row.cells)] for row in table.rows]


def test_each_stands_below_its_hypothesis(record: Record) -> None:
    first, second = (family.supportive for family in view(record, ()).results.families)
    assert [row[0] for row in texts(first)] == [
        "fibre − plain", "uncracked/fibre-plain", "by_ranks", "foam − plain", "uncracked/foam-plain",
    ]  # fmt: skip
    assert [row[0] for row in texts(second)] == ["shrinkage: fibre − plain", "shrinks_less"]
    assert [row.style for row in first.rows] == ["", "part", "part", "", "part"]
    assert first.caption == "Supportive analyses, family strength"


def test_the_count_that_agrees_stands_beside_the_hypothesis(record: Record) -> None:
    table = view(record, ()).results.families[0].supportive
    end = "with it in direction and in the side of the threshold"
    assert table.rows[0].head.note == f"2 of 2 supportive analyses agree {end}"
    assert table.rows[3].head.note == f"1 of 1 supportive analysis agrees {end}"


def test_only_what_agrees_in_both_is_counted(record: Record) -> None:
    fibre = supports_of(record)["strength/fibre-plain"]
    changed = tuple(
        replace(one, record=replace(one.record, **difference))
        for one, difference in zip(fibre, ({"same_direction": False}, {"same_side": False}), strict=True)
    )
    assert agreement(changed).startswith("0 of 2 supportive analyses agree with")
    assert agreement((fibre[0], changed[1])).startswith("1 of 2 supportive analyses agrees with")
    none = replace(fibre[0], record=replace(fibre[0].record, same_direction=None, same_side=None))
    assert agreement((none,)).startswith("0 of 1 supportive analysis agree with")


def test_kind_reason_and_change_are_said(record: Record) -> None:
    table = view(record, ()).results.families[0].supportive
    assert table.rows[1].head.note == (
        "Subgroup: a crack weakens a slab by itself. Rows: cracked == 'no' instead of all."
    )
    assert table.rows[2].head.note == (
        "Sensitivity: two slabs stand far from the others. Test: Mann-Whitney test instead of Welch's t-test. "
        "Estimated: shift in location, MPa."
    )


def test_the_p_is_unadjusted_and_said_as_the_level_reads_it(record: Record) -> None:
    row = view(record, ()).results.families[0].supportive.rows[1]
    p = record.results.p[record.results.id.index("uncracked/fibre-plain")]
    assert row.cells[4].text == p_value(p)
    assert row.cells[4].note == f"doubled {p_value(2 * p)}"
    assert [cell.text for cell in row.cells[5:]] == ["same", "same"]


def test_no_p_is_written_on_the_wrong_side_of_the_level(record: Record) -> None:
    """0.02500001 doubled is above 5 %: three decimals would hide it."""
    (one,) = supports_of(record)["shrinkage_fibre"]
    at = record.results.id.index("shrinks_less")
    p = record.results.p.copy()
    p[at] = 0.02500001
    record = replace(
        record,
        results=replace(record.results, p=p),
        supportive=(*record.supportive[:3], replace(one.record, p_read=0.05000002, same_side=False)),
    )
    cell = view(record, ()).results.families[1].supportive.rows[1].cells[4]
    assert (cell.text, cell.note) == ("0.02500001", "doubled 0.05000002")


def test_what_it_is_and_what_is_compared_are_explained(record: Record) -> None:
    notes = " ".join(view(record, ()).results.families[0].supportive.notes).replace(THIN, " ")
    assert "is not counted in m, opens no gate and decides nothing" in notes
    assert "the same side of the level, 5 % two-sided = 2.5 % one-sided; nothing is adjusted for this" in notes


def test_none_of_them_is_told_as_a_finding(record: Record) -> None:
    found = view(record, ())
    told = [finding.id for family in found.results.families for finding in family.findings]
    assert told == [hypothesis.id for hypothesis in record.hypotheses]
    assert "described" not in " ".join(cell.text for row in found.front.families.rows for cell in row.cells)
    assert len(found.firmness.tables[0].rows) == len(record.hypotheses)


def test_the_appendix_lists_them_apart(record: Record) -> None:
    for medium in ("screen", "print"):
        section = view(record, ()).appendix[medium]
        tests, supportive = section.chunks
        assert (tests.caption, supportive.caption) == ("Tests", "Supportive analyses")
        assert (len(tests.rows), len(supportive.rows)) == (4, 4)
        assert section.sentences[0].startswith("All 4 hypotheses.")
        assert section.sentences[1] == (
            "Supportive analyses decide nothing and are not counted here; they stand in a table of their own."
        )
        cells = dict(zip([head.text for head in supportive.head[0]], texts(supportive)[0], strict=True))
        assert cells["Decision"] == "described only"
        assert {cells[name] for name in ("Enters with", "Rank", "Factor", "Adjusted p, family", "Threshold")} == {"–"}
    short = view(replace(record, appendix_rows=3), ()).appendix["print"]
    assert "3 of the 4 stand in a table of their own" in short.sentences[1]


def test_a_study_without_them_says_nothing_of_them(record: Record) -> None:
    names = len(record.hypotheses)
    bare = replace(record, supportive=(), descriptions=())
    bare = replace(bare, results=replace(bare.results, **{
        name: getattr(bare.results, name)[:names] for name in bare.results.__dataclass_fields__
    }))  # fmt: skip
    found = view(bare, ())
    assert "Supportive" not in page(found, ()).decode()
    assert all(not family.supportive.rows for family in found.results.families)
    assert len(found.appendix["screen"].sentences) == 1


def test_the_checklist_names_the_section(record: Record) -> None:
    def where(found: Record) -> str:
        rows = view(found, ()).checklist.tables[0].rows
        return next(row.cells[1].text for row in rows if row.head.text == "Sensitivity and subgroup analyses")

    assert where(record) == "section 5"
    assert where(replace(record, supportive=())) == NOT_STATED


def description(record: Record) -> Table:
    ((table,),) = [data.described for data in view(record, ()).analysed.data]
    return table


def test_a_description_has_a_column_for_each_group_and_no_p(record: Record) -> None:
    table = description(record)
    assert table.caption == "Description slabs_made: all rows analysed, by mix"
    assert [head.text for head in table.head[0]] == ["Column", "All", "plain", "fibre", "foam"]
    found = texts(table)
    assert found[0] == ["Rows", "47", "15", "16", "16"]
    assert [row[0] for row in found[1:8]] == [
        "strength, MPa", "missing", "mean", "SD", "lower quartile", "median", "upper quartile",
    ]  # fmt: skip
    assert found[1][1:] == ["46", "15", "15", "16"]
    assert found[2][1:] == ["1", "0", "1", "0"]
    mean = record.descriptions[0].columns[0].groups[1].mean
    assert found[3][2] == f"{mean:.2f}"  # the spread is about 2 MPa, of which three digits are shown
    words = " ".join(cell for row in found for cell in row)
    assert " p " not in f" {words} "


def test_categories_have_counts_and_shares(record: Record) -> None:
    rows = {row[0]: row for row in texts(description(record))}
    yes, of_all = record.descriptions[0].columns[2].groups[0].counts[0], 47
    assert rows["yes"][1] == f"{yes}{NO_BREAK}({100 * yes / of_all:.1f}{THIN}%)"


def test_many_groups_continue_below(record: Record) -> None:
    one = record.descriptions[0]
    groups = ("", *(f"lot {number}" for number in range(8)))
    columns = tuple(replace(column, groups=(column.groups[0],) * 9) for column in one.columns)
    wide = replace(one, groups=groups, rows=(5,) * 9, columns=columns)
    ((first, second),) = [data.described for data in view(replace(record, descriptions=(wide,)), ()).analysed.data]
    assert [head.text for head in first.head[0][1:]] == ["All", *(f"lot {number}" for number in range(5))]
    assert [head.text for head in second.head[0][1:]] == [f"lot {number}" for number in range(5, 8)]
    assert second.caption.startswith("Description slabs_made, continued")


def test_what_is_held_back_is_said(record: Record) -> None:
    one = record.descriptions[0]
    few = (DescribedGroup(n=3, missing=0),) * len(one.groups)
    held = replace(one, columns=(replace(one.columns[0], groups=few),), undecided=2, where="strength > 60")
    (table,) = view(replace(record, descriptions=(held,)), ()).analysed.data[0].described
    assert texts(table)[3] == ["mean", "–", "–", "–", "–"]
    assert table.caption == "Description slabs_made: all rows analysed, where strength > 60, by mix"
    assert table.notes == (
        "2 rows are left out because the condition met a missing value.",
        "Numbers are summarised from 6 values on: the spec lets no row value be printed, and five figures of fewer "
        "values could give every one of them back.",
    )
