"""The command group: commands are imported when asked for, and a table or run file alone is opened."""

import importlib
import io
import os
import sys
from pathlib import Path

import click

from screener import __version__
from screener.cli.output import safe, tell
from screener.errors import ScreenerError

COMMANDS = {
    "open": "Open the screen on a table or a run file.",
    "score": "Score a table without a screen.",
    "flagged": "Print the names of the flagged channels.",
    "export": "Write the results to a file.",
    "show": "Print one channel: numbers and quantile plot.",
    "compare": "Compare two runs of the same channels.",
    "critical": "Print critical values of r.",
    "nulls": "Show or build the null tables.",
    "plan": "Print a plan file to begin with.",
}
"""Every command and its line in the help; each is the `command` of the module of its name."""

INTERRUPTED = 130


class Commands(click.Group):
    """Commands by name; anything else is taken as the table or run file that `open` opens."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in COMMANDS:
            return None
        command = importlib.import_module(f"screener.cli.{cmd_name}").command
        assert isinstance(command, click.Command)
        return command

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        if args and args[0] not in COMMANDS:
            self._refuse_misspelt(ctx, args)
            return super().resolve_command(ctx, ["open", *args])
        return super().resolve_command(ctx, args)

    def _refuse_misspelt(self, ctx: click.Context, args: list[str]) -> None:
        """Raise UsageError when the first of several words is neither a command nor a file."""
        word, more = args[0], [arg for arg in args[1:] if not arg.startswith("-")]
        if more and not word.startswith("-") and not Path(word).exists():
            ctx.fail(f"There is no command and no file {word!r}. Commands: {', '.join(COMMANDS)}.")

    def parse_args(self, ctx: click.Context, args: list[str]) -> list[str]:
        """Options before the table belong to `open` too: `screener --alpha 0.01 TABLE`."""
        if args and args[0].startswith("-") and args[0] not in {"-h", "--help", "--version"}:
            args = ["open", *args]
        return super().parse_args(ctx, args)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


HELP = """Find the channels of a wide measurement table that must not be treated as normal, or as the distribution
expected of them.

TABLE_OR_RUN is a table (.csv .tsv .parquet .arrow .ndjson, text also .gz or .zst) or the run file of an earlier run.
Given alone it opens the screen; where there is no terminal, the summary and the flagged channels are printed.
A file named like a command is given as ./score.

\b
Exit codes: 0 done; 1 something is flagged (with --fail-on-flag), or an error left
channels unscored; 2 wrong usage; 3 table unusable; 4 run file or export unusable;
5 plan impossible; 130 interrupted.

Not flagged is not proof of normality. Figures for safety, health or regulated characteristics need the governing
standard, local codes and licensed or qualified practice."""


@click.group(
    cls=Commands,
    help=HELP,
    subcommand_metavar="TABLE_OR_RUN | COMMAND ...",
    no_args_is_help=True,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100},
)
@click.version_option(__version__, prog_name="screener")
def group() -> None:
    """The group itself does nothing."""


def main() -> None:
    """Run the command line and end the process with its exit code."""
    if isinstance(sys.stdout, io.TextIOWrapper):
        # What the encoding lacks is shown as an escape: a channel's name must not end the program.
        sys.stdout.reconfigure(errors="backslashreplace")
    code = _exit_code()
    if code == INTERRUPTED:
        # A block in hand may take long and its thread cannot be stopped; the run file is closed already.
        os._exit(code)
    sys.exit(code)


def _exit_code() -> int:
    """Run the command line; its exit code, with every failure told in a sentence."""
    try:
        return group.main(prog_name="screener", standalone_mode=False) or 0
    except click.exceptions.NoArgsIsHelpError as error:
        error.show()
        return error.exit_code
    except click.ClickException as error:
        context = error.ctx if isinstance(error, click.UsageError) else None
        hint = f" See `{context.command_path} --help`." if context is not None else ""
        tell(f"screener: {safe(error.format_message())}{hint}")
        return error.exit_code
    except ScreenerError as error:
        tell(f"screener: {error}")
        return error.exit_code
    except (click.Abort, KeyboardInterrupt):
        tell("screener: interrupted; the same command goes on where it was.")
        return INTERRUPTED
