"""One line that asks for a text: a name to find, a file to write."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from textual import events, on
from textual.app import ComposeResult
from textual.binding import Binding
from textual.containers import Horizontal
from textual.message import Message
from textual.widgets import Input

from screener.ui.widgets.lines import Lines, plain


class Field(Input):
    """A field that acts on every key in the order typed.

    The library's own acts on letters at once but on other keys only when nobody else wanted them: of keys that arrive
    together, as they do over a slow line, a backspace would come after the letters typed behind it.
    """

    ACTIONS: ClassVar[dict[str, str]] = {
        key: binding.action
        for binding in Input.BINDINGS
        if isinstance(binding, Binding)
        for key in binding.key.split(",")
    }

    async def on_key(self, event: events.Key) -> None:
        """Run the key's action now, if it has one."""
        if event.key in self.ACTIONS:
            event.stop()
            event.prevent_default()
            await self.run_action(self.ACTIONS[event.key])


class Prompt(Horizontal):
    """Hidden until it is asked to ask."""

    @dataclass
    class Changed(Message):
        """The text was changed."""

        purpose: str
        text: str

    @dataclass
    class Answered(Message):
        """Enter was pressed."""

        purpose: str
        text: str

    purpose = ""
    """What is asked for; empty while nothing is."""

    def compose(self) -> ComposeResult:
        """A label and the field."""
        yield Lines(id="question")
        yield Field(id="answer", compact=True, select_on_focus=False)

    def ask(self, purpose: str, question: str, text: str = "") -> None:
        """Appear, with this question and this text to begin with."""
        self.purpose = purpose
        label = self.query_one("#question", Lines)
        label.styles.width = len(question) + 1
        label.show([plain(question)])
        field = self.query_one(Field)
        with field.prevent(Input.Changed):
            field.value = text
        field.cursor_position = len(text)
        self.display = True
        # Not field.focus(), which waits: keys that have arrived already are meant for the field.
        self.screen.set_focus(field)

    def close(self) -> None:
        """Disappear."""
        self.purpose = ""
        self.display = False
        self.screen.set_focus(None)

    @on(Input.Changed)
    def _changed(self, event: Input.Changed) -> None:
        event.stop()
        self.post_message(self.Changed(self.purpose, event.value))

    @on(Input.Submitted)
    def _submitted(self, event: Input.Submitted) -> None:
        event.stop()
        self.post_message(self.Answered(self.purpose, event.value))
