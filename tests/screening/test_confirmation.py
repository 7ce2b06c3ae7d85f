"""Confirming one channel of a scored table."""

from pathlib import Path

import numpy as np
import polars as pl
import pytest
from scipy import signal

from screener.errors import ScreenerError, TableError
from screener.records import Plan, TableFacts
from screener.screening.confirmation import ConfirmationReached, confirm
from screener.tables import open_table

PLAN = Plan()


@pytest.fixture
def path(tmp_path: Path) -> Path:
    """A serial normal channel, a bent one, one of few readings."""
    rng = np.random.default_rng(3)
    serial = signal.lfilter([1.0], [1.0, -0.9], rng.normal(size=800))[200:]
    few = np.where(np.arange(600) < 2, rng.normal(size=600), np.nan)
    columns = {"serial": serial.round(3), "bent": rng.exponential(size=600), "few": few}
    pl.DataFrame(columns, nan_to_null=True).write_parquet(tmp_path / "t.parquet")
    return tmp_path / "t.parquet"


def place(facts: TableFacts, name: str) -> int:
    return [channel.name for channel in facts.channels].index(name)


def last(path: Path, name: str, samples: int = 300) -> ConfirmationReached:
    facts = open_table(path, PLAN).facts
    *_, reached = confirm(facts, PLAN, place(facts, name), samples)
    return reached


def test_a_serial_normal_channel_is_clear_and_a_bent_one_flagged(path: Path) -> None:
    serial, bent = last(path, "serial").confirmation, last(path, "bent").confirmation
    assert serial.r > serial.critical_r
    assert serial.p > 0.05
    assert bent.r < bent.critical_r
    assert (bent.as_small, bent.p) == (0, 1 / 301)
    # Independent readings scatter less: the serial channel's own value lies lower.
    assert serial.critical_r < bent.critical_r


def test_the_same_channel_is_confirmed_the_same_again_and_progress_ends_at_what_was_wanted(path: Path) -> None:
    facts = open_table(path, PLAN).facts
    steps = list(confirm(facts, PLAN, 0, 250))
    assert [step.made for step in steps] == [100, 200, 250]
    assert steps[-1] == last(path, "serial", 250)


def test_it_stops_after_the_batch_in_hand(path: Path) -> None:
    facts = open_table(path, PLAN).facts
    assert len(list(confirm(facts, PLAN, 0, 100_000, lambda: True))) <= 1


def test_a_table_that_has_changed_or_gone_is_refused(path: Path) -> None:
    facts = open_table(path, PLAN).facts
    pl.read_parquet(path).head(500).write_parquet(path)
    with pytest.raises(TableError, match=r"has changed since it was scored\. Score it again\."):
        next(confirm(facts, PLAN, 0, 100))
    path.unlink()
    with pytest.raises(TableError, match="no such file"):
        next(confirm(facts, PLAN, 0, 100))


def test_a_channel_that_is_not_scored_is_refused_with_its_reason(path: Path) -> None:
    facts = open_table(path, PLAN).facts
    with pytest.raises(ScreenerError, match=r"Couldn't confirm channel 'few': it is not scored \(too few readings"):
        next(confirm(facts, PLAN, place(facts, "few"), 100))
