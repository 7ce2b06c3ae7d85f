"""The run's screen: what its keys, its mouse and its prompt do."""

from __future__ import annotations

from pathlib import Path
from typing import Any, ClassVar

from textual import on
from textual.binding import Binding, BindingType

from screener.ui import acts, messages
from screener.ui.columns import NUMBERED
from screener.ui.keys import ACTIONS, WHILE_ASKING
from screener.ui.screens.board import Board
from screener.ui.screens.chooser import ColumnChooser
from screener.ui.screens.help import help_page
from screener.ui.screens.page import Page
from screener.ui.screens.reading import reading_page
from screener.ui.shown import shown
from screener.ui.views import view_after
from screener.ui.widgets.channel_table import ChannelTable
from screener.ui.widgets.key_line import KeyLine
from screener.ui.widgets.prompt import Prompt

FIND, EXPORT, WHERE, NOTE = "find", "export", "where", "note"


class MainScreen(Board):
    """What keys, mouse and prompt do."""

    # With priority: keys are then acted upon in the order typed, also when many arrive together over a slow line.
    BINDINGS: ClassVar[list[BindingType]] = [
        *(Binding(keys, action, description, priority=True) for keys, action, description in ACTIONS),
    ]

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool:
        """While something is asked, keys belong to the field."""
        return not self._prompt.purpose or action in WHILE_ASKING or not hasattr(self, f"action_{action}")

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

    def action_turn_view(self, by: int) -> None:
        """Look at the channel in another way."""
        self._change(view=view_after(self._showing.view, by))
        self._want_plot()
        if not self._panel.display:
            self.action_open_plot()

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
        keys = [None, *(column.key for column in self._table.columns if column.key != "strip")]
        now = self._showing.sort
        self._sort_by(keys[(keys.index(now) + 1) % len(keys)] if now in keys else None)

    def action_sort_by(self, number: int) -> None:
        """Sort by the column of that number, 0 for table order; the same again reverses."""
        self._sort_by(NUMBERED[number - 1] if number else None)

    def action_reverse(self) -> None:
        """Turn the order round."""
        self._rearrange(falling=not self._showing.falling)

    def action_flagged_only(self) -> None:
        """Leave the others out, or take them in again."""
        self._rearrange(flagged_only=not self._showing.flagged_only)

    def action_where(self) -> None:
        """Ask for a condition."""
        self._ask(WHERE, "Where (empty for all):", self._showing.condition)

    def action_columns(self) -> None:
        """Choose the columns."""
        chooser = ColumnChooser([column.key for column in self._table.columns])
        self.app.push_screen(chooser, self._columns_chosen)

    def _columns_chosen(self, keys: tuple[str, ...] | None) -> None:
        if keys is not None:
            self._change(columns=keys)
            self._table.choose(keys)

    def action_mark(self) -> None:
        """Mark the channel under the cursor, or unmark it, and go to the next."""
        channel = self._table.channel
        if channel is not None:
            self._mark(self._marked ^ {channel["position"]})
            self.action_move(1)

    def action_mark_all(self) -> None:
        """Mark all rows shown, or none when they are."""
        if self._rows is not None:
            shown_rows = frozenset(self._rows["position"])
            self._mark(self._marked - shown_rows if shown_rows <= self._marked else self._marked | shown_rows)

    def action_decide(self, decision: str) -> None:
        """Decide about the marked channels, or the one under the cursor."""
        positions = self._chosen_channels()
        if positions:
            self._feed.act(acts.decided(positions, decision))
            self._mark(frozenset())

    def action_annotate(self) -> None:
        """Ask for a note."""
        channel = self._table.channel
        if channel is not None:
            self._ask(NOTE, "Note:", "" if self._marked else channel["note"] or "")

    def action_confirm(self) -> None:
        """Confirm the verdict on the channel under the cursor, or stop confirming."""
        channel = self._table.channel
        if channel is not None and self._opened is not None:
            self._feed.confirm(self._opened.facts, self._opened.plan, channel["position"])

    def action_undo(self) -> None:
        """Take back the last decision or note."""
        self._feed.act(acts.undone)

    def action_redo(self) -> None:
        """Do again what was undone."""
        self._feed.act(acts.redone)

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
            self._ask(EXPORT, "Export these rows to (.csv .parquet .json .md .html):", proposed)

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
        elif event.purpose == WHERE:
            self._use_condition(event.text.strip())
        elif event.purpose == NOTE:
            self._feed.act(acts.noted(self._chosen_channels(), event.text.strip()))
            self._mark(frozenset())
            self._close_prompt()
        elif event.text.strip():
            self._export_to(Path(event.text.strip()).expanduser())

    def _use_condition(self, condition: str) -> None:
        """Show the rows that fulfil it; say what is wrong with it, and ask on, when it cannot be used."""
        from screener.ui.conditions import ConditionError, matching

        try:
            if condition and self._results is not None:
                matching(self._results, condition)
        except ConditionError as error:
            self._say(str(error))
        else:
            self._close_prompt()
            self._rearrange(condition=condition)

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

    def _chosen_channels(self) -> list[int]:
        """The marked channels, or the one under the cursor."""
        channel = self._table.channel
        return sorted(self._marked) or ([channel["position"]] if channel is not None else [])

    def _mark(self, positions: frozenset[int]) -> None:
        self._marked = positions
        self._table.mark(positions)
        self._show_status()

    def _rearrange(self, **changes: Any) -> None:
        """Show the rows as the user has just asked for; the last notice has been read."""
        self._notice = ""
        self._change(**changes)
        self._show_rows()

    def _sort_by(self, key: str | None) -> None:
        """Sort by a column, the natural way first; the same column again, the other way."""
        self._showing = self._showing.sorted_by(key)
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

    def _open_page(self, page: Page) -> None:
        self.app.push_screen(page)
