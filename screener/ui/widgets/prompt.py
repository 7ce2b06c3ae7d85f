"""One line that asks for a text: a name to find, a file to write."""

from __future__ import annotations

from dataclasses import dataclass

from textual import events, on
from textual.app import ComposeResult
from textual.containers import Horizontal
from textual.message import Message
from textual.widgets import Input

from screener.ui.widgets.lines import Lines, plain


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

    @dataclass
    class Closed(Message):
        """The question was dropped."""

        purpose: str

    purpose = ""

    def compose(self) -> ComposeResult:
        """A label and the field."""
        yield Lines(id="question")
        yield Input(id="answer", compact=True, select_on_focus=False)

    def ask(self, purpose: str, question: str, text: str = "") -> None:
        """Appear, with this question and this text to begin with."""
        self.purpose = purpose
        label = self.query_one("#question", Lines)
        label.styles.width = len(question) + 1
        label.show([plain(question)])
        field = self.query_one("#answer", Input)
        with field.prevent(Input.Changed):
            field.value = text
        field.cursor_position = len(text)
        self.display = True
        field.focus()

    def close(self) -> None:
        """Disappear."""
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

    def on_key(self, event: events.Key) -> None:
        """Esc drops the question."""
        if event.key == "escape":
            event.stop()
            self.close()
            self.post_message(self.Closed(self.purpose))
