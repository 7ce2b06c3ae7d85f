"""Scoring block after block: what is told, in what order, and what happens when a block fails."""

import itertools
import threading
from collections.abc import Iterator
from concurrent.futures import Executor, ThreadPoolExecutor
from dataclasses import fields
from pathlib import Path

import numpy as np
import pytest
from made_table import MadeTable
from numpy.typing import NDArray

from screener.errors import TableError
from screener.records import BlockFailed, BlockScored, BlockScores, Event, Plan, RunFinished, Span
from screener.runs import RunFile
from screener.screening.screen import screen
from screener.stats.null.packing import shipped_nulls

NULL = shipped_nulls()


@pytest.fixture
def executor() -> Iterator[Executor]:
    with ThreadPoolExecutor(2) as pool:
        yield pool


def readings(channels: int, rows: int = 120) -> NDArray[np.float64]:
    made = np.random.default_rng(9).normal(5.0, 1.0, (channels, rows))
    made[1, ::7] = np.nan
    made[2, 4] = np.inf
    return made


def cut(channels: int, width: int) -> list[Span]:
    return [Span(first, min(first + width, channels)) for first in range(0, channels, width)]


def scores_of(events: list[Event]) -> dict[int, tuple[object, ...]]:
    """What was found out about each channel, by position; families alike."""
    found: dict[int, tuple[object, ...]] = {}
    for event in events:
        if isinstance(event, BlockScored):
            for row, position in enumerate(range(event.scores.span.first, event.scores.span.stop)):
                found[position] = tuple(bits(event.scores, name, row) for name in per_channel())
    return found


def per_channel() -> list[str]:
    return [field.name for field in fields(BlockScores) if field.name not in {"span", "families"}]


def bits(scores: BlockScores, name: str, row: int) -> object:
    value = getattr(scores, name)[row]
    return value.tobytes() if isinstance(value, np.ndarray | np.generic) else value


@pytest.mark.parametrize(("width", "workers"), [(1, 1), (4, 2), (7, 2), (12, 3)])
def test_a_channel_scores_the_same_in_whatever_block_and_by_whatever_worker(width: int, workers: int) -> None:
    table = MadeTable(readings(12))
    with ThreadPoolExecutor(workers) as pool:
        events = list(screen(table, Plan(), NULL, spans=cut(12, width), executor=pool))
        whole = list(screen(table, Plan(), NULL, spans=[Span(0, 12)], executor=pool))
    assert scores_of(events) == scores_of(whole)
    assert list(scores_of(whole)) == list(range(12))


@pytest.mark.parametrize(
    ("error", "told"),
    [
        (
            TableError("Couldn't read 'x': the file is\nno longer there."),
            "Couldn't read 'x': the file is no longer there.",
        ),
        (ValueError("bad\n  value"), "ValueError: bad value."),
        (ValueError(), "ValueError."),
        (MemoryError(), "there is not enough memory; fewer workers (--jobs 1) need less."),
    ],
)
def test_an_error_in_one_block_names_its_channels_and_the_rest_goes_on(
    executor: Executor, error: BaseException, told: str
) -> None:
    table = MadeTable(readings(20), broken={9: error})
    *events, last = screen(table, Plan(), NULL, spans=cut(20, 4), executor=executor)
    failed = [event for event in events if isinstance(event, BlockFailed)]
    assert failed == [BlockFailed(Span(8, 12), f"Couldn't score channels 'c8' to 'c11': {told}")]
    assert sorted(scores_of(events)) == [*range(8), *range(12, 20)]
    assert isinstance(last, RunFinished)
    assert not last.cancelled


def test_a_failed_block_of_one_channel_is_told_in_the_singular(executor: Executor) -> None:
    table = MadeTable(readings(5), broken={3: ValueError("no")})
    events = list(screen(table, Plan(), NULL, spans=cut(5, 1), executor=executor))
    assert BlockFailed(Span(3, 4), "Couldn't score channel 'c3': ValueError: no.") in events


def test_a_failed_block_leaves_its_channels_not_scored_with_that_reason(executor: Executor, tmp_path: Path) -> None:
    table = MadeTable(readings(8), broken={5: ValueError("no")})
    with RunFile.create(tmp_path / "made.run", table.facts, Plan(), version="0", null_version="0") as run:
        for event in screen(table, Plan(), NULL, spans=cut(8, 2), executor=executor):
            if isinstance(event, BlockScored):
                run.store(event.scores)
            elif isinstance(event, BlockFailed):
                run.store_failure(event.span, event.message)
        results = run.results()
    lost = results.filter(results["reason"] == "Couldn't score channels 'c4' to 'c5': ValueError: no.")
    assert lost["channel"].to_list() == ["c4", "c5"]
    assert lost["verdict"].unique().to_list() == ["not scored"]


def test_nothing_is_read_until_somebody_iterates_and_little_beyond_what_they_take() -> None:
    table = MadeTable(readings(40))
    with ThreadPoolExecutor(1) as pool:
        events = screen(table, Plan(), NULL, spans=cut(40, 1), executor=pool, ahead=3)
        assert table.read_spans == []
        list(itertools.islice(events, 5))
        assert len(table.read_spans) <= 5 + 3


def test_a_cancelled_run_says_so_and_reads_no_further(executor: Executor) -> None:
    table = MadeTable(readings(40))
    taken: list[Event] = []
    for event in screen(table, Plan(), NULL, spans=cut(40, 1), executor=executor, cancelled=lambda: len(taken) >= 4):
        taken.append(event)
    assert isinstance(taken[-1], RunFinished)
    assert taken[-1].cancelled
    assert len(table.read_spans) < 40
    nothing = list(screen(table, Plan(), NULL, spans=cut(40, 1), executor=executor, cancelled=lambda: True))
    assert [type(event) for event in nothing] == [RunFinished]


def test_a_run_of_no_blocks_ends_at_once(executor: Executor) -> None:
    (only,) = screen(MadeTable(readings(3)), Plan(), NULL, spans=[], executor=executor)
    assert isinstance(only, RunFinished)
    assert not only.cancelled


def test_blocks_are_scored_by_the_workers_and_not_by_the_caller(executor: Executor) -> None:
    table = MadeTable(readings(8))
    list(screen(table, Plan(), NULL, spans=cut(8, 1), executor=executor))
    assert threading.get_ident() not in table.threads
