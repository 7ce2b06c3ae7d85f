"""Results as lines of text for a terminal or a pipe."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

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
        f"{run.facts.path}: {run.facts.rows:,} rows x {len(run.facts.channels):,} channels",
        f"held against {plan.family}, alpha {plan.alpha:g}, control {plan.control}, {plan.positions} positions",
        summarise(results, run.facts, plan).sentence(),
    ]


def flagged_lines(results: "pl.DataFrame") -> list[str]:
    """The flagged channels as a table, smallest p first."""
    flagged = results.filter(results["verdict"] == "flagged").sort("p", "r")
    rows = [
        (row["channel"], f"{row['n']:,}", f"{row['r']:.5f}", f"{row['critical_r']:.5f}", p_text(row["p"]))
        for row in flagged.head(SHOWN_AT_MOST).iter_rows(named=True)
    ]
    lines = aligned(("flagged channel", "n", "r", "critical r", "p"), rows) if rows else ["no channel is flagged"]
    more = flagged.height - len(rows)
    return [*lines, f"... and {more:,} more; `screener flagged` prints all names"] if more > 0 else lines


def p_text(p: float | None) -> str:
    """A p that never reads as zero."""
    if p is None:
        return "-"
    return f"{p:.3f}" if p >= 0.001 else f"{p:.1e}"


def aligned(head: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Columns of text, the first to the left and the others to the right."""
    widths = [max(len(line[i]) for line in (head, *rows)) for i in range(len(head))]
    return [
        "  ".join([line[0].ljust(widths[0]), *(cell.rjust(w) for cell, w in zip(line[1:], widths[1:], strict=True))])
        for line in (head, *rows)
    ]
