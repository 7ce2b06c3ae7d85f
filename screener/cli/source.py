"""Where the results of a command come from: a run file as it is, or a table that is scored first."""

import shlex
from collections.abc import Callable, Generator
from dataclasses import fields
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from screener.cli.options import plan_from, refuse_plan_for_run
from screener.cli.output import tell
from screener.errors import TableError
from screener.records import Event, Plan

if TYPE_CHECKING:
    import polars as pl

    from screener.cli.progress import Begin
    from screener.runs import RunFile

STORE_HEAD = b"SQLite format 3\x00"
"""How every run file begins; what begins otherwise is known for a table without loading anything heavy."""
RUN_SUFFIX = ".run"


def is_run(path: Path) -> bool:
    """Whether the path holds a run file, of any schema."""
    try:
        if not path.is_file():  # opening a pipe would wait, and take from it
            return False
        with path.open("rb") as file:
            if file.read(len(STORE_HEAD)) != STORE_HEAD:
                return False
    except OSError:
        return False
    from screener.runs import is_run_file

    return is_run_file(path)


def finished_run(ctx: click.Context, path: Path, given: dict[str, Any], run_path: Path | None = None) -> "RunFile":
    """The run of a table or of a run file, for reading; a table is scored first, with progress on standard error."""
    from screener.runs import RunFile

    if is_run(path):
        refuse_plan_for_run(ctx, path)
        run = RunFile.open(path, read_only=True)
        tell_what_is_missing(run)
        return run
    return RunFile.open(scored(path, given, run_path), read_only=True)


def scored(path: Path, given: dict[str, Any], run_path: Path | None) -> Path:
    """Score a table; the path of its run file."""
    from screener.cli.progress import watched

    return watched(beginning(path, given, run_path)).run_path


def beginning(path: Path, given: dict[str, Any], run_path: Path | None) -> "Begin":
    """What begins the run of a table when it is called with a function that says whether to stop."""
    plan = plan_from(given)

    def begin(cancelled: Callable[[], bool]) -> Generator[Event, None, None]:
        from screener.runs import RunFile
        from screener.screening.start import start
        from screener.screening.workers import usable_cores

        try:
            yield from start(path, plan, run_path, jobs=given["jobs"] or usable_cores(), cancelled=cancelled)
        except TableError:
            if path.suffix == RUN_SUFFIX:
                # Named like a run file and no table: what ails it as a run file is the better answer.
                RunFile.open(path, read_only=True).close()
            raise

    return begin


def tell_what_is_missing(run: "RunFile") -> None:
    """Say on standard error when a run was stopped before its end, or lost channels to an error."""
    tried, total = run.results().height, len(run.facts.channels)
    lost = tried - _scored_channels(run)
    if tried < total:
        tell(f"screener: this run was stopped after {tried:,} of {total:,} channels; {again(run)} goes on.")
    if lost:
        tell(f"screener: an error left {lost:,} of {total:,} channels unscored; {again(run)} tries them again.")


def again(run: "RunFile") -> str:
    """The command that goes on with a run."""
    plan, usual = run.plan, Plan()
    words = ["screener", "score", str(run.facts.path)]
    for field in fields(Plan):
        value = getattr(plan, field.name)
        if value != getattr(usual, field.name):
            option = f"--{field.name.replace('_', '-')}"
            words += [f"{option}={one}" for one in (value if isinstance(value, tuple) else (value,))]
    command = shlex.join([*words, "-o", str(run.path)])
    return f"`{command}`" if command.isprintable() else "`screener score` with the same table and options"


def exit_code(run: "RunFile", results: "pl.DataFrame", *, fail_on_flag: bool = False) -> int:
    """1 when an error left channels unscored, or when something is flagged and that was asked for; else 0."""
    flagged = fail_on_flag and bool(results["verdict"].eq("flagged").any())
    return int(flagged or _scored_channels(run) < results.height)


def _scored_channels(run: "RunFile") -> int:
    """Channels whose block came through, whether it could judge them or not."""
    return len(run.channels_done())
