"""Why the spread of two groups can't be told, in plain words. Both routes of a test ask here."""

from beforehand.hypothesis_tests.contract import Values
from beforehand.hypothesis_tests.refusals import count, too_few, varies


def few_or_constant(first: Values, second: Values) -> tuple[str | None, ...]:
    """Give the reasons, each None where it does not apply: fewer than two values, or values that are all equal."""
    groups = {"first": first, "second": second}
    few = (too_few(group.size, 2, noun="value", whose=f" of the {word} group") for word, group in groups.items())
    constant = [
        f"all {count(group.size, 'value')} of the {word} group are equal"
        for word, group in groups.items()
        if not varies(group)
    ]
    return (*few, "; ".join(constant) or None)
