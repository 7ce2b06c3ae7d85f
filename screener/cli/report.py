"""Results as lines of text for a terminal or a pipe."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from screener.cli.output import path_text
from screener.ui.numbers import count_text, p_text, r_text

if TYPE_CHECKING:
    import polars as pl

    from screener.runs import RunFile

SHOWN_AT_MOST = 200
"""Flagged rows printed before the rest is only counted."""


def summary_lines(run: "RunFile", results: "pl.DataFrame") -> list[str]:
    """What was screened, against what, and the outcome in one sentence."""
    from screener.runs import summarise

    plan = run.plan
    return [
        f"{path_text(run.facts.path)}: {run.facts.rows:,} rows x {len(run.facts.channels):,} channels",
        f"held against {plan.family}, alpha {plan.alpha:g}, control {plan.control}, {plan.positions} positions",
        summarise(results, run.facts, plan).sentence(),
    ]


def flagged_lines(results: "pl.DataFrame") -> list[str]:
    """The flagged channels as a table, smallest p first."""
    flagged = results.filter(results["verdict"] == "flagged").sort("p", "r")
    rows = [
        (row["channel"], count_text(row["n"]), r_text(row["r"]), r_text(row["critical_r"]), p_text(row["p"]))
        for row in flagged.head(SHOWN_AT_MOST).iter_rows(named=True)
    ]
    lines = aligned(("flagged channel", "n", "r", "critical r", "p"), rows) if rows else ["no channel is flagged"]
    more = flagged.height - len(rows)
    return [*lines, f"... and {more:,} more; `screener flagged` prints all names"] if more > 0 else lines


def aligned(head: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Columns of text, the first to the left and the others to the right."""
    widths = [max(len(line[i]) for line in (head, *rows)) for i in range(len(head))]
    return [
        "  ".join([line[0].ljust(widths[0]), *(cell.rjust(w) for cell, w in zip(line[1:], widths[1:], strict=True))])
        for line in (head, *rows)
    ]
