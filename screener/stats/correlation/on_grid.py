"""Projected readings carried to the probability grid, where one table of quantile functions serves every n."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation.projection import TILE, Projection, SizeGroup
from screener.stats.families.family import FloatArray

IntArray = NDArray[np.int64]

WIDE_TILE = 32
"""Channels in a product with many columns."""


@dataclass(frozen=True, slots=True)
class OnGrid:
    """Readings of C channels of about the same n, carried to the probability grid from its point `start`."""

    start: int
    members: IntArray
    """[C] which of the projected channels."""
    readings: FloatArray
    """[C, 2 (grid - start)] weighted sums of deviations, lower half first: sum x(k) G(u_k) is readings @ G."""
    ones: FloatArray
    """[U, 2 (grid - start)] the same for readings that are all 1, by distinct n: sum G(u_k) is ones @ G."""
    which: IntArray
    """[C] the place among the distinct n."""
    sizes: FloatArray
    """[U] the distinct n."""
    mean: FloatArray
    """[C]"""
    length: FloatArray
    """[C]"""


@dataclass(frozen=True, slots=True)
class Products:
    """Readings of C channels against K quantile functions."""

    r: FloatArray
    """[C, K]"""
    mean: FloatArray
    """[C, K] mean of G at the channel's positions."""
    length: FloatArray
    """[C, K] root of the sum of (G - mean of G)^2."""


def carried(projection: Projection) -> Iterator[OnGrid]:
    """Carry readings to the probability grid, channels of about the same n together."""
    for start in sorted({group.carrier.start for group in projection.groups}):
        groups = [group for group in projection.groups if group.carrier.start == start]
        members = np.concatenate([group.members for group in groups])
        yield OnGrid(
            start=start,
            members=members,
            readings=np.concatenate([_carry(group) for group in groups]),
            ones=np.stack([group.carrier.ones for group in groups]),
            which=np.repeat(np.arange(len(groups)), [group.members.size for group in groups]),
            sizes=np.array([float(group.n) for group in groups]),
            mean=projection.mean[members],
            length=projection.length[members],
        )


def _carry(group: SizeGroup) -> FloatArray:
    """A group's node sums carried to the grid, float64[members, 2 (grid - start)], both halves in one product."""
    nodes = group.carrier.to_grid.shape[0]
    both = tiled_product(group.compressed.reshape(-1, nodes), group.carrier.to_grid)
    return both.reshape(group.members.size, -1)


def products(x: OnGrid, columns: FloatArray) -> Products:
    """Correlate readings with tabled quantile functions, float64[2 (grid - start), K]."""
    sums = tiled_product(x.ones, columns)
    mean = sums / x.sizes[:, None]
    length = np.sqrt(tiled_product(x.ones, columns**2) - mean * sums)
    cross = tiled_product(x.readings, columns, WIDE_TILE) - x.mean[:, None] * sums[x.which]
    return Products(cross / (x.length[:, None] * length[x.which]), mean[x.which], length[x.which])


def tiled_product(left: FloatArray, right: FloatArray, tile: int = TILE) -> FloatArray:
    """left @ right, float64[C, K], by products of `tile` rows each; rows that are short of a tile are padded."""
    count, width = left.shape
    product = np.empty((count, right.shape[1]))
    whole = count - count % tile
    for first in range(0, whole, tile):
        np.dot(left[first : first + tile], right, out=product[first : first + tile])
    if whole < count:
        padded = np.zeros((tile, width))
        padded[: count - whole] = left[whole:]
        product[whole:] = padded.dot(right)[: count - whole]
    return product
