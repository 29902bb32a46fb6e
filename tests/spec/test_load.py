"""A large spec loads quickly, and a spec alone opens nothing."""

import copy
import json
import time
from collections.abc import Iterator
from functools import reduce
from pathlib import Path
from random import Random
from typing import Any

import pytest
import yaml

from beforehand.errors import SpecFault
from beforehand.spec.load import load_spec, read_spec

HERE = Path(__file__).parent


def large(count: int) -> bytes:
    lines = [
        "beforehand: 1",
        "study: {title: Many wells, identifier: MW-1, intent: exploratory}",
        "data:",
        "  - id: wells",
        "    file: wells.csv",
        "    identified_by: [sample]",
        "    columns:",
        "      sample: {kind: text}",
        "      side: {kind: category, levels: [up, down]}",
        *[f"      c{number}: {{kind: number, unit: mg/l}}" for number in range(100)],
        "promise: {criterion: false_discovery_rate, level: 0.1}",
        "families:",
        "  - id: constituents",
        "    question: Which constituents differ?",
        "    procedure: benjamini_hochberg",
        "    hypotheses:",
    ]
    for number in range(count):
        lines += [
            f"      - id: h{number}",
            "        test: welch_t",
            f"        outcome: c{number % 100}",
            "        groups: {column: side, first: down, second: up}",
            f"        where: c{number // 100} > {number}",
            "        alternative: two_sided",
            f"        claim: Constituent {number} differs",
        ]
    return "\n".join(lines).encode()


def test_a_thousand_hypotheses_load_quickly() -> None:
    source = large(1000)
    read_spec(large(1), Path("wells.yaml"))  # the libraries are imported once, by whoever comes first
    begun = time.process_time()
    spec = read_spec(source, Path("wells.yaml"))
    # 1.5 s is what a reader waits without wondering; about 0.5 s were measured on two shared cores.
    assert time.process_time() - begun < 1.5
    assert len(spec.hypotheses) == 1000


def paths(part: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    yield path
    for key in part if isinstance(part, dict) else range(len(part)) if isinstance(part, list) else ():
        yield from paths(part[key], (*path, key))


JUNK = [
    None, True, 0, -1, 0.5, 1e300, "", "x", "all", "growth", "1/3", "epsilon", [], {}, ["x"], {"x": 1}, [{"id": "x"}],
    {"at": 1}, {"first": "growth", "second": "before"}, "supplied_p", "paired_t", "growth > 1", "separate",
]  # fmt: skip


def changed(whole: Any, random: Random) -> str:
    """Delete, replace, add or move parts of a spec, and write it as JSON, which is YAML."""
    for _ in range(random.choice([1, 1, 2, 4])):
        *above, last = random.choice([path for path in paths(whole) if path] or [("x",)])
        parent = reduce(lambda part, key: part[key], above, whole)
        taken = reduce(lambda part, key: part[key], random.choice(list(paths(whole))), whole)
        instead = copy.deepcopy(random.choice([random.choice(JUNK), taken]))
        if isinstance(parent, list):
            parent.append(instead)
        elif random.random() < 0.3:
            parent.pop(last, None)
        else:
            parent[random.choice([last, last, "where", "outcome", "groups", "null_hypothesis", "zzz"])] = instead
    return json.dumps(whole)


@pytest.mark.parametrize("seed", range(30))
def test_any_change_of_a_spec_gives_a_spec_or_a_fault_with_a_place(seed: int) -> None:
    random = Random(seed)
    base = json.loads(
        json.dumps(yaml.safe_load((HERE / "faults" / "base.yaml").read_text(encoding="utf-8")), default=str)
    )
    refused: list[SpecFault] = []
    for _ in range(10):
        try:
            read_spec(changed(copy.deepcopy(base), random).encode(), Path("buoys.yaml"))
        except SpecFault as fault:
            refused.append(fault)
    assert refused
    for fault in refused:
        assert all(one.line for one in fault.faults) or "has no keys" in str(fault)


def test_loading_opens_no_data(tmp_path: Path) -> None:
    path = tmp_path / "buoys.yaml"
    path.write_bytes((HERE / "faults" / "base.yaml").read_bytes())
    spec = load_spec(path)
    assert spec.folder == tmp_path
    assert [data_set.file for data_set in spec.data] == ["data/buoys.csv"]
    assert sorted(tmp_path.iterdir()) == [path]


def test_what_a_spec_gives() -> None:
    spec = load_spec(HERE / "faults" / "base.yaml")
    assert spec.study.identifier == "HB-7"
    assert spec.promise.order == ("main", "further")
    assert spec.family("main").procedure == "holm"
    assert not spec.family("main").stands_apart
    assert spec.answers[0].warning == "one_of_many_times"
