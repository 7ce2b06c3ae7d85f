"""Draws points and lines in a frame of character cells.

plotext keeps one figure for the whole process, so every drawing holds one lock from clearing to building.
"""

from __future__ import annotations

import threading
from dataclasses import dataclass
from enum import Enum, auto
from typing import TYPE_CHECKING

import numpy as np
import plotext

from screener.plots.ticks import Ticks, round_ticks

if TYPE_CHECKING:
    from screener.records import FloatArray, IntArray

_DRAWING = threading.Lock()

OVERSAMPLING = 4
"""Cells are divided this finely when points that would fall on each other are dropped."""

LEAST_WIDTH = 20
LEAST_HEIGHT = 6
"""The smallest frame in which a plot can still be read."""

ROWS_A_TICK = 3
COLUMNS_A_TICK = 8


class Charset(Enum):
    """Which characters a plot may use."""

    UNICODE = auto()
    ASCII = auto()


class Mark(Enum):
    """How a layer is drawn."""

    POINT = auto()
    LINE = auto()
    BAND = auto()


MARKERS: dict[Charset, dict[Mark, str]] = {
    Charset.UNICODE: {Mark.POINT: "•", Mark.LINE: "braille", Mark.BAND: "braille"},
    Charset.ASCII: {Mark.POINT: "o", Mark.LINE: ".", Mark.BAND: ":"},
}

_FRAME_IN_ASCII = str.maketrans("┌┐└┘┬┴├┤┼─│", "+++++++++-|")


@dataclass(frozen=True, slots=True)
class Layer:
    """One series; later layers are drawn over earlier ones."""

    x: FloatArray
    y: FloatArray
    mark: Mark


@dataclass(frozen=True, slots=True)
class Axis:
    """The range shown along one side, and what it is called."""

    low: float
    high: float
    label: str

    def share(self, values: FloatArray) -> FloatArray:
        """How far along the axis each value lies, 0 at the low end and 1 at the high end."""
        # Halves first: the difference of two readings near the largest float would overflow.
        return (values / 2 - self.low / 2) / (self.high / 2 - self.low / 2)


def draw(layers: list[Layer], *, x: Axis, y: Axis, width: int, height: int, charset: Charset) -> list[str]:
    """A framed plot of exactly `height` lines of `width` cells: the y label above, the x label below the frame.

    All values must be finite; labels must be plain text of one cell a character.
    """
    inner = height - 2
    x_ticks = round_ticks(x.low, x.high, at_most=max(2, width // COLUMNS_A_TICK))
    y_ticks = round_ticks(y.low, y.high, at_most=max(2, inner // ROWS_A_TICK + 1))
    built = _build(layers, x, y, x_ticks, y_ticks, width, inner, charset)
    lines = [_with_offset(y.label, y_ticks), *built, _with_offset(x.label, x_ticks).rjust(width)]
    if charset is Charset.ASCII:
        lines = [line.translate(_FRAME_IN_ASCII).encode("ascii", "replace").decode("ascii") for line in lines]
    return [line[:width].ljust(width) for line in lines]


def message(text: str, *, width: int, height: int) -> list[str]:
    """A sentence in the middle of an otherwise empty area, for what cannot be plotted."""
    words, wrapped = text.split(), [""]
    for word in words:
        joined = f"{wrapped[-1]} {word}".strip()
        wrapped = [*wrapped[:-1], joined] if len(joined) <= width else [*wrapped, word]
    above = max(0, (height - len(wrapped)) // 2)
    lines = [""] * above + wrapped
    return [line[:width].center(width) for line in (lines + [""] * height)[:height]]


def thinned(x: FloatArray, y: FloatArray, *, x_axis: Axis, y_axis: Axis, width: int, height: int) -> IntArray:
    """Indices (increasing) of one point per fraction of a cell; the first and last points are always among them."""
    if x.size == 0:
        return np.empty(0, dtype=np.int64)
    columns = _fractions(x, x_axis, width)
    rows = _fractions(y, y_axis, height)
    _, first = np.unique(rows * (width * OVERSAMPLING + 1) + columns, return_index=True)
    return np.union1d(first, [0, x.size - 1])


def _fractions(values: FloatArray, axis: Axis, cells: int) -> IntArray:
    """Which fraction of a cell each value falls in, counted from the low end."""
    return np.floor(axis.share(values) * cells * OVERSAMPLING).astype(np.int64)


def _with_offset(label: str, ticks: Ticks) -> str:
    return f"{label} (+ {ticks.offset})" if ticks.offset else label


def _build(
    layers: list[Layer], x: Axis, y: Axis, x_ticks: Ticks, y_ticks: Ticks, width: int, height: int, charset: Charset
) -> list[str]:
    """plotext's own lines, without colour codes."""
    with _DRAWING:
        plotext.clear_figure()
        # Without limitsize the size is clamped to that of the terminal.
        plotext.limitsize(False, False)
        plotext.plotsize(width, height)
        plotext.theme("clear")
        for layer in layers:
            drawn = plotext.scatter if layer.mark is Mark.POINT else plotext.plot
            # plotext is given shares of the axes, so that no reading is too large, too small or too far from 0 for it.
            drawn(x.share(layer.x).tolist(), y.share(layer.y).tolist(), marker=MARKERS[charset][layer.mark])
        plotext.xlim(0.0, 1.0)
        plotext.ylim(0.0, 1.0)
        plotext.xticks(x.share(np.array(x_ticks.values)).tolist(), list(x_ticks.labels))
        plotext.yticks(y.share(np.array(y_ticks.values)).tolist(), list(y_ticks.labels))
        built: str = plotext.uncolorize(plotext.build())
    return built.split("\n")[:height]
