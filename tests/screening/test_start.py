"""A run from its beginning, or from where one stopped."""

import itertools
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from polars.testing import assert_frame_equal

from screener.errors import PlanError, RunFileError
from screener.records import BlockScored, Plan, RunFinished, Span, TableOpened
from screener.runs import RunFile
from screener.screening.screen import score_span
from screener.screening.start import start
from screener.screening.workers import thread_workers
from screener.stats.null.packing import shipped_nulls
from screener.tables import open_table, spans

CHANNELS, ROWS = 12, 100_000
"""About five channels a block."""


@pytest.fixture(scope="module")
def table(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("table") / "t.parquet"
    readings = np.random.default_rng(3).normal(size=(ROWS, CHANNELS))
    pl.DataFrame(readings, schema=[f"c{k}" for k in range(CHANNELS)]).write_parquet(path, compression="uncompressed")
    return path


def finish(table: Path, path: Path, plan: Plan | None = None) -> pl.DataFrame:
    """The results of a whole run."""
    for _ in start(table, plan or Plan(), path, jobs=2):
        pass
    with RunFile.open(path, read_only=True) as run:
        assert run.finished
        return run.results()


def test_every_event_is_in_the_run_file_by_the_time_it_is_told(table: Path, tmp_path: Path) -> None:
    path = tmp_path / "t.run"
    told = 0
    kinds = []
    for event in start(table, Plan(), path, jobs=2):
        kinds.append(type(event))
        told += event.scores.span.stop - event.scores.span.first if isinstance(event, BlockScored) else 0
        with RunFile.open(path, read_only=True) as run:
            assert run.results().height == told
            assert run.finished == isinstance(event, RunFinished)
    assert kinds[0] is TableOpened
    assert kinds[-1] is RunFinished
    assert kinds.count(BlockScored) == len(kinds) - 2 > 1
    assert told == CHANNELS


def test_a_run_left_after_any_event_is_taken_up_and_ends_with_the_same_results(table: Path, tmp_path: Path) -> None:
    whole = finish(table, tmp_path / "whole.run")
    for events in (1, 2, 3):
        path = tmp_path / f"{events}.run"
        left = start(table, Plan(), path, jobs=1)
        taken = list(itertools.islice(left, events))
        del left
        before = sum(isinstance(event, BlockScored) for event in taken)
        opened = next(start(table, Plan(), path, jobs=1))
        assert isinstance(opened, TableOpened)
        assert (opened.channels_done > 0) == (before > 0)
        assert_frame_equal(finish(table, path), whole, check_exact=True)


def test_a_finished_run_is_not_scored_again(table: Path, tmp_path: Path) -> None:
    path = tmp_path / "t.run"
    finish(table, path)
    content = path.read_bytes()
    opened, finished = start(table, Plan(), path, jobs=1)
    assert isinstance(opened, TableOpened)
    assert opened.channels_done == CHANNELS
    assert isinstance(finished, RunFinished)
    assert path.read_bytes() == content


def test_a_block_that_failed_is_tried_again(table: Path, tmp_path: Path) -> None:
    path = tmp_path / "t.run"
    whole = finish(table, tmp_path / "whole.run")
    events = start(table, Plan(), path, jobs=1)
    next(events)
    scored = next(events)
    assert isinstance(scored, BlockScored)
    del events
    with RunFile.open(path) as run:
        failing = next(span for span in spans_of(table) if span not in run.done())
        run.store_failure(failing, "The disk was away.")
        run.finish()
        assert "The disk was away." in run.results()["reason"].to_list()
    assert_frame_equal(finish(table, path), whole, check_exact=True)


def test_a_run_goes_on_with_other_blocks_and_counts_each_channel_once(table: Path, tmp_path: Path) -> None:
    path = tmp_path / "t.run"
    whole = finish(table, tmp_path / "whole.run")
    events = start(table, Plan(), path, jobs=1)
    next(events)
    next(events)
    del events
    with RunFile.open(path) as run:
        (first,) = run.done()
        moved = Span(first.first + 1, first.stop + 1)
        with thread_workers(1) as executor:
            run.store(executor.submit(score_span, open_table(table, Plan()), moved, Plan(), shipped_nulls()).result())
        assert run.channels_done() == set(range(first.first, moved.stop))
    assert_frame_equal(finish(table, path), whole, rel_tol=1e-8)
    with RunFile.open(path) as run:
        assert run.channels_done() == set(range(CHANNELS))


def spans_of(table: Path) -> list[Span]:
    return spans(open_table(table, Plan()).facts)


def test_a_given_run_file_of_another_plan_is_refused_and_left_alone(table: Path, tmp_path: Path) -> None:
    path = tmp_path / "t.run"
    finish(table, path)
    content = path.read_bytes()
    with pytest.raises(RunFileError, match="it holds another table, table content or plan"):
        next(start(table, Plan(alpha=0.01), path, jobs=1))
    assert path.read_bytes() == content


def test_a_bad_plan_is_found_before_the_table_is_looked_for(tmp_path: Path) -> None:
    for plan in (Plan(family="norml"), Plan(alpha=0.0), Plan(alpha=float("nan")), Plan(positions="x")):
        with pytest.raises(PlanError):
            next(start(tmp_path / "missing.csv", plan, None, jobs=1))


def test_nothing_is_opened_or_written_until_somebody_iterates(tmp_path: Path) -> None:
    start(tmp_path / "missing.csv", Plan(), None, jobs=1)
    assert list(tmp_path.iterdir()) == []
