"""The two threads behind the screen: one scores, one reads the run file; both only post messages.

They are daemons of our own and not workers of the application, which would be waited for at the end: quitting never
waits for a running task, and what was scored is already in the run file.
"""

from __future__ import annotations

import threading
import time
from collections.abc import Callable
from contextlib import suppress
from contextvars import copy_context
from pathlib import Path
from typing import TYPE_CHECKING

from textual.message import Message

from screener.errors import ScreenerError
from screener.records import (
    BlockFailed,
    BlockScored,
    Event,
    NullsPrepared,
    Plan,
    RunFinished,
    TableFacts,
    TableOpened,
)
from screener.ui import messages
from screener.ui.acts import confirmed
from screener.ui.drawing import Wanted, drawing
from screener.ui.source import Source

if TYPE_CHECKING:
    import polars as pl

    from screener.runs import RunFile

LEAST_PAUSE = 0.2
"""Seconds between two readings of all results while scoring."""
SHARE_READING = 0.1
"""Largest share of the time spent on reading results while scoring."""

KEEPING_PAUSE = 0.5
"""Seconds between two times that the view is kept."""

Post = Callable[[Message], object]
Deed = Callable[["RunFile"], str]
"""Changes the run file and says what it has done, or nothing."""


class Feed:
    """Starts and stops the threads, and hands them what the user asks for."""

    def __init__(self, source: Source, post: Post, *, unicode: bool) -> None:
        self._source = source
        self._post = post
        self._reader = Reader(post, unicode=unicode)
        self._stop = threading.Event()
        self._reading: threading.Thread | None = None
        self._scoring: threading.Thread | None = None
        self._confirming: threading.Thread | None = None
        self._stop_confirming = threading.Event()

    def begin(self) -> None:
        """Start scoring, or open the run file to review."""
        if self._source.start is None and self._source.run_path is not None:
            self._reader.open(self._source.run_path, finished=True)
        self._reading = self._thread(self._reader.run)
        if self._source.start is not None:
            self._scoring = self._thread(self._score)

    @property
    def is_scoring(self) -> bool:
        """Whether the scoring thread is still at work."""
        return self._scoring is not None and self._scoring.is_alive()

    def stop(self) -> None:
        """Ask scoring to end after the blocks in hand, and reading at once."""
        self._stop.set()
        self._stop_confirming.set()
        self._reader.stop()

    def stopped_within(self, seconds: float) -> bool:
        """Whether all threads have ended, after waiting for at most that long."""
        self.stop()
        end = time.monotonic() + seconds
        threads = [thread for thread in (self._reading, self._scoring, self._confirming) if thread is not None]
        for thread in threads:
            thread.join(max(0.0, end - time.monotonic()))
        return not any(thread.is_alive() for thread in threads)

    def draw(self, wanted: Wanted) -> None:
        """Have a plot drawn; an older wish that still waits is dropped."""
        self._reader.draw(wanted)

    def export(self, rows: pl.DataFrame, path: Path) -> None:
        """Have the rows written to a file."""
        self._reader.export(rows, path)

    def act(self, deed: Deed) -> None:
        """Have something done to the run file."""
        self._reader.act(deed)

    def keep(self, view: dict[str, str]) -> None:
        """Have the run file keep where the user is."""
        self._reader.keep(view)

    def confirm(self, facts: TableFacts, plan: Plan, position: int) -> None:
        """Have the channel confirmed; while one is being confirmed, stop that."""
        if self._confirming is not None and self._confirming.is_alive():
            self._stop_confirming.set()
            return
        stop = self._stop_confirming = threading.Event()
        self._confirming = self._thread(lambda: self._confirm(facts, plan, position, stop))

    def _confirm(self, facts: TableFacts, plan: Plan, position: int, stop: threading.Event) -> None:
        """Make the samples, telling of them; the result goes to the run file."""
        from screener.screening.confirmation import SAMPLES, confirm

        name, said = facts.channels[position].name, ""
        try:
            self._post(messages.ConfirmingGoesOn(name, 0, SAMPLES))
            for reached in confirm(facts, plan, position, SAMPLES, stop.is_set):
                self._post(messages.ConfirmingGoesOn(name, reached.made, SAMPLES))
            if stop.is_set():
                said = "Stopped confirming; nothing was kept."
            else:
                self._reader.act(confirmed(position, reached.confirmation))
        except ScreenerError as error:
            said = str(error)
        self._post(messages.ConfirmingEnded(said))

    def _thread(self, work: Callable[[], None]) -> threading.Thread:
        def guarded() -> None:
            try:
                work()
            except ScreenerError as error:
                self._post(messages.RunImpossible(error))
            except Exception as error:  # noqa: BLE001 - handed to the screen, which raises it
                self._post(messages.ThreadBroke(error))

        # In the context of the application, by which its messages find their way.
        thread = threading.Thread(target=copy_context().run, args=(guarded,), daemon=True)
        thread.start()
        return thread

    def _score(self) -> None:
        """Iterate over the run's events to the end."""
        assert self._source.start is not None
        tried = before = 0
        began = time.monotonic()
        for event in self._source.start(self._stop.is_set):
            if isinstance(event, TableOpened):
                tried = before = event.channels_done
            if isinstance(event, TableOpened | NullsPrepared):
                began = time.monotonic()
            tried += _channels(event)
            self._tell(event, tried, tried - before, time.monotonic() - began)

    def _tell(self, event: Event, tried: int, tried_now: int, seconds: float) -> None:
        """Post what the event means for the screen."""
        if isinstance(event, TableOpened):
            self._reader.open(event.run_path, finished=False)
        elif isinstance(event, NullsPrepared):
            self._post(messages.Preparing(event.positions, event.work_done))
        elif isinstance(event, RunFinished):
            self._reader.results_changed(last=True)
            self._post(messages.ScoringEnded(event.cancelled, event.seconds))
        elif isinstance(event, BlockScored | BlockFailed):
            self._reader.results_changed(last=False)
            self._post(messages.Progressed(tried, tried_now, seconds))
        if isinstance(event, BlockFailed):
            self._post(messages.BlockLost(event.message))


def _channels(event: Event) -> int:
    """How many channels the event reports as tried."""
    if isinstance(event, BlockScored):
        return event.scores.span.stop - event.scores.span.first
    return event.span.stop - event.span.first if isinstance(event, BlockFailed) else 0


class Reader:
    """Reads the run file in a thread of its own: plots first, then exports, then all results when they have changed."""

    def __init__(self, post: Post, *, unicode: bool) -> None:
        self._post = post
        self._unicode = unicode
        self._wake = threading.Condition()
        self._path: Path | None = None
        self._finished = False
        self._wanted: Wanted | None = None
        self._exports: list[tuple[pl.DataFrame, Path]] = []
        self._changed = False
        self._results_due = 0.0
        self._deeds: list[Deed] = []
        self._view: dict[str, str] | None = None
        self._view_due = 0.0
        self._stopped = False

    def open(self, path: Path, *, finished: bool) -> None:
        """Read this run file; `finished` when nobody is writing to it."""
        with self._wake:
            self._path, self._finished, self._changed = path, finished, True
            self._wake.notify()

    def draw(self, wanted: Wanted) -> None:
        """Draw this next."""
        with self._wake:
            self._wanted = wanted
            self._wake.notify()

    def export(self, rows: pl.DataFrame, path: Path) -> None:
        """Write these rows."""
        with self._wake:
            self._exports.append((rows, path))
            self._wake.notify()

    def act(self, deed: Deed) -> None:
        """Do this, in turn."""
        with self._wake:
            self._deeds.append(deed)
            self._wake.notify()

    def keep(self, view: dict[str, str]) -> None:
        """Keep this view when there is time; only the newest counts."""
        with self._wake:
            self._view = view
            self._wake.notify()

    def results_changed(self, *, last: bool) -> None:
        """Read the results again, at once if nothing more will come."""
        with self._wake:
            self._changed = True
            self._finished = self._finished or last
            self._wake.notify()

    def stop(self) -> None:
        """Close the run file and end."""
        with self._wake:
            self._stopped = True
            self._wake.notify()

    def run(self) -> None:
        """Serve until stopped."""
        with self._wake:
            self._wake.wait_for(lambda: self._path is not None or self._stopped)
            path = self._path
        if path is None:
            return
        from screener.runs import RunFile

        with RunFile.open(path) as run:
            self._post(messages.RunOpened(run.facts, run.plan, path, _done(run), run.view()))
            while not self._stopped:
                self._serve(run)
            while self._deeds:
                self._do(run, self._deeds.pop(0))
            self._keep(run)

    def _serve(self, run: RunFile) -> None:
        """Do the next task; without one, wait until something changes or results are due."""
        with self._wake:
            if not self._has_task():
                self._wake.wait(self._pause())
            wanted, self._wanted = self._wanted, None
            deed = self._deeds.pop(0) if self._deeds else None
            idle = wanted is None and deed is None
            export = self._exports.pop(0) if idle and self._exports else None
            read = idle and export is None and self._results_are_due()
            self._changed = self._changed and not read
            keep = idle and export is None and not read and self._view_is_due()
        if deed is not None:
            self._do(run, deed)
        if wanted is not None:
            self._draw(run, wanted)
        elif keep:
            self._keep(run)
        elif export is not None:
            self._export(run, *export)
        elif read:
            self._read(run)

    def _has_task(self) -> bool:
        asked = self._wanted is not None or bool(self._exports) or bool(self._deeds)
        return self._stopped or asked or self._results_are_due() or self._view_is_due()

    def _results_are_due(self) -> bool:
        return self._changed and (self._finished or time.monotonic() >= self._results_due)

    def _view_is_due(self) -> bool:
        return self._view is not None and time.monotonic() >= self._view_due

    def _pause(self) -> float | None:
        """Seconds until something is due; None when nothing will be by itself."""
        due = [self._results_due] if self._changed else []
        due += [self._view_due] if self._view is not None else []
        return max(0.0, min(due) - time.monotonic()) if due else None

    def _do(self, run: RunFile, deed: Deed) -> None:
        """Change the run file, and tell what is decided in it now."""
        try:
            said = deed(run)
        except ScreenerError as error:
            said = str(error)
        self._post(messages.Decided(run.decisions(), said))

    def _keep(self, run: RunFile) -> None:
        """Keep the view; a run file that may not be written to is shown all the same."""
        view, self._view = self._view, None
        self._view_due = time.monotonic() + KEEPING_PAUSE
        if view is not None:
            with suppress(ScreenerError):
                run.store_view(view)

    def _draw(self, run: RunFile, wanted: Wanted) -> None:
        from screener.plots import Charset

        charset = Charset.UNICODE if self._unicode else Charset.ASCII
        self._post(messages.ChannelDrawn(drawing(run, run.facts, run.plan, wanted, charset=charset)))

    def _export(self, run: RunFile, rows: pl.DataFrame, path: Path) -> None:
        from screener.runs import REPORTS, export
        from screener.ui.report import write_report

        try:
            if path.suffix.lower() in REPORTS:
                write_report(run, rows, path)
            else:
                export(rows, run.facts, run.plan, path)
        except ScreenerError as error:
            self._post(messages.Exported(str(error)))
        else:
            self._post(messages.Exported(f"Wrote {rows.height:,} channels to {str(path)!r}."))

    def _read(self, run: RunFile) -> None:
        from screener.runs import summarise

        began = time.monotonic()
        results = run.results().join(run.strips(), on="position", how="left", maintain_order="left")
        sentence = summarise(results, run.facts, run.plan).sentence()
        self._post(messages.ResultsRead(results, sentence))
        cost = time.monotonic() - began
        self._results_due = time.monotonic() + max(LEAST_PAUSE, cost / SHARE_READING)


def _done(run: RunFile) -> int:
    return len(run.channels_done())
