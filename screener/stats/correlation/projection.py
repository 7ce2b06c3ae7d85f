"""Sorted readings of any n, compressed: all that correlations with any family need of them."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation.logit_grid import first_needed, spread
from screener.stats.correlation.segments import class_size, compress, counted, segments
from screener.stats.families.family import FloatArray
from screener.stats.positions import positions_at

IntArray = NDArray[np.int64]

TILE = 8
"""Channels in one matrix product. Products always have this many rows, so that a channel's r does not depend, even in
the last bit, on how many others are scored with it."""

TILE_READINGS = 400_000

Deviations = Callable[[FloatArray, FloatArray, FloatArray], None]
"""Writes into the third array the deviations of readings, float64[C, k], from their middle one, float64[C, 1]."""


@dataclass(frozen=True, slots=True)
class SizeGroup:
    """The channels of one n."""

    n: int
    members: IntArray
    """Which of the projected channels."""
    compressed: FloatArray
    """[members, 2 M] sums of the deviations at the nodes of their segments, lower half first."""
    ones: FloatArray
    """[2 M] the same sums for readings that are all 1."""
    to_grid: FloatArray
    """[M, grid] weights that carry node sums of either half to the probability grid."""
    start: int
    """Grid points before this one are not needed; the same for all n of about the same size."""


@dataclass(frozen=True, slots=True)
class Projection:
    """C channels, deviations taken from each channel's middle reading."""

    groups: tuple[SizeGroup, ...]
    mean: FloatArray
    """[C] mean deviation."""
    length: FloatArray
    """[C] root of the sum of squared deviations from the mean; 0 without spread."""


@lru_cache(maxsize=256)
def _to_grid(n: int, rule: str) -> tuple[FloatArray, FloatArray, int]:
    """For n readings: weights from nodes to the grid, [M, grid], the node sums of ones, [2 M], and the grid's start."""
    cut = segments(class_size(n) // 2)
    # Nodes of segments that reach beyond the median may lie anywhere beyond it; those without readings weigh nothing.
    u = np.minimum(positions_at(np.minimum(cut.nodes, 0.56 * n + 1.0), n, rule), 0.6)
    ones = np.concatenate([counted(cut, n // 2), counted(cut, n - n // 2)])
    v = np.log(u) - np.log1p(-u)
    return spread(v), ones, first_needed(float(v[0]))


def project(ordered: FloatArray, n: IntArray, rows: IntArray, rule: str, deviations: Deviations) -> Projection:
    """Project the channels `rows` of sorted readings, float64[C, readings], of which the first n >= 3 are finite.

    A deviation must not change the order, and be 0 for the middle reading.
    """
    counts = n[rows]
    middle = ordered[rows, counts // 2]
    total, squares = np.empty(rows.size), np.empty(rows.size)
    groups: list[SizeGroup] = []
    for members in _classes(counts):
        compressed = []
        width = class_size(int(counts[members[0]]))
        tile = np.zeros((tile_rows(width), width))
        for first in range(0, members.size, tile.shape[0]):
            at = members[first : first + tile.shape[0]]
            _align(ordered, counts[at], middle[at], rows[at], deviations, tile)
            total[at] = tile.sum(axis=1)[: at.size]
            squares[at] = np.einsum("ij,ij->i", tile, tile)[: at.size]
            compressed.append(compress(tile, segments(tile.shape[1] // 2))[: at.size])
        groups += _by_size(counts[members], members, np.concatenate(compressed), rule)
    mean = total / counts
    varying = ordered[rows, counts - 1] > ordered[rows, 0]
    length = np.where(varying, np.sqrt(np.maximum(squares - mean * total, 0.0)), 0.0)
    return Projection(tuple(groups), mean, length)


def tile_rows(width: int) -> int:
    """Channels compressed at a time: 32 where they fit in the cache, fewer when long, so that memory stays bounded."""
    return max(2, min(32, TILE_READINGS // width))


def _classes(counts: IntArray) -> Iterator[IntArray]:
    """Channels, by increasing n, that are aligned in the same number of columns."""
    order = np.argsort(counts, kind="stable")
    distinct, first = np.unique(counts[order], return_index=True)
    widths = np.array([class_size(int(size)) for size in distinct], dtype=np.int64)
    starts = first[np.flatnonzero(np.diff(widths, prepend=-1))]
    for start, stop in zip(starts, [*starts[1:], order.size], strict=True):
        yield order[start:stop]


def _by_size(counts: IntArray, members: IntArray, compressed: FloatArray, rule: str) -> Iterator[SizeGroup]:
    """The members of a class, whose counts do not fall, split by n."""
    sizes, first = np.unique(counts, return_index=True)
    for size, start, stop in zip(sizes, first, [*first[1:], counts.size], strict=True):
        table, ones, begin = _to_grid(int(size), rule)
        yield SizeGroup(int(size), members[start:stop], compressed[start:stop], ones, table, begin)


def _align(
    ordered: FloatArray,
    counts: IntArray,
    middle: FloatArray,
    rows: IntArray,
    deviations: Deviations,
    tile: FloatArray,
) -> None:
    """Write deviations of the channels `rows` into tile: lower halves left, upper halves right, 0 between and below."""
    width = tile.shape[1]
    tile[rows.size :] = 0.0
    starts = np.flatnonzero(np.diff(counts, prepend=-1))
    for start, stop in zip(starts, [*starts[1:], rows.size], strict=True):
        same, size = rows[start:stop], int(counts[start])
        half = size // 2
        centre, upper = middle[start:stop, None], width - (size - half)
        deviations(ordered[same, :half], centre, tile[start:stop, :half])
        tile[start:stop, half:upper] = 0.0
        deviations(ordered[same, half:size], centre, tile[start:stop, upper:])
