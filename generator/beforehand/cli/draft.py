"""``beforehand draft``: a starting spec."""

from pathlib import Path

import click


@click.command()
@click.argument("data", required=False, type=click.Path(path_type=Path))
@click.option(
    "--out", type=click.Path(path_type=Path), metavar="FILE", help="The spec to write; default: spec.yaml here."
)
def draft(data: Path | None, out: Path | None) -> int:
    """Write a commented starting spec from the column names of DATA, and the schema that editors complete it by.

    Names, kinds, level names and texts that may mean "missing" are taken from the file; no number is.
    """
    import json

    from beforehand.errors import CallFault
    from beforehand.planning.drafting import draft as drafted
    from beforehand.spec.schema import json_schema

    out = (out or Path("spec.yaml")).absolute()
    if out.exists():
        raise CallFault(str(out), "this file exists already and is left as it is; name another one with --out")
    if not out.parent.is_dir():
        raise CallFault(str(out), "there is no such folder to write it in")
    schema_file = out.parent / "beforehand.schema.json"
    schema = json.dumps(json_schema(), indent=1, ensure_ascii=False) + "\n"
    if schema_file.exists() and not _is_a_schema(schema_file):
        raise CallFault(str(schema_file), "this file exists already and is no schema of beforehand; move it first")
    text = drafted(None if data is None else _below(data, out.parent), folder=out.parent)
    out.write_text(text, "utf-8")
    schema_file.write_text(schema, "utf-8")
    click.echo(f"Wrote {out.name} and beforehand.schema.json in {out.parent}.")
    click.echo(f"What is left to write, line by line: beforehand check {out.name}")
    return 0


def _is_a_schema(path: Path) -> bool:
    """Whether a file is a schema that some version of beforehand wrote, which may be written anew."""
    from beforehand.spec.schema import json_schema

    return f'"title": "{json_schema()["title"]}"' in path.read_text("utf-8", errors="replace")


def _below(data: Path, folder: Path) -> Path:
    """Give the data file's place, which must be below the folder of the spec."""
    from beforehand.errors import CallFault

    whole = data.absolute()
    if not whole.is_file():
        raise CallFault(str(data), "there is no such file")
    if not whole.is_relative_to(folder):
        raise CallFault(
            str(data),
            f"data lie in the folder of their spec or below it; put the spec there: --out {whole.parent}/spec.yaml",
        )
    return whole
