"""The quantile plot of one channel: sorted readings (actual) against what a family expects at their ranks.

Expected value of the k-th smallest reading: location + scale * G(u_k), with u_k the plotting position. A family on the
log axis is plotted in ln x.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from screener.plots.canvas import LEAST_HEIGHT, LEAST_WIDTH, Axis, Charset, Layer, Mark, draw, message, thinned
from screener.stats.families import Axis as FamilyAxis
from screener.stats.families import family_named
from screener.stats.points import kept_ranks
from screener.stats.positions import plotting_positions

if TYPE_CHECKING:
    from screener.records import FloatArray

MARGIN = 0.03
"""Share of the range left free on either side of the outermost points."""


@dataclass(frozen=True, slots=True)
class QuantileView:
    """What a quantile plot shows; `actual` and `expected` are [m], both increasing, empty when nothing can be drawn."""

    actual: FloatArray
    expected: FloatArray
    actual_label: str
    expected_label: str
    obstacle: str = ""
    """Why there is nothing to draw, one sentence; empty when there is."""


def quantile_view(
    points: FloatArray,
    n: int,
    family_name: str,
    positions: str,
    location: float,
    scale: float,
    shapes: Sequence[float] = (),
) -> QuantileView:
    """The plot of the kept sorted readings `points` [m] of a channel of n readings (ranks: `kept_ranks(n)`).

    `shapes` are the family's shape parameters, in the family's order, if it has any.
    """
    family = family_named(family_name)
    on_log = family.axis is FamilyAxis.LOG
    labels = ("ln of actual" if on_log else "actual", f"expected if {family.name}")
    obstacle = _obstacle(points, family_name, on_log=on_log, fitted=bool(np.isfinite(location) and 0 < scale < np.inf))
    if obstacle:
        return QuantileView(np.empty(0), np.empty(0), *labels, obstacle=obstacle)
    standard = family.quantile(_kept_positions(n, positions), *shapes)
    actual = np.log(points) if on_log else np.asarray(points, dtype=np.float64)
    return QuantileView(actual, location + scale * standard, *labels)


def quantile_plot(view: QuantileView, *, width: int, height: int, charset: Charset) -> list[str]:
    """`height` lines of exactly `width` cells: points over the line on which actual equals expected."""
    if width < 1 or height < 1:
        return []
    if view.obstacle:
        return message(view.obstacle, width=width, height=height)
    if width < LEAST_WIDTH or height < LEAST_HEIGHT:
        return message("No room for the plot.", width=width, height=height)
    x = _axis(view.expected, view.expected, view.expected_label)
    y = _axis(view.actual, view.expected, view.actual_label)
    shown = thinned(view.expected, view.actual, x_axis=x, y_axis=y, width=width, height=height)
    ends = np.array([max(x.low, y.low), min(x.high, y.high)])
    layers = [Layer(ends, ends, Mark.LINE), Layer(view.expected[shown], view.actual[shown], Mark.POINT)]
    return draw(layers, x=x, y=y, width=width, height=height, charset=charset)


@lru_cache(maxsize=256)
def _kept_positions(n: int, rule: str) -> FloatArray:
    """Plotting positions at the kept ranks; a million of them take longer than the drawing."""
    kept: FloatArray = plotting_positions(n, rule)[kept_ranks(n)]
    kept.setflags(write=False)
    return kept


def _obstacle(points: FloatArray, family_name: str, *, on_log: bool, fitted: bool) -> str:
    """Why these readings cannot be held against the family, or nothing."""
    if points.size == 0:
        return "No readings to plot."
    if points[0] == points[-1]:
        return f"All readings are equal ({points[0]:.10g}): there is nothing to plot."
    if on_log and points[0] <= 0:
        return f"Outside the support of the {family_name} family: the smallest reading is {points[0]:.6g}."
    if not fitted:
        return f"The {family_name} family was not fitted to this channel."
    return ""


def _axis(first: FloatArray, second: FloatArray, label: str) -> Axis:
    low = float(min(first[0], second[0]))
    high = float(max(first[-1], second[-1]))
    margin = MARGIN * high - MARGIN * low
    return Axis(low - margin, high + margin, label)
