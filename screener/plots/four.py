"""Run order, lag and histogram of one channel: with the quantile plot, the four plots of the NIST/SEMATECH e-Handbook.

What depends on the order of rows is drawn from what is kept of it; see `stats.row_order`.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from screener.plots.canvas import LEAST_HEIGHT, LEAST_WIDTH, Axis, Charset, Layer, Mark, draw, message, thinned
from screener.stats.points import kept_ranks

if TYPE_CHECKING:
    from collections.abc import Sequence

    from screener.records import FloatArray
    from screener.stats.row_order import RowOrder

MARGIN = 0.03
BAR_CELLS = 3
"""Cells of a histogram's bar, across."""
FEWEST_BARS, MOST_BARS = 5, 60
CELLS_A_FILE = 6
"""Fewer cells across than this for a file, and lines between files would hide the readings."""


def run_order_plot(
    order: RowOrder | None,
    unit: str,
    *,
    width: int,
    height: int,
    charset: Charset,
    starts: Sequence[int] = (),
) -> list[str]:
    """Readings against their rows; of a long record, the lowest and highest of every stretch of rows.

    A line stands before each of the rows `starts`, from 1, where another file begins, unless they would crowd.
    """
    if order is None or not np.isfinite(order.reading).any():
        return message("No readings in row order are kept in this run file.", width=width, height=height)
    there = np.isfinite(order.reading)
    label = "row" if order.stretch == 1 else f"row (lowest and highest of every {order.stretch:,})"
    label, marked = _with_starts(label, starts, width)
    row, reading = order.row[there], order.reading[there]
    return _scatter(row, reading, label, f"reading{unit}", width, height, charset, marked)


def lag_plot(order: RowOrder | None, unit: str, *, width: int, height: int, charset: Charset) -> list[str]:
    """Readings against the one in the row before; of a long record, of some rows at even steps."""
    both = None if order is None else np.isfinite(order.before) & np.isfinite(order.after)
    if order is None or both is None or not both.any():
        return message("No readings in row order are kept in this run file.", width=width, height=height)
    label = "reading in the row before" if order.stretch == 1 else f"reading in the row before ({both.sum():,} of them)"
    return _scatter(order.before[both], order.after[both], label, f"reading{unit}", width, height, charset)


def histogram_plot(points: FloatArray, n: int, unit: str, *, width: int, height: int, charset: Charset) -> list[str]:
    """Counts of readings in bars of even width, from the readings kept at `kept_ranks(n)`."""
    if points.size == 0 or points[0] == points[-1]:
        return message("No readings to plot.", width=width, height=height)
    if width < LEAST_WIDTH or height < LEAST_HEIGHT:
        return message("No room for the plot.", width=width, height=height)
    edges, counts = histogram(points, n, at_most=min(MOST_BARS, max(FEWEST_BARS, (width - 10) // BAR_CELLS)))
    # Outlines as steps: the marks of a bar must not be taken for readings.
    x = np.repeat(edges, 2)
    y = np.concatenate([[0.0], np.repeat(counts, 2), [0.0]])
    margin = MARGIN * edges[-1] - MARGIN * edges[0]
    across = Axis(float(edges[0] - margin), float(edges[-1] + margin), f"reading{unit}")
    return draw(
        [Layer(x, y, Mark.LINE)],
        x=across,
        y=Axis(0.0, float(counts.max()) * (1 + MARGIN), "readings"),
        width=width,
        height=height,
        charset=charset,
    )


def histogram(points: FloatArray, n: int, *, at_most: int) -> tuple[FloatArray, FloatArray]:
    """Edges [b + 1] and counts [b] of even bars; a kept reading stands for its neighbours in rank too.

    The number of bars is by Freedman and Diaconis 1981: width 2 IQR / n^(1/3).
    """
    ranks = kept_ranks(n) + 1.0
    low, high = float(points[0]), float(points[-1])
    quarter, three = np.interp([0.25 * n, 0.75 * n], ranks, points)
    span = high / 2 - low / 2
    step = (three / 2 - quarter / 2) * 2 / n ** (1 / 3)
    wanted = int(np.ceil(span / step)) if step > 0 and span / step < at_most else at_most
    edges = np.linspace(low, high, max(FEWEST_BARS, wanted) + 1)
    between = (ranks[1:] + ranks[:-1]) / 2
    stands_for = np.diff(np.concatenate([[0.5], between, [n + 0.5]]))
    return edges, np.histogram(points, edges, weights=stands_for)[0]


def _with_starts(label: str, starts: Sequence[int], width: int) -> tuple[str, FloatArray]:
    """What the axis of rows is called, and where lines stand on it."""
    if not starts:
        return label, np.empty(0)
    if len(starts) > width // CELLS_A_FILE:
        return f"{label}, {len(starts) + 1:,} files", np.empty(0)
    return f"{label}; a line: the next file", np.array(starts) - 0.5


def _scatter(
    x: FloatArray,
    y: FloatArray,
    x_label: str,
    y_label: str,
    width: int,
    height: int,
    charset: Charset,
    lines_at: FloatArray | None = None,
) -> list[str]:
    if width < LEAST_WIDTH or height < LEAST_HEIGHT:
        return message("No room for the plot.", width=width, height=height)
    across, up = _axis(x, x_label), _axis(y, y_label)
    shown = thinned(x, y, x_axis=across, y_axis=up, width=width, height=height)
    ends = np.array([up.low, up.high])
    within = [] if lines_at is None else [at for at in lines_at.tolist() if across.low < at < across.high]
    lines = [Layer(np.array([at, at]), ends, Mark.LINE) for at in within]
    points = Layer(x[shown], y[shown], Mark.POINT)
    return draw([*lines, points], x=across, y=up, width=width, height=height, charset=charset)


def _axis(values: FloatArray, label: str) -> Axis:
    low, high = float(values.min()), float(values.max())
    margin = MARGIN * high - MARGIN * low
    if low == high:
        margin = abs(low) * MARGIN or 1.0
    return Axis(low - margin, high + margin, label)
