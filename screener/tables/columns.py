"""Which numeric columns are channels, and why the others are not."""

import re
from collections.abc import Mapping, Sequence

import numpy as np
import polars as pl
from numpy.typing import NDArray

_GLANCED_ROWS = 256
_FEWEST_STEPS = 2
_TIME = re.compile(r"time|date|epoch|clock|elapsed", re.IGNORECASE)


def reading(*columns: str) -> pl.Expr:
    """The columns as Float64, their names kept."""
    return pl.col(columns).cast(pl.Float64)


def reason_for_type(dtype: pl.DataType) -> str:
    """Why a column of this type is no channel; empty for numbers and for text, which needs a closer look."""
    if dtype.is_numeric() or dtype in (pl.String, pl.Categorical, pl.Enum):
        return ""
    if dtype == pl.Null:
        return "empty: no readings"
    if dtype == pl.Boolean:
        return "true or false, not a measurement"
    if dtype.is_temporal():
        return "dates or times, not a measurement"
    return "several values or raw bytes in each cell, not one number"


def unfit(frame: pl.LazyFrame, columns: Sequence[str], shown: Mapping[str, str]) -> dict[str, str]:
    """For each numeric column that is constant, empty, a row counter or a time stamp: the reason.

    The first rows clear most columns; only the rest is read to the end. `shown` gives each column's name.
    """
    if not columns:
        return {}
    first = frame.select(reading(*columns)).head(_GLANCED_ROWS).collect()
    suspects = [column for column, suspect in zip(columns, _suspects(first), strict=True) if suspect]
    if not suspects:
        return {}
    rows = int(frame.select(pl.len()).collect().item())
    facts = frame.select(_facts(column) for column in suspects).collect().row(0, named=True)
    reasons = {column: _reason(facts[column], rows, shown[column]) for column in suspects}
    return {column: reason for column, reason in reasons.items() if reason}


def _suspects(first: pl.DataFrame) -> list[bool]:
    """Columns that do not vary in the first rows, or rise from each row to the next."""
    glance: NDArray[np.float64] = first.to_numpy(order="fortran").T
    known = ~np.isnan(glance)
    low = np.where(known, glance, np.inf).min(axis=1)
    high = np.where(known, glance, -np.inf).max(axis=1)
    rising = (glance[:, 1:] > glance[:, :-1]).all(axis=1)
    return list(~(low < high) | rising)


def _facts(column: str) -> pl.Expr:
    value = reading(column).fill_nan(None)
    step = value.diff()
    return pl.struct(
        value.count().alias("n"),
        value.min().alias("low"),
        value.max().alias("high"),
        step.count().alias("steps"),
        step.min().alias("least"),
        step.max().alias("greatest"),
    ).alias(column)


def _reason(facts: Mapping[str, float], rows: int, name: str) -> str:
    if not facts["n"]:
        return "empty: no readings"
    if facts["n"] > 1 and facts["low"] == facts["high"]:
        return f"constant: every reading is {facts['low']!r}"
    if facts["n"] == rows and facts["steps"] >= _FEWEST_STEPS:
        return _reason_of_rising(facts, name)
    return ""


def _reason_of_rising(facts: Mapping[str, float], name: str) -> str:
    if facts["least"] == facts["greatest"] == 1 and float(facts["low"]).is_integer():
        return "a row counter: it goes up by 1 from row to row"
    if facts["least"] > 0 and _TIME.search(name):
        return "time stamps: they rise from row to row, and the name says time"
    return ""
