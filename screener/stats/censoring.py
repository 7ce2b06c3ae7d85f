"""Channels with readings that are known only to lie beyond the others: clipped, or past a detection limit."""

from collections.abc import Sequence
from dataclasses import dataclass, fields, replace

import numpy as np
from numpy.typing import NDArray

from screener.stats.conditions import Conditions
from screener.stats.correlation import Fits, fit_censored, held_within
from screener.stats.families import Family
from screener.stats.families.family import FloatArray

IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

TOGETHER = 64
"""Channels fitted at a time, so that memory stays bounded."""

MOST = 0.5
"""Share of censored readings from which the rest does not tell what the distribution is."""


@dataclass(frozen=True, slots=True)
class Censoring:
    """How many readings of each of C channels are censored, and on which side."""

    n: IntArray
    """[C] readings, the censored ones among them."""
    low: IntArray
    """[C] readings known only to lie below the others."""
    high: IntArray
    """[C] readings known only to lie above the others."""

    @property
    def some(self) -> BoolArray:
        """[C] whether there are any."""
        return (self.low > 0) | (self.high > 0)

    @property
    def most(self) -> BoolArray:
        """[C] whether they are too many."""
        return self.low + self.high > MOST * self.n


def censoring_of(conditions: Conditions, ordered: FloatArray) -> Censoring:
    """Clipped readings, and those that stand at a detection limit, of sorted readings, float64[C, rows]."""
    n = conditions.n
    low, high = conditions.clipped_low.copy(), conditions.clipped_high.copy()
    for channel in np.flatnonzero(conditions.below):
        readings = ordered[channel, : n[channel]]
        limit = readings[min(conditions.below[channel], readings.size) - 1]
        low[channel] = max(low[channel], np.searchsorted(readings, limit, side="right"))
    for channel in np.flatnonzero(conditions.above):
        readings = ordered[channel, : n[channel]]
        limit = readings[max(n[channel] - conditions.above[channel], 0)]
        high[channel] = max(high[channel], n[channel] - np.searchsorted(readings, limit, side="left"))
    return Censoring(n, low, high)


def as_if_clipped(conditions: Conditions, channels: IntArray) -> Conditions:
    """Conditions in which the extreme values of some channels, of which it cannot be told, are rails."""
    low, high = conditions.clipped_low.copy(), conditions.clipped_high.copy()
    low[channels] = np.maximum(low[channels], conditions.perhaps_low[channels])
    high[channels] = np.maximum(high[channels], conditions.perhaps_high[channels])
    return replace(conditions, clipped_low=low, clipped_high=high)


def refit(
    fits: Fits, ordered: FloatArray, censoring: Censoring, channels: IntArray, families: Sequence[Family], rule: str
) -> None:
    """Fit some channels, int64[K], again without their censored readings; ordered, float64[C, rows], are all."""
    for first in range(0, channels.size, TOGETHER):
        some = channels[first : first + TOGETHER]
        n, low, high = censoring.n[some], censoring.low[some], censoring.high[some]
        found = fit_censored(ordered[some], n, low, high, families, rule)
        for field in fields(fits):
            getattr(fits, field.name)[some] = getattr(found, field.name)


def distinct_uncensored(ordered: FloatArray, censoring: Censoring, channels: IntArray) -> IntArray:
    """How many distinct readings some channels, int64[K], have beside the censored ones, [K]."""
    n, low, high = censoring.n[channels], censoring.low[channels], censoring.high[channels]
    changes = np.diff(held_within(ordered[channels], n, low, high), axis=1) > 0.0
    return np.asarray(1 + np.count_nonzero(changes, axis=1), dtype=np.int64)
