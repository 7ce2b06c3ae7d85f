"""Which columns the table shows."""

from __future__ import annotations

from collections.abc import Sequence
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import ModalScreen

from screener.ui.columns import COLUMNS, FIXED
from screener.ui.palette import CURSOR, PLAIN, STRONG
from screener.ui.widgets.key_line import KeyLine
from screener.ui.widgets.lines import Line, Lines, plain

KEYS = (
    ("Up Down", "move", "move(1)"),
    ("Space", "show or hide", "show_or_hide"),
    ("r", "the usual ones", "usual"),
    ("Enter", "use", "use"),
    ("Esc", "leave as before", "leave"),
)
CHOICES = tuple(column for column in COLUMNS if column.key not in FIXED)


class ColumnChooser(ModalScreen[tuple[str, ...]]):
    """Ends with the keys of the chosen columns, none for the usual ones; with nothing when left."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("down", "move(1)", "Down", show=False, priority=True),
        Binding("up", "move(-1)", "Up", show=False, priority=True),
        Binding("space", "show_or_hide", "Show or hide this column", priority=True),
        Binding("r", "usual", "The usual columns", priority=True),
        Binding("enter,c", "use", "Use these columns", priority=True),
        Binding("escape,q", "leave", "Leave the columns as before", priority=True),
    ]

    def __init__(self, shown: Sequence[str]) -> None:
        super().__init__(id="chooser")
        self._shown = set(shown)
        self._row = 0

    def compose(self) -> ComposeResult:
        """The columns and the keys."""
        yield Lines(id="text")
        yield KeyLine(id="page-keys")

    def on_mount(self) -> None:
        """The keys of the chooser."""
        self.query_one(KeyLine).show_keys(KEYS)
        self._show()

    def action_move(self, by: int) -> None:
        """Another column."""
        self._row = (self._row + by) % len(CHOICES)
        self._show()

    def action_show_or_hide(self) -> None:
        """Show or hide the column."""
        self._shown ^= {CHOICES[self._row].key}
        self._show()

    def action_usual(self) -> None:
        """What fits the width."""
        self.dismiss(())

    def action_use(self) -> None:
        """Done; the fixed columns are named too, so that a choice of no others is one."""
        self.dismiss((*FIXED, *(column.key for column in CHOICES if column.key in self._shown)))

    def action_leave(self) -> None:
        """Never mind."""
        self.dismiss(None)

    def _show(self) -> None:
        lines: list[Line] = [plain("Columns, as far as there is room for them from the left", STRONG), plain("")]
        for row, column in enumerate(CHOICES):
            box = "[x]" if column.key in self._shown else "[ ]"
            pointer = ">" if row == self._row else " "
            lines.append(plain(f"{pointer} {box} {column.title:12}", CURSOR if row == self._row else PLAIN))
        self.query_one("#text", Lines).show(lines)
