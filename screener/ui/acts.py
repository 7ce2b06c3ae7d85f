"""What keys do to the run file: each act changes it and says, in a few words, what it has done."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

from screener.records import Confirmation, Decision
from screener.ui.captions import decided_words
from screener.ui.confirming import confirmation_words

if TYPE_CHECKING:
    from screener.runs import RunFile


def decided(positions: Sequence[int], decision: str) -> Callable[[RunFile], str]:
    """Decide about these channels; empty takes the decision back."""

    def deed(run: RunFile) -> str:
        run.decide(positions, Decision(decision) if decision else None)
        return decided_words(decision, len(positions))

    return deed


def noted(positions: Sequence[int], note: str) -> Callable[[RunFile], str]:
    """Put a note on these channels; empty takes it away."""

    def deed(run: RunFile) -> str:
        run.annotate(positions, note)
        return decided_words("noted" if note else "note taken away", len(positions))

    return deed


def confirmed(position: int, confirmation: Confirmation) -> Callable[[RunFile], str]:
    """Keep what samples said of a channel."""

    def deed(run: RunFile) -> str:
        run.store_confirmation(position, confirmation)
        return confirmation_words(confirmation)

    return deed


def undone(run: RunFile) -> str:
    """Take back the last act."""
    count = run.undo()
    return f"Undone for {count:,} channel{'s' * (count != 1)} (y does it again)." if count else "Nothing to undo."


def redone(run: RunFile) -> str:
    """Do again what was undone."""
    count = run.redo()
    return f"Done again for {count:,} channel{'s' * (count != 1)}." if count else "Nothing to do again."
