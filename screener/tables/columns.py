"""Which numeric columns are channels, and why the others are not."""

import re
from collections.abc import Mapping, Sequence

import numpy as np
import polars as pl
from numpy.typing import NDArray

_GLANCED_ROWS = 256
_FEWEST_RISING = 3
_FEWEST_STEADY = 5
"""Three readings may rise evenly by chance, unless by 1."""
_BATCH_READINGS = 8_000_000
_STEADY = 8 * np.finfo(np.float64).eps
"""How far, relative to the largest reading, decimal steps such as 0.1 may stray from one line in binary."""
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


def unfit(frame: pl.LazyFrame, columns: Sequence[str], rows: int, shown: Mapping[str, str]) -> dict[str, str]:
    """For each numeric column that is constant, empty, a row counter or a time stamp: the reason.

    The first rows clear most columns; only the rest is read to the end, some at a time. `shown` gives each
    column's name.
    """
    if not columns:
        return {}
    first = _readings(frame.select(reading(*columns)).head(_GLANCED_ROWS))
    suspects = [column for column, suspect in zip(columns, _suspects(first), strict=True) if suspect]
    reasons: dict[str, str] = {}
    width = max(1, _BATCH_READINGS // rows)
    for start in range(0, len(suspects), width):
        batch = suspects[start : start + width]
        readings = _readings(frame.select(reading(*batch)))
        reasons |= {column: _reason(row, shown[column]) for column, row in zip(batch, readings, strict=True)}
    return {column: reason for column, reason in reasons.items() if reason}


def _readings(frame: pl.LazyFrame) -> NDArray[np.float64]:
    """float64[columns, rows], null as NaN."""
    readings: NDArray[np.float64] = frame.collect().to_numpy(order="fortran").T
    return readings


def _suspects(first: NDArray[np.float64]) -> list[bool]:
    """Columns that do not vary in the first rows, or rise from each row to the next."""
    known = ~np.isnan(first)
    low = np.where(known, first, np.inf).min(axis=1)
    high = np.where(known, first, -np.inf).max(axis=1)
    rising = (first[:, 1:] > first[:, :-1]).all(axis=1)
    return list(~(low < high) | rising)


def _reason(readings: NDArray[np.float64], name: str) -> str:
    """Why the readings of one column are no measurement; empty when they may be one."""
    known = readings[~np.isnan(readings)]
    if not len(known):
        return "empty: no readings"
    if len(known) > 1 and (known == known[0]).all():
        return f"constant: every reading is {float(known[0])!r}"
    if len(known) < max(len(readings), _FEWEST_RISING):
        return ""
    step = _steady_step(known)
    if step and (step == 1 or len(known) >= _FEWEST_STEADY):
        return f"a row counter: it goes up by {step:.12g} from row to row"
    if _TIME.search(name) and (known[1:] > known[:-1]).all():
        return "time stamps: they rise from row to row, and the name says time"
    return ""


def _steady_step(known: NDArray[np.float64]) -> float:
    """The step by which the readings rise from every row to the next; 0 when it is not always the same."""
    first, last = float(known[0]), float(known[-1])
    if not (np.isfinite(first) and np.isfinite(last) and last > first):
        return 0.0
    step = last / (len(known) - 1) - first / (len(known) - 1)
    steady = np.abs(known - (first + step * np.arange(len(known)))) <= _STEADY * max(abs(first), abs(last))
    return step if bool(steady.all() and (known[1:] > known[:-1]).all()) else 0.0
