"""``beforehand report``: the main job."""

from pathlib import Path

import click

from beforehand.cli.options import (
    data_root_option,
    json_option,
    only_option,
    out_option,
    quiet_option,
    spec_argument,
    strict_option,
)


@click.command()
@spec_argument
@out_option
@only_option
@data_root_option
@strict_option
@json_option
@quiet_option
def report(  # noqa: PLR0917 -- the options of the command
    spec: Path, out: Path | None, only: str | None, data_root: Path | None, strict: bool, as_json: bool, quiet: bool
) -> int:
    """Run a spec and its data into a report, the results of record and a stand-alone checker."""
    from beforehand import study
    from beforehand.cli import screen

    with screen.progress(quiet=quiet or as_json) as stage:
        forms = (only,) if only else study.BOTH
        reported = study.report(spec, out, only=forms, data_root=data_root, progress=stage)
    if as_json:
        screen.print_json(reported.summary())
    elif not quiet:
        screen.print_decisions(reported.run)
        screen.print_written(reported.written)
    no_pdf = reported.written.no_pdf_because
    if no_pdf:
        click.echo(f"No report.pdf: {no_pdf}", err=True)
    lost = strict and any(warning.severity == "objection" for warning in reported.run.warnings)
    return 1 if no_pdf or lost else 0
