"""What to write instead of a word that nobody knows."""

import difflib
from collections.abc import Iterable

_SHOWN = 12  # a longer list helps nobody


def nearest(word: str, words: Iterable[str], noun: str = "") -> str:
    """Name the word that was probably meant, or list what there is."""
    known = list(dict.fromkeys(words))
    near = difflib.get_close_matches(word, known, n=1, cutoff=0.5)
    if near:
        return f"The nearest {noun}".rstrip() + f" is '{near[0]}'."
    if not known:
        return "There are none."
    more = f" and {len(known) - _SHOWN} more" if len(known) > _SHOWN else ""
    return f"There are: {', '.join(known[:_SHOWN])}{more}."
