"""The run: the table of channels, the plot of the one under the cursor, and what is going on."""

from __future__ import annotations

import textwrap
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from textual import events, on
from textual.app import ComposeResult
from textual.containers import Container
from textual.screen import Screen

from screener.ui import messages
from screener.ui.captions import channel_words, order_words, place_words, title
from screener.ui.drawing import Wanted
from screener.ui.feed import Feed
from screener.ui.keys import PLOT_KEYS, TABLE_KEYS, WIDE_KEYS
from screener.ui.numbers import seconds_text
from screener.ui.palette import NOTICE, PLAIN, QUIET, STRONG
from screener.ui.showing import Showing, showing_from
from screener.ui.shown import ascii_only, shown
from screener.ui.widgets.channel_table import ChannelTable
from screener.ui.widgets.key_line import KeyLine
from screener.ui.widgets.lines import Line, Lines, plain
from screener.ui.widgets.plot_panel import PlotPanel
from screener.ui.widgets.progress import confirming_line, preparing_line, progress_line
from screener.ui.widgets.prompt import Prompt

if TYPE_CHECKING:
    import polars as pl

    from screener.ui.rows import Arrangement

WIDE = 110
LEAST_WIDTH, LEAST_HEIGHT = 60, 15
NOTICE_LINES = 5
"""Lines that a long notice may take from the table."""


class Board(Screen[None]):
    """Shows the run; what keys do stands in MainScreen."""

    AUTO_FOCUS = ""

    def __init__(self, source_title: str, feed: Feed, *, unicode: bool) -> None:
        super().__init__()
        self._source_title = source_title
        self._feed = feed
        self._unicode = unicode
        self._table = ChannelTable(unicode=unicode)
        self._panel = PlotPanel(unicode=unicode)
        self._prompt = Prompt()
        self._opened: messages.RunOpened | None = None
        self._results: pl.DataFrame | None = None
        self._rows: pl.DataFrame | None = None
        self._showing = Showing()
        self._row_chosen = False
        self._return_to = ""
        """The channel to go to when its row is there."""
        self._marked: frozenset[int] = frozenset()
        self._families: tuple[str, ...] = ()
        self._turns = 0
        """Turns of the family asked for before the families were known."""
        self._searched = ""
        self._lost: list[str] = []
        self._notice = ""
        self._to_replace: Path | None = None

    def compose(self) -> ComposeResult:
        """From top to bottom."""
        yield Lines(id="title")
        yield Lines(id="sentence")
        yield Lines(id="progress")
        with Container(id="body"):
            yield self._table
            yield self._panel
        yield Lines(id="status")
        yield self._prompt
        yield KeyLine(id="keys")
        yield Lines(id="too-small")

    def on_mount(self) -> None:
        """Say what is coming."""
        self._line("title", plain(shown(self._source_title), STRONG))
        self._line("sentence", plain("Reading ..."))
        self.query_one("#progress").display = False

    def on_resize(self, event: events.Resize) -> None:
        """Choose the layout that fits."""
        width, height = event.size
        tiny = width < LEAST_WIDTH or height < LEAST_HEIGHT
        self.set_class(width >= WIDE, "wide")
        self.set_class(tiny, "tiny")
        self._show_keys()
        sentences = (f"This window has {width} x {height} cells.", f"The screen needs {LEAST_WIDTH} x {LEAST_HEIGHT}.")
        self.query_one("#too-small", Lines).show([*map(plain, sentences), plain("Make it larger, or press q.")])

    def run_opened(self, event: messages.RunOpened) -> None:
        """The table is known."""
        self._opened = event
        self._showing = showing_from(event.view)
        self._return_to = event.view.get("channel", "")
        self._table.choose(self._showing.columns)
        self._line("title", plain(title(event.facts, event.plan), STRONG))

    def progressed(self, event: messages.Progressed) -> None:
        """Show how far it has come."""
        if self._opened is None:
            return
        bar = self.query_one("#progress", Lines)
        bar.display = True
        total = len(self._opened.facts.channels)
        width = self.size.width
        bar.show([progress_line(event.tried, total, event.tried_now, event.seconds, width, unicode=self._unicode)])

    def preparing(self, event: messages.Preparing) -> None:
        """Show what is simulated before scoring can begin."""
        bar = self.query_one("#progress", Lines)
        bar.display = True
        bar.show([preparing_line(event.positions, event.share, self.size.width, unicode=self._unicode)])

    def confirming(self, event: messages.ConfirmingGoesOn) -> None:
        """Show how many samples are made, unless scoring takes that line."""
        if not self._feed.is_scoring:
            bar = self.query_one("#progress", Lines)
            bar.display = True
            name, width = shown(event.channel), self.size.width
            bar.show([confirming_line(name, event.made, event.wanted, width, unicode=self._unicode)])

    def confirming_ended(self, event: messages.ConfirmingEnded) -> None:
        """No more progress to show."""
        if not self._feed.is_scoring:
            self.query_one("#progress").display = False
        if event.sentence:
            self._say(event.sentence)

    def scoring_ended(self, event: messages.ScoringEnded) -> None:
        """No more progress to show; nothing is said of a run that was finished before."""
        bar = self.query_one("#progress")
        if event.cancelled:
            self._say("Stopped.")
        elif bar.display:
            self._say(f"Scored in {seconds_text(event.seconds)}.")
        bar.display = False

    def block_lost(self, event: messages.BlockLost) -> None:
        """Say so; the rest goes on."""
        self._lost.append(event.sentence)
        self._say(event.sentence)

    def results_read(self, event: messages.ResultsRead) -> None:
        """Show the newest rows."""
        self._results = event.results
        self._line("sentence", plain(event.sentence))
        self._show_rows()

    def channel_drawn(self, event: messages.ChannelDrawn) -> None:
        """Show the plot, unless the cursor has gone on."""
        channel = self._table.channel
        if channel is not None and channel["position"] == event.drawing.wanted.position:
            self._panel.draw(event.drawing)
            self._families = event.drawing.families
            if self._turns:
                self.action_turn_family(0)

    def decided(self, event: messages.Decided) -> None:
        """Show what is decided now."""
        if self._results is not None:
            from screener.ui.rows import with_decisions

            self._results = with_decisions(self._results, event.decisions)
            self._show_rows()
            self._want_plot()
        self._say(event.sentence)

    def action_turn_family(self, by: int) -> None:
        """Hold the channel against another family."""
        self._turns += by
        if self._families:
            family = self._family()
            place = self._families.index(family) + self._turns if family in self._families else 0
            self._turns = 0
            self._change(family=self._families[place % len(self._families)])
            self._want_plot()

    def exported(self, event: messages.Exported) -> None:
        """Say what was written."""
        self._say(event.sentence)

    @on(PlotPanel.RoomChanged)
    def _room_changed(self) -> None:
        self._want_plot()

    def _arrangement(self) -> Arrangement:
        from screener.ui.rows import Arrangement

        now = self._showing
        return Arrangement(now.sort, falling=now.falling, flagged_only=now.flagged_only, condition=now.condition)

    def _change(self, **changes: Any) -> None:
        """Look at something else from now on, also next time."""
        self._showing = replace(self._showing, **changes)
        self._keep()

    def _keep(self) -> None:
        """Have it kept where the user is."""
        channel = self._table.channel
        if channel is not None and not self._return_to:
            self._feed.keep(self._showing.words(channel["channel"]))

    def _family(self) -> str:
        """What the plot is held against: the family turned to, else that of the channel."""
        channel = self._table.channel
        assert self._opened is not None
        return self._showing.family or (channel and channel["family"]) or self._opened.plan.family

    def _show_rows(self) -> None:
        """Arrange what there is; the cursor stays on its channel."""
        if self._results is None:
            return
        from screener.ui.conditions import ConditionError
        from screener.ui.rows import arranged, row_named, row_of

        channel = self._table.channel
        try:
            self._rows = arranged(self._results, self._arrangement())
        except ConditionError:
            # Kept from another time, or rows that have changed since: nothing is hidden for a condition that fails.
            self._showing = replace(self._showing, condition="")
            self._rows = arranged(self._results, self._arrangement())
        # Blocks may come in any order: until the user has chosen a row, the cursor stays on the first.
        cursor = row_of(self._rows, channel["position"]) if channel is not None and self._row_chosen else None
        if self._return_to:
            found = row_named(self._rows, self._return_to)
            cursor = cursor if found is None else found
            self._row_chosen = self._row_chosen or found is not None
            self._return_to = "" if found is not None else self._return_to
        self._table.show(self._rows, cursor=cursor, sort=(self._showing.sort, self._showing.falling))
        self._show_status()
        if self._table.channel != channel:
            self._want_plot()

    def _move_to(self, row: int) -> None:
        """Put the cursor on a row; status and plot follow at once, in the same repaint."""
        self._notice, before, self._row_chosen, self._return_to = "", self._table.cursor, True, ""
        self._table.move_to(row)
        self._show_status()
        if self._table.cursor != before:
            self._keep()
            self._want_plot()

    def _want_plot(self) -> None:
        """Ask for the plot of the channel under the cursor, if there is room to see it."""
        channel = self._table.channel
        width, height = self._panel.room
        if channel is not None and self._panel.display and width > 0 and height > 0:
            view = self._showing.view
            self._feed.draw(Wanted(channel["position"], channel["n"] or 0, self._family(), width, height, view))

    def _say(self, sentence: str) -> None:
        """Show a notice until the cursor moves or the order changes."""
        self._notice = sentence
        self._show_status()

    def _show_keys(self) -> None:
        beside = WIDE_KEYS if self.has_class("wide") else TABLE_KEYS
        self.query_one(KeyLine).show_keys(PLOT_KEYS if self.has_class("plot-over") else beside)

    def _show_status(self) -> None:
        if self._notice:
            self._show_notice()
            return
        self.query_one("#status").styles.height = 1
        now, rows = self._showing, self._table.row_count
        place = place_words(self._table.cursor, rows, flagged_only=now.flagged_only, condition=now.condition)
        order = order_words(now.sort, falling=now.falling)
        marked = f"   {len(self._marked):,} marked" if self._marked else ""
        self._line("status", [(f"{place}, {order}", QUIET), (marked + channel_words(self._table.channel), PLAIN)])

    def _show_notice(self) -> None:
        """The notice in as many lines as it needs, within reason."""
        text = self._notice if self._unicode else ascii_only(self._notice)
        lines = textwrap.wrap(text, max(20, self.size.width))[:NOTICE_LINES]
        status = self.query_one("#status", Lines)
        status.styles.height = len(lines)
        status.show([plain(line, NOTICE) for line in lines])

    def _line(self, name: str, line: Line) -> None:
        if not self._unicode:
            line = [(ascii_only(text), style) for text, style in line]
        self.query_one(f"#{name}", Lines).show([line])
