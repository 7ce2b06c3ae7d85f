"""What is kept of a channel's readings in row order, so that run order and lag can be drawn without the table."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

IN_FULL = 512
"""Rows up to which every reading is kept."""
STRETCHES = 256
"""Stretches of rows of which the lowest and the highest reading are kept otherwise."""
WIDEST, TILE = 4, 80_000
"""Rows of a window whose extremes are taken at once, and readings worked on at a time, to stay in the cache."""
PAIRS = 128
"""Readings kept together with the one in the row after them, at even steps."""


@dataclass(frozen=True, slots=True)
class RowOrder:
    """A channel's readings in row order as far as they are kept; NaN where missing."""

    row: FloatArray
    """[m] row of each, from 1; the middle of the stretch where only its lowest and highest reading are kept."""
    reading: FloatArray
    """[m]"""
    before: FloatArray
    """[k] readings whose follower is known too."""
    after: FloatArray
    """[k] the readings in the row after them."""
    stretch: int
    """Rows of which the lowest and the highest reading stand for all; 1 where every reading is kept."""


def kept_in_order(readings: FloatArray) -> FloatArray:
    """What is kept of readings float64[C, rows] in row order, NaN or infinite where missing; float64[C, k]."""
    rows = readings.shape[1]
    if rows <= IN_FULL:
        return np.where(np.isfinite(readings), readings, np.nan)
    low, high = _lowest_and_highest(readings)
    first = _first_of_pairs(rows)
    kept = np.concatenate([low, high, readings[:, first], readings[:, first + 1]], axis=1)
    return np.where(np.isfinite(kept), kept, np.nan)


def _lowest_and_highest(readings: FloatArray) -> tuple[FloatArray, FloatArray]:
    """The lowest and the highest reading of every stretch, each float64[C, STRETCHES]; NaN where all are missing.

    The extremes of short windows are taken side by side for all rows, then those of the windows that make up a stretch:
    `reduceat` would not let other threads run meanwhile, and takes three times as long where many readings are missing.
    """
    channels, rows = readings.shape
    window, firsts = _windows(rows)
    together = max(1, TILE // rows)
    found = np.empty((2, channels, STRETCHES))
    room = np.empty((2, together, rows))
    for first in range(0, channels, together):
        some = readings[first : first + together]
        for least_or_most, extreme in zip(found, (np.fmin, np.fmax), strict=True):
            inside, width = some, 1
            while width < window:
                wider = room[width.bit_length() % 2, : len(some), : rows - 2 * width + 1]
                extreme(inside[:, : wider.shape[1]], inside[:, width : width + wider.shape[1]], out=wider)
                inside, width = wider, 2 * width
            extreme.reduce(inside.take(firsts, axis=1), axis=1, out=least_or_most[first : first + together])
    return found[0], found[1]


@lru_cache(maxsize=2)
def _windows(rows: int) -> tuple[int, NDArray[np.int64]]:
    """Rows of a window, a power of two, and the first rows of those that cover each stretch, int64[k, STRETCHES]."""
    ends = np.append(_starts(rows)[1:], rows)
    lengths = ends - _starts(rows)
    window = min(WIDEST, 1 << (int(lengths.min()).bit_length() - 1))
    steps = np.arange(-(-int(lengths.max()) // window))[:, None]
    return window, np.minimum(_starts(rows) + window * steps, ends - window)


def row_order(kept: FloatArray, rows: int) -> RowOrder:
    """What `kept_in_order` kept of one channel of a table of that many rows; raises ValueError for anything else."""
    if rows <= IN_FULL:
        if kept.size != rows:
            raise ValueError(f"{kept.size} readings in row order instead of {rows}")
        return RowOrder(np.arange(1.0, rows + 1), kept, kept[:-1], kept[1:], 1)
    if kept.size != 2 * (STRETCHES + PAIRS):
        raise ValueError(f"{kept.size} readings in row order instead of {2 * (STRETCHES + PAIRS)}")
    ends = np.append(_starts(rows), rows)
    middle = (ends[:-1] + ends[1:] + 1) / 2
    low_high = kept[: 2 * STRETCHES].reshape(2, STRETCHES).T
    before, after = kept[2 * STRETCHES :].reshape(2, PAIRS)
    return RowOrder(np.repeat(middle, 2), low_high.ravel(), before, after, -(-rows // STRETCHES))


def stretch_extremes(kept: FloatArray, rows: int) -> tuple[FloatArray, FloatArray]:
    """The lowest and the highest reading of every stretch of `stretch_starts`, each [C, stretches]; NaN where missing.

    `kept` is what `kept_in_order` kept of the channels. Where all readings are kept, each is a stretch of its own.
    """
    if rows <= IN_FULL:
        return kept, kept
    return kept[:, :STRETCHES], kept[:, STRETCHES : 2 * STRETCHES]


def stretch_starts(rows: int) -> NDArray[np.int64]:
    """The first row (0-based) of every stretch, and at the end the number of rows."""
    return np.arange(rows + 1) if rows <= IN_FULL else np.append(_starts(rows), rows)


def _starts(rows: int) -> NDArray[np.int64]:
    return np.arange(STRETCHES) * rows // STRETCHES


def _first_of_pairs(rows: int) -> NDArray[np.int64]:
    return np.linspace(0, rows - 2, PAIRS).round().astype(np.int64)
