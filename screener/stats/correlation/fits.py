"""Every channel fitted with every family: r, location and scale."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation.projection import IntArray, Projection, project
from screener.stats.correlation.score_grid import Products, ScoreGrid, products, score_grid
from screener.stats.families import Axis, Family, family_named
from screener.stats.families.family import FloatArray
from screener.stats.ordering import brought_near, differences, log_differences


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


@lru_cache(maxsize=8)
def _scores(names: tuple[str, ...]) -> ScoreGrid:
    families = [family_named(name) for name in names]
    return score_grid([family.branches or (family.quantile, family.quantile) for family in families])


def fit_families(ordered: FloatArray, n: IntArray, families: Sequence[Family], rule: str) -> Fits:
    """Correlate sorted readings, float64[C, rows] with n[C] finite ones first, with each family.

    Channels of fewer than three readings, or without spread, get NaN.
    """
    shape = (ordered.shape[0], len(families))
    r, location, scale = (np.full(shape, np.nan) for _ in range(3))
    fits = Fits(r, location, scale, np.zeros(shape, dtype=np.bool_))
    enough = np.flatnonzero(n >= 3)
    for axis in Axis:
        columns = np.array([i for i, family in enumerate(families) if family.axis is axis], dtype=np.int64)
        if columns.size and enough.size:
            scores = _scores(tuple(families[i].name for i in columns))
            fit = _fit_linear if axis is Axis.LINEAR else _fit_log
            fit(fits, ordered, n, scores, rule, enough, columns)
    return fits


def _fit_linear(
    fits: Fits, ordered: FloatArray, n: IntArray, scores: ScoreGrid, rule: str, rows: IntArray, columns: IntArray
) -> None:
    near, exponent = brought_near(ordered, n)
    projection = project(near, n, rows, rule, differences)
    _fill(fits, projection, products(projection, scores), near[rows, n[rows] // 2], exponent[rows], rows, columns)


def _fit_log(
    fits: Fits, ordered: FloatArray, n: IntArray, scores: ScoreGrid, rule: str, rows: IntArray, columns: IntArray
) -> None:
    positive = ordered[rows, 0] > 0.0
    fits.outside[np.ix_(rows[~positive], columns)] = True
    rows = rows[positive]
    if rows.size:
        projection = project(ordered, n, rows, rule, log_differences)
        middle = np.log(ordered[rows, n[rows] // 2])
        _fill(fits, projection, products(projection, scores), middle, np.zeros_like(rows), rows, columns)


def _fill(
    fits: Fits,
    projection: Projection,
    product: Products,
    middle: FloatArray,
    exponent: IntArray,
    rows: IntArray,
    columns: IntArray,
) -> None:
    """Turn products into r, location and scale, in the channel's units, at [rows, columns]."""
    place = np.ix_(rows, columns)
    r = product.cross / product.length
    fits.r[place] = np.clip(r, 0.0, 1.0)
    slope = r * projection.length[:, None] / product.length
    fits.scale[place] = np.ldexp(slope, exponent[:, None])
    fits.location[place] = np.ldexp((middle + projection.mean)[:, None] - slope * product.mean, exponent[:, None])
