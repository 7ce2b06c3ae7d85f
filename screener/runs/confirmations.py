"""Confirmations of single channels, stored and read back."""

from __future__ import annotations

import math
import sqlite3
from dataclasses import astuple

from screener.records import Confirmation
from screener.runs.text import visible


def store_confirmation(connection: sqlite3.Connection, position: int, confirmation: Confirmation) -> None:
    """Write it in place of an earlier one of the channel; the caller holds the transaction."""
    connection.execute(
        "INSERT OR REPLACE INTO confirmation (position, family, r, samples, as_small, p, critical_r)"
        " VALUES (?, ?, ?, ?, ?, ?, ?)",
        (position, *astuple(confirmation)),
    )


def read_confirmation(connection: sqlite3.Connection, position: int) -> Confirmation | None:
    """The last confirmation of the channel, if there is one; values of the wrong kind raise TypeError or ValueError."""
    row = connection.execute(
        "SELECT family, r, samples, as_small, p, critical_r FROM confirmation WHERE position = ?", (position,)
    ).fetchone()
    if row is None:
        return None
    family, r, samples, as_small, p, critical = row
    known = math.nan if critical is None else float(critical)
    return Confirmation(visible(family), float(r), int(samples), int(as_small), float(p), known)
