"""The keys, at the foot of the screen."""

from __future__ import annotations

from collections.abc import Sequence

from textual import events

from screener.ui.palette import QUIET, STRONG
from screener.ui.widgets.lines import Lines, Piece


class KeyLine(Lines):
    """Keys and what they do, as many as there is room for; a click on one presses it."""

    def __init__(self, *, id: str | None = None) -> None:  # noqa: A002 - the name that every widget has
        super().__init__(id=id)
        self._keys: Sequence[tuple[str, str, str]] = ()

    def show_keys(self, keys: Sequence[tuple[str, str, str]]) -> None:
        """Show these: what is written for the key, what it does, and the action a click runs."""
        self._keys = keys
        pieces: list[Piece] = []
        for key, meaning, _ in keys:
            pieces += [(key, STRONG), (f" {meaning}  ", QUIET)]
        self.show([pieces])

    async def on_click(self, event: events.Click) -> None:
        """Run the action of the key under the mouse."""
        start = 0
        for key, meaning, action in self._keys:
            start += len(key) + len(meaning) + 3
            if event.x < start:
                await self.screen.run_action(action)
                return
