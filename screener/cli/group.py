"""The command group: commands are imported when asked for, and a table or run file alone is opened."""

import importlib
import os
import sys

import click

from screener import __version__
from screener.errors import ScreenerError

COMMANDS = {
    "open": "Open the screen on a table or a run file.",
    "score": "Score a table without a screen.",
    "flagged": "Print the names of the flagged channels.",
    "export": "Write the results to a file.",
    "show": "Print one channel: numbers and quantile plot.",
    "critical": "Print critical values of r.",
    "nulls": "Show or build the null tables.",
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
            return super().resolve_command(ctx, ["open", *args])
        return super().resolve_command(ctx, args)

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

\b
Exit codes: 0 done; 1 something is flagged (with --fail-on-flag); 2 wrong usage;
3 table unusable; 4 run file unusable; 5 plan impossible; 130 interrupted.

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
    try:
        group.main(prog_name="screener", standalone_mode=False)
    except click.exceptions.Exit as done:
        code = done.exit_code
    except click.ClickException as error:
        error.show()
        code = error.exit_code
    except ScreenerError as error:
        click.echo(f"screener: {error}", err=True)
        code = error.exit_code
    except (click.Abort, KeyboardInterrupt):
        click.echo("screener: interrupted.", err=True)
        code = INTERRUPTED
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        code = 0
    else:
        code = 0
    sys.exit(code)
