"""Which numeric columns are channels, and why the others are not."""

import re
from collections.abc import Mapping, Sequence

import numpy as np
import polars as pl
from numpy.typing import NDArray

_GLANCED_READINGS = 2_000_000
_GLANCED_ROWS = (32, 256)
_FEWEST_RISING = 3
_FEWEST_STEADY = 5
"""Three readings may rise evenly by chance, unless by 1."""
_FEWEST_FLAGS = 10
_FEWEST_CODES = 40
_MOST_CODES = 20
_BATCH_READINGS = 8_000_000
_STEADY = 8 * np.finfo(np.float64).eps
"""How far, relative to the largest reading, decimal steps such as 0.1 may stray from one line in binary."""
_TIME = re.compile(r"time|date|epoch|clock|elapsed", re.IGNORECASE)
_WORD = re.compile(r"[A-Z]?[a-z]+|[A-Z]+")
_IDENTIFIES = frozenset({
    *("id", "ids", "uid", "uuid", "serial", "barcode", "sn", "part", "unit", "dut", "no", "nr", "key"),
    *("lot", "batch", "wafer", "sample", "specimen"),
})  # fmt: skip
_CODES = frozenset({
    *("code", "codes", "status", "state", "mode", "flag", "class", "category", "grade", "bin", "type", "variant"),
    *("recipe", "program", "tool", "lot", "batch", "shift", "operator", "station", "cavity", "slot", "group", "site"),
    *("ok", "pass", "fail", "alarm", "error", "quality"),
})  # fmt: skip
_EPOCH_SECONDS = (1.0e9, 2.3e9)
_EPOCH_UNITS = {1.0: "seconds", 1e3: "milliseconds", 1e6: "microseconds", 1e9: "nanoseconds"}


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


def unfit(
    frame: pl.DataFrame | pl.LazyFrame,
    columns: Sequence[str],
    rows: int,
    shown: Mapping[str, str],
    starts: Sequence[int] = (0,),
) -> dict[str, str]:
    """For each numeric column that is constant, empty, a counter, a time, an identifier, a code or a flag: the reason.

    The first rows clear most columns; only the rest is read to the end, some at a time. `shown` gives each
    column's name, `starts` the row with which each of several files begins, where counting may begin again.
    """
    if not columns:
        return {}
    fewest, most = _GLANCED_ROWS
    glanced = max(fewest, min(most, _GLANCED_READINGS // len(columns)))
    first = glance(frame, columns, glanced)
    suspects = [column for column, suspect in zip(columns, _suspects(first), strict=True) if suspect]
    reasons: dict[str, str] = {}
    width = max(1, _BATCH_READINGS // rows)
    for start in range(0, len(suspects), width):
        batch = suspects[start : start + width]
        readings = readings_of(frame.lazy().select(reading(*batch)))
        reasons |= {column: _reason(row, shown[column], starts) for column, row in zip(batch, readings, strict=True)}
    return {column: reason for column, reason in reasons.items() if reason}


def readings_of(frame: pl.LazyFrame) -> NDArray[np.float64]:
    """float64[columns, rows], null as NaN."""
    readings: NDArray[np.float64] = frame.collect().to_numpy(order="fortran").T
    return readings


def glance(frame: pl.DataFrame | pl.LazyFrame, columns: Sequence[str], rows: int) -> NDArray[np.float64]:
    """float64[columns, rows], the first rows of the columns."""
    part = frame.head(rows).lazy().collect() if isinstance(frame, pl.LazyFrame) else frame.head(rows)
    if part.columns != list(columns):
        part = part[list(columns)]  # by `select`, thousands of columns take many times as long
    if any(dtype != pl.Float64 for dtype in part.dtypes):
        part = part.cast(pl.Float64)
    first: NDArray[np.float64] = part.to_numpy(order="fortran").T
    return first


def _suspects(first: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Columns that do not vary in the first rows, rise from each row to the next, or hold whole numbers only."""
    known = ~np.isnan(first)
    low = np.where(known, first, np.inf).min(axis=1)
    high = np.where(known, first, -np.inf).max(axis=1)
    few = first[:, : min(_GLANCED_ROWS)]
    rising = np.all(few[:, 1:] >= few[:, :-1], axis=1)
    whole = np.all((few == np.floor(few)) | np.isnan(few), axis=1)
    suspects: NDArray[np.bool_] = np.logical_or(np.logical_or(~(low < high), rising), whole)
    return suspects


def _reason(readings: NDArray[np.float64], name: str, starts: Sequence[int]) -> str:
    """Why the readings of one column are no measurement; empty when they may be one."""
    known = readings[~np.isnan(readings)]
    if not len(known):
        return "empty: no readings"
    if len(known) > 1 and (known == known[0]).all():
        return f"constant: every reading is {float(known[0])!r}"
    return _counting(known, len(readings), name) or _counting_in_each(readings, starts, name) or _coding(known, name)


def _counting_in_each(readings: NDArray[np.float64], starts: Sequence[int], name: str) -> str:
    """Why readings that rise with the rows of each file are no measurement."""
    parts = [part for part in np.split(readings, starts[1:]) if len(part)]
    if len(parts) < 2:
        return ""
    reasons = [_counting(part[~np.isnan(part)], len(part), name) for part in parts]
    return f"{reasons[0]}, in each file" if all(reasons) else ""


def _counting(known: NDArray[np.float64], rows: int, name: str) -> str:
    """Why readings that rise with the rows are no measurement."""
    if len(known) < max(rows, _FEWEST_RISING):
        return ""
    step = _steady_step(known)
    if step and (step == 1 or len(known) >= _FEWEST_STEADY):
        return f"a row counter: it goes up by {step:.12g} from row to row"
    if not (known[1:] >= known[:-1]).all():
        return ""
    for factor, unit in _EPOCH_UNITS.items():
        low, high = (bound * factor for bound in _EPOCH_SECONDS)
        if low <= known[0] and known[-1] <= high:
            return f"time stamps: {unit} since 1970, never falling"
    if _TIME.search(name) and (known[1:] > known[:-1]).all():
        return "time stamps: they rise from row to row, and the name says time"
    return ""


def _coding(known: NDArray[np.float64], name: str) -> str:
    """Why whole numbers that stand for something else are no measurement."""
    if len(known) < _FEWEST_STEADY or not (known == np.floor(known)).all():
        return ""
    words = {word.lower() for word in _WORD.findall(name)}
    different = len(np.unique(known))
    if len(known) >= _FEWEST_FLAGS and different == 2 and set(np.unique(known).tolist()) == {0.0, 1.0}:
        return "flags: every reading is 0 or 1"
    if different == len(known) and words & _IDENTIFIES:
        return "identifiers: whole numbers, no two alike, and the name says so"
    if len(known) >= _FEWEST_CODES and different <= _MOST_CODES and words & _CODES:
        return f"codes: {different} different whole numbers, and the name says so"
    return ""


def _steady_step(known: NDArray[np.float64]) -> float:
    """The step by which the readings rise from every row to the next; 0 when it is not always the same."""
    first, last = float(known[0]), float(known[-1])
    if not (np.isfinite(first) and np.isfinite(last) and last > first):
        return 0.0
    step = last / (len(known) - 1) - first / (len(known) - 1)
    at = np.arange(len(known)) / (len(known) - 1)
    steady = np.abs(known - (first * (1 - at) + last * at)) <= _STEADY * max(abs(first), abs(last))
    return step if bool(steady.all() and (known[1:] > known[:-1]).all()) else 0.0
