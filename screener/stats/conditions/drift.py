"""Drift: a straight rise or fall over the record that serial dependence does not explain."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.conditions.counting import FloatArray

BoolArray = NDArray[np.bool_]

LARGE = 1.0
"""Rise over the record, in standard deviations about the line, from which a marginal distribution means little."""
SURE = 6.0
"""Standard errors of the slope, from the stretches' scatter and its dependence, beyond which a rise is no chance."""


@dataclass(frozen=True, slots=True)
class Trend:
    """The straight line through each of C channels."""

    rise: FloatArray
    """[C] from the first row to the last, in standard deviations about the line."""
    sure: BoolArray
    """[C] the rise is large, and neither chance nor serial dependence."""


def find_trend(sums: FloatArray, counts: FloatArray, variance: FloatArray) -> Trend:
    """The trend given sums, [C, k], of readings less their mean over equal stretches of rows, and counts in them.

    variance is that of single readings, [C].
    """
    stretches = sums.shape[1]
    if stretches < 4:
        return Trend(np.zeros(len(sums)), np.zeros(len(sums), dtype=np.bool_))
    with np.errstate(divide="ignore", invalid="ignore"):
        total = counts.sum(axis=1)
        time = (np.arange(stretches) + 0.5)[None, :] - (counts @ (np.arange(stretches) + 0.5) / total)[:, None]
        spread = np.sum(counts * time**2, axis=1)
        slope = np.sum(sums * time, axis=1) / spread
        about = variance - slope**2 * spread / total
        rise = slope * stretches / np.sqrt(np.maximum(about, 1e-12 * variance))
        left = sums - counts * slope[:, None] * time
        error = _error_of_slope(left, time, spread)
        sure = (np.abs(rise) >= LARGE) & (np.abs(slope) > SURE * error)
    return Trend(np.nan_to_num(rise), sure)


def _error_of_slope(left: FloatArray, time: FloatArray, spread: FloatArray) -> FloatArray:
    """Standard error of the slope, allowing for first-order dependence of what is left, [C]."""
    stretches = left.shape[1]
    squares = np.sum(left**2, axis=1)
    follow = np.sum(left[:, 1:] * left[:, :-1], axis=1) / squares
    # A line through few dependent stretches hides most of their dependence.
    follow = np.clip(follow + (2.0 + 4.0 * follow) / stretches, 0.0, 0.95)
    wide = (1.0 + follow) / (1.0 - follow) * stretches / (stretches - 2)
    error: FloatArray = np.sqrt(np.sum((left * time) ** 2, axis=1) * wide) / spread
    return error
