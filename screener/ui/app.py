"""The application: one run, its screen, and what remains to be said when it closes."""

from __future__ import annotations

import os
from collections.abc import Iterable, Sequence
from functools import partial
from pathlib import Path, PurePath
from typing import ClassVar

from textual import on
from textual.app import App, SystemCommand
from textual.binding import Binding, BindingType
from textual.filter import LineFilter, NoColor
from textual.screen import Screen

from screener.ui import messages
from screener.ui.abilities import Abilities, abilities
from screener.ui.feed import Feed
from screener.ui.filters import AsciiOnly, Colourless, Harmless
from screener.ui.palette import THEME
from screener.ui.screens.main import MainScreen
from screener.ui.source import Source

INTERRUPTED = 130


class ScreenerApp(App[int]):
    """Shows one run; returns its exit code."""

    CSS_PATH: ClassVar[list[str | PurePath]] = ["app.tcss", "screens/main.tcss", "screens/page.tcss"]
    TITLE = "screener"
    ENABLE_COMMAND_PALETTE = True
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("ctrl+c", "interrupt", "Stop and quit", show=False, priority=True),
        Binding("ctrl+z", "suspend_process", "Put in the background", show=False, priority=True),
    ]

    def __init__(self, source: Source, *, can: Abilities | None = None) -> None:
        # Native colours: the terminal's own 16, and none at all with NO_COLOR.
        super().__init__(ansi_color=True)
        self.register_theme(THEME)
        self.theme = THEME.name
        self.animation_level = "none"
        self.source = source
        self.can = can or abilities(os.environ)
        self.feed = Feed(source, self.post_message, unicode=self.can.unicode)
        self.main = MainScreen(source.title, self.feed, unicode=self.can.unicode)
        self.failure: BaseException | None = None
        self.run_path: Path | None = source.run_path
        self.unfinished = ""
        """A sentence about what was left undone; empty when nothing was."""
        self._line_filters: list[LineFilter] = [Harmless()] if self.can.unicode else [Harmless(), AsciiOnly()]

    def get_line_filters(self) -> Sequence[LineFilter]:
        """The library's filters, then ours."""
        library = [kept for kept in super().get_line_filters() if not isinstance(kept, NoColor)]
        return [*library, *([Colourless()] if self.no_color else []), *self._line_filters]

    def get_default_screen(self) -> Screen[None]:
        """The only screen that stays."""
        return self.main

    def on_mount(self) -> None:
        """Begin when the first frame is out."""
        self.call_after_refresh(self.feed.begin)

    def get_system_commands(self, screen: Screen[object]) -> Iterable[SystemCommand]:
        """Every action of the screen, by name."""
        for binding in (*type(screen).BINDINGS, *type(self).BINDINGS):
            if isinstance(binding, Binding):
                run = partial(screen.run_action, binding.action)
                yield SystemCommand(binding.description, f"key: {self.get_key_display(binding)}", run)

    @on(messages.RunOpened)
    def _opened(self, event: messages.RunOpened) -> None:
        self.run_path = event.run_path
        self.main.run_opened(event)

    @on(messages.Progressed)
    def _progressed(self, event: messages.Progressed) -> None:
        self.main.progressed(event)

    @on(messages.Preparing)
    def _preparing(self, event: messages.Preparing) -> None:
        self.main.preparing(event)

    @on(messages.ResultsRead)
    def _results_read(self, event: messages.ResultsRead) -> None:
        self.main.results_read(event)

    @on(messages.ChannelDrawn)
    def _channel_drawn(self, event: messages.ChannelDrawn) -> None:
        self.main.channel_drawn(event)

    @on(messages.ScoringEnded)
    def _scoring_ended(self, event: messages.ScoringEnded) -> None:
        self.main.scoring_ended(event)

    @on(messages.BlockLost)
    def _block_lost(self, event: messages.BlockLost) -> None:
        self.main.block_lost(event)

    @on(messages.Decided)
    def _decided(self, event: messages.Decided) -> None:
        self.main.decided(event)

    @on(messages.Exported)
    def _exported(self, event: messages.Exported) -> None:
        self.main.exported(event)

    @on(messages.ConfirmingGoesOn)
    def _confirming(self, event: messages.ConfirmingGoesOn) -> None:
        self.main.confirming(event)

    @on(messages.ConfirmingEnded)
    def _confirming_ended(self, event: messages.ConfirmingEnded) -> None:
        self.main.confirming_ended(event)

    @on(messages.QuitAsked)
    def _quit_asked(self) -> None:
        self.leave(0)

    @on(messages.RunImpossible)
    def _impossible(self, event: messages.RunImpossible) -> None:
        self._fail(event.error)

    @on(messages.ThreadBroke)
    def _broke(self, event: messages.ThreadBroke) -> None:
        self._fail(event.error)

    def _fail(self, error: BaseException) -> None:
        """Close; the error is raised when the terminal is back as it was."""
        self.failure = error
        self.exit()

    def action_interrupt(self) -> None:
        """Stop at once."""
        self.leave(INTERRUPTED if self.feed.is_scoring else 0)

    def leave(self, code: int) -> None:
        """Quit without waiting for a task that runs."""
        if self.feed.is_scoring:
            self.unfinished = "Stopped before all channels were scored; the same command goes on from there."
        self.feed.stop()
        self.exit(code)
