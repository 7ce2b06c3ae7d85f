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

TILE_READINGS, LONGEST_TILE = 330_000, 128
"""Readings, and channels, compressed at a time."""

PIECE = 512
"""Readings squared and summed in one go: many small results, since numpy lets no other thread run for a few."""

Deviations = Callable[[FloatArray, FloatArray, FloatArray], None]
"""Writes into the third array, which may be the first, the deviations of readings, float64[C, k], that rise along each
channel, from their middle one, float64[C, 1]."""


@dataclass(frozen=True, slots=True)
class Carrier:
    """The way of n readings from the nodes to the probability grid."""

    start: int
    """Grid points before this one are not needed; the same for all n of about the same size."""
    to_grid: FloatArray
    """[M, grid - start] weights that carry node sums of either half to the grid from its start on."""
    ones: FloatArray
    """[2 (grid - start)] what readings that are all 1 come to there, lower half first."""


@dataclass(frozen=True, slots=True)
class SizeGroup:
    """The channels of one n."""

    n: int
    members: IntArray
    """Which of the projected channels."""
    compressed: FloatArray
    """[members, 2 M] sums of the deviations at the nodes of their segments, lower half first."""
    carrier: Carrier


@dataclass(frozen=True, slots=True)
class Projection:
    """C channels, deviations taken from each channel's middle reading."""

    groups: tuple[SizeGroup, ...]
    mean: FloatArray
    """[C] mean deviation."""
    length: FloatArray
    """[C] root of the sum of squared deviations from the mean; 0 without spread."""


@lru_cache(maxsize=256)
def carrier(n: int, rule: str) -> Carrier:
    """The way to the grid for n readings at positions of that rule."""
    cut = segments(class_size(n) // 2)
    # Nodes of segments that reach beyond the median may lie anywhere beyond it; those without readings weigh nothing.
    u = np.minimum(positions_at(np.minimum(cut.nodes, 0.56 * n + 1.0), n, rule), 0.6)
    v = np.log(u) - np.log1p(-u)
    start = first_needed(float(v[0]))
    to_grid = np.ascontiguousarray(spread(v)[:, start:])
    return Carrier(start, to_grid, np.concatenate([counted(cut, half) @ to_grid for half in (n // 2, n - n // 2)]))


def project(ordered: FloatArray, n: IntArray, rows: IntArray, rule: str, deviations: Deviations) -> Projection:
    """Project the channels `rows` of sorted readings, float64[C, readings], of which the first n >= 3 are finite.

    A deviation must not change the order.
    """
    counts = n[rows]
    middle = ordered[rows, counts // 2]
    total, squares = np.empty(rows.size), np.empty(rows.size)
    groups: list[SizeGroup] = []
    for members in _classes(counts):
        width = class_size(int(counts[members[0]]))
        cut, tile = segments(width // 2), np.zeros((tile_rows(width), width))
        compressed = np.empty((members.size, 2 * cut.nodes.size))
        for first in range(0, members.size, tile.shape[0]):
            at = members[first : first + tile.shape[0]]
            _align(ordered, counts[at], middle[at], rows[at], deviations, tile)
            squares[at] = _squares(tile)[: at.size]
            compressed[first : first + at.size] = compress(tile, cut)[: at.size]
        # The cardinal polynomials of a segment add up to 1.
        total[members] = compressed.sum(axis=1)
        groups += _by_size(counts[members], members, compressed, rule)
    mean = total / counts
    varying = ordered[rows, counts - 1] > ordered[rows, 0]
    length = np.where(varying, np.sqrt(np.maximum(squares - mean * total, 0.0)), 0.0)
    return Projection(tuple(groups), mean, length)


def _squares(tile: FloatArray) -> FloatArray:
    """Sum of squares of each row."""
    whole = tile.shape[1] - tile.shape[1] % PIECE
    pieces, rest = tile[:, :whole].reshape(len(tile), -1, PIECE), tile[:, whole:]
    return np.asarray(np.vecdot(pieces, pieces).sum(axis=1) + np.vecdot(rest, rest), dtype=np.float64)


def tile_rows(width: int) -> int:
    """Channels compressed at a time: as many as fit in the cache when short, fewer when long, so that memory stays
    bounded. A power of two: rows that are left over in a matrix product are summed in another order than the others."""
    return 1 << (max(2, min(LONGEST_TILE, TILE_READINGS // width)).bit_length() - 1)


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
        yield SizeGroup(int(size), members[start:stop], compressed[start:stop], carrier(int(size), rule))


def _align(
    ordered: FloatArray,
    counts: IntArray,
    middle: FloatArray,
    rows: IntArray,
    deviations: Deviations,
    tile: FloatArray,
) -> None:
    """Write deviations of the channels `rows` into tile: lower halves left, upper halves right, 0 between and below."""
    width, starts = tile.shape[1], np.flatnonzero(np.diff(counts, prepend=-1))
    ends, in_place = [*starts[1:], rows.size], starts.size == 1 and _side_by_side(rows)
    tile[rows.size :] = 0.0
    for start, stop in zip(starts, ends, strict=True):
        same, size = rows[start:stop], int(counts[start])
        some = ordered[same[0] : same[-1] + 1] if _side_by_side(same) else ordered[same]
        half, upper = size // 2, width - (size - size // 2)
        if in_place:
            deviations(some[:, :half], middle[:, None], tile[:stop, :half])
            deviations(some[:, half:size], middle[:, None], tile[:stop, upper:])
        else:
            tile[start:stop, :half] = some[:, :half]
            tile[start:stop, half:upper] = middle[start:stop, None]
            tile[start:stop, upper:] = some[:, half:size]
    if not in_place:
        deviations(tile[: rows.size], middle[:, None], tile[: rows.size])
    for start, stop in zip(starts, ends, strict=True):
        half = int(counts[start]) // 2
        tile[start:stop, half : width - (int(counts[start]) - half)] = 0.0


def _side_by_side(rows: IntArray) -> bool:
    """Whether channels of one n, which come in rising order, have no others between them."""
    return int(rows[-1]) - int(rows[0]) == rows.size - 1
