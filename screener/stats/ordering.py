"""Sorted readings, of ordinary magnitude and in logarithms: what every correlation starts from."""

import numpy as np
from numpy.typing import NDArray

from screener.stats.families.family import FloatArray

IntArray = NDArray[np.int64]

ORDINARY = 400
"""Readings between 2^-400 and 2^400 can be squared and summed as they are."""


def sort_in_place(readings: FloatArray) -> IntArray:
    """Count the finite readings, int64[channels], and sort each channel in place: finite ones first, NaN after.

    Infinite readings become NaN.
    """
    readings.sort(axis=-1)
    n = _not_nan(readings)
    last = np.take_along_axis(readings, np.maximum(n - 1, 0)[:, None], axis=1)[:, 0] if readings.size else n
    infinite = np.flatnonzero((n > 0) & (np.isinf(last) | np.isinf(readings[:, 0]))) if readings.size else n[:0]
    if infinite.size:
        mended = readings[infinite]
        mended[np.isinf(mended)] = np.nan
        mended.sort(axis=-1)
        readings[infinite] = mended
        n[infinite] = _not_nan(mended)
    return n


def _not_nan(ordered: FloatArray) -> IntArray:
    """How many readings of each sorted channel are not NaN, by bisection."""
    channels, rows = ordered.shape
    low, high = np.zeros(channels, dtype=np.int64), np.full(channels, rows, dtype=np.int64)
    each = np.arange(channels)
    while np.any(low < high):
        middle = (low + high) // 2
        finite = ~np.isnan(ordered[each, np.minimum(middle, rows - 1)])
        low = np.where(finite & (low < high), middle + 1, low)
        high = np.where(finite, high, np.minimum(middle, high))
    return low


def brought_near(ordered: FloatArray, n: IntArray) -> tuple[FloatArray, IntArray]:
    """Sorted readings, float64[C, rows], those of extreme magnitude scaled by 2^-exponent, and the exponents."""
    each = np.arange(n.size)
    largest = np.maximum(np.abs(ordered[:, 0]), np.abs(ordered[each, np.maximum(n - 1, 0)]))
    _, exponent = np.frexp(np.where(n > 0, largest, 1.0))
    exponent = np.where(np.abs(exponent) > ORDINARY, exponent, 0).astype(np.int64)
    extreme = np.flatnonzero(exponent)
    if extreme.size == 0:
        return ordered, exponent
    near = ordered.copy()
    near[extreme] = np.ldexp(near[extreme], -exponent[extreme, None])
    return near, exponent


def differences(readings: FloatArray, middle: FloatArray, out: FloatArray) -> None:
    """Write readings, float64[C, k], less the middle one, float64[C, 1], into out, which may be the readings."""
    np.subtract(readings, middle, out=out)


NARROW = 1e-4
"""Below this share of the middle reading, ln x is taken by its difference, which keeps all digits."""


def log_differences(readings: FloatArray, middle: FloatArray, out: FloatArray) -> None:
    """Write ln of positive readings, float64[C, k], less ln of the middle one, float64[C, 1], into out.

    Readings rise along each channel; out may be the readings themselves.
    """
    if readings.shape[1] == 0:
        return
    ends = np.log(readings[:, [0, -1]]) - np.log(middle)
    narrow = np.flatnonzero(np.max(np.abs(ends), axis=1) < NARROW)
    mended = np.log1p((readings[narrow] - middle[narrow]) / middle[narrow])
    np.log(readings, out=out)
    out -= np.log(middle)
    if narrow.size:
        out[narrow] = mended
