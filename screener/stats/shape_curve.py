"""r over the shape of a family, from the readings kept of one channel."""

import numpy as np

from screener.stats.families import Axis, Family
from screener.stats.families.family import FloatArray
from screener.stats.points import kept_ranks
from screener.stats.positions import plotting_positions

STEPS = 201
"""Shapes at which r is computed."""


def shape_curve(points: FloatArray, n: int, family: Family, rule: str) -> tuple[FloatArray, FloatArray]:
    """Coordinates of the shape, float64[STEPS], and r there, of a family with one shape on a linear axis.

    `points` are the sorted readings at `kept_ranks(n)`; each stands for the ranks about it, so that for long channels r
    is close to the one computed from all readings, not equal to it.
    """
    assert family.shape_count == 1
    assert family.axis is Axis.LINEAR
    (first, last, count), ranks = family.shapes.axes[0], kept_ranks(n)
    steps = np.linspace(0.0, count - 1.0, STEPS)
    quantiles = family.quantile(plotting_positions(n, rule)[ranks], family.shapes.at(steps[:, None])[0][:, None])
    weights = _weights(ranks.astype(np.float64), n)
    x = (points - points[points.size // 2]) / np.ptp(points)
    return first + steps * (last - first) / (count - 1), _correlation(x, quantiles, weights)


def _weights(ranks: FloatArray, n: int) -> FloatArray:
    """How many ranks each kept one stands for."""
    borders = np.concatenate([[-0.5], 0.5 * (ranks[:-1] + ranks[1:]), [n - 0.5]])
    return np.diff(borders)


def _correlation(x: FloatArray, quantiles: FloatArray, weights: FloatArray) -> FloatArray:
    """Weighted correlation of x, float64[m], with each row of quantiles, float64[K, m]."""
    share = weights / weights.sum()
    x = x - share @ x
    quantiles = quantiles - (quantiles @ share)[:, None]
    quantiles /= np.abs(quantiles).max(axis=1, keepdims=True)
    cross = quantiles @ (share * x)
    return np.asarray(cross / np.sqrt((share @ x**2) * (quantiles**2 @ share)), dtype=np.float64)
