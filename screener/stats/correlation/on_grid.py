"""Projected readings carried to the probability grid, where one table of quantile functions serves every n."""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation.projection import TILE, Projection, SizeGroup
from screener.stats.families.family import FloatArray

IntArray = NDArray[np.int64]

WIDE_TILE = 32
"""Channels in a product with many columns."""

TOGETHER = 1024
"""Channels held against the families at a time: what is computed of more does not stay in the processor's cache."""


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
    """Carry readings to the probability grid, channels of about the same n together, not too many at a time."""
    for start in sorted({group.carrier.start for group in projection.groups}):
        for lot in _lots(group for group in projection.groups if group.carrier.start == start):
            members = np.concatenate([group.members for group in lot])
            yield OnGrid(
                start=start,
                members=members,
                readings=np.concatenate([_carry(group) for group in lot]),
                ones=np.stack([group.carrier.ones for group in lot]),
                which=np.repeat(np.arange(len(lot)), [group.members.size for group in lot]),
                sizes=np.array([float(group.n) for group in lot]),
                mean=projection.mean[members],
                length=projection.length[members],
            )


def _lots(groups: Iterable[SizeGroup]) -> Iterator[list[SizeGroup]]:
    """The groups in lots of about TOGETHER channels, large ones cut."""
    lot: list[SizeGroup] = []
    room = TOGETHER
    for group in groups:
        done = 0
        while done < group.members.size:
            part = slice(done, done + room)
            lot.append(replace(group, members=group.members[part], compressed=group.compressed[part]))
            done, room = done + lot[-1].members.size, room - lot[-1].members.size
            if room == 0:
                yield lot
                lot, room = [], TOGETHER
    if lot:
        yield lot


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
    if whole:
        # One call for all tiles: many small ones would cost more than the products, and hold up other threads.
        tiles = left[:whole].reshape(-1, tile, width)
        np.matmul(tiles, right, out=product[:whole].reshape(-1, tile, right.shape[1]))
    if whole < count:
        padded = np.zeros((1, tile, width))
        padded[0, : count - whole] = left[whole:]
        product[whole:] = (padded @ right)[0, : count - whole]
    return product
