"""Counting in sorted readings without passing over them: bisection of all channels at once."""

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

NOISE = 2.0**-50
"""Decimal readings of one lattice value differ by at most this share of the channel's largest reading."""


def count_below(ordered: FloatArray, n: IntArray, limit: FloatArray, where: IntArray | None = None) -> IntArray:
    """How many of the first n sorted readings lie below each limit, int64[c, k]; limit is float64[c, k].

    Of the channels at `where`, int64[c], or of all.
    """
    channels = (np.arange(n.size) if where is None else where)[:, None]
    most, rows = n[channels], ordered.shape[1]
    readings, before = ordered.ravel(), channels * rows - 1
    found: IntArray = np.zeros(limit.shape, dtype=np.int64)
    for power in reversed(range(int(np.max(most, initial=0)).bit_length())):
        tried = found + (1 << power)
        below = readings.take(before + np.minimum(tried, rows)) < limit
        below &= tried <= most
        found += below.astype(np.int64) << power
    return np.asarray(found, dtype=np.int64)


def at_rank(ordered: FloatArray, rank: IntArray) -> FloatArray:
    """The sorted readings at ranks int64[C, k], 0-based, or int64[1, k] for all channels alike."""
    if len(rank) == 1:
        return ordered[:, rank[0]]
    place = rank + ordered.shape[1] * np.arange(len(rank))[:, None]
    return np.asarray(ordered.ravel().take(place), dtype=np.float64)


def noise(ordered: FloatArray, n: IntArray) -> FloatArray:
    """Below which difference two readings of a channel are the same, float64[C]."""
    last = at_rank(ordered, np.maximum(n - 1, 0)[:, None])[:, 0]
    return NOISE * np.where(n > 0, np.maximum(np.abs(ordered[:, 0]), np.abs(last)), 0.0)
