"""Which rows of the results are shown, and in which order: frames in, frames out."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import polars as pl

from screener.records import RESULT_COLUMNS, Verdict
from screener.ui.conditions import matching

WORDS = {name for name, kind in RESULT_COLUMNS.items() if kind is str}
VERDICT_RANK = {Verdict.FLAGGED.value: 0, Verdict.NOT_SCORED.value: 1, Verdict.CLEAR.value: 2}


@dataclass(frozen=True, slots=True)
class Arrangement:
    """What the user has asked to see."""

    sort: str | None = None
    """A column key; None for the order of the table."""
    falling: bool = False
    flagged_only: bool = False
    condition: str = ""
    """As `conditions.matching` takes it; empty for all rows."""


def arranged(results: pl.DataFrame, arrangement: Arrangement) -> pl.DataFrame:
    """The rows asked for; equal ones stay in table order, absent values come last either way.

    Raises: ConditionError when the condition cannot be used.
    """
    if arrangement.condition:
        results = results.filter(matching(results, arrangement.condition))
    rows = results.filter(pl.col("verdict") == Verdict.FLAGGED.value) if arrangement.flagged_only else results
    if arrangement.sort is None:
        return rows.reverse() if arrangement.falling else rows
    return rows.sort(_meaning(arrangement.sort), descending=arrangement.falling, nulls_last=True, maintain_order=True)


def row_of(rows: pl.DataFrame, position: int) -> int | None:
    """The row in which that channel stands, if it is there."""
    return rows["position"].index_of(position)


def row_named(rows: pl.DataFrame, name: str) -> int | None:
    """The row of the channel of exactly that name, if it is there."""
    return rows["channel"].index_of(name)


def row_found(rows: pl.DataFrame, text: str, start: int) -> int | None:
    """The first row from `start` on, going round, whose channel name contains the text, capitals ignored."""
    found = rows["channel"].str.to_lowercase().str.contains(text.lower(), literal=True).arg_true()
    if found.is_empty():
        return None
    later = found.filter(found >= start)
    return int(found[0] if later.is_empty() else later[0])


def longest_name(rows: pl.DataFrame) -> int:
    """Characters of the longest channel name."""
    lengths = rows["channel"].str.len_chars().to_list()
    return max(lengths, default=0)


def has_remarks(rows: pl.DataFrame) -> bool:
    """Whether any row has a reason or a closest family to show."""
    return bool((rows["reason"].is_not_null() & (rows["reason"] != "")).any() or rows["closest"].is_not_null().any())


def known_columns(rows: pl.DataFrame, names: Sequence[str]) -> set[str]:
    """Those of the named columns that say anything in any row."""
    return {name for name in names if (rows[name].is_not_null() & (rows[name] != "")).any()}


def with_decisions(results: pl.DataFrame, decisions: pl.DataFrame) -> pl.DataFrame:
    """The results with other decisions and notes."""
    bare = results.drop("decision", "note")
    return bare.join(decisions, on="position", how="left", maintain_order="left").select(results.columns)


def _meaning(key: str) -> pl.Expr:
    """What a column is sorted by."""
    if key == "verdict":
        return pl.col("verdict").replace_strict(VERDICT_RANK, return_dtype=pl.Int8)
    if key == "remark":
        remark = pl.coalesce(*(pl.when(pl.col(name) != "").then(pl.col(name)) for name in ("reason", "closest")))
        return remark.str.to_lowercase()
    if key == "channel":
        return _natural("channel")
    if key == "strip":
        key = "departure_size"
    return pl.when(pl.col(key) != "").then(pl.col(key).str.to_lowercase()) if key in WORDS else _number(key)


def _number(key: str) -> pl.Expr:
    return pl.col(key).fill_nan(None) if RESULT_COLUMNS[key] is float else pl.col(key)


def _natural(key: str) -> pl.Expr:
    """Text in which every run of digits is 16 long, so that ch2 comes before ch10."""
    padded = pl.col(key).str.to_lowercase().str.replace_all(r"(\d+)", "0000000000000000${1}")
    return padded.str.replace_all(r"\d*(\d{16})", "${1}")
