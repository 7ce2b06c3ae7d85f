"""The outermost readings of a channel by name: value, row, and distance from what the family expects."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from screener.ui.numbers import reading_text
from screener.ui.views import View

if TYPE_CHECKING:
    from screener.plots import QuantileView
    from screener.records import FloatArray, IntArray

AT_LOW = {View.QUANTILE, View.DIFFERENCE, View.LOW_TAIL}
AT_HIGH = {View.QUANTILE, View.DIFFERENCE, View.HIGH_TAIL}


@dataclass(frozen=True, slots=True)
class TailReading:
    """One of the outermost readings."""

    reading: float
    row: int
    """From 1."""
    off: float | None
    """Actual minus expected, in ln x for a family on the log axis; None where the family expects nothing."""

    def words(self) -> str:
        """As it is named beside a plot."""
        off = "" if self.off is None else f" ({self.off:+.4g})"
        return f"{reading_text(self.reading)} in row {self.row:,}{off}"


@dataclass(frozen=True, slots=True)
class Tails:
    """The outermost readings, each end from the outside inwards."""

    low: tuple[TailReading, ...] = ()
    high: tuple[TailReading, ...] = ()


def tails_of(points: FloatArray, rows: IntArray, view: QuantileView) -> Tails:
    """The readings that stand in these rows: the lowest first, then the highest, as `stats.outermost` gives them.

    `view` is the whole quantile plot of the same points. Nothing is named when the rows do not fit the points.
    """
    low = rows.size - rows.size // 2
    high = rows.size - low
    if not 0 < rows.size <= points.size:
        return Tails()
    fits = view.actual.size == points.size
    off = (view.actual - view.expected).tolist() if fits else [None] * points.size
    named = [*zip(points[:low], rows[:low], off[:low], strict=True)]
    upper = [*zip(points[points.size - high :], rows[low:], off[len(off) - high :], strict=True)]
    return Tails(_named(named), _named(upper[::-1]))


def tail_lines(tails: Tails, view: View, width: int) -> list[str]:
    """A line for each end that the view shows, with as many readings as there is room for."""
    ends = [("lowest", tails.low)] if view in AT_LOW else []
    ends += [("highest", tails.high)] if view in AT_HIGH else []
    return [_line(f"{name:8}", readings, width) for name, readings in ends if readings]


def _line(text: str, readings: Sequence[TailReading], width: int) -> str:
    for reading in readings:
        longer = f"{text} {reading.words()}  "
        if len(longer.rstrip()) > width:
            break
        text = longer
    return text.rstrip()


def _named(found: Sequence[tuple[float, int, float | None]]) -> tuple[TailReading, ...]:
    return tuple(TailReading(float(reading), int(row) + 1, off) for reading, row, off in found)
