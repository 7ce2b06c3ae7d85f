"""`screener export`: the results in a file, by its extension."""

from contextlib import suppress
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
    """Write one row per channel to FILE: .csv, .parquet or .json; or a report with plots: .md or .html.

    In a CSV file, text that a spreadsheet would run as a formula gets a leading apostrophe; Parquet and JSON are exact.
    """
    from screener.cli.output import path_text, tell
    from screener.cli.source import exit_code, finished_run
    from screener.runs import REPORTS, export
    from screener.ui.report import write_report

    _refuse_source(file, path)
    with finished_run(ctx, path, given) as run:
        _refuse_source(file, run.path, run.facts.path)
        results = run.results()
        rows = results.filter(results["verdict"] == "flagged") if flagged_only else results
        if file.suffix.lower() in REPORTS:
            write_report(run, rows, file)
        else:
            export(rows, run.facts, run.plan, file)
        tell(f"{rows.height:,} channels written to {path_text(file)}")
        ctx.exit(exit_code(run, results))


def _refuse_source(file: Path, *sources: Path) -> None:
    """Raise UsageError when the export would replace what it comes from."""
    for source in sources:
        with suppress(OSError):
            if file.samefile(source):
                raise click.UsageError(f"{str(file)!r} is what the results come from. Give another name to export to.")
