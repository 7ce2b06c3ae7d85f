"""`screener open`, or just `screener TABLE_OR_RUN`: the screen."""

from pathlib import Path
from typing import Any

import click

from screener.cli.options import RUN_PATH, TABLE_OR_RUN, plan_options, refuse_plan_for_run


@click.command()
@TABLE_OR_RUN
@RUN_PATH
@plan_options
@click.pass_context
def command(ctx: click.Context, /, path: Path, run_path: Path | None, **given: Any) -> None:
    """Open the screen on TABLE_OR_RUN; without a terminal, print the summary and the flagged channels."""
    from screener.cli.output import on_terminal

    ctx.exit(_screen(ctx, path, run_path, given) if on_terminal() else _print(ctx, path, run_path, given))


def _screen(ctx: click.Context, path: Path, run_path: Path | None, given: dict[str, Any]) -> int:
    """Run the screen; its exit code."""
    from screener.cli.output import path_text
    from screener.cli.source import beginning, is_run
    from screener.ui import Source, run_screen

    if is_run(path):
        refuse_plan_for_run(ctx, path)
        return run_screen(Source(title=path_text(path), start=None, run_path=path))
    return run_screen(Source(title=path_text(path), start=beginning(path, given, run_path), run_path=None))


def _print(ctx: click.Context, path: Path, run_path: Path | None, given: dict[str, Any]) -> int:
    """Print what a pipe can take of the screen; the exit code."""
    from screener.cli.output import put
    from screener.cli.report import flagged_lines, summary_lines
    from screener.cli.source import exit_code, finished_run

    with finished_run(ctx, path, given, run_path) as run:
        results = run.results()
        put([*summary_lines(run, results), "", *flagged_lines(results)])
        return exit_code(run, results)
