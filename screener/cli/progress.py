"""A run's events told on standard error."""

import signal
import sys
import threading
import time
from collections.abc import Callable, Generator, Iterator
from contextlib import closing, contextmanager
from types import FrameType
from typing import TYPE_CHECKING, cast

from screener.cli.output import path_text, tell
from screener.cli.report import reading_lines
from screener.errors import ScreenerError
from screener.records import BlockFailed, BlockScored, Event, NullsPrepared, RunFinished, TableOpened
from screener.ui.numbers import seconds_text

if TYPE_CHECKING:
    from screener.stats.null.nulls import Nulls

PAUSE = 10.0
"""Seconds between two lines of progress where they cannot be rewritten."""


class StoppedError(ScreenerError):
    """The user has stopped the run."""

    exit_code = 130


Begin = Callable[[Callable[[], bool]], Generator[Event, None, None]]
"""Begins a run; its argument says whether the user has asked it to stop."""


def watched(begin: Begin) -> TableOpened:
    """Go through a run's events, telling of them; the opening event. Ctrl-C ends the run between two blocks.

    Raises: StoppedError when that happened.
    """
    stop = threading.Event()
    with closing(begin(stop.is_set)) as events:
        opened = next(events)
        assert isinstance(opened, TableOpened)
        tell(*opening_lines(opened))
        progress = Progress(opened)
        with _noting_interrupts(stop):
            for event in events:
                progress.note(event)
    if progress.stopped:
        raise StoppedError(f"Stopped after {progress.reached}; the same command goes on from there.")
    return opened


class Progress:
    """How far a run is: one line rewritten on a terminal, else a line now and then."""

    def __init__(self, opened: TableOpened) -> None:
        self._before = self._done = opened.channels_done
        self._total = len(opened.facts.channels)
        self._started = self._told = time.monotonic()
        self.stopped = False
        self._rewriting = sys.stderr is not None and sys.stderr.isatty()

    def note(self, event: Event) -> None:
        """Tell of one event."""
        if isinstance(event, BlockFailed):
            self._done += event.span.stop - event.span.first
            tell(("\r" if self._rewriting else "") + f"screener: {event.message}")
        elif isinstance(event, BlockScored):
            self._done += event.scores.span.stop - event.scores.span.first
            self._tell_progress()
        elif isinstance(event, NullsPrepared):
            self._tell(preparing_line(event))
            self._started = time.monotonic()
        elif isinstance(event, RunFinished):
            if self._rewriting:
                tell("")
            self.stopped = event.cancelled

    @property
    def reached(self) -> str:
        """How many channels were tried."""
        return f"{self._done:,} of {self._total:,} channels"

    def _tell_progress(self) -> None:
        elapsed = max(time.monotonic() - self._started, 1e-9)
        self._tell(progress_line(self._done, self._total, (self._done - self._before) / elapsed))

    def _tell(self, line: str) -> None:
        now = time.monotonic()
        if not self._rewriting and now - self._told < PAUSE:
            return
        self._told = now
        if self._rewriting:
            tell("\r" + line.ljust(60), end="")
        else:
            tell(line)


def finished(preparing: "Generator[NullsPrepared, None, Nulls | None]") -> "Nulls | None":
    """Go through a preparation, telling of it; what it prepared."""
    told = -PAUSE
    while True:
        try:
            event = next(preparing)
        except StopIteration as end:
            return cast("Nulls | None", end.value)
        if time.monotonic() - told >= PAUSE:
            told = time.monotonic()
            tell(preparing_line(event))


def preparing_line(event: NullsPrepared) -> str:
    """How far the simulation of null distributions is."""
    return f"simulating the null distributions for {event.positions} positions: {event.work_done:.0%}"


def progress_line(done: int, total: int, rate: float) -> str:
    """How far a run is, its rate in channels a second and the time left."""
    left = f", {seconds_text((total - done) / rate)} left" if done < total else ""
    return f"{done:,} of {total:,} channels, {rate:,.0f} a second{left}"


def opening_lines(event: TableOpened) -> list[str]:
    """What was read, what was set aside and why, and where the results go."""
    facts = event.facts
    lines = [f"{path_text(facts.path)}: {facts.format}, {facts.rows:,} rows, {len(facts.channels):,} channels"]
    lines += [f"  {line}" for line in reading_lines(facts)]
    if event.channels_done:
        lines.append(f"  scored before: {event.channels_done:,} of {len(facts.channels):,} channels")
    return [*lines, f"  run file: {path_text(event.run_path)}"]


@contextmanager
def _noting_interrupts(stop: threading.Event) -> Iterator[None]:
    """Ctrl-C sets `stop`, so that blocks are stored whole; a second one interrupts at once."""
    before = signal.getsignal(signal.SIGINT)
    if before is signal.SIG_IGN:
        yield
        return

    def note(_number: int, _frame: FrameType | None) -> None:
        if stop.is_set():
            raise KeyboardInterrupt
        stop.set()

    signal.signal(signal.SIGINT, note)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)
