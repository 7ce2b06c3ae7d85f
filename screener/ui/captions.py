"""The sentences around the table: pure functions of what is known."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

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


def place_words(row: int, rows: int, *, flagged_only: bool, condition: str = "") -> str:
    """Where the cursor is, among which rows."""
    kind = "flagged" if flagged_only else "channels"
    where = f" where {shown(condition)}" if condition else ""
    return f"{row + 1:,} of {rows:,} {kind}{where}" if rows else f"no {kind}{where or ' yet'}"


def channel_words(channel: Mapping[str, Any] | None) -> str:
    """What else is to be said of a channel: why it is not scored or in which condition, the decision, the note."""
    if channel is None:
        return ""
    said = f"not scored: {shown(channel['reason'])}" if channel["reason"] else shown(channel["conditions"] or "")
    reason = f"   {said}" if said else ""
    decision = f"   {shown(channel['decision'])}" if channel["decision"] else ""
    note = f'   "{shown(channel["note"])}"' if channel["note"] else ""
    return reason + decision + note


def decided_words(decision: str, count: int) -> str:
    """What was just decided about how many channels."""
    about = "1 channel" if count == 1 else f"{count:,} channels"
    return f"{decision or 'decision taken back'}: {about} (z undoes)"
