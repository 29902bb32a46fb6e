"""Which hypotheses can rest on a pair that was picked: not those whose test takes more of a row than its outcome."""

from pathlib import Path

from beforehand.data.dataset import read_data
from beforehand.snooping.pairs import chosen_pairs
from beforehand.spec.load import load_spec

SPEC = """\
beforehand: 1
study: {title: Four oils in chain saws, identifier: OS-1, intent: exploratory}
data:
  - id: saws
    file: saws.csv
    identified_by: [saw]
    columns:
      saw: {kind: text}
      oil: {kind: category, levels: [a, b, c, d]}
      stops: {kind: count}
      hours: {kind: number}
promise: {criterion: false_discovery_rate, level: 0.10, level_is: two_sided}
families:
  - id: stops
    question: Do saws with oil a stop more often than those with oil d?
    procedure: benjamini_hochberg
    hypotheses:
      - id: oftener
        test: TEST
        outcome: stops
        groups: {column: oil, first: a, second: d}
        alternative: above
"""


def choices(folder: Path, test: str) -> int:
    rows = [f"{n},{'abcd'[n % 4]},{9 - 2 * (n % 4) + n % 3},{10 + n}" for n in range(24)]
    (folder / "saws.csv").write_text("\n".join(["saw,oil,stops,hours", *rows]) + "\n", "utf-8")
    (folder / "saws.yaml").write_text(SPEC.replace("TEST", test), "utf-8")
    spec = load_spec(folder / "saws.yaml")
    return len(list(chosen_pairs(spec, spec.families[0], read_data(spec))))


def test_outcomes_alone_tell_how_far_apart_groups_lie(tmp_path: Path) -> None:
    assert choices(tmp_path, "welch_t") == 1


def test_counts_without_their_exposure_do_not(tmp_path: Path) -> None:
    assert choices(tmp_path, "rate_ratio\n        exposure: hours") == 0
