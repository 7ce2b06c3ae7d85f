"""`screener nulls`: what the null tables hold, and making them."""

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import click

from screener.cli.options import JOBS
from screener.errors import ScreenerError


@click.group()
def command() -> None:
    """Show or build the null tables: how r falls when the readings really come from a family."""


@command.command()
@click.option("--positions", default="filliben", show_default=True, help="Plotting positions.")
def info(positions: str) -> None:
    """Show what a null table holds, how it was made, and its Monte Carlo error."""
    from screener.cli.output import put
    from screener.screening.null_source import null_table

    table = null_table(positions)
    head = f"{'n':>8} {'samples':>9} {'s.e. of alpha 5 %':>18} {'s.e. of alpha 1 %':>18} {'counted down to p':>18}"
    lines = [
        f"null table version {table.version}, {table.rule} positions",
        f"families: {', '.join(table.families)}",
        "the others share one of these: its mirror image, or its logarithm",
        f"{table.sizes.size} sample sizes from {table.sizes[0]} to {table.sizes[-1]:,}",
        "",
        head,
    ]
    for size, samples, floor in zip(table.sizes, table.samples, table.floor, strict=True):
        errors = "".join(f"{100 * (a * (1 - a) / samples) ** 0.5:>14.3f} pp. " for a in (0.05, 0.01))
        lines.append(f"{size:>8,} {samples:>9,}{errors} {floor:>17g}")
    put(lines)


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
    from screener.cli.output import path_text, tell
    from screener.screening.null_build import BuildPlan, build, built_table, write_table
    from screener.screening.null_source import built_path, null_folder
    from screener.screening.workers import usable_cores
    from screener.stats.null.grid import SIZES, samples_at
    from screener.stats.positions import rule_key

    rule = rule_key(positions)
    samples = {n: max(2000, int(share * samples_at(n))) for n in SIZES}
    plan = BuildPlan(rule, samples, seed, null_folder() / "parts")
    path = output or built_path(rule)
    with _explained():
        path.parent.mkdir(parents=True, exist_ok=True)
        path.touch()
        for node in build(plan, jobs or usable_cores()):
            tell(f"n = {node.n:,}: {node.done} of {node.total} sizes, {node.work_done:.0%} of the work")
        write_table(built_table(plan), path)
    tell(f"null table for {rule} positions written to {path_text(path)}")


@contextmanager
def _explained() -> Iterator[None]:
    """Turn a refusal of the file system into one sentence."""
    try:
        yield
    except OSError as error:
        where = f" {error.filename!r}" if error.filename else ""
        raise ScreenerError(
            f"Couldn't write{where}: {error.strerror or error}. What was simulated is kept; "
            "give another place with -o, or another cache folder with XDG_CACHE_HOME."
        ) from error
