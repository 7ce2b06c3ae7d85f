"""Scoring a table block after block, as a lazy generator of events."""

import time
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Executor, Future, wait
from typing import Protocol

from screener.records import Block, BlockFailed, BlockScored, BlockScores, Event, Plan, RunFinished, Span, TableFacts
from screener.stats.families import FAMILIES
from screener.stats.null.table import NullTable
from screener.stats.scoring import score

AHEAD = 4
"""Blocks handed out before the oldest comes back: enough to keep two workers busy, few enough to bound memory."""

POLL_SECONDS = 0.1


class ReadableTable(Protocol):
    """What scoring needs of a table."""

    @property
    def facts(self) -> TableFacts:
        """What was read."""

    def read(self, span: Span) -> Block:
        """The readings of a span; may be called from any thread."""


def screen(
    table: ReadableTable,
    plan: Plan,
    null: NullTable,
    *,
    spans: Sequence[Span],
    executor: Executor,
    cancelled: Callable[[], bool] = lambda: False,
) -> Iterator[Event]:
    """Score the spans; nothing runs until the caller iterates, and stopping the iteration stops the work."""
    started = time.monotonic()
    waiting = list(reversed(spans))
    running: dict[Future[BlockScores], Span] = {}
    while (waiting or running) and not cancelled():
        while waiting and len(running) < AHEAD:
            span = waiting.pop()
            running[executor.submit(score_span, table, span, plan, null)] = span
        finished, _ = wait(running, timeout=POLL_SECONDS, return_when=FIRST_COMPLETED)
        for future in sorted(finished, key=lambda future: running[future]):
            yield _event(future, running.pop(future), table.facts)
    yield RunFinished(cancelled=bool(waiting or running), seconds=time.monotonic() - started)


def score_span(table: ReadableTable, span: Span, plan: Plan, null: NullTable) -> BlockScores:
    """Read and score the channels of one span."""
    scoring = score(table.read(span).readings, FAMILIES, null, plan.alpha)
    fits = scoring.fits
    notes = tuple(tuple("outside support" if outside else "" for outside in row) for row in fits.outside)
    return BlockScores(
        span=span,
        families=tuple(family.name for family in FAMILIES),
        n=scoring.n,
        missing=scoring.missing,
        reasons=scoring.reasons,
        r=fits.r,
        critical_r=scoring.critical_r,
        plain_critical_r=scoring.critical_r,
        p=scoring.p,
        extrapolated=scoring.extrapolated,
        location=fits.location,
        scale=fits.scale,
        notes=notes,
        points=scoring.points,
    )


def _event(future: Future[BlockScores], span: Span, facts: TableFacts) -> BlockScored | BlockFailed:
    """What came of a finished block; the failure of one does not end the run."""
    error = future.exception()
    if error is None:
        return BlockScored(future.result())
    first, last = facts.channels[span.first].name, facts.channels[span.stop - 1].name
    which = f"channel {first!r}" if first == last else f"channels {first!r} to {last!r}"
    why = str(error) or type(error).__name__
    return BlockFailed(span, f"Couldn't score {which}: {why}.".replace("..", "."))
