"""What threads tell the screen, named as things that happened."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from textual.message import Message

from screener.errors import ScreenerError
from screener.records import Plan, TableFacts

if TYPE_CHECKING:
    import polars as pl

    from screener.ui.drawing import Drawing


@dataclass
class RunOpened(Message):
    """The table was read, or the run file opened; its facts are known."""

    facts: TableFacts
    plan: Plan
    run_path: Path
    channels_done: int
    view: dict[str, str]
    """Where the user was last time."""


@dataclass
class Progressed(Message):
    """More channels were tried."""

    tried: int
    """Channels tried so far, with those of an earlier run."""
    tried_now: int
    seconds: float
    """Since this run began scoring."""

    def can_replace(self, message: Message) -> bool:
        """Only the newest counts."""
        return isinstance(message, Progressed)


@dataclass
class Preparing(Message):
    """Null distributions that the run needs are being simulated."""

    positions: str
    share: float
    """Of the work that is done, 0 to 1."""

    def can_replace(self, message: Message) -> bool:
        """Only the newest counts."""
        return isinstance(message, Preparing)


@dataclass
class ConfirmingGoesOn(Message):
    """Samples for the confirmation of a channel are being made."""

    channel: str
    made: int
    wanted: int

    def can_replace(self, message: Message) -> bool:
        """Only the newest counts."""
        return isinstance(message, ConfirmingGoesOn)


@dataclass
class ConfirmingEnded(Message):
    """No more samples are made."""

    sentence: str
    """What is to be said; empty when the result is on its way."""


@dataclass
class BlockLost(Message):
    """A block of channels could not be scored."""

    sentence: str


@dataclass
class ResultsRead(Message):
    """All results stored so far."""

    results: pl.DataFrame
    sentence: str

    def can_replace(self, message: Message) -> bool:
        """Only the newest counts."""
        return isinstance(message, ResultsRead)


@dataclass
class ScoringEnded(Message):
    """Nothing more will be scored."""

    cancelled: bool
    seconds: float


@dataclass
class ChannelDrawn(Message):
    """The plot that was asked for."""

    drawing: Drawing

    def can_replace(self, message: Message) -> bool:
        """Only the newest counts."""
        return isinstance(message, ChannelDrawn)


@dataclass
class Decided(Message):
    """Decisions or notes were kept, taken back, or could not be."""

    decisions: pl.DataFrame
    """All that hold now: position, decision, note."""
    sentence: str


@dataclass
class Exported(Message):
    """A file was written, or could not be."""

    sentence: str


@dataclass
class RunImpossible(Message):
    """The run cannot be shown at all, for a reason that the user can mend."""

    error: ScreenerError


@dataclass
class ThreadBroke(Message):
    """A thread ended by a mistake of ours."""

    error: BaseException


@dataclass
class QuitAsked(Message):
    """The user wants to leave."""
