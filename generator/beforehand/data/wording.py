"""How the faults of data files read: quoted fields, lists of lines, and no list without an end."""

from collections.abc import Sequence

from beforehand.errors import Fault

SHOWN_FAULTS = 20
SHOWN_LINES = 5
SHOWN_TEXTS = 5
LONGEST_QUOTE = 40


def quoted(text: str) -> str:
    """Write a field in quotes, cut where it is long, with unprintable characters as their code."""
    cut = text if len(text) <= LONGEST_QUOTE else text[:LONGEST_QUOTE] + "…"
    return "'" + "".join(sign if sign.isprintable() else f"\\u{ord(sign):04x}" for sign in cut) + "'"


def listed(words: Sequence[str], *, shown: int, last: str = "and") -> str:
    """Write "a, b and c", or "a, b, c and 4 more"."""
    if len(words) > shown:
        return f"{', '.join(words[:shown])} {last} {len(words) - shown:,} more"
    return f" {last} ".join([", ".join(words[:-1]), words[-1]]) if len(words) > 1 else words[0]


def line_list(lines: Sequence[int]) -> str:
    """Write "line 7", "lines 7 and 9" or "lines 7, 9, 11, 12, 13 and 40 more"."""
    return f"line{'s' if len(lines) > 1 else ''} {listed([str(line) for line in lines], shown=SHOWN_LINES)}"


def also_lines(lines: Sequence[int]) -> str:
    """Write where else the same was found, as a sentence with the space before it, or nothing."""
    return f" The same on {line_list(lines)}." if lines else ""


def capped(faults: Sequence[Fault]) -> list[Fault]:
    """Keep the first faults of a long list, and say in the last one how many are left out."""
    ordered = sorted(set(faults))
    if len(ordered) <= SHOWN_FAULTS:
        return ordered
    *kept, last = ordered[:SHOWN_FAULTS]
    left_out = len(ordered) - SHOWN_FAULTS
    more = "1 more fault is not listed." if left_out == 1 else f"{left_out:,} more faults are not listed."
    return [*kept, Fault(last.line, last.column, f"{last.text} {more}")]
