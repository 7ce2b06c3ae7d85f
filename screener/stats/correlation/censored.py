"""r of channels of which some readings are known only to lie beyond the others: clipped, or past a detection limit.

Such readings keep their ranks, and with them the positions of all others in the full n, but take no part in the
correlation. Sources: Verrill & Johnson 1988, JASA 83 (correlation statistics of censored samples); Michael & Schucany
1986, in D'Agostino & Stephens, Goodness-of-Fit Techniques (positions of censored samples).
"""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from screener.stats.correlation.fits import Fits, fill, no_fits, on_axis
from screener.stats.correlation.projection import Carrier, IntArray, Projection, SizeGroup, project
from screener.stats.families import Axis, Family
from screener.stats.families.family import FloatArray
from screener.stats.ordering import brought_near, differences, log_differences

FEWEST_KEPT = 3
"""Uncensored readings without which a plot has no shape."""


def fit_censored(
    ordered: FloatArray, n: IntArray, low: IntArray, high: IntArray, families: Sequence[Family], rule: str
) -> Fits:
    """Correlate all but the low[C] least and the high[C] greatest of sorted readings, float64[C, rows], n[C] finite.

    Channels with fewer than three readings left, or no spread among them, get NaN.
    """
    fits = no_fits(n.size, len(families))
    enough = np.flatnonzero(n - low - high >= FEWEST_KEPT)
    rows = enough[ordered[enough, low[enough]] < ordered[enough, (n - high - 1)[enough]]]
    if rows.size:
        held = held_within(ordered, n, low, high)
        near, exponent = brought_near(held, n)
        work = _Censored(low, high, n, families, rule)
        work.fit(fits, near, rows, exponent, Axis.LINEAR)
        positive = held[rows, 0] > 0.0
        fits.outside[np.ix_(rows[~positive], on_axis(families, Axis.LOG))] = True
        work.fit(fits, held, rows[positive], np.zeros_like(exponent), Axis.LOG)
    return fits


class _Censored:
    """Channels to be fitted on one axis after the other."""

    def __init__(self, low: IntArray, high: IntArray, n: IntArray, families: Sequence[Family], rule: str) -> None:
        self.low, self.high, self.n, self.families, self.rule = low, high, n, families, rule

    def fit(self, fits: Fits, held: FloatArray, rows: IntArray, exponent: IntArray, axis: Axis) -> None:
        """Fill in the families of an axis at the channels `rows`."""
        columns = on_axis(self.families, axis)
        if rows.size and columns.size:
            middle = held[rows, self.n[rows] // 2]
            deviations = _deviations(held[rows], self.n[rows], middle, axis)
            projection = self._projected(deviations, rows)
            centre = (np.log(middle) if axis is Axis.LOG else middle) + projection.mean
            fill(fits, projection, self.families, columns, rows, centre, exponent[rows])

    def _projected(self, deviations: FloatArray, rows: IntArray) -> Projection:
        """The projection of the uncensored readings of the channels `rows`, each a group of its own."""
        n, low, high = self.n[rows], self.low[rows], self.high[rows]
        rank = np.arange(deviations.shape[1])
        kept = ((rank >= low[:, None]) & (rank < (n - high)[:, None])).astype(np.float64)
        deviations = np.where(kept > 0.0, deviations, 0.0)
        count = n - low - high
        every = np.arange(rows.size)
        readings = project(deviations, n, every, self.rule, _as_they_are)
        ones = project(kept, n, every, self.rule, _as_they_are)
        mean = readings.mean * n / count
        squares = np.einsum("ij,ij->i", deviations, deviations) - mean * mean * count
        groups = [
            SizeGroup(int(count[member]), group.members[i : i + 1], group.compressed[i : i + 1], carrier)
            for group, weights in zip(readings.groups, ones.groups, strict=True)
            for i, (member, carrier) in enumerate(zip(group.members, _carriers(weights), strict=True))
        ]
        return Projection(tuple(groups), mean, np.sqrt(np.maximum(squares, 0.0)))


def _carriers(ones: SizeGroup) -> list[Carrier]:
    """The way to the grid of each channel of a group whose readings are 1 where one is not censored, else 0."""
    to_grid = ones.carrier.to_grid
    halves = ones.compressed.reshape(ones.members.size, 2, to_grid.shape[0])
    return [replace(ones.carrier, ones=(both @ to_grid).ravel()) for both in halves]


def held_within(ordered: FloatArray, n: IntArray, low: IntArray, high: IntArray) -> FloatArray:
    """A copy whose censored readings have the value of the nearest uncensored one, and missing ones the greatest."""
    each = np.arange(n.size)
    least, greatest = ordered[each, np.minimum(low, n - 1)], ordered[each, np.maximum(n - high - 1, 0)]
    return np.clip(np.where(np.isnan(ordered), greatest[:, None], ordered), least[:, None], greatest[:, None])


def _deviations(held: FloatArray, n: IntArray, middle: FloatArray, axis: Axis) -> FloatArray:
    """Deviations of readings, on the axis, from the middle one."""
    out = np.empty_like(held)
    (log_differences if axis is Axis.LOG else differences)(held, middle[:, None], out)
    return out


def _as_they_are(readings: FloatArray, middle: FloatArray, out: FloatArray) -> None:
    """Write readings that are deviations already into out."""
    del middle
    out[...] = readings
