"""A finished run for the commands that only read one: opened as it is, or scored from its table first."""

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from screener.cli.options import plan_from, refuse_plan_for_run

if TYPE_CHECKING:
    from screener.runs import RunFile


def finished_run(ctx: click.Context, path: Path, given: dict[str, Any], run_path: Path | None = None) -> "RunFile":
    """The run of a table or of a run file, for reading; a table is scored first, with progress on standard error."""
    from screener.runs import RunFile, is_run_file

    if is_run_file(path):
        refuse_plan_for_run(ctx, path)
        run = RunFile.open(path, read_only=True)
        tell_unfinished(run)
        return run
    return RunFile.open(scored(path, given, run_path), read_only=True)


def scored(path: Path, given: dict[str, Any], run_path: Path | None) -> Path:
    """Score a table; the path of its run file."""
    from screener.cli.progress import watched
    from screener.screening.start import start
    from screener.screening.workers import usable_cores

    jobs = given["jobs"] or usable_cores()
    return watched(start(path, plan_from(given), run_path, jobs=jobs)).run_path


def tell_unfinished(run: "RunFile") -> None:
    """Say on standard error when a run was stopped before its end."""
    if not run.finished:
        done, total = run.results().height, len(run.facts.channels)
        click.echo(
            f"screener: {run.path} was stopped after {done:,} of {total:,} channels; "
            f"`screener score {run.facts.path} -o {run.path}` goes on.",
            err=True,
        )
