"""`screener critical`: critical values of r."""

from typing import TYPE_CHECKING

import click

from screener.errors import PlanError

if TYPE_CHECKING:
    from screener.stats.families import Family
    from screener.stats.null.nulls import Nulls


@click.command()
@click.argument("n", nargs=-1, required=True, type=click.IntRange(min=3))
@click.option("--family", default="normal", show_default=True, help="Family of the null.")
@click.option("--shape", multiple=True, type=float, help="Estimated shape, once for each shape of the family.")
@click.option("--alpha", multiple=True, type=float, default=(0.05, 0.01), show_default=True, help="May be repeated.")
@click.option("--positions", default="filliben", show_default=True, help="Plotting positions.")
@click.option(
    "--format", "form", type=click.Choice(["text", "csv", "json"]), default="text", show_default=True, help="Output."
)
def command(
    n: tuple[int, ...], family: str, shape: tuple[float, ...], alpha: tuple[float, ...], positions: str, form: str
) -> None:
    """Print the r below which N readings of a family fall with probability alpha.

    The readings are taken as independent, unrounded and complete.
    """
    import json

    from screener.cli.output import put
    from screener.stats.families import family_named
    from screener.ui.numbers import r_text

    if not all(0.0 < a < 1.0 for a in alpha):
        raise PlanError("Couldn't use that alpha: it must lie between 0 and 1, such as 0.05.")
    chosen = family_named(family)
    nulls = _nulls(positions, max(n))
    values = dict(zip(n, _critical(nulls, chosen, shape, n, alpha), strict=True))
    about = {"family": chosen.name, "shapes": list(shape), "positions": nulls.rule}
    if form == "json":
        rows = [{"n": s, "alpha": a, "critical_r": r} for s in n for a, r in zip(alpha, values[s], strict=True)]
        put([json.dumps({**about, "critical": rows}, indent=1)])
    elif form == "csv":
        put(["n," + ",".join(f"alpha_{a:g}" for a in alpha), *(f"{s}," + ",".join(map(repr, values[s])) for s in n)])
    else:
        named = "".join(f", {name} {value:g}" for name, value in zip(chosen.shapes.names, shape, strict=True))
        head = f"{'n':>10}" + "".join(f"{f'alpha {a:g}':>14}" for a in alpha)
        lines = (f"{size:>10,}" + "".join(f"{r_text(r):>14}" for r in values[size]) for size in n)
        put([f"critical r, {chosen.name}{named}, {nulls.rule} positions", head, *lines])


def _nulls(positions: str, largest: int) -> "Nulls":
    """The null tables, simulated first where they are not held, with progress on standard error."""
    from screener.cli.progress import finished
    from screener.screening.null_source import nulls_for
    from screener.screening.workers import usable_cores

    nulls = finished(nulls_for(positions, largest, usable_cores()))
    assert nulls is not None
    return nulls


def _critical(
    nulls: "Nulls", family: "Family", shape: tuple[float, ...], n: tuple[int, ...], alpha: tuple[float, ...]
) -> list[list[float]]:
    """Critical values, by n and alpha."""
    import numpy as np

    if len(shape) != family.shape_count:
        names = ", ".join(family.shapes.names) or "none"
        raise PlanError(
            f"Couldn't tell which {family.name} distribution is meant: it has {family.shape_count} shapes ({names}), "
            f"and --shape was given {len(shape)} times."
        )
    steps = family.shapes.steps(*shape)
    rows, row = nulls.rows(family, np.array(n), np.tile([*steps, *[np.nan] * (2 - steps.size)], (len(n), 1)))
    by_alpha = [rows.critical(a)[row].tolist() for a in alpha]
    return [list(values) for values in zip(*by_alpha, strict=True)]
