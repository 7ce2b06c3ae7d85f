"""Scoring a table block after block, as a lazy generator of events."""

import time
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Executor, Future, wait
from fnmatch import fnmatchcase
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from screener.errors import Cancelled, PlanError, ScreenerError
from screener.records import (
    Block,
    BlockFailed,
    BlockScored,
    BlockScores,
    Channel,
    Event,
    Plan,
    RunFinished,
    Span,
    TableFacts,
)
from screener.stats.closest import closest
from screener.stats.conditions import conditions_of
from screener.stats.families import FAMILIES, family_named
from screener.stats.null.nulls import Nulls
from screener.stats.null.on_demand import SimulatedNulls
from screener.stats.outermost import outermost_rows
from screener.stats.parts import part_summaries
from screener.stats.scoring import score

POLL_SECONDS = 0.1
"""How soon a request to stop is noticed."""


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
    null: Nulls,
    *,
    spans: Sequence[Span],
    executor: Executor,
    simulated: SimulatedNulls | None = None,
    ahead: int = 4,
    cancelled: Callable[[], bool] = lambda: False,
) -> Iterator[Event]:
    """Score the spans; nothing runs until the caller iterates, and stopping the iteration stops the work.

    `simulated` holds what is simulated while scoring, for all blocks together.
    `ahead` is how many blocks are handed out before the oldest comes back: enough to keep every worker busy, few enough
    to bound memory.
    """
    started = time.monotonic()
    waiting = list(reversed(spans))
    running: dict[Future[BlockScores], Span] = {}
    simulated = simulated or SimulatedNulls(cancelled=cancelled)
    while (waiting or running) and not cancelled():
        while waiting and len(running) < ahead:
            span = waiting.pop()
            running[executor.submit(score_span, table, span, plan, null, simulated)] = span
        finished, _ = wait(running, timeout=POLL_SECONDS, return_when=FIRST_COMPLETED)
        for future in sorted(finished, key=lambda future: running[future]):
            span = running.pop(future)
            if isinstance(future.exception(), Cancelled):
                waiting.append(span)
            else:
                yield _event(future, span, table.facts)
    yield RunFinished(cancelled=bool(waiting or running), seconds=time.monotonic() - started)


def held_against(names: Sequence[str], plan: Plan) -> NDArray[np.int64]:
    """The place in FAMILIES of the family that each named channel is held against, int64[names].

    Raises: PlanError when an expectation names no family, or is not of the form PATTERN=FAMILY.
    """
    expected = [_expectation(text) for text in plan.expect]
    default = FAMILIES.index(family_named(plan.family))
    places = (
        next((place for pattern, place in expected if name == pattern or fnmatchcase(name, pattern)), default)
        for name in names
    )
    return np.fromiter(places, dtype=np.int64, count=len(names))


def _expectation(text: str) -> tuple[str, int]:
    pattern, sign, family = text.rpartition("=")
    if not (sign and pattern):
        raise PlanError(
            f"Couldn't use the expectation {text!r}: it must be PATTERN=FAMILY, such as 'runout*=half-normal'."
        )
    return pattern, FAMILIES.index(family_named(family))


def score_span(
    table: ReadableTable, span: Span, plan: Plan, null: Nulls, simulated: SimulatedNulls | None = None
) -> BlockScores:
    """Read and score the channels of one span."""
    block = table.read(span)
    channels = table.facts.channels[span.first : span.stop]
    held = held_against([channel.name for channel in channels], plan)
    scoring = score(
        block.readings,
        FAMILIES,
        null,
        plan.alpha,
        match=plan.match,
        held=held,
        simulated=simulated,
        below=block.below,
        above=block.above,
    )
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
        plain_critical_r=scoring.plain_critical_r,
        p=scoring.p,
        extrapolated=scoring.extrapolated,
        location=fits.location,
        scale=fits.scale,
        notes=notes,
        shapes=fits.shapes,
        held=held,
        closest=closest(scoring.p, FAMILIES, plan.alpha),
        conditions=tuple(
            _conditions(channel, conditions_of(scoring.conditions, at)) for at, channel in enumerate(channels)
        ),
        step=scoring.conditions.step,
        n_effective=scoring.conditions.n_effective,
        points=scoring.points,
        in_order=tuple(scoring.in_order),
        outermost=outermost_rows(block.readings, scoring.points, list(scoring.in_order)),
        by_file=part_summaries(block.readings, [file.first_row for file in table.facts.files]),
    )


def _conditions(channel: Channel, found: str) -> str:
    """The conditions of one channel in words, its cells beyond a detection limit first."""
    counts = {"below": channel.below, "above": channel.above}
    limited = (f"{count:,} {side} detection limit" for side, count in counts.items() if count)
    return "; ".join(word for word in (*limited, found) if word)


def _event(future: Future[BlockScores], span: Span, facts: TableFacts) -> BlockScored | BlockFailed:
    """What came of a finished block; the failure of one does not end the run."""
    error = future.exception()
    if error is None:
        return BlockScored(future.result())
    return BlockFailed(span, f"Couldn't score {_channels_of(span, facts)}: {_told(error)}.")


def _channels_of(span: Span, facts: TableFacts) -> str:
    first, last = facts.channels[span.first].name, facts.channels[span.stop - 1].name
    return f"channel {first!r}" if span.stop - span.first == 1 else f"channels {first!r} to {last!r}"


def _told(error: BaseException) -> str:
    """What went wrong on one line, without a full stop; an error of our own making is named by its kind too."""
    if isinstance(error, MemoryError):
        return "there is not enough memory; fewer workers (--jobs 1) need less"
    words = " ".join(str(error).split()).rstrip(".")
    if isinstance(error, ScreenerError):
        return words
    return f"{type(error).__name__}: {words}" if words else type(error).__name__
