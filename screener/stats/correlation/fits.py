"""Every channel fitted with every family: r, location and scale."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation.on_grid import carried, products
from screener.stats.correlation.projection import IntArray, Projection, project
from screener.stats.correlation.score_table import score_table
from screener.stats.correlation.shape_search import best_shape, shape_table
from screener.stats.families import Axis, Family
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
    shapes: FloatArray
    """[C, F, 2] shape parameters at which r is largest; NaN where the family has fewer."""
    steps: FloatArray
    """[C, F, 2] the same shapes in steps of the family's grid."""
    outside: NDArray[np.bool_]
    """[C, F] the channel has readings outside the family's support."""


def fit_families(ordered: FloatArray, n: IntArray, families: Sequence[Family], rule: str) -> Fits:
    """Correlate sorted readings, float64[C, rows] with n[C] finite ones first, with each family.

    Channels of fewer than three readings, or without spread, get NaN.
    """
    fits = no_fits(ordered.shape[0], len(families))
    enough = np.flatnonzero(n >= 3)
    varying = enough[ordered[enough, 0] < ordered[enough, n[enough] - 1]]
    if varying.size:
        _fit_linear(fits, ordered, n, families, rule, varying)
        _fit_log(fits, ordered, n, families, rule, varying)
    return fits


def no_fits(channels: int, families: int) -> Fits:
    """Fits of that many channels and families, to be filled in."""
    shape = (channels, families)
    r, location, scale = (np.full(shape, np.nan) for _ in range(3))
    shapes, steps = (np.full((*shape, 2), np.nan) for _ in range(2))
    return Fits(r, location, scale, shapes, steps, np.zeros(shape, dtype=np.bool_))


def _fit_linear(
    fits: Fits, ordered: FloatArray, n: IntArray, families: Sequence[Family], rule: str, rows: IntArray
) -> None:
    columns = on_axis(families, Axis.LINEAR)
    if columns.size:
        near, exponent = brought_near(ordered, n)
        projection = project(near, n, rows, rule, differences)
        centre = near[rows, n[rows] // 2] + projection.mean
        fill(fits, projection, families, columns, rows, centre, exponent[rows])


def _fit_log(
    fits: Fits, ordered: FloatArray, n: IntArray, families: Sequence[Family], rule: str, rows: IntArray
) -> None:
    columns = on_axis(families, Axis.LOG)
    positive = ordered[rows, 0] > 0.0
    fits.outside[np.ix_(rows[~positive], columns)] = True
    rows = rows[positive]
    if rows.size and columns.size:
        projection = project(ordered, n, rows, rule, log_differences)
        centre = np.log(ordered[rows, n[rows] // 2]) + projection.mean
        fill(fits, projection, families, columns, rows, centre, np.zeros_like(rows))


def on_axis(families: Sequence[Family], axis: Axis) -> IntArray:
    """Places of the families on an axis."""
    return np.array([i for i, family in enumerate(families) if family.axis is axis], dtype=np.int64)


def fill(
    fits: Fits,
    projection: Projection,
    families: Sequence[Family],
    columns: IntArray,
    rows: IntArray,
    centre: FloatArray,
    exponent: IntArray,
) -> None:
    """Fill in the families `columns` at the channels `rows`, whose mean is centre x 2^exponent on their axis."""
    plain = np.array([i for i in columns if not families[i].shape_count], dtype=np.int64)
    shaped = [int(i) for i in columns if families[i].shape_count]
    names = tuple(families[i].name for i in plain)
    for x in carried(projection):
        at = rows[x.members]
        back = _WayBack(centre[x.members, None], exponent[x.members, None], x.length[:, None])
        if plain.size:
            table = score_table(names, x.start)
            found = products(x, table.columns)
            _place(fits, np.ix_(at, plain), back, found.r, found.mean + table.median, found.length)
        for column in shaped:
            best = best_shape(x, shape_table(families[column].name, x.start))
            place = np.ix_(at, np.array([column]))
            _place(fits, place, back, best.r[:, None], best.mean[:, None], best.length[:, None])
            fits.shapes[at, column] = _shapes(families[column], best.coordinates)
            fits.steps[at, column, : best.coordinates.shape[1]] = best.coordinates


@dataclass(frozen=True, slots=True)
class _WayBack:
    """From deviations to the channel's units, each [C, 1]."""

    centre: FloatArray
    exponent: IntArray
    length: FloatArray


def _place(
    fits: Fits, place: tuple[IntArray, ...], back: _WayBack, r: FloatArray, mean: FloatArray, length: FloatArray
) -> None:
    """r, location and scale from the mean and length of the standard quantiles, each [C, K]."""
    slope = r * back.length / length
    fits.r[place] = np.clip(r, 0.0, 1.0)
    fits.scale[place] = np.ldexp(slope, back.exponent)
    fits.location[place] = np.ldexp(back.centre - slope * mean, back.exponent)


def _shapes(family: Family, steps: FloatArray) -> FloatArray:
    """Shape parameters, float64[C, 2], at places on the family's grid, float64[C, shapes] in steps."""
    shapes = np.full((steps.shape[0], 2), np.nan)
    shapes[:, : family.shape_count] = np.stack(family.shapes.at(steps), axis=1)
    return shapes
