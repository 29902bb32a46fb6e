"""A part of recheck.py: whether the statistics that a procedure judges are those of tests.csv."""

from __future__ import annotations

from typing import Any, Iterator  # noqa: UP035 -- read by Python 3.8 too

from beforehand.record.recheck_head import agree, number


def statistics(family: dict[str, Any], rows: list[dict[str, str]]) -> Iterator[str]:
    """Compare what record.json gives a procedure with the columns it comes from; 0 where there is no result."""
    given, where = family["given"], f"record.json, family {family['id']!r}"
    if "statistics" not in given:
        return
    for i, row in enumerate(rows):
        for name, values in columns_of(row).items():
            if name in given and not any(agree(abs(given[name][i]), value) for value in values):
                yield f"{where}, {name}: not what tests.csv has of {row['id']!r}"
        if given.get("sides") == 1 and given["statistics"][i]:
            half = 1.0 if given["doubled"] else 0.5
            if (given["statistics"][i] > 0) != (number(row["p_entered"]) < half):
                yield f"{where}, statistics: {row['id']!r} stands on the other side than its p"
    if "df" in given and not agree(given["df"], max([0.0, *(number(row["df"]) for row in rows if row["p"])])):
        yield f"{where}, df: not what tests.csv has"


def columns_of(row: dict[str, str]) -> dict[str, tuple[float, ...]]:
    """Give the sizes that the ingredients of one hypothesis may have; 0 where there is no result."""
    if not row["p"]:
        return dict.fromkeys(("statistics", "dfs", "loadings"), (0.0,))
    first, second = number(row["n_first"]), number(row["n_second"])
    shares = (first / (first + second), second / (first + second))  # whichever of them is the control
    return {
        "statistics": (abs(number(row["statistic"])),),
        "dfs": (number(row["df"]),),
        "loadings": tuple(share**0.5 for share in shares),
    }
