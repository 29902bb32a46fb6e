"""``beforehand check``: spec and data together, before any test."""

from pathlib import Path
from typing import TYPE_CHECKING

import click

from beforehand.cli.options import data_root_option, json_option, quiet_option, spec_argument

if TYPE_CHECKING:
    from beforehand.data.dataset import Dataset
    from beforehand.planning.checking import Checked


@click.command()
@spec_argument
@data_root_option
@json_option
@quiet_option
def check(spec: Path, data_root: Path | None, as_json: bool, quiet: bool) -> int:
    """Check a spec and its data without computing any test or joining an outcome with a group.

    Prints the hypotheses, the families, the smallest p that could be reached, and the account of rows. Where no data
    file is there yet, the spec is checked alone. Exit code 1 when a hypothesis could not be rejected by any data.
    """
    from beforehand.cli import screen
    from beforehand.planning.checking import check as checked_with
    from beforehand.spec.load import load_spec

    with screen.progress(quiet=quiet or as_json) as stage:
        stage("checking")
        checked = checked_with(load_spec(spec), data_root=data_root)
    if as_json:
        screen.print_json(checked.summary())
    elif not quiet:
        _print(checked)
    return 1 if checked.out_of_reach else 0


def _print(checked: "Checked") -> None:
    from beforehand.cli import screen
    from beforehand.spelling import exact, integer

    spec = checked.spec
    click.echo(f"{spec.study.title} ({spec.study.identifier}): the spec is sound.")
    click.echo(f"Checksum of the plan: {spec.plan_checksum}\n")
    for family in spec.families:
        click.secho(f"{family.id}: {family.question}", bold=True)
        m = f"m = {integer(family.planned)} planned"
        click.echo(f"  {family.procedure}, {m}, level {exact(float(family.promise.level))}")
        rows: list[tuple[str, ...]] = [("hypothesis", "test", "null", "alternative", "units", "smallest p")]
        rows += [
            (h.id, h.test, h.null, h.alternative, _units(h.sizes), _smallest(h.smallest_p))
            for h in checked.hypotheses
            if h.family == family.id
        ]
        if len(rows) > 1:
            screen.print_table(rows)
        else:
            click.echo("  Its hypotheses are the rows of the data, which are not there yet.")
        click.echo()
    if checked.beside:
        click.secho("Beside the hypotheses: not counted, and nothing is decided", bold=True)
        screen.print_table([("id", "what", "units"), *((b.id, b.what, _units(b.sizes)) for b in checked.beside)])
        click.echo()
    if checked.dataset is None:
        click.echo("No data yet: none of the files is there, so the spec was checked alone.")
    else:
        _print_rows(checked.dataset)
    for verdict in checked.verdicts:
        click.echo(verdict)
    for hypothesis in checked.out_of_reach:
        click.echo(
            f"{hypothesis.id} cannot be rejected: the smallest p that {hypothesis.test} can reach here is "
            f"{exact(hypothesis.smallest_p or 0)}, and its first threshold is {exact(hypothesis.first_threshold)}."
        )


def _units(sizes: tuple[int, ...]) -> str:
    from beforehand.spelling import integer

    return " + ".join(map(integer, sizes))


def _smallest(p: float | None) -> str:
    from beforehand.spelling import p_value

    return "" if p is None else "any" if p == 0 else p_value(p)


def _print_rows(dataset: "Dataset") -> None:
    from beforehand.cli import screen
    from beforehand.spelling import integer

    for file in dataset.inputs:
        click.echo(f"{file.file}: {integer(file.bytes)} bytes, SHA-256 {file.sha256}")
        if file.extra_columns:
            click.echo(f"  columns that the spec does not declare: {', '.join(file.extra_columns)}")
    for name, table in dataset.tables.items():
        flow = table.flow
        click.secho(f"\nRows of {name}", bold=True)
        rows: list[tuple[str, ...]] = [("received", integer(flow.received.rows))]
        rows += [(f"excluded: {rule.because}", integer(rule.counts.rows)) for rule in flow.exclusions]
        rows.append(("analysed", integer(flow.analysed.rows)))
        rows += [(f"  {group}", integer(count)) for group, count in flow.analysed.by_group.items()]
        screen.print_table(rows)
