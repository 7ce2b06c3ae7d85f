"""`screener export`: the results in a file, by its extension."""

from pathlib import Path
from typing import Any

import click

from screener.cli.options import TABLE_OR_RUN, plan_options


@click.command()
@TABLE_OR_RUN
@click.argument("file", type=click.Path(path_type=Path))
@click.option("--flagged-only", is_flag=True, help="Write only the flagged channels.")
@plan_options
@click.pass_context
def command(ctx: click.Context, /, path: Path, file: Path, *, flagged_only: bool, **given: Any) -> None:
    """Write one row per channel to FILE: .csv, .parquet or .json.

    In a CSV file, text that a spreadsheet would run as a formula gets a leading apostrophe; Parquet and JSON are exact.
    """
    from screener.cli.source import finished_run
    from screener.runs import export

    with finished_run(ctx, path, given) as run:
        results = run.results()
        if flagged_only:
            results = results.filter(results["verdict"] == "flagged")
        export(results, run.facts, run.plan, file)
    click.echo(f"{results.height:,} channels written to {file}", err=True)
