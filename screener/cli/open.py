"""`screener open`, or just `screener TABLE_OR_RUN`: the screen."""

import sys
from pathlib import Path
from typing import Any

import click

from screener.cli.options import TABLE_OR_RUN, plan_from, plan_options, refuse_plan_for_run


@click.command()
@TABLE_OR_RUN
@click.option("-o", "--output", "run_path", type=click.Path(path_type=Path), help="Run file to write or to go on with.")
@plan_options
@click.pass_context
def command(ctx: click.Context, /, path: Path, run_path: Path | None, **given: Any) -> None:
    """Open the screen on TABLE_OR_RUN; without a terminal, print the summary and the flagged channels."""
    if sys.stdin.isatty() and sys.stdout.isatty():
        ctx.exit(_screen(ctx, path, run_path, given))
    _print(ctx, path, run_path, given)


def _screen(ctx: click.Context, path: Path, run_path: Path | None, given: dict[str, Any]) -> int:
    """Run the screen; its exit code."""
    from screener.runs import is_run_file
    from screener.ui import Source, run_screen

    if is_run_file(path):
        refuse_plan_for_run(ctx, path)
        return run_screen(Source(title=str(path), start=None, run_path=path))
    plan = plan_from(given)

    def begin(cancelled: Any) -> Any:
        from screener.screening.start import start
        from screener.screening.workers import usable_cores

        return start(path, plan, run_path, jobs=given["jobs"] or usable_cores(), cancelled=cancelled)

    return run_screen(Source(title=str(path), start=begin, run_path=None))


def _print(ctx: click.Context, path: Path, run_path: Path | None, given: dict[str, Any]) -> None:
    from screener.cli.report import flagged_lines, summary_lines
    from screener.cli.source import finished_run

    with finished_run(ctx, path, given, run_path) as run:
        results = run.results()
        click.echo("\n".join([*summary_lines(run, results), "", *flagged_lines(results)]))
