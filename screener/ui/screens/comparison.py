"""The comparison of two runs: a table of channels, sorted and filtered by keys."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any, ClassVar

from textual import events, on
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import Screen

from screener.errors import ScreenerError
from screener.ui.numbers import p_text, r_text
from screener.ui.palette import CURSOR, FLAGGED, HEADER, PLAIN, STRONG
from screener.ui.rows import longest_name
from screener.ui.screens.comparison_help import comparison_help
from screener.ui.shown import fitted, fitted_name, shown
from screener.ui.widgets.key_line import KeyLine
from screener.ui.widgets.lines import Line, Lines, plain
from screener.ui.widgets.prompt import Prompt

if TYPE_CHECKING:
    import polars as pl

Row = Mapping[str, Any]
MARKS = {"newly flagged": "!", "cleared": "+", "changed": "~", "no longer scored": "-", "missing": "<", "new": ">"}
"""The symbol beside the word; channels that are the same have none."""


def _in_errors(row: Row) -> str:
    """The difference of the two r in its standard errors."""
    if row["r_difference"] is None or not row["r_difference_error"]:
        return ""
    return f"{row['r_difference'] / row['r_difference_error']:+.1f}"


CELLS: tuple[tuple[str, int, Callable[[Row], str]], ...] = (
    ("channel", 0, lambda row: shown(row["channel"])),
    ("change", 16, lambda row: row["change"]),
    ("r before", 10, lambda row: r_text(row["r_before"])),
    ("r now", 10, lambda row: r_text(row["r_now"])),
    ("in errors", 9, _in_errors),
    ("q", 8, lambda row: p_text(row["change_q"])),
)
SORTS = ("channel", "change", "r_before", "r_now", "size", "change_q")
"""What the keys 1 to 6 sort by, column after column."""
KEYS = (
    ("1-6", "sort", "sort(2)"),
    ("S", "reverse", "reverse"),
    ("f", "newly flagged", "flagged_now"),
    ("a", "all rows", "everything"),
    ("e", "export", "export"),
    ("?", "help", "help"),
    ("q", "quit", "quit"),
)


class ComparisonScreen(Screen[None]):
    """One comparison, in one table of which only the lines in sight are made."""

    AUTO_FOCUS = ""
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "drop", "Drop the question", priority=True),
        Binding("down", "move(1)", "Down", priority=True),
        Binding("up", "move(-1)", "Up", priority=True),
        Binding("pagedown", "page(1)", "Page down", priority=True),
        Binding("pageup", "page(-1)", "Page up", priority=True),
        Binding("home", "first", "First row", priority=True),
        Binding("end", "last", "Last row", priority=True),
        *(Binding(str(k), f"sort({k})", f"Sort by {CELLS[k - 1][0]}", priority=True) for k in range(1, 7)),
        Binding("S,upper_s", "reverse", "Reverse the order", priority=True),
        Binding("f", "flagged_now", "Only newly flagged, or all", priority=True),
        Binding("a", "everything", "All channels, or only changes", priority=True),
        Binding("e", "export", "Export these rows", priority=True),
        Binding("question_mark", "help", "Help", priority=True),
        Binding("q", "quit", "Quit", priority=True),
    ]

    def __init__(self, rows: pl.DataFrame, title: str, notice: str) -> None:
        super().__init__()
        self._all, self._heading = rows, title
        self._sort, self._falling = 0, False
        self._changes_only, self._flagged_now = True, False
        self._rows = rows
        self._longest_name = longest_name(rows)
        self._cursor = self._top = 0
        self._notice = notice

    def compose(self) -> ComposeResult:
        """From top to bottom."""
        for name in ("title", "sentence", "rows", "status"):
            yield Lines(id=name)
        yield Prompt()
        yield KeyLine(id="keys")

    def on_mount(self) -> None:
        """Show what changed, by weight."""
        self.query_one("#title", Lines).show([plain(shown(self._heading), STRONG)])
        self.query_one(KeyLine).show_keys(KEYS)
        self._arrange()
        self.call_after_refresh(self._show)

    def on_resize(self, event: events.Resize) -> None:
        """Other widths, other cuts, once the parts have their new sizes."""
        self.call_after_refresh(self._show)

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool:
        """While something is asked, keys belong to the field."""
        own = hasattr(self, f"action_{action}") and action != "drop"
        return not (own and self.query(Prompt) and self.query_one(Prompt).purpose)

    def action_quit(self) -> None:
        """Leave."""
        self.app.exit(0)

    def action_help(self) -> None:
        """Keys, words, and how a change is judged."""
        self.app.push_screen(comparison_help())

    def action_drop(self) -> None:
        """Drop the question."""
        self.query_one(Prompt).close()

    def action_move(self, by: int) -> None:
        """Some rows on."""
        self._go(self._cursor + by)

    def action_page(self, by: int) -> None:
        """A page of rows on."""
        self._go(self._cursor + by * self._height)

    def action_first(self) -> None:
        """To the first row."""
        self._go(0)

    def action_last(self) -> None:
        """To the last row."""
        self._go(self._rows.height - 1)

    def action_sort(self, number: int) -> None:
        """Sort by a column; by the same once more, the other way."""
        self._falling = number == self._sort and not self._falling
        self._sort = number
        self._rearrange()

    def action_reverse(self) -> None:
        """Turn the order round."""
        self._falling = not self._falling
        self._rearrange()

    def action_flagged_now(self) -> None:
        """Only what is newly flagged, or all."""
        self._flagged_now = not self._flagged_now
        self._rearrange()

    def action_everything(self) -> None:
        """With or without the channels that are the same."""
        self._changes_only = not self._changes_only
        self._rearrange()

    def action_export(self) -> None:
        """Ask for a file name."""
        self.query_one(Prompt).ask("export", "Export these rows to (.csv .parquet .json):", "comparison.csv")

    @on(Prompt.Answered)
    def _answered(self, event: Prompt.Answered) -> None:
        from screener.runs import export_comparison

        path = Path(event.text.strip()).expanduser()
        self.query_one(Prompt).close()
        if path.exists():
            self._notice = "That file exists: give another name."
        else:
            try:
                export_comparison(self._rows, path)
                self._notice = f"Wrote {self._rows.height:,} channels to {str(path)!r}."
            except ScreenerError as error:
                self._notice = str(error)
        self._show()

    @property
    def _height(self) -> int:
        return max(1, self.query_one("#rows").size.height - 1)

    def _rearrange(self) -> None:
        """As just asked for; the last notice has been read."""
        self._notice = ""
        self._arrange()

    def _arrange(self) -> None:
        """The rows asked for, in the order asked for, from the first."""
        rows = self._all.filter(self._all["change"] != "same") if self._changes_only else self._all
        rows = rows.filter(rows["change"] == "newly flagged") if self._flagged_now else rows
        self._rows = _ordered(rows, self._sort, falling=self._falling)
        self._cursor = self._top = 0
        self._show()

    def _go(self, row: int) -> None:
        self._notice = ""
        self._cursor = max(0, min(row, self._rows.height - 1))
        self._top = min(max(self._top, self._cursor - self._height + 1), self._cursor)
        self._show()

    def _show(self) -> None:
        """The sentence, the lines in sight and the status."""
        area = self.query_one("#rows", Lines)
        self.query_one("#sentence", Lines).show([plain(_told(self._all, area.size.width))])
        widths = _widths(area.size.width - 2, self._longest_name)
        head = " ".join(fitted(title, width) for (title, _, _), width in zip(CELLS, widths, strict=True))
        lines: list[Line] = [plain("  " + head, HEADER)]
        for row, values in enumerate(self._rows.slice(self._top, self._height).iter_rows(named=True), self._top):
            lines.append(_line(values, widths, at_cursor=row == self._cursor))
        area.show(lines)
        place = f"{self._cursor + 1:,} of {self._rows.height:,}" if self._rows.height else "no channel"
        kind = "newly flagged" if self._flagged_now else "changes" if self._changes_only else "channels"
        order = f"sorted by {CELLS[self._sort - 1][0]}" if self._sort else "heaviest changes first"
        self.query_one("#status", Lines).show([plain(self._notice or f"{place} {kind}, {order}")])


def _told(rows: pl.DataFrame, width: int) -> str:
    """The counts in one line; where there is no room, without those that are the same."""
    from screener.runs.comparing import sentence

    told = sentence(rows)
    return told if len(told) <= width else told.rpartition(", ")[0]


def _widths(total: int, longest_name: int) -> list[int]:
    """The name takes what it needs of what the others leave."""
    fixed = sum(width for _, width, _ in CELLS) + len(CELLS) - 1
    return [width or max(8, min(longest_name, total - fixed)) for _, width, _ in CELLS]


def _line(row: Row, widths: list[int], *, at_cursor: bool) -> Line:
    texts = [text(row) for _, _, text in CELLS]
    cells = [fitted_name(texts[0], widths[0]), *map(fitted, texts[1:], widths[1:])]
    told = f"{MARKS.get(row['change'], ' ')} " + " ".join(cells)
    return plain(told, CURSOR if at_cursor else FLAGGED if row["change"] == "newly flagged" else PLAIN)


def _ordered(rows: pl.DataFrame, sort: int, *, falling: bool) -> pl.DataFrame:
    """By the column of that number, absent values last; 0 for the weight of the change."""
    import polars as pl

    from screener.runs.comparing import weight

    if rows.is_empty():
        return rows
    if sort and SORTS[sort - 1] not in {"change", "size"}:
        return rows.sort(SORTS[sort - 1], descending=falling, nulls_last=True, maintain_order=True)
    heavy = weight(rows) % 1.0 if sort and SORTS[sort - 1] == "size" else weight(rows)
    order = heavy.argsort(kind="stable").tolist()
    return rows.select(pl.all().gather(order[::-1] if falling else order))
