"""`screener score`: a run without a screen."""

from pathlib import Path
from typing import Any

import click

from screener.cli.options import plan_options


@click.command()
@click.argument("table", type=click.Path(path_type=Path))
@click.option("-o", "--output", "run_path", type=click.Path(path_type=Path), help="Run file to write or to go on with.")
@click.option("--fail-on-flag", is_flag=True, help="Exit with 1 when a channel is flagged.")
@plan_options
@click.pass_context
def command(ctx: click.Context, /, table: Path, run_path: Path | None, *, fail_on_flag: bool, **given: Any) -> None:
    """Score TABLE and store the results in a run file; the summary goes to standard output.

    The run file lies beside the table unless -o names it. A run that was stopped goes on where it was.
    """
    from screener.cli.report import summary_lines
    from screener.cli.source import scored
    from screener.runs import RunFile

    with RunFile.open(scored(table, given, run_path), read_only=True) as run:
        results = run.results()
        click.echo("\n".join(summary_lines(run, results)))
        if fail_on_flag and results["verdict"].eq("flagged").any():
            ctx.exit(1)
