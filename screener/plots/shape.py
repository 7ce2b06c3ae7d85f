"""The shape curve: r over the shape of a family, highest where the quantile plot is straightest."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from screener.plots.canvas import LEAST_HEIGHT, LEAST_WIDTH, Axis, Charset, Layer, Mark, draw, message
from screener.stats.families import family_named
from screener.stats.shape_curve import shape_curve

if TYPE_CHECKING:
    from screener.records import FloatArray

MARGIN = 0.03


def shape_plot(
    points: FloatArray, n: int, family_name: str, positions: str, *, width: int, height: int, charset: Charset
) -> list[str]:
    """`height` lines of `width` cells: the curve and a dot at its highest place."""
    family = family_named(family_name)
    if family.shape_count == 0:
        return message(f"The {family.name} family has no shape.", width=width, height=height)
    if family.shape_count > 1:
        both = " and ".join(family.shapes.names)
        return message(f"{family.name} has two shapes, {both}: see the best ones above.", width=width, height=height)
    if points.size == 0 or points[0] == points[-1]:
        return message("No readings to plot.", width=width, height=height)
    if width < LEAST_WIDTH or height < LEAST_HEIGHT:
        return message("No room for the plot.", width=width, height=height)
    at, r = shape_curve(points, n, family, positions)
    best = int(np.argmax(r))
    x = _axis(at, family.shapes.coordinate_name)
    layers = [Layer(at, r, Mark.LINE), Layer(at[best : best + 1], r[best : best + 1], Mark.POINT)]
    return draw(layers, x=x, y=_axis(r, "r"), width=width, height=height, charset=charset)


def _axis(values: FloatArray, label: str) -> Axis:
    low, high = float(values.min()), float(values.max())
    margin = MARGIN * (high - low) or 0.01
    return Axis(low - margin, high + margin, label)
