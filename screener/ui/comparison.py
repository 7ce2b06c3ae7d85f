"""The application of a comparison of two runs."""

from __future__ import annotations

import os
from collections.abc import Iterable, Sequence
from functools import partial
from pathlib import PurePath
from typing import TYPE_CHECKING, ClassVar

from textual.app import App, SystemCommand
from textual.binding import Binding, BindingType
from textual.filter import LineFilter, NoColor
from textual.screen import Screen

from screener.ui.abilities import Abilities, abilities, refusal
from screener.ui.filters import AsciiOnly, Colourless, Harmless
from screener.ui.palette import THEME
from screener.ui.screens.comparison import ComparisonScreen
from screener.ui.terminal import NoScreenError, end_with_terminal

if TYPE_CHECKING:
    import polars as pl


def compare_on_screen(rows: pl.DataFrame, title: str, notice: str = "") -> int:
    """Show the comparison, and the notice first, until the user leaves it; the exit code."""
    impossible = refusal(os.environ)
    if impossible:
        raise NoScreenError(impossible)
    end_with_terminal()
    return ComparisonApp(rows, title, notice).run() or 0


class ComparisonApp(App[int]):
    """Shows one comparison; returns its exit code."""

    CSS_PATH: ClassVar[list[str | PurePath]] = ["app.tcss", "screens/comparison.tcss", "screens/page.tcss"]
    TITLE = "screener"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("ctrl+c", "quit", "Quit", show=False, priority=True),
        Binding("ctrl+z", "suspend_process", "Put in the background", show=False, priority=True),
    ]

    def __init__(self, rows: pl.DataFrame, title: str, notice: str = "", *, can: Abilities | None = None) -> None:
        super().__init__(ansi_color=True)
        self.register_theme(THEME)
        self.theme = THEME.name
        self.animation_level = "none"
        self._unicode = (can or abilities(os.environ)).unicode
        self._comparison = ComparisonScreen(rows, title, notice)

    def get_line_filters(self) -> Sequence[LineFilter]:
        """The library's filters, then ours."""
        library = [kept for kept in super().get_line_filters() if not isinstance(kept, NoColor)]
        plainer: list[LineFilter] = [] if self._unicode else [AsciiOnly()]
        return [*library, *([Colourless()] if self.no_color else []), Harmless(), *plainer]

    def get_default_screen(self) -> Screen[None]:
        """The only screen that stays."""
        return self._comparison

    def get_system_commands(self, screen: Screen[object]) -> Iterable[SystemCommand]:
        """Every action of the screen, by name."""
        for binding in (*type(screen).BINDINGS, *type(self).BINDINGS):
            if isinstance(binding, Binding):
                run = partial(screen.run_action, binding.action)
                yield SystemCommand(binding.description, f"key: {self.get_key_display(binding)}", run)

    async def action_quit(self) -> None:
        """Leave."""
        self.exit(0)
