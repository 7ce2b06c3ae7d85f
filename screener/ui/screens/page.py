"""A page of text over the run: help, and what the reader did with the table."""

from __future__ import annotations

import re
import textwrap
from collections.abc import Sequence
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import ModalScreen

from screener.ui.widgets.key_line import KeyLine
from screener.ui.widgets.lines import Line, Lines, plain

KEYS = (("Up Down", "move", "scroll(1)"), ("PgUp PgDn", "page", "page(1)"), ("Esc", "close", "close"))

HANGING = re.compile(r"\*? *(\S+( \S+)* {2,})?")
"""What further lines of a paragraph stay clear of: its bullet, or its indent with a term set off by spaces."""


class Page(ModalScreen[None]):
    """Shows wrapped paragraphs until Esc."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape,q,question_mark,i,enter", "close", "Close this page", priority=True),
        Binding("down", "scroll(1)", "Down", show=False, priority=True),
        Binding("up", "scroll(-1)", "Up", show=False, priority=True),
        Binding("pagedown,space", "page(1)", "Page down", show=False, priority=True),
        Binding("pageup", "page(-1)", "Page up", show=False, priority=True),
    ]

    def __init__(self, paragraphs: Sequence[Line], *, id: str) -> None:  # noqa: A002 - the name that every screen has
        super().__init__(id=id)
        self._paragraphs = paragraphs

    def compose(self) -> ComposeResult:
        """The text and the keys."""
        yield Lines(id="text")
        yield KeyLine(id="page-keys")

    def on_mount(self) -> None:
        """The keys of a page."""
        self.query_one(KeyLine).show_keys(KEYS)

    def on_resize(self) -> None:
        """Wrap anew."""
        width = max(20, self.size.width - 2)
        lines = [line for paragraph in self._paragraphs for line in wrapped(paragraph, width)]
        self.query_one("#text", Lines).show(lines)

    def action_close(self) -> None:
        """Back to the run."""
        self.dismiss()

    def action_scroll(self, by: int) -> None:
        """Some lines on."""
        self.query_one("#text", Lines).scroll_lines(by)

    def action_page(self, by: int) -> None:
        """Most of a page on."""
        text = self.query_one("#text", Lines)
        text.scroll_lines(by * max(1, text.size.height - 2))


def wrapped(paragraph: Line, width: int) -> list[Line]:
    """The paragraph in lines of at most `width` cells; one of several pieces is left as it is."""
    if len(paragraph) != 1:
        return [paragraph]
    text, style = paragraph[0]
    head = HANGING.match(text)
    hanging = " " * (head.end() if head else 0)
    lines = textwrap.wrap(text, width, subsequent_indent=hanging, break_on_hyphens=False)
    return [plain(line, style) for line in lines] or [plain("")]
