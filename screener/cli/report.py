"""Results as lines of text for a terminal or a pipe."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from screener.cli.output import path_text, safe
from screener.records import SourceFile, TableFacts
from screener.ui.numbers import count_text, p_text, r_text

if TYPE_CHECKING:
    import polars as pl

    from screener.runs import RunFile

SHOWN_AT_MOST = 200
"""Flagged rows printed before the rest is only counted."""
SET_ASIDE_SHOWN = 8
"""Columns set aside that are named; the rest are counted."""
FILES_SHOWN = 4


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


def reading_lines(facts: TableFacts) -> list[str]:
    """How the table was read: its dialect and files, the reader's remarks, the columns set aside."""
    lines = [f"read as: {safe(facts.dialect)}"] if facts.dialect else []
    if facts.files:
        named = [f"{safe(file.name)} ({rows_of(file)})" for file in facts.files[:FILES_SHOWN]]
        more = [f"{len(facts.files) - FILES_SHOWN:,} more"] if len(facts.files) > FILES_SHOWN else []
        lines.append(f"files: {', '.join([*named, *more])}")
    lines += [safe(remark) for remark in facts.remarks]
    lines += [f"set aside: {safe(one.name)} ({safe(one.reason)})" for one in facts.set_aside[:SET_ASIDE_SHOWN]]
    if len(facts.set_aside) > SET_ASIDE_SHOWN:
        lines.append(f"set aside: {len(facts.set_aside) - SET_ASIDE_SHOWN:,} more columns; key i of the screen has all")
    return lines


def rows_of(file: SourceFile) -> str:
    """Which rows of the table a file gave."""
    return f"rows {file.first_row + 1:,} to {file.first_row + file.rows:,}" if file.rows else "no rows"


def aligned(head: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Columns of text, the first to the left and the others to the right."""
    widths = [max(len(line[i]) for line in (head, *rows)) for i in range(len(head))]
    return [
        "  ".join([line[0].ljust(widths[0]), *(cell.rjust(w) for cell, w in zip(line[1:], widths[1:], strict=True))])
        for line in (head, *rows)
    ]
