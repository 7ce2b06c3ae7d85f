"""Compressing a half of the sorted readings to a few weighted ranks, exactly enough for every quantile function.

A quantile function at the plotting positions is a smooth function of the rank k, whose only near singularity lies just
below k = 1. On a segment of ranks from a to 1.5 a it is therefore a polynomial of low degree to ten digits and more, so
that sum x(k) G(u_k) over the segment needs only the sums of x(k) times the cardinal polynomials of a few Chebyshev
nodes. The first ranks are kept one by one.
"""

from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from threading import Lock

import numpy as np

from screener.stats.families.family import FloatArray

KEPT = 32
"""Ranks kept one by one at the outer end."""

GROWTH = 1.5
"""Ratio of the last to the first rank of a segment."""

NODES = 9
"""Chebyshev nodes of a segment."""

CLASS_RATIO = 1.06
"""Channels whose n lies within this ratio share one set of segments."""

LONG = 250_000
"""Ranks of a half whose segments take 18 MB, too much to keep for every n that comes."""

_MAKING = Lock()


@dataclass(frozen=True, slots=True)
class Segments:
    """How ranks 1 ... width of one half, counted from the outer end, are cut."""

    width: int
    nodes: FloatArray
    """[M] real-valued ranks that stand for all."""
    bounds: tuple[tuple[int, int], ...]
    """Ranks first + 1 ... stop of each polynomial segment."""
    bases: tuple[FloatArray, ...]
    """[stop - first, NODES] cardinal polynomials of each segment at its ranks.

    Chebyshev nodes lie evenly about the middle: with ranks in falling order the same polynomials come in reverse.
    """
    sums: FloatArray
    """[segments, NODES] their sums over the whole segment."""

    @property
    def direct(self) -> int:
        """Ranks kept one by one."""
        return self.bounds[0][0] if self.bounds else self.width


def class_size(n: int) -> int:
    """The even number of columns in which channels with n readings are aligned; depends on n alone."""
    if n <= 2 * KEPT:
        return 2 * KEPT
    step = int(np.ceil(np.log(n / (2 * KEPT)) / np.log(CLASS_RATIO) - 1e-9))
    size = 2 * int(np.ceil(KEPT * CLASS_RATIO**step))
    return max(size, n + n % 2)


def segments(width: int) -> Segments:
    """The segments of a half of that many ranks, made once for all threads; of long halves only a few are kept."""
    with _MAKING:
        return _of_long_half(width) if width > LONG else _of_half(width)


@lru_cache(maxsize=2)
def _of_long_half(width: int) -> Segments:
    return _made(width)


@lru_cache(maxsize=64)
def _of_half(width: int) -> Segments:
    return _made(width)


def _made(width: int) -> Segments:
    edges = [min(KEPT, width)]
    while edges[-1] < width:
        edges.append(min(width, int(edges[-1] * GROWTH)))
    bounds = tuple(pairwise(edges))
    pieces = [_chebyshev(first, stop) for first, stop in bounds]
    nodes = np.concatenate([np.arange(1.0, edges[0] + 1.0), *(node for node, _ in pieces)])
    bases = tuple(basis for _, basis in pieces)
    return Segments(width, nodes, bounds, bases, np.array([basis.sum(axis=0) for basis in bases]))


def _chebyshev(first: int, stop: int) -> tuple[FloatArray, FloatArray]:
    """Nodes within ranks first + 1 ... stop, and their cardinal polynomials at those ranks."""
    angle = (2.0 * np.arange(NODES) + 1.0) * np.pi / (2.0 * NODES)
    centre, reach = 0.5 * (first + 1 + stop), max(0.5, 0.5 * (stop - first - 1))
    at = (np.arange(first + 1, stop + 1) - centre) / reach
    degree = np.arange(NODES)
    series = np.cos(np.outer(np.arccos(np.clip(at, -1.0, 1.0)), degree))
    weights = np.cos(np.outer(degree, angle)) * (2.0 / NODES)
    weights[0] *= 0.5
    return centre + reach * np.cos(angle), np.ascontiguousarray(series @ weights)


def compress(tile: FloatArray, cut: Segments) -> FloatArray:
    """Sums of a tile, float64[T, 2 width], times the cardinal polynomials: float64[T, 2 M], lower half first.

    Ranks count from the left end in the lower half, from the right end in the upper.
    """
    count, end = cut.nodes.size, tile.shape[1]
    out = np.empty((tile.shape[0], 2 * count))
    out[:, : cut.direct] = tile[:, : cut.direct]
    out[:, count : count + cut.direct] = tile[:, end - cut.direct :][:, ::-1]
    at = cut.direct
    # dot, not matmul, which lets no other thread run where the result is small.
    for (first, stop), basis in zip(cut.bounds, cut.bases, strict=True):
        out[:, at : at + NODES] = tile[:, first:stop].dot(basis)
        out[:, count + at : count + at + NODES] = tile[:, end - stop : end - first].dot(basis)[:, ::-1]
        at += NODES
    return out


def counted(cut: Segments, present: int) -> FloatArray:
    """What `compress` gives for a half that holds 1 at ranks 1 ... present and 0 beyond, float64[M]."""
    weights = np.zeros(cut.nodes.size)
    weights[: min(present, cut.direct)] = 1.0
    at = cut.direct
    for (first, stop), basis, whole in zip(cut.bounds, cut.bases, cut.sums, strict=True):
        weights[at : at + NODES] = whole if stop <= present else basis[: max(0, present - first)].sum(axis=0)
        at += NODES
    return weights
