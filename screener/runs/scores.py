"""Storing the scores of a block of channels."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from typing import TYPE_CHECKING

import numpy as np

from screener.records import BlockScores, Span
from screener.runs.strips import strips_of
from screener.runs.text import visible

if TYPE_CHECKING:
    from screener.records import FloatArray

Row = tuple[int | float | str | None, ...]

_FIT = """
INSERT OR REPLACE INTO fit
    (family, position, r, critical_r, plain_critical_r, p, extrapolated, location, scale, shape_1, shape_2, note)
VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)
"""


def store_scores(connection: sqlite3.Connection, scores: BlockScores, rule: str) -> None:
    """Write a block, in place of what an earlier attempt left; the caller holds the transaction.

    `rule` names the plotting positions.
    """
    span = scores.span
    families = _family_ids(connection, scores.families)
    connection.execute("INSERT OR REPLACE INTO span (first, stop) VALUES (?, ?)", (span.first, span.stop))
    connection.executemany(
        "INSERT OR REPLACE INTO score (position, n, missing, reason, held, closest, conditions, step, n_effective)"
        " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)",
        _score_rows(scores, families),
    )
    connection.executemany(
        "INSERT OR REPLACE INTO kept_readings (position, readings) VALUES (?, ?)",
        zip(range(span.first, span.stop), map(packed, scores.points), strict=True),
    )
    if scores.in_order:
        connection.executemany(
            "INSERT OR REPLACE INTO readings_in_order (position, readings) VALUES (?, ?)",
            zip(range(span.first, span.stop), map(packed, scores.in_order), strict=True),
        )
    if scores.by_file is not None and scores.by_file.size:
        connection.executemany(
            "INSERT OR REPLACE INTO by_file (position, summaries) VALUES (?, ?)",
            zip(range(span.first, span.stop), map(packed, scores.by_file), strict=True),
        )
    if scores.outermost:
        connection.executemany(
            "INSERT OR REPLACE INTO outermost (position, rows) VALUES (?, ?)",
            ((span.first + at, rows.astype("<i8").tobytes()) for at, rows in enumerate(scores.outermost)),
        )
    connection.executemany(
        "INSERT OR REPLACE INTO strip (position, levels) VALUES (?, ?)",
        zip(range(span.first, span.stop), strips_of(scores, rule), strict=True),
    )
    connection.executemany(_FIT, _fit_rows(scores, families))


def store_failure(connection: sqlite3.Connection, span: Span, message: str) -> None:
    """Write why the channels of a span are not scored, unless another program scored them meanwhile."""
    reason = visible(message) or "not scored, no reason given"
    connection.execute(
        "INSERT INTO span (first, stop, failure) VALUES (?, ?, ?)"
        " ON CONFLICT (first, stop) DO UPDATE SET failure = excluded.failure WHERE failure IS NOT NULL",
        (span.first, span.stop, reason),
    )
    connection.executemany(
        "INSERT INTO score (position, reason) VALUES (?, ?)"
        " ON CONFLICT (position) DO UPDATE SET reason = excluded.reason WHERE n IS NULL",
        ((position, reason) for position in range(span.first, span.stop)),
    )


def packed(readings: FloatArray) -> bytes:
    """The readings as the bytes of little-endian float64."""
    return readings.astype("<f8").tobytes()


def unpacked(stored: bytes) -> FloatArray:
    """The readings behind the bytes; raises ValueError when they are no whole number of readings."""
    return np.frombuffer(stored, "<f8").astype(np.float64)


def _family_ids(connection: sqlite3.Connection, names: tuple[str, ...]) -> list[int]:
    connection.executemany("INSERT OR IGNORE INTO family (name) VALUES (?)", ((name,) for name in names))
    known = dict(connection.execute("SELECT name, id FROM family"))
    return [known[name] for name in names]


# `.tolist()` throughout: SQLite would store numpy's own scalars as blobs. It stores NaN as NULL.


def _score_rows(scores: BlockScores, families: list[int]) -> Iterator[Row]:
    reasons = (visible(reason) or None for reason in scores.reasons)
    positions = range(scores.span.first, scores.span.stop)
    held = (families[place] for place in scores.held.tolist())
    closest = (families[place] if place >= 0 else None for place in scores.closest.tolist())
    conditions = (visible(words) or None for words in scores.conditions or [""] * scores.n.size)
    step, effective = ([None] * scores.n.size if v is None else v.tolist() for v in (scores.step, scores.n_effective))
    counts = scores.n.tolist(), scores.missing.tolist()
    return zip(positions, *counts, reasons, held, closest, conditions, step, effective, strict=True)


def _fit_rows(scores: BlockScores, families: list[int]) -> Iterator[Row]:
    """Family after family, the order in which they are kept."""
    first, stop = scores.span.first, scores.span.stop
    extrapolated = scores.extrapolated.astype(np.int64)
    tables = (scores.r, scores.critical_r, scores.plain_critical_r, scores.p, extrapolated)
    shapes = (scores.shapes[:, :, 0], scores.shapes[:, :, 1])
    for k, family in enumerate(families):
        columns = [table[:, k].tolist() for table in (*tables, scores.location, scores.scale, *shapes)]
        notes = [visible(of_channel[k]) or None for of_channel in scores.notes]
        yield from zip([family] * (stop - first), range(first, stop), *columns, notes, strict=True)
