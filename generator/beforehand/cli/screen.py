"""What the terminal shows: progress on stderr when somebody watches, a summary of decisions on stdout."""

import json
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from beforehand.terms import CRITERION_WORDS, STATE_WORDS

if TYPE_CHECKING:
    from beforehand.record.folder import Written
    from beforehand.study import Run


@contextmanager
def progress(*, quiet: bool) -> Iterator[Callable[[str], None]]:
    """Show the stage a long command is in, on stderr and only when that is a terminal."""
    if quiet or not sys.stderr.isatty():
        yield lambda _: None
        return
    from rich.console import Console
    from rich.progress import Progress, SpinnerColumn, TextColumn, TimeElapsedColumn

    columns = (SpinnerColumn(), TextColumn("{task.description}"), TimeElapsedColumn())
    with Progress(*columns, console=Console(stderr=True), transient=True) as bar:
        task = bar.add_task("")
        yield lambda stage: bar.update(task, description=stage)


def print_json(content: Any) -> None:
    """Print one object, and nothing else."""
    click.echo(json.dumps(content, ensure_ascii=False, indent=1, sort_keys=True))


def print_table(rows: list[tuple[str, ...]], *, indent: str = "  ") -> None:
    """Print rows in columns that align."""
    widths = [max(len(cell) for cell in column) for column in zip(*rows, strict=True)]
    for row in rows:
        cells = (cell.ljust(width) for cell, width in zip(row, widths, strict=True))
        click.echo((indent + "  ".join(cells)).rstrip())


def print_decisions(run: "Run") -> None:
    """Print the summary of decisions: one line for each family, then the count of warnings."""
    click.echo(f"{run.record.study.title}\n{run.identifier}\n")
    rows: list[tuple[str, ...]] = [("family", "promise", "procedure", "m", "decisions")]
    for family in run.record.families:
        promise = f"{CRITERION_WORDS[family.promise.criterion]} at {family.promise.level_text}"
        side = "" if family.promise.level_is is None else f", {family.promise.level_is.replace('_', '-')}"
        states = ", ".join(f"{count} {STATE_WORDS[state]}" for state, count in family.states.items())
        lacking = "" if family.planned == family.computed else f" ({family.computed} computed)"
        rows.append((family.id, promise + side, family.procedure, f"{family.planned}{lacking}", states))
    print_table(rows)
    click.echo()
    counts = dict.fromkeys(("objection", "caution", "note"), 0)
    for warning in run.warnings:
        counts[warning.severity] += 1
    named = [f"{count} {word}{'s' if count > 1 else ''}" for word, count in counts.items() if count]
    click.echo(f"Warnings: {', '.join(named) or 'none'}")


def print_written(written: "Written") -> None:
    """Say what was written, and where."""
    folder = _near(written.folder)
    if written.outcome == "unchanged":
        click.echo(f"Nothing changed: plan, data and results have the checksums of the run in {folder}")
    elif written.outcome == "restored":
        click.echo(f"Restored in {folder}: {', '.join(written.restored)}")
    if written.kept:
        click.echo(f"The earlier report is kept in {_near(written.kept)}")
    for name in ("report.html", "report.pdf"):
        if (written.folder / name).exists():
            click.echo(f"  {folder / name}")


def _near(path: Path) -> Path:
    """Write a path as seen from here, where it lies below this folder."""
    return path.relative_to(Path.cwd()) if path.is_relative_to(Path.cwd()) else path
