"""Lines of styled text, cut to the cells there are; no markup, no wrapping."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import zip_longest

from rich.segment import Segment
from rich.style import Style
from textual.geometry import Region
from textual.strip import Strip
from textual.widget import Widget

from screener.ui.palette import PLAIN
from screener.ui.shown import fitted

Piece = tuple[str, Style]
Line = Sequence[Piece]


def plain(text: str, style: Style = PLAIN) -> Line:
    """A line of one style."""
    return [(text, style)]


class Lines(Widget):
    """Shows lines from the `top`-th on."""

    def __init__(self, *, id: str | None = None) -> None:  # noqa: A002 - the name that every widget has
        super().__init__(id=id)
        self._lines: Sequence[Line] = ()
        self._top = 0

    def show(self, lines: Sequence[Line]) -> None:
        """Replace the lines; what does not change is not drawn again."""
        before, self._lines = self._lines, lines
        for index, (old, new) in enumerate(zip_longest(before, lines)):
            if old != new:
                self.refresh(Region(0, index - self._top, self.size.width, 1))

    def scroll_lines(self, by: int) -> None:
        """Move down by that many lines (up when negative), as far as there is anything to see."""
        last = max(0, len(self._lines) - self.size.height)
        self._top = min(max(0, self._top + by), last)
        self.refresh()

    def render_line(self, y: int) -> Strip:
        """One line of exactly the widget's width."""
        width = self.size.width
        index = y + self._top
        segments: list[Segment] = []
        left = width
        for text, style in self._lines[index] if index < len(self._lines) else ():
            piece = text if len(text) <= left and text.isascii() else fitted(text, min(left, _cells(text)))
            segments.append(Segment(piece, style))
            left -= _cells(piece)
        segments.append(Segment(" " * left))
        return Strip(segments, width).simplify()


def _cells(text: str) -> int:
    return Segment(text).cell_length
