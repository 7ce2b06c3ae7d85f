"""Where a screen gets its run from."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

from screener.records import Event


@dataclass(frozen=True, slots=True)
class Source:
    """A run to start and watch, or a finished one to review."""

    title: str
    """What is being looked at, usually the file's name."""
    start: Callable[[Callable[[], bool]], Iterator[Event]] | None = None
    """Begins the run when iterated; its argument says whether the user has asked it to stop. None: review only."""
    run_path: Path | None = None
    """The run file to review when there is nothing to start."""
