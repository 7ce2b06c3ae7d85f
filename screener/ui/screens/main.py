"""The run: the table of channels, the plot of the one under the cursor, and what is going on."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, ClassVar

from textual import events, on
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Container
from textual.screen import Screen

from screener.ui import messages
from screener.ui.captions import order_words, place_words, title
from screener.ui.columns import COLUMNS
from screener.ui.drawing import Wanted
from screener.ui.feed import Feed
from screener.ui.keys import ACTIONS, PLOT_KEYS, TABLE_KEYS, WHILE_ASKING, WIDE_KEYS
from screener.ui.numbers import seconds_text
from screener.ui.palette import NOTICE, PLAIN, QUIET, STRONG
from screener.ui.screens.help import help_page
from screener.ui.screens.page import Page
from screener.ui.screens.reading import reading_page
from screener.ui.shown import ascii_only, shown
from screener.ui.widgets.channel_table import ChannelTable
from screener.ui.widgets.key_line import KeyLine
from screener.ui.widgets.lines import Line, Lines, plain
from screener.ui.widgets.plot_panel import PlotPanel
from screener.ui.widgets.progress import preparing_line, progress_line
from screener.ui.widgets.prompt import Prompt

if TYPE_CHECKING:
    import polars as pl

    from screener.ui.rows import Arrangement

WIDE = 110
LEAST_WIDTH, LEAST_HEIGHT = 60, 15
FIND, EXPORT = "find", "export"


class MainScreen(Screen[None]):
    """Connects the table, the plot and the feed."""

    AUTO_FOCUS = ""
    # With priority: keys are then acted upon in the order typed, also when many arrive together over a slow line.
    BINDINGS: ClassVar[list[BindingType]] = [
        *(Binding(keys, action, description, priority=True) for keys, action, description in ACTIONS),
    ]

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
        self._sort: str | None = None
        self._falling = self._flagged_only = self._row_chosen = False
        self._family = ""
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

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool:
        """While something is asked, keys belong to the field."""
        return not self._prompt.purpose or action in WHILE_ASKING or not hasattr(self, f"action_{action}")

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

    # What the feed tells.

    def run_opened(self, event: messages.RunOpened) -> None:
        """The table is known."""
        self._opened = event
        self._family = event.plan.family
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

    def scoring_ended(self, event: messages.ScoringEnded) -> None:
        """No more progress to show."""
        self.query_one("#progress").display = False
        self._say("Stopped." if event.cancelled else f"Scored in {seconds_text(event.seconds)}.")

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

    def exported(self, event: messages.Exported) -> None:
        """Say what was written."""
        self._say(event.sentence)

    # What the widgets tell.

    @on(PlotPanel.RoomChanged)
    def _room_changed(self) -> None:
        self._want_plot()

    @on(ChannelTable.CursorMoved)
    def _cursor_moved(self, event: ChannelTable.CursorMoved) -> None:
        self._move_to(event.row)

    @on(ChannelTable.HeaderClicked)
    def _header_clicked(self, event: ChannelTable.HeaderClicked) -> None:
        self._sort_by(event.key)

    @on(ChannelTable.RowChosen)
    def action_open_plot(self) -> None:
        """Show the plot alone, or the table again."""
        if self.has_class("plot-over"):
            self.action_back()
        elif self._table.channel is not None:
            self.add_class("plot-over")
            self._show_keys()

    def action_back(self) -> None:
        """Drop the question, or show the table again."""
        if self._prompt.purpose:
            self._close_prompt()
            return
        self.remove_class("plot-over")
        self._show_keys()

    def action_turn_family(self, by: int) -> None:
        """Hold the channel against another family."""
        self._turns += by
        if self._families:
            place = self._families.index(self._family) + self._turns if self._family in self._families else 0
            self._family, self._turns = self._families[place % len(self._families)], 0
            self._want_plot()

    def action_move(self, by: int) -> None:
        """Some rows on."""
        self._move_to(self._table.cursor + by)

    def action_page(self, by: int) -> None:
        """A page of rows on."""
        self._move_to(self._table.cursor + by * self._table.height_in_rows)

    def action_move_to(self, row: int) -> None:
        """To a row, counted from the end when negative."""
        self._move_to(row if row >= 0 else self._table.row_count + row)

    def action_sort_next(self) -> None:
        """Sort by the column after the present one; after the last, in table order."""
        keys = [None, *(column.key for column in COLUMNS)]
        self._sort_by(keys[(keys.index(self._sort) + 1) % len(keys)])

    def action_sort_by(self, number: int) -> None:
        """Sort by the column of that number, 0 for table order; the same again reverses."""
        self._sort_by(COLUMNS[number - 1].key if number else None)

    def action_reverse(self) -> None:
        """Turn the order round."""
        self._falling = not self._falling
        self._rearrange()

    def action_flagged_only(self) -> None:
        """Leave the others out, or take them in again."""
        self._flagged_only = not self._flagged_only
        self._rearrange()

    def action_find(self) -> None:
        """Ask for a name."""
        self._ask(FIND, "Find:")

    def action_find_next(self) -> None:
        """Go to the next name that fits."""
        if self._searched:
            self._go_to(self._searched, self._table.cursor + 1)

    def action_export(self) -> None:
        """Ask for a file name."""
        if self._opened is not None and self._rows is not None:
            self._to_replace = None
            proposed = self._opened.run_path.with_suffix(".csv").name
            self._ask(EXPORT, "Export these rows to (.csv .parquet .json):", proposed)

    def action_reading(self) -> None:
        """What was read and what was set aside."""
        if self._opened is not None:
            self._open_page(reading_page(self._opened, self._lost))

    def action_help(self) -> None:
        """Keys, method, cautions."""
        self._open_page(help_page())

    def action_quit(self) -> None:
        """Leave; what was scored is kept."""
        self.post_message(messages.QuitAsked())

    # The prompt.

    @on(Prompt.Changed)
    def _prompt_changed(self, event: Prompt.Changed) -> None:
        if event.purpose == FIND and event.text:
            self._go_to(event.text, self._table.cursor)
        self._to_replace = None

    @on(Prompt.Answered)
    def _prompt_answered(self, event: Prompt.Answered) -> None:
        if event.purpose == FIND:
            self._searched = event.text
            self._close_prompt()
        elif event.text.strip():
            self._export_to(Path(event.text.strip()).expanduser())

    def _close_prompt(self) -> None:
        self._prompt.close()
        self.query_one(KeyLine).display = True

    def _ask(self, purpose: str, question: str, text: str = "") -> None:
        self._prompt.ask(purpose, question, text)
        self.query_one(KeyLine).display = False

    def _export_to(self, path: Path) -> None:
        """Write the rows, after a second Enter when the file exists."""
        assert self._rows is not None
        if path.exists() and path != self._to_replace:
            self._to_replace = path
            self._say("That file exists: Enter again replaces it, Esc keeps it.")
            return
        self._close_prompt()
        self._feed.export(self._rows, path)

    # What follows from it all.

    def _arrangement(self) -> Arrangement:
        from screener.ui.rows import Arrangement

        return Arrangement(self._sort, falling=self._falling, flagged_only=self._flagged_only)

    def _show_rows(self) -> None:
        """Arrange what there is; the cursor stays on its channel."""
        if self._results is None:
            return
        from screener.ui.rows import arranged, row_of

        channel = self._table.channel
        self._rows = arranged(self._results, self._arrangement())
        # Blocks may come in any order: until the user has chosen a row, the cursor stays on the first.
        cursor = row_of(self._rows, channel["position"]) if channel is not None and self._row_chosen else None
        self._table.show(self._rows, cursor=cursor, sort=(self._sort, self._falling))
        self._show_status()
        if self._table.channel != channel:
            self._want_plot()

    def _rearrange(self) -> None:
        """Show the rows as the user has just asked for; the last notice has been read."""
        self._notice = ""
        self._show_rows()

    def _move_to(self, row: int) -> None:
        """Put the cursor on a row; status and plot follow at once, in the same repaint."""
        self._notice, before, self._row_chosen = "", self._table.cursor, True
        self._table.move_to(row)
        self._show_status()
        if self._table.cursor != before:
            self._want_plot()

    def _sort_by(self, key: str | None) -> None:
        """Sort by a column, the natural way first; the same column again, the other way."""
        if key == self._sort:
            self._falling = not self._falling
        else:
            self._sort = key
            self._falling = any(column.key == key and column.falling_first for column in COLUMNS)
        self._rearrange()

    def _go_to(self, text: str, start: int) -> None:
        if self._rows is None:
            return
        from screener.ui.rows import row_found

        row = row_found(self._rows, text, start)
        if row is None:
            self._say(f"No channel here has {shown(text)!r} in its name.")
        else:
            self._move_to(row)

    def _want_plot(self) -> None:
        """Ask for the plot of the channel under the cursor, if there is room to see it."""
        channel = self._table.channel
        width, height = self._panel.room
        if channel is not None and self._panel.display and width > 0 and height > 0:
            self._feed.draw(Wanted(channel["position"], channel["n"] or 0, self._family, width, height))

    def _open_page(self, page: Page) -> None:
        self.app.push_screen(page)

    def _say(self, sentence: str) -> None:
        """Show a notice until the cursor moves or the order changes."""
        self._notice = sentence
        self._show_status()

    def _show_keys(self) -> None:
        beside = WIDE_KEYS if self.has_class("wide") else TABLE_KEYS
        self.query_one(KeyLine).show_keys(PLOT_KEYS if self.has_class("plot-over") else beside)

    def _show_status(self) -> None:
        if self._notice:
            self._line("status", plain(self._notice, NOTICE))
            return
        place = place_words(self._table.cursor, self._table.row_count, flagged_only=self._flagged_only)
        order = order_words(self._sort, falling=self._falling)
        channel = self._table.channel
        reason = f"   not scored: {shown(channel['reason'])}" if channel is not None and channel["reason"] else ""
        self._line("status", [(f"{place}, {order}", QUIET), (reason, PLAIN)])

    def _line(self, name: str, line: Line) -> None:
        if not self._unicode:
            line = [(ascii_only(text), style) for text, style in line]
        self.query_one(f"#{name}", Lines).show([line])
