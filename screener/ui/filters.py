"""Last filters before the terminal: nothing unsafe leaves, and nothing but ASCII where that is all the terminal has."""

from __future__ import annotations

import re

from rich.cells import cell_len
from rich.segment import Segment
from textual.color import Color
from textual.filter import LineFilter

from screener.ui.shown import UNSAFE

NOT_ASCII = re.compile("[^\x00-\x7f]")
LIKENESSES = str.maketrans(
    "┌┐└┘├┤┬┴┼╭╮╰╯│┃║─━═▔▁▂▃▄▅▆▇█▊▋▌▍▎▏▐▕▀▖▗▘▝•·…⏎↑↓←→^",
    "+++++++++++++|||---" + "-" * 2 + "_" * 4 + "#" * 3 + "|" * 5 + "#||" + "-" + "...." + "*..<^v<>^",
)
"""What the library's own widgets draw with, in plain characters."""


class Harmless(LineFilter):
    """Replaces what a terminal might act on, should any have come this far."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:
        """The same segments with unsafe characters replaced by question marks."""
        return [
            Segment(UNSAFE.sub("?", text), style) if not control and UNSAFE.search(text) else segment
            for segment in segments
            for text, style, control in [segment]
        ]


class Colourless(LineFilter):
    """Leaves no colour code at all; the library's own filter still sets the default colours."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:
        """The same segments, bold, underlined or reversed as they were, but of no colour."""
        return [
            Segment(text, style.without_color if style is not None else None, control)
            for text, style, control in segments
        ]


class AsciiOnly(LineFilter):
    """Replaces every character outside ASCII by a likeness of the same width."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:
        """The same segments in ASCII."""
        return [
            segment if segment.text.isascii() else Segment(_in_ascii(segment.text), segment.style, segment.control)
            for segment in segments
        ]


def _in_ascii(text: str) -> str:
    return NOT_ASCII.sub(lambda found: "?" * cell_len(found.group()), text.translate(LIKENESSES))
