"""The data of the example studies are what their scripts make, and are what the stories say."""

import csv
import importlib.util
from collections import Counter
from pathlib import Path
from types import ModuleType

import pytest

from beforehand.data.dataset import read_data
from beforehand.spec.load import load_spec

SPECS = Path(__file__).parents[2] / "specs"


def script(study: str) -> ModuleType:
    found = importlib.util.spec_from_file_location(f"make_data_of_{study}", SPECS / study / "make_data.py")
    assert found is not None
    assert found.loader is not None
    module = importlib.util.module_from_spec(found)
    found.loader.exec_module(module)
    return module


def rows(study: str, name: str) -> list[dict[str, str]]:
    with (SPECS / study / "data" / f"{name}.csv").open(newline="", encoding="utf-8") as file:
        return list(csv.DictReader(file))


@pytest.mark.parametrize(
    ("study", "name"), [("cold_store", "stores"), ("windscreens", "runs"), ("windscreens", "calibrations")]
)
def test_the_data_are_what_the_script_makes(study: str, name: str) -> None:
    made = getattr(script(study), name)()
    assert made == (SPECS / study / "data" / f"{name}.csv").read_bytes().decode()


def test_every_closure_is_fitted_equally_often_in_each_region() -> None:
    cells = Counter((row["region"], row["closure"]) for row in rows("cold_store", "stores"))
    made = script("cold_store")
    assert cells == {(region, closure): made.PER_CELL for region in made.REGIONS for closure in made.CLOSURES}


def test_every_run_has_one_row_for_each_windscreen_in_the_same_wind() -> None:
    found = rows("windscreens", "runs")
    made = script("windscreens")
    assert Counter((row["run"], row["windscreen"]) for row in found) == {
        (f"R{run:02d}", screen): 1 for run in range(1, made.RUNS + 1) for screen in made.SCREENS
    }
    assert len({(row["run"], row["wind"]) for row in found}) == made.RUNS


def test_the_stores_fitted_late_are_the_rows_that_the_spec_excludes() -> None:
    spec = load_spec(SPECS / "cold_store" / "spec.yaml")
    flow = read_data(spec).tables["stores"].flow
    late = {closure: len(places) for closure, places in script("cold_store").LATE.items()}
    (excluded,) = flow.exclusions
    assert flow.received.rows == len(rows("cold_store", "stores"))
    assert {closure: rows for closure, rows in excluded.counts.by_group.items() if rows} == late


def test_the_windy_runs_are_excluded_in_pairs() -> None:
    spec = load_spec(SPECS / "windscreens" / "spec.yaml")
    flow = read_data(spec).tables["runs"].flow
    windy = Counter(row["windscreen"] for row in rows("windscreens", "runs") if float(row["wind"]) > 5)
    (excluded,) = flow.exclusions
    assert excluded.counts.by_group == windy
    assert windy["foam"] == windy["weatherproof"] > 0
