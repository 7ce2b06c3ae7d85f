"""`screener nulls`: what the null tables hold, and making them."""

from pathlib import Path

import click

from screener.cli.options import JOBS


@click.group()
def command() -> None:
    """Show or build the null tables: how r falls when the readings really come from a family."""


@command.command()
@click.option("--positions", default="filliben", show_default=True, help="Plotting positions.")
def info(positions: str) -> None:
    """Show what a null table holds, how it was made, and its Monte Carlo error."""
    from screener.screening.null_source import null_table

    table = null_table(positions)
    click.echo(f"null table version {table.version}, {table.rule} positions")
    click.echo(f"families: {', '.join(table.families)}")
    click.echo("the others share one of these: its mirror image, or its logarithm")
    click.echo(f"{table.sizes.size} sample sizes from {table.sizes[0]} to {table.sizes[-1]:,}\n")
    click.echo(f"{'n':>8} {'samples':>9} {'s.e. of alpha 5 %':>18} {'s.e. of alpha 1 %':>18} {'counted down to p':>18}")
    for size, samples, floor in zip(table.sizes, table.samples, table.floor, strict=True):
        errors = "".join(f"{100 * (a * (1 - a) / samples) ** 0.5:>14.3f} pp. " for a in (0.05, 0.01))
        click.echo(f"{size:>8,} {samples:>9,}{errors} {floor:>17g}")


@command.command()
@click.option("--positions", default="filliben", show_default=True, help="Plotting positions.")
@click.option("-o", "--output", type=click.Path(path_type=Path), help="File to write.  [default: the user's cache]")
@click.option("--seed", type=int, default=20261, show_default=True, help="Seed.")
@click.option(
    "--share",
    type=click.FloatRange(min=0.0, max=1.0, min_open=True),
    default=1.0,
    show_default=True,
    help="Share of the full number of samples; less is faster and less certain.",
)
@JOBS
def build(positions: str, output: Path | None, seed: int, share: float, jobs: int | None) -> None:
    """Simulate a null table; a build that was stopped goes on where it was."""
    from screener.screening.null_build import BuildPlan, build, built_table, write_table
    from screener.screening.null_source import built_path, null_folder
    from screener.screening.workers import usable_cores
    from screener.stats.null.grid import SIZES, samples_at
    from screener.stats.positions import rule_key

    rule = rule_key(positions)
    samples = {n: max(2000, int(share * samples_at(n))) for n in SIZES}
    plan = BuildPlan(rule, samples, seed, null_folder() / "parts")
    for node in build(plan, jobs or usable_cores()):
        click.echo(f"n = {node.n:,}: {node.done} of {node.total} sizes, {node.work_done:.0%} of the work", err=True)
    path = output or built_path(rule)
    path.parent.mkdir(parents=True, exist_ok=True)
    write_table(built_table(plan), path)
    click.echo(f"null table for {rule} positions written to {path}", err=True)
