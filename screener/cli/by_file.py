"""One channel file by file, for a table joined from several."""

from typing import TYPE_CHECKING

import click

from screener.cli.output import safe
from screener.cli.report import aligned, rows_of

if TYPE_CHECKING:
    from screener.runs import RunFile


def file_lines(run: "RunFile", position: int) -> list[str]:
    """n, mean and standard deviation of the channel in each file, and how much of its variance lies between files.

    Raises: UsageError when the run is of one file, or does not keep these figures.
    """
    from screener.stats.parts import share_between
    from screener.ui.numbers import count_text, reading_text

    files, kept = run.facts.files, run.by_file(position)
    if not files:
        raise click.UsageError("--by file is for a table of several files, such as 'run_*.csv'; this run is of one.")
    if not len(kept):
        raise click.UsageError("This run file does not keep the channel file by file. Score the table again.")
    rows = [
        (safe(file.name), rows_of(file), count_text(int(n)), reading_text(mean), reading_text(sd))
        for file, (n, mean, sd) in zip(files, kept.tolist(), strict=True)
    ]
    share = share_between(kept)
    said = [f"{100.0 * share:.2g} % of the sum of squares lies between the files"] if share >= 0.0 else []
    return [*aligned(("file", "rows", "n", "mean", "sd"), rows), *said]
