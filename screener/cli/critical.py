"""`screener critical`: critical values of r."""

import click


@click.command()
@click.argument("n", nargs=-1, required=True, type=click.IntRange(min=3))
@click.option("--family", default="normal", show_default=True, help="Family of the null.")
@click.option("--alpha", multiple=True, type=float, default=(0.05, 0.01), show_default=True, help="May be repeated.")
@click.option("--positions", default="filliben", show_default=True, help="Plotting positions.")
@click.option(
    "--format", "form", type=click.Choice(["text", "csv", "json"]), default="text", show_default=True, help="Output."
)
def command(n: tuple[int, ...], family: str, alpha: tuple[float, ...], positions: str, form: str) -> None:
    """Print the r below which N readings of a family fall with probability alpha.

    The readings are taken as independent, unrounded and complete.
    """
    import json

    from screener.cli.output import put
    from screener.errors import PlanError
    from screener.screening.null_source import null_table
    from screener.stats.families import family_named
    from screener.ui.numbers import r_text

    if not all(0.0 < a < 1.0 for a in alpha):
        raise PlanError("Couldn't use that alpha: it must lie between 0 and 1, such as 0.05.")
    chosen = family_named(family)
    table = null_table(positions)
    values = {size: [table.critical(chosen.null_name, size, a) for a in alpha] for size in n}
    if form == "json":
        rows = [
            {"n": size, "alpha": a, "critical_r": r} for size in n for a, r in zip(alpha, values[size], strict=True)
        ]
        put([json.dumps({"family": chosen.name, "positions": table.rule, "critical": rows}, indent=1)])
    elif form == "csv":
        put(["n," + ",".join(f"alpha_{a:g}" for a in alpha), *(f"{s}," + ",".join(map(repr, values[s])) for s in n)])
    else:
        head = f"{'n':>10}" + "".join(f"{f'alpha {a:g}':>14}" for a in alpha)
        lines = (f"{size:>10,}" + "".join(f"{r_text(r):>14}" for r in values[size]) for size in n)
        put([f"critical r, {chosen.name}, {table.rule} positions", head, *lines])
