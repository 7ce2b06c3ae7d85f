"""Quantile functions tabled on the probability grid: one column for each family and shape."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from screener.stats.correlation.logit_grid import GRID, LOWER, UPPER
from screener.stats.correlation.projection import TILE, Projection, SizeGroup
from screener.stats.families.family import FloatArray

FEW = 32
"""Up to this many columns it is cheaper to carry columns to nodes than readings to the grid."""

MEDIAN = np.array([0.5])


@dataclass(frozen=True, slots=True)
class ScoreGrid:
    """K quantile functions on the grid, each less its median."""

    values: FloatArray
    """[2 grid, K] lower half first."""
    halves: FloatArray
    """[grid, 4 K] values of the lower and of the upper half, then their squares likewise."""
    median: FloatArray
    """[K]"""


Quantile = Callable[[FloatArray], FloatArray]


def score_grid(branches: Sequence[tuple[Quantile, Quantile]]) -> ScoreGrid:
    """Table quantile functions of u, each given below and above the median."""
    median = np.array([below(MEDIAN)[0] for below, _ in branches])
    values = [np.concatenate([below(LOWER), above(UPPER)]) for below, above in branches]
    table = np.stack(values, axis=1) - median
    lower, upper = table[: GRID.size], table[GRID.size :]
    return ScoreGrid(table, np.concatenate([lower, upper, lower**2, upper**2], axis=1), median)


@dataclass(frozen=True, slots=True)
class Products:
    """Readings of C channels against K quantile functions."""

    cross: FloatArray
    """[C, K] sum of (x - mean of x) (G - mean of G) over the length of x; divided by the length of G it is r."""
    mean: FloatArray
    """[C, K] mean of G at the channel's positions."""
    length: FloatArray
    """[C, K] root of the sum of (G - mean of G)^2."""


def products(projection: Projection, scores: ScoreGrid) -> Products:
    """Multiply projected readings with tabled quantile functions.

    Few columns are carried from the grid to the nodes of each n; for many it is the readings that are carried to the
    grid, where one product serves all n.
    """
    shape = (projection.mean.size, scores.median.size)
    cross, mean, squares = np.empty(shape), np.empty(shape), np.empty(shape)
    carry = _columns_to_nodes if scores.median.size <= FEW else _readings_to_grid
    for group, sums, square_sums, group_cross in carry(projection.groups, scores):
        group_mean = sums / group.n
        mean[group.members] = group_mean
        squares[group.members] = square_sums - group_mean * sums
        cross[group.members] = group_cross - projection.mean[group.members, None] * sums
    with np.errstate(divide="ignore", invalid="ignore"):
        cross /= projection.length[:, None]
    return Products(cross, mean + scores.median, np.sqrt(squares))


Carried = Iterator[tuple[SizeGroup, FloatArray, FloatArray, FloatArray]]
"""For each group: the group, the sums of G and of G^2 at its positions, [K], and of deviation times G, [members, K]."""


def _columns_to_nodes(groups: Sequence[SizeGroup], scores: ScoreGrid) -> Carried:
    for group in groups:
        nodes, columns = group.to_grid.shape[0], scores.median.size
        at_nodes = (group.to_grid @ scores.halves).reshape(nodes, 2, 2, columns)
        values, squares = at_nodes.transpose(1, 2, 0, 3).reshape(2, 2 * nodes, columns)
        yield group, group.ones @ values, group.ones @ squares, tiled_product(group.compressed, values)


def _readings_to_grid(groups: Sequence[SizeGroup], scores: ScoreGrid) -> Carried:
    cross = tiled_product(np.concatenate([_on_grid(group, group.compressed) for group in groups]), scores.values)
    ones = np.concatenate([_on_grid(group, group.ones[None, :]) for group in groups])
    sums, squares = tiled_product(ones, scores.values), tiled_product(ones, scores.values**2)
    at = 0
    for place, group in enumerate(groups):
        yield group, sums[place], squares[place], cross[at : at + group.members.size]
        at += group.members.size


def _on_grid(group: SizeGroup, compressed: FloatArray) -> FloatArray:
    """Node sums, float64[C, 2 M], carried to the grid, float64[C, 2 grid]."""
    count = group.to_grid.shape[0]
    lower, upper = compressed[:, :count], compressed[:, count:]
    return np.concatenate([tiled_product(lower, group.to_grid), tiled_product(upper, group.to_grid)], axis=1)


def tiled_product(left: FloatArray, right: FloatArray) -> FloatArray:
    """left @ right, float64[C, K], by products of TILE rows each; rows that are short of a tile are padded."""
    count, width = left.shape
    product = np.empty((count, right.shape[1]))
    whole = count - count % TILE
    for first in range(0, whole, TILE):
        np.matmul(left[first : first + TILE], right, out=product[first : first + TILE])
    if whole < count:
        padded = np.zeros((TILE, width))
        padded[: count - whole] = left[whole:]
        product[whole:] = (padded @ right)[: count - whole]
    return product
