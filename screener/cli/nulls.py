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
    from screener.screening.null_source import held_nulls
    from screener.stats.null.matched import COEFFICIENTS, STEPS, samples_at

    nulls = held_nulls(positions)
    if nulls is None:
        raise ScreenerError(
            f"There are no null tables for {positions!r} positions yet: `screener nulls build --positions {positions}` "
            "makes them; a run under these positions simulates what it needs."
        )
    table = nulls.plain
    head = f"{'n':>8} {'samples':>9} {'s.e. of alpha 5 %':>18} {'s.e. of alpha 1 %':>18} {'counted down to p':>18}"
    lines = [
        f"null tables version {nulls.version}, {nulls.rule} positions; quantiles of ln(1 - r), simulated",
        f"families without shapes: {', '.join(table.families)};",
        "  smallest extreme value, lognormal, Weibull and log-logistic share one of these (mirror image or logarithm)",
        f"families with shapes, given the estimated shape: {', '.join(nulls.shaped)}",
        "p beyond what was counted is read from a fitted generalized Pareto tail and marked as extrapolated",
        "",
        "families without shapes",
        head,
    ]
    for size, samples, floor in zip(table.sizes, table.samples, table.floor, strict=True):
        errors = "".join(f"{100 * (a * (1 - a) / samples) ** 0.5:>14.3f} pp. " for a in (0.05, 0.01))
        lines.append(f"{size:>8,} {samples:>9,}{errors} {floor:>17g}")
    lines += ["", "families with shapes", f"{'n':>8} samples over all true shapes"]
    for row, size in enumerate(next(iter(nulls.shaped.values())).sizes):
        counts = sorted({int(shaped.samples[row]) for shaped in nulls.shaped.values()})
        lines.append(f"{size:>8,} {' or '.join(f'{count:,}' for count in counts)}")
    if nulls.matched is not None:
        sizes = nulls.matched.sizes
        lines += [
            "",
            f"normal in its own condition: {sizes.size} sizes from {sizes[0]} to {sizes[-1]:,}, "
            f"rounded to {STEPS[0]:g} to {STEPS[-1]:g} sd, AR(1) of 0 to {COEFFICIENTS[-1]:g}; "
            f"{samples_at(sizes[-1]):,} to {samples_at(sizes[0]):,} samples each",
        ]
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
    from screener.screening.null_build import build, parts, write_arrays
    from screener.screening.null_source import built_path, null_folder
    from screener.screening.workers import usable_cores
    from screener.stats.null.packing import matched_tasks, packed, tasks
    from screener.stats.positions import rule_key

    rule = rule_key(positions)
    wanted, folder = {**tasks(rule, seed, share), **matched_tasks(rule, seed, share)}, null_folder() / "parts"
    path = output or built_path(rule)
    with _explained():
        path.parent.mkdir(parents=True, exist_ok=True)
        path.open("ab").close()
        for part in build(wanted, folder, jobs or usable_cores()):
            tell(f"{part.name}: {part.done} of {part.total} parts, {part.work_done:.0%} of the work")
        write_arrays(packed(parts(wanted, folder), rule), path)
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
