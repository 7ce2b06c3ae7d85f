"""`screener flagged`: the names of the flagged channels, for the next program."""

from pathlib import Path
from typing import Any

import click

from screener.cli.options import FAIL_ON_FLAG, TABLE_OR_RUN, plan_options


@click.command()
@TABLE_OR_RUN
@FAIL_ON_FLAG
@plan_options
@click.pass_context
def command(ctx: click.Context, /, path: Path, *, fail_on_flag: bool, **given: Any) -> None:
    """Print the names of the flagged channels, one a line and nothing else, in table order."""
    from screener.cli.output import put
    from screener.cli.source import exit_code, finished_run

    with finished_run(ctx, path, given) as run:
        results = run.results()
        put(results.filter(results["verdict"] == "flagged")["channel"])
        ctx.exit(exit_code(run, results, fail_on_flag=fail_on_flag))
