"""`screener compare`: what changed between two runs of the same channels."""

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from screener.errors import RunFileError

if TYPE_CHECKING:
    import polars as pl

SORTS = ("change", "channel", "table")


@click.command()
@click.argument("old", type=click.Path(path_type=Path))
@click.argument("new", type=click.Path(path_type=Path))
@click.option("-o", "--output", type=click.Path(path_type=Path), help="Write to this .csv, .parquet or .json instead.")
@click.option("--all", "everything", is_flag=True, help="Also the channels that are the same.")
@click.option("--sort", type=click.Choice(SORTS), default="change", show_default=True, help="Order of the rows.")
@click.option("--screen/--no-screen", default=None, help="Show it on a screen.  [default: on a terminal]")
@click.pass_context
def command(
    ctx: click.Context,
    old: Path,
    new: Path,
    output: Path | None,
    sort: str,
    *,
    everything: bool,
    screen: bool | None,
) -> None:
    """Compare the run files OLD and NEW: channels newly flagged, cleared, changed, missing, new.

    Channels are matched by name. A channel has changed when its r differs by more than chance explains: the difference
    against its standard error in both runs, adjusted for the number of channels (Benjamini-Hochberg), below the alpha
    of NEW. The error of a channel that follows itself in time is that of its effective number of readings.
    """
    from screener.cli.output import on_terminal, path_text, put, tell
    from screener.runs import RunFile, compared, export_comparison
    from screener.runs.comparing import sentence, unlike

    with RunFile.open(_run(old), read_only=True) as before, RunFile.open(_run(new), read_only=True) as now:
        rows, otherwise = _sorted(compared(before, now), sort), unlike(before, now)
    if otherwise:
        tell(f"screener: {otherwise}")
    told = rows if everything else rows.filter(rows["change"] != "same")
    if output is not None:
        export_comparison(told, output)
        tell(f"{told.height:,} channels written to {path_text(output)}")
    elif on_terminal() if screen is None else screen:
        from screener.ui.comparison import compare_on_screen

        ctx.exit(compare_on_screen(rows, f"{path_text(old)} -> {path_text(new)}", otherwise))
    else:
        put([sentence(rows), *([""] if told.height else []), *lines(told.iter_rows(named=True))])


def lines(rows: Any) -> list[str]:
    """The rows as columns of text; nothing when there are none."""
    from screener.cli.report import aligned
    from screener.ui.screens.comparison import CELLS

    cells = [tuple(text(row) for _, _, text in CELLS) for row in rows]
    return [line.rstrip() for line in aligned([title for title, _, _ in CELLS], cells)] if cells else []


def _run(path: Path) -> Path:
    """The path, if it is not a table; raises RunFileError otherwise."""
    from screener.cli.source import is_run

    if path.is_file() and not is_run(path):
        raise RunFileError(
            f"Couldn't compare {str(path)!r}: it is not a run file. Score it first: `screener score` makes one."
        )
    return path


def _sorted(rows: "pl.DataFrame", sort: str) -> "pl.DataFrame":
    from screener.runs.comparing import by_weight

    if sort == "change":
        return by_weight(rows)
    return rows.sort("channel", maintain_order=True) if sort == "channel" else rows
