"""Confirming the verdict on one channel: its table is read again, and samples are made in its own autocorrelation."""

from collections.abc import Callable, Iterator
from dataclasses import asdict, dataclass

from screener.errors import Cancelled, ScreenerError, TableError
from screener.records import Block, Confirmation, Plan, Span, TableFacts
from screener.screening.kept_samples import simulated_nulls
from screener.screening.null_source import nulls_for
from screener.screening.screen import held_against
from screener.screening.workers import usable_cores
from screener.stats.confirming import BATCH, Confirming, confirming
from screener.stats.families import FAMILIES
from screener.stats.null.nulls import Nulls
from screener.stats.null.on_demand import SimulatedNulls
from screener.tables import open_table

SAMPLES = 2_000
"""How many are made when nobody says how many."""


@dataclass(frozen=True, slots=True)
class ConfirmationReached:
    """What is known after some of the samples; after all of them it is the result."""

    made: int
    wanted: int
    confirmation: Confirmation


def confirm(
    facts: TableFacts, plan: Plan, position: int, samples: int, cancelled: Callable[[], bool] = lambda: False
) -> Iterator[ConfirmationReached]:
    """Hold a channel of a scored table against samples of its own process; ends early when cancelled.

    Raises: TableError when the table is gone or has changed; ScreenerError when the channel is not scored.
    """
    block = _read_again(facts, plan, position)
    nulls = _nulls(plan, facts.rows, cancelled)
    if nulls is None:
        return
    try:
        ready = _ready(facts, plan, position, block, nulls, simulated_nulls(cancelled))
    except Cancelled:
        return
    made = 0
    for found in ready.results(samples, plan.alpha, plan.seed):
        made = min(made + BATCH, samples)
        yield ConfirmationReached(made, samples, Confirmation(**asdict(found)))
        if cancelled():
            return


def _read_again(facts: TableFacts, plan: Plan, position: int) -> Block:
    table = open_table(facts.path, plan)
    if table.facts.fingerprint != facts.fingerprint:
        raise TableError(
            f"Couldn't confirm channel {facts.channels[position].name!r}: {str(facts.path)!r} has changed since it was "
            "scored. Score it again."
        )
    return table.read(Span(position, position + 1))


def _nulls(plan: Plan, rows: int, cancelled: Callable[[], bool]) -> Nulls | None:
    preparing = nulls_for(plan.positions, rows, usable_cores(), cancelled)
    while True:
        try:
            next(preparing)
        except StopIteration as end:
            found: Nulls | None = end.value
            return found


def _ready(
    facts: TableFacts, plan: Plan, position: int, block: Block, nulls: Nulls, simulated: SimulatedNulls
) -> Confirming:
    channel = facts.channels[position]
    held = int(held_against([channel.name], plan)[0])
    ready = confirming(
        block.readings[0],
        FAMILIES,
        held,
        nulls,
        plan.alpha,
        simulated=simulated,
        below=0 if block.below is None else int(block.below[0]),
        above=0 if block.above is None else int(block.above[0]),
    )
    if isinstance(ready, str):
        raise ScreenerError(f"Couldn't confirm channel {channel.name!r}: it is not scored ({ready}).")
    return ready
