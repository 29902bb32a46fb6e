"""``beforehand reprint``: the report again, from the run folder alone."""

from pathlib import Path

import click

from beforehand.cli.options import folder_argument, json_option, only_option, quiet_option


@click.command()
@folder_argument
@click.option("--out", type=click.Path(path_type=Path), metavar="NEW", required=True, help="The folder to write.")
@only_option
@json_option
@quiet_option
def reprint(folder: Path, out: Path, only: str | None, as_json: bool, quiet: bool) -> int:
    """Make the report again from a run folder, without the data."""
    from beforehand import study
    from beforehand.cli import screen

    with screen.progress(quiet=quiet or as_json) as stage:
        stage("drawing the report")
        reprinted = study.reprint(folder, out, only=(only,) if only else study.BOTH)
    if as_json:
        screen.print_json(reprinted.summary())
    elif not quiet:
        click.echo("\n".join(reprinted.sentences()))
        screen.print_written(reprinted.written)
    return 1 if reprinted.written.no_pdf_because else 0
