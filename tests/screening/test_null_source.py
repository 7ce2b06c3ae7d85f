"""Null tables for other rules of plotting positions: simulated when needed, kept, and never believed when damaged."""

from collections.abc import Generator
from pathlib import Path

import numpy as np
import pytest

from screener.errors import PlanError
from screener.records import NullsPrepared
from screener.screening.null_source import held_nulls, null_folder, nulls_for
from screener.stats.families import family_named
from screener.stats.null.nulls import Nulls
from screener.stats.null.packing import NULL_VERSION, shipped_nulls

SHARE = 0.02


@pytest.fixture(autouse=True)
def own_cache(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path))


def outcome(preparing: Generator[NullsPrepared, None, Nulls | None]) -> tuple[list[NullsPrepared], Nulls | None]:
    events = []
    while True:
        try:
            events.append(next(preparing))
        except StopIteration as end:
            return events, end.value


def critical(nulls: Nulls | None, n: int) -> float:
    assert nulls is not None
    rows, _ = nulls.rows(family_named("normal"), np.array([n]), np.full((1, 2), np.nan))
    return float(rows.critical(0.05)[0])


def test_the_shipped_rule_needs_no_preparation() -> None:
    events, nulls = outcome(nulls_for("filliben", 1000, 1))
    assert events == []
    assert nulls is shipped_nulls()


def test_another_rule_is_simulated_once_and_kept() -> None:
    events, nulls = outcome(nulls_for("blom", 6, 2, share=SHARE))
    assert events[-1].work_done == pytest.approx(1.0)
    assert [event.work_done for event in events] == sorted(event.work_done for event in events)
    # Looney & Gulledge 1985, table 2: .889 at n = 6 and 5 % (blom); 8,000 samples here.
    assert critical(nulls, 6) == pytest.approx(0.889, abs=0.004)
    again, kept = outcome(nulls_for("BLOM", 6, 2, share=SHARE))
    assert again == []
    assert critical(kept, 6) == critical(nulls, 6)


def test_a_damaged_part_is_simulated_again() -> None:
    _, nulls = outcome(nulls_for("0.3", 6, 1, share=SHARE))
    parts = sorted((null_folder() / "parts").iterdir())
    parts[0].write_bytes(parts[0].read_bytes()[:100])
    parts[1].write_bytes(b"")
    parts[2].unlink()
    events, again = outcome(nulls_for("0.3", 6, 1, share=SHARE))
    assert len(events) == 3
    assert critical(again, 6) == critical(nulls, 6)


def test_a_cancelled_preparation_gives_nothing_and_goes_on_later() -> None:
    events, nulls = outcome(nulls_for("hazen", 6, 1, lambda: True, share=SHARE))
    assert len(events) == 1
    assert nulls is None
    later, _ = outcome(nulls_for("hazen", 6, 1, share=SHARE))
    assert 0 < len(later) < 30


def test_a_damaged_full_table_is_not_believed(tmp_path: Path) -> None:
    (tmp_path / "screener" / "nulls").mkdir(parents=True)
    (tmp_path / "screener" / "nulls" / f"blom-version{NULL_VERSION}.npz").write_bytes(b"PK\x03\x04 rubbish")
    assert held_nulls("blom") is None


def test_an_unknown_rule_is_refused() -> None:
    with pytest.raises(PlanError, match="no plotting positions"):
        outcome(nulls_for("bloom", 6, 1))
