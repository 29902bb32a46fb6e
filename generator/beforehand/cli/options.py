"""The options that only say where and how; none of them can change a number."""

from pathlib import Path

import click

spec_argument = click.argument("spec", type=click.Path(path_type=Path))
folder_argument = click.argument("folder", type=click.Path(path_type=Path))

out_option = click.option(
    "--out",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Where to write; default: NAME.run beside the spec.",
)
data_root_option = click.option(
    "--data-root",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="A folder in which data may lie besides the spec's own.",
)
only_option = click.option(
    "--only", type=click.Choice(["html", "pdf"]), help="Draw only one form of the report; default: both."
)
strict_option = click.option(
    "--strict", is_flag=True, help="Leave with exit code 1 when a confirmatory label was lost to an objection."
)
json_option = click.option("--json", "as_json", is_flag=True, help="Print one JSON object and nothing else.")
quiet_option = click.option("--quiet", is_flag=True, help="Print nothing but faults.")
