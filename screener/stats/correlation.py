"""r: the correlation of sorted readings with the quantiles of a family, for all channels and families at once."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from screener.stats.families import Axis, Family, family_named
from screener.stats.families.family import FloatArray
from screener.stats.ordering import Standardised, logarithms, standardised
from screener.stats.positions import plotting_positions

TILE = 8
"""Channels in one matrix product. The product always has this shape, so that a channel's r does not depend, even in
the last bit, on how many others are scored with it."""


@dataclass(frozen=True, slots=True)
class Fits:
    """C channels against F families; NaN outside a family's support and for channels without spread."""

    r: FloatArray
    """[C, F]"""
    location: FloatArray
    """[C, F] least squares of actual on expected, on the family's axis, in the channel's units."""
    scale: FloatArray
    """[C, F]"""
    outside: NDArray[np.bool_]
    """[C, F] the channel has readings outside the family's support."""


@dataclass(frozen=True, slots=True)
class Scores:
    """Standard quantiles of F families at the n plotting positions."""

    unit: FloatArray
    """[n, F] centred, of unit length."""
    mean: FloatArray
    """[F]"""
    length: FloatArray
    """[F] root of the sum of squared deviations from the mean."""


@lru_cache(maxsize=32)
def scores_at(n: int, names: tuple[str, ...], rule: str) -> Scores:
    """The scores of the named families for n readings."""
    u = plotting_positions(n, rule)
    quantiles = np.stack([family_named(name).quantile(u) for name in names], axis=1)
    mean = quantiles.mean(axis=0)
    centred = quantiles - mean
    length = np.sqrt(np.einsum("ij,ij->j", centred, centred))
    return Scores(unit=centred / length, mean=mean, length=length)


def fit_families(ordered: FloatArray, n: NDArray[np.int64], families: Sequence[Family], rule: str) -> Fits:
    """Correlate sorted readings, float64[C, rows] with n[C] finite ones first, with each family.

    Channels of fewer than three readings, or without spread, get NaN.
    """
    shape = (ordered.shape[0], len(families))
    r, location, scale = (np.full(shape, np.nan) for _ in range(3))
    fits = Fits(r, location, scale, np.zeros(shape, dtype=np.bool_))
    for size in np.unique(n[n >= 3]):
        rows = np.flatnonzero(n == size)
        for axis in Axis:
            columns = np.array([i for i, family in enumerate(families) if family.axis is axis], dtype=np.int64)
            if columns.size:
                names = tuple(families[i].name for i in columns)
                _fit_axis(fits, ordered[rows, :size], axis, scores_at(int(size), names, rule), rows, columns)
    return fits


def _fit_axis(
    fits: Fits, ordered: FloatArray, axis: Axis, scores: Scores, rows: NDArray[np.int64], columns: NDArray[np.int64]
) -> None:
    """Fill in the fits of the channels `rows`, all of one n, with the families `columns`, all of one axis."""
    offset = np.zeros(rows.size)
    if axis is Axis.LOG:
        positive = ordered[:, 0] > 0.0
        fits.outside[np.ix_(rows[~positive], columns)] = True
        rows = rows[positive]
        ordered, offset = logarithms(ordered[positive])
    readings = standardised(ordered)
    varying = readings.length > 0.0
    r = np.where(varying[:, None], tiled_product(readings.unit, scores.unit), np.nan)
    scale = r * _ratio(readings, scores)
    place = np.ix_(rows, columns)
    fits.r[place] = np.clip(r, 0.0, 1.0)
    fits.scale[place] = scale
    fits.location[place] = (readings.mean + offset)[:, None] - scale * scores.mean


def _ratio(readings: Standardised, scores: Scores) -> FloatArray:
    return readings.length[:, None] / scores.length


def tiled_product(left: FloatArray, right: FloatArray) -> FloatArray:
    """left @ right, float64[C, F], by products of TILE rows each; rows that are short of a tile are padded."""
    count, width = left.shape
    product = np.empty((count, right.shape[1]))
    whole = count - count % TILE
    for first in range(0, whole, TILE):
        product[first : first + TILE] = left[first : first + TILE] @ right
    if whole < count:
        padded = np.zeros((TILE, width))
        padded[: count - whole] = left[whole:]
        product[whole:] = (padded @ right)[: count - whole]
    return product
