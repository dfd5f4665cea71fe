"""The command `orolift` and how it ends: 0 done, 2 input at fault, 130 interrupted, 1 a fault of ours."""

from __future__ import annotations

import sys
from importlib import import_module

import click

from orolift import __version__

COMMANDS = {
    "cross": "Work out a crossing and write its report.",
    "hours": "Work out one crossing for each hour of a series.",
    "bearings": "Work out the crossing of every wind direction.",
    "check": "Read everything a case names and say what is wrong or doubtful.",
    "compare": "Hold a crossing against what was observed in the lee.",
    "starter": "Write a small commented case to edit.",
}
"""Commands and their one-line help; each lives in a module of its name, imported only when it runs."""


class _Commands(click.Group):
    """Group that imports a command only when it is asked for, so that help is quick."""

    def list_commands(self, ctx: click.Context) -> list[str]:  # noqa: ARG002 (click's signature)
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:  # noqa: ARG002 (same)
        if cmd_name not in COMMANDS:
            return None
        return import_module(f"orolift.cli.{cmd_name}").command  # type: ignore[no-any-return]  # a module attribute

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:  # noqa: ARG002 (same)
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.group(cls=_Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="orolift")
def command() -> None:
    """What happens to moist air that crosses a mountain range.

    An estimate for trained people, not a warning: official warning services,
    local codes and licensed practice decide.
    """


def run(arguments: list[str] | None = None) -> None:
    """Run the command and leave with its exit code."""
    sys.exit(exit_code(sys.argv[1:] if arguments is None else arguments))


def exit_code(arguments: list[str]) -> int:
    """Exit code of a run; messages go to stderr, one line, without a traceback for input faults.

    Parameters
    ----------
    arguments : list of str
        As on the command line, without the program's name.

    Returns
    -------
    int
        0 done, 2 input at fault, 130 interrupted, 1 a fault of orolift.
    """
    from orolift.cli.executors import ended_as_by_ctrl_c
    from orolift.errors import OroliftError
    from orolift.sources.read_files import inputs_kept

    try:
        with ended_as_by_ctrl_c(), inputs_kept():
            command.main(arguments, prog_name="orolift", standalone_mode=False)
        code, message = 0, ""
    except (OroliftError, click.ClickException) as error:
        text = error.format_message() if isinstance(error, click.ClickException) else str(error)
        hint = _where_help_is(error) if isinstance(error, click.UsageError) else ""
        code, message = 2, f"{text}{hint}"
    except (click.Abort, KeyboardInterrupt) as error:
        code, message = 130, str(error) or "interrupted; nothing more is written."
    except BrokenPipeError:
        code, message = 0, ""  # the reader of our output has seen enough
    except Exception as error:
        from orolift.cli.options import steps_are_shown

        if steps_are_shown():
            raise
        code, message = (
            1,
            (
                f"a fault of orolift itself, not of your input: {type(error).__name__}: {error}. "
                "Run again with --verbose and report what it prints."
            ),
        )
    if message:
        click.echo(f"orolift: {message}", err=True)
    return code


def _where_help_is(error: click.UsageError) -> str:
    """Where the person finds what the command takes."""
    path = "orolift" if error.ctx is None else error.ctx.command_path
    return f" '{path} --help' lists what there is."
