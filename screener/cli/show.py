"""`screener show`: one channel in numbers and as a text plot."""

import difflib
import os
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from screener.cli.options import TABLE_OR_RUN, plan_options

if TYPE_CHECKING:
    from screener.runs import RunFile


@click.command()
@TABLE_OR_RUN
@click.argument("channel")
@click.option("--against", metavar="FAMILY", help="Family of the plot.  [default: the one held against]")
@click.option("--width", type=click.IntRange(20, 1000), help="Cells across.  [default: the terminal's, at most 100]")
@click.option("--height", type=click.IntRange(6, 500), default=22, show_default=True, help="Lines of the plot.")
@click.option("--ascii", "plain", is_flag=True, help="Draw with ASCII characters only.")
@plan_options
@click.pass_context
def command(ctx: click.Context, /, path: Path, channel: str, *, plain: bool, **given: Any) -> None:
    """Print the numbers of CHANNEL against every family, and its quantile plot: actual against expected."""
    from screener.cli.source import finished_run

    with finished_run(ctx, path, given) as run:
        position = _position(run, channel)
        family = _family(given["against"] or run.plan.family)
        lines = [*_numbers(run, position), "", *_families(run, position), ""]
        plain = plain or not _draws_unicode()
        lines += _plot(run, position, family, given["width"] or _width(), given["height"], plain=plain)
    click.echo("\n".join(line.rstrip() for line in lines))


def _position(run: "RunFile", name: str) -> int:
    """Where the channel stands; by its exact name, or by the only name that holds the text.

    Raises: UsageError when there is no such channel, or several.
    """
    names = [channel.name for channel in run.facts.channels]
    if name in names:
        return names.index(name)
    holding = [candidate for candidate in names if name.lower() in candidate.lower()]
    if len(holding) == 1:
        return names.index(holding[0])
    near = holding[:5] or difflib.get_close_matches(name, names, n=5, cutoff=0.4) or names[:5]
    problem = f"{len(holding)} channels match {name!r}" if holding else f"There is no channel {name!r}"
    aside = [column for column in run.facts.set_aside if column.name == name]
    if aside:
        raise click.UsageError(f"Column {name!r} was set aside: {aside[0].reason}.")
    raise click.UsageError(f"{problem}; there are for instance {', '.join(map(repr, near))}.")


def _family(name: str) -> str:
    from screener.stats.families import family_named

    return family_named(name).name


def _numbers(run: "RunFile", position: int) -> list[str]:
    from screener.cli.report import p_text

    results = run.results()
    found = results.filter(results["position"] == position)
    name = run.facts.channels[position].name
    if found.is_empty():
        return [f"{name}: not scored yet; the run was stopped before it"]
    row = found.row(0, named=True)
    head = f"{row['channel']}: {row['n']:,} readings, {row['missing']:,} missing"
    if row["verdict"] == "not scored":
        return [head, f"not scored: {row['reason']}"]
    sign = "<" if row["r"] < row["critical_r"] else ">="
    return [
        head,
        f"{row['verdict']} against {row['family']} at alpha {run.plan.alpha:g}: "
        f"r {row['r']:.6f} {sign} critical {row['critical_r']:.6f}",
        f"p {p_text(row['p'])}, q {p_text(row['q'])}, departure size {row['departure_size']:.4f} "
        "(rms distance from the line, in standard deviations)",
    ]


def _families(run: "RunFile", position: int) -> list[str]:
    from screener.cli.report import aligned, p_text

    rows = [
        (fit["family"], "-", "-", "-", "-", "-", fit["note"] or "-")
        if fit["r"] is None
        else (
            fit["family"],
            f"{fit['r']:.6f}",
            f"{fit['critical_r']:.6f}",
            p_text(fit["p"]) + ("*" if fit["extrapolated"] else ""),
            f"{fit['location']:.6g}",
            f"{fit['scale']:.6g}",
            "",
        )
        for fit in run.fits(position).iter_rows(named=True)
    ]
    if not rows:
        return []
    lines = aligned(("family", "r", "critical r", "p", "location", "scale", ""), rows)
    lines.append("location and scale of a family on the log axis are those of ln x")
    if any(row[3].endswith("*") for row in rows):
        lines.append("* beyond what was simulated: from the fitted tail")
    return lines


def _plot(run: "RunFile", position: int, family: str, width: int, height: int, *, plain: bool) -> list[str]:
    import numpy as np

    from screener.plots import Charset, quantile_plot, quantile_view

    points = run.points(position)
    fits = run.fits(position)
    fit = fits.filter(fits["family"] == family)
    location, scale = (fit[0, "location"], fit[0, "scale"]) if fit.height else (None, None)
    view = quantile_view(
        points,
        _count(run, position),
        family,
        run.plan.positions,
        np.nan if location is None else location,
        np.nan if scale is None else scale,
    )
    return quantile_plot(view, width=width, height=height, charset=Charset.ASCII if plain else Charset.UNICODE)


def _count(run: "RunFile", position: int) -> int:
    results = run.results()
    found = results.filter(results["position"] == position)
    return int(found[0, "n"]) if found.height else 0


def _width() -> int:
    return min(100, os.get_terminal_size().columns if sys.stdout.isatty() else 80)


def _draws_unicode() -> bool:
    return (sys.stdout.encoding or "").lower().replace("-", "") == "utf8"
