"""Recompute the adjusted p-values and decisions of a run folder, with nothing but Python 3.8 or later.

    python3 recheck.py            the folder in which this file lies
    python3 recheck.py FOLDER     another run folder with the same procedures

It reads record.json, tests.csv and manifest-sha256.txt, and writes nothing. It names each difference by hypothesis
and column, and ends with 0 when everything agrees, 1 when anything differs, 2 when the folder can't be read.
"""

from __future__ import annotations

import csv
import hashlib
import io
import json
import math  # noqa: F401 -- for the replays
import sys
from pathlib import Path
from typing import Any, Callable, Iterator  # noqa: UP035 -- read by Python 3.8 too

AGREE = 1e-9  # two numbers agree when they differ by no more than this, relative to the larger
FLOOR = 1e-300  # below this size a p-value has no digits to compare
FILES = ("record.json", "tests.csv", "manifest-sha256.txt")
RECOMPUTED = ("p_family", "p_study", "threshold", "decides", "state")
READ = ("id", "family", "p", "p_entered", "entered_as", "side_agrees", "rank", "factor", "product", "from_rank")

PROCEDURES: dict[str, Callable[..., Any]] = {}
SCHEMES: dict[str, Callable[..., Any]] = {}
TAKEN: dict[str, str] = {}  # what a procedure or scheme takes as recorded, beside the p-values
FROM: dict[str, str] = {}  # what a procedure is recomputed from, where that is more than p_entered
CHECKS: list[Callable[..., Iterator[str]]] = []  # what is checked of such a family beside its decisions


class Unreadable(Exception):
    """The folder can't be read as a run."""


def main(arguments: list[str]) -> int:
    """Recheck one folder and say what was found."""
    if len(arguments) > 1 or arguments[:1] in (["-h"], ["--help"]):
        print(__doc__)
        return 0 if len(arguments) == 1 else 2
    folder = Path(arguments[0]) if arguments else Path(__file__).resolve().parent
    try:
        content = {name: (folder / name).read_bytes() for name in FILES}
        record = json.loads(content["record.json"].decode("utf-8"))
        rows = read_rows(content["tests.csv"].decode("utf-8"))
        families = read_families(record)
        differences = [*checksums(content, record), *arithmetic(record, families, rows)]
    except (OSError, TypeError, ValueError, LookupError, ArithmeticError, Unreadable) as why:
        print(f"This folder can't be rechecked: {why}", file=sys.stderr)
        return 2
    members = {member for family in families for member in family["members"]}
    beside = sum(row["id"] not in members for row in rows)
    say_what_is_done(len(members), beside, families, record["scheme"])
    for difference in differences:
        print(difference)
    found = f"differences: {len(differences)}" if differences else "everything agrees"
    print(f"Rechecked {len(members)} hypotheses: {found}.")
    return 1 if differences else 0


def say_what_is_done(hypotheses: int, beside: int, families: list[dict[str, Any]], scheme: str) -> None:
    """Print what is recomputed and what is taken as recorded."""
    used = [*sorted({family["procedure"] for family in families} - {scheme}), scheme]
    whole = [name for name in used if name in {**PROCEDURES, **SCHEMES} and name not in {**TAKEN, **FROM}]
    described = f"; beside them, described and not decided: {beside}" if beside else ""
    print(f"Read: {hypotheses} hypotheses in {len(families)} families{described}.")
    print(f"Recomputed: the columns {', '.join(RECOMPUTED)} and product, and each family's gate and counts;")
    print(f"  from column p_entered alone: {', '.join(whole) or 'nothing'}.")
    for name in used:
        if name in FROM:
            print(f"  from {FROM[name]}: {name}.")
    print("Taken as recorded: p, from which p_entered has to follow as the column entered_as says (of a two-sided test")
    print("  that enters with the side of its claim, that side's p); the families, their members and levels; what the")
    print("  plan gives them (weights, shares, a graph); the sides of the estimates; every other column.")
    for name in used:
        if name in TAKEN:
            print(f"  For {name}: {TAKEN[name]}.")


def part(mapping: Any, key: str, kind: Any) -> Any:
    """Give one part of record.json, which has to be there and of its kind."""
    if not isinstance(mapping, dict) or not isinstance(mapping.get(key), kind):
        raise Unreadable(f"record.json has no '{key}' where one is expected, or of another kind")
    return mapping[key]


def read_families(record: Any) -> list[dict[str, Any]]:
    """Give the families in the order in which they are tested."""
    part(record, "scheme", str)
    families: list[dict[str, Any]] = part(record, "families", list)
    for family in families:
        for key in ("id", "procedure", "closed_by"):
            part(family, key, str)
        for key in ("given", "states"):
            part(family, key, dict)
        for key in ("tested", "under_study_promise", "multiples"):
            part(family, key, bool)
        part(family, "computed", int)
        part(family, "level", (int, float))
        if not all(isinstance(member, str) for member in part(family, "members", list)):
            raise Unreadable(f"record.json: the members of family {family['id']!r} are not ids")
    order = part(record, "order", list)
    place = {name: i for i, name in enumerate(order)}
    return sorted(families, key=lambda family: place.get(family["id"], len(place)))


def read_rows(text: str) -> list[dict[str, str]]:
    """Give the rows of tests.csv, each a mapping from column to cell."""
    table = list(csv.reader(io.StringIO(text, newline="")))
    head = table[0] if table else []
    for column in READ + RECOMPUTED:
        if column not in head:
            raise Unreadable(f"tests.csv has no column '{column}'")
    for line, cells in enumerate(table, start=1):
        if len(cells) != len(head):
            raise Unreadable(f"tests.csv, line {line}: {len(cells)} cells under {len(head)} columns")
    return [{column: cells[i] for i, column in enumerate(head)} for cells in table[1:]]


def checksums(content: dict[str, bytes], record: Any) -> Iterator[str]:
    """Compare the checksums of the two files with those that the manifest and the record name."""
    listed = {}
    for line in content["manifest-sha256.txt"].decode("utf-8").splitlines():
        listed[line[66:]] = line[:64]
    found = {name: hashlib.sha256(content[name]).hexdigest() for name in ("record.json", "tests.csv")}
    for name, checksum in found.items():
        if listed.get(name) != checksum:
            yield f"{name}: its checksum is not the one in manifest-sha256.txt"
    if record.get("tests_csv_sha256") != found["tests.csv"]:
        yield "tests.csv: its checksum is not the one in record.json"


def arithmetic(record: Any, families: list[dict[str, Any]], rows: list[dict[str, str]]) -> Iterator[str]:
    """Recompute every family and compare it with what was recorded."""
    by_id = {row["id"]: row for row in rows}
    yield from memberships(families, rows, by_id)
    members = {member for family in families for member in family["members"]}
    for row in rows:
        yield from entered(row) if row["id"] in members else undecided(row)
    given = record.get("scheme_given") or {}
    for covered, scheme, beyond in ((True, record["scheme"], given), (False, "separate", {})):
        group = [family for family in families if family["under_study_promise"] == covered]
        unknown = sorted({family["procedure"] for family in group} - {scheme} - set(PROCEDURES))
        if group and (unknown or scheme not in SCHEMES):
            yield f"not recomputed: this file does not hold {' or '.join([*unknown, *{scheme} - set(SCHEMES)])}"
        elif group:
            yield from compare_group(scheme, beyond, group, by_id)


def memberships(families: list[dict[str, Any]], rows: list[dict[str, str]], by_id: dict[str, Any]) -> Iterator[str]:
    """Every member has one row, in its own family."""
    family_of: dict[str, str] = {}
    for family in families:
        for member in family["members"]:
            if member not in by_id:
                yield f"{member!r}: a member of family {family['id']!r} that has no row in tests.csv"
            if member in family_of:
                yield f"{member!r}: a member of family {family_of[member]!r}, and again of {family['id']!r}"
            family_of[member] = family["id"]
    if len(by_id) < len(rows):
        yield "tests.csv: an id has more than one row"
    for row in rows:
        if row["family"] != family_of.get(row["id"], row["family"]):
            yield f"{row['id']!r}, column family: recorded {row['family']!r}, a member of {family_of[row['id']]!r}"


def number(cell: str) -> float:
    """Give the number in a cell; an empty cell, or one that holds no number, is nan."""
    try:
        return float(cell)
    except ValueError:
        return float("nan")


def agree(one: float, other: float) -> bool:
    """Whether two numbers agree; nan agrees with nothing."""
    return abs(one - other) <= AGREE * max(abs(one), abs(other), FLOOR)


def entered(row: dict[str, str]) -> Iterator[str]:
    """Whether p_entered follows from p as the row says: as it is, doubled, or 1 without a result."""
    p, p_entered, way = number(row["p"]), number(row["p_entered"]), row["entered_as"]
    p = p if 0 <= p <= 1 else float("nan")
    follows = {"as it is": p, "doubled": min(2 * p, 1.0), "no result": 1.0, "claim side": p_entered}
    if not 0 <= p_entered <= 1:
        yield f"{row['id']!r}, column p_entered: recorded {row['p_entered']!r}, which is no number from 0 to 1"
    elif way not in follows or (row["p"] == "") != (way == "no result"):
        yield f"{row['id']!r}, column entered_as: recorded {way!r} beside p {row['p']!r}"
    elif not agree(p_entered, follows[way]):
        yield f"{row['id']!r}, column p_entered: recorded {row['p_entered']}, which is not p {row['p']!r} {way}"
    if row["side_agrees"] not in ("yes", "no", ""):
        yield f"{row['id']!r}, column side_agrees: recorded {row['side_agrees']!r}, which is neither yes nor no"


def undecided(row: dict[str, str]) -> Iterator[str]:
    """Whether a row that is a member of no family decides nothing."""
    for column in RECOMPUTED:
        if row[column] != ("described" if column == "state" else ""):
            yield f"{row['id']!r}, column {column}: recorded {row[column]!r}, but it is a member of no family"


def compare_group(scheme: str, beyond: Any, group: list[dict[str, Any]], by_id: dict[str, Any]) -> Iterator[str]:
    """Recompute the families that one scheme covers, and compare them with what was recorded."""
    members = [[by_id[member] for member in family["members"] if member in by_id] for family in group]
    again = SCHEMES[scheme]([plain(family, members[k]) for k, family in enumerate(group)], **beyond)
    for k, family in enumerate(group):
        yield from compare_family(family, members[k], again[k])
        for check in CHECKS:
            yield from check(family, members[k])
        if family["procedure"] == scheme:  # it adjusts all of them together, and ranks are steps of one walk
            yield from trail(members[k], [row for rows in members for row in rows], family["multiples"], "p_study")
        elif not again[k]["closed_by"]:
            yield from trail(members[k], members[k], family["multiples"], "p_family")


def plain(family: dict[str, Any], rows: list[dict[str, str]]) -> dict[str, Any]:
    """Give what a scheme needs of a family: ids, level, p-values, and its procedure as a function of the level."""
    p = [number(row["p_entered"]) for row in rows]
    p = [value if 0 <= value <= 1 else 1.0 for value in p]
    return {
        "id": family["id"],
        "members": [row["id"] for row in rows],
        "level": family["level"],
        "p": p,
        "may_open": [row["p"] != "" and row["side_agrees"] != "no" for row in rows],
        "judge": lambda level: PROCEDURES[family["procedure"]](p, level, **family["given"]),
    }


def compare_family(family: dict[str, Any], rows: list[Any], again: Any) -> Iterator[str]:
    """Compare one family, member by member and then in its counts."""
    column = "p_study" if family["under_study_promise"] else "p_family"
    states: dict[str, int] = {}
    for i, row in enumerate(rows):
        state = state_again(row, again["rejected"][i], again["tested"][i])
        compared = state not in ("not_tested", "no_result")
        states[state] = states.get(state, 0) + 1
        expected = {
            "p_family": None if again["closed_by"] else again["p_family"][i],
            "p_study": again["p_study"][i],
            "threshold": family["level"] if compared else None,
            "decides": column if compared else "",
            "state": state,
        }
        for name, value in expected.items():
            if not same(row[name], value):
                yield f"{row['id']!r}, column {name}: recorded {row[name]!r}, recomputed {value!r}"
    local, level = again["local_level"], family["level"]
    expected = {
        "tested": not again["closed_by"],
        "closed_by": again["closed_by"],
        "states": states,
        "computed": sum(row["p"] != "" for row in rows),
        "local_level": None if local is None or agree(local, level) else local,
    }
    for name, value in expected.items():
        recorded = family.get(name)
        alike = isinstance(recorded, float) and isinstance(value, float) and agree(recorded, value)
        if not alike and recorded != value:
            yield f"record.json, family {family['id']!r}, {name}: recorded {recorded!r}, recomputed {value!r}"
    if family.get("success"):
        yield from success(family, rows, 0.0 if again["closed_by"] else again["local_level"])


def success(family: dict[str, Any], rows: list[dict[str, str]], level: float) -> Iterator[str]:
    """Whether the claim about at least r hypotheses together was judged right: (m - r + 1) x the r-th smallest p."""
    found, least = family["success"], part(family["success"], "at_least", int)
    p = sorted(number(row["p_entered"]) if row["p"] and row["side_agrees"] != "no" else 1.0 for row in rows)
    joint = min((len(p) - least + 1) * p[least - 1], 1.0)
    if not agree(part(found, "p", float), joint) or not agree(part(found, "level", float), level):
        yield f"record.json, family {family['id']!r}, success: recorded {found!r}, recomputed p {joint!r} at {level!r}"
    if found.get("reached") != (level > 0 and joint <= level * (1 + 1e-12)):
        yield f"record.json, family {family['id']!r}, success: recorded {found!r}, which p {joint!r} is not"


def state_again(row: dict[str, str], rejected: bool, tested: bool) -> str:
    """Give the state of one hypothesis from its decision."""
    if row["p"] == "":
        return "no_result"
    if not tested:
        return "not_tested"
    if not rejected:
        return "not_rejected"
    return "rejected_against_claim" if row["side_agrees"] == "no" else "rejected"


def same(cell: str, value: Any) -> bool:
    """Whether a cell holds a value: words exactly, numbers within the agreement, nothing as an empty cell."""
    if value is None or isinstance(value, str):
        return cell == (value or "")
    return agree(number(cell), value)


def trail(rows: list[dict[str, str]], ranked: list[dict[str, str]], multiples: bool, column: str) -> Iterator[str]:
    """Whether the arithmetic of each decision is right: factor x p_entered, and the rank it was taken from."""
    at_rank = {row["rank"]: row for row in ranked}
    for row in rows:
        product = number(row["factor"]) * number(row["p_entered"])
        if (multiples or row["factor"]) and not agree(number(row["product"]), product):
            yield f"{row['id']!r}, column product: recorded {row['product']!r}, which is not factor x p_entered"
        source = at_rank.get(row["from_rank"], {"product": ""})
        capped = min(number(source["product"]), 1.0)  # in this order nan stays nan
        if not agree(number(row[column]), capped):
            yield f"{row['id']!r}, column from_rank: the product at rank {row['from_rank']!r} is not its {column}"


# The procedures and schemes of this run, as the run itself replayed them.


def replay_benjamini_hochberg(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Benjamini-Hochberg by definition: the smallest m x q / (number of values up to q) over all values q from p on.

    Decisions walk up the staircase: the largest p that meets level x rank / m is rejected with all that are smaller.
    """
    adjusted = {}
    not_above, smallest = len(p), 1.0
    equal = dict.fromkeys(p, 0)
    for value in p:
        equal[value] += 1
    for value in sorted(equal, reverse=True):
        smallest = min(smallest, len(p) * value / not_above)
        adjusted[value] = smallest
        not_above -= equal[value]

    ascending = sorted(p)
    met = [ascending[i] for i in range(len(p)) if ascending[i] <= level * (i + 1) / len(p) * (1 + 1e-12)]
    largest = met[-1] if met else -1.0
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value <= largest for value in p]}


PROCEDURES["benjamini_hochberg"] = replay_benjamini_hochberg


def replay_holm(p: list[float], level: float) -> dict[str, list[float] | list[bool]]:
    """Holm by definition: the largest (number of values not below q) x q over all values q up to p.

    Decisions walk down the staircase: each p in ascending order has to meet level / (number not yet rejected).
    """
    adjusted = {}
    not_below, largest = len(p), 0.0
    equal = dict.fromkeys(p, 0)
    for value in p:
        equal[value] += 1
    for value in sorted(equal):
        largest = max(largest, not_below * value)
        adjusted[value] = min(1.0, largest)
        not_below -= equal[value]

    met = set()
    for step, value in enumerate(sorted(p)):
        if value > level / (len(p) - step) * (1 + 1e-12):
            break
        met.add(value)
    return {"adjusted": [adjusted[value] for value in p], "rejected": [value in met for value in p]}


PROCEDURES["holm"] = replay_holm


def across_separate(families: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Every family is tested at its own level; there is no study level, and so no p_study."""
    again: list[dict[str, Any]] = []
    for family in families:
        judged = family["judge"](family["level"])
        none = [None] * len(judged["adjusted"])
        again.append({
            "closed_by": "", "local_level": family["level"], "p_family": judged["adjusted"], "p_study": none,
            "tested": [True] * len(none), "rejected": judged["rejected"],
        })  # fmt: skip
    return again


SCHEMES["separate"] = across_separate


if __name__ == "__main__":
    sys.stdout.reconfigure(errors="backslashreplace")  # type: ignore[union-attr]  # ids may hold any letter
    sys.exit(main(sys.argv[1:]))
