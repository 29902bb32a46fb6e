"""A study of our own whose rows hold more than an outcome: two makes of filter on the lines of a bottling plant."""

from pathlib import Path

HEAD = """\
beforehand: 1
study:
  title: Mesh against felt filters on a bottling line
  identifier: BF-2033-04
  intent: exploratory
data:
  - id: filters
    file: filters.csv
    one_row_is: one filter from fitting to the end of watching
    identified_by: [filter]
    allocated: {by: make, how: randomised, strata: [line]}
    columns:
      filter: {kind: text}
      make: {kind: category, levels: [felt, mesh], role: group}
      line: {kind: category, levels: [north, south, east], role: stratum}
      water: {kind: category, levels: [spring, river], role: covariate}
      leaks: {kind: count}
      hours: {kind: number, unit: hours, role: exposure}
      before: {kind: number, unit: l/min, role: baseline}
      flow: {kind: number, unit: l/min}
      stained: {kind: category, levels: ["yes", "no"]}
      days: {kind: number, unit: days, role: time}
      state: {kind: category, levels: [burst, running], role: event}
promise: {criterion: familywise_error_rate, level: 0.05, level_is: two_sided}
families:
  - id: main
    question: Do mesh filters do better than felt ones?
    procedure: holm
    hypotheses:
"""
GROUPS = "groups: {column: make, first: mesh, second: felt}"
LINES = ("north", "south", "east")


def rows() -> list[str]:
    """Give the lines of the data file; the scatter is a fixed sawtooth, not chance."""
    lines = ["filter,make,line,water,leaks,hours,before,flow,stained,days,state"]
    for number in range(60):
        mesh, wobble = number % 2, number * 17 % 23 - 11
        line, water = LINES[number % 3], "river" if number * 7 % 10 < 4 else "spring"
        leaks = max(0, (number * 11 % 7) - 2 - mesh)
        hours = 90 + number * 13 % 40 + 20 * mesh
        before = 30 + wobble * 0.3 + number % 5
        flow = before * 0.8 + 3.5 * mesh + (number * 29 % 13 - 6) * 0.4 - (2 if water == "river" else 0)
        stained = "yes" if number * 3 % 8 < (2 if mesh else 4) else "no"
        days = 40 + number * 37 % 90 + 25 * mesh
        state = "burst" if number * 5 % 9 < 6 else "running"
        lines.append(
            f"F{number:02d},{'mesh' if mesh else 'felt'},{line},{water},{leaks},{hours},{before:.1f},{flow:.2f},"
            f"{stained},{days},{state}"
        )
    return lines


def write_filters(folder: Path, hypotheses: str, *, lines: list[str] | None = None, head: str = HEAD) -> Path:
    """Write spec and data into a folder, and give the spec's path."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "filters.csv").write_text("\n".join(lines or rows()) + "\n", "utf-8")
    path = folder / "filters.yaml"
    path.write_text(head + "".join(f"      {line}\n" for line in hypotheses.strip().splitlines()), "utf-8")
    return path


def with_missing(*cells: tuple[int, str]) -> list[str]:
    """Give the lines with these cells empty: the number of the filter, and the column."""
    lines = rows()
    names = lines[0].split(",")
    for number, name in cells:
        values = lines[number + 1].split(",")
        values[names.index(name)] = ""
        lines[number + 1] = ",".join(values)
    return lines


def column(name: str, make: str, *, lines: list[str] | None = None) -> list[str]:
    """Read one column of one make by hand, as it is written."""
    head, *body = lines or rows()
    at = head.split(",").index(name)
    return [cells[at] for cells in (row.split(",") for row in body) if cells[1] == make]
