"""The sentences around the table: pure functions of what is known."""

from __future__ import annotations

from screener.records import Control, Plan, TableFacts
from screener.ui.columns import column_named
from screener.ui.shown import shown

CONTROL_WORDS = {Control.EACH: "each", Control.FDR: "false discovery rate"}
COLUMN_WORDS = {"verdict": "verdict", "remark": "closest or reason", "departure_size": "distance off the line"}


def title(facts: TableFacts, plan: Plan) -> str:
    """File, size, and what the channels are held against."""
    size = f"{facts.rows:,} rows x {len(facts.channels):,} channels"
    return f"{shown(facts.path.name)}   {size}   {plan.family}   alpha {plan.alpha:g} {CONTROL_WORDS[plan.control]}"


def order_words(sort: str | None, *, falling: bool) -> str:
    """By what the rows are sorted."""
    if sort is None:
        return "table order, reversed" if falling else "table order"
    return f"sorted by {COLUMN_WORDS.get(sort, column_named(sort).title)}, {'falling' if falling else 'rising'}"


def place_words(row: int, rows: int, *, flagged_only: bool) -> str:
    """Where the cursor is."""
    kind = "flagged" if flagged_only else "channels"
    return f"{row + 1:,} of {rows:,} {kind}" if rows else f"no {kind} yet"
