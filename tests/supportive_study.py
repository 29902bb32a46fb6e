"""The small study of the floor screeds with what stands beside its hypotheses: supportive analyses and a table."""

from pathlib import Path

from small_study import SPEC, rows, write_study

SECTIONS = """\
supportive:
  - id: uncracked
    of: strength
    change: {where: "cracked == 'no'"}
    because: a crack weakens a slab by itself
    analysis: subgroup
  - id: by_ranks
    of: strength/fibre-plain
    change: {test: mann_whitney}
    because: two slabs stand far from the others
    analysis: sensitivity
  - id: shrinks_less
    of: shrinkage_fibre
    change: {alternative: below}
    because: nobody expects more shrinkage
    analysis: supplementary
describe:
  - {id: slabs_made, columns: [strength, shrinkage, cracked], by: mix}
"""


def write(folder: Path, *, sections: str = SECTIONS, spec: str = SPEC, lines: list[str] | None = None) -> Path:
    """Write spec and data into a folder, and give the spec's path."""
    return write_study(folder, spec=spec + sections, lines=lines)


def values(column: str, mix: str, *, uncracked: bool = False) -> list[float]:
    """Read one column of the data file by hand: without the slab that broke, and without missing values."""
    head, *body = [row.split(",") for row in rows()]
    found = [dict(zip(head, cells, strict=True)) for cells in body]
    kept = [row for row in found if not (row["strength"] and float(row["strength"]) < 5) and row["mix"] == mix]
    return [float(row[column]) for row in kept if row[column] and not (uncracked and row["cracked"] == "yes")]
