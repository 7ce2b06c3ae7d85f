"""The shape that makes the plot straightest: r is largest there.

Quantile functions are tabled over an even grid of shape coordinates. The best grid point and its neighbours give the
place of the maximum; the quantile function there is interpolated in the coordinates, so that r is the correlation with
one member of the family, not a value read off a curve.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import lru_cache
from threading import Lock

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation.logit_grid import GRID, LOWER, UPPER
from screener.stats.correlation.on_grid import IntArray, OnGrid, products
from screener.stats.families import FAMILIES, Family, family_named
from screener.stats.families.family import FloatArray

POINTS = 6
"""Grid points, in each coordinate, that a quantile function is interpolated from."""

FINE = 4
"""Parts of half a grid step in which the interpolated r is looked through for its maximum."""

MOVES = 12
"""Times that the search may go on from a neighbouring grid point."""

CHUNK = 64
"""Channels whose interpolated quantile functions are held at a time."""

SPREAD = np.array([0.1, 0.5, 0.9])


def lagrange_weights(at: FloatArray, points: int) -> FloatArray:
    """Weights of values at 0, 1, ..., points - 1 in the polynomial through them, at any places: [..., points]."""
    weights = np.ones((*at.shape, points))
    offsets = np.arange(points)
    for other in range(points):
        factor = (at - other)[..., None] / np.where(offsets == other, 1, offsets - other)
        weights *= np.where(offsets == other, 1.0, factor)
    return weights


OFFSETS = np.arange(-FINE, FINE + 1) / (2 * FINE)
"""Fine places from half a grid step before a place to half a step after it."""

FINE_WEIGHTS = lagrange_weights(np.arange(2 * POINTS - 1)[:, None] / 2.0 + OFFSETS, POINTS)
"""[2 POINTS - 1, fine, POINTS] weights of a window of grid points at the fine places around each of its half steps."""


@dataclass(frozen=True, slots=True)
class ShapeTable:
    """One family over its grid of shapes: K columns, the last coordinate running fastest."""

    family: Family
    columns: FloatArray
    """[K, 2 grid] quantiles less the median, over the range from 10 % to 90 %."""
    counts: tuple[int, ...]
    """Grid points in each coordinate."""


@dataclass(frozen=True, slots=True)
class BestShape:
    """The straightest member of a family for each of C channels."""

    r: FloatArray
    coordinates: FloatArray
    """[C, shapes] place on the grid, in steps."""
    mean: FloatArray
    """[C] mean of the standard quantiles at the channel's positions."""
    length: FloatArray
    """[C] root of the sum of squared deviations of the standard quantiles."""


_TABLING = Lock()
"""Threads that need the same table wait for it rather than make it twice."""


def table_ahead() -> None:
    """Table all families with shapes, which takes a noticeable part of a second, before they are needed."""
    for family in FAMILIES:
        if family.shape_count:
            shape_table(family.name, 0)


@lru_cache(maxsize=32)
def shape_table(name: str, start: int) -> ShapeTable:
    """The table of the named family, on the grid from its point start."""
    with _TABLING:
        whole = _whole_table(name)
    kept = np.concatenate([np.arange(start, GRID.size), np.arange(GRID.size + start, 2 * GRID.size)])
    return replace(whole, columns=np.ascontiguousarray(whole.columns[:, kept]))


@lru_cache(maxsize=16)
def _whole_table(name: str) -> ShapeTable:
    """The table on the whole grid; the quantile functions behind it are costly."""
    family = family_named(name)
    shapes = [parameter[:, None] for parameter in family.shapes.at(family.shapes.points())]
    low, median, high = family.quantile(SPREAD, *shapes).T
    values = np.concatenate([family.quantile(LOWER, *shapes), family.quantile(UPPER, *shapes)], axis=1)
    columns = (values - median[:, None]) / (high - low)[:, None]
    return ShapeTable(family, columns, family.shapes.counts)


def best_shape(x: OnGrid, table: ShapeTable) -> BestShape:
    """Find the straightest member of a family for every channel."""
    at_grid = products(x, table.columns.T)
    each, start = np.arange(x.members.size), np.argmax(at_grid.r, axis=1)
    steps = np.stack(np.unravel_index(start, table.counts), axis=1)
    refined = _climbed(at_grid.r.reshape(-1, *table.counts))
    members, weights = neighbours(table.counts, refined)
    parts = [_interpolated(x, table, members, weights, first) for first in range(0, each.size, CHUNK)]
    r, mean, length = (np.concatenate(part) for part in zip(*parts, strict=True))
    # A grid point may be as good as the place found between them, for instance at the edge of the grid.
    worse = r < at_grid.r[each, start]
    chosen = np.where(worse[:, None], steps, refined)
    low, median, high = table.family.quantile(SPREAD, *(shape[:, None] for shape in table.family.shapes.at(chosen))).T
    return BestShape(
        r=np.where(worse, at_grid.r[each, start], r),
        coordinates=chosen,
        mean=median + (high - low) * np.where(worse, at_grid.mean[each, start], mean),
        length=(high - low) * np.where(worse, at_grid.length[each, start], length),
    )


def _between(r: FloatArray) -> FloatArray:
    """r at the grid points and half way between them, [C, 2 grid - 1...], from r at the grid points, [C, grid...]."""
    return _along(r, [_dense_weights(np.arange(2 * count - 1) / 2.0, count) for count in r.shape[1:]])


def _along(values: FloatArray, weights: list[FloatArray]) -> FloatArray:
    """Interpolate values, [C, points...], along each axis with its weights, [C or 1, places, points]."""
    if len(weights) == 1:
        return np.asarray(np.matmul(weights[0], values[:, :, None])[:, :, 0], dtype=np.float64)
    both = np.matmul(np.matmul(weights[0], values), np.swapaxes(weights[1], -1, -2))
    return np.asarray(both, dtype=np.float64)


def _dense_weights(places: FloatArray, count: int) -> FloatArray:
    """Weights of all grid points of one axis at places, float64[1, places, count]."""
    first = np.clip(np.floor(places).astype(np.int64) - POINTS // 2 + 1, 0, count - POINTS)
    weights = np.zeros((places.size, count))
    np.put_along_axis(weights, first[:, None] + np.arange(POINTS), lagrange_weights(places - first, POINTS), axis=1)
    return weights[None]


def _climbed(r: FloatArray) -> FloatArray:
    """Where r, [C, grid...], is largest, float64[C, d] in steps: from the best half step up along its ridge."""
    half = _between(r)
    start = np.argmax(half.reshape(half.shape[0], -1), axis=1)
    at = np.stack(np.unravel_index(start, half.shape[1:]), axis=1)
    found = _maximum(r, at)
    for _ in range(MOVES):
        moved = np.flatnonzero(np.any(np.abs(2.0 * found - at) > 0.99, axis=1))
        if moved.size == 0:
            break
        at = np.round(2.0 * found).astype(np.int64)
        found[moved] = _maximum(r[moved], at[moved])
    return found


def _windows(r: FloatArray, first: IntArray) -> FloatArray:
    """The POINTS by POINTS values of r that begin at first, int64[C, d], along each axis."""
    each = np.arange(first.shape[0])
    index = first[:, :, None] + np.arange(POINTS)
    if first.shape[1] == 1:
        return np.asarray(r[each[:, None], index[:, 0]], dtype=np.float64)
    return np.asarray(r[each[:, None, None], index[:, 0, :, None], index[:, 1, None, :]], dtype=np.float64)


def _maximum(r: FloatArray, at: IntArray) -> FloatArray:
    """Where r is largest within half a grid step of a place, int64[C, d] in half steps: float64[C, d] in grid steps."""
    counts = np.array(r.shape[1:])
    first = np.clip(at // 2 - POINTS // 2 + 1, 0, counts - POINTS)
    places = 0.5 * at[:, :, None] + OFFSETS
    weights = FINE_WEIGHTS[at - 2 * first]
    fine = _along(_windows(r, first), [weights[:, axis] for axis in range(counts.size)])
    for axis, count in enumerate(counts):
        off_grid = (places[:, axis] < 0.0) | (places[:, axis] > count - 1.0)
        fine[off_grid if fine.ndim == 2 else _lines(off_grid, axis, fine)] = -1.0
    best = np.stack(np.unravel_index(np.argmax(fine.reshape(at.shape[0], -1), axis=1), fine.shape[1:]), axis=1)
    step = _towards_vertex(fine, best) * (OFFSETS[1] - OFFSETS[0])
    return np.asarray(
        np.clip(np.take_along_axis(places, best[:, :, None], axis=2)[:, :, 0] + step, 0.0, counts - 1.0),
        dtype=np.float64,
    )


def _lines(off_grid: NDArray[np.bool_], axis: int, fine: FloatArray) -> NDArray[np.bool_]:
    """The places of two coordinates, [C, fine, fine], of which the one on `axis` is off the grid."""
    lines = off_grid[:, :, None] if axis == 0 else off_grid[:, None, :]
    return np.broadcast_to(lines, fine.shape)


def _towards_vertex(fine: FloatArray, best: IntArray) -> FloatArray:
    """From the best of fine places, int64[C, d], to the vertex of a quadratic through its neighbours, in fine steps."""
    inner = np.clip(best, 1, np.array(fine.shape[1:]) - 2)
    each = np.arange(best.shape[0])

    def value(*offsets: int) -> FloatArray:
        return np.asarray(fine[(each, *(inner + np.array(offsets)).T)], dtype=np.float64)

    step = _vertex(value(-1), value(0), value(1))[:, None] if best.shape[1] == 1 else _vertex_2d(value)
    return np.where(np.any(inner != best, axis=1, keepdims=True), 0.0, np.clip(step, -1.0, 1.0))


def _vertex(before: FloatArray, centre: FloatArray, after: FloatArray) -> FloatArray:
    """Where a parabola through three evenly spaced values is highest, from the middle one; 0 if it has no top."""
    bend = before - 2.0 * centre + after
    return np.where(bend < 0.0, -0.5 * (after - before) / np.where(bend < 0.0, bend, -1.0), 0.0)


def _vertex_2d(value: Callable[[int, int], FloatArray]) -> FloatArray:
    """The same for a quadratic in two coordinates, along its two principal directions; a ridge only across it."""
    centre = value(0, 0)
    left, right, down, up = value(-1, 0), value(1, 0), value(0, -1), value(0, 1)
    slope = 0.5 * np.stack([right - left, up - down], axis=1)
    bend_1, bend_2 = left - 2.0 * centre + right, down - 2.0 * centre + up
    twist = 0.25 * (value(1, 1) - value(1, -1) - value(-1, 1) + value(-1, -1))
    turn = 0.5 * np.arctan2(2.0 * twist, bend_1 - bend_2)
    step = np.zeros_like(slope)
    for angle in (turn, turn + 0.5 * np.pi):
        along = np.stack([np.cos(angle), np.sin(angle)], axis=1)
        bend = bend_1 * along[:, 0] ** 2 + 2.0 * twist * along[:, 0] * along[:, 1] + bend_2 * along[:, 1] ** 2
        rise = (slope * along).sum(axis=1)
        length = np.where(bend < 0.0, -rise / np.where(bend < 0.0, bend, -1.0), 0.0)
        step += np.clip(length, -1.0, 1.0)[:, None] * along
    return step


def neighbours(counts: tuple[int, ...], at: FloatArray) -> tuple[IntArray, FloatArray]:
    """Columns, int64[C, P], and weights, float64[C, P], that interpolate at grid places, float64[C, d]."""
    members = np.zeros((at.shape[0], 1), dtype=np.int64)
    weights = np.ones((at.shape[0], 1))
    for axis, count in enumerate(counts):
        first = np.clip(np.floor(at[:, axis]).astype(np.int64) - POINTS // 2 + 1, 0, count - POINTS)
        lagrange = lagrange_weights(at[:, axis] - first, POINTS)
        index = first[:, None] + np.arange(POINTS)
        members = (members[:, :, None] * count + index[:, None, :]).reshape(at.shape[0], -1)
        weights = (weights[:, :, None] * lagrange[:, None, :]).reshape(at.shape[0], -1)
    return members, weights


def _interpolated(
    x: OnGrid, table: ShapeTable, members: IntArray, weights: FloatArray, first: int
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """r, mean and length of the members of a family interpolated for each channel, for one chunk of channels."""
    part = slice(first, first + CHUNK)
    quantiles = np.matmul(weights[part, None, :], table.columns[members[part]])[:, 0]
    ones = x.ones[x.which[part]]
    sums = np.einsum("cg,cg->c", ones, quantiles)
    mean = sums / x.sizes[x.which[part]]
    length = np.sqrt(np.einsum("cg,cg,cg->c", ones, quantiles, quantiles) - mean * sums)
    cross = np.einsum("cg,cg->c", x.readings[part], quantiles) - x.mean[part] * sums
    return cross / (x.length[part] * length), mean, length
