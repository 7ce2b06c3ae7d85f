"""Codes for a missing reading, such as -9999: an exact value far off all others that comes again and again.

They are only proposed. A value is proposed when it is the lowest or the highest of its channel, stands there at least
twice, and lies further from the other readings than three times the range of those.
"""

from collections.abc import Collection, Iterator, Mapping, Sequence

import numpy as np
import polars as pl
from numpy.typing import NDArray

from screener.records import Proposal

_GLANCED_ROWS = 32
_FAR_FOR_A_GLANCE = 6.0
"""Widths of the narrowest half of a few rows; a rough sieve in front of the rule."""
_FAR = 3.0
_FEWEST_CELLS = 2
_FEWEST_OTHERS = 3
_BATCH_READINGS = 8_000_000
_HELD_READINGS = 1_000_000
"""Of a table in memory: so few that their copy reuses the memory of the one before."""


def proposed_codes(
    frame: pl.DataFrame | pl.LazyFrame, columns: Sequence[str], rows: int, limits: Mapping[str, Collection[float]]
) -> tuple[Proposal, ...]:
    """The values that look like codes for a missing reading, those in most cells first.

    `limits` are the detection limits of some columns, which come again and again for another reason.
    """
    if rows < _FEWEST_CELLS + _FEWEST_OTHERS or not columns:
        return ()
    found: dict[str, list[int]] = {}
    for part in _parts(frame, columns, rows):
        for column in _far_reaching(part):
            for value, cells in _codes(column.cast(pl.Float64).to_numpy()):
                if value not in limits.get(column.name, ()):
                    found.setdefault(_written(value, column.dtype), []).append(cells)
    ranked = sorted(found.items(), key=lambda item: (-sum(item[1]), item[0]))
    return tuple(Proposal(value, len(cells), sum(cells)) for value, cells in ranked)


def _parts(frame: pl.DataFrame | pl.LazyFrame, columns: Sequence[str], rows: int) -> Iterator[pl.DataFrame]:
    """The columns, so many at a time."""
    width = max(1, (_HELD_READINGS if isinstance(frame, pl.DataFrame) else _BATCH_READINGS) // rows)
    for start in range(0, len(columns), width):
        some = list(columns[start : start + width])
        yield frame[some] if isinstance(frame, pl.DataFrame) else frame.select(some).collect()


def _far_reaching(frame: pl.DataFrame) -> list[pl.Series]:
    """The columns whose lowest or highest reading lies far from the middle of some of their rows."""
    numbers = frame if all(dtype == pl.Float64 for dtype in frame.dtypes) else frame.cast(pl.Float64)
    readings = numbers.to_numpy(order="fortran").T
    bottom, top = _shortest_halves(np.sort(readings[:, :_GLANCED_ROWS], axis=1))
    lowest, highest = np.fmin.reduce(readings, axis=1), np.fmax.reduce(readings, axis=1)
    with np.errstate(invalid="ignore", over="ignore"):
        far = _FAR_FOR_A_GLANCE * (top - bottom)
        reaching = (lowest < bottom - far) | (highest > top + far)
    return [frame.to_series(int(at)) for at in np.flatnonzero(reaching)]


def _shortest_halves(ordered: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """The ends of the narrowest stretch that holds half of the readings of each row, which are sorted, NaN last."""
    known = np.count_nonzero(~np.isnan(ordered), axis=1)[:, None]
    first = np.arange(ordered.shape[1])[None, :]
    last = first + known // 2
    ends = np.take_along_axis(ordered, np.minimum(last, ordered.shape[1] - 1), axis=1)
    with np.errstate(invalid="ignore", over="ignore"):
        widths = np.where(last < known, ends - ordered, np.inf)
    at = np.nan_to_num(widths, nan=np.inf).argmin(axis=1)[:, None]
    return np.take_along_axis(ordered, at, axis=1)[:, 0], np.take_along_axis(ends, at, axis=1)[:, 0]


def _codes(readings: NDArray[np.float64]) -> Iterator[tuple[float, int]]:
    """The code at the low end and at the high end of a channel, with the number of its cells."""
    known = np.sort(readings[np.isfinite(readings)])
    if len(known) < _FEWEST_CELLS + _FEWEST_OTHERS:
        return
    at_bottom = int(np.searchsorted(known, known[0], "right"))
    at_top = len(known) - int(np.searchsorted(known, known[-1], "left"))
    low = at_bottom if at_bottom >= _FEWEST_CELLS else 0
    high = at_top if at_top >= _FEWEST_CELLS else 0
    for first, last in ((low, high), (low, 0), (0, high)):
        others = known[first : len(known) - last]
        if (first or last) and _are_codes(known, others, bottom=bool(first), top=bool(last)):
            if first:
                yield float(known[0]), first
            if last:
                yield float(known[-1]), last
            return


def _are_codes(known: NDArray[np.float64], others: NDArray[np.float64], *, bottom: bool, top: bool) -> bool:
    """Whether the ends lie far off the other readings, of which at least three differ."""
    if len(np.unique(others)) < _FEWEST_OTHERS:
        return False
    with np.errstate(over="ignore"):
        reach = _FAR * (others[-1] - others[0])
        return (not bottom or others[0] - known[0] > reach) and (not top or known[-1] - others[-1] > reach)


def _written(value: float, dtype: pl.DataType) -> str:
    """The value as a user would write it."""
    if value.is_integer() and abs(value) < 1e15:
        return str(int(value))
    return str(np.float32(value)) if dtype == pl.Float32 else repr(value)
