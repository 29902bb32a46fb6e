"""The command line: one file for each command, and the one handler of everything that can go wrong."""

import sys
from importlib import import_module
from pathlib import Path

import click

from beforehand.errors import FaultsFound, TwoComputationsDisagree

COMMANDS = ("draft", "check", "report", "reprint", "verify", "methods")
"""In the order in which a study needs them; each is the file of that name."""

DONE, WRONG_CALL, OUR_DEFECT, INTERRUPTED = 0, 2, 3, 130


class Commands(click.Group):
    """The commands, each imported when it is called or listed."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Name the commands in the order of a study."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Import one command."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = getattr(import_module(f"beforehand.cli.{cmd_name}"), cmd_name)
        return command

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """Find the command, or say which one is meant."""
        if args and args[0] not in COMMANDS:
            import difflib

            near = difflib.get_close_matches(args[0], COMMANDS, n=1)
            hint = f"The nearest is '{near[0]}'." if near else f"The commands are: {', '.join(COMMANDS)}."
            raise click.UsageError(f"there is no command '{args[0]}'. {hint}")
        return super().resolve_command(ctx, args)


@click.group(cls=Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(package_name="beforehand", message="beforehand %(version)s")
def beforehand() -> None:
    """Run an analysis spec, written before the data, into a report that a sceptical reader can check.

    Exit codes: 0 done; 1 done, and the answer is "no"; 2 the spec, the data or the call is wrong, nothing was
    written; 3 a defect of beforehand; 130 interrupted.
    """


def main(arguments: list[str] | None = None) -> None:
    """Run one command and leave with its exit code."""
    sys.exit(exit_code(sys.argv[1:] if arguments is None else arguments))


def exit_code(arguments: list[str]) -> int:  # noqa: PLR0911 -- one return for each way to end
    """Run one command; say what went wrong, whatever it was, and give the exit code."""
    try:
        code = beforehand.main(args=arguments, prog_name="beforehand", standalone_mode=False)
    except FaultsFound as found:
        return _say(found, WRONG_CALL, arguments)
    except click.UsageError as wrong:
        call = f"{wrong.ctx.command_path} --help" if wrong.ctx else "beforehand --help"
        click.echo(f"{wrong.format_message()}\nSee: {call}", err=True)
        return WRONG_CALL
    except click.ClickException as wrong:
        click.echo(wrong.format_message(), err=True)
        return WRONG_CALL
    except (KeyboardInterrupt, click.Abort):
        click.echo("interrupted; nothing is half-written", err=True)
        return INTERRUPTED
    except TwoComputationsDisagree as disagreement:
        return _say(disagreement, OUR_DEFECT, arguments)
    except BrokenPipeError:
        sys.stderr.close()
        return DONE
    except Exception as defect:
        return _our_defect(defect)
    return code if isinstance(code, int) else DONE


def _say(problem: Exception, code: int, arguments: list[str]) -> int:
    if "--json" in arguments:
        import json

        faults = [vars(fault) for fault in problem.faults] if isinstance(problem, FaultsFound) else []
        click.echo(json.dumps({"exit_code": code, "message": str(problem), "faults": faults}, ensure_ascii=False))
    else:
        click.echo(str(problem), err=True)
    return code


def _our_defect(defect: Exception) -> int:
    import tempfile
    import traceback

    with tempfile.NamedTemporaryFile("w", prefix="beforehand-defect-", suffix=".txt", delete=False) as file:
        file.write("".join(traceback.format_exception(defect)))
    click.echo(
        f"This is a defect of beforehand, not of your spec or data; nothing is half-written.\n"
        f"  {type(defect).__name__}: {defect}\n"
        f"Please report it with the file {Path(file.name)}; it holds the place in the program and may quote your data.",
        err=True,
    )
    return OUR_DEFECT
