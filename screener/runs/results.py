"""The frames that everything else reads: one row per channel of a run, one row per fit of a channel."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterable, Mapping, Sequence
from typing import TYPE_CHECKING

import numpy as np
import polars as pl

from screener.records import FIT_COLUMNS, RESULT_COLUMNS, Control, Plan, Verdict
from screener.runs.decisions import read_decisions
from screener.runs.scores import unpacked
from screener.runs.text import visible
from screener.stats.many import adjusted_p

if TYPE_CHECKING:
    from screener.records import FloatArray, IntArray

OUTSIDE_SUPPORT = "outside support"
"""The note of a fit to a family that cannot hold the channel's readings."""

DTYPES: dict[type, pl.DataType] = {int: pl.Int64(), float: pl.Float64(), str: pl.String(), bool: pl.Boolean()}

_RESULTS = """
SELECT score.position, channel.name, channel.unit, score.n, score.missing, score.reason,
    family.name, fit.r, fit.critical_r, fit.plain_critical_r, fit.p, fit.note,
    near.name, near_fit.r, near_fit.p, score.conditions, score.step, score.n_effective
FROM score JOIN channel USING (position)
LEFT JOIN family ON family.id = score.held
LEFT JOIN fit ON fit.family = score.held AND fit.position = score.position
LEFT JOIN family AS near ON near.id = score.closest
LEFT JOIN fit AS near_fit ON near_fit.family = score.closest AND near_fit.position = score.position
ORDER BY score.position
"""
_RESULT_FIELDS = {
    **{"position": int, "channel": str, "unit": str, "n": int, "missing": int, "reason": str},
    **{"family": str, "r": float, "critical_r": float, "plain_critical_r": float, "p": float, "fit_note": str},
    **{"closest": str, "closest_r": float, "closest_p": float},
    **{"conditions": str, "step": float, "n_effective": float},
}
_FITS = """
SELECT family.name, r, iif(reason IS NULL, critical_r, NULL), iif(reason IS NULL, plain_critical_r, NULL),
    iif(reason IS NULL, p, NULL), extrapolated, location, scale, shape_1, shape_2, note
FROM family JOIN fit ON fit.family = family.id AND fit.position = ?
LEFT JOIN score USING (position)
ORDER BY family.id
"""
_OF_A_TEST = ("critical_r", "plain_critical_r", "p")
_OF_A_SEARCH = ("closest", "closest_r", "closest_p")
"""Columns that say nothing of a channel that is not scored."""


def read_results(connection: sqlite3.Connection, plan: Plan) -> pl.DataFrame:
    """One row per channel tried, in table order: `position` and the RESULT_COLUMNS; absent values are null."""
    stored = _frame(connection.execute(_RESULTS).fetchall(), _RESULT_FIELDS)
    named = stored.with_columns(pl.col("family").fill_null(plan.family))
    searched = named.with_columns(pl.when(pl.col("reason").is_null()).then(pl.col(c)).alias(c) for c in _OF_A_SEARCH)
    judged = _judged(searched.with_columns(reason=_reason()), plan)
    judged = judged.join(read_decided(connection), on="position", how="left", maintain_order="left")
    absent = [pl.lit(None, DTYPES[kind]).alias(name) for name, kind in RESULT_COLUMNS.items() if name not in judged]
    return judged.with_columns(absent).select("position", *RESULT_COLUMNS)


def read_fits(connection: sqlite3.Connection, position: int) -> pl.DataFrame:
    """One row per family for one channel: the columns of FIT_COLUMNS, in the order of the registry.

    A channel that is not scored has neither critical values nor p.
    """
    rows = connection.execute(_FITS, (position,)).fetchall()
    fits = _frame(rows, {**FIT_COLUMNS, "extrapolated": int}).cast({"extrapolated": pl.Boolean})
    return fits.with_columns(extrapolated=pl.col("extrapolated") & pl.col("p").is_not_null())


def read_reason(connection: sqlite3.Connection, position: int) -> str:
    """Why the channel is not scored, whatever the family; empty where it is."""
    row = connection.execute("SELECT reason FROM score WHERE position = ?", (position,)).fetchone()
    return visible(row[0]) if row and row[0] else ""


def read_points(connection: sqlite3.Connection, position: int) -> FloatArray:
    """The sorted readings kept of one channel; empty when there are none."""
    row = connection.execute("SELECT readings FROM kept_readings WHERE position = ?", (position,)).fetchone()
    return unpacked(row[0]) if row else np.empty(0)


def read_in_order(connection: sqlite3.Connection, position: int) -> FloatArray:
    """The readings kept of one channel in row order; empty when there are none."""
    row = connection.execute("SELECT readings FROM readings_in_order WHERE position = ?", (position,)).fetchone()
    return unpacked(row[0]) if row else np.empty(0)


def read_outermost(connection: sqlite3.Connection, position: int) -> IntArray:
    """The rows (0-based) of the outermost readings of one channel, lowest first; empty when they are not kept."""
    row = connection.execute("SELECT rows FROM outermost WHERE position = ?", (position,)).fetchone()
    return np.frombuffer(row[0] if row else b"", "<i8").astype(np.int64)


def read_by_file(connection: sqlite3.Connection, position: int, files: int) -> FloatArray:
    """n, mean and standard deviation of one channel in each file, float64[files, 3]; empty when they are not kept."""
    row = connection.execute("SELECT summaries FROM by_file WHERE position = ?", (position,)).fetchone()
    return unpacked(row[0]).reshape(files, 3) if row else np.empty((0, 3))


def read_decided(connection: sqlite3.Connection) -> pl.DataFrame:
    """One row per channel that has a decision or a note: `position`, `decision`, `note`."""
    rows = [(position, *words) for position, words in read_decisions(connection).items()]
    return _frame(rows, {"position": int, "decision": str, "note": str})


def read_strips(connection: sqlite3.Connection) -> pl.DataFrame:
    """One row per channel scored: `position` and `strip`."""
    rows = connection.execute("SELECT position, levels FROM strip ORDER BY position").fetchall()
    return _frame(rows, {"position": int, "strip": str})


def _reason() -> pl.Expr:
    """Why a channel is not scored against its family; null where it is."""
    unfitted = pl.col("r").is_null()
    unjudged = pl.col("critical_r").is_null() | pl.col("p").is_null()
    return pl.coalesce(
        "reason",
        pl.when(unfitted & (pl.col("fit_note") == OUTSIDE_SUPPORT)).then(
            pl.format("outside the support of {}", "family")
        ),
        pl.when(unfitted).then(pl.coalesce("fit_note", pl.format("no fit of {}", "family"))),
        pl.when(unjudged).then(pl.format("no critical value for {}", "family")),
    )


def _judged(stored: pl.DataFrame, plan: Plan) -> pl.DataFrame:
    """With q, verdict and departure_size; a channel that has a reason is neither tested nor counted."""
    scored = pl.col("reason").is_null()
    stored = stored.with_columns(pl.when(scored).then(pl.col(column)).alias(column) for column in _OF_A_TEST)
    tested = stored["p"].to_numpy()
    flagged = pl.col("q") < plan.alpha if plan.control is Control.FDR else pl.col("r") < pl.col("critical_r")
    judged = pl.when(flagged).then(pl.lit(str(Verdict.FLAGGED))).otherwise(pl.lit(str(Verdict.CLEAR)))
    unexplained = ((1 - pl.col("r")) * (1 + pl.col("r"))).clip(0.0)
    return stored.with_columns(
        q=pl.Series(adjusted_p(tested), dtype=pl.Float64).fill_nan(None),
        departure_size=unexplained.sqrt(),
    ).with_columns(verdict=pl.when(scored).then(judged).otherwise(pl.lit(str(Verdict.NOT_SCORED))))


def _frame(rows: Sequence[tuple[object, ...]], fields: Mapping[str, type]) -> pl.DataFrame:
    """The rows as a frame, built column by column; raises TypeError when a value is not of its column's kind."""
    columns: Iterable[Sequence[object]] = zip(*rows, strict=True) if rows else [()] * len(fields)
    series = [_series(name, values, kind) for (name, kind), values in zip(fields.items(), columns, strict=True)]
    return pl.DataFrame(series)


def _series(name: str, values: Sequence[object], kind: type) -> pl.Series:
    if kind is str:
        values = [None if value is None else visible(value) for value in values]  # type: ignore[arg-type]
    return pl.Series(name, values, dtype=DTYPES[kind])
