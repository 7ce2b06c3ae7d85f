"""In which rows the outermost readings of a channel stand, so that the tails of its plot can be named."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from screener.stats.row_order import stretch_extremes, stretch_starts

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

AT_EITHER_END = 5


def outermost_rows(
    readings: FloatArray, points: Sequence[FloatArray], in_order: Sequence[FloatArray]
) -> tuple[IntArray, ...]:
    """Rows (0-based) of the lowest readings of each channel, lowest first, then of the highest, highest last.

    `readings` are float64[C, rows] in row order, `points` [C] sorted readings of which those at the ends are complete,
    `in_order` what `kept_in_order` kept. Fewer than twice AT_EITHER_END readings are named once each.
    """
    low_ends, high_ends = stretch_extremes(np.array(in_order), readings.shape[1])
    low = _lowest(readings, [p[: min(AT_EITHER_END, p.size - p.size // 2)] for p in points], low_ends, sign=1.0)
    high = _lowest(readings, [-p[::-1][: min(AT_EITHER_END, p.size // 2)] for p in points], -high_ends, sign=-1.0)
    return tuple(np.concatenate([lowest, highest[::-1]]) for lowest, highest in zip(low, high, strict=True))


def _lowest(readings: FloatArray, lowest: Sequence[FloatArray], ends: FloatArray, *, sign: float) -> list[IntArray]:
    """The rows of as many lowest readings (times `sign`) as `lowest` holds for each channel, lowest first.

    `ends` [C, stretches] are the lowest of each stretch of rows: only those that hold one sought are looked through.
    """
    wanted = np.array([values.size for values in lowest])
    limit = np.array([values[-1] if values.size else -np.inf for values in lowest])
    below = np.argwhere(ends < limit[:, None])
    at_limit = _first_of_each(np.argwhere(ends == limit[:, None]), wanted)
    found = _looked_through(readings, np.concatenate([below, at_limit]), limit, sign)
    order = np.lexsort((found[:, 1], sign * readings[found[:, 0], found[:, 1]], found[:, 0]))
    chosen = _first_of_each(found[order], wanted)
    counts = np.bincount(chosen[:, 0], minlength=wanted.size)
    rows = np.split(chosen[:, 1], np.cumsum(counts)[:-1])
    values = np.split(sign * readings[chosen[:, 0], chosen[:, 1]], np.cumsum(counts)[:-1])
    wrong = [not np.array_equal(found_ones, sought) for found_ones, sought in zip(values, lowest, strict=True)]
    for channel in np.flatnonzero(wrong):
        # An infinite reading has hidden those of its stretch.
        finite = np.flatnonzero(np.isfinite(readings[channel]))
        rising = np.argsort(sign * readings[channel, finite], kind="stable")
        rows[channel] = finite[rising[: wanted[channel]]]
    return rows


def _looked_through(readings: FloatArray, stretches: IntArray, limit: FloatArray, sign: float) -> IntArray:
    """Channel and row of every finite reading (times `sign`) up to the channel's limit, int64[m, 2]."""
    starts = stretch_starts(readings.shape[1])
    channel, stretch = stretches[:, :1], stretches[:, 1]
    length = np.diff(starts)
    rows = starts[stretch][:, None] + np.arange(length.max(initial=1))
    inside = rows < starts[stretch + 1][:, None]
    rows = np.minimum(rows, readings.shape[1] - 1)
    values = sign * readings[channel, rows]
    which = np.nonzero(inside & (values <= limit[channel]) & np.isfinite(values))
    return np.stack([channel[which[0], 0], rows[which]], axis=1)


def _first_of_each(places: IntArray, count: IntArray) -> IntArray:
    """The first so many places of each channel; `places` are in order of channel."""
    first = np.searchsorted(places[:, 0], np.arange(count.size))
    nth = np.arange(places.shape[0]) - first[places[:, 0]]
    return places[nth < count[places[:, 0]]]
