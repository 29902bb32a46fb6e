"""Small studies with their evidence: a spec and a CSV file in a folder of their own, analysed."""

import csv
import textwrap
from collections.abc import Callable, Sequence
from pathlib import Path

import pytest

from beforehand.analysis.analyse import analyse, decisions
from beforehand.data.dataset import read_data, with_members
from beforehand.snooping.contract import Evidence
from beforehand.spec.load import load_spec

Column = Sequence[object]
SPEC = """
beforehand: 1
study: {{title: Greases for pump bearings, identifier: GR-2031-02, intent: exploratory}}
promise: {promise}
data:
  - id: bearings
    file: bearings.csv
    identified_by: [bearing]
    columns:
      bearing: {{kind: text}}
{columns}
{more}
families:
{families}
{answers}
"""
PROMISE = "{criterion: familywise_error_rate, level: 0.05}"
GREASE = "grease: {kind: category, levels: [plain, lithium, calcium, clay, polyurea]}"

Make = Callable[..., Evidence]


@pytest.fixture
def evidence(tmp_path: Path) -> Make:
    """Give the function that makes a study and analyses it; a bearing is a row, and its name is made."""

    def make(
        table: dict[str, Column],
        *,
        families: str,
        columns: str = f"{GREASE}\nwear: {{kind: number, unit: mg}}",
        more: str = "",
        promise: str = PROMISE,
        answers: str = "",
    ) -> Evidence:
        named = {"bearing": [f"b{i:03}" for i in range(len(next(iter(table.values()))))]} | table
        with (tmp_path / "bearings.csv").open("w", newline="") as file:
            writer = csv.writer(file)
            writer.writerow(named)
            writer.writerows(zip(*named.values(), strict=True))
        text = SPEC.format(
            promise=promise,
            columns=indented(columns, 6),
            more=indented(more, 4),
            families=indented(families, 2),
            answers=textwrap.dedent(answers),
        )
        (tmp_path / "spec.yaml").write_text(text)
        spec = load_spec(tmp_path / "spec.yaml")
        dataset = read_data(spec)
        record = analyse(spec, dataset)
        return Evidence(
            spec=with_members(spec, dataset),
            dataset=dataset,
            families=record.families,
            hypotheses=record.hypotheses,
            results=record.results,
            again=decisions,
        )

    return make


def indented(text: str, by: int) -> str:
    return textwrap.indent(textwrap.dedent(text).strip(), " " * by)
