"""`screener flagged`: the names of the flagged channels, for the next program."""

from pathlib import Path
from typing import Any

import click

from screener.cli.options import TABLE_OR_RUN, plan_options


@click.command()
@TABLE_OR_RUN
@click.option("--fail-on-flag", is_flag=True, help="Exit with 1 when a channel is flagged.")
@plan_options
@click.pass_context
def command(ctx: click.Context, /, path: Path, *, fail_on_flag: bool, **given: Any) -> None:
    """Print the names of the flagged channels, one a line and nothing else, in table order."""
    from screener.cli.source import finished_run

    with finished_run(ctx, path, given) as run:
        results = run.results()
        names = results.filter(results["verdict"] == "flagged")["channel"].to_list()
    for name in names:
        click.echo(name)
    if names and fail_on_flag:
        ctx.exit(1)
