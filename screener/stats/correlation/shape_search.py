"""The shape that makes the plot straightest: r is largest there.

Quantile functions are tabled at Chebyshev points of the shape coordinates. The polynomial through r at these points
is r of the members between them to eight digits and more (tests/bench/bench_shape_search.py), so its highest top is the
statistic.
"""

from dataclasses import dataclass, replace
from functools import lru_cache
from threading import Lock

import numpy as np

from screener.stats.correlation.logit_grid import GRID, LOWER, UPPER
from screener.stats.correlation.on_grid import WIDE_TILE, OnGrid, tiled_product
from screener.stats.correlation.surface import Axis, axis, highest, values_at
from screener.stats.families import FAMILIES, Family, family_named
from screener.stats.families.family import FloatArray

RANK = 40
"""Functions of which all members of a family with two shapes are sums, to twelve digits."""

SPREAD = np.array([0.1, 0.9])

INNER = 80
"""Grid points before this one, which only channels of more than 20,000 readings need, are tabled when one comes."""


@dataclass(frozen=True, slots=True)
class Sums:
    """K functions on the probability grid, as sums of fewer."""

    basis: FloatArray
    """[2 grid, B]"""
    shares: FloatArray | None
    """[B, K] the functions are basis @ shares; None when they are the basis."""

    def whole(self, parts: FloatArray) -> FloatArray:
        """Products with the functions, float64[C, K], from those with the basis, float64[C, B]."""
        return parts if self.shares is None else tiled_product(parts, self.shares, WIDE_TILE)


@dataclass(frozen=True, slots=True)
class ShapeTable:
    """One family at the K Chebyshev points of its shapes, the last coordinate running fastest."""

    family: Family
    axes: tuple[Axis, Axis]
    """The second has one point when there is one shape."""
    members: Sums
    """Quantiles less the middle of those at 10 % and 90 %, over their difference."""
    squares: Sums
    """Their squares."""
    middle: FloatArray
    """[K] middle of the quantiles at 10 % and 90 %, less the family's centre, over their difference."""
    log_range: FloatArray
    """[K] ln of that difference over the family's width."""


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
            shape_table(family.name, INNER)


@lru_cache(maxsize=32)
def shape_table(name: str, start: int) -> ShapeTable:
    """The table of the named family, on the grid from its point start."""
    first = INNER if start >= INNER else 0
    with _TABLING:
        made = _made_table(name, first)
    half, skipped = GRID.size - first, start - first
    kept = np.concatenate([np.arange(skipped, half), np.arange(half + skipped, 2 * half)])
    return replace(
        made,
        members=replace(made.members, basis=made.members.basis[kept]),
        squares=replace(made.squares, basis=made.squares.basis[kept]),
    )


@lru_cache(maxsize=16)
def _made_table(name: str, first: int) -> ShapeTable:
    """The table on the grid from its point first; the quantile functions behind it are costly."""
    family = family_named(name)
    if family.shape_count == 2:
        first_nodes, second_nodes = family.shapes.nodes
    else:
        # Far out in the tails quantiles change faster.
        first_nodes, second_nodes = family.shapes.nodes[0] * (2 if first else 3) // 2, 1
    axes = axis(first_nodes), axis(second_nodes)
    places = np.stack([at.ravel() for at in np.meshgrid(axes[0].points, axes[1].points, indexing="ij")], axis=1)
    steps = family.shapes.smooth(places[:, : family.shape_count])
    shapes = [parameter[:, None] for parameter in family.shapes.at(steps)]
    low, high = np.split(family.quantile(SPREAD, *shapes), 2, axis=1)
    middle, span = 0.5 * (low + high), high - low
    u = np.concatenate([LOWER[first:], UPPER[first:]])
    values = family.quantile(u, *shapes)
    columns = ((values - middle) / span).T
    centre, width = family.centre_and_width(*shapes)
    density = u * (1.0 - u) if family.shape_count == 2 else None
    return ShapeTable(
        family,
        axes,
        members=_sums(columns, density),
        # Far out in the tails squares are too unlike for few functions.
        squares=_sums(columns**2, density if first else None),
        middle=((middle - centre) / span)[:, 0],
        log_range=np.log(span / width)[:, 0],
    )


def _sums(columns: FloatArray, density: FloatArray | None) -> Sums:
    """Columns, float64[2 grid, K], as they are or, where many are alike, as sums of RANK functions.

    Their errors weigh by the density of the readings, float64[2 grid]. The range is found from a few random sums of
    columns (Halko, Martinsson & Tropp 2011, SIAM Review 53:217).
    """
    if density is None:
        return Sums(columns, None)
    weight = np.sqrt(density)[:, None]
    some = np.random.default_rng(0).standard_normal((columns.shape[1], RANK))
    orthonormal = np.linalg.qr((weight * columns) @ some)[0]
    return Sums(orthonormal / weight, orthonormal.T @ (weight * columns))


def best_shape(x: OnGrid, table: ShapeTable) -> BestShape:
    """Find the straightest member of a family for every channel."""
    counts = tuple(along.points.size for along in table.axes)
    ones = tiled_product(x.ones, table.members.basis)
    sums = table.members.whole(ones)
    mean = sums / x.sizes[:, None]
    squares = table.squares.whole(tiled_product(x.ones, table.squares.basis))
    length = np.sqrt(squares - mean * sums)
    cross = tiled_product(x.readings, table.members.basis, WIDE_TILE) - x.mean[:, None] * ones[x.which]
    r = table.members.whole(cross / x.length[:, None]) / length[x.which]
    top, place = highest(r.reshape(-1, *counts), table.axes)
    steps = table.family.shapes.smooth(place[:, : table.family.shape_count])
    centre, width = table.family.centre_and_width(*table.family.shapes.at(steps))
    surfaces = (table.log_range[None, :], np.log(length)[x.which], (mean + table.middle)[x.which])
    log_span, log_length, mean_there = values_at(
        tuple(known.reshape(-1, *counts) for known in surfaces), table.axes, place
    )
    span = width * np.exp(log_span)
    return BestShape(top, steps, mean=centre + span * mean_there, length=span * np.exp(log_length))
