"""From the files of a spec to its data: what is checksummed, in which order rows stand, what is kept out."""

import dataclasses
import gzip
import hashlib
from typing import Any

import numpy as np
import pandas as pd
import pytest

from beforehand.data.dataset import read_data
from beforehand.errors import DataFault

DATA = """
- id: stores
  file: data/stores.csv
  identified_by: [store]
  missing_codes: ["", "NA"]
  columns:
    store: {kind: text}
    closure: {kind: category, levels: [standard, brush]}
    fitted: {kind: date}
    energy: {kind: number}
    alarms: {kind: count}
"""
ENERGY = """
- id: energy
  test: mann_whitney
  outcome: energy
  groups: {column: closure, first: brush, second: standard}
  alternative: two_sided
"""
CSV = """
store,closure,fitted,energy,alarms,remark
10,standard,2031-01-02,120.50,3,
9,brush,2031-01-03,NA,0,"said ""no"", twice"
007,brush,NA,1e2,12,NA
"""


def test_an_input_is_described_by_what_anybody_can_check(study: Any) -> None:
    study.write("data/stores.csv", CSV)
    _, dataset = study.read(DATA, ENERGY)
    raw = (study.folder / "data" / "stores.csv").read_bytes()
    (file,) = dataset.inputs
    assert (file.id, file.file, file.bytes) == ("stores", "data/stores.csv", len(raw))
    assert file.sha256 == hashlib.sha256(raw).hexdigest()
    assert (file.rows, file.columns, file.extra_columns) == (3, 6, ("remark",))


def test_the_content_checksum_by_hand(study: Any) -> None:
    # The rows by store as text: 007, 10, 9. Numbers in their shortest form, undeclared columns as text, codes null.
    lines = (
        '{"alarms":12,"closure":"brush","energy":100,"fitted":null,"remark":null,"store":"007"}\n'
        '{"alarms":3,"closure":"standard","energy":120.5,"fitted":"2031-01-02","remark":null,"store":"10"}\n'
        '{"alarms":0,"closure":"brush","energy":null,"fitted":"2031-01-03",'
        '"remark":"said \\"no\\", twice","store":"9"}\n'
    )
    study.write("data/stores.csv", CSV)
    _, dataset = study.read(DATA, ENERGY)
    (file,) = dataset.inputs
    assert file.content_sha256 == hashlib.sha256(lines.encode()).hexdigest()
    assert list(file.column_sha256) == ["alarms", "closure", "energy", "fitted", "remark", "store"]
    assert file.column_sha256["energy"] == hashlib.sha256(b"[100,120.5,null]").hexdigest()


REVERSED = """
remark	alarms	energy	fitted	closure	store
	12	100.000		"brush"	007
NA	3	1.205e2	2031-01-02	standard	10
said "no", twice	0	NA	2031-01-03	brush	9
""".replace('said "no", twice', '"said ""no"", twice"')


@pytest.mark.parametrize("packed", [False, True])
def test_the_content_checksum_does_not_depend_on_format_spelling_or_order(study: Any, packed: bool) -> None:
    study.write("data/stores.csv", CSV)
    _, one = study.read(DATA, ENERGY)
    other_text = REVERSED.lstrip().replace("\n", "\r\n").encode("utf-8-sig")
    study.write(
        "data/stores.tsv.gz" if packed else "data/stores.tsv", gzip.compress(other_text) if packed else other_text
    )
    _, other = study.read(DATA.replace(".csv", ".tsv.gz" if packed else ".tsv"), ENERGY)
    assert one.inputs[0].sha256 != other.inputs[0].sha256
    assert one.inputs[0].content_sha256 == other.inputs[0].content_sha256
    assert one.inputs[0].column_sha256 == other.inputs[0].column_sha256
    pd.testing.assert_frame_equal(one.tables["stores"].frame, other.tables["stores"].frame)


def test_without_what_identifies_rows_their_order_counts(study: Any) -> None:
    plain = DATA.replace("  identified_by: [store]\n", "")
    study.write("data/stores.csv", CSV)
    _, one = study.read(plain, ENERGY)
    head, *rows = CSV.strip().splitlines()
    study.write("data/stores.csv", "\n".join([head, *rows[::-1]]) + "\n")
    _, other = study.read(plain, ENERGY)
    assert one.tables["stores"].lines.tolist() == [2, 3, 4]
    assert one.inputs[0].content_sha256 != other.inputs[0].content_sha256


def test_the_frame_holds_typed_columns_in_the_order_of_their_key(study: Any) -> None:
    study.write("data/stores.csv", CSV)
    _, dataset = study.read(DATA, ENERGY)
    table = dataset.tables["stores"]
    expected = pd.DataFrame(
        {
            "store": pd.Series(["007", "10", "9"], dtype="str"),
            "closure": pd.Series(["brush", "standard", "brush"], dtype="str"),
            "fitted": pd.Series([None, "2031-01-02", "2031-01-03"], dtype="str"),
            "energy": [100.0, 120.5, np.nan],
            "alarms": [12.0, 3.0, 0.0],
        }
    )
    pd.testing.assert_frame_equal(table.frame, expected)
    assert table.lines.tolist() == [4, 2, 3]


def test_a_key_of_numbers_sorts_by_size(study: Any) -> None:
    study.write("data/stores.csv", CSV)
    _, dataset = study.read(DATA.replace("store: {kind: text}", "store: {kind: count}"), ENERGY)
    assert dataset.tables["stores"].frame["store"].tolist() == [7.0, 9.0, 10.0]


def test_exactly_the_declared_codes_are_missing(study: Any) -> None:
    study.write(
        "data/stores.csv",
        "store,closure,fitted,energy,alarms\nNA,brush,2031-01-02,-99,0\n-99.0,brush,2031-01-02,-99.0,\n",
    )
    data = DATA.replace('["", "NA"]', '["", "-99"]')
    _, dataset = study.read(data, ENERGY)
    frame = dataset.tables["stores"].frame
    assert frame["store"].tolist() == ["-99.0", "NA"]  # "NA" is a name here
    assert frame["energy"].tolist()[0] == -99.0  # not the text that was declared
    assert np.isnan(frame["energy"].tolist()[1])
    assert np.isnan(frame["alarms"].tolist()[0])


def test_the_script_that_made_a_file_is_a_checksummed_input(study: Any) -> None:
    study.write("data/stores.csv", CSV)
    study.write("join.R", "stores <- 1\n")
    _, dataset = study.read(DATA + "  made_by_script: join.R\n", ENERGY)
    script = dataset.inputs[1]
    assert (script.id, script.file, script.bytes, script.rows) == ("stores", "join.R", 12, 0)
    assert script.sha256 == hashlib.sha256(b"stores <- 1\n").hexdigest()
    assert script.content_sha256 == ""


def test_a_script_that_is_not_there_stops_the_run(study: Any) -> None:
    study.write("data/stores.csv", CSV)
    with pytest.raises(DataFault, match=r"join\.R: there is no such file"):
        study.read(DATA + "  made_by_script: join.R\n", ENERGY)


def test_data_may_lie_under_a_data_root(study: Any, tmp_path_factory: pytest.TempPathFactory) -> None:
    elsewhere = tmp_path_factory.mktemp("elsewhere")
    (elsewhere / "data").mkdir()
    (elsewhere / "data" / "stores.csv").write_text(CSV.lstrip())
    spec = study.spec(DATA, ENERGY)
    with pytest.raises(DataFault, match="there is no such file"):
        read_data(spec)
    file = read_data(spec, data_root=elsewhere).inputs[0]
    assert file.file == "data/stores.csv"


def test_several_data_sets_are_read_in_the_order_of_the_spec(study: Any) -> None:
    study.write("data/stores.csv", CSV)
    study.write("data/later.csv", CSV)
    both = DATA + DATA.replace("id: stores", "id: later").replace("stores.csv", "later.csv")
    spec, dataset = study.read(both, ENERGY + "  data: later\n")
    assert list(dataset.tables) == ["stores", "later"]
    assert [file.id for file in dataset.inputs] == ["stores", "later"]
    assert spec.hypotheses[0].data == "later"


def test_a_table_can_not_be_changed_by_accident(study: Any) -> None:
    study.write("data/stores.csv", CSV)
    _, dataset = study.read(DATA, ENERGY)
    with pytest.raises(dataclasses.FrozenInstanceError):
        dataset.tables["stores"].lines = np.array([1])
