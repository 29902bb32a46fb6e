"""``beforehand verify``: check a run folder."""

from pathlib import Path

import click

from beforehand.cli.options import data_root_option, folder_argument, json_option, quiet_option


@click.command()
@folder_argument
@data_root_option
@json_option
@quiet_option
def verify(folder: Path, data_root: Path | None, as_json: bool, quiet: bool) -> int:
    """Check a run folder: checksums, arithmetic, and a full rerun when the data are at hand."""
    from beforehand import study
    from beforehand.cli import screen

    with screen.progress(quiet=quiet or as_json) as stage:
        verified = study.verify(folder, data_root=data_root, progress=stage)
    if as_json:
        screen.print_json(verified.summary())
    elif not quiet:
        screen.print_table([(check.name, check.answer, check.detail) for check in verified.checks], indent="")
        click.echo(verified.sentence())
    return 0 if verified.holds else 1
