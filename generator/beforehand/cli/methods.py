"""``beforehand methods``: the catalogue, or one entry of it."""

import re
import textwrap
from typing import TYPE_CHECKING, Any

import click

from beforehand.cli.options import json_option
from beforehand.terms import CRITERION_WORDS

if TYPE_CHECKING:
    from beforehand.catalogue import Catalogue


@click.command()
@click.argument("name", required=False)
@json_option
def methods(name: str | None, as_json: bool) -> int:
    """Show what each test, procedure and warning assumes, controls and is called in the literature."""
    from beforehand.cli import screen

    catalogues = _catalogues()
    if name is None:
        listing = {heading: _titles(catalogue) for heading, catalogue in catalogues.items()}
        if as_json:
            screen.print_json(listing)
        else:
            _print_listing(listing)
        return 0
    entry = _entry(name, catalogues)
    if as_json:
        screen.print_json(entry)
    else:
        _print_entry(entry)
    return 0


def _catalogues() -> "dict[str, Catalogue[Any]]":
    from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
    from beforehand.multiplicity.contract import PROCEDURES
    from beforehand.snooping.contract import WARNING_RULES

    return {"statistical tests": STATISTICAL_TESTS, "procedures": PROCEDURES, "warnings": WARNING_RULES}


def _titles(catalogue: "Catalogue[Any]") -> dict[str, str]:
    return {name: catalogue[name].title for name in catalogue}


def _print_listing(listing: dict[str, dict[str, str]]) -> None:
    from beforehand.cli import screen

    for heading, titles in listing.items():
        click.secho(heading.capitalize(), bold=True)
        screen.print_table(list(titles.items()))
        click.echo()
    click.echo("Details: beforehand methods NAME")


def _entry(name: str, catalogues: "dict[str, Catalogue[Any]]") -> dict[str, Any]:
    """Give everything that an entry declares; CallFault with the nearest name when there is none."""
    from beforehand.errors import CallFault

    for heading, catalogue in catalogues.items():
        if name in catalogue:
            entry = catalogue[name]
            declared = {key: value for key, value in vars(entry).items() if not callable(value) and value != ""}
            options = {key: _default(option) for key, option in getattr(entry, "options", {}).items()}
            text = _documentation(catalogue, name)
            return {
                "name": name,
                "kind": heading.removesuffix("s"),
                **declared,
                **_beside(entry),
                "options": options,
                "documentation": text,
            }
    near = next((found for catalogue in catalogues.values() if (found := catalogue.nearest(name))), None)
    hint = f"The nearest name is '{near}'." if near else "`beforehand methods` lists all names."
    raise CallFault("beforehand methods", f"no test, procedure or warning is called '{name}'. {hint}")


def _beside(entry: Any) -> dict[str, tuple[str, ...]]:
    """Give what a test takes of each row beside its outcome: keys of a hypothesis, not options."""
    takes = getattr(entry, "takes", ())
    return {"beside": tuple(word if word in entry.needs else f"{word} where the plan has any" for word in takes)}


def _default(option: Any) -> str:
    return "needed" if option.default is option.empty else repr(option.default)


def _documentation(catalogue: "Catalogue[Any]", name: str) -> str:
    import inspect

    module = catalogue.module(name)
    function = next(value for value in vars(catalogue[name]).values() if callable(value))
    return inspect.getdoc(function) or inspect.getdoc(module) or ""


WIDTH = 110
"""Longer lines are broken."""

LABELS = {
    "kind": "what it is",
    "estimates": "estimates",
    "parameter": "in symbols",
    "statistic": "statistic",
    "p_is": "p is",
    "null": "null hypothesis",
    "null_default": "its usual value",
    "takes": "also takes",
    "beside": "takes of each row",
    "assumptions": "assumes",
    "second_route": "computed again by",
    "controls": "controls",
    "strong": "whichever hypotheses are true",
    "valid_under": "valid under",
    "no_intervals_because": "intervals",
    "severity": "severity, at most",
    "scope": "about",
    "evidence": "read from",
    "why": "why it matters",
    "basis": "basis",
    "false_alarm_rate": "speaks in honest studies",
    "measured_on": "measured on",
    "reference": "reference",
    "options": "options",
}
"""What is shown of an entry, in this order, and how it is called."""


def _print_entry(entry: dict[str, Any]) -> None:
    click.secho(f"{entry['name']}: {entry['title']}", bold=True)
    shown = {label: entry[key] for key, label in LABELS.items() if entry.get(key) not in (None, "", (), {})}
    width = max(len(label) for label in shown)
    for label, value in shown.items():
        start = f"  {label.ljust(width)}  "
        click.echo(textwrap.fill(_written(value), WIDTH, initial_indent=start, subsequent_indent=" " * len(start)))
    for paragraph in _for_readers(entry["documentation"]):
        click.echo(f"\n{paragraph}")


def _for_readers(documentation: str) -> list[str]:
    """Give what a docstring says of the science: its opening, and its notes and references."""
    parts = re.split(r"\n\n([A-Z][a-z]+)\n-+\n", documentation)
    sections = dict(zip(parts[1::2], parts[2::2], strict=True))
    return [parts[0], *(sections[name] for name in ("Notes", "References") if name in sections)]


def _written(value: Any) -> str:
    if isinstance(value, tuple):
        return "; ".join(str(item) for item in value) or "none"
    if isinstance(value, dict):
        return ", ".join(f"{key}: {item}" for key, item in value.items()) or "none"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return f"{value:g}"
    return str(value).replace("_", " ") if value in CRITERION_WORDS else str(value)
