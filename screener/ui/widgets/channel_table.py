"""The table of channels: one line a row over a frame of any length, drawn only where it is seen.

Rows come in while the user moves about; the cursor belongs to a channel, not to a row number.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from rich.segment import Segment
from rich.style import Style
from textual import events
from textual.geometry import Region
from textual.message import Message
from textual.strip import Strip
from textual.widget import Widget

from screener.records import Verdict
from screener.ui.columns import GAP, SOURCES, Column, columns_shown, widths
from screener.ui.palette import CURSOR, FLAGGED, HEADER, PLAIN, QUIET
from screener.ui.shown import fitted

if TYPE_CHECKING:
    import polars as pl

HEADER_LINES = 1
POINTER = 1
"""Cells left of the first column that show which row the cursor is on, and which are marked."""
WHEEL_ROWS = 3

ROW_STYLES = {Verdict.FLAGGED.value: FLAGGED, Verdict.NOT_SCORED.value: QUIET}


class ChannelTable(Widget):
    """Channels, one a row. Everything in it is drawn by `render_line`; it scrolls by its own `_top`."""

    @dataclass
    class CursorMoved(Message):
        """The mouse brought the cursor to another row."""

        row: int

    @dataclass
    class HeaderClicked(Message):
        """A column's title was clicked."""

        key: str

    class RowChosen(Message):
        """The row under the cursor was clicked once more."""

    def __init__(self, *, unicode: bool, id: str | None = None) -> None:  # noqa: A002 - the name that every widget has
        super().__init__(id=id)
        self._unicode = unicode
        self._rows: pl.DataFrame | None = None
        self._top = 0
        self._cursor = 0
        self._sort: tuple[str | None, bool] = (None, False)
        self._longest_name = len("channel")
        self._with_remarks = False
        self._texts: dict[int, tuple[list[str], Style]] = {}
        self._chosen: tuple[str, ...] = ()
        self._known: set[str] = set()
        self._columns: tuple[Column, ...] = ()
        self._marked: frozenset[int] = frozenset()

    @property
    def columns(self) -> tuple[Column, ...]:
        """The columns that are shown."""
        return self._columns

    @property
    def cursor(self) -> int:
        """The row that the cursor is on."""
        return self._cursor

    @property
    def height_in_rows(self) -> int:
        """How many rows are seen at once."""
        return max(1, self.size.height - HEADER_LINES)

    @property
    def row_count(self) -> int:
        """How many rows there are."""
        return 0 if self._rows is None else self._rows.height

    @property
    def channel(self) -> dict[str, Any] | None:
        """The row under the cursor, by column; None when there are no rows."""
        return self._rows.row(self._cursor, named=True) if self._rows is not None and self._rows.height else None

    def mark(self, positions: frozenset[int]) -> None:
        """Show these channels, and no others, as marked."""
        self._marked = positions
        self.refresh()

    def choose(self, keys: tuple[str, ...]) -> None:
        """Show these columns; the usual ones when there are none."""
        self._chosen = keys
        self.on_resize()

    def show(self, rows: pl.DataFrame, *, cursor: int | None, sort: tuple[str | None, bool]) -> None:
        """Replace the rows; the cursor goes to row `cursor`, at the same height on the screen if possible."""
        height_on_screen, seen_before = self._cursor - self._top, self._seen()
        from screener.ui.rows import has_remarks, known_columns, longest_name

        self._rows, self._sort = rows.select(SOURCES), sort
        self._longest_name = max(self._longest_name, longest_name(rows))
        self._with_remarks = self._with_remarks or has_remarks(rows)
        self._known |= known_columns(rows, ("departure", "conditions"))
        self._choose_columns()
        self._texts.clear()
        self._cursor = min(self._cursor if cursor is None else cursor, max(0, rows.height - 1))
        self._top = self._cursor - height_on_screen
        self._keep_in_sight()
        # While rows stream in, most frames change nothing that is seen, and lines may be slow.
        if self._seen() != seen_before:
            self.refresh()

    def move_to(self, row: int) -> None:
        """Put the cursor on that row, or the nearest there is."""
        top, before = self._top, self._cursor
        self._cursor = min(max(0, row), max(0, self.row_count - 1))
        self._keep_in_sight()
        if self._top != top:
            self.refresh()
        else:
            self._refresh_row(before)
            self._refresh_row(self._cursor)

    def on_resize(self) -> None:
        """Other widths, other cuts."""
        self._choose_columns()
        self._texts.clear()
        self._keep_in_sight()
        self.refresh()

    def on_click(self, event: events.Click) -> None:
        """A title sorts; a row takes the cursor, and is chosen if it has it already."""
        if event.y < HEADER_LINES:
            key = self._column_at(event.x)
            if key is not None:
                self.post_message(self.HeaderClicked(key))
            return
        row = event.y - HEADER_LINES + self._top
        if row == self._cursor:
            self.post_message(self.RowChosen())
        elif row < self.row_count:
            self.post_message(self.CursorMoved(row))

    def on_mouse_scroll_down(self) -> None:
        """The wheel moves the cursor."""
        self.post_message(self.CursorMoved(self._cursor + WHEEL_ROWS))

    def on_mouse_scroll_up(self) -> None:
        """The wheel moves the cursor."""
        self.post_message(self.CursorMoved(self._cursor - WHEEL_ROWS))

    def render_line(self, y: int) -> Strip:
        """The header, or the row seen at height y."""
        width = self.size.width
        if y < HEADER_LINES:
            return Strip([Segment(fitted(self._header(), width), HEADER)], width)
        row = y - HEADER_LINES + self._top
        if row >= self.row_count:
            return Strip.blank(width)
        texts, style = self._row_texts(row)
        thumb = self._thumb(y)
        marked = self._rows is not None and self._rows["position"][row] in self._marked
        if row == self._cursor:
            pointer = "#" if marked else ">"
            return Strip([Segment(fitted(pointer + " ".join(texts), width - 1), CURSOR), Segment(thumb)], width)
        pointer = "+" if marked else " "
        segments = [Segment(pointer + " ".join(texts[:2]), style), Segment(" " + " ".join(texts[2:]), _rest(style))]
        return Strip([*segments, Segment(thumb)]).adjust_cell_length(width).simplify()

    def _row_texts(self, row: int) -> tuple[list[str], Style]:
        """The cells of a row, cut and padded, and the style of its mark and name."""
        if row not in self._texts:
            assert self._rows is not None
            values = self._rows.row(row, named=True)
            pairs = zip(self._columns, self._widths(), strict=True)
            texts = [column.cell(values, width, unicode=self._unicode) for column, width in pairs]
            self._texts[row] = texts, ROW_STYLES.get(values["verdict"], PLAIN)
        return self._texts[row]

    def _header(self) -> str:
        key, falling = self._sort
        titles = []
        for column, width in zip(self._columns, self._widths(), strict=True):
            arrow = ("v" if falling else "^") if column.key == key else ""
            titles.append(column.title_in(width, arrow))
        return " " + " ".join(titles)

    def _widths(self) -> list[int]:
        total = self.size.width - POINTER - 1
        return widths(total, self._longest_name, self._columns, with_remarks=self._with_remarks)

    def _choose_columns(self) -> None:
        self._columns = columns_shown(self._chosen, self.size.width - POINTER - 1, self._known)

    def _thumb(self, y: int) -> str:
        """The last cell of a line: where in all rows the seen ones are."""
        seen, rows = self.height_in_rows, self.row_count
        if rows <= seen:
            return " "
        length = max(1, seen * seen // rows)
        first = round(self._top / (rows - seen) * (seen - length))
        return ("▐" if self._unicode else "#") if first <= y - HEADER_LINES < first + length else " "

    def _column_at(self, x: int) -> str | None:
        """The key of the column over that cell."""
        start = POINTER
        for column, width in zip(self._columns, self._widths(), strict=True):
            if start <= x < start + width + GAP:
                return column.key
            start += width + GAP
        return None

    def _seen(self) -> tuple[object, ...]:
        """All that the drawing depends on."""
        lines = self.height_in_rows
        rows = [] if self._rows is None else self._rows.slice(self._top, lines).rows()
        thumbs = [self._thumb(HEADER_LINES + line) for line in range(lines)]
        return str(rows), thumbs, self._top, self._cursor, self._sort, self._widths()

    def _keep_in_sight(self) -> None:
        seen = self.height_in_rows
        self._top = min(max(self._top, self._cursor - seen + 1), self._cursor)
        self._top = max(0, min(self._top, self.row_count - seen))

    def _refresh_row(self, row: int) -> None:
        self.refresh(Region(0, row - self._top + HEADER_LINES, self.size.width, 1))


def _rest(style: Style) -> Style:
    """The style of a row's numbers: quiet rows are quiet throughout, flagged ones are coloured by name only."""
    return style if style is QUIET else PLAIN
