"""`screener score`: a run without a screen."""

from pathlib import Path
from typing import Any

import click

from screener.cli.options import FAIL_ON_FLAG, RUN_PATH, plan_options


@click.command()
@click.argument("table", type=click.Path(path_type=Path))
@RUN_PATH
@FAIL_ON_FLAG
@plan_options
@click.pass_context
def command(ctx: click.Context, /, table: Path, run_path: Path | None, *, fail_on_flag: bool, **given: Any) -> None:
    """Score TABLE and store the results in a run file; the summary goes to standard output.

    The run file lies beside the table unless -o names it. A run that was stopped goes on where it was.
    """
    from screener.cli.output import put
    from screener.cli.source import again, exit_code, is_run, scored

    if is_run(table):
        from screener.runs import RunFile

        with RunFile.open(table, read_only=True) as run:
            raise click.UsageError(f"{str(table)!r} is a run file, not a table; {again(run)} goes on with it.")
    path = scored(table, given, run_path)
    from screener.cli.report import summary_lines
    from screener.runs import RunFile

    with RunFile.open(path, read_only=True) as run:
        results = run.results()
        put(summary_lines(run, results))
        ctx.exit(exit_code(run, results, fail_on_flag=fail_on_flag))
