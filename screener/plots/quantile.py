"""The quantile plot of one channel: sorted readings (actual) against what a family expects at their ranks.

Expected value of the k-th smallest reading: location + scale * G(u_k), with u_k the plotting position. A family on the
log axis is plotted in ln x.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from screener.plots.canvas import LEAST_HEIGHT, LEAST_WIDTH, Axis, Charset, Layer, Mark, draw, message, thinned
from screener.stats.band import band, has_band
from screener.stats.families import Axis as FamilyAxis
from screener.stats.families import family_named
from screener.stats.points import kept_ranks
from screener.stats.positions import plotting_positions

if TYPE_CHECKING:
    from screener.records import FloatArray

MARGIN = 0.03
"""Share of the range left free on either side of the outermost points."""
TAIL = 0.25
"""Share of the range of expected values that the plot of a tail shows."""
FEWEST_IN_TAIL = 8


@dataclass(frozen=True, slots=True)
class QuantileView:
    """What a quantile plot shows; `actual` and `expected` are [m], both increasing, empty when nothing can be drawn."""

    actual: FloatArray
    expected: FloatArray
    actual_label: str
    expected_label: str
    obstacle: str = ""
    """Why there is nothing to draw, one sentence; empty when there is."""
    low: FloatArray | None = None
    high: FloatArray | None = None
    """[m] the ends of the 95 % simultaneous band at the points; None for families that have none."""
    is_difference: bool = False
    """`actual` and the band are differences from the expected values."""


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
    low, high = (location + scale * end for end in band(family, n)) if has_band(family) else (None, None)
    return QuantileView(actual, location + scale * standard, *labels, low=low, high=high)


def tail_of(view: QuantileView, *, upper: bool) -> QuantileView:
    """The same plot, of an outermost quarter of the range of expected values, with at least FEWEST_IN_TAIL points."""
    if view.obstacle:
        return view
    first, last = view.expected[0], view.expected[-1]
    if upper:
        start = min(
            int(np.searchsorted(view.expected, last - (last - first) * TAIL)), view.actual.size - FEWEST_IN_TAIL
        )
        part = slice(max(0, start), None)
    else:
        stop = int(np.searchsorted(view.expected, first + (last - first) * TAIL, side="right"))
        part = slice(0, max(stop, FEWEST_IN_TAIL))
    low, high = (None if end is None else end[part] for end in (view.low, view.high))
    return replace(view, actual=view.actual[part], expected=view.expected[part], low=low, high=high)


def difference_of(view: QuantileView) -> QuantileView:
    """The same points as actual minus expected, where the line y = x has become level."""
    if view.obstacle:
        return view
    low, high = (None if end is None else end - view.expected for end in (view.low, view.high))
    label = f"{view.actual_label} minus expected"
    return replace(view, actual=view.actual - view.expected, actual_label=label, low=low, high=high, is_difference=True)


def quantile_plot(view: QuantileView, *, width: int, height: int, charset: Charset) -> list[str]:
    """`height` lines of exactly `width` cells: points over the line on which actual equals expected, and the band."""
    if width < 1 or height < 1:
        return []
    if view.obstacle:
        return message(view.obstacle, width=width, height=height)
    if width < LEAST_WIDTH or height < LEAST_HEIGHT:
        return message("No room for the plot.", width=width, height=height)
    line = np.zeros(2) if view.is_difference else view.expected
    x, y = _axis([view.expected], view.expected_label), _axis([view.actual, line], view.actual_label)
    shown = thinned(view.expected, view.actual, x_axis=x, y_axis=y, width=width, height=height)
    ends = np.array([x.low, x.high] if view.is_difference else [max(x.low, y.low), min(x.high, y.high)])
    layers = [
        *_band_layers(view, y),
        Layer(ends, np.zeros(2) if view.is_difference else ends, Mark.LINE),
        Layer(view.expected[shown], view.actual[shown], Mark.POINT),
    ]
    return draw(layers, x=x, y=y, width=width, height=height, charset=charset)


def _band_layers(view: QuantileView, y: Axis) -> list[Layer]:
    """Both ends of the band, where they lie in the frame: the range is that of the points, not of the band."""
    layers = []
    for end in (view.low, view.high):
        if end is not None:
            seen = (end >= y.low) & (end <= y.high)
            layers.append(Layer(view.expected[seen], end[seen], Mark.BAND))
    return [layer for layer in layers if layer.x.size > 1]


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


def _axis(shown: list[FloatArray], label: str) -> Axis:
    low = float(min(values.min() for values in shown))
    high = float(max(values.max() for values in shown))
    margin = MARGIN * high - MARGIN * low
    return Axis(low - margin, high + margin, label)
