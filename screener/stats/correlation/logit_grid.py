"""A fixed grid of probabilities on which every quantile function is tabled once, whatever n.

The grid is even in v = ln(u / (1 - u)), in which quantile functions are smooth in both tails. Each half of the
probabilities has its own grid, so that a kink at the median does no harm; the upper half is the mirror of the lower.
"""

import numpy as np

from screener.stats.families.family import FloatArray

STEP = 0.1
POINTS = 10
"""Grid points that an interpolated value is taken from."""

COARSE = 10
"""Grid points by which the start of a shortened grid moves."""

LOWEST = -20.0
"""u = 2e-9: the first plotting position of 3e8 readings."""

HIGHEST = 0.5
"""A little beyond the median, for the segments that end there."""

GRID: FloatArray = np.linspace(LOWEST, HIGHEST, round((HIGHEST - LOWEST) / STEP) + 1)
"""v of the lower half; the upper half is at -v."""

LOWER: FloatArray = 1.0 / (1.0 + np.exp(-GRID))
"""u of the lower half."""

UPPER: FloatArray = 1.0 / (1.0 + np.exp(GRID))
"""u of the upper half, mirrored: UPPER = 1 - LOWER."""


def first_needed(v: float) -> int:
    """The grid point to start from when nothing lies below v, in coarse steps so that like channels share it."""
    return max(0, int((v - LOWEST) / STEP - POINTS) // COARSE * COARSE)


def spread(v: FloatArray) -> FloatArray:
    """Weights, float64[M, grid], with which values on the grid give the values at v, float64[M]."""
    first = np.clip(np.floor((v - LOWEST) / STEP).astype(np.int64) - POINTS // 2 + 1, 0, GRID.size - POINTS)
    at = (v - LOWEST) / STEP - first
    offsets = np.arange(POINTS)
    weights = np.ones((v.size, POINTS))
    for other in range(POINTS):
        factor = (at - other)[:, None] / np.where(offsets == other, 1, offsets - other)
        weights *= np.where(offsets == other, 1.0, factor)
    table = np.zeros((v.size, GRID.size))
    np.put_along_axis(table, first[:, None] + offsets, weights, axis=1)
    return table
