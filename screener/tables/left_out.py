"""Rows of a text table that are no readings are left out, and told of, whether the table is held or not."""

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TypeVar

import numpy as np
import polars as pl

from screener.tables.layout import Layout
from screener.tables.names import visible
from screener.tables.ragged import row_widths, sums_at_end

Frame = TypeVar("Frame", pl.DataFrame, pl.LazyFrame)


@dataclass(frozen=True, slots=True)
class Told:
    """What the user is told of the rows: a few words, and sentences."""

    words: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()


def only_readings(
    frame: Frame, rows: int, source: Path | bytes, layout: Layout, *, irregular: bool
) -> tuple[Frame, int, Told]:
    """The frame without blank lines, comments, footers and sums, how many rows that leaves, and what is told of it.

    The lines of the text are looked at only where the frame is `irregular`: a row has too few cells or too many.
    """
    told = Told()
    if irregular:
        frame, rows, told = _without_other_rows(frame, rows, source, layout)
    return _without_sums(frame, rows, told, len(layout.names))


def _without_other_rows(frame: Frame, rows: int, source: Path | bytes, layout: Layout) -> tuple[Frame, int, Told]:
    widths = row_widths(source, layout, rows)
    left_out = widths.left_out()
    at = np.flatnonzero(left_out).tolist() if len(left_out) == rows else []
    count = int(widths.footers.sum())
    words = [f"{count} footer line{'s' if count > 1 else ''}"] if count else []
    return _without(frame, at), rows - len(at), Told(tuple(words), tuple(widths.remarks()))


def _without_sums(frame: Frame, rows: int, told: Told, columns: int) -> tuple[Frame, int, Told]:
    first = frame.lazy().select(pl.nth(0)).collect_schema().dtypes()[0]
    sums = sums_at_end(frame.lazy(), rows) if columns > 1 and first == pl.String else {}
    if not sums:
        return frame, rows, told
    named = ", ".join(repr(visible(cell)) for cell in list(sums.values())[:3])
    remark = f"{len(sums)} last row{'s' if len(sums) > 1 else ''} ({named}) sum up the others: left out."
    return _without(frame, list(sums)), rows - len(sums), Told(told.words, (*told.remarks, remark))


def _without(frame: Frame, at: Sequence[int]) -> Frame:
    """The frame without these rows."""
    if not at:
        return frame
    if isinstance(frame, pl.DataFrame):
        return frame.filter(~pl.Series(np.isin(np.arange(len(frame)), at)))
    gone = pl.Series(at, dtype=pl.UInt32)
    return frame.with_row_index("row").filter(~pl.col("row").is_in(gone.implode())).drop("row")
